//! The roster CSV: the children expected, with what is known before the day.

mod alike;
mod compare;

use std::collections::HashMap;

use chrono::NaiveDate;
use csv::StringRecord;

use super::cells::{self, Kind, NotADate};
use super::problem::{Place, Problem, Problems};
use super::sheet::Sheet;
use crate::domain::age::Grade;
use crate::domain::codes::{Consent, YesNo, code_list};
use crate::domain::field::Field;
use crate::domain::formula::unguarded;
use crate::domain::readings::{ReadingContext, Readings};
use crate::domain::roster::{RosterChild, RosterDetails};

pub use alike::{Alike, AlikeKind};
pub use compare::{Changed, RosterUpdate};

code_list! {
    /// A column of the roster.
    Column {
        ChildId = "child_id", "child id";
        FamilyName = "family_name", "family name";
        GivenName = "given_name", "given name";
        Dob = "dob", "birth date";
        Grade = "grade", "grade";
        Site = "site", "site";
        Class = "class", "class";
        Teacher = "teacher", "teacher";
        Sex = "sex", "sex";
        Language = "language", "language";
        Ethnicity = "ethnicity", "ethnicity";
        Insurance = "insurance", "insurance";
        SpecialEducation = "special_education", "special education";
        StateId = "state_id", "state id";
        GuardianName = "guardian_name", "guardian's name";
        GuardianPhone = "guardian_phone", "guardian's phone";
        GuardianEmail = "guardian_email", "guardian's email";
        GuardianAddress = "guardian_address", "guardian's address";
        Guardian2Name = "guardian2_name", "second guardian's name";
        Guardian2Phone = "guardian2_phone", "second guardian's phone";
        Guardian2Email = "guardian2_email", "second guardian's email";
        Consent = "consent", "consent";
        WearsGlasses = "wears_glasses", "wears glasses";
        LastExamOn = "last_exam_on", "last examined on";
        UnderCare = "under_care", "under care";
        KnownCondition = "known_condition", "known condition";
        DoctorName = "doctor_name", "doctor's name";
        DoctorPhone = "doctor_phone", "doctor's phone";
        History = "history", "history";
        Notes = "notes", "notes";
    }
}

/// The columns without which a roster is not read.
pub const REQUIRED: [&str; 6] = [
    "child_id",
    "family_name",
    "given_name",
    "dob",
    "grade",
    "site",
];

/// A roster that was read whole.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Roster {
    /// The children in the order of the file.
    pub children: Vec<RosterChild>,
    /// The place of each child's row.
    pub places: Vec<Place>,
    /// Indexes of the children whose birth date is blank.
    pub without_dob: Vec<usize>,
    /// Indexes of the children whose grade is blank.
    pub without_grade: Vec<usize>,
    /// Pairs to look at: probable duplicates, twins, children of the same name.
    pub alike: Vec<Alike>,
    /// Optional columns that the file does not have: it says nothing of them.
    pub absent: Vec<Column>,
}

impl Roster {
    /// Takes from what is known whatever the file does not speak of: columns it does not have, and a
    /// blank consent, which never takes a consent or a refusal back.
    pub fn keep_known(&mut self, known: &[RosterChild]) {
        let known: HashMap<&str, &RosterChild> = known
            .iter()
            .map(|child| (&*child.child_id, child))
            .collect();
        for child in &mut self.children {
            let Some(before) = known.get(&*child.child_id) else {
                continue;
            };
            let (details, before) = (&mut child.details, &before.details);
            for column in &self.absent {
                keep(details, before, *column);
            }
            details.consent = details.consent.or(before.consent);
        }
    }
}

fn keep(details: &mut RosterDetails, known: &RosterDetails, column: Column) {
    macro_rules! same {
        ($field:ident) => {
            details.$field.clone_from(&known.$field)
        };
    }
    match column {
        Column::ChildId
        | Column::FamilyName
        | Column::GivenName
        | Column::Dob
        | Column::Grade
        | Column::Site => {}
        Column::Class => same!(class),
        Column::Teacher => same!(teacher),
        Column::Sex => same!(sex),
        Column::Language => same!(language),
        Column::Ethnicity => same!(ethnicity),
        Column::Insurance => same!(insurance),
        Column::SpecialEducation => same!(special_education),
        Column::StateId => same!(state_id),
        Column::GuardianName => same!(guardian_name),
        Column::GuardianPhone => same!(guardian_phone),
        Column::GuardianEmail => same!(guardian_email),
        Column::GuardianAddress => same!(guardian_address),
        Column::Guardian2Name => same!(guardian2_name),
        Column::Guardian2Phone => same!(guardian2_phone),
        Column::Guardian2Email => same!(guardian2_email),
        Column::Consent => same!(consent),
        Column::WearsGlasses => same!(wears_glasses),
        Column::LastExamOn => same!(last_exam_on),
        Column::UnderCare => same!(under_care),
        Column::KnownCondition => same!(known_condition),
        Column::DoctorName => same!(doctor_name),
        Column::DoctorPhone => same!(doctor_phone),
        Column::History => same!(history),
        Column::Notes => same!(notes),
    }
}

