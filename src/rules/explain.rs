//! An outcome in words: for the foot of a screen, a cell of a file, the whole-reason view.

mod change;
mod words;

use std::fmt::Write;

use crate::domain::age::spoken;
use crate::domain::outcome::{
    Answer, Basis, DecidedBy, Open, Outcome, OutcomeKind, Reason, RiskKind, Then, Urgency,
};
use crate::rules::CAUTIONS;
use crate::rules::evaluate::refers;
use crate::rules::threshold::split_band;

pub use change::words as would_change;
pub(in crate::rules) use words::act_words;
pub use words::{basis_words, criterion_words, margin_words, source_words};

/// One row of the whole-reason view.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct ReasonLine {
    /// What was asked, in words.
    pub criterion: String,
    /// The reading.
    pub reading: String,
    /// What it answered.
    pub answer: Answer,
    /// The answer in words; where there is none, why.
    pub said: &'static str,
    /// The distance to the threshold in words.
    pub margin: String,
    /// What would turn the answer; empty where nothing is known to.
    pub change: String,
    /// The threshold as printed.
    pub threshold: String,
    /// Source and basis.
    pub source: String,
    /// Note and remarks.
    pub note: String,
}

/// Appends the reasons as one cell of text: what refers first, then what has no answer, then what
/// passes, shortly. Of a child who could not be tested that stands first.
pub fn reasons_text(outcome: &Outcome, out: &mut String) {
    let start = out.len();
    let part = |out: &mut String| {
        if out.len() > start {
            out.push_str(". ");
        }
    };
    let decided =
        |r: &Reason| outcome.decided_by == DecidedBy::NotTestable && r.open == Open::NotTestable;
    let open = || {
        outcome
            .reasons
            .iter()
            .filter(|r| r.answer == Answer::Unknown)
    };
    for reason in open().filter(|r| decided(r)) {
        part(out);
        let mut text = String::new();
        open_sentence(outcome, reason, &mut text);
        out.push_str(&capital(&text));
    }
    for reason in referring(outcome) {
        part(out);
        refer_sentence(reason, out);
    }
    for reason in open().filter(|r| !decided(r)) {
        part(out);
        open_sentence(outcome, reason, out);
    }
    for word in outcome
        .unknown
        .iter()
        .filter(|w| matches!(w.as_str(), "age" | "grade"))
    {
        part(out);
        let _ = write!(
            out,
            "no criterion for this {word}, or the {word} is not known"
        );
    }
    let mut signs_said: Vec<&str> = Vec::new();
    for reason in outcome.reasons.iter().filter(|r| r.answer == Answer::Pass) {
        if is_sign(reason) {
            if signs_said.contains(&&*reason.rule_set) || sign_seen(outcome, &reason.rule_set) {
                continue;
            }
            signs_said.push(&reason.rule_set);
        }
        if !passes_at_all(outcome, reason) {
            continue;
        }
        part(out);
        pass_words(reason, out);
    }
    for note in outcome.qualifiers.iter().chain(&outcome.protocol_notes) {
        part(out);
        out.push_str(note);
    }
}

/// Says why a criterion has no answer, and whether one could change the outcome.
fn open_sentence(outcome: &Outcome, reason: &Reason, out: &mut String) {
    let _ = write!(
        out,
        "{}: {}, {}{} ({})",
        reason.open.title(),
        criterion_words(&reason.criterion),
        reason.reading,
        in_brackets(&reason.remarks),
        could_words(outcome, reason)
    );
}

fn could_words(outcome: &Outcome, reason: &Reason) -> &'static str {
    if could_change(outcome, reason) {
        "could change the outcome"
    } else {
        "would not change the outcome"
    }
}

/// Returns what refers, the sooner first, and what decided before the rest.
fn referring(outcome: &Outcome) -> impl Iterator<Item = &Reason> {
    // Where something refers, what asks for a second screening only is no reason for it.
    let examined = outcome.reasons.iter().any(refers);
    let mut list: Vec<&Reason> = outcome
        .reasons
        .iter()
        .filter(|r| r.answer == Answer::Refer && (!r.then.is_again() || !examined))
        .collect();
    list.sort_by_key(|r| {
        let decided = match outcome.decided_by {
            DecidedBy::DirectReferral => is_sign(r),
            DecidedBy::ReferAtOnce => r.rule_set == outcome.rule_set,
            _ => false,
        };
        (r.urgency, !decided)
    });
    list.into_iter()
}

