//! Letters to families, doctors and examiners: one print-ready HTML file, each child on a page.
//!
//! The words are Fluent messages, one file a language; the form is minijinja templates. A programme
//! puts files of the same names into the `letters` folder of its store to change either, or a new
//! language's file to add it.

mod error;
mod messages;
mod page;

use std::collections::BTreeMap;

use chrono::NaiveDate;

use crate::domain::codes::Correction;
use crate::domain::form_code::FormCode;
use crate::domain::referral::LetterKind;
use crate::domain::screening_test::ScreeningTest;

pub use error::LetterError;
pub use messages::{Language, Messages};
pub use page::Letters;

/// Who writes, and what a family is told about help.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Sender {
    /// Name of the programme.
    pub programme: String,
    /// Who answers questions.
    pub who: String,
    /// Telephone; empty if none is set.
    pub phone: String,
    /// Where help with the cost is found; empty if none is set.
    pub help: String,
    /// Languages whose text somebody has approved, with by whom and when.
    pub approved: BTreeMap<String, String>,
}

/// What was found in one test, as it is printed.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Found {
    /// Which test.
    pub test: ScreeningTest,
    /// Right eye, then left eye; one value where both eyes were tested together.
    pub values: FoundValues,
}

/// The values of one test.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum FoundValues {
    /// Each eye.
    Eyes([FoundValue; 2]),
    /// Both together.
    Together(FoundValue),
}

/// One value.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum FoundValue {
    /// As it was recorded: `20/40`.
    Value(String),
    /// Nothing that calls for a look.
    Fine,
    /// Something that an eye doctor should look at.
    Look,
    /// It could not be done.
    NotTestable,
    /// Nobody did it.
    NotDone,
}

/// Why a child is referred, as far as a family is told.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Because {
    /// A test was not passed, or something was seen.
    #[default]
    NotPassed,
    /// What is known of the child or the family, whatever the chart says.
    History,
    /// The tests could not be done well.
    NotTested,
}

/// One letter.
#[derive(Debug, Clone, PartialEq)]
pub struct Letter {
    /// Which.
    pub kind: LetterKind,
    /// Language code; one without a file is an error.
    pub language: String,
    /// `Ada Okafor`.
    pub child: String,
    /// Birth date, if known.
    pub born: Option<NaiveDate>,
    /// Class or grade.
    pub class: String,
    /// Name of the site.
    pub site: String,
    /// When it is written.
    pub written_on: NaiveDate,
    /// When the child was screened, where a screening is behind it.
    pub tested_on: Option<NaiveDate>,
    /// Whether the child has to be seen today.
    pub at_once: bool,
    /// Why the child is referred.
    pub because: Because,
    /// What was tested.
    pub found: Vec<Found>,
    /// Glasses or contact lenses during the test, where it was noted.
    pub correction: Option<Correction>,
    /// Go by this date, or be tested again by it.
    pub by: Option<NaiveDate>,
    /// When the letter before went out.
    pub wrote_on: Option<NaiveDate>,
    /// With whom somebody spoke, and when.
    pub call: Option<(String, NaiveDate)>,
    /// The code of the referral.
    pub code: Option<FormCode>,
    /// Name of the child's doctor.
    pub doctor: String,
    /// The outcome in words, for a doctor.
    pub outcome: String,
    /// Whether the family asked for an interpreter, or nobody asked them.
    pub interpreter: bool,
}
