//! Two values for one fact that nobody has settled: every alternative is judged, and what they do
//! not agree on is unknown.

use crate::domain::field::Field;
use crate::domain::outcome::{Answer, DecidedBy, Margin, Open, Outcome, OutcomeKind, Reason};
use crate::domain::readings::Readings;
use crate::rules::{Case, Library, Protocol};

use super::judge_protocol;

/// The word that stands in `unknown` where alternatives do not agree.
pub const CONFLICT: &str = "conflict";

/// Judges a case whose readings are one of several alternatives, none of which is settled yet.
///
/// Where all alternatives come to the same the outcome stands; else it is incomplete with
/// [`CONFLICT`] in `unknown`. Either way the soonest urgency and dates of any alternative stand. The
/// order of the alternatives and a repeated one make no difference; with one alternative (or none,
/// when the case's own readings are taken) it is [`judge_protocol`]. Every alternative is judged, so
/// the caller bounds how many combinations it makes.
pub fn judge_protocol_alternatives(
    library: &Library,
    protocol: &Protocol,
    case: &Case<'_>,
    alternatives: &[Readings],
) -> Outcome {
    let mut distinct: Vec<&Readings> = Vec::new();
    for readings in alternatives {
        if !distinct.contains(&readings) {
            distinct.push(readings);
        }
    }
    distinct.sort_by_cached_key(|readings| -> Vec<Option<String>> {
        Field::ALL.iter().map(|f| readings.get(*f)).collect()
    });
    if distinct.is_empty() {
        distinct.push(case.readings);
    }
    let mut outcomes: Vec<Outcome> = distinct
        .into_iter()
        .map(|readings| judge_protocol(library, protocol, &Case { readings, ..*case }))
        .collect();
    // The soonest speaks for all where they agree.
    outcomes.sort_by_key(|o| (o.urgency.is_none(), o.urgency, o.act_by.is_none(), o.act_by));
    joined(&outcomes)
}

/// Joins the outcomes of alternatives, the soonest first, of which there is at least one.
fn joined(all: &[Outcome]) -> Outcome {
    let mut out = all[0].clone();
    let rest = &all[1..];
    if rest.is_empty() {
        return out;
    }
    out.act_within_days = all.iter().filter_map(|o| o.act_within_days).min();
    out.act_by = all.iter().filter_map(|o| o.act_by).min();
    out.due_on = all.iter().filter_map(|o| o.due_on).min();
    for word in rest.iter().flat_map(|o| &o.unknown) {
        if !out.unknown.contains(word) {
            out.unknown.push(word.clone());
        }
    }
    out.reasons = reasons(all);
    for reason in out.reasons.iter().filter(|r| r.open == Open::NotSettled) {
        let id = reason.full_id();
        if !out.unknown.contains(&id) {
            out.unknown.push(id);
        }
    }
    if rest.iter().all(|o| o.kind == out.kind) {
        // What only some of them say is no fact yet.
        out.criteria
            .retain(|id| rest.iter().all(|o| o.criteria.contains(id)));
        out.risks
            .retain(|risk| rest.iter().all(|o| o.risks.contains(risk)));
        out.protocol_notes.push(
            "values that nobody has settled: the outcome is the same with each of them".to_owned(),
        );
        return out;
    }
    let kinds: Vec<&str> = OutcomeKind::ALL
        .iter()
        .filter(|kind| all.iter().any(|o| o.kind == **kind))
        .map(|kind| kind.title())
        .collect();
    out.qualifiers = vec![format!(
        "values that nobody has settled: {}",
        kinds.join(" or ")
    )];
    out.kind = OutcomeKind::Incomplete;
    out.decided_by = DecidedBy::Conflict;
    out.unknown.insert(0, CONFLICT.to_owned());
    for reason in out.reasons.iter().filter(|r| r.answer == Answer::Unknown) {
        let id = reason.full_id();
        if !out.unknown.contains(&id) {
            out.unknown.push(id);
        }
    }
    out.criteria.clear();
    out.risks.clear();
    out
}

/// Joins the criteria: an answer stands where every alternative gives it, else it is unknown.
fn reasons(all: &[Outcome]) -> Vec<Reason> {
    let same = |a: &Reason, b: &Reason| a.rule_set == b.rule_set && a.criterion == b.criterion;
    let mut out: Vec<Reason> = Vec::new();
    for reason in all.iter().flat_map(|o| &o.reasons) {
        if out.iter().any(|r| same(r, reason)) {
            continue;
        }
        let given: Vec<&Reason> = all
            .iter()
            .filter_map(|o| o.reasons.iter().find(|r| same(r, reason)))
            .collect();
        let mut joined = reason.clone();
        if given.len() < all.len() || given.iter().any(|r| r.answer != reason.answer) {
            let mut readings: Vec<&str> = Vec::new();
            for reading in given.iter().map(|r| r.reading.as_str()) {
                if !readings.contains(&reading) {
                    readings.push(reading);
                }
            }
            joined.reading = readings.join("; or ");
            joined.answer = Answer::Unknown;
            joined.open = Open::NotSettled;
            joined.margin = Margin::None;
            joined.eye = None;
            joined.would_change.clear();
            joined.chart_change = None;
            joined.remarks = vec!["values that nobody has settled".to_owned()];
        }
        out.push(joined);
    }
    out
}