/// Says whether a sign of this set was seen, so that "none seen" would be wrong.
fn sign_seen(outcome: &Outcome, rule_set: &str) -> bool {
    outcome
        .reasons
        .iter()
        .any(|r| is_sign(r) && r.answer == Answer::Refer && &*r.rule_set == rule_set)
}

fn refer_sentence(reason: &Reason, out: &mut String) {
    out.push_str(&reason.reading);
    if is_sign(reason) {
        let _ = write!(out, "; {}", reason.urgency.title());
        if let Some(days) = reason.act_within_days {
            let _ = write!(out, ", {}", act_words(days));
        }
    } else {
        let _ = write!(out, "; {} when {}", asks(reason), reason.threshold);
        let margin = margin_words(reason);
        if !margin.is_empty() {
            let _ = write!(out, "; {margin}");
        }
    }
    let _ = write!(out, "; {}", source_words(&reason.source));
    out.push_str(&in_brackets(&reason.remarks));
}

/// Says what a criterion asks for: refers, rescreens, rechecks.
fn asks(reason: &Reason) -> &'static str {
    match reason.then {
        Then::Refer => "refers",
        Then::Rescreen => "rescreens",
        Then::Recheck(_) => "rechecks",
        Then::Inform => "informs",
    }
}

/// Names a source shortly: "Joint policy 2016, two-line rule (as quoted elsewhere)"; what does not
/// wait names its own source.
fn brief_source(reason: &Reason) -> String {
    let rule = match &*reason.threshold {
        "2 lines or more" => ", two-line rule",
        "3 lines or more" => ", three-line rule",
        _ => "",
    };
    let basis = match reason.source.basis {
        Basis::Memory => "from memory",
        basis => basis.title(),
    };
    if reason.urgency < Urgency::Routine {
        return format!("{} ({basis})", reason.source.citation);
    }
    format!("{}{rule} ({basis})", reason.said_by)
}

/// Says whether a pass is worth saying: where the same chart does not pass in another criterion of the
/// set, that only a part of it passes says nothing.
fn passes_at_all(outcome: &Outcome, reason: &Reason) -> bool {
    let chart = |r: &Reason| {
        let finding = split_band(&r.criterion).0;
        ["line", "near"]
            .into_iter()
            .find(|f| finding.split('.').next() == Some(f))
    };
    chart(reason).is_none_or(|mine| {
        !outcome.reasons.iter().any(|other| {
            other.answer != Answer::Pass
                && other.rule_set == reason.rule_set
                && chart(other) == Some(mine)
        })
    })
}

fn pass_words(reason: &Reason, out: &mut String) {
    let finding = criterion_words(split_band(&reason.criterion).0);
    if is_sign(reason) {
        let _ = write!(out, "{}: none seen", words::set_words(&reason.rule_set));
    } else if finding.starts_with("line") {
        out.push_str("both lines pass");
    } else if finding.starts_with("near") {
        out.push_str("both near lines pass");
    } else if finding.starts_with("between") {
        out.push_str(reason.reading.split(" (").next().unwrap_or_default());
    } else {
        // The finding is not said twice.
        let reading = reason.reading.strip_prefix(&*finding);
        let reading = reading.map_or(&*reason.reading, |r| r.trim_start_matches([':', ' ']));
        let _ = write!(out, "{finding} passes ({reading})");
    }
    out.push_str(&in_brackets(&reason.remarks));
}

fn in_brackets(remarks: &[String]) -> String {
    if remarks.is_empty() {
        String::new()
    } else {
        format!(" ({})", remarks.join("; "))
    }
}

fn is_sign(reason: &Reason) -> bool {
    &*reason.threshold == "present"
}

/// Says whether an answer to this unknown criterion could change the outcome.
fn could_change(outcome: &Outcome, reason: &Reason) -> bool {
    // What only informs, and what the outcome does not wait for, changes nothing.
    if reason.then == Then::Inform {
        return false;
    }
    match outcome.kind {
        OutcomeKind::Pass | OutcomeKind::Incomplete | OutcomeKind::Exempt => true,
        // A recheck gives way to whatever refers; a first fail only to what never waits.
        OutcomeKind::Rescreen => {
            reason.urgency < Urgency::Routine
                || reason.may_be_at_once
                || reason.rule_set == outcome.rule_set
                || !outcome.reasons.iter().any(refers)
        }
        OutcomeKind::Refer => outcome.urgency.is_some_and(|u| reason.urgency < u),
    }
}

