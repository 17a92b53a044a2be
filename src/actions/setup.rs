//! What a programme sets up once: the store, its people, places, terms and charts.

use std::path::Path;

use chrono::NaiveDate;

use super::desk::{Desk, DeskOptions};
use super::error::{ActionError, Result};
use crate::domain::acuity::{Line, Notation, parse_acuity};
use crate::store::row::{Chart, Screener, Site, Term};
use crate::store::{Kdf, New, Put, RecoveryKey, Secret, Store, new_id};

/// What a new store is made with.
#[derive(Debug)]
pub struct NewStore {
    /// Name of the programme.
    pub programme: String,
    /// Name of this station.
    pub station: String,
    /// What a bare acuity is the denominator of.
    pub notation: Notation,
    /// What opens it.
    pub secret: Secret,
    /// How dear a guess is made.
    pub kdf: Kdf,
}

/// Makes a store and sits down at it. The recovery key is returned once and kept nowhere.
pub fn init(
    dir: &Path,
    new: NewStore,
    options: &DeskOptions,
) -> Result<(Desk, Option<RecoveryKey>)> {
    let notation = if new.notation == Notation::Metres {
        "metres"
    } else {
        "feet"
    };
    let (store, recovery) = Store::create(
        dir,
        New {
            programme: named("programme", &new.programme)?,
            programme_id: None,
            station: named("station", &new.station)?,
            notation: notation.to_owned(),
            secret: new.secret,
            kdf: new.kdf,
        },
    )?;
    Ok((Desk::around(store, options)?, recovery))
}

/// A chart as it is described on the command line.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct NewChart {
    /// Its name.
    pub name: String,
    /// Whether it shows letters (else symbols).
    pub letters: bool,
    /// Whether its lines are crowded.
    pub crowded: bool,
    /// Optotypes on a line.
    pub letters_per_line: u8,
    /// The distance it is made for, in millimetres.
    pub distance_mm: u32,
    /// Its lines, as written, from the largest.
    pub lines: Vec<String>,
}

impl Desk {
    /// Adds or renames a site.
    pub fn add_site(&mut self, code: &str, name: &str) -> Result<Put> {
        let row = Site {
            id: new_id(),
            code: named("site code", code)?,
            name: named("site", name)?,
        };
        let author = self.author();
        Ok(self
            .store
            .append(&author, |tx| tx.put(row, "site renamed"))?)
    }

    /// Returns the sites as (code, name).
    pub fn sites(&self) -> Result<Vec<(String, String)>> {
        Ok(self
            .read()
            .sites()?
            .into_iter()
            .map(|s| (s.code, s.name))
            .collect())
    }

    /// Adds a term, or changes its dates.
    pub fn add_term(
        &mut self,
        code: &str,
        title: &str,
        starts_on: NaiveDate,
        ends_on: NaiveDate,
    ) -> Result<Put> {
        if ends_on < starts_on {
            return Err(ActionError::bad(format!(
                "the term ends ({ends_on}) before it starts ({starts_on})"
            )));
        }
        if let Some(other) = self
            .read()
            .terms()?
            .iter()
            .find(|t| t.code != code && t.starts_on <= ends_on && starts_on <= t.ends_on)
        {
            return Err(ActionError::bad(format!(
                "the term overlaps {} ({} to {})",
                other.code, other.starts_on, other.ends_on
            )));
        }
        let row = Term {
            id: new_id(),
            code: named("term", code)?,
            title: named("title", title)?,
            starts_on,
            ends_on,
        };
        let author = self.author();
        Ok(self
            .store
            .append(&author, |tx| tx.put(row, "term changed"))?)
    }

    /// Adds a screener and lets them record.
    pub fn add_screener(&mut self, initials: &str, name: &str) -> Result<()> {
        let name = named("screener", name)?;
        let initials = named("initials", initials)?;
        if self.read().screeners()?.iter().any(|s| s.name == name) {
            return Err(
                ActionError::bad(format!("there is a screener {name:?} already"))
                    .hint("write the name so that people can be told apart"),
            );
        }
        let id = new_id();
        let row = Screener {
            id,
            screener_id: id,
            initials,
            name,
        };
        let author = self.author();
        self.store.append(&author, |tx| tx.add(&row))?;
        self.screener = Some(row);
        Ok(())
    }

    /// Adds a chart.
    pub fn add_chart(&mut self, chart: &NewChart) -> Result<()> {
        let mut lines: Vec<Line> = Vec::new();
        for text in &chart.lines {
            let line = parse_acuity(text, &crate::domain::acuity::AcuityContext::default())
                .ok()
                .and_then(|u| u.value.acuity())
                .and_then(crate::domain::acuity::Acuity::line)
                .ok_or_else(|| {
                    ActionError::bad(format!("{text:?} is not a line such as 20/40 or 6/12"))
                })?;
            lines.push(line);
        }
        lines.sort_by_key(|l| std::cmp::Reverse(l.step()));
        if lines.is_empty() {
            return Err(ActionError::bad(
                "a chart has at least one line, such as --lines 20/200,20/100,20/50,20/40,20/32,20/25,20/20",
            ));
        }
        let id = new_id();
        let row = Chart {
            id,
            chart_id: id,
            name: named("chart", &chart.name)?,
            optotypes: if chart.letters { "letters" } else { "symbols" }.to_owned(),
            crowded: chart.crowded,
            letters_per_line: i64::from(chart.letters_per_line),
            distance_mm: i64::from(chart.distance_mm),
            lines: lines
                .iter()
                .map(ToString::to_string)
                .collect::<Vec<_>>()
                .join(" "),
        };
        let author = self.author();
        Ok(self.store.append(&author, |tx| tx.add(&row))?)
    }

    /// Returns the term that a date lies in.
    pub(super) fn term_on(&self, date: NaiveDate) -> Result<Term> {
        self.read()
            .terms()?
            .into_iter()
            .find(|t| t.starts_on <= date && date <= t.ends_on)
            .ok_or_else(|| {
                ActionError::bad(format!("no term of this store includes {date}"))
                    .hint("add it: twoline term add CODE --from YYYY-MM-DD --to YYYY-MM-DD")
            })
    }

    /// Returns a term by its code.
    pub(super) fn term(&self, code: &str) -> Result<Term> {
        self.read()
            .terms()?
            .into_iter()
            .find(|t| t.code == code)
            .ok_or_else(|| {
                ActionError::bad(format!("this store has no term {code:?}"))
                    .hint("add it: twoline term add CODE --from YYYY-MM-DD --to YYYY-MM-DD")
            })
    }
}

/// Returns a name without spaces around it; it must have something to show.
pub(super) fn named(what: &str, text: &str) -> Result<String> {
    let text = text.trim();
    if text.is_empty() || text.chars().any(crate::domain::text::is_unsafe) {
        return Err(ActionError::bad(format!(
            "the {what} needs a name of ordinary characters"
        )));
    }
    Ok(text.to_owned())
}
