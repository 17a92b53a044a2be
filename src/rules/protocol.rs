//! Protocol, case → outcome: the first line that applies.

mod alternatives;
mod gather;
mod lines;

use std::sync::Arc;

use crate::domain::acuity::Line;
use crate::domain::age::{AgeMonths, Grade};
use crate::domain::outcome::{Answer, DecidedBy, Margin, Open, Outcome, OutcomeKind};
use crate::rules::evaluate::{self, settle};
use crate::rules::{Case, Library, Measure, Protocol, RuleSet};

pub use alternatives::{CONFLICT, judge_protocol_alternatives};
use gather::Gathered;
use lines::Decision;

/// The worst line that still passes for a child.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct PassLine {
    /// The line.
    pub line: Line,
    /// "passes at 6 years"
    pub words: String,
}

/// Judges a case by a protocol.
pub fn judge_protocol(library: &Library, protocol: &Protocol, case: &Case<'_>) -> Outcome {
    let gathered = Gathered::new(library, protocol, case);
    let decision = lines::decide(protocol, case, &gathered);
    outcome(protocol, case, gathered, decision)
}

/// Puts the decision and everything that was asked into one outcome.
fn outcome(
    protocol: &Protocol,
    case: &Case<'_>,
    gathered: Gathered<'_>,
    decision: Decision,
) -> Outcome {
    let mut outcome = Outcome {
        kind: decision.kind,
        decided_by: decision.by,
        urgency: None,
        act_within_days: None,
        act_by: None,
        due_on: decision.due_on,
        risks: Vec::new(),
        criteria: Vec::new(),
        unknown: Vec::new(),
        reasons: Vec::new(),
        qualifiers: decision.qualifiers,
        protocol_notes: decision.notes,
        rule_set: Arc::clone(&protocol.id),
        edition: Arc::clone(&protocol.edition),
        content_hash: Arc::clone(&protocol.content_hash),
    };
    outcome
        .unknown
        .extend(gathered.outside.iter().map(|word| (*word).to_owned()));
    let not_repeated = gathered.not_repeated;
    let acts_on_history = !gathered.under_care;
    // Without the glasses the chart is not judged: what it shows is no finding.
    let chart_unjudged = gathered.glasses_not_worn
        && !matches!(
            decision.by,
            DecidedBy::ReferAtOnce | DecidedBy::GlassesNeverAvailable
        );
    for mut spoken in gathered.spoken {
        if let Some(words) = spoken.left_out.take() {
            if !words.is_empty() {
                outcome.protocol_notes.push(words);
            }
            continue;
        }
        if let Some(why) = spoken.not_applicable {
            outcome.protocol_notes.push(format!(
                "{}: not applicable, {why}",
                spoken.set.title.to_lowercase()
            ));
            continue;
        }
        if chart_unjudged && gathered.chart_sets.contains(&spoken.reason.rule_set) {
            spoken.reason.answer = Answer::Unknown;
            spoken.reason.open = Open::NotJudged;
            spoken.reason.margin = Margin::None;
            spoken.reason.would_change.clear();
            spoken.reason.eye = None;
            spoken
                .reason
                .remarks
                .push("glasses owned and not worn: not judged".to_owned());
        }
        let set_aside = spoken.measure == Measure::History && !acts_on_history;
        match spoken.reason.answer {
            Answer::Refer if set_aside => {
                outcome
                    .protocol_notes
                    .push(format!("history: {} (under care)", spoken.reason.reading));
                continue;
            }
            Answer::Refer if spoken.reason.then.is_again() != decision.again => {}
            Answer::Refer => outcome.criteria.push(spoken.reason.full_id()),
            Answer::Unknown => outcome.unknown.push(spoken.reason.full_id()),
            Answer::Pass => {}
        }
        outcome.reasons.push(spoken.reason);
    }
    for id in not_repeated {
        if !outcome.unknown.contains(&id) {
            outcome.unknown.push(id);
        }
    }
    if outcome.kind == OutcomeKind::Pass
        && outcome.decided_by == DecidedBy::Nothing
        && gathered.critical_line
    {
        outcome
            .qualifiers
            .push(evaluate::critical_line_words(&outcome.unknown));
    }
    settle(&mut outcome, case);
    outcome
}

/// Returns the worst line of the distance chart that still passes for a child, where one is set.
pub fn pass_line(
    library: &Library,
    protocol: &Protocol,
    age: Option<AgeMonths>,
    grade: Option<Grade>,
) -> Option<PassLine> {
    protocol
        .rule_sets
        .iter()
        .filter_map(|id| library.rule_set(id))
        .find_map(|set| pass_line_of_set(set, age, grade))
}

/// Returns the worst line of the distance chart that still passes by one rule set.
pub fn pass_line_of_set(
    set: &RuleSet,
    age: Option<AgeMonths>,
    grade: Option<Grade>,
) -> Option<PassLine> {
    let line = evaluate::pass_line(set, age, grade)?;
    let words = match (set.by_grade, grade, age) {
        (true, Some(grade), _) => format!("passes in grade {grade}"),
        (_, _, Some(age)) => format!("passes at {} years", age.0 / 12),
        _ => "passes".to_owned(),
    };
    Some(PassLine { line, words })
}