/// Returns one sentence for the foot of a narrow screen.
pub fn short(outcome: &Outcome) -> String {
    let mut out = String::new();
    match outcome.decided_by {
        DecidedBy::GlassesNotWorn
        | DecidedBy::GlassesNeverAvailable
        | DecidedBy::Exempt
        | DecidedBy::Conflict
        | DecidedBy::NotTestable => {
            let _ = write!(out, "{}.", capital(&outcome.qualifiers.join("; ")));
        }
        _ => {
            if let Some(reason) = referring(outcome).next() {
                out.push_str(&capital(&reason.reading));
                if !is_sign(reason) {
                    let _ = write!(out, "; {} when {}", asks(reason), reason.threshold);
                }
                let _ = write!(out, ". {}.", brief_source(reason));
                if !outcome.risks.is_empty() {
                    let _ = write!(out, " Amblyopia risk: {}.", risk_words(&outcome.risks));
                }
                let change = change::words(outcome);
                if !change.is_empty() {
                    let _ = write!(out, " {}.", capital(&change));
                }
            } else if outcome.kind == OutcomeKind::Incomplete {
                let mut missing = outcome.qualifiers.clone();
                missing.extend(missing_words(outcome));
                let _ = write!(out, "{}.", capital(&missing.join("; ")));
            } else {
                let mut passes: Vec<String> = Vec::new();
                for reason in outcome
                    .reasons
                    .iter()
                    .filter(|r| r.answer == Answer::Pass && !is_sign(r))
                    .filter(|r| passes_at_all(outcome, r))
                {
                    let mut text = String::new();
                    pass_words(reason, &mut text);
                    if !passes.contains(&text) {
                        passes.push(text);
                    }
                }
                let _ = write!(out, "{}.", capital(&passes.join("; ")));
                let change = change::words(outcome);
                if !change.is_empty() && outcome.kind == OutcomeKind::Pass {
                    let _ = write!(out, " {}.", capital(&change));
                }
            }
        }
    }
    out
}

fn missing_words(outcome: &Outcome) -> Vec<String> {
    let mut out: Vec<String> = outcome
        .unknown
        .iter()
        .filter(|w| matches!(w.as_str(), "age" | "grade"))
        .map(|word| format!("no criterion for this {word}, or the {word} is not known"))
        .collect();
    for why in Open::ALL {
        let of_one: Vec<String> = outcome
            .reasons
            .iter()
            .filter(|r| r.required && r.answer == Answer::Unknown && r.open == *why)
            .map(|r| format!("{} ({})", criterion_words(&r.criterion), r.reading))
            .collect();
        if !of_one.is_empty() {
            out.push(format!("{}: {}", why.title(), of_one.join("; ")));
        }
    }
    out
}

fn capital(text: &str) -> String {
    let mut chars = text.chars();
    chars
        .next()
        .map_or_else(String::new, |c| c.to_uppercase().chain(chars).collect())
}

fn risk_words(risks: &[RiskKind]) -> String {
    risks
        .iter()
        .map(|r| r.title())
        .collect::<Vec<_>>()
        .join(", ")
}

/// Returns the outcome with its date: `RESCREEN by 28 Oct 2026`.
pub fn headline(outcome: &Outcome) -> String {
    let mut out = outcome.kind.title().to_uppercase();
    match outcome.kind {
        OutcomeKind::Refer => {
            if let Some(urgency) = outcome.urgency {
                let _ = write!(out, ", {}", urgency.title());
            }
            if let Some(by) = outcome.act_by {
                let _ = write!(out, ", act by {}", spoken(by));
            } else if let Some(days) = outcome.act_within_days {
                let _ = write!(out, ", {}", act_words(days));
            }
        }
        OutcomeKind::Rescreen => {
            if let Some(on) = outcome.due_on {
                let _ = write!(out, " by {}", spoken(on));
            }
        }
        OutcomeKind::Incomplete => {
            if let Some(on) = outcome.due_on {
                let _ = write!(out, ", return by {}", spoken(on));
            }
        }
        OutcomeKind::Pass => {
            if let Some(on) = outcome.due_on {
                let _ = write!(out, ", chart due by {}", spoken(on));
            }
        }
        OutcomeKind::Exempt => {}
    }
    if !outcome.qualifiers.is_empty() {
        let _ = write!(out, " ({})", outcome.qualifiers.join("; "));
    }
    out
}

