//! Draws the bench: who it is, the fields with right and left side by side, the ladder.

use ratatui::Frame;
use ratatui::layout::{Position, Rect};
use ratatui::text::{Line, Span};
use ratatui::widgets::Paragraph;

use crate::domain::age::spoken;
use crate::domain::codes::{Attempt, Consent, Correction, History};
use crate::domain::field::Field;
use crate::domain::readings::Readings;
use crate::tui::app::Session;
use crate::tui::day::bench::{Bench, Spot, State};
use crate::tui::day::kind::{self, AcuityOf, Kind};
use crate::tui::day::{ladder, verdict};
use crate::tui::text::{cut, ends, fit, safe, width};
use crate::tui::theme::Theme;

/// Columns of the labels.
const LABEL: usize = 13;

/// One row of fields.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Row {
    One(Field),
    Pair(Field, Field),
    Sign,
}

fn rows(bench: &Bench) -> Vec<Row> {
    let mut out: Vec<Row> = Vec::new();
    for field in &bench.path {
        let row = match kind::pair(*field) {
            Some((right, left)) => Row::Pair(right, left),
            None => Row::One(*field),
        };
        if !out.contains(&row) {
            out.push(row);
        }
    }
    out.push(Row::Sign);
    out
}

fn has_focus(row: Row, bench: &Bench) -> bool {
    match (row, bench.field()) {
        (Row::Sign, None) => true,
        (Row::One(f), Some(at)) => f == at,
        (Row::Pair(r, l), Some(at)) => r == at || l == at,
        _ => false,
    }
}

/// Draws the bench; returns where the cursor belongs.
pub fn draw(
    frame: &mut Frame<'_>,
    area: Rect,
    bench: &Bench,
    session: &Session,
    focused: bool,
) -> Position {
    let theme = session.theme;
    let area = Rect {
        x: area.x + 1.min(area.width),
        width: area.width.saturating_sub(1),
        ..area
    };
    let columns = usize::from(area.width);
    let mut lines = head(bench, columns, theme);
    let column = (columns.saturating_sub(LABEL) / 2).min(26);
    lines.push(Line::from(vec![
        Span::raw(fit("", LABEL)),
        Span::styled(fit("RIGHT EYE", column), theme.muted()),
        Span::styled("LEFT EYE", theme.muted()),
    ]));
    let fixed = lines.len();
    let rows = rows(bench);
    let wide = columns >= 2 * 26 + LABEL + 40;
    let height = usize::from(area.height);
    let below = if wide { 1 } else { 6 };
    let room = height
        .saturating_sub(fixed + below)
        .max(3)
        .min(height.saturating_sub(fixed));
    let at = rows.iter().position(|r| has_focus(*r, bench)).unwrap_or(0);
    let top = if rows.len() <= room {
        0
    } else {
        at.saturating_sub(room / 2).min(rows.len() - room)
    };
    let mut cursor = Position::new(area.x, area.y);
    for (i, row) in rows.iter().enumerate().skip(top).take(room) {
        let y = area.y + (fixed + i - top) as u16;
        let (line, x) = row_line(*row, bench, column, columns, focused, theme);
        if i == at {
            cursor = Position::new(area.x + x.min(columns.saturating_sub(1)) as u16, y);
        }
        lines.push(line);
    }
    let used = lines.len().min(height);
    frame.render_widget(Paragraph::new(lines), area);
    let mut rest = Rect {
        y: area.y + used as u16,
        height: area.height - used as u16,
        ..area
    };
    if rest.height > 0 {
        let line = if focused {
            verdict::echo(bench, theme)
        } else {
            Line::default()
        };
        let indented = Line::from(
            std::iter::once(Span::raw(fit("", LABEL)))
                .chain(line.spans.into_iter().map(|s| s.patch_style(line.style)))
                .collect::<Vec<_>>(),
        );
        frame.render_widget(Paragraph::new(indented), Rect { height: 1, ..rest });
        rest.y += 1;
        rest.height -= 1;
    }
    lower(
        frame,
        area,
        rest,
        bench,
        session,
        focused,
        wide.then_some(LABEL + 2 * column),
    );
    cursor
}

