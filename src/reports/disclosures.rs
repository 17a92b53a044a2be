//! The log of disclosures: one row for each child of each file that left the programme.

use std::io::{self, Write};

use chrono::NaiveDate;

use super::csv::{Form, Kind, Table};
use super::day::StoreState;

/// One child in one file that left.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct DisclosureRow {
    /// When.
    pub disclosed_on: NaiveDate,
    /// The child's id.
    pub child_id: String,
    /// Family name.
    pub family_name: String,
    /// Given name.
    pub given_name: String,
    /// To whom.
    pub recipient: String,
    /// What for.
    pub purpose: String,
    /// What left.
    pub what: String,
    /// Name of the file, empty where it went to standard output.
    pub file: String,
    /// Who entered it, empty if unknown.
    pub by: String,
}

const COLUMNS: [(&str, Kind); 11] = [
    ("disclosed_on", Kind::Date),
    ("child_id", Kind::Text),
    ("family_name", Kind::Text),
    ("given_name", Kind::Text),
    ("recipient", Kind::Text),
    ("purpose", Kind::Text),
    ("what", Kind::Text),
    ("file", Kind::Text),
    ("disclosed_by", Kind::Text),
    ("store_head", Kind::Code),
    ("store_entries", Kind::Number),
];

/// Writes the log in CSV.
///
/// # Errors
/// What the writer says.
pub fn write<W: Write>(
    out: W,
    form: Form,
    rows: &[DisclosureRow],
    state: &StoreState,
) -> io::Result<W> {
    let mut table = Table::new(out, form, COLUMNS)?;
    let entries = state.entries.to_string();
    for row in rows {
        table.cell(&row.disclosed_on.to_string())?;
        for cell in [
            &row.child_id,
            &row.family_name,
            &row.given_name,
            &row.recipient,
            &row.purpose,
            &row.what,
            &row.file,
            &row.by,
            &state.head,
            &entries,
        ] {
            table.cell(cell)?;
        }
        table.end_row()?;
    }
    table.finish()
}