/// Reads a roster; `today` bounds birth and examination dates.
pub fn read_roster(file: &str, bytes: &[u8], today: NaiveDate) -> Result<Roster, Problems> {
    let mut sheet = Sheet::open(file, bytes)?;
    let known: Vec<(&'static str, Column)> = Column::ALL.iter().map(|c| (c.word(), *c)).collect();
    let columns: Vec<Column> = sheet
        .columns(&known, &REQUIRED, false)?
        .into_iter()
        .flatten()
        .collect();
    let mut reading = Reading {
        file,
        today,
        problems: Problems::default(),
        orders: HashMap::new(),
    };
    let mut roster = Roster {
        children: Vec::new(),
        places: Vec::new(),
        without_dob: Vec::new(),
        without_grade: Vec::new(),
        alike: Vec::new(),
        absent: Column::ALL
            .iter()
            .copied()
            .filter(|column| !columns.contains(column))
            .collect(),
    };
    let mut seen: HashMap<String, Place> = HashMap::new();
    let mut record = StringRecord::new();
    let mut rows = 0_u64;
    while let Some(place) = sheet.next(&mut record)? {
        if record.iter().all(|cell| cell.trim().is_empty()) {
            continue;
        }
        rows += 1;
        if let Some(problem) = sheet.ragged(&record, place) {
            reading.problems.push(problem);
            continue;
        }
        let child = reading.child(&columns, &record, place);
        if let Some(first) = seen.get(&child.child_id) {
            let problem = Problem::of_cell(
                file,
                place,
                "child_id",
                &child.child_id,
                "each child id once",
            );
            reading
                .problems
                .push(problem.cure(format!("it is also in {first}")));
        } else if !child.child_id.is_empty() {
            seen.insert(child.child_id.clone(), place);
        }
        if child.dob.is_none() {
            roster.without_dob.push(roster.children.len());
        }
        if child.grade.is_none() {
            roster.without_grade.push(roster.children.len());
        }
        roster.children.push(child);
        roster.places.push(place);
    }
    reading.finish();
    if rows == 0 {
        reading.problems.push(Problem::of_file(
            file,
            "a header only",
            "a row for each child",
        ));
    }
    let mut roster = reading.problems.or(roster)?;
    roster.alike = alike::find(&roster.children);
    Ok(roster)
}

/// What is gathered while rows are read.
struct Reading<'a> {
    file: &'a str,
    today: NaiveDate,
    problems: Problems,
    /// Dates in another order, by column: the first one, and how many.
    orders: HashMap<&'static str, (Problem, u64)>,
}

