//! The results CSV: one row per child and visit.

use std::collections::HashMap;

use chrono::NaiveDate;
use csv::StringRecord;

use super::cells::{self, Kind};
use super::problem::{Place, Problem, Problems};
use super::sheet::Sheet;
use crate::domain::acuity::{Line, Notation};
use crate::domain::age::{AgeMonths, Grade};
use crate::domain::codes::{AcuityMethod, Attempt, code_list};
use crate::domain::field::Field;
use crate::domain::formula::unguarded;
use crate::domain::readings::{ReadingContext, Readings};
use crate::domain::text::{nearest, shown};

code_list! {
    /// A column of the results file that says whose row it is, beside the fields of a visit.
    RowColumn {
        ChildId = "child_id", "child id";
        Dob = "dob", "birth date";
        AgeMonths = "age_months", "age in months";
        Grade = "grade", "grade";
        ScreenedOn = "screened_on", "screening day";
        Attempt = "attempt", "visit";
    }
}

/// What a column of a results file means.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Column {
    /// Whose row it is.
    Row(RowColumn),
    /// A value of the visit.
    Field(Field),
    /// A name or class, for the person who fills in a class list; not read.
    Name,
}

/// Columns of a class list that are there for people.
const NAMES: [&str; 3] = ["family_name", "given_name", "class"];

/// How a results file is read.
#[derive(Debug, Clone, Copy, Default)]
#[allow(clippy::struct_excessive_bools)] // Each is one switch of a command.
pub struct Options {
    /// Whether each row needs a child id.
    pub needs_child: bool,
    /// Whether `age_months` may stand in for `dob` and `screened_on`.
    pub takes_age: bool,
    /// Whether the same child, day and visit may come twice.
    pub takes_repeats: bool,
    /// Whether unknown columns are left alone.
    pub pass_through: bool,
    /// Whether names and class may stand beside the id, as on a class list.
    pub takes_names: bool,
    /// The screening day of rows that do not say one.
    pub day: Option<NaiveDate>,
    /// What a bare `40` or `12` is the denominator of.
    pub bare: Option<Notation>,
    /// The acuity method of the day; a row's own wins.
    pub method: Option<AcuityMethod>,
}

/// One row: whose it is, and what was recorded.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct ResultRow {
    /// Where it stands.
    pub place: Place,
    /// The child's id, empty when the file has none.
    pub child_id: String,
    /// Birth date.
    pub dob: Option<NaiveDate>,
    /// Age on the screening day, from either source.
    pub age: Option<AgeMonths>,
    /// Grade.
    pub grade: Option<Grade>,
    /// Screening day: the row's own, else that of the options.
    pub screened_on: Option<NaiveDate>,
    /// First visit or rescreen, where the row says which.
    pub attempt: Option<Attempt>,
    /// The values of the visit.
    pub readings: Readings,
}

impl Default for ResultRow {
    fn default() -> Self {
        ResultRow {
            place: Place { row: 1, line: 1 },
            child_id: String::new(),
            dob: None,
            age: None,
            grade: None,
            screened_on: None,
            attempt: None,
            readings: Readings::default(),
        }
    }
}

/// What a bare value equal to the pass line means on a critical-line day: the pass line by age and
/// grade, asked only for rows that need it.
pub type PassLine<'a> = &'a dyn Fn(Option<AgeMonths>, Option<Grade>) -> Option<Line>;

/// Reads a results file row by row.
pub struct ResultsReader<'a> {
    sheet: Sheet<'a>,
    columns: Vec<Option<Column>>,
    /// Index of each known column, row columns first, then fields in the order of their list: the
    /// method and the letters of a line decide what an acuity means and so come before it.
    row_order: Vec<(usize, RowColumn)>,
    field_order: Vec<(usize, Field)>,
    options: Options,
    pass_line: Option<PassLine<'a>>,
    record: StringRecord,
    seen: HashMap<(String, Option<NaiveDate>, Attempt), Place>,
    rows: u64,
}

