//! What judge writes: rows with their outcome, refused rows, and files that appear whole or not at all.

use std::fs;
use std::io::{self, Write};
use std::path::{Path, PathBuf};

use csv::StringRecord;
use tempfile::NamedTempFile;

use super::JudgeError;
use crate::domain::age::spoken;
use crate::domain::formula::unguarded;
use crate::domain::outcome::{Outcome, OutcomeKind, Urgency};
use crate::intake::Problem;
use crate::intake::results::{Column, ResultsReader, RowColumn};
use crate::reports::csv::{Form, Kind, Table};
use crate::reports::day::field_kind;
use crate::rules::explain;

/// The columns written after those of the input.
pub(super) const ADDED: [(&str, Kind); 9] = [
    ("outcome", Kind::Code),
    ("urgency", Kind::Code),
    ("act_within_days", Kind::Number),
    ("amblyopia_risk", Kind::Code),
    ("criteria", Kind::Code),
    ("unknown", Kind::Code),
    ("reasons", Kind::Text),
    ("rule_set", Kind::Code),
    ("edition", Kind::Text),
];

/// Returns the type of each column of the input.
fn kinds(reader: &ResultsReader<'_>) -> Vec<Kind> {
    reader
        .columns()
        .iter()
        .map(|column| match column {
            Some(Column::Row(RowColumn::ChildId)) => Kind::Text,
            Some(Column::Row(RowColumn::Dob | RowColumn::ScreenedOn)) => Kind::Date,
            Some(Column::Row(RowColumn::AgeMonths)) => Kind::Number,
            Some(Column::Row(RowColumn::Grade | RowColumn::Attempt)) => Kind::Code,
            Some(Column::Field(field)) => field_kind(*field),
            Some(Column::Name) | None => Kind::HandedThrough,
        })
        .collect()
}

/// The output keeps the input's mark and line ends, so that it reads like the file it came from.
fn form(reader: &ResultsReader<'_>) -> Form {
    Form {
        mark: reader.sheet().had_mark(),
        guard: true,
        crlf: reader.sheet().has_crlf(),
    }
}

fn failed(error: io::Error) -> JudgeError {
    JudgeError::Write {
        target: "the output".into(),
        error,
    }
}

/// Rows with their outcome.
pub(super) struct OutcomeTable<W: Write> {
    table: Table<W>,
    kinds: Vec<Kind>,
    text: String,
}

impl<W: Write> OutcomeTable<W> {
    pub(super) fn new(out: W, reader: &ResultsReader<'_>) -> Result<Self, JudgeError> {
        let kinds = kinds(reader);
        let headers = reader.sheet().written_headers();
        let columns = headers
            .iter()
            .map(String::as_str)
            .zip(kinds.iter().copied())
            .chain(ADDED);
        Ok(OutcomeTable {
            table: Table::new(out, form(reader), columns).map_err(failed)?,
            kinds,
            text: String::new(),
        })
    }

    pub(super) fn write(
        &mut self,
        record: &StringRecord,
        outcome: &Outcome,
    ) -> Result<(), JudgeError> {
        self.write_row(record, outcome).map_err(failed)
    }

    fn write_row(&mut self, record: &StringRecord, outcome: &Outcome) -> io::Result<()> {
        for (cell, kind) in record.iter().zip(&self.kinds) {
            match kind {
                // Guarded anew, so that a guard that is there already is not doubled.
                Kind::Text | Kind::HandedThrough => self.table.cell(unguarded(cell))?,
                _ => self.table.cell(cell)?,
            }
        }
        self.table.cell(outcome.kind.word())?;
        self.table.cell(outcome.urgency.map_or("", Urgency::word))?;
        self.text.clear();
        if let Some(days) = outcome.act_within_days {
            self.text.push_str(&days.to_string());
        }
        self.table.cell(&self.text)?;
        self.list(outcome.risks.iter().map(|risk| risk.word()))?;
        self.list(outcome.criteria.iter().map(String::as_str))?;
        self.list(outcome.unknown.iter().map(String::as_str))?;
        self.text.clear();
        dates(outcome, &mut self.text);
        explain::reasons_text(outcome, &mut self.text);
        self.table.cell(&self.text)?;
        self.table.cell(&outcome.rule_set)?;
        self.table.cell(&outcome.edition)?;
        self.table.end_row()
    }

    fn list<'t>(&mut self, items: impl Iterator<Item = &'t str>) -> io::Result<()> {
        self.text.clear();
        for item in items {
            if !self.text.is_empty() {
                self.text.push(';');
            }
            self.text.push_str(item);
        }
        self.table.cell(&self.text)
    }

    pub(super) fn finish(self) -> Result<(), JudgeError> {
        let mut out = self.table.finish().map_err(failed)?;
        out.flush().map_err(failed)
    }
}

