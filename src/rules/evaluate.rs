//! Rule set, case → outcome: pure, total, three-valued.

mod acuity;
mod facts;
mod others;
mod refraction;
mod set;

use std::sync::Arc;

use crate::domain::age::days_after;
use crate::domain::outcome::{Answer, DecidedBy, Margin, Outcome, OutcomeKind, RiskKind, Urgency};
use crate::domain::readings::Eye;
use crate::rules::{Case, RuleSet};

pub(super) use facts::Facts;
pub(super) use refraction::{largest_passing, meridional};
pub(super) use set::{Spoken, answer, is_for, pass_line, scope, speak};

/// What one criterion answered, before it is put beside its source.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(in crate::rules) struct Answered {
    pub answer: Answer,
    pub eye: Option<Eye>,
    pub reading: String,
    pub margin: Margin,
    pub remarks: Vec<String>,
    pub would_change: String,
    /// Answers of the right and the left eye, where each eye has one.
    pub by_eye: Option<[Answer; 2]>,
    /// Why the criterion is not for this child; it then neither passes nor is missing.
    pub not_applicable: Option<&'static str>,
}

impl Answered {
    pub(super) fn new(answer: Answer, reading: impl Into<String>) -> Answered {
        Answered {
            answer,
            eye: None,
            reading: reading.into(),
            margin: Margin::None,
            remarks: Vec::new(),
            would_change: String::new(),
            by_eye: None,
            not_applicable: None,
        }
    }
}

/// Combines the eyes: refer if either refers, pass if both pass, else unknown.
pub(super) fn either_eye(eyes: [Answer; 2]) -> Answer {
    match eyes {
        [Answer::Refer, _] | [_, Answer::Refer] => Answer::Refer,
        [Answer::Pass, Answer::Pass] => Answer::Pass,
        _ => Answer::Unknown,
    }
}

/// Returns the eye that alone gave the combined answer.
pub(super) fn deciding_eye(eyes: [Answer; 2]) -> Option<Eye> {
    let all = either_eye(eyes);
    match [eyes[0] == all, eyes[1] == all] {
        [true, false] => Some(Eye::Right),
        [false, true] => Some(Eye::Left),
        _ => None,
    }
}

/// Judges a case by one rule set alone.
pub fn judge_rule_set(set: &RuleSet, case: &Case<'_>) -> Outcome {
    let facts = Facts::new(case, pass_line(set, case.age, case.grade));
    let mut outcome = Outcome {
        kind: OutcomeKind::Pass,
        decided_by: DecidedBy::Nothing,
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
        rule_set: Arc::clone(&set.id),
        edition: Arc::clone(&set.edition),
        content_hash: Arc::clone(&set.content_hash),
    };
    let mut missing = false;
    let scope = scope(set, case.age, case.grade);
    if let Some(word) = scope.unknown_word() {
        outcome.unknown.push(word.to_owned());
        missing = true;
    }
    if scope.speaks() {
        for spoken in speak(set, &facts) {
            if let Some(why) = spoken.not_applicable {
                outcome.protocol_notes.push(format!(
                    "{}: not applicable, {why}",
                    spoken.reason.criterion
                ));
            }
            match spoken.reason.answer {
                Answer::Refer => outcome.criteria.push(spoken.reason.criterion.to_string()),
                Answer::Unknown => {
                    missing |= spoken.reason.required;
                    outcome.unknown.push(spoken.reason.criterion.to_string());
                }
                Answer::Pass => {}
            }
            outcome.reasons.push(spoken.reason);
        }
    }
    if !outcome.criteria.is_empty() {
        outcome.kind = OutcomeKind::Refer;
        outcome.decided_by = DecidedBy::Criterion;
    } else if missing {
        outcome.kind = OutcomeKind::Incomplete;
        outcome.decided_by = DecidedBy::Missing;
    } else if facts.critical_line {
        outcome
            .qualifiers
            .push(critical_line_words(&outcome.unknown));
    }
    settle(&mut outcome, case);
    outcome
}

/// Says that a pass stands on the critical line, and what that leaves open.
pub(super) fn critical_line_words(unknown: &[String]) -> String {
    let open = unknown.iter().any(|id| {
        id.rsplit('/')
            .next()
            .is_some_and(|c| c.starts_with("between-eyes"))
    });
    if open {
        "critical line; difference between the eyes not tested".to_owned()
    } else {
        "critical line".to_owned()
    }
}

/// Fills urgency, days, date and risks from the criteria that refer.
pub(super) fn settle(outcome: &mut Outcome, case: &Case<'_>) {
    let referring = || outcome.reasons.iter().filter(|r| r.answer == Answer::Refer);
    let mut risks: Vec<RiskKind> = referring().filter_map(|r| r.risk).collect();
    risks.sort_unstable();
    risks.dedup();
    if matches!(outcome.kind, OutcomeKind::Refer | OutcomeKind::Rescreen) {
        let urgency = referring().map(|r| r.urgency).min();
        let days = referring().filter_map(|r| r.act_within_days).min();
        outcome.urgency = Some(urgency.unwrap_or(Urgency::Routine));
        outcome.act_within_days = days;
        outcome.act_by = case.on.zip(days).map(|(on, days)| days_after(on, days));
    }
    outcome.risks = risks;
}
