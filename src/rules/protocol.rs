//! Protocol, case → outcome: the first line that applies.

use crate::domain::acuity::Line;
use crate::domain::age::{AgeMonths, Grade};
use crate::domain::outcome::{DecidedBy, Outcome, OutcomeKind};
use crate::rules::{Case, Library, Protocol};

/// The worst line that still passes for a child.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct PassLine {
    /// The line.
    pub line: Line,
    /// "passes at 6 years"
    pub words: String,
}

/// Judges a case by a protocol.
pub fn judge_protocol(_library: &Library, protocol: &Protocol, _case: &Case<'_>) -> Outcome {
    Outcome {
        kind: OutcomeKind::Incomplete,
        decided_by: DecidedBy::Missing,
        urgency: None,
        act_within_days: None,
        act_by: None,
        due_on: None,
        risks: Vec::new(),
        criteria: Vec::new(),
        unknown: Vec::new(),
        reasons: Vec::new(),
        qualifiers: Vec::new(),
        protocol_notes: Vec::new(),
        rule_set: protocol.id.clone(),
        edition: protocol.edition.clone(),
        content_hash: protocol.content_hash.clone(),
    }
}

/// Returns the worst line of the distance chart that still passes for a child, where one is set.
pub fn pass_line(
    _library: &Library,
    _protocol: &Protocol,
    _age: Option<AgeMonths>,
    _grade: Option<Grade>,
) -> Option<PassLine> {
    None
}

/// Returns the worst line of the distance chart that still passes by one rule set.
pub fn pass_line_of_set(
    _set: &crate::rules::RuleSet,
    _age: Option<AgeMonths>,
    _grade: Option<Grade>,
) -> Option<PassLine> {
    None
}
