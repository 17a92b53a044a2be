//! What the screens ask of the rules, all of it pure and asked on every key press, and the draft
//! as the screens keep it.

use std::sync::Arc;

use chrono::NaiveDate;
use uuid::Uuid;

pub use crate::actions::{
    CAUTIONS, Library, PassLine, Standing, bench_tests, explain, judged, known, pass_line_for,
    show, whole_reason,
};

use crate::actions::{self, DayChild, DayInfo};
use crate::domain::codes::Attempt;
use crate::domain::outcome::{DecidedBy, Outcome, OutcomeKind};
use crate::domain::readings::Readings;

/// What was typed for one child and not signed yet.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Draft {
    /// The day.
    pub day: Arc<DayInfo>,
    /// The child.
    pub child_id: String,
    /// The visit's id, given when the child came to the bench.
    pub visit: Uuid,
    /// Which visit.
    pub attempt: Attempt,
    /// Field word and text as typed.
    pub fields: Vec<(String, String)>,
    /// The word of the field with the focus, or `sign`.
    pub cursor: String,
}

/// Returns what the readings come to; without the day's protocol nothing can be judged.
pub fn preview(library: &Library, day: &DayInfo, child: &DayChild, readings: &Readings) -> Outcome {
    actions::preview(library, day, child, readings).unwrap_or_else(|| without_protocol(day))
}

fn without_protocol(day: &DayInfo) -> Outcome {
    Outcome {
        kind: OutcomeKind::Incomplete,
        decided_by: DecidedBy::Missing,
        urgency: None,
        act_within_days: None,
        act_by: None::<NaiveDate>,
        due_on: None,
        risks: Vec::new(),
        criteria: Vec::new(),
        unknown: Vec::new(),
        reasons: Vec::new(),
        qualifiers: vec![format!(
            "the protocol {} is not here any more",
            day.protocol
        )],
        protocol_notes: Vec::new(),
        rule_set: day.protocol.as_str().into(),
        edition: "".into(),
        content_hash: "".into(),
    }
}

/// A page of the Rules place.
#[derive(Debug)]
pub enum RulePage {
    /// A rule set as a table.
    Sheet(Box<show::RuleSheet>),
    /// A protocol in lines.
    Lines(Vec<String>),
}

/// Returns every rule set and protocol with its id.
pub fn rule_pages(library: &Library) -> Vec<(String, RulePage)> {
    let sets = library.rule_sets().map(|set| {
        (
            set.id.to_string(),
            RulePage::Sheet(Box::new(show::sheet(set))),
        )
    });
    let protocols = library
        .protocols()
        .map(|p| (p.id.to_string(), RulePage::Lines(show::protocol_lines(p))));
    let gradings = library.gradings().map(|grading| {
        (
            grading.id.to_string(),
            RulePage::Sheet(Box::new(show::grading_sheet(grading))),
        )
    });
    sets.chain(gradings).chain(protocols).collect()
}

/// Returns the ids of the protocols.
pub fn protocol_ids(library: &Library) -> Vec<String> {
    library.protocols().map(|p| p.id.to_string()).collect()
}
