//! What finding a child by typing needs, in one query.

use chrono::NaiveDate;

use super::{Columns, Reads};
use crate::domain::age::Grade;
use crate::store::error::Result;

/// A child as it is found.
#[derive(Debug, Clone, PartialEq, Eq)]
#[allow(missing_docs)]
pub struct IndexRow {
    pub child_id: String,
    pub family_name: String,
    pub given_name: String,
    /// Folded family and given name.
    pub search: String,
    pub dob: Option<NaiveDate>,
    pub site: Option<String>,
    pub grade: Option<Grade>,
    pub class: Option<String>,
    pub guardian_phone: Option<String>,
}

impl Reads<'_> {
    /// Returns every child, by name.
    pub fn find_index(&self) -> Result<Vec<IndexRow>> {
        let mut found = self.conn.prepare_cached(
            "SELECT child_id, family_name, given_name, search, dob, site, grade, class, \
             guardian_phone FROM child_current ORDER BY search, child_id",
        )?;
        let mut rows = found.query([])?;
        let mut out = Vec::new();
        while let Some(row) = rows.next()? {
            let c = &mut Columns::of(row, "child_current");
            out.push(IndexRow {
                child_id: c.take()?,
                family_name: c.take()?,
                given_name: c.take()?,
                search: c.take()?,
                dob: c.take()?,
                site: c.take()?,
                grade: c.take()?,
                class: c.take()?,
                guardian_phone: c.take()?,
            });
        }
        Ok(out)
    }
}
