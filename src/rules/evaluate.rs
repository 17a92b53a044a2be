//! Rule set, case → outcome: pure, total, three-valued.

mod acuity;
mod facts;
mod others;
mod refraction;
mod set;

use std::sync::Arc;

use chrono::NaiveDate;

use crate::domain::age::{days_after, months_after};
use crate::domain::outcome::{
    Answer, ChartChange, DecidedBy, Margin, Open, Outcome, OutcomeKind, Reason, RiskKind, Then,
    Urgency,
};
use crate::domain::readings::Eye;
use crate::rules::{Case, RuleSet};

pub(super) use facts::Facts;
pub(super) use refraction::{in_dioptres, largest_passing, meridional};
pub(super) use set::{Spoken, answer, is_for, pass_line, scope, speak};

/// What one criterion answered, before it is put beside its source.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(in crate::rules) struct Answered {
    pub answer: Answer,
    pub open: Open,
    pub eye: Option<Eye>,
    pub reading: String,
    pub margin: Margin,
    pub remarks: Vec<String>,
    pub would_change: String,
    pub chart_change: Option<ChartChange>,
    /// Answers of the right and the left eye, where each eye has one.
    pub by_eye: Option<[Answer; 2]>,
    /// Why the criterion is not for this child; it then neither passes nor is missing.
    pub not_applicable: Option<&'static str>,
}

impl Answered {
    pub(super) fn new(answer: Answer, reading: impl Into<String>) -> Answered {
        Answered {
            answer,
            open: Open::NotDecided,
            eye: None,
            reading: reading.into(),
            margin: Margin::None,
            remarks: Vec::new(),
            would_change: String::new(),
            chart_change: None,
            by_eye: None,
            not_applicable: None,
        }
    }

    /// Has no answer, and says why.
    pub(super) fn open(why: Open, reading: impl Into<String>) -> Answered {
        Answered {
            open: why,
            ..Answered::new(Answer::Unknown, reading)
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
    // A rescreen stands only where nothing that is unknown could refer instead.
    let mut may_refer = false;
    let scope = scope(set, case.age, case.grade);
    if let Some(word) = scope.unknown_word() {
        outcome.unknown.push(word.to_owned());
        missing = true;
        may_refer = true;
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
                Answer::Refer => {}
                Answer::Unknown => {
                    missing |= spoken.reason.required;
                    may_refer |= spoken.reason.required && !spoken.reason.then.is_again();
                    outcome.unknown.push(spoken.reason.criterion.to_string());
                }
                Answer::Pass => {}
            }
            outcome.reasons.push(spoken.reason);
        }
    }
    let again = screened_again(outcome.reasons.iter(), case.on);
    if outcome.reasons.iter().any(refers) {
        outcome.kind = OutcomeKind::Refer;
        outcome.decided_by = DecidedBy::Criterion;
    } else if let Some((words, due_on)) = again.filter(|_| !may_refer) {
        outcome.kind = OutcomeKind::Rescreen;
        outcome.decided_by = DecidedBy::Criterion;
        outcome.due_on = due_on;
        outcome.qualifiers.extend(words);
    } else if missing {
        outcome.kind = OutcomeKind::Incomplete;
        outcome.decided_by = DecidedBy::Missing;
    } else if facts.critical_line {
        outcome
            .qualifiers
            .push(critical_line_words(&outcome.unknown));
    }
    let again = outcome.kind == OutcomeKind::Rescreen;
    outcome.criteria = outcome
        .reasons
        .iter()
        .filter(|r| r.answer == Answer::Refer && r.then.is_again() == again)
        .map(|r| r.criterion.to_string())
        .collect();
    settle(&mut outcome, case);
    outcome
}

/// Says whether a reason asks for an examination.
pub(super) fn refers(reason: &Reason) -> bool {
    reason.answer == Answer::Refer && !reason.then.is_again()
}

/// Returns what the criteria that ask for a second screening come to: its words and its date. The
/// sooner goes first, and a rescreen without a date before a recheck.
pub(super) fn screened_again<'r>(
    reasons: impl Iterator<Item = &'r Reason>,
    on: Option<NaiveDate>,
) -> Option<(Option<String>, Option<NaiveDate>)> {
    let then = reasons
        .filter(|r| r.answer == Answer::Refer && r.then.is_again())
        .map(|r| r.then)
        .min()?;
    Some(match then {
        Then::Recheck(months) => (Some(then.in_words()), on.map(|on| months_after(on, months))),
        _ => (None, None),
    })
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
    let again = outcome.kind == OutcomeKind::Rescreen && !outcome.reasons.iter().any(refers);
    let referring = || {
        outcome
            .reasons
            .iter()
            .filter(|r| r.answer == Answer::Refer && r.then.is_again() == again)
    };
    let high_priority = referring().any(|r| r.high_priority);
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
    if high_priority && outcome.kind == OutcomeKind::Refer {
        outcome.qualifiers.push("high priority".to_owned());
    }
}
