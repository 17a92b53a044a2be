//! The report of a screening day: one row per child.

use std::io::{self, Write};

use chrono::NaiveDate;

use super::csv::{Form, Kind, Table};
use crate::domain::age::{AgeMonths, Grade};
use crate::domain::codes::Attempt;
use crate::domain::field::Field;
use crate::domain::outcome::{OutcomeKind, RiskKind, Source, Urgency};
use crate::domain::readings::Readings;

/// One child on a screening day. An empty outcome is a child who was not signed.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct DayReportRow {
    /// The district's id.
    pub child_id: String,
    /// Family name.
    pub family_name: String,
    /// Given name.
    pub given_name: String,
    /// Birth date.
    pub dob: Option<NaiveDate>,
    /// Age on the screening day.
    pub age: Option<AgeMonths>,
    /// Site.
    pub site: String,
    /// Class.
    pub class: String,
    /// Grade.
    pub grade: Option<Grade>,
    /// The screening day.
    pub screened_on: Option<NaiveDate>,
    /// First visit or rescreen.
    pub attempt: Option<Attempt>,
    /// The values, the correction worn among them.
    pub readings: Readings,
    /// The outcome.
    pub outcome: Option<OutcomeKind>,
    /// What the outcome says of itself ("critical line; difference between the eyes not tested").
    pub qualifiers: Vec<String>,
    /// Urgency.
    pub urgency: Option<Urgency>,
    /// The date to act by.
    pub act_by: Option<NaiveDate>,
    /// The date of the rescreen or of the return with glasses.
    pub rescreen_by: Option<NaiveDate>,
    /// Amblyopia risk by kind.
    pub risks: Vec<RiskKind>,
    /// Criteria that referred.
    pub criteria: Vec<String>,
    /// Criteria that could not be answered.
    pub unknown: Vec<String>,
    /// The reasons in words.
    pub reasons: String,
    /// Rule set or protocol.
    pub rule_set: String,
    /// Its edition.
    pub edition: String,
    /// The person who recorded.
    pub screener: String,
    /// The table or laptop.
    pub station: String,
    /// When it was entered, as an ISO instant.
    pub entered_at: String,
    /// The day the child was tested.
    pub tested_on: Option<NaiveDate>,
    /// Whether it was entered later than that.
    pub entered_late: bool,
    /// What the readings of several stations say now; nothing where one signature stands.
    pub outcome_now: Option<OutcomeKind>,
    /// The fields with values that nobody has settled; they count as not known.
    pub in_conflict: Vec<Field>,
}

/// The state of the store that a report was made from.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct StoreState {
    /// The whole head in hex.
    pub head: String,
    /// The number of entries.
    pub entries: u64,
}

const BEFORE: [(&str, Kind); 10] = [
    ("child_id", Kind::Text),
    ("family_name", Kind::Text),
    ("given_name", Kind::Text),
    ("dob", Kind::Date),
    ("age_months", Kind::Number),
    ("site", Kind::Text),
    ("class", Kind::Text),
    ("grade", Kind::Code),
    ("screened_on", Kind::Date),
    ("attempt", Kind::Code),
];

const AFTER: [(&str, Kind); 20] = [
    ("outcome", Kind::Code),
    ("outcome_note", Kind::Text),
    ("urgency", Kind::Code),
    ("act_by", Kind::Date),
    ("rescreen_by", Kind::Date),
    ("amblyopia_risk", Kind::Code),
    ("criteria", Kind::Code),
    ("unknown", Kind::Code),
    ("reasons", Kind::Text),
    ("rule_set", Kind::Code),
    ("edition", Kind::Text),
    ("screener", Kind::Text),
    ("station", Kind::Text),
    ("entered_at", Kind::Date),
    ("tested_on", Kind::Date),
    ("entered_late", Kind::Code),
    ("outcome_now", Kind::Code),
    ("in_conflict", Kind::Code),
    // Always the last two, so that a report can be told from the store it came from.
    ("store_head", Kind::Code),
    ("store_entries", Kind::Number),
];

/// Returns what a column of readings holds.
pub fn field_kind(field: Field) -> Kind {
    match field {
        Field::LettersPerLine
        | Field::ChartDistanceM
        | Field::UsedDistanceM
        | Field::ChartDistanceFt
        | Field::UsedDistanceFt
        | Field::NearDistanceCm
        | Field::StereoCorrect
        | Field::StereoShown
        | Field::DeviationPd
        | Field::PlatesMissed
        | Field::PlatesShown
        | Field::SphereRight
        | Field::CylinderRight
        | Field::AxisRight
        | Field::SphereLeft
        | Field::CylinderLeft
        | Field::AxisLeft
        | Field::PupilMmRight
        | Field::PupilMmLeft
        | Field::OpacityMmRight
        | Field::OpacityMmLeft
        | Field::ReflexDistanceMmRight
        | Field::ReflexDistanceMmLeft => Kind::Number,
        Field::Note => Kind::Text,
        _ => Kind::Code,
    }
}

