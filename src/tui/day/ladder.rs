//! The acuity ladder: one rung per line of the chart, R and L where each eye stands, the pass line
//! of this child's age drawn across, and the gap bracketed when it is two lines or more.

use ratatui::Frame;
use ratatui::layout::Rect;
use ratatui::text::{Line, Span};
use ratatui::widgets::Paragraph;

use crate::domain::acuity::{Acuity, Line as ChartLine, LineCredit, Notation, Step};
use crate::domain::readings::{AcuityResult, Eyes};
use crate::tui::judging::PassLine;
use crate::tui::text::{fit, width};
use crate::tui::theme::Theme;

/// Where one eye stands on the ladder.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Mark {
    /// On this step.
    At(i32),
    /// On this step or better.
    OrBetter(i32),
    /// Below this step.
    Below(i32),
    /// Off the chart.
    Off,
}

/// Returns where an eye stands: the line that was written, without line credit, which each rule
/// set gives by its own measure.
pub fn mark(result: Option<AcuityResult>) -> Option<Mark> {
    match result?.acuity()? {
        Acuity::Read { line, .. } => Some(Mark::At(line.step().0)),
        Acuity::AtLeast(line) => Some(Mark::OrBetter(line.step().0)),
        Acuity::WorseThan(line) => Some(Mark::Below(line.step().0)),
        Acuity::AsWritten(_) => None,
        _ => Some(Mark::Off),
    }
}

/// Leaves out a value that stands at the pass line (`or better`, `worse than`), which it would tell.
pub fn told_by_itself(result: Option<AcuityResult>) -> Option<AcuityResult> {
    result.filter(|_| !matches!(mark(result), Some(Mark::OrBetter(_) | Mark::Below(_))))
}

impl Mark {
    fn row(self) -> i32 {
        match self {
            Mark::At(step) | Mark::OrBetter(step) => step,
            Mark::Below(step) => step + 1,
            Mark::Off => COARSEST + 1,
        }
    }

    fn text(self, letter: &str) -> String {
        match self {
            Mark::At(_) => letter.to_owned(),
            Mark::OrBetter(_) => format!("{letter}↑"),
            Mark::Below(_) => format!("{letter}↓"),
            Mark::Off => format!("{letter} off"),
        }
    }
}

const FINEST: i32 = Step::FINEST.0;
const COARSEST: i32 = 10;

/// Everything the ladder shows.
#[derive(Debug, Clone)]
pub struct Ladder<'a> {
    /// Distance acuity.
    pub eyes: Eyes<Option<AcuityResult>>,
    /// The pass line.
    pub pass: Option<&'a PassLine>,
    /// How lines are written.
    pub notation: Notation,
    /// Lines of the chart in use; empty where it is not known.
    pub chart: &'a [ChartLine],
    /// Whether nothing may show what the eyes come to.
    pub quiet: bool,
}

