//! Age in completed months, and grades.
//!
//! A child born on the 31st completes a month on the last day of a shorter month, and one born on
//! 29 February completes a year on 28 February of a common year (the convention that python-dateutil
//! follows; the other one, 1 March, differs by a day and is not used).

use std::fmt;

use chrono::{Datelike, Months, NaiveDate};

/// Completed months on the screening day.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct AgeMonths(pub u32);

impl AgeMonths {
    /// Returns the completed months from birth to `on`, or nothing when birth is later.
    pub fn between(born: NaiveDate, on: NaiveDate) -> Option<AgeMonths> {
        if on < born {
            return None;
        }
        let months = (on.year() - born.year()) * 12 + on.month() as i32 - born.month() as i32;
        let months = u32::try_from(months).ok()?;
        // chrono clips to the end of a shorter month, which is the convention above.
        let anniversary = born.checked_add_months(Months::new(months))?;
        Some(AgeMonths(if anniversary > on {
            months.checked_sub(1)?
        } else {
            months
        }))
    }
}

impl fmt::Display for AgeMonths {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{} y {} m", self.0 / 12, self.0 % 12)
    }
}

/// A school grade: preschool, transitional kindergarten, kindergarten, 1 to 12.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Grade(u8);

impl Grade {
    /// Preschool.
    pub const PRESCHOOL: Grade = Grade(0);
    /// Transitional kindergarten.
    pub const TRANSITIONAL: Grade = Grade(1);
    /// Kindergarten.
    pub const KINDERGARTEN: Grade = Grade(2);

    /// Reads `PK`, `TK`, `KG` (also `K`) and `1`–`12` (also `01`).
    pub fn parse(text: &str) -> Option<Grade> {
        match text.trim().to_ascii_uppercase().as_str() {
            "PK" => Some(Grade::PRESCHOOL),
            "TK" => Some(Grade::TRANSITIONAL),
            "KG" | "K" => Some(Grade::KINDERGARTEN),
            digits if digits.len() <= 2 && digits.bytes().all(|b| b.is_ascii_digit()) => digits
                .parse::<u8>()
                .ok()
                .filter(|n| (1..=12).contains(n))
                .map(|n| Grade(n + 2)),
            _ => None,
        }
    }
}

impl fmt::Display for Grade {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self.0 {
            0 => f.write_str("PK"),
            1 => f.write_str("TK"),
            2 => f.write_str("KG"),
            n => write!(f, "{:02}", n - 2),
        }
    }
}

/// Returns the date so many calendar months after `from`, clipped to the end of a shorter month.
pub fn months_after(from: NaiveDate, months: u32) -> NaiveDate {
    from.checked_add_months(Months::new(months)).unwrap_or(from)
}

/// Returns the date so many calendar days after `from`.
pub fn days_after(from: NaiveDate, days: u32) -> NaiveDate {
    from.checked_add_days(chrono::Days::new(u64::from(days)))
        .unwrap_or(from)
}

/// Writes a date as people read it here: `14 Oct 2026`.
pub fn spoken(date: NaiveDate) -> String {
    date.format("%-d %b %Y").to_string()
}
