//! The smallest change that would turn an outcome.

use crate::domain::acuity::Line;
use crate::domain::outcome::{Answer, ChartChange, Margin, Outcome, OutcomeKind, Reason};

use super::referring;

/// Returns the smallest change of readings that would turn the outcome: for a pass the one reading
/// that would no longer pass, else what would have to be read instead, all of it in one sentence.
/// Empty where no reading could turn it (a sign that was seen, nothing measured).
pub fn words(outcome: &Outcome) -> String {
    match outcome.kind {
        OutcomeKind::Pass => of_a_pass(outcome),
        OutcomeKind::Refer | OutcomeKind::Rescreen => of_a_fail(outcome),
        OutcomeKind::Incomplete | OutcomeKind::Exempt => String::new(),
    }
}

/// The chart reading that is the fewest steps from failing; without a chart what an instrument or
/// another test would have to give.
fn of_a_pass(outcome: &Outcome) -> String {
    let passing = || {
        outcome
            .reasons
            .iter()
            .filter(|r| r.answer == Answer::Pass && !r.high_priority)
    };
    let nearest_line = passing()
        .filter(|r| r.chart_change.is_some())
        .min_by_key(|r| r.chart_change.map(|c| c.steps));
    // Dioptres, millimetres and answers do not compare: within a unit the nearest goes first.
    let distance = |r: &&Reason| match r.margin {
        Margin::Diopters(n) => (0, n),
        Margin::PrismDiopters(n) => (1, n),
        Margin::Millimetres(n) => (2, n),
        Margin::Count(n) => (3, n),
        Margin::Steps(_) | Margin::LogMar(_) | Margin::None => (4, 0),
    };
    nearest_line
        .or_else(|| {
            passing()
                .filter(|r| !r.would_change.is_empty())
                .min_by_key(distance)
        })
        .map_or_else(String::new, of_reason)
}

/// Returns what would turn the answer of one criterion; empty where nothing is known to.
pub(super) fn of_reason(reason: &Reason) -> String {
    match reason.chart_change {
        Some(change) if reason.answer == Answer::Pass => {
            format!("{} would not pass", chart_words(&change, ""))
        }
        _ => reason.would_change.clone(),
    }
}

fn of_a_fail(outcome: &Outcome) -> String {
    let reasons: Vec<&Reason> = referring(outcome).collect();
    if reasons.is_empty() || reasons.iter().any(|r| r.would_change.is_empty()) {
        return String::new();
    }
    // At another distance than the chart's, lines of several criteria are not put together.
    let unplaced = |r: &&&Reason| {
        r.chart_change.is_none()
            && ["line", "near", "between-eyes"]
                .iter()
                .any(|f| r.criterion.starts_with(f))
    };
    if reasons.iter().filter(unplaced).count() > 1 {
        return String::new();
    }
    // Below what refers there may still be what is screened again.
    let passes = !outcome.reasons.iter().any(|r| {
        (r.required && r.answer == Answer::Unknown)
            || (r.then.is_again() && outcome.kind == OutcomeKind::Refer)
    });
    let (then, better) = (
        if passes {
            "would pass"
        } else {
            "would not refer"
        },
        // With a limit between the eyes, a far better line of one eye would break that one.
        if outcome
            .reasons
            .iter()
            .any(|r| r.criterion.starts_with("between-eyes"))
        {
            ""
        } else {
            " or better"
        },
    );
    let mut parts: Vec<String> = Vec::new();
    for near in [false, true] {
        let of_chart = || {
            reasons
                .iter()
                .filter_map(|r| r.chart_change)
                .filter(move |c| c.near == near)
        };
        let all = ChartChange {
            near,
            right: of_chart()
                .filter_map(|c| c.right)
                .min_by_key(|l: &Line| l.logmar()),
            left: of_chart()
                .filter_map(|c| c.left)
                .min_by_key(|l: &Line| l.logmar()),
            steps: 0,
        };
        if all.right.is_some() || all.left.is_some() {
            parts.push(chart_words(&all, better));
        }
    }
    for reason in reasons.iter().filter(|r| r.chart_change.is_none()) {
        let text = ["would pass", "would not refer"]
            .iter()
            .find_map(|end| reason.would_change.strip_suffix(end))
            .unwrap_or(&reason.would_change)
            .trim()
            .to_owned();
        if !parts.contains(&text) {
            parts.push(text);
        }
    }
    match parts.as_slice() {
        [] => String::new(),
        [one] => format!("{one} {then}"),
        several => format!("{} together {then}", several.join(" and ")),
    }
}

fn chart_words(change: &ChartChange, better: &str) -> String {
    let near = if change.near { " near" } else { "" };
    match (change.right, change.left) {
        (Some(right), Some(left)) if right == left => format!("both eyes{near} {right}{better}"),
        (Some(right), Some(left)) => {
            format!("right eye{near} {right}{better} and left eye{near} {left}{better}")
        }
        (Some(right), None) => format!("right eye{near} {right}{better}"),
        (None, Some(left)) => format!("left eye{near} {left}{better}"),
        (None, None) => String::new(),
    }
}