impl<'a> ResultsReader<'a> {
    /// Checks the bytes and the header.
    pub fn open(
        file: &str,
        bytes: &'a [u8],
        options: Options,
        pass_line: Option<PassLine<'a>>,
    ) -> Result<ResultsReader<'a>, Problems> {
        let sheet = Sheet::open(file, bytes)?;
        let required: &[&str] = if options.needs_child {
            &["child_id"]
        } else {
            &[]
        };
        let mut known = known();
        if options.takes_names {
            known.extend(NAMES.map(|word| (word, Column::Name)));
        }
        let columns = sheet.columns(&known, required, options.pass_through)?;
        let mut row_order = Vec::new();
        let mut field_order = Vec::new();
        for (i, column) in columns.iter().enumerate() {
            match column {
                Some(Column::Row(c)) => row_order.push((i, *c)),
                Some(Column::Field(f)) => field_order.push((i, *f)),
                Some(Column::Name) | None => {}
            }
        }
        field_order.sort_by_key(|(_, field)| *field);
        let reader = ResultsReader {
            sheet,
            columns,
            row_order,
            field_order,
            options,
            pass_line,
            record: StringRecord::new(),
            seen: HashMap::new(),
            rows: 0,
        };
        reader.check_header()?;
        Ok(reader)
    }

    fn check_header(&self) -> Result<(), Problems> {
        let has = |c: RowColumn| self.row_order.iter().any(|(_, column)| *column == c);
        let file = self.sheet.file();
        let header = Place { row: 1, line: 1 };
        let mut problems = Problems::default();
        if self.field_order.is_empty() {
            let problem = Problem::of_file(
                file,
                "no column with a reading",
                "a column such as distance_right",
            )
            .at(header);
            // A column that only almost has a reading's name was left alone as an unknown one.
            let near =
                self.sheet
                    .headers()
                    .iter()
                    .zip(&self.columns)
                    .find_map(|(written, meaning)| {
                        let words = Field::ALL.iter().map(|f| f.word());
                        let word = nearest(written, words).filter(|_| meaning.is_none())?;
                        Some(format!("is {} meant as {word}?", shown(written, 40)))
                    });
            problems.push(match near {
                Some(near) => problem.cure(near),
                None => problem,
            });
        }
        if has(RowColumn::AgeMonths) && !self.options.takes_age {
            problems.push(
                Problem::of_file(file, "an age", "dob and screened_on instead of age_months")
                    .at(header)
                    .in_column("age_months"),
            );
        }
        if has(RowColumn::Dob) && !has(RowColumn::ScreenedOn) && self.options.day.is_none() {
            problems.push(
                Problem::of_file(file, "no such column", "a column screened_on beside dob")
                    .at(header)
                    .in_column("screened_on")
                    .cure("or give the screening day with --date"),
            );
        }
        problems.or(())
    }

    /// Returns the sheet, for its header and the form of its lines.
    pub fn sheet(&self) -> &Sheet<'a> {
        &self.sheet
    }

    /// Returns the meaning of each column of the file.
    pub fn columns(&self) -> &[Option<Column>] {
        &self.columns
    }

    /// Returns the cells of the row read last.
    pub fn record(&self) -> &StringRecord {
        &self.record
    }

    /// Reads the next row into `row`.
    ///
    /// Returns its problems (none for a good row), or nothing after the last row. A file without
    /// rows, or one that cannot be read on, is an error.
    pub fn next(&mut self, row: &mut ResultRow) -> Result<Option<Vec<Problem>>, Problem> {
        let Some(place) = self.sheet.next(&mut self.record)? else {
            return if self.rows == 0 {
                Err(Problem::of_file(
                    self.sheet.file(),
                    "a header only",
                    "a row for each child and visit",
                ))
            } else {
                Ok(None)
            };
        };
        self.rows += 1;
        if let Some(problem) = self.sheet.ragged(&self.record, place) {
            return Ok(Some(vec![problem]));
        }
        let mut problems = Vec::new();
        row.place = place;
        self.read_cells(row, &mut problems);
        if problems.is_empty() && !self.options.takes_repeats && !row.child_id.is_empty() {
            self.check_repeat(row, &mut problems);
        }
        Ok(Some(problems))
    }

    fn check_repeat(&mut self, row: &ResultRow, problems: &mut Vec<Problem>) {
        let attempt = row.attempt.unwrap_or(Attempt::First);
        let key = (row.child_id.clone(), row.screened_on, attempt);
        match self.seen.get(&key) {
            Some(first) => problems.push(
                Problem::of_cell(
                    self.sheet.file(),
                    row.place,
                    RowColumn::ChildId.word(),
                    &row.child_id,
                    "each child, day and visit once",
                )
                .cure(format!("the same stands in {first}")),
            ),
            None => {
                self.seen.insert(key, row.place);
            }
        }
    }

    fn read_cells(&self, row: &mut ResultRow, problems: &mut Vec<Problem>) {
        let file = self.sheet.file();
        let place = row.place;
        let wrong = |column: &str, cell: &str, expected: String| {
            Problem::of_cell(file, place, column, cell, expected)
        };
        for (i, cell) in self.record.iter().enumerate() {
            let kind = match self.columns[i] {
                Some(Column::Row(RowColumn::ChildId)) => Kind::Id,
                Some(Column::Field(Field::Note)) => Kind::Line,
                Some(_) => Kind::Code,
                None => Kind::Note,
            };
            let cell = if kind == Kind::Id {
                unguarded(cell.trim())
            } else {
                cell
            };
            if let Some(expected) = cells::forbidden(kind, cell) {
                problems.push(wrong(&self.sheet.headers()[i], cell, expected));
            }
        }
        if !problems.is_empty() {
            return;
        }
        self.read_whose(row, problems);
        row.readings = Readings::default();
        row.readings.acuity_method = self.options.method;
        let mut context = ReadingContext {
            bare: self.options.bare,
            critical_line: None,
        };
        let mut asked = false;
        for (i, field) in &self.field_order {
            let cell = &self.record[*i];
            if cell.is_empty() {
                continue;
            }
            if !asked
                && *field >= Field::DistanceRight
                && row.readings.acuity_method == Some(AcuityMethod::CriticalLine)
            {
                asked = true;
                context.critical_line = self.pass_line.and_then(|of| of(row.age, row.grade));
            }
            // Only a text column has the apostrophe that our own reports put before a formula.
            let text = if *field == Field::Note {
                unguarded(cell.trim())
            } else {
                cell
            };
            if let Err(error) = row.readings.set(*field, text, context) {
                problems.push(wrong(field.word(), cell, error.expected));
            }
        }
        if problems.is_empty() {
            for error in row.readings.contradictions() {
                problems.push(wrong(error.field.word(), &error.found, error.expected));
            }
        }
    }

    fn read_whose(&self, row: &mut ResultRow, problems: &mut Vec<Problem>) {
        let file = self.sheet.file();
        let place = row.place;
        let mut wrong = |column: RowColumn, cell: &str, expected: String| {
            problems.push(Problem::of_cell(file, place, column.word(), cell, expected));
        };
        row.child_id.clear();
        (row.dob, row.grade, row.age) = (None, None, None);
        (row.screened_on, row.attempt) = (self.options.day, None);
        let mut dates_read = true;
        for (i, column) in &self.row_order {
            let cell = self.record[*i].trim();
            match column {
                RowColumn::ChildId => row.child_id.push_str(unguarded(cell)),
                _ if cell.is_empty() => {}
                RowColumn::Dob | RowColumn::ScreenedOn => match cells::date(cell) {
                    Ok(date) if *column == RowColumn::Dob => row.dob = Some(date),
                    Ok(date) => row.screened_on = Some(date),
                    Err(error) => {
                        dates_read = false;
                        wrong(*column, cell, error.expected());
                    }
                },
                RowColumn::AgeMonths => {
                    match crate::domain::number::fixed(cell, 0).filter(|m| *m <= 1_440) {
                        Some(months) => row.age = Some(AgeMonths(months as u32)),
                        None => wrong(*column, cell, "completed months, 0 to 1440".into()),
                    }
                }
                RowColumn::Grade => match Grade::parse(cell) {
                    Some(grade) => row.grade = Some(grade),
                    None => wrong(*column, cell, "a grade: PK, TK, KG or K, 1 to 12".into()),
                },
                RowColumn::Attempt => match Attempt::from_word(cell) {
                    Some(attempt) => row.attempt = Some(attempt),
                    None => wrong(*column, cell, cells::one_of(&Attempt::words(), cell)),
                },
            }
        }
        if self.options.needs_child && row.child_id.is_empty() {
            wrong(RowColumn::ChildId, "", "a child id".into());
        }
        if !dates_read {
            return;
        }
        let Some(dob) = row.dob else { return };
        let Some(on) = row.screened_on else {
            wrong(
                RowColumn::ScreenedOn,
                "",
                "the screening day beside a birth date".into(),
            );
            return;
        };
        let Some(age) = AgeMonths::between(dob, on) else {
            wrong(
                RowColumn::Dob,
                &dob.to_string(),
                format!("a birth date on or before the screening day, {on}"),
            );
            return;
        };
        match row.age {
            Some(said) if said != age => wrong(
                RowColumn::AgeMonths,
                &said.0.to_string(),
                format!("{} months, as dob and screened_on say", age.0),
            ),
            _ => row.age = Some(age),
        }
    }
}

/// Returns every column of a results file.
pub fn known() -> Vec<(&'static str, Column)> {
    RowColumn::ALL
        .iter()
        .map(|c| (c.word(), Column::Row(*c)))
        .chain(Field::ALL.iter().map(|f| (f.word(), Column::Field(*f))))
        .collect()
}

/// Reads a whole file, or returns everything that is wrong with it.
pub fn read_results(
    file: &str,
    bytes: &[u8],
    options: Options,
    pass_line: Option<PassLine<'_>>,
) -> Result<Vec<ResultRow>, Problems> {
    let mut reader = ResultsReader::open(file, bytes, options, pass_line)?;
    let mut rows = Vec::new();
    let mut problems = Problems::default();
    let mut row = ResultRow::default();
    while let Some(wrong) = reader.next(&mut row)? {
        if wrong.is_empty() {
            rows.push(row.clone());
        }
        for problem in wrong {
            problems.push(problem);
        }
    }
    problems.or(rows)
}
