//! The Children place: find as one types, and the whole history with every correction.

use std::fmt::Write as _;

use ratatui::Frame;
use ratatui::layout::{Position, Rect};
use ratatui::text::{Line, Span};
use ratatui::widgets::Paragraph;

use crate::actions::{ChildHistory, FoundChild, VisitView};
use crate::domain::acuity::{Line as ChartLine, Step};
use crate::domain::age::spoken;
use crate::domain::field::Field;
use crate::tui::app::{Effect, Request, Session};
use crate::tui::day::bench_view::value_words;
use crate::tui::day::ladder::{self, Mark};
use crate::tui::text::{cut, ends, fit, name, safe, width, wrap};
use crate::tui::theme::Theme;

/// What is sought, what was found, whose history is shown.
#[derive(Debug, Default)]
pub struct Children {
    find: String,
    found: Option<Vec<FoundChild>>,
    at: usize,
    history: Option<ChildHistory>,
    top: usize,
}

impl Children {
    /// Types a character into the find.
    pub fn type_text(&mut self, text: &str) -> Vec<Effect> {
        self.find.push_str(&safe(text));
        self.search()
    }

    /// Erases a character of the find.
    pub fn erase(&mut self) -> Vec<Effect> {
        self.find.pop();
        self.search()
    }

    /// Empties the find.
    pub fn clear(&mut self) {
        *self = Children::default();
    }

    fn search(&mut self) -> Vec<Effect> {
        if self.find.trim().is_empty() {
            self.found = None;
            return Vec::new();
        }
        vec![Effect::ask(Request::Find(self.find.clone()))]
    }

    /// Takes what was found, unless more was typed since.
    pub fn found(&mut self, text: &str, found: Vec<FoundChild>) {
        if text == self.find {
            self.found = Some(found);
            self.at = 0;
        }
    }

    /// Takes a history.
    pub fn show(&mut self, history: Option<ChildHistory>) {
        self.history = history;
        self.top = 0;
    }

    /// Moves the cursor.
    pub fn step(&mut self, by: isize) {
        let last = self.found.as_ref().map_or(0, |f| f.len().saturating_sub(1));
        self.at = self.at.saturating_add_signed(by).min(last);
    }

    /// Scrolls the history.
    pub fn scroll(&mut self, by: isize) {
        self.top = self.top.saturating_add_signed(by).min(500);
    }

    /// Asks for the history of the child under the cursor.
    pub fn open(&self) -> Vec<Effect> {
        self.found
            .as_ref()
            .and_then(|f| f.get(self.at))
            .map(|c| Effect::ask(Request::History(c.child_id.clone())))
            .into_iter()
            .collect()
    }

    /// Draws find and history.
    pub fn draw(&self, frame: &mut Frame<'_>, area: Rect, session: &Session) -> Position {
        let theme = session.theme;
        let columns = usize::from(area.width);
        let rows = usize::from(area.height);
        let list_rows = if self.history.is_some() {
            (rows / 3).min(8)
        } else {
            rows
        }
        .max(1);
        let mut lines = vec![Line::from(vec![
            Span::styled(" find ", theme.muted()),
            Span::styled(cut(&self.find, columns.saturating_sub(8)), theme.focus()),
        ])];
        match &self.found {
            None => lines.push(Line::styled(
                cut(
                    " parts of names, an id, a class, or the last 3 digits or more of the guardian's phone",
                    columns,
                ),
                theme.muted(),
            )),
            Some(found) if found.is_empty() => {
                lines.push(Line::styled(" no matches", theme.attention()));
            }
            Some(found) => {
                let room = list_rows.saturating_sub(2).max(1);
                let top = self
                    .at
                    .saturating_sub(room / 2)
                    .min(found.len().saturating_sub(room));
                for (i, child) in found.iter().enumerate().skip(top).take(room) {
                    let born = child.dob.map_or_else(|| "no birth date".into(), spoken);
                    let why = if child.why.is_empty() {
                        String::new()
                    } else {
                        format!("  by {}", safe(&child.why))
                    };
                    let (left, right) = ends(
                        &format!(
                            " {} {}{why}",
                            if i == self.at { "▸" } else { " " },
                            name(&child.family_name, &child.given_name)
                        ),
                        &format!(
                            "{} {} {} {}",
                            fit(&safe(&child.child_id), 12),
                            fit(&safe(&child.site), 8),
                            fit(&safe(&child.class), 6),
                            fit(&born, 13)
                        ),
                        columns.saturating_sub(1),
                    );
                    let style = if i == self.at {
                        theme.selected()
                    } else {
                        ratatui::style::Style::new()
                    };
                    lines.push(Line::styled(format!("{left}{right}"), style));
                }
            }
        }
        lines.truncate(list_rows);
        let used = lines.len().min(rows);
        frame.render_widget(Paragraph::new(lines), area);
        if let Some(history) = &self.history {
            let rest = Rect {
                y: area.y + used as u16,
                height: area.height - used as u16,
                ..area
            };
            let mut text = vec![Line::styled("─".repeat(columns), theme.muted())];
            text.extend(
                history_lines(history, columns, session)
                    .into_iter()
                    .skip(self.top),
            );
            frame.render_widget(Paragraph::new(text), rest);
        }
        Position::new(
            area.x + (6 + width(&self.find)).min(columns.saturating_sub(1)) as u16,
            area.y,
        )
    }
}

