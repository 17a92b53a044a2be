//! Days on which school is held, for intervals counted in working days.

use chrono::{Datelike, Days, NaiveDate, Weekday};

use crate::domain::text::shown;

/// Longest holiday that is believed, in days: a range that is longer is a wrong year.
const LONGEST_HOLIDAY: i64 = 120;

/// The days of the week as they are written, Monday first.
const WORDS: [&str; 7] = ["mon", "tue", "wed", "thu", "fri", "sat", "sun"];

/// Days of the week on which school is held, and the days on which it is not.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct SchoolCalendar {
    held: [bool; 7],
    holidays: Vec<(NaiveDate, NaiveDate)>,
    /// Whose it is; empty where nobody said.
    of: String,
}

impl Default for SchoolCalendar {
    /// Returns Monday to Friday without any holiday.
    fn default() -> SchoolCalendar {
        SchoolCalendar {
            held: [true, true, true, true, true, false, false],
            holidays: Vec::new(),
            of: String::new(),
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
            ..SchoolCalendar::default()
        }
    }

    /// Reads the days of the week on which school is held: `mon-fri`, `sun-thu`, `mon,wed,fri`.
    ///
    /// # Errors
    /// What was found and what is expected.
    pub fn parse_days(text: &str) -> Result<Vec<Weekday>, String> {
        let wrong = || {
            format!(
                "found {:?}, expected days such as mon-fri or mon,tue,thu",
                shown(text, 60)
            )
        };
        let day = |word: &str| {
            let word = word.trim().to_lowercase();
            let found = WORDS.iter().position(|short| *short == word);
            found.ok_or_else(wrong)
        };
        let mut held = Vec::new();
        for part in text.split(',') {
            let (first, last) = part.split_once('-').unwrap_or((part, part));
            let (mut at, last) = (day(first)?, day(last)?);
            held.push(at);
            while at != last {
                at = (at + 1) % 7;
                held.push(at);
            }
        }
        Ok((0u8..7)
            .filter(|at| held.contains(&usize::from(*at)))
            .filter_map(|at| Weekday::try_from(at).ok())
            .collect())
    }

    /// Reads a day or days without school: `2026-12-25`, `2026-11-26..2026-11-27`.
    ///
    /// # Errors
    /// What was found and what is expected.
    pub fn parse_holiday(text: &str) -> Result<(NaiveDate, NaiveDate), String> {
        let wrong = |expected: &str| format!("found {:?}, expected {expected}", shown(text, 60));
        let (first, last) = text.split_once("..").unwrap_or((text, text));
        let date = |text: &str| {
            text.trim()
                .parse::<NaiveDate>()
                .map_err(|_| wrong("a date or two, such as 2026-12-25 or 2026-11-26..2026-11-27"))
        };
        let (first, last) = (date(first)?, date(last)?);
        if last < first {
            return Err(wrong("the first day before the last"));
        }
        if (last - first).num_days() >= LONGEST_HOLIDAY {
            return Err(wrong("at most 120 days: is the year right?"));
        }
        Ok((first, last))
    }

    /// Returns the holidays, first and last day of each, in order.
    pub fn holidays(&self) -> &[(NaiveDate, NaiveDate)] {
        &self.holidays
    }

    /// Says whose calendar it is.
    #[must_use]
    pub fn of(mut self, site: impl Into<String>) -> SchoolCalendar {
        self.of = site.into();
        self
    }

    /// Names the calendar: "school calendar of Quillmere East".
    pub fn name(&self) -> String {
        if self.of.is_empty() {
            "school calendar".to_owned()
        } else {
            format!("school calendar of {}", self.of)
        }
    }

    /// Takes a holiday away that was added with these days.
    #[must_use]
    pub fn without_holiday(mut self, first: NaiveDate, last: NaiveDate) -> SchoolCalendar {
        self.holidays.retain(|known| *known != (first, last));
        self
    }

    /// Adds a holiday, first and last day included, in whichever order they are given.
    #[must_use]
    pub fn with_holiday(mut self, first: NaiveDate, last: NaiveDate) -> SchoolCalendar {
        let days = (first.min(last), first.max(last));
        if !self.holidays.contains(&days) {
            self.holidays.push(days);
            self.holidays.sort_unstable();
        }
        self
    }

