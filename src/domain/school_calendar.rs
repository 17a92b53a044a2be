//! Days on which school is held, for intervals counted in working days.

use chrono::{Datelike, Days, NaiveDate, Weekday};

/// Days of the week on which school is held, and the days on which it is not.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct SchoolCalendar {
    held: [bool; 7],
    holidays: Vec<(NaiveDate, NaiveDate)>,
}

impl Default for SchoolCalendar {
    /// Returns Monday to Friday without any holiday.
    fn default() -> SchoolCalendar {
        SchoolCalendar {
            held: [true, true, true, true, true, false, false],
            holidays: Vec::new(),
        }
    }
}

impl SchoolCalendar {
    /// Returns a calendar of the days of the week on which school is held.
    pub fn on(days: &[Weekday]) -> SchoolCalendar {
        let mut held = [false; 7];
        for day in days {
            held[day.num_days_from_monday() as usize] = true;
        }
        SchoolCalendar {
            held,
            holidays: Vec::new(),
        }
    }

    /// Adds a holiday, first and last day included, in whichever order they are given.
    #[must_use]
    pub fn with_holiday(mut self, first: NaiveDate, last: NaiveDate) -> SchoolCalendar {
        self.holidays.push((first.min(last), first.max(last)));
        self
    }

    /// Says whether school is held on a day.
    pub fn is_held(&self, day: NaiveDate) -> bool {
        self.held[day.weekday().num_days_from_monday() as usize]
            && !self
                .holidays
                .iter()
                .any(|(first, last)| (*first..=*last).contains(&day))
    }

    /// Returns the date so many school days after `from`, which itself does not count; nothing
    /// when no such day comes within ten years of searching.
    pub fn days_after(&self, from: NaiveDate, days: u32) -> Option<NaiveDate> {
        const TEN_YEARS: u32 = 3_653;
        let mut day = from;
        let mut left = days;
        let mut searched = 0;
        while left > 0 {
            day = day.checked_add_days(Days::new(1))?;
            searched += 1;
            if self.is_held(day) {
                left -= 1;
                searched = 0;
            }
            if searched > TEN_YEARS {
                return None;
            }
        }
        Some(day)
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    fn date(text: &str) -> NaiveDate {
        text.parse().unwrap()
    }

    /// 14 October 2026 is a Wednesday.
    #[test]
    fn weekends_and_holidays_do_not_count() {
        let plain = SchoolCalendar::default();
        let after = |c: &SchoolCalendar, n| c.days_after(date("2026-10-14"), n);
        assert_eq!(after(&plain, 0), Some(date("2026-10-14")));
        assert_eq!(after(&plain, 2), Some(date("2026-10-16")));
        assert_eq!(after(&plain, 3), Some(date("2026-10-19")));
        assert_eq!(after(&plain, 30), Some(date("2026-11-25")));
        let autumn = plain
            .clone()
            .with_holiday(date("2026-10-30"), date("2026-10-26"));
        assert_eq!(after(&autumn, 7), Some(date("2026-10-23")));
        assert_eq!(after(&autumn, 8), Some(date("2026-11-02")));
        assert_eq!(after(&autumn, 30), Some(date("2026-12-02")));
    }

    #[test]
    fn other_weeks_and_no_school_at_all() {
        let sunday_to_thursday = SchoolCalendar::on(&[
            Weekday::Sun,
            Weekday::Mon,
            Weekday::Tue,
            Weekday::Wed,
            Weekday::Thu,
        ]);
        assert_eq!(
            sunday_to_thursday.days_after(date("2026-10-14"), 2),
            Some(date("2026-10-18"))
        );
        assert_eq!(
            SchoolCalendar::on(&[]).days_after(date("2026-10-14"), 1),
            None
        );
    }
}