/// Returns the history of a child in lines.
fn history_lines(history: &ChildHistory, columns: usize, session: &Session) -> Vec<Line<'static>> {
    let theme = session.theme;
    let born = history.dob.map_or_else(
        || "birth date unknown".into(),
        |d| format!("born {}", spoken(d)),
    );
    let grade = history
        .grade
        .map_or(String::new(), |g| format!(", grade {g}"));
    let class = if history.class.is_empty() {
        String::new()
    } else {
        format!(" {}", safe(&history.class))
    };
    let mut out = vec![Line::from(vec![
        Span::styled(
            format!(
                " {}, {}",
                safe(&history.family_name).to_uppercase(),
                safe(&history.given_name)
            ),
            theme.strong(),
        ),
        Span::raw(format!(
            "   {}   {born}   {}{grade}{class}",
            safe(&history.child_id),
            safe(&history.site)
        )),
    ])];
    let facts = history
        .facts
        .iter()
        .map(|(what, value)| {
            if value.starts_with(what.as_str()) {
                safe(value)
            } else {
                format!("{} {}", safe(what), safe(value))
            }
        })
        .collect::<Vec<_>>()
        .join(" · ");
    out.extend(
        wrap(&facts, columns.saturating_sub(2))
            .into_iter()
            .filter(|l| !l.is_empty())
            .map(|l| Line::styled(format!(" {l}"), theme.muted())),
    );
    if history.visits.is_empty() {
        out.push(Line::raw(" no visit yet"));
    }
    for visit in &history.visits {
        visit_lines(visit, columns, theme, &mut out);
    }
    if history
        .visits
        .iter()
        .any(|v| v.readings.distance.both().iter().any(Option::is_some))
    {
        out.push(Line::default());
        out.extend(over_visits(history, session));
    }
    out
}

/// The column of a visit's outcome: a date, the attempt and both eyes stand before it.
const OUTCOME_AT: usize = 45;