/// Appends the dates of an outcome, which have no column of their own.
fn dates(outcome: &Outcome, text: &mut String) {
    if let Some(date) = outcome.act_by {
        text.push_str("act by ");
        text.push_str(&spoken(date));
        text.push_str(". ");
    }
    if let Some(date) = outcome.due_on {
        text.push_str(match outcome.kind {
            OutcomeKind::Incomplete => "return by ",
            _ => "rescreen by ",
        });
        text.push_str(&spoken(date));
        text.push_str(". ");
    }
}

/// Refused rows, with what is wrong before their cells.
pub(super) struct RefusedTable<W: Write> {
    table: Table<W>,
}

impl<W: Write> RefusedTable<W> {
    pub(super) fn new(out: W, reader: &ResultsReader<'_>) -> Result<Self, JudgeError> {
        let headers = reader.sheet().written_headers();
        let columns = [
            ("line", Kind::Number),
            ("column", Kind::Text),
            ("found", Kind::Text),
            ("expected", Kind::Text),
        ]
        .into_iter()
        .chain(headers.iter().map(|h| (h.as_str(), Kind::HandedThrough)));
        Ok(RefusedTable {
            table: Table::new(out, form(reader), columns).map_err(failed)?,
        })
    }

    pub(super) fn write(
        &mut self,
        problem: &Problem,
        record: &StringRecord,
    ) -> Result<(), JudgeError> {
        self.write_row(problem, record).map_err(failed)
    }

    fn write_row(&mut self, problem: &Problem, record: &StringRecord) -> io::Result<()> {
        let line = problem.place.map(|place| place.line.to_string());
        self.table.cell(&line.unwrap_or_default())?;
        self.table.cell(problem.column.as_deref().unwrap_or(""))?;
        self.table.cell(problem.found.as_str())?;
        self.table.cell(&problem.expected)?;
        for cell in record {
            // What made the row bad may be a control character.
            self.table
                .cell(&crate::domain::text::shown(unguarded(cell), usize::MAX))?;
        }
        self.table.end_row()
    }

    pub(super) fn finish(self) -> Result<(), JudgeError> {
        let mut out = self.table.finish().map_err(failed)?;
        out.flush().map_err(failed)
    }
}

/// Returns the path of the refused rows beside an output.
pub(super) fn refused_path(out: &Path) -> PathBuf {
    let mut name = out.as_os_str().to_owned();
    name.push(".refused.csv");
    PathBuf::from(name)
}

/// Removes a file that may not be there.
pub(super) fn remove_if_there(path: &Path) -> Result<(), JudgeError> {
    match fs::remove_file(path) {
        Err(error) if error.kind() != io::ErrorKind::NotFound => Err(write_error(path, error)),
        _ => Ok(()),
    }
}

fn write_error(path: &Path, error: io::Error) -> JudgeError {
    JudgeError::Write {
        target: crate::domain::text::shown(&path.to_string_lossy(), 200),
        error,
    }
}

/// A file that is written aside and takes its name only when it is whole.
pub(super) struct Aside {
    temp: NamedTempFile,
    path: PathBuf,
}

impl Aside {
    pub(super) fn create(path: &Path, input: &Path) -> Result<Aside, JudgeError> {
        // A link stays a link: what it points to is replaced.
        let path = fs::canonicalize(path).unwrap_or_else(|_| path.to_owned());
        let refuse = |what: &str, expected: &str| {
            Err(JudgeError::Output(Problem::of_file(
                &path.to_string_lossy(),
                what,
                expected,
            )))
        };
        match fs::metadata(&path) {
            Ok(found) if found.is_dir() => return refuse("a folder", "a file to write"),
            Ok(found) if !found.is_file() => {
                return refuse(
                    "not a plain file",
                    "a file to write, or no -o for standard output",
                );
            }
            _ => {}
        }
        if fs::canonicalize(input).is_ok_and(|input| input == path) {
            return refuse("the file that is read", "another file to write");
        }
        let folder = match path.parent() {
            Some(folder) if !folder.as_os_str().is_empty() => folder,
            _ => Path::new("."),
        };
        match NamedTempFile::with_prefix_in(".twoline-", folder) {
            Ok(temp) => Ok(Aside { temp, path }),
            Err(error) => Err(write_error(&path, error)),
        }
    }

    pub(super) fn file(&mut self) -> &mut fs::File {
        self.temp.as_file_mut()
    }

    pub(super) fn rename(self) -> Result<(), JudgeError> {
        self.temp
            .as_file()
            .sync_all()
            .map_err(|error| write_error(&self.path, error))?;
        self.temp
            .persist(&self.path)
            .map(drop)
            .map_err(|error| write_error(&self.path, error.error))
    }
}
