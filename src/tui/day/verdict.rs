//! The outcome as it stands, in three lines at the foot of the bench.

use std::fmt::Write as _;

use ratatui::text::{Line, Span};

use crate::domain::age::spoken;
use crate::domain::outcome::OutcomeKind;
use crate::tui::app::Session;
use crate::tui::day::bench::{Bench, State};
use crate::tui::judging::explain;
use crate::tui::text::{safe, wrap};
use crate::tui::theme::Theme;

/// Returns the lines under the bench, at most so many.
pub fn lines(bench: &Bench, session: &Session, columns: usize, rows: usize) -> Vec<Line<'static>> {
    let theme = session.theme;
    if let Some((field, State::Invalid { expected })) =
        bench.field().map(|field| (field, bench.state(field)))
    {
        let mut out = vec![Line::from(vec![
            Span::styled(" not understood ", theme.error()),
            Span::raw(format!("{}: {}", field.title(), safe(bench.raw(field)))),
        ])];
        out.extend(
            wrap(
                &format!("expected {}", safe(expected)),
                columns.saturating_sub(2),
            )
            .into_iter()
            .map(|l| Line::raw(format!(" {l}"))),
        );
        out.truncate(rows);
        return out;
    }
    let kept_back = if session.discreet && !bench.is_blank() {
        Some("Outcome, reasons and notes are not shown. F4 shows them once, Alt-i always.")
    } else if bench.keeps_back() {
        Some("The outcome stands here when both eyes are entered: this station is masked.")
    } else {
        None
    };
    if let Some(words) = kept_back {
        return flow("", theme.muted(), words, columns, rows, theme);
    }
    if let Some(visit) = &bench.signed {
        return signed_lines(bench, visit, columns, rows, theme);
    }
    let nothing_yet = bench.is_blank() && bench.outcome.kind == OutcomeKind::Incomplete;
    let (headline, style, rest) = if let Some(task) = bench.task() {
        (
            String::new(),
            theme.muted(),
            format!(
                "Part of the visit: this station does {} alone. {} {}",
                task.title(),
                safe(&explain::headline(&bench.outcome)),
                safe(&explain::short(&bench.outcome))
            ),
        )
    } else if nothing_yet {
        (
            String::new(),
            theme.muted(),
            "The outcome stands here with its reasons as soon as something is entered.".to_owned(),
        )
    } else {
        (
            safe(&explain::headline(&bench.outcome)),
            theme.outcome(bench.outcome.kind, bench.outcome.urgency),
            safe(&explain::short(&bench.outcome)),
        )
    };
    flow(&headline, style, &rest, columns, rows, theme)
}

fn signed_lines(
    bench: &Bench,
    visit: &crate::actions::VisitView,
    columns: usize,
    rows: usize,
    theme: Theme,
) -> Vec<Line<'static>> {
    let Some(outcome) = &visit.outcome else {
        return flow("SIGNED", theme.strong(), "", columns, rows, theme);
    };
    // The parts of several stations: what stands is what all of them say now.
    let parts = bench
        .child
        .together
        .as_ref()
        .and_then(crate::actions::Together::words);
    let mut headline = parts.as_ref().map_or_else(
        || format!("signed: {}", outcome.kind.title().to_uppercase()),
        |words| safe(words),
    );
    if !outcome.qualifiers.is_empty() {
        let _ = write!(headline, " ({})", outcome.qualifiers.join("; "));
    }
    if let Some(due) = outcome.due_on {
        let _ = write!(headline, " by {}", spoken(due));
    }
    if let Some(act) = outcome.act_by {
        let _ = write!(headline, ", act by {}", spoken(act));
    }
    if visit.late {
        headline.push_str(", entered late");
    }
    let mut rest = String::new();
    if !visit.unsettled.is_empty() {
        rest.push_str("Enter on a value that differs chooses the one that stands. ");
    } else if let Some(now) = visit.now.as_ref().filter(|_| parts.is_none()) {
        let _ = write!(rest, "Now it would be {}. ", safe(now));
    }
    rest.push_str(&safe(&outcome.reasons));
    let style = theme.outcome(bench.outcome.kind, outcome.urgency);
    flow(&headline, style, &rest, columns, rows, theme)
}

/// Sets a headline and a text that flows on after it.
fn flow(
    headline: &str,
    style: ratatui::style::Style,
    rest: &str,
    columns: usize,
    rows: usize,
    theme: Theme,
) -> Vec<Line<'static>> {
    let room = columns.saturating_sub(2);
    let joined = if headline.is_empty() {
        rest.to_owned()
    } else {
        format!("{headline}   {rest}")
    };
    let mut wrapped = wrap(&joined, room);
    let cut = wrapped.len() > rows;
    wrapped.truncate(rows);
    if cut && let Some(last) = wrapped.last_mut() {
        let hint = "… F4";
        *last = format!(
            "{}{hint}",
            crate::tui::text::fit(last, room.saturating_sub(5))
        );
    }
    let mut left = headline;
    wrapped
        .into_iter()
        .map(|line| {
            // The headline may itself be wrapped: colour as much of each line as belongs to it.
            let shared = left
                .char_indices()
                .map(|(i, c)| i + c.len_utf8())
                .take_while(|end| line.starts_with(&left[..*end]))
                .last()
                .unwrap_or(0);
            let (head, tail) = line.split_at(shared);
            left = left[shared..].trim_start();
            let mut spans = vec![Span::raw(" "), Span::styled(head.to_owned(), style)];
            match tail.strip_suffix("… F4") {
                Some(tail) => {
                    spans.push(Span::raw(tail.to_owned()));
                    spans.push(Span::styled("… F4", theme.focus()));
                }
                None => spans.push(Span::raw(tail.to_owned())),
            }
            Line::from(spans)
        })
        .collect()
}