fn visit_lines(visit: &VisitView, columns: usize, theme: Theme, out: &mut Vec<Line<'static>>) {
    let eye = |r: Option<crate::domain::readings::AcuityResult>| {
        r.map_or_else(|| "·".to_owned(), |v| v.to_string())
    };
    let distance = visit.readings.distance;
    let (word, style) =
        visit
            .outcome
            .as_ref()
            .map_or(("not signed".to_owned(), theme.muted()), |o| {
                let due = o
                    .due_on
                    .map_or(String::new(), |d| format!(" by {}", spoken(d)));
                (
                    format!("{}{due}", o.kind.title()),
                    theme.outcome(o.kind, o.urgency),
                )
            });
    let who = format!(
        "{}{}, {}",
        if visit.late { "late, " } else { "" },
        safe(&visit.screener),
        safe(&visit.station)
    );
    // Who entered it stands beside the outcome where there is room, else on a line of its own.
    let beside = OUTCOME_AT + (width(&word) + 1).max(23) + width(&who) <= columns;
    out.push(Line::from(vec![
        Span::raw(format!(
            " {} {} R {} L {} ",
            fit(&spoken(visit.date), 12),
            fit(visit.attempt.word(), 8),
            fit(&eye(distance.right), 8),
            fit(&eye(distance.left), 8)
        )),
        Span::styled(cut(&word, columns.saturating_sub(OUTCOME_AT)), style),
        Span::raw(if beside {
            format!(
                "{}{who}",
                " ".repeat(23usize.saturating_sub(width(&word)).max(1))
            )
        } else {
            String::new()
        }),
    ]));
    let other: Vec<String> = visit
        .readings
        .recorded()
        .into_iter()
        .filter(|(f, _)| {
            !matches!(
                f,
                Field::DistanceRight | Field::DistanceLeft | Field::Status | Field::AcuityMethod
            )
        })
        .map(|(f, raw)| format!("{} {}", f.title(), value_words(&visit.readings, f, &raw)))
        .collect();
    let indent = " ".repeat(14);
    let room = columns.saturating_sub(16);
    if !beside {
        out.push(Line::raw(format!("{indent}{}", cut(&who, room))));
    }
    if !other.is_empty() {
        out.extend(
            wrap(&other.join(" · "), room)
                .into_iter()
                .map(|l| Line::styled(format!("{indent}{l}"), theme.muted())),
        );
    }
    for c in &visit.corrections {
        let words = format!(
            "corrected {} {} → {}, “{}”, {}, {}",
            c.what,
            if c.before.is_empty() { "·" } else { &c.before },
            if c.after.is_empty() { "·" } else { &c.after },
            c.reason,
            crate::tui::view::wall_clock(c.at.utc_ms, c.at.offset_minutes),
            c.screener
        );
        out.extend(
            wrap(&safe(&words), room)
                .into_iter()
                .map(|l| Line::styled(format!("{indent}{l}"), theme.attention())),
        );
    }
    if let Some(standing) = visit
        .outcome
        .as_ref()
        .and_then(|o| visit.standing.short(o.kind))
    {
        out.extend(
            wrap(&safe(&standing), room)
                .into_iter()
                .map(|l| Line::raw(format!("{indent}{l}"))),
        );
    }
    if let Some(now) = &visit.now {
        out.push(Line::styled(
            cut(&format!("{indent}now it would be {}", safe(now)), columns),
            theme.attention(),
        ));
    }
}

/// Draws one mark a visit, right and left, oldest on the left.
fn over_visits(history: &ChildHistory, session: &Session) -> Vec<Line<'static>> {
    let marks: Vec<(Option<Mark>, Option<Mark>)> = history
        .visits
        .iter()
        .rev()
        .map(|v| {
            (
                ladder::mark(v.readings.distance.right),
                ladder::mark(v.readings.distance.left),
            )
        })
        .collect();
    let step = |m: Option<Mark>| match m {
        Some(Mark::At(s) | Mark::OrBetter(s)) => Some(s),
        Some(Mark::Below(s)) => Some(s + 1),
        _ => None,
    };
    let all: Vec<i32> = marks
        .iter()
        .flat_map(|(r, l)| [step(*r), step(*l)])
        .flatten()
        .collect();
    let (Some(low), Some(high)) = (all.iter().min(), all.iter().max()) else {
        return Vec::new();
    };
    ((*low - 1).max(Step::FINEST.0)..=(*high + 1).min(10))
        .map(|s| {
            let label = fit(&ChartLine::at(Step(s), session.notation).to_string(), 7);
            let mut text = format!("              {label}┤");
            for (r, l) in &marks {
                let on = |m: Option<Mark>, letter: &str| {
                    if step(m) == Some(s) {
                        letter.to_owned()
                    } else {
                        " ".to_owned()
                    }
                };
                let _ = write!(text, "  {}{}", on(*r, "R"), on(*l, "L"));
            }
            Line::raw(text)
        })
        .collect()
}
