//! Typed reads: plain structs for screens and reports, no SQL outside the store.

mod child;
mod day;
mod find;
mod generic;
mod referral;
mod report;
mod signed;
mod visit;

use rusqlite::Connection;

use super::cell::Value;
use super::error::{Error, Result};

pub use child::{ChildHistory, ChildNow, Corrected};
pub use day::{DayChild, DayCount};
pub use find::IndexRow;
pub use generic::{Conflict, Recorded};
pub use referral::{ExamRecord, ReferralRecord};
pub use report::{ReportRow, TermCounts, UrgentOpen};
pub use signed::SignedVisit;
pub use visit::{ReadingNow, VisitNow, VisitRecord};

/// The typed reads of a store, or of a transaction being written.
#[derive(Debug, Clone, Copy)]
pub struct Reads<'a> {
    conn: &'a Connection,
}

impl<'a> Reads<'a> {
    pub(super) fn new(conn: &'a Connection) -> Reads<'a> {
        Reads { conn }
    }
}

/// Takes the columns of a result one after another.
struct Columns<'r, 's> {
    row: &'r rusqlite::Row<'s>,
    at: usize,
    of: &'static str,
}

impl<'r, 's> Columns<'r, 's> {
    fn of(row: &'r rusqlite::Row<'s>, of: &'static str) -> Self {
        Columns { row, at: 0, of }
    }

    fn take<T: Value>(&mut self) -> Result<T> {
        let at = self.at;
        self.at += 1;
        T::from_stored(self.row.get_ref(at)?).ok_or_else(|| {
            let column = self.row.as_ref().column_name(at).unwrap_or("?").to_owned();
            Error::damaged(
                self.of,
                None,
                &format!("{column} is not a value of its kind"),
            )
        })
    }
}