impl Reading<'_> {
    fn child(&mut self, columns: &[Column], record: &StringRecord, place: Place) -> RosterChild {
        let mut child = RosterChild {
            child_id: String::new(),
            family_name: String::new(),
            given_name: String::new(),
            dob: None,
            grade: None,
            site: String::new(),
            details: RosterDetails::default(),
        };
        for (column, cell) in columns.iter().zip(record.iter()) {
            let cell = cell.trim();
            // A cell may be guarded by our own reports; the apostrophe is not part of the value.
            let cell = if kind(*column).is_some() {
                unguarded(cell).trim()
            } else {
                cell
            };
            if let Some(expected) = cells::forbidden(kind(*column).unwrap_or(Kind::Code), cell) {
                self.wrong(place, *column, cell, expected);
            } else {
                self.set(&mut child, *column, cell, place);
            }
        }
        for (column, value) in [
            (Column::ChildId, &child.child_id),
            (Column::Site, &child.site),
        ] {
            if value.is_empty() && !self.has_problem(place, column) {
                self.wrong(place, column, "", format!("a {}", column.title()));
            }
        }
        if child.family_name.is_empty()
            && child.given_name.is_empty()
            && !self.has_problem(place, Column::FamilyName)
            && !self.has_problem(place, Column::GivenName)
        {
            self.wrong(place, Column::FamilyName, "", "a name");
        }
        child
    }

    fn has_problem(&self, place: Place, column: Column) -> bool {
        self.problems
            .kept()
            .iter()
            .rev()
            .take_while(|p| p.place == Some(place))
            .any(|p| p.column.as_deref() == Some(column.word()))
    }

    fn wrong(&mut self, place: Place, column: Column, cell: &str, expected: impl Into<String>) {
        let problem = Problem::of_cell(self.file, place, column.word(), cell, expected);
        self.problems.push(problem);
    }

    fn set(&mut self, child: &mut RosterChild, column: Column, cell: &str, place: Place) {
        let details = &mut child.details;
        match column {
            Column::Dob => child.dob = self.date(column, cell, place, "a birth date"),
            Column::LastExamOn => {
                details.last_exam_on = self.date(column, cell, place, "an examination");
            }
            Column::Grade if cell.is_empty() => {}
            Column::Grade => match Grade::parse(cell) {
                Some(grade) => child.grade = Some(grade),
                None => self.wrong(place, column, cell, "a grade: PK, TK, KG or K, 1 to 12"),
            },
            Column::Consent => {
                details.consent =
                    self.word(column, cell, place, &Consent::words(), Consent::from_word);
            }
            Column::SpecialEducation => {
                details.special_education = self.yes_no(column, cell, place);
            }
            Column::WearsGlasses => details.wears_glasses = self.yes_no(column, cell, place),
            Column::UnderCare => details.under_care = self.yes_no(column, cell, place),
            Column::History => {
                // The same list as the results file, since rules act on it.
                let mut readings = Readings::default();
                match readings.set(Field::History, cell, ReadingContext::default()) {
                    Ok(_) => {
                        details.history = readings.get(Field::History).unwrap_or_default();
                    }
                    Err(error) => self.wrong(place, column, cell, error.expected),
                }
            }
            Column::ChildId => cell.clone_into(&mut child.child_id),
            Column::FamilyName => cell.clone_into(&mut child.family_name),
            Column::GivenName => cell.clone_into(&mut child.given_name),
            Column::Site => cell.clone_into(&mut child.site),
            Column::Class => cell.clone_into(&mut details.class),
            Column::Teacher => cell.clone_into(&mut details.teacher),
            Column::Sex => cell.clone_into(&mut details.sex),
            Column::Language => cell.clone_into(&mut details.language),
            Column::Ethnicity => cell.clone_into(&mut details.ethnicity),
            Column::Insurance => cell.clone_into(&mut details.insurance),
            Column::StateId => cell.clone_into(&mut details.state_id),
            Column::GuardianName => cell.clone_into(&mut details.guardian_name),
            Column::GuardianPhone => cell.clone_into(&mut details.guardian_phone),
            Column::GuardianEmail => cell.clone_into(&mut details.guardian_email),
            Column::GuardianAddress => cell.clone_into(&mut details.guardian_address),
            Column::Guardian2Name => cell.clone_into(&mut details.guardian2_name),
            Column::Guardian2Phone => cell.clone_into(&mut details.guardian2_phone),
            Column::Guardian2Email => cell.clone_into(&mut details.guardian2_email),
            Column::KnownCondition => cell.clone_into(&mut details.known_condition),
            Column::DoctorName => cell.clone_into(&mut details.doctor_name),
            Column::DoctorPhone => cell.clone_into(&mut details.doctor_phone),
            Column::Notes => cell.clone_into(&mut details.notes),
        }
    }

    fn yes_no(&mut self, column: Column, cell: &str, place: Place) -> Option<YesNo> {
        self.word(column, cell, place, &YesNo::words(), YesNo::from_word)
    }

    fn word<T>(
        &mut self,
        column: Column,
        cell: &str,
        place: Place,
        words: &str,
        from: impl Fn(&str) -> Option<T>,
    ) -> Option<T> {
        if cell.is_empty() {
            return None;
        }
        let value = from(&cell.to_ascii_lowercase());
        if value.is_none() {
            self.wrong(place, column, cell, cells::one_of(words, cell));
        }
        value
    }

    fn date(&mut self, column: Column, cell: &str, place: Place, what: &str) -> Option<NaiveDate> {
        if cell.is_empty() {
            return None;
        }
        match cells::date(cell) {
            Ok(date) if date > self.today => {
                let expected = format!("{what} on or before {}", self.today);
                self.wrong(place, column, cell, expected);
                None
            }
            Ok(date) => Some(date),
            Err(error @ NotADate::Order(_)) => {
                let problem =
                    Problem::of_cell(self.file, place, column.word(), cell, error.expected());
                // One line per column says it: the first cell whose order can be told, if any.
                let told = |e: &str| !e.contains(" or month, day");
                let entry = self
                    .orders
                    .entry(column.word())
                    .or_insert_with(|| (problem.clone(), 0));
                entry.1 += 1;
                if !told(&entry.0.expected) && told(&problem.expected) {
                    entry.0 = problem;
                }
                None
            }
            Err(error) => {
                self.wrong(place, column, cell, error.expected());
                None
            }
        }
    }

    /// Adds one problem for each column whose dates are in another order.
    fn finish(&mut self) {
        let mut orders: Vec<_> = self.orders.drain().map(|(_, found)| found).collect();
        orders.sort_by_key(|(problem, _)| problem.place);
        for (problem, count) in orders {
            let cells = if count == 1 { "cell" } else { "cells" };
            self.problems.push(problem.cure(format!(
                "{count} {cells} of this column; format the column as YYYY-MM-DD and save again"
            )));
        }
    }
}

/// What text a column holds; nothing for codes, numbers and dates.
fn kind(column: Column) -> Option<Kind> {
    match column {
        Column::Dob
        | Column::LastExamOn
        | Column::Grade
        | Column::Consent
        | Column::SpecialEducation
        | Column::WearsGlasses
        | Column::UnderCare
        | Column::History => None,
        Column::ChildId => Some(Kind::Id),
        Column::FamilyName
        | Column::GivenName
        | Column::Site
        | Column::Class
        | Column::Teacher
        | Column::GuardianName
        | Column::Guardian2Name
        | Column::DoctorName => Some(Kind::Name),
        Column::GuardianAddress | Column::KnownCondition | Column::Notes => Some(Kind::Note),
        _ => Some(Kind::Line),
    }
}
