//! Who is on the bench, and what is to be known before testing.

use ratatui::text::{Line, Span};

use crate::domain::age::spoken;
use crate::domain::codes::{Attempt, Consent};
use crate::tui::day::bench::Bench;
use crate::tui::text::{ends, safe, width};
use crate::tui::theme::Theme;

/// Returns the two lines above the fields.
pub(super) fn lines(bench: &Bench, columns: usize, theme: Theme) -> Vec<Line<'static>> {
    let child = &bench.child;
    let age = child
        .age
        .map_or_else(|| "age unknown".to_owned(), |a| a.to_string());
    let grade = match (child.grade, child.class.as_str()) {
        (Some(grade), "") => format!(" · grade {grade}"),
        (Some(grade), class) => format!(" · grade {grade}, {}", safe(class)),
        (None, "") => String::new(),
        (None, class) => format!(" · {}", safe(class)),
    };
    let born = child.dob.map_or_else(
        || " · birth date unknown".to_owned(),
        |d| format!(" · {}", spoken(d)),
    );
    let who = format!(
        "{}, {}",
        safe(&child.family_name).to_uppercase(),
        safe(&child.given_name)
    );
    let facts = format!("{age}{grade}{born}");
    let (left, right) = if width(&who) + width(&facts) + 2 <= columns {
        ends(&who, &facts, columns.saturating_sub(1))
    } else {
        let short = format!(
            "{age}{}",
            if child.class.is_empty() {
                String::new()
            } else {
                format!(" · {}", safe(&child.class))
            }
        );
        let (left, right) = ends(&who, &format!("{short}{born}"), columns.saturating_sub(1));
        (left, right)
    };
    vec![
        Line::from(vec![Span::styled(left, theme.strong()), Span::raw(right)]),
        Line::from(standing(bench, theme)),
    ]
}

/// Returns what is to be known before testing: id, rescreen, consent, care, history.
pub fn standing(bench: &Bench, theme: Theme) -> Vec<Span<'static>> {
    let child = &bench.child;
    let mut spans = vec![Span::styled(safe(&child.child_id), theme.muted())];
    let mut add = |text: String, style| {
        spans.push(Span::raw("  "));
        spans.push(Span::styled(text, style));
    };
    if let Some(status) = bench.status() {
        add(status.title().to_uppercase(), theme.attention());
    }
    if child.attempt == Attempt::Rescreen {
        let due = child
            .due_on
            .map_or(String::new(), |d| format!(" due {}", spoken(d)));
        add(format!("rescreen{due}"), theme.attention());
    } else if let Some(due) = child.due_on {
        add(format!("return due {}", spoken(due)), theme.attention());
    }
    if bench.was_swapped() {
        add("eyes swapped".into(), theme.attention());
    }
    if child.consent == Some(Consent::No) {
        add("no consent".into(), theme.refer());
    }
    if child.under_care {
        add("under care".into(), theme.attention());
    } else if child.examined_recently {
        add("examined in the last 12 months".into(), theme.attention());
    }
    if child.glasses_visits > 0 {
        add("came without glasses before".into(), theme.attention());
    }
    spans
}