/// Returns a row per criterion for the whole-reason view; signs that were not seen are one row.
pub fn table(outcome: &Outcome) -> Vec<ReasonLine> {
    let mut rows: Vec<ReasonLine> = Vec::new();
    let mut signs_said: Vec<&str> = Vec::new();
    let rank = |r: &&Reason| match r.answer {
        Answer::Refer => 0,
        Answer::Unknown => 1,
        Answer::Pass => 2,
    };
    let mut reasons: Vec<&Reason> = outcome.reasons.iter().collect();
    reasons.sort_by_key(|r| (rank(r), r.urgency));
    for reason in reasons {
        let collapsed = is_sign(reason) && reason.answer == Answer::Pass;
        if collapsed {
            if signs_said.contains(&&*reason.rule_set) || sign_seen(outcome, &reason.rule_set) {
                continue;
            }
            signs_said.push(&reason.rule_set);
        }
        let mut note = reason.remarks.clone();
        if !reason.note.is_empty() && !collapsed {
            note.push(reason.note.to_string());
        }
        if reason.answer == Answer::Unknown {
            note.push(could_words(outcome, reason).to_owned());
        }
        if reason.answer == Answer::Refer && reason.then != Then::Refer {
            note.push(reason.then.in_words());
        }
        if reason.high_priority && reason.answer == Answer::Refer {
            note.push("high priority".to_owned());
        }
        rows.push(ReasonLine {
            criterion: if collapsed {
                words::set_words(&reason.rule_set)
            } else {
                criterion_words(&reason.criterion)
            },
            reading: if collapsed {
                "none seen".to_owned()
            } else {
                reason.reading.clone()
            },
            answer: reason.answer,
            said: match reason.answer {
                Answer::Refer => "refers",
                Answer::Pass => "passes",
                Answer::Unknown => reason.open.title(),
            },
            change: if collapsed {
                String::new()
            } else {
                change::of_reason(reason)
            },
            margin: margin_words(reason),
            threshold: reason.threshold.to_string(),
            source: if collapsed {
                String::new()
            } else {
                source_words(&reason.source)
            },
            note: note.join("; "),
        });
    }
    rows
}

/// Returns the whole reason as plain lines, with the cautions.
pub fn whole(outcome: &Outcome) -> Vec<String> {
    let mut out = vec![headline(outcome)];
    for row in table(outcome) {
        out.push(String::new());
        out.push(format!("{}: {}", row.criterion, row.said));
        out.push(format!("  reading    {}", row.reading));
        if row.threshold != "present" {
            out.push(format!("  threshold  {}", row.threshold));
        }
        for (name, text) in [
            ("margin", row.margin),
            ("change", row.change),
            ("source", row.source),
            ("note", row.note),
        ] {
            if !text.is_empty() {
                out.push(format!("  {name:<9}  {text}"));
            }
        }
    }
    out.push(String::new());
    if !outcome.unknown.is_empty() {
        out.push(format!("No answer   {}", outcome.unknown.join(", ")));
    }
    if !outcome.risks.is_empty() {
        out.push(format!("Amblyopia risk  {}", risk_words(&outcome.risks)));
        if outcome.risks.contains(&RiskKind::Anisometropic) {
            out.push("Amblyopia can come from anisometropia without any strabismus.".to_owned());
        }
    }
    let change = change::words(outcome);
    if !change.is_empty() {
        out.push(format!("{:<15}  {change}", "Would change it"));
    }
    for note in &outcome.protocol_notes {
        out.push(format!("Protocol    {note}"));
    }
    out.push(format!(
        "Rules       {}, edition {}",
        outcome.rule_set, outcome.edition
    ));
    out.push(
        "Words for a screener: meets a rule, for review by a professional; never a diagnosis."
            .to_owned(),
    );
    out.extend(CAUTIONS.iter().map(|c| (*c).to_owned()));
    out
}
