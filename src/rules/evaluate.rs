//! Rule set, case → outcome: pure, total, three-valued.

use crate::domain::outcome::{DecidedBy, Outcome, OutcomeKind};
use crate::rules::{Case, RuleSet};

/// Judges a case by one rule set alone.
pub fn judge_rule_set(set: &RuleSet, _case: &Case<'_>) -> Outcome {
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
        rule_set: set.id.clone(),
        edition: set.edition.clone(),
        content_hash: set.content_hash.clone(),
    }
}
