//! The examination reports CSV: one row per report that came back.

use csv::StringRecord;

use super::cells::{self, Kind};
use super::problem::{Place, Problem, Problems};
use super::sheet::Sheet;
use crate::domain::acuity::Notation;
use crate::domain::codes::code_list;
use crate::domain::exam::{ExamField, ExamReport};
use crate::domain::formula::unguarded;
use crate::domain::readings::ReadingContext;

code_list! {
    /// A column that says whose report it is, beside the fields of a report.
    WhoseColumn {
        Code = "code", "code on the form";
        ChildId = "child_id", "child id";
    }
}

#[derive(Debug, Clone, Copy)]
enum Column {
    Whose(WhoseColumn),
    Field(ExamField),
}

/// One row: whose report it is, and what it says.
#[derive(Debug, Clone, PartialEq)]
pub struct ExamRow {
    /// Where it stands.
    pub place: Place,
    /// The code on the form as written, empty when the row has none.
    pub code: String,
    /// The child's id, empty when the row has none.
    pub child_id: String,
    /// The report.
    pub report: ExamReport,
}

impl ExamRow {
    /// Returns the column that says whose report it is, and its cell: the code where there is one.
    pub fn whose(&self) -> (WhoseColumn, &str) {
        if self.code.is_empty() {
            (WhoseColumn::ChildId, &self.child_id)
        } else {
            (WhoseColumn::Code, &self.code)
        }
    }
}

/// Reads a whole file, or returns everything that is wrong with it; `bare` is what a bare `40` or
/// `12` is the denominator of.
///
/// Whether a code is known, and whether the dates fit its referral, only the store can say.
pub fn read_exams(
    file: &str,
    bytes: &[u8],
    bare: Option<Notation>,
) -> Result<Vec<ExamRow>, Problems> {
    let mut sheet = Sheet::open(file, bytes)?;
    let columns = header(&sheet)?;
    let mut rows = Vec::new();
    let mut problems = Problems::default();
    let mut record = StringRecord::new();
    let mut any = false;
    while let Some(place) = sheet.next(&mut record)? {
        any = true;
        if let Some(problem) = sheet.ragged(&record, place) {
            problems.push(problem);
            continue;
        }
        match row(file, &columns, &record, place, bare) {
            Ok(row) => rows.push(row),
            Err(wrong) => wrong.into_iter().for_each(|problem| problems.push(problem)),
        }
    }
    if !any {
        return Err(Problem::of_file(file, "a header only", "a row for each report").into());
    }
    problems.or(rows)
}

/// Returns the columns by their place in the file, fields in the order of their list: a sphere comes
/// before its axis however the file has them.
fn header(sheet: &Sheet<'_>) -> Result<Vec<(usize, Column)>, Problems> {
    let known: Vec<(&'static str, Column)> = WhoseColumn::ALL
        .iter()
        .map(|c| (c.word(), Column::Whose(*c)))
        .chain(ExamField::ALL.iter().map(|f| (f.word(), Column::Field(*f))))
        .collect();
    let mut columns: Vec<(usize, Column)> = sheet
        .columns(&known, &[ExamField::ExaminedOn.word()], false)?
        .into_iter()
        .enumerate()
        .filter_map(|(at, column)| Some((at, column?)))
        .collect();
    if !columns.iter().any(|(_, c)| matches!(c, Column::Whose(_))) {
        return Err(Problem::of_file(
            sheet.file(),
            "no such column",
            "a column code or child_id in the header",
        )
        .at(Place { row: 1, line: 1 })
        .in_column(WhoseColumn::Code.word())
        .into());
    }
    columns.sort_by_key(|(_, column)| match column {
        Column::Whose(_) => None,
        Column::Field(field) => Some(*field),
    });
    Ok(columns)
}

fn row(
    file: &str,
    columns: &[(usize, Column)],
    record: &StringRecord,
    place: Place,
    bare: Option<Notation>,
) -> Result<ExamRow, Vec<Problem>> {
    let context = ReadingContext {
        bare,
        critical_line: None,
    };
    let mut row = ExamRow {
        place,
        code: String::new(),
        child_id: String::new(),
        report: ExamReport::default(),
    };
    let mut problems = Vec::new();
    for (at, column) in columns {
        let (word, kind) = described(*column);
        // Only a text column has the apostrophe that our own reports put before a formula.
        let cell = match kind {
            Kind::Code => record[*at].trim(),
            _ => unguarded(record[*at].trim()),
        };
        let mut wrong = |expected: String| {
            problems.push(Problem::of_cell(file, place, word, cell, expected));
        };
        if let Some(expected) = cells::forbidden(kind, cell) {
            wrong(expected);
            continue;
        }
        match column {
            Column::Whose(WhoseColumn::Code) => cell.clone_into(&mut row.code),
            Column::Whose(WhoseColumn::ChildId) => cell.clone_into(&mut row.child_id),
            Column::Field(
                field @ (ExamField::ExaminedOn | ExamField::ReceivedOn | ExamField::ReturnOn),
            ) if !cell.is_empty() => match cells::date(cell) {
                Ok(date) => {
                    if let Err(error) = row.report.set(*field, &date.to_string(), context) {
                        wrong(error.expected);
                    }
                }
                Err(error) => wrong(error.expected()),
            },
            Column::Field(field) => {
                if let Err(error) = row.report.set(*field, cell, context) {
                    wrong(error.expected);
                }
            }
        }
    }
    if problems.is_empty() && row.code.is_empty() && row.child_id.is_empty() {
        problems.push(Problem::of_cell(
            file,
            place,
            columns.first().map_or("code", |(_, c)| described(*c).0),
            "",
            "the code on the form, or the child's id",
        ));
    }
    if problems.is_empty() {
        Ok(row)
    } else {
        Err(problems)
    }
}

fn described(column: Column) -> (&'static str, Kind) {
    match column {
        Column::Whose(WhoseColumn::Code) => (WhoseColumn::Code.word(), Kind::Code),
        Column::Whose(WhoseColumn::ChildId) => (WhoseColumn::ChildId.word(), Kind::Id),
        Column::Field(field) => (
            field.word(),
            match field {
                ExamField::Examiner | ExamField::ExaminerPhone | ExamField::ClassroomAdvice => {
                    Kind::Line
                }
                _ => Kind::Code,
            },
        ),
    }
}