impl Ladder<'_> {
    /// Returns the smallest possible gap between the eyes in steps.
    fn gap(&self) -> i32 {
        if self.quiet {
            return 0;
        }
        let range = |r: Option<AcuityResult>| r?.acuity()?.steps(LineCredit::Majority, 5, 0);
        match (range(self.eyes.right), range(self.eyes.left)) {
            (Some(right), Some(left)) if right.is_on_the_chart() && left.is_on_the_chart() => {
                right.difference(left).0
            }
            _ => 0,
        }
    }

    /// Returns how a step is called on the chart in use.
    fn called(&self, step: i32) -> String {
        self.chart
            .iter()
            .find(|line| line.step().0 == step)
            .map_or_else(
                || ChartLine::at(Step(step), self.notation).to_string(),
                ToString::to_string,
            )
    }

    /// Returns the rungs to draw in so many rows: those with something on them first, then around.
    fn window(&self, rows: usize) -> (i32, i32) {
        let pass = self.pass.map(|p| p.line.step().0);
        let marks: Vec<i32> = [mark(self.eyes.right), mark(self.eyes.left)]
            .into_iter()
            .flatten()
            .map(Mark::row)
            .chain(pass)
            .collect();
        let rows = i32::try_from(rows).unwrap_or(i32::MAX).max(1);
        let all = COARSEST + 1 - FINEST + 1;
        let bottom_row = if marks.contains(&(COARSEST + 1)) {
            COARSEST + 1
        } else {
            COARSEST
        };
        if rows >= all {
            return (FINEST, bottom_row);
        }
        let low = marks.iter().copied().min().unwrap_or(0);
        let high = marks.iter().copied().max().unwrap_or(3);
        let spare = rows - (high - low + 1);
        if spare < 0 {
            // Too little room for both ends: the worse end matters more.
            return (high - rows + 1, high);
        }
        let top = (low - (spare + 1) / 2).max(FINEST);
        let bottom = (top + rows - 1).min(bottom_row);
        ((bottom - rows + 1).max(FINEST), bottom)
    }

    /// Returns the lines of the ladder.
    pub fn lines(&self, rows: usize, columns: usize, theme: Theme) -> Vec<Line<'static>> {
        if rows == 0 {
            return Vec::new();
        }
        let (top, bottom) = self.window(rows);
        let marks = [mark(self.eyes.right), mark(self.eyes.left)];
        let gap = self.gap();
        let bracket = (gap >= 2).then(|| {
            let [a, b] = marks.map(|m| m.map_or(0, Mark::row));
            (a.min(b), a.max(b))
        });
        let label = (top..=bottom)
            .map(|s| width(&self.called(s)))
            .fold(6, usize::max);
        let columns = columns.saturating_sub(label + 16);
        (top..=bottom)
            .map(|step| {
                let mut spans = self.rung(step, label, marks, theme);
                let on_pass = self.is_pass(step);
                let filler = if on_pass { "─" } else { " " };
                let glyph = match bracket {
                    Some((a, b)) if step == a && step == b => "─",
                    Some((a, _)) if step == a => "┐",
                    Some((_, b)) if step == b => "┘",
                    Some((a, b)) if step > a && step < b => "│",
                    _ => filler,
                };
                let style = if glyph == "─" {
                    theme.pass()
                } else {
                    theme.attention()
                };
                spans.push(Span::styled(glyph, style));
                let middle =
                    bracket.map(|(a, b)| i32::midpoint(a, b).max(top).max(a)) == Some(step);
                let words = match (middle, on_pass) {
                    (true, true) => format!(" {} ─ {}", steps_words(gap), self.pass_words()),
                    (true, false) => format!(" {}", steps_words(gap)),
                    (false, true) => format!("── {}", self.pass_words()),
                    _ => String::new(),
                };
                let style = if middle {
                    theme.attention()
                } else {
                    theme.pass()
                };
                spans.push(Span::styled(crate::tui::text::cut(&words, columns), style));
                Line::from(spans)
            })
            .collect()
    }

    fn is_pass(&self, step: i32) -> bool {
        self.pass.is_some_and(|p| p.line.step().0 == step)
    }

    /// Draws the name of a line and the eyes that stand on it.
    fn rung(
        &self,
        step: i32,
        label: usize,
        marks: [Option<Mark>; 2],
        theme: Theme,
    ) -> Vec<Span<'static>> {
        let on_pass = self.is_pass(step);
        let quiet = if on_pass {
            theme.strong()
        } else {
            theme.muted()
        };
        let line = if step > COARSEST {
            "off".to_owned()
        } else {
            self.called(step)
        };
        let mut spans = vec![
            Span::styled(format!(" {} ", fit(&line, label)), quiet),
            Span::styled("┤", quiet),
        ];
        let filler = if on_pass { "─" } else { " " };
        for (eye, letter) in marks.into_iter().zip(["R", "L"]) {
            let text = eye
                .filter(|m| m.row() == step)
                .map_or(String::new(), |m| m.text(letter));
            let style = match (text.is_empty(), on_pass) {
                (false, _) => theme.strong(),
                (true, true) => theme.pass(),
                (true, false) => theme.muted(),
            };
            let rest = filler.repeat(5usize.saturating_sub(width(&text)));
            spans.push(Span::styled(format!("{filler}{text}{rest}"), style));
        }
        spans
    }

    fn pass_words(&self) -> String {
        self.pass
            .map(|p| crate::tui::text::safe(&p.words))
            .unwrap_or_default()
    }
}

/// Says a gap in words.
pub fn steps_words(gap: i32) -> String {
    const WORDS: [&str; 11] = [
        "no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten",
    ];
    let count = usize::try_from(gap)
        .ok()
        .and_then(|g| WORDS.get(g))
        .map_or_else(|| gap.to_string(), |w| (*w).to_owned());
    format!("{count} step{}", if gap == 1 { "" } else { "s" })
}

/// Draws the ladder.
pub fn draw(frame: &mut Frame<'_>, area: Rect, ladder: &Ladder<'_>, theme: Theme) {
    let lines = ladder.lines(usize::from(area.height), usize::from(area.width), theme);
    frame.render_widget(Paragraph::new(lines), area);
}
