//! Draws a question above the foot line.

use ratatui::Frame;
use ratatui::layout::{Position, Rect};
use ratatui::style::Style;
use ratatui::text::{Line, Span};
use ratatui::widgets::Paragraph;

use crate::domain::codes::SignKind;
use crate::tui::prompt::{Ask, Body, Choices, Form, Page, Prompt, SignMarks};
use crate::tui::text::{cut, fit, safe, width, wrap_under};
use crate::tui::theme::Theme;

/// Returns how many rows a question takes with its heading.
pub fn height(prompt: &Prompt, columns: u16) -> u16 {
    let rows = match &prompt.body {
        Body::Choices(c) if c.find.is_some() => 14,
        Body::Choices(c) => c.items.len() + usize::from(c.scope.is_some()),
        Body::Form(f) => f.fields.len() + usize::from(!f.error.is_empty()) + hint_rows(prompt),
        Body::Signs(_) => SignKind::ALL.len().div_ceil(2) + 1,
        Body::Page(p) => p
            .lines
            .iter()
            .map(|l| wrap_under(l, usize::from(columns).saturating_sub(2)).len())
            .sum(),
    };
    (rows + 1).min(200) as u16
}

fn hint_rows(prompt: &Prompt) -> usize {
    if prompt.ask == Ask::MoveTo { 5 } else { 0 }
}

/// Draws the question; returns where the cursor belongs.
pub fn draw(frame: &mut Frame<'_>, area: Rect, prompt: &Prompt, theme: Theme) -> Position {
    let columns = usize::from(area.width);
    let emergency = matches!(prompt.ask, Ask::Emergency | Ask::Told(_));
    let title = cut(&safe(&prompt.title), columns.saturating_sub(6));
    let rest = columns.saturating_sub(width(&title) + 5);
    let mut lines = vec![Line::from(vec![
        Span::styled("── ", theme.muted()),
        Span::styled(
            title,
            if emergency {
                theme.emergency()
            } else {
                theme.strong()
            },
        ),
        Span::styled(format!(" {}", "─".repeat(rest + 1)), theme.muted()),
    ])];
    let room = usize::from(area.height).saturating_sub(1);
    let sheet = Sheet {
        area,
        columns,
        room,
        theme,
    };
    let place = match &prompt.body {
        Body::Choices(choices) => sheet.choices(choices, &mut lines),
        Body::Form(form) => sheet.form(form, &mut lines),
        Body::Signs(signs) => sheet.signs(signs, &mut lines),
        Body::Page(page) => sheet.page(page, &mut lines),
    };
    frame.render_widget(Paragraph::new(lines), area);
    place
}

/// Where a question is drawn, and how.
#[derive(Clone, Copy)]
struct Sheet {
    area: Rect,
    columns: usize,
    room: usize,
    theme: Theme,
}

type Lines = Vec<Line<'static>>;

impl Sheet {
    fn choices(self, choices: &Choices, lines: &mut Lines) -> Position {
        let Sheet {
            area,
            columns,
            room,
            theme,
        } = self;
        let mut cursor = Position::new(area.x, area.y + 1.min(area.height.saturating_sub(1)));
        if let Some(find) = &choices.find {
            lines.push(Line::from(vec![
                Span::styled(" › ", theme.muted()),
                Span::styled(cut(find, columns.saturating_sub(4)), theme.focus()),
            ]));
            cursor.x += (3 + width(find)).min(columns.saturating_sub(1)) as u16;
        }
        if let Some(scope) = choices.scope {
            lines.push(Line::from(vec![
                Span::styled(format!(" {}", scope.title()), theme.focus()),
                Span::styled("   Tab changes the eye", theme.muted()),
            ]));
        }
        let shown = choices.shown();
        if shown.is_empty() {
            lines.push(Line::styled(" no matches", theme.attention()));
        }
        let used = lines.len() - 1;
        let rows = room.saturating_sub(used);
        let at = choices.at.min(shown.len());
        let top = at
            .saturating_sub(rows / 2)
            .min(shown.len().saturating_sub(rows));
        for (i, choice) in shown.iter().enumerate().skip(top).take(rows) {
            let here = i == choices.at;
            if here && choices.find.is_none() {
                cursor.y = area.y + lines.len() as u16;
            }
            let key = if choice.key == '\0' {
                String::new()
            } else {
                choice.key.to_string()
            };
            lines.push(Line::from(vec![
                Span::styled(
                    format!(
                        " {} {}",
                        if here { "▸" } else { " " },
                        fit(&key, usize::from(choice.key != '\0') * 2)
                    ),
                    theme.focus(),
                ),
                Span::styled(
                    cut(&choice.label, columns.saturating_sub(6)),
                    match (here, choice.idle) {
                        (true, _) => theme.strong(),
                        (_, true) => theme.muted(),
                        _ => Style::new(),
                    },
                ),
            ]));
        }
        cursor
    }