    /// Reads the text forms `mon,tue,wed,thu,fri` and `2026-11-26..2026-11-27;2026-12-25`.
    ///
    /// # Errors
    /// The part that is not a day of the week, a date or a range of dates, first to last.
    pub fn parse(days_held: &str, holidays: &str) -> Result<SchoolCalendar, String> {
        let parts = |text: &'static [char], all: &str| -> Vec<String> {
            all.split(text)
                .map(|part| part.trim().to_ascii_lowercase())
                .filter(|part| !part.is_empty())
                .collect()
        };
        let mut held = Vec::new();
        for part in parts(&[','], days_held) {
            let day = WORDS.iter().position(|word| *word == part);
            held.push(day.ok_or(part)?);
        }
        let mut calendar = SchoolCalendar {
            held: std::array::from_fn(|day| held.contains(&day)),
            ..SchoolCalendar::default()
        };
        for part in parts(&[';'], holidays) {
            let (first, last) = part.split_once("..").unwrap_or((&part, &part));
            let dates = (first.trim().parse(), last.trim().parse());
            match dates {
                (Ok(first), Ok(last)) if first <= last => {
                    calendar = calendar.with_holiday(first, last);
                }
                _ => return Err(part),
            }
        }
        Ok(calendar)
    }

    /// Returns the days of the week on which school is held, as [`SchoolCalendar::parse`] reads them.
    pub fn days_held_text(&self) -> String {
        let words = WORDS.iter().zip(self.held).filter(|(_, held)| *held);
        words.map(|(word, _)| *word).collect::<Vec<_>>().join(",")
    }

    /// Returns the holidays as [`SchoolCalendar::parse`] reads them, earliest first.
    pub fn holidays_text(&self) -> String {
        let mut holidays = self.holidays.clone();
        holidays.sort_unstable();
        holidays.dedup();
        let texts: Vec<String> = holidays
            .iter()
            .map(|(first, last)| {
                if first == last {
                    first.to_string()
                } else {
                    format!("{first}..{last}")
                }
            })
            .collect();
        texts.join(";")
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
    fn calendars_are_read_as_they_are_written() {
        let text = ("mon,tue,wed,thu,fri", "2026-11-26..2026-11-27;2026-12-25");
        let calendar = SchoolCalendar::parse(text.0, text.1).unwrap();
        assert_eq!(calendar.days_held_text(), text.0);
        assert_eq!(calendar.holidays_text(), text.1);
        assert!(!calendar.is_held(date("2026-11-27")) && calendar.is_held(date("2026-11-30")));
        let weeks =
            |text| SchoolCalendar::on(&SchoolCalendar::parse_days(text).unwrap()).days_held_text();
        assert_eq!(weeks("Mon-Fri"), "mon,tue,wed,thu,fri");
        assert_eq!(weeks("sun-thu"), "mon,tue,wed,thu,sun");
        assert_eq!(weeks("wed, mon"), "mon,wed");
        for wrong in ["", "monday", "mon-", "mon..fri"] {
            assert!(SchoolCalendar::parse_days(wrong).is_err(), "{wrong}");
        }
        for wrong in [
            "",
            "26 Nov",
            "2026-11-27..2026-11-26",
            "2026-11-26..2062-11-27",
        ] {
            let error = SchoolCalendar::parse_holiday(wrong).unwrap_err();
            assert!(error.contains("expected"), "{error}");
        }
        assert_eq!(
            calendar.clone().of("Quillmere East").name(),
            "school calendar of Quillmere East"
        );
        let fewer = calendar.without_holiday(date("2026-12-25"), date("2026-12-25"));
        assert_eq!(fewer.holidays_text(), "2026-11-26..2026-11-27");
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

    #[test]
    fn text_forms_are_read_and_written_alike() {
        let read = |days: &str, holidays: &str| SchoolCalendar::parse(days, holidays).unwrap();
        let calendar = read("mon,tue,wed,thu,fri", "2026-11-26..2026-11-27;2026-12-25");
        assert_eq!(
            calendar,
            SchoolCalendar::default()
                .with_holiday(date("2026-11-26"), date("2026-11-27"))
                .with_holiday(date("2026-12-25"), date("2026-12-25"))
        );
        assert_eq!(calendar.days_held_text(), "mon,tue,wed,thu,fri");
        assert_eq!(
            calendar.holidays_text(),
            "2026-11-26..2026-11-27;2026-12-25"
        );
        let loose = read(" Sun, MON ,", "; 2026-12-25 ;2026-11-26 .. 2026-11-27;");
        assert_eq!(loose.days_held_text(), "mon,sun");
        assert_eq!(loose.holidays_text(), calendar.holidays_text());
        assert_eq!(read("", "").days_held_text(), "");
        for (days, holidays, wrong) in [
            ("mon,day", "", "day"),
            ("mon", "2026-13-01", "2026-13-01"),
            ("mon", "2026-12-25..2026-12-24", "2026-12-25..2026-12-24"),
            ("mon", "2026-12-24..", "2026-12-24.."),
        ] {
            assert_eq!(SchoolCalendar::parse(days, holidays), Err(wrong.to_owned()));
        }
    }
}