/// Returns the header with the type of each column.
pub fn columns() -> Vec<(&'static str, Kind)> {
    BEFORE
        .into_iter()
        .chain(Field::ALL.iter().map(|f| (f.word(), field_kind(*f))))
        .chain(AFTER)
        .collect()
}

/// Writes the report.
pub fn write<W: Write>(
    out: W,
    form: Form,
    rows: impl IntoIterator<Item = DayReportRow>,
    state: &StoreState,
) -> io::Result<W> {
    let mut table = Table::new(out, form, columns())?;
    let entries = state.entries.to_string();
    for row in rows {
        write_row(&mut table, &row, state, &entries)?;
    }
    table.finish()
}

fn write_row<W: Write>(
    table: &mut Table<W>,
    row: &DayReportRow,
    state: &StoreState,
    entries: &str,
) -> io::Result<()> {
    fn text<T: ToString>(value: Option<T>) -> String {
        value.map(|v| v.to_string()).unwrap_or_default()
    }
    fn word(value: Option<&'static str>) -> &'static str {
        value.unwrap_or_default()
    }
    table.cell(&row.child_id)?;
    table.cell(&row.family_name)?;
    table.cell(&row.given_name)?;
    table.cell(&text(row.dob))?;
    table.cell(&text(row.age.map(|a| a.0)))?;
    table.cell(&row.site)?;
    table.cell(&row.class)?;
    table.cell(&text(row.grade))?;
    table.cell(&text(row.screened_on))?;
    table.cell(word(row.attempt.map(Attempt::word)))?;
    for field in Field::ALL {
        table.cell(&row.readings.get(*field).unwrap_or_default())?;
    }
    let risks: Vec<&str> = row.risks.iter().map(|r| r.word()).collect();
    table.cell(word(row.outcome.map(OutcomeKind::word)))?;
    table.cell(&row.qualifiers.join("; "))?;
    table.cell(word(row.urgency.map(Urgency::word)))?;
    table.cell(&text(row.act_by))?;
    table.cell(&text(row.rescreen_by))?;
    table.cell(&risks.join(";"))?;
    table.cell(&row.criteria.join(";"))?;
    table.cell(&row.unknown.join(";"))?;
    table.cell(&row.reasons)?;
    table.cell(&row.rule_set)?;
    table.cell(&row.edition)?;
    table.cell(&row.screener)?;
    table.cell(&row.station)?;
    table.cell(&row.entered_at)?;
    table.cell(&text(row.tested_on))?;
    table.cell(if row.entered_late { "yes" } else { "" })?;
    let in_conflict: Vec<&str> = row.in_conflict.iter().map(|f| f.word()).collect();
    table.cell(word(row.outcome_now.map(OutcomeKind::word)))?;
    table.cell(&in_conflict.join(";"))?;
    table.cell(&state.head)?;
    table.cell(entries)?;
    table.end_row()
}

/// A rule set or protocol that a report used.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct RuleSetUsed {
    /// Its id.
    pub id: String,
    /// Its title.
    pub title: String,
    /// Its edition.
    pub edition: String,
    /// SHA-256 of its text, in hex.
    pub content_hash: String,
    /// Where its numbers come from.
    pub sources: Vec<Source>,
}

/// What stands in the text beside a report.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct About<'a> {
    /// "Day report, Quillmere North, 14 Oct 2026".
    pub title: &'a str,
    /// The state of the store, where there is one.
    pub state: Option<&'a StoreState>,
    /// The rule sets used.
    pub rule_sets: &'a [RuleSetUsed],
    /// The cautions that stand on every report.
    pub cautions: &'a [&'a str],
    /// Whether text was guarded for spreadsheets.
    pub guarded: bool,
}

/// Returns the text of `OUT.about.txt`.
pub fn about(about: &About<'_>) -> String {
    let mut out = String::new();
    let mut line = |text: &str| {
        out.push_str(text);
        out.push('\n');
    };
    line(about.title);
    line("");
    line("Cautions");
    for caution in about.cautions {
        line(&format!("- {caution}"));
    }
    line("");
    line("Rule sets used");
    for set in about.rule_sets {
        line(&format!(
            "- {} ({}, edition {})",
            set.title, set.id, set.edition
        ));
        line(&format!("  content {}", set.content_hash));
        for source in &set.sources {
            let locator = if source.locator.is_empty() {
                String::new()
            } else {
                format!(" {}", source.locator)
            };
            let basis = if source.quoted_in.is_empty() {
                source.basis.title().to_owned()
            } else {
                format!("as quoted in {}", source.quoted_in)
            };
            line(&format!("  source: {}{locator} ({basis})", source.citation));
        }
    }
    line("");
    if let Some(state) = about.state {
        line(&format!(
            "Store head {}, {} entries",
            state.head, state.entries
        ));
    }
    if about.guarded {
        line(
            "An apostrophe before = + - @ in a text column keeps a spreadsheet from running it; \
             --exact leaves it out.",
        );
    }
    out
}