    fn form(self, form: &Form, lines: &mut Lines) -> Position {
        let Sheet {
            area,
            columns,
            theme,
            ..
        } = self;
        let mut cursor = Position::new(area.x, area.y + 1.min(area.height.saturating_sub(1)));
        let label = form
            .fields
            .iter()
            .map(|f| width(f.label))
            .max()
            .unwrap_or(0);
        for (i, field) in form.fields.iter().enumerate() {
            let here = i == form.at;
            let space = columns.saturating_sub(label + 6);
            let value = field.input.value();
            let scroll = field.input.visual_scroll(space.max(1));
            let visible: String = value.chars().skip(scroll).collect();
            let text = if value.is_empty() {
                // In brackets behind the blank, so that without color nobody takes it for a value.
                let example = safe(&field.example);
                let blank = if example.is_empty() {
                    "____".to_owned()
                } else {
                    format!("____ ({example})")
                };
                Span::styled(cut(&blank, space), theme.muted())
            } else {
                Span::styled(
                    cut(&safe(&visible), space),
                    if here { theme.focus() } else { Style::new() },
                )
            };
            if here {
                cursor = Position::new(
                    area.x
                        + (label + 4 + field.input.visual_cursor().saturating_sub(scroll))
                            .min(columns.saturating_sub(1)) as u16,
                    area.y + (1 + i) as u16,
                );
            }
            lines.push(Line::from(vec![
                Span::styled(
                    format!(
                        " {} {} ",
                        if here { "▸" } else { " " },
                        fit(field.label, label)
                    ),
                    if here { theme.focus() } else { Style::new() },
                ),
                text,
            ]));
        }
        if !form.error.is_empty() {
            lines.push(Line::styled(
                cut(&format!("   {}", safe(&form.error)), columns),
                theme.error(),
            ));
        }
        for hint in &form.hints {
            lines.push(Line::styled(
                cut(&format!("   {hint}"), columns),
                theme.muted(),
            ));
        }
        cursor
    }

    fn signs(self, signs: &SignMarks, lines: &mut Lines) -> Position {
        let Sheet {
            area,
            columns,
            theme,
            ..
        } = self;
        let mut cursor = Position::new(area.x, area.y + 1.min(area.height.saturating_sub(1)));
        let half = SignKind::ALL.len().div_ceil(2);
        let column = columns / 2;
        for row in 0..half {
            let mut spans = Vec::new();
            for i in [row, row + half] {
                let Some(kind) = SignKind::ALL.get(i) else {
                    continue;
                };
                let marked = signs.marked.iter().find(|s| s.kind == *kind);
                let here = signs.at == i;
                if here {
                    cursor = Position::new(
                        area.x + if i >= half { column as u16 } else { 0 },
                        area.y + lines.len() as u16,
                    );
                }
                let side = marked
                    .and_then(|s| s.side)
                    .map_or(String::new(), |s| format!(", {}", s.title()));
                let text = format!(
                    " {} {} {}{side}",
                    if here { "▸" } else { " " },
                    if marked.is_some() { "✓" } else { "·" },
                    kind.title()
                );
                let style = match (here, marked.is_some()) {
                    (true, _) => theme.focus(),
                    (_, true) => theme.strong(),
                    _ => Style::new(),
                };
                spans.push(Span::styled(fit(&text, column), style));
            }
            lines.push(Line::from(spans));
        }
        let kinds = signs
            .marked
            .iter()
            .map(|s| crate::tui::day::bench_view::sign_words(*s))
            .collect::<Vec<_>>()
            .join("; ");
        let words = if kinds.is_empty() {
            " nothing marked yet; n says that somebody looked and saw none".into()
        } else {
            format!(" marked: {kinds}")
        };
        lines.push(Line::styled(cut(&words, columns), theme.attention()));
        cursor
    }

    fn page(self, page: &Page, lines: &mut Lines) -> Position {
        let Sheet {
            area,
            columns,
            room,
            theme,
        } = self;
        let cursor = Position::new(area.x, area.y + 1.min(area.height.saturating_sub(1)));
        let all: Vec<String> = page
            .lines
            .iter()
            .flat_map(|l| wrap_under(l, columns.saturating_sub(2)))
            .collect();
        let top = page.top.min(all.len().saturating_sub(room));
        let more = all.len() > top + room;
        for (i, line) in all.iter().skip(top).take(room).enumerate() {
            let last = more && i + 1 == room;
            lines.push(if last {
                Line::styled(" … ↓ for more", theme.muted())
            } else {
                Line::raw(format!(" {line}"))
            });
        }
        cursor
    }
}
