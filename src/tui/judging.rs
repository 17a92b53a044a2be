//! What the screens ask of the rules, all of it pure and asked on every key press.

use crate::actions::{DayChild, DayInfo};
use crate::domain::acuity::{Line, Notation, Step};
use crate::domain::field::Field;
use crate::domain::outcome::{DecidedBy, Outcome, OutcomeKind};
use crate::domain::readings::Readings;

/// Stands in for the library until it lands.
#[derive(Debug)]
pub struct Library;

/// The pass line of a child.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct PassLine { pub line: Line, pub words: String }

/// The cautions.
pub const CAUTIONS: [&str; 4] = [
    "A screening is not an eye examination. A pass does not rule out disease.",
    "The law and the protocol of the place come first.",
    "A licensed professional approves the protocol in use.",
    "Urgent signs are acted on at once, whatever the chart says.",
];

pub fn preview(_: &Library, _: &DayInfo, _: &DayChild, _: &Readings) -> Outcome {
    Outcome { kind: OutcomeKind::Incomplete, decided_by: DecidedBy::Missing, urgency: None, act_within_days: None, act_by: None, due_on: None, risks: vec![], criteria: vec![], unknown: vec![], reasons: vec![], qualifiers: vec![], protocol_notes: vec![], rule_set: "us-school".into(), edition: "x".into(), content_hash: "".into() }
}
pub fn pass_line_for(_: &Library, _: &DayInfo, child: &DayChild) -> Option<PassLine> {
    child.age.map(|_| PassLine { line: Line::at(Step(2), Notation::Feet), words: "passes at 6 years".into() })
}
pub fn bench_fields(_: &Library, _: &DayInfo, _: &DayChild) -> Vec<Field> {
    vec![Field::History, Field::Signs, Field::Cover, Field::DistanceRight, Field::DistanceLeft, Field::RedReflexRight, Field::RedReflexLeft, Field::PlusLens]
}
pub mod explain {
    use super::Outcome;
    pub fn short(_: &Outcome) -> String { "short".into() }
    pub fn headline(o: &Outcome) -> String { o.kind.title().to_uppercase() }
    pub fn whole(_: &Outcome) -> Vec<String> { vec!["whole".into()] }
}
pub fn rule_pages(_: &Library) -> Vec<(String, Vec<String>)> { vec![] }
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Draft { pub day: uuid::Uuid, pub child_id: String, pub visit: uuid::Uuid, pub fields: Vec<(String, String)>, pub cursor: String }
pub fn protocol_ids(_: &Library) -> Vec<String> { vec!["us-school".into(), "us-preschool".into()] }