/// Draws the ladder, and the choices of a field that has some.
fn lower(
    frame: &mut Frame<'_>,
    area: Rect,
    rest: Rect,
    bench: &Bench,
    session: &Session,
    focused: bool,
    beside: Option<usize>,
) {
    let theme = session.theme;
    let choices = if focused {
        choice_lines(bench, usize::from(rest.width), theme)
    } else {
        Vec::new()
    };
    let ladder = ladder::Ladder {
        eyes: bench.readings.distance,
        pass: bench.pass_line.as_ref(),
        notation: session.notation,
        focus: None,
    };
    let shows_ladder = bench.path.contains(&Field::DistanceRight);
    match beside {
        Some(x) => {
            frame.render_widget(Paragraph::new(choices), rest);
            if shows_ladder {
                let x = (x + 2).min(usize::from(area.width)) as u16;
                let place = Rect {
                    x: area.x + x,
                    y: area.y + 3.min(area.height),
                    width: area.width - x,
                    height: area.height.saturating_sub(3),
                };
                ladder::draw(frame, place, &ladder, theme);
            }
        }
        None if choices.is_empty() && shows_ladder => ladder::draw(frame, rest, &ladder, theme),
        None => frame.render_widget(Paragraph::new(choices), rest),
    }
}

fn choice_lines(bench: &Bench, columns: usize, theme: Theme) -> Vec<Line<'static>> {
    let Some(field) = bench.field() else {
        return Vec::new();
    };
    match kind::kind(field) {
        Kind::Choice(choices) => choices
            .into_iter()
            .map(|(key, word, title)| {
                let chosen = bench.raw(field) == word;
                Line::from(vec![
                    Span::raw(fit("", LABEL)),
                    Span::styled(format!("{key} "), theme.focus()),
                    Span::styled(
                        cut(title, columns.saturating_sub(LABEL + 2)),
                        if chosen {
                            theme.strong()
                        } else {
                            ratatui::style::Style::new()
                        },
                    ),
                ])
            })
            .collect(),
        Kind::List => vec![Line::from(vec![
            Span::raw(fit("", LABEL)),
            Span::styled("n ", theme.focus()),
            Span::raw(if field == Field::Signs {
                "none seen   "
            } else {
                "none   "
            }),
            Span::styled(
                if field == Field::Signs {
                    "F5 "
                } else {
                    "Enter "
                },
                theme.focus(),
            ),
            Span::raw("choose from the list"),
        ])],
        _ => Vec::new(),
    }
}

fn head(bench: &Bench, columns: usize, theme: Theme) -> Vec<Line<'static>> {
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
fn standing(bench: &Bench, theme: Theme) -> Vec<Span<'static>> {
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

fn row_line(
    row: Row,
    bench: &Bench,
    column: usize,
    columns: usize,
    focused: bool,
    theme: Theme,
) -> (Line<'static>, usize) {
    match row {
        Row::Sign => sign_line(bench, columns, focused, theme),
        Row::One(field) => {
            let here = focused && bench.field() == Some(field);
            let (text, style) = cell(field, bench, here, theme);
            let text = cut(&text, columns.saturating_sub(LABEL));
            let end = LABEL
                + if here {
                    width(bench.raw(field)).min(width(&text))
                } else {
                    0
                };
            let end = if matches!(kind::kind(field), Kind::Text | Kind::Acuity) {
                end
            } else {
                LABEL
            };
            (
                Line::from(vec![
                    label_span(field, here, theme),
                    Span::styled(text, style),
                ]),
                end,
            )
        }
        Row::Pair(right, left) => {
            let mut spans = vec![label_span(
                right,
                focused && bench.field().is_some_and(|f| f == right || f == left),
                theme,
            )];
            let mut x = LABEL;
            for (i, field) in [right, left].into_iter().enumerate() {
                let here = focused && bench.field() == Some(field);
                let (text, style) = cell(field, bench, here, theme);
                if here {
                    let typed = matches!(kind::kind(field), Kind::Text | Kind::Acuity);
                    x = LABEL
                        + i * column
                        + if typed {
                            width(bench.raw(field)).min(column.saturating_sub(1))
                        } else {
                            0
                        };
                }
                let shown = cut(&text, column.saturating_sub(1));
                let gap = column.saturating_sub(width(&shown));
                spans.push(Span::styled(shown, style));
                spans.push(Span::raw(" ".repeat(gap)));
            }
            (Line::from(spans), x)
        }
    }
}

