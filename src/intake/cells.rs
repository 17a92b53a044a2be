//! Single cells: dates, codes, and text without surprises.

use chrono::{Datelike, NaiveDate};

use crate::domain::text::{is_unsafe, nearest};

/// What a cell is allowed to hold.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Kind {
    /// A code, a number, a date: no invisible character at all.
    Code,
    /// An id: no invisible character, since two that look alike are two children, and nothing that a
    /// spreadsheet would run.
    Id,
    /// A name: no control character, and nothing that a spreadsheet would run.
    Name,
    /// One line of text: no control character.
    Line,
    /// Text that may hold line breaks and tabs.
    Note,
}

/// Says what must not be in a cell of this kind, as what was expected instead.
pub fn forbidden(kind: Kind, text: &str) -> Option<String> {
    // Most cells are plain: one pass over bytes decides.
    if !matches!(kind, Kind::Name | Kind::Id) && text.bytes().all(|b| matches!(b, 0x20..=0x7E)) {
        return None;
    }
    let bad = text.char_indices().find(|(i, c)| match kind {
        Kind::Code | Kind::Id => is_unsafe(*c) || *c == '\u{AD}',
        Kind::Name | Kind::Line => c.is_control(),
        // A carriage return alone would let the end of a line overwrite its beginning.
        Kind::Note if *c == '\r' => !text[i + 1..].starts_with('\n'),
        Kind::Note => c.is_control() && !matches!(c, '\n' | '\t'),
    });
    if let Some((_, c)) = bad {
        return Some(format!(
            "text without {} (U+{:04X})",
            if c.is_control() {
                "control characters"
            } else {
                "invisible characters"
            },
            c as u32
        ));
    }
    (matches!(kind, Kind::Name | Kind::Id) && crate::domain::formula::would_run(text))
        .then(|| "text that a spreadsheet does not run: it may not begin with = + - @".to_owned())
}

/// Why a text is not a date.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum NotADate {
    /// A date in another order, named.
    Order(&'static str),
    /// Anything else, with what was expected.
    Expected(String),
}

impl NotADate {
    /// Returns what was expected.
    pub fn expected(&self) -> String {
        match self {
            NotADate::Order(order) => {
                format!("a date as YYYY-MM-DD, such as 2019-03-31; this one seems to be {order}")
            }
            NotADate::Expected(expected) => expected.clone(),
        }
    }
}

/// Reads an ISO date; another order is recognised, not taken.
pub fn date(text: &str) -> Result<NaiveDate, NotADate> {
    let parts: Vec<&str> = text.split(['-', '/', '.']).map(str::trim).collect();
    let digits = |s: &str| !s.is_empty() && s.bytes().all(|b| b.is_ascii_digit());
    if let [a, b, c] = parts[..]
        && [a, b, c].into_iter().all(digits)
    {
        if (a.len(), b.len(), c.len()) == (4, 2, 2) && text.split('-').count() == 3 {
            return exact(a, b, c);
        }
        if a.len() <= 2 && b.len() <= 2 && matches!(c.len(), 2 | 4) {
            let (first, second) = (a.parse().unwrap_or(0_u32), b.parse().unwrap_or(0_u32));
            return Err(NotADate::Order(match (first > 12, second > 12) {
                (true, _) => "day, month, year",
                (_, true) => "month, day, year",
                _ => "day, month, year or month, day, year",
            }));
        }
        if a.len() == 4 {
            return Err(NotADate::Order(
                "year, month, day without the hyphens or zeros",
            ));
        }
    }
    if digits(text) && text.len() == 8 {
        return Err(NotADate::Order(
            "year, month, day without the hyphens or zeros",
        ));
    }
    if digits(text) && text.len() == 5 {
        return Err(NotADate::Order("a spreadsheet's own day number"));
    }
    Err(NotADate::Expected(
        "a date as YYYY-MM-DD, such as 2019-03-31".into(),
    ))
}

fn exact(year: &str, month: &str, day: &str) -> Result<NaiveDate, NotADate> {
    let number = |s: &str| s.parse::<u32>().unwrap_or(0);
    let (y, m, d) = (number(year) as i32, number(month), number(day));
    if y < 1900 {
        return Err(NotADate::Expected("a year from 1900".into()));
    }
    if let Some(date) = NaiveDate::from_ymd_opt(y, m, d) {
        return Ok(date);
    }
    let Some(first) = NaiveDate::from_ymd_opt(y, m, 1) else {
        return Err(NotADate::Expected(
            "a date that exists: the month is 01 to 12".into(),
        ));
    };
    Err(NotADate::Expected(format!(
        "a date that exists: {} has {} days",
        first.format("%B %Y"),
        days_in_month(first)
    )))
}

fn days_in_month(first: NaiveDate) -> u32 {
    (28..=31)
        .rev()
        .find(|d| first.with_day(*d).is_some())
        .unwrap_or(28)
}

/// Returns "one of …", with the nearest word where one is near.
pub fn one_of(words: &str, written: &str) -> String {
    match nearest(&written.to_lowercase(), words.split(", ")) {
        Some(word) => format!("one of {words} (did you mean {word}?)"),
        None => format!("one of {words}"),
    }
}
