//! Cases from short texts, for the other files here.

use chrono::NaiveDate;
use twoline::domain::age::{AgeMonths, Grade};
use twoline::domain::codes::{Attempt, Consent};
use twoline::domain::field::Field;
use twoline::domain::outcome::Outcome;
use twoline::domain::readings::{ReadingContext, Readings};
use twoline::rules::{Case, Library, judge_protocol, judge_rule_set};

/// Reads `distance_right=20/20 distance_left=20/32` into readings. `_` in a value stands for itself.
pub fn readings(text: &str) -> Readings {
    let mut out = Readings::default();
    for part in text.split_whitespace() {
        let (field, value) = part.split_once('=').unwrap();
        let field = Field::from_word(field).unwrap_or_else(|| panic!("no field {field}"));
        out.set(field, value, ReadingContext::default())
            .unwrap_or_else(|e| panic!("{e}"));
    }
    out
}

pub fn date(text: &str) -> NaiveDate {
    text.parse().unwrap()
}

/// One child of a test.
pub struct Child {
    pub readings: Readings,
    pub age: Option<u32>,
    pub grade: Option<&'static str>,
    pub rescreen: bool,
    pub consent: Option<Consent>,
    pub under_care: bool,
    pub glasses_visits: u32,
    pub earlier_not_testable: bool,
}

pub fn child(age: u32, text: &str) -> Child {
    Child {
        readings: readings(text),
        age: Some(age),
        grade: None,
        rescreen: false,
        consent: None,
        under_care: false,
        glasses_visits: 0,
        earlier_not_testable: false,
    }
}

impl Child {
    pub fn case(&self) -> Case<'_> {
        let mut case = Case::new(&self.readings);
        case.age = self.age.map(AgeMonths);
        case.grade = self.grade.map(|g| Grade::parse(g).unwrap());
        case.on = Some(date("2026-10-14"));
        case.attempt = if self.rescreen {
            Attempt::Rescreen
        } else {
            Attempt::First
        };
        case.consent = self.consent;
        case.under_care = self.under_care;
        case.earlier.glasses_visits = self.glasses_visits;
        case.earlier.not_testable = self.earlier_not_testable;
        case
    }

    pub fn by_set(&self, id: &str) -> Outcome {
        judge_rule_set(Library::shipped().rule_set(id).unwrap(), &self.case())
    }

    pub fn by_protocol(&self, id: &str) -> Outcome {
        let library = Library::shipped();
        judge_protocol(library, library.protocol(id).unwrap(), &self.case())
    }
}

/// `kind/urgency criteria | unknown` in one line, for tables.
pub fn word(outcome: &Outcome) -> &'static str {
    outcome.kind.word()
}

/// Returns a shipped file's text as a programme would keep it: another id, and approved.
pub fn local_form(text: &str) -> String {
    let (first, rest) = text.split_once('\n').unwrap();
    let id = first.strip_prefix("id = \"").unwrap().trim_end_matches('"');
    format!("id = \"local-{id}\"\napproved_by = \"Dr. R. Quill\"\napproved_on = 2026-08-01\n{rest}")
}
