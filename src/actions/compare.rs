//! Two rule sets on the same children: of a results file, or of a term.

mod words;

use std::collections::HashMap;
use std::io::{self, Write};

use super::days::{day_child, key_of};
use super::desk::Desk;
use super::error::Result;
use super::judging::completed;
use super::rescreen::carried_over;
use super::visit_rows::{judged, tries_of};
use crate::domain::codes::Attempt;
use crate::intake::results::{Options, ResultRow, ResultsReader};
use crate::intake::{InputFile, Place, Problem, Problems};
use crate::reports::csv::{Form, Kind, Table};
use crate::store::read::DayChild as StoredChild;

pub use crate::rules::compare::{Comparison, Counts, Flip, Movable, Side, Subject, Tally, Verdict};
pub use words::{report, share, step_lines};

/// The column that says where a child was seen, beside those of a results file.
const SITE: &str = "site";

/// Reads the children of a results file, each as last seen in it; a column `site` may stand beside
/// those that `judge` takes.
///
/// # Errors
/// Everything that is wrong with the file.
pub fn subjects_of_file(input: &InputFile) -> std::result::Result<Vec<Subject>, Problems> {
    let options = Options {
        takes_age: true,
        takes_repeats: true,
        pass_through: true,
        ..Options::default()
    };
    let mut reader = ResultsReader::open(&input.name, &input.bytes, options, None)?;
    let mut problems = Problems::default();
    let mut site = None;
    for (i, (header, column)) in reader
        .sheet()
        .headers()
        .iter()
        .zip(reader.columns())
        .enumerate()
    {
        match column {
            Some(_) => {}
            None if header == SITE => site = Some(i),
            None => problems.push(
                Problem::of_file(
                    &input.name,
                    "an unknown column",
                    "a column of a results file, or site",
                )
                .at(Place { row: 1, line: 1 })
                .in_column(header)
                .cure("take the column out, or mend its name"),
            ),
        }
    }
    let mut latest: HashMap<String, usize> = HashMap::new();
    let mut subjects: Vec<Subject> = Vec::new();
    let mut row = ResultRow::default();
    while let Some(wrong) = reader.next(&mut row)? {
        if !wrong.is_empty() {
            for problem in wrong {
                problems.push(problem);
            }
            continue;
        }
        let site = site.and_then(|i| reader.record().get(i)).unwrap_or("");
        keep(&mut subjects, &mut latest, subject_of(&row, site.trim()));
    }
    problems.or(subjects)
}

fn subject_of(row: &ResultRow, site: &str) -> Subject {
    Subject {
        child_id: row.child_id.clone(),
        name: String::new(),
        site: site.to_owned(),
        age: row.age,
        grade: row.grade,
        on: row.screened_on,
        attempt: row.attempt.unwrap_or(Attempt::First),
        method: None,
        consent: None,
        under_care: false,
        readings: row.readings.clone(),
    }
}

/// Keeps each child once, as last seen; a row without an id is a child of its own.
fn keep(subjects: &mut Vec<Subject>, latest: &mut HashMap<String, usize>, subject: Subject) {
    if subject.child_id.is_empty() {
        subjects.push(subject);
        return;
    }
    let Some(&at) = latest.get(&subject.child_id) else {
        latest.insert(subject.child_id.clone(), subjects.len());
        subjects.push(subject);
        return;
    };
    let key = |s: &Subject| (s.on, s.attempt);
    if key(&subjects[at]) <= key(&subject) {
        subjects[at] = subject;
    }
}

impl Desk {
    /// Returns the children with a signed visit in a term (else the present one), each as last
    /// seen, with the term's code.
    pub fn subjects_of_term(&self, code: Option<&str>) -> Result<(String, Vec<Subject>)> {
        let term = match code {
            Some(code) => self.term(code)?,
            None => self.term_on(self.today())?,
        };
        let mut subjects = Vec::new();
        let mut latest = HashMap::new();
        let mut days = self.days()?;
        days.retain(|d| term.starts_on <= d.date && d.date <= term.ends_on);
        days.sort_by_key(|d| d.date);
        for day in days {
            for row in self.read().day_report(&key_of(&day))? {
                let Some(visit) = row.visit.filter(|v| v.kind.is_some()) else {
                    continue;
                };
                let readings = judged(&tries_of(&row.readings)?);
                let attempt = visit.attempt;
                let mut child = day_child(
                    StoredChild {
                        child: row.child,
                        visits: vec![visit],
                        earlier: Vec::new(),
                    },
                    day.date,
                );
                if attempt == Attempt::Rescreen {
                    // What passed before is not repeated, and counts as it did on that day.
                    child = self.day_child(&day, &child.child_id)?;
                }
                let readings = completed(&child, readings);
                let readings = carried_over(&child, &readings).map_or(readings, |(all, _)| all);
                let subject = Subject {
                    name: format!("{}, {}", child.family_name, child.given_name),
                    site: day.site_name.clone(),
                    age: child.age,
                    grade: child.grade,
                    on: Some(day.date),
                    attempt,
                    method: Some(day.method),
                    consent: child.consent,
                    under_care: child.under_care,
                    readings,
                    child_id: child.child_id,
                };
                keep(&mut subjects, &mut latest, subject);
            }
        }
        Ok((term.code, subjects))
    }
}

/// Writes the children on whom the two sets part, with what each says and the readings.
pub fn write_flips(
    comparison: &Comparison,
    subjects: &[Subject],
    out: impl Write,
) -> io::Result<()> {
    let [a, b] = comparison.ids();
    let columns = [
        ("child_id", Kind::Text),
        ("name", Kind::Text),
        ("site", Kind::Text),
        ("age_months", Kind::Number),
        ("grade", Kind::Code),
        ("screened_on", Kind::Date),
        (&*a, Kind::Code),
        (&*b, Kind::Code),
        ("readings", Kind::Text),
    ];
    let mut table = Table::new(out, Form::SPREADSHEET, columns)?;
    for flip in comparison.flips() {
        let subject = &subjects[flip.place];
        table.cell(&subject.child_id)?;
        table.cell(&subject.name)?;
        table.cell(&subject.site)?;
        table.cell(&subject.age.map_or(String::new(), |a| a.0.to_string()))?;
        table.cell(&subject.grade.map_or(String::new(), |g| g.to_string()))?;
        table.cell(&subject.on.map_or(String::new(), |d| d.to_string()))?;
        table.cell(flip.a.word())?;
        table.cell(flip.b.word())?;
        table.cell(&words::readings(subject))?;
        table.end_row()?;
    }
    table.finish()?.flush()
}
