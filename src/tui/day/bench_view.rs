//! Draws the bench: who it is, the fields with right and left side by side, the ladder.

pub mod cells;
pub mod head;

use ratatui::Frame;
use ratatui::layout::{Position, Rect};
use ratatui::text::{Line, Span};
use ratatui::widgets::Paragraph;

use crate::domain::field::Field;
use crate::domain::readings::Eyes;
use crate::domain::screening_test::ScreeningTest;
use crate::tui::app::Session;
use crate::tui::day::bench::{Bench, Spot};
use crate::tui::day::kind::{self, Kind};
use crate::tui::day::path::Group;
use crate::tui::day::{echo, ladder};
use crate::tui::text::{cut, fit, safe, width};
use crate::tui::theme::Theme;

use cells::cell;
pub use cells::{sign_words, value_words};

/// Columns of the labels.
const LABEL: usize = 13;

/// One row of fields.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Row {
    One(Field),
    Pair(Field, Field),
    /// The distance acuity of a try before this one.
    Earlier(usize),
    /// The note, written in a question of its own.
    Note,
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
            if *field == Field::DistanceRight {
                out.extend((0..bench.earlier.len()).map(Row::Earlier));
            }
        }
    }
    if bench.readings.note.is_some() {
        out.push(Row::Note);
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
    let mut lines = head::lines(bench, columns, theme);
    let column = (columns.saturating_sub(LABEL) / 2).min(26);
    let fixed = lines.len() + 1;
    let rows = rows(bench);
    let wide = columns >= 2 * 26 + LABEL + 40;
    let height = usize::from(area.height);
    let view = Scrolled::new(&rows, bench, height.saturating_sub(fixed), wide, focused);
    lines.push(Line::from(vec![
        Span::styled(fit(&view.hidden(), LABEL), theme.muted()),
        Span::styled(fit("RIGHT EYE", column), theme.muted()),
        Span::styled("LEFT EYE", theme.muted()),
    ]));
    let mut cursor = Position::new(area.x, area.y);
    for row in view.visible(&rows) {
        let y = area.y + lines.len() as u16;
        let (line, x) = row_line(row, bench, session, column, columns, focused);
        if has_focus(row, bench) {
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
    for line in under_the_fields(bench, focused, theme) {
        if rest.height > 0 {
            frame.render_widget(Paragraph::new(line), Rect { height: 1, ..rest });
            rest.y += 1;
            rest.height -= 1;
        }
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

/// Which rows are on the screen: the line that signs always is, the others move with the focus.
struct Scrolled {
    top: usize,
    shown: usize,
    fields: usize,
}

impl Scrolled {
    /// Shares the height between the rows and what stands below them, which gives way first.
    fn new(rows: &[Row], bench: &Bench, height: usize, wide: bool, focused: bool) -> Scrolled {
        let group = bench.field().and_then(Group::of);
        let choices = if focused { choice_count(bench) } else { 0 };
        let least = match (wide, choices, group) {
            (false, 0, None | Some(Group::Distance)) => 4,
            (_, 0, _) => 1,
            (_, n, _) => 1 + n.div_ceil(2),
        };
        let most = if wide { least } else { least.max(6) };
        let room = rows
            .len()
            .min(height.saturating_sub(least))
            .max(height.saturating_sub(most))
            .max(2);
        let fields = rows.len() - 1;
        let shown = fields.min(room - 1);
        let at = rows.iter().position(|r| has_focus(*r, bench)).unwrap_or(0);
        let top = match bench.at {
            // A signed visit is read from its top.
            Spot::Sign if bench.is_signed() => 0,
            _ => at.saturating_sub(shown / 2).min(fields - shown),
        };
        Scrolled { top, shown, fields }
    }

    fn visible<'a>(&self, rows: &'a [Row]) -> impl Iterator<Item = Row> + 'a {
        rows.iter()
            .skip(self.top)
            .take(self.shown)
            .chain(rows.last())
            .copied()
    }

    /// Says how many rows are out of sight above and below.
    fn hidden(&self) -> String {
        let below = self.fields - self.top - self.shown;
        match (self.top, below) {
            (0, 0) => String::new(),
            (above, 0) => format!("↑{above} more"),
            (0, below) => format!("↓{below} more"),
            (above, below) => format!("↑{above} ↓{below} more"),
        }
    }
}

fn choice_count(bench: &Bench) -> usize {
    match bench.field().map(kind::kind) {
        Some(Kind::Choice(choices)) => choices.len(),
        Some(Kind::List) => 1,
        _ => 0,
    }
}

/// What the field understood; or the question that stands open, over the width of the labels too,
/// with the limit from which it is asked.
fn under_the_fields(bench: &Bench, focused: bool, theme: Theme) -> Vec<Line<'static>> {
    if !focused {
        return vec![Line::default()];
    }
    let line = echo::line(bench, theme);
    if let Some(doubt) = bench.asking() {
        return vec![line, Line::styled(doubt.limit.clone(), theme.muted())];
    }
    let indent = std::iter::once(Span::raw(fit("", LABEL)));
    let spans = line.spans.into_iter().map(|s| s.patch_style(line.style));
    vec![Line::from(indent.chain(spans).collect::<Vec<_>>())]
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
        choice_lines(
            bench,
            usize::from(rest.width),
            usize::from(rest.height),
            theme,
        )
    } else {
        Vec::new()
    };
    let quiet = bench.keeps_back() || session.discreet;
    let ladder = ladder::Ladder {
        eyes: if bench.keeps_back() {
            let [right, left] = bench.readings.distance.both().map(ladder::told_by_itself);
            Eyes { right, left }
        } else {
            bench.readings.distance
        },
        pass: bench.pass_line.as_ref().filter(|_| !quiet),
        notation: session.notation,
        chart: bench.chart(),
        quiet,
    };
    let shows_ladder = bench.path.contains(&Field::DistanceRight)
        && bench
            .field()
            .and_then(Group::of)
            .is_none_or(|group| group != Group::Instrument);
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

/// The choices with their keys, in two columns where they are more than the rows.
fn choice_lines(bench: &Bench, columns: usize, rows: usize, theme: Theme) -> Vec<Line<'static>> {
    let Some(field) = bench.field() else {
        return Vec::new();
    };
    match kind::kind(field) {
        Kind::Choice(choices) => {
            let across = if choices.len() > rows { 2 } else { 1 };
            let half = choices.len().div_ceil(across);
            // Two columns need the width that the labels have above them.
            let indent = if across == 1 { LABEL } else { 0 };
            let room = (columns.saturating_sub(indent) / across).saturating_sub(2);
            (0..half)
                .map(|row| {
                    let mut spans = vec![Span::raw(fit("", indent))];
                    for (key, word, title) in choices.iter().skip(row).step_by(half) {
                        let style = if bench.raw(field) == *word {
                            theme.strong()
                        } else {
                            ratatui::style::Style::new()
                        };
                        spans.push(Span::styled(format!("{key} "), theme.focus()));
                        spans.push(Span::styled(fit(title, room), style));
                    }
                    Line::from(spans)
                })
                .collect()
        }
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

fn row_line(
    row: Row,
    bench: &Bench,
    session: &Session,
    column: usize,
    columns: usize,
    focused: bool,
) -> (Line<'static>, usize) {
    let theme = session.theme;
    match row {
        Row::Sign => sign_line(bench, session, columns, focused),
        Row::Note => {
            let note = match bench.readings.note.as_deref() {
                Some(_) if session.discreet => "there is one; F7 shows it",
                note => note.unwrap_or_default(),
            };
            let text = cut(&safe(note), columns.saturating_sub(LABEL));
            let label = Span::raw(fit("note", LABEL));
            (Line::from(vec![label, Span::raw(text)]), 0)
        }
        Row::Earlier(n) => (earlier_line(bench, n, column, theme), 0),
        Row::One(field) => {
            let here = focused && bench.field() == Some(field);
            let (text, style) = cell(field, bench, here, theme);
            let text = cut(&text, columns.saturating_sub(LABEL));
            let end = LABEL
                + if here {
                    width(bench.typed(field)).min(width(&text))
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
                            width(bench.typed(field)).min(column.saturating_sub(1))
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

/// A try before this one, which stays as it was.
fn earlier_line(bench: &Bench, n: usize, column: usize, theme: Theme) -> Line<'static> {
    let label = format!("  try {}", n + 1);
    let mut spans = vec![Span::styled(fit(&label, LABEL), theme.muted())];
    if let Some(readings) = bench.earlier.get(n) {
        for eye in readings.distance.both() {
            let words = eye.map_or_else(
                || "not done".to_owned(),
                crate::domain::readings::AcuityResult::in_words,
            );
            spans.push(Span::styled(fit(&words, column), theme.muted()));
        }
    }
    Line::from(spans)
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

/// The line that signs says what will be stored.
pub fn sign_line(
    bench: &Bench,
    session: &Session,
    columns: usize,
    focused: bool,
) -> (Line<'static>, usize) {
    let theme = session.theme;
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
        let words = if bench.may_try_again() {
            "signed · Alt-r second try · Enter next"
        } else if bench.may_add_part() {
            "signed · Alt-r adds the tests · Enter next"
        } else {
            "signed · Ctrl-E corrects · Enter next"
        };
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
    let verb = if bench.is_further_try() {
        "Enter signs this try"
    } else if bench.elsewhere.is_some() && bench.task().is_none() {
        "Enter signs this part"
    } else {
        "Enter signs"
    };
    let mut words = match bench.status() {
        Some(status) => format!("{verb}: {}", status.title()),
        None if bench.task().is_some() => {
            let task = bench.task().map_or("", ScreeningTest::title);
            format!("{verb}: part of the visit, {task}")
        }
        None if bench.keeps_back() || session.discreet => verb.to_owned(),
        None => format!("{verb}: {}", bench.outcome.kind.title()),
    };
    if bench.will_state_no_signs() {
        words.push_str(", no signs seen");
    }
    let spans = vec![
        label,
        Span::styled(cut(&words, columns.saturating_sub(LABEL)), theme.focus()),
    ];
    (Line::from(spans), LABEL)
}
