//! The worklist of referrals: one row per child, in the order in which they should be seen to.

use std::io::{self, Write};

use chrono::NaiveDate;

use super::csv::{Form, Kind, Table};
use super::day::StoreState;
use crate::domain::age::{AgeMonths, Grade};
use crate::domain::outcome::Urgency;

/// One referred child.
#[derive(Debug, Clone, PartialEq, Eq)]
#[allow(missing_docs)]
pub struct ReferralRow {
    /// Place in the list, from 1.
    pub place: usize,
    pub child_id: String,
    pub family_name: String,
    pub given_name: String,
    pub dob: Option<NaiveDate>,
    /// Completed months on the day of the report.
    pub age: Option<AgeMonths>,
    pub site: String,
    pub grade: Option<Grade>,
    pub class: String,
    /// What referred.
    pub why: String,
    pub urgency: Option<Urgency>,
    /// The day of the referral.
    pub since: NaiveDate,
    pub days_waited: u32,
    pub act_by: Option<NaiveDate>,
    /// Where the date comes from.
    pub act_by_from: String,
    /// The clinic band in words; empty where none spoke.
    pub band: String,
    pub band_source: String,
    /// Days that the band prints.
    pub act_within_days: Option<u32>,
    /// Condition group.
    pub group: Option<u32>,
    /// Why the child stands where it stands.
    pub order_reason: String,
}

const COLUMNS: [(&str, Kind); 22] = [
    ("place", Kind::Number),
    ("child_id", Kind::Text),
    ("family_name", Kind::Text),
    ("given_name", Kind::Text),
    ("dob", Kind::Date),
    ("age_months", Kind::Number),
    ("site", Kind::Text),
    ("grade", Kind::Code),
    ("class", Kind::Text),
    ("why", Kind::Text),
    ("urgency", Kind::Code),
    ("referred_on", Kind::Date),
    ("days_waited", Kind::Number),
    ("act_by", Kind::Date),
    ("act_by_from", Kind::Text),
    ("band", Kind::Text),
    ("band_source", Kind::Text),
    ("act_within_days", Kind::Number),
    ("severity_group", Kind::Number),
    ("order_reason", Kind::Text),
    ("store_head", Kind::Code),
    ("store_entries", Kind::Number),
];

/// Writes the worklist in CSV.
///
/// # Errors
/// What the writer says.
pub fn write<W: Write>(
    out: W,
    form: Form,
    rows: impl IntoIterator<Item = ReferralRow>,
    state: &StoreState,
) -> io::Result<W> {
    fn text<T: ToString>(value: Option<T>) -> String {
        value.map(|v| v.to_string()).unwrap_or_default()
    }
    let mut table = Table::new(out, form, COLUMNS)?;
    for row in rows {
        for cell in [
            row.place.to_string(),
            row.child_id,
            row.family_name,
            row.given_name,
            text(row.dob),
            text(row.age.map(|a| a.0)),
            row.site,
            text(row.grade),
            row.class,
            row.why,
            text(row.urgency.map(Urgency::word)),
            row.since.to_string(),
            row.days_waited.to_string(),
            text(row.act_by),
            row.act_by_from,
            row.band,
            row.band_source,
            text(row.act_within_days),
            text(row.group),
            row.order_reason,
            state.head.clone(),
            state.entries.to_string(),
        ] {
            table.cell(&cell)?;
        }
        table.end_row()?;
    }
    table.finish()
}
