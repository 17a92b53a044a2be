//! `FIELD=VALUE` arguments, and the screening day they are for.

use chrono::NaiveDate;

use super::Failure;
use super::output::clean;
use crate::actions::{DayInfo, Desk};
use crate::domain::field::Field;
use crate::domain::text::{nearest, one_of, shown};

/// Reads `FIELD=VALUE` arguments; an empty value takes a field back.
pub(super) fn fields(values: &[String]) -> Result<Vec<(Field, String)>, Failure> {
    let known = Field::ALL.iter().map(|f| f.word());
    assigned(values, "distance_right=20/40", Field::from_word, known)
}

/// Reads `NAME=VALUE` arguments, each name once.
pub(super) fn assigned<T: PartialEq>(
    values: &[String],
    example: &str,
    from_word: fn(&str) -> Option<T>,
    known: impl Iterator<Item = &'static str> + Clone,
) -> Result<Vec<(T, String)>, Failure> {
    let mut out: Vec<(T, String)> = Vec::new();
    for text in values {
        let Some((name, value)) = text.split_once('=') else {
            return Err(Failure::bad_input(format!(
                "found {:?}, expected FIELD=VALUE",
                shown(text, 60)
            ))
            .hint(format!("for example {example}")));
        };
        let name = name.trim();
        let Some(field) = from_word(name) else {
            let failure = Failure::bad_input(format!("there is no field {:?}", shown(name, 60)));
            return Err(failure.hint(match nearest(name, known.clone()) {
                Some(near) => format!("did you mean {near}?"),
                None => format!("known: {}", known.collect::<Vec<_>>().join(", ")),
            }));
        };
        if out.iter().any(|(f, _)| *f == field) {
            return Err(Failure::bad_input(format!("{name} is given twice")));
        }
        out.push((field, value.trim().to_owned()));
    }
    Ok(out)
}

/// Reads a word of a code list, for an argument.
pub(super) fn code<T>(
    text: &str,
    from_word: fn(&str) -> Option<T>,
    words: fn() -> String,
) -> Result<T, String> {
    from_word(text).ok_or_else(|| format!("expected {}", one_of(&words(), text)))
}

/// Which screening day is meant.
#[derive(Debug, Clone, Default, clap::Args)]
pub(super) struct WhichDay {
    /// Site code of the screening day; needed only where more than one is open
    #[arg(long, value_name = "CODE")]
    pub(super) site: Option<String>,
    /// Date of the screening day; today without it
    #[arg(long, value_name = "YYYY-MM-DD")]
    pub(super) date: Option<NaiveDate>,
    /// Protocol of the screening day; needed only where more than one is open
    #[arg(long, value_name = "ID")]
    pub(super) protocol: Option<String>,
}

impl WhichDay {
    /// Returns the one open day that is meant.
    ///
    /// # Errors
    /// Exit code 2 when none or more than one is.
    pub(super) fn of(&self, desk: &Desk) -> Result<DayInfo, Failure> {
        let date = self.date.unwrap_or(desk.today());
        let matches = |wanted: &Option<String>, is: &str| wanted.as_ref().is_none_or(|w| w == is);
        let mut meant: Vec<DayInfo> = desk
            .days()?
            .into_iter()
            .filter(|day| {
                day.date == date
                    && matches(&self.site, &day.site)
                    && matches(&self.protocol, &day.protocol)
            })
            .collect();
        match (meant.pop(), meant.len()) {
            (Some(day), 0) => Ok(day),
            (Some(last), _) => {
                meant.push(last);
                let names: Vec<String> = meant.iter().map(title).collect();
                Err(Failure::bad_input(format!(
                    "more than one screening day is open: {}",
                    names.join("; ")
                ))
                .hint("say which with --site and --protocol"))
            }
            (None, _) => Err(Failure::bad_input(format!(
                "no such screening day is open on {date}"
            ))
            .hint(format!(
                "twoline day open --site {} --date {date} --protocol {}",
                clean(self.site.as_deref().unwrap_or("CODE")),
                clean(self.protocol.as_deref().unwrap_or("ID"))
            ))),
        }
    }
}

/// Returns a day in one line.
pub(super) fn title(day: &DayInfo) -> String {
    clean(&format!(
        "{} ({}), {}, {}, acuity by {}",
        day.site_name,
        day.site,
        day.date,
        day.protocol,
        day.method.title()
    ))
}
