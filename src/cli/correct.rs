//! `twoline correct`: a new entry that supersedes an old one.

use clap::Args;
use uuid::Uuid;

use super::output::{clean, print_clean, print_lines};
use super::record::signed_lines;
use super::values::fields;
use super::{Failure, Global, open};
use crate::actions::Desk;

/// Correct values of a signed visit; the old ones stay in the history
///
/// ENTRY is the id of a visit, as record and child show print it, or the id of a child: then the
/// visit of today is meant, else the latest one.
#[derive(Debug, Args)]
pub(super) struct Correct {
    /// Id of a visit, or of a child
    entry: String,
    /// New values, such as `distance_right=20/40`; an empty value takes one back
    #[arg(value_name = "FIELD=VALUE", required = true)]
    values: Vec<String>,
    /// Why
    #[arg(long, value_name = "TEXT")]
    reason: String,
}

impl Correct {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        let changes = fields(&self.values)?;
        let mut desk = open::to_sign(global)?;
        let visit = visit_of(&desk, &self.entry)?;
        let before = desk.head()?;
        let signed = desk.correct(visit, &changes, &self.reason)?;
        if desk.head()? == before {
            return print_lines(&[
                "the same values are recorded already; no entry was made".to_owned()
            ]);
        }
        print_clean(&signed_lines(&desk, &signed)?)
    }
}

/// Returns the visit that an entry id means.
fn visit_of(desk: &Desk, entry: &str) -> Result<Uuid, Failure> {
    let history = desk.history(entry)?;
    if let Some(history) = history {
        let today = desk.today();
        // Newest first: a visit of a later day than --today is not meant while there is an earlier.
        let latest = history.visits.iter().find(|v| v.date <= today);
        return latest
            .or(history.visits.first())
            .map(|visit| visit.id)
            .ok_or_else(|| {
                Failure::bad_input(format!("{} has no signed visit", clean(entry)))
                    .hint("twoline record CHILD FIELD=VALUE --sign")
            });
    }
    Uuid::try_parse(entry).map_err(|_| {
        Failure::bad_input(format!("{:?} is neither a visit nor a child", clean(entry)))
            .hint("twoline child find TEXT, then twoline child show ID")
    })
}
