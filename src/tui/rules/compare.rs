//! Two rule sets on the children of this term; thresholds move under the arrows and the counts
//! follow.

use std::fmt::Write;

use ratatui::Frame;
use ratatui::layout::{Position, Rect};
use ratatui::style::Style;
use ratatui::text::Line;
use ratatui::widgets::Paragraph;

use crate::actions::compare::{Comparison, Side, Subject, share, step_lines};
use crate::keys::Command;
use crate::tui::app::Session;
use crate::tui::text::{cut, fit, safe, wrap_under};

/// A comparison on the screen.
#[derive(Debug)]
pub struct Compared {
    term: String,
    comparison: Comparison,
    /// Who each child is, for the list of those who flip.
    names: Vec<String>,
    side: Side,
    at: usize,
    top: usize,
    /// What is shown; made anew after each step.
    lines: Vec<String>,
}

/// How many of the children who flip are listed.
const LISTED: usize = 200;

impl Compared {
    /// Shows a comparison on the children of a term.
    pub fn new(term: String, comparison: Comparison, subjects: &[Subject]) -> Compared {
        let names = subjects
            .iter()
            .map(|s| safe(&format!("{} {} {}", s.child_id, s.name, s.site)))
            .collect();
        let mut compared = Compared {
            term,
            comparison,
            names,
            side: Side::A,
            at: 0,
            top: 0,
            lines: Vec::new(),
        };
        compared.count();
        compared
    }

    /// Carries out a command of the panel.
    pub(super) fn command(&mut self, command: Command, by: isize, paging: bool) {
        let moved = match command {
            Command::Stricter => self.comparison.step(self.side, self.at, -1),
            Command::Milder => self.comparison.step(self.side, self.at, 1),
            Command::PutBack => {
                for side in Side::BOTH {
                    self.comparison.reset(side);
                }
                true
            }
            Command::OtherSet => {
                self.side = match self.side {
                    Side::A => Side::B,
                    Side::B => Side::A,
                };
                self.at = 0;
                false
            }
            _ if paging => {
                self.top = self.top.saturating_add_signed(by).min(self.lines.len());
                false
            }
            _ => {
                let last = self.comparison.movable(self.side).len().saturating_sub(1);
                self.at = self.at.saturating_add_signed(by).min(last);
                false
            }
        };
        if moved {
            self.count();
        }
    }

    fn count(&mut self) {
        let tally = self.comparison.tally();
        let mut lines = step_lines(&self.comparison);
        for (title, groups) in [("By age", &tally.by_age), ("By site", &tally.by_site)] {
            lines.push(String::new());
            lines.push(format!(
                "{title}: refers by each, only the first, only the second"
            ));
            for (name, counts) in groups {
                let n = counts.children();
                let refers = |side| counts.of(side, crate::actions::compare::Verdict::Refer);
                lines.push(format!(
                    "{}  {}  {}  {}  {}",
                    safe(name),
                    share(refers(Side::A), n),
                    share(refers(Side::B), n),
                    counts.only(Side::A),
                    counts.only(Side::B)
                ));
            }
        }
        let flips = self.comparison.flips();
        lines.push(String::new());
        lines.push(format!("Children who flip: {}", flips.len()));
        lines.extend(flips.iter().take(LISTED).map(|flip| {
            let name = self.names.get(flip.place).map_or("", String::as_str);
            format!("{name}: {}, {}", flip.a.word(), flip.b.word())
        }));
        if flips.len() > LISTED {
            lines.push("the rest: twoline rules compare".to_owned());
        }
        self.lines = lines;
    }

    /// Draws thresholds and counts.
    pub(super) fn draw(&self, frame: &mut Frame<'_>, area: Rect, session: &Session) -> Position {
        let theme = session.theme;
        let columns = usize::from(area.width).saturating_sub(2);
        let rows = usize::from(area.height);
        let ids = self.comparison.ids();
        let id = match self.side {
            Side::A => &ids[0],
            Side::B => &ids[1],
        };
        let mut out = vec![Line::styled(
            cut(
                &format!(
                    " {} and {} on {} children of term {}",
                    ids[0],
                    ids[1],
                    self.names.len(),
                    safe(&self.term)
                ),
                columns,
            ),
            theme.strong(),
        )];
        out.push(Line::styled(
            cut(
                &format!(" Thresholds of {id}; ◂ ▸ tries another one out, nothing is written"),
                columns,
            ),
            theme.muted(),
        ));
        let movable = self.comparison.movable(self.side);
        let room = (rows / 3).clamp(1, 8);
        let top = self
            .at
            .saturating_sub(room / 2)
            .min(movable.len().saturating_sub(room));
        let focus = out.len() + self.at - top.min(self.at);
        for (i, threshold) in movable.iter().enumerate().skip(top).take(room) {
            let mut text = format!(
                " {} {} {}",
                if i == self.at { "▸" } else { " " },
                fit(&threshold.id, 22),
                threshold.threshold
            );
            if threshold.threshold != threshold.original {
                let _ = write!(text, "  (in the file: {})", threshold.original);
            }
            let style = if i == self.at {
                theme.focus()
            } else {
                Style::new()
            };
            out.push(Line::styled(cut(&text, columns), style));
        }
        out.push(Line::raw(""));
        let body: Vec<String> = self
            .lines
            .iter()
            .flat_map(|line| wrap_under(line, columns.saturating_sub(1)))
            .collect();
        let left = rows.saturating_sub(out.len());
        let top = self.top.min(body.len().saturating_sub(left));
        out.extend(
            body.into_iter()
                .skip(top)
                .take(left)
                .map(|line| Line::raw(format!(" {line}"))),
        );
        frame.render_widget(Paragraph::new(out), area);
        Position::new(
            area.x + 1.min(area.width.saturating_sub(1)),
            area.y + focus.min(rows.saturating_sub(1)) as u16,
        )
    }
}
