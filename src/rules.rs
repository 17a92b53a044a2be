//! Published guidance as data: load, evaluate, explain.
//!
//! A rule set is one TOML file under `referral_rules/`, or a local file of the programme. No
//! threshold stands in code: [`load`](Library::with_local) types what the files say, [`judge_rule_set`]
//! and [`judge_protocol`] answer from it, [`explain`] and [`show`] put both into words.

pub mod check;
pub mod compare;
mod error;
mod evaluate;
pub mod explain;
pub mod grading;
mod library;
mod load;
mod model;
mod protocol;
pub mod show;
mod threshold;

use chrono::NaiveDate;

use crate::domain::acuity::Line;
use crate::domain::age::{AgeMonths, Grade};
use crate::domain::codes::{AcuityMethod, Attempt, Consent};
use crate::domain::readings::Readings;
use crate::domain::school_calendar::SchoolCalendar;

pub use error::{RuleError, RuleErrors};
pub use evaluate::judge_rule_set;
pub use library::Library;
pub use model::{
    Applies, Approval, Compare, Criterion, Exemption, Finding, FirstFail, Kind, Measure, Metric,
    NotTestablePolicy, Protocol, RequiredTests, RiskRule, RuleSet, Test,
};
pub use protocol::{
    CONFLICT, PassLine, judge_protocol, judge_protocol_alternatives, pass_line, pass_line_of_set,
};

/// What is said wherever an outcome is shown.
pub const CAUTIONS: [&str; 4] = [
    "A screening is not an eye examination. A pass does not rule out disease.",
    "The law and the protocol of the place come first.",
    "A licensed professional approves the protocol in use.",
    "Urgent signs are acted on at once, whatever the chart says.",
];

/// What earlier visits of this term left behind.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct Earlier {
    /// Earlier visits that ended because glasses were owned and not worn.
    pub glasses_visits: u32,
    /// Whether an earlier visit ended not testable.
    pub not_testable: bool,
}

/// All that is known beside the readings.
#[derive(Debug, Clone, Copy)]
pub struct Case<'a> {
    /// Completed months on the screening day.
    pub age: Option<AgeMonths>,
    /// School grade.
    pub grade: Option<Grade>,
    /// The screening day; without it no date is given.
    pub on: Option<NaiveDate>,
    /// First visit or rescreen.
    pub attempt: Attempt,
    /// How the chart is read on this day; the reading's own method wins.
    pub method: Option<AcuityMethod>,
    /// Consent as the roster knows it.
    pub consent: Option<Consent>,
    /// Under care, as the roster knows it; history and status add to it.
    pub under_care: bool,
    /// Examined in the last 12 months, as the roster knows it; history adds to it.
    pub examined_recently: bool,
    /// Earlier visits.
    pub earlier: Earlier,
    /// On a rescreen: the criteria that referred before, as `rule-set/criterion`; each is asked again.
    pub failed_before: &'a [String],
    /// Lines of the chart in use, where it is known: decides "neighbouring lines on this chart".
    pub chart: Option<&'a [Line]>,
    /// Days on which school is held, where they are known: working days are counted on it.
    pub calendar: Option<&'a SchoolCalendar>,
    /// The readings.
    pub readings: &'a Readings,
}

impl<'a> Case<'a> {
    /// Returns a first visit of which only the readings are known.
    pub fn new(readings: &'a Readings) -> Case<'a> {
        Case {
            age: None,
            grade: None,
            on: None,
            attempt: Attempt::First,
            method: None,
            consent: None,
            under_care: false,
            examined_recently: false,
            earlier: Earlier::default(),
            failed_before: &[],
            chart: None,
            calendar: None,
            readings,
        }
    }
}
