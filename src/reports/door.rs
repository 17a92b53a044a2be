//! Who is eligible today: a table, and a page that prints.

use std::fmt::Write as _;
use std::io::{self, Write};

use chrono::NaiveDate;

use super::csv::{Form, Kind, Table};
use super::day::StoreState;
use super::html::{esc, named, page};
use crate::domain::age::{AgeMonths, Grade, spoken};

/// One child at the door.
#[derive(Debug, Clone, PartialEq, Eq)]
#[allow(missing_docs)]
pub struct DoorRow {
    /// Whether the child is screened today.
    pub today: bool,
    /// How the child stands, in words.
    pub status: &'static str,
    pub due_on: Option<NaiveDate>,
    pub overdue_days: Option<i64>,
    pub child_id: String,
    pub family_name: String,
    pub given_name: String,
    pub dob: Option<NaiveDate>,
    pub age: Option<AgeMonths>,
    pub grade: Option<Grade>,
    pub class: String,
    pub remarks: String,
}

const COLUMNS: [(&str, Kind); 14] = [
    ("today", Kind::Code),
    ("status", Kind::Code),
    ("due_on", Kind::Date),
    ("overdue_days", Kind::Number),
    ("child_id", Kind::Text),
    ("family_name", Kind::Text),
    ("given_name", Kind::Text),
    ("dob", Kind::Date),
    ("age_months", Kind::Number),
    ("grade", Kind::Code),
    ("class", Kind::Text),
    ("remarks", Kind::Text),
    ("store_head", Kind::Code),
    ("store_entries", Kind::Number),
];

fn text<T: ToString>(value: Option<T>) -> String {
    value.map(|v| v.to_string()).unwrap_or_default()
}

/// Writes the list in CSV.
///
/// # Errors
/// What the writer says.
pub fn write<W: Write>(out: W, form: Form, rows: &[DoorRow], state: &StoreState) -> io::Result<W> {
    let mut table = Table::new(out, form, COLUMNS)?;
    for row in rows {
        for cell in [
            if row.today { "yes" } else { "no" },
            row.status,
            &text(row.due_on),
            &text(row.overdue_days),
            &row.child_id,
            &row.family_name,
            &row.given_name,
            &text(row.dob),
            &text(row.age.map(|a| a.0)),
            &text(row.grade),
            &row.class,
            &row.remarks,
            &state.head,
            &state.entries.to_string(),
        ] {
            table.cell(cell)?;
        }
        table.end_row()?;
    }
    table.finish()
}

/// Returns the list as a page that prints: a count of each state, then who is screened today, then
/// who is not and why.
pub fn html(title: &str, about: &str, rows: &[DoorRow], cautions: &[&str]) -> String {
    let today = rows.iter().filter(|r| r.today).count();
    let mut body = format!(
        "<h1>{}</h1>\n<p>{}</p>\n<p><b>{today}</b> of {} are screened today.</p>\n",
        esc(title),
        esc(about),
        rows.len()
    );
    let mut from = 0;
    while from < rows.len() {
        let status = rows[from].status;
        let to = from
            + rows[from..]
                .iter()
                .take_while(|r| r.status == status)
                .count();
        let _ = write!(
            body,
            "<h2>{}: {}</h2>\n<table><thead><tr><th>class</th><th>child</th><th>born</th>\
             <th>id</th><th>to know</th></tr></thead><tbody>\n",
            esc(status),
            to - from
        );
        for row in &rows[from..to] {
            let _ = writeln!(
                body,
                "<tr><td>{}</td><td>{}</td><td>{}</td><td>{}</td><td>{}</td></tr>",
                esc(&row.class),
                named(&row.family_name, &row.given_name),
                row.dob.map_or_else(|| "unknown".to_owned(), spoken),
                esc(&row.child_id),
                esc(&row.remarks)
            );
        }
        body.push_str("</tbody></table>\n");
        from = to;
    }
    page(title, "", &body, cautions)
}