fn label_span(field: Field, here: bool, theme: Theme) -> Span<'static> {
    Span::styled(
        fit(kind::label(field), LABEL),
        if here {
            theme.focus()
        } else {
            ratatui::style::Style::new()
        },
    )
}

/// Returns what stands in a field.
fn cell(field: Field, bench: &Bench, here: bool, theme: Theme) -> (String, ratatui::style::Style) {
    let raw = bench.raw(field);
    let plain = ratatui::style::Style::new();
    if here && matches!(kind::kind(field), Kind::Acuity | Kind::Text) && !raw.starts_with("NT:") {
        let rest = if raw.is_empty() { "____" } else { "" };
        return (format!("{}{rest}", safe(raw)), theme.focus());
    }
    let focus = |style| if here { theme.focus() } else { style };
    match bench.state(field) {
        State::Invalid { .. } => (format!("{} ?", safe(raw)), theme.error()),
        State::Empty => match field {
            Field::CorrectionWorn => match (bench.roster_correction(), bench.child.wears_glasses) {
                (Some(Correction::None), _) => ("owns no glasses (roster)".into(), focus(plain)),
                (_, Some(true)) => (
                    "owns glasses (roster): worn today?".into(),
                    focus(theme.attention()),
                ),
                _ => ("not known: ask".into(), focus(theme.attention())),
            },
            Field::Signs if bench.will_state_no_signs() => {
                ("none seen, said on signing".into(), focus(theme.muted()))
            }
            Field::Signs => ("not looked for".into(), focus(theme.muted())),
            _ if here => ("____".into(), theme.focus()),
            _ => ("·".into(), theme.muted()),
        },
        State::Valid { .. } => (
            value_words(&bench.readings, field, raw),
            focus(theme.strong()),
        ),
    }
}

/// Returns a recorded value in words.
pub fn value_words(readings: &Readings, field: Field, raw: &str) -> String {
    if let Some(result) = readings.acuity_of(field) {
        return result.in_words();
    }
    match kind::kind(field) {
        Kind::Choice(choices) => choices
            .iter()
            .find(|(_, word, _)| *word == raw)
            .map_or_else(|| safe(raw), |(_, _, title)| (*title).to_owned()),
        Kind::List if raw == "none" => if field == Field::Signs {
            "none seen"
        } else {
            "none"
        }
        .into(),
        Kind::List if field == Field::Signs => readings
            .signs
            .iter()
            .flatten()
            .map(|s| sign_words(*s))
            .collect::<Vec<_>>()
            .join("; "),
        Kind::List => readings
            .history
            .iter()
            .flatten()
            .map(|h: &History| h.title())
            .collect::<Vec<_>>()
            .join("; "),
        _ => safe(raw),
    }
}

/// Returns a sign in words (`white pupil, left eye`).
pub fn sign_words(sign: crate::domain::readings::Sign) -> String {
    match sign.side {
        Some(side) => format!("{}, {}", sign.kind.title(), side.title()),
        None => sign.kind.title().to_owned(),
    }
}

/// The line that signs says what will be stored.
fn sign_line(bench: &Bench, columns: usize, focused: bool, theme: Theme) -> (Line<'static>, usize) {
    let here = focused && bench.at == Spot::Sign;
    let label = Span::styled(
        fit("sign", LABEL),
        if here {
            theme.focus()
        } else {
            ratatui::style::Style::new()
        },
    );
    if bench.is_signed() {
        let words = "signed · F8 corrects · F7 moves · Enter next child";
        return (
            Line::from(vec![
                label,
                Span::styled(cut(words, columns.saturating_sub(LABEL)), theme.muted()),
            ]),
            LABEL,
        );
    }
    if !here {
        return (
            Line::from(vec![label, Span::styled("·", theme.muted())]),
            LABEL,
        );
    }
    let mut words = format!("Enter signs: {}", bench.outcome.kind.title());
    if bench.will_state_no_signs() {
        words.push_str(", no signs seen");
    }
    let spans = vec![
        label,
        Span::styled(cut(&words, columns.saturating_sub(LABEL)), theme.focus()),
    ];
    (Line::from(spans), LABEL)
}
