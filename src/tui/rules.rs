//! The Rules place: every rule set and protocol with thresholds, sources and basis.

use ratatui::Frame;
use ratatui::layout::{Position, Rect};
use ratatui::text::Line;
use ratatui::widgets::Paragraph;

use crate::tui::app::Session;
use crate::tui::judging::{Library, rule_pages};
use crate::tui::text::{cut, safe, wrap};

/// The list of rule sets with their sheets.
#[derive(Debug)]
pub struct Rules {
    /// (id, lines of the sheet).
    pages: Vec<(String, Vec<String>)>,
    at: usize,
    top: usize,
}

impl Rules {
    /// Reads the library.
    pub fn new(library: &Library) -> Rules {
        Rules {
            pages: rule_pages(library),
            at: 0,
            top: 0,
        }
    }

    /// Goes to another rule set.
    pub fn step(&mut self, by: isize) {
        self.at = self
            .at
            .saturating_add_signed(by)
            .min(self.pages.len().saturating_sub(1));
        self.top = 0;
    }

    /// Scrolls the sheet.
    pub fn scroll(&mut self, by: isize) {
        let last = self
            .pages
            .get(self.at)
            .map_or(0, |p| p.1.len().saturating_sub(1));
        self.top = self.top.saturating_add_signed(by).min(last);
    }

    /// Draws list and sheet.
    pub fn draw(&self, frame: &mut Frame<'_>, area: Rect, session: &Session) -> Position {
        let theme = session.theme;
        let list_width = 24.min(area.width);
        let rows = usize::from(area.height);
        let top = self
            .at
            .saturating_sub(rows / 2)
            .min(self.pages.len().saturating_sub(rows));
        let list: Vec<Line<'_>> = self
            .pages
            .iter()
            .enumerate()
            .skip(top)
            .take(rows)
            .map(|(i, (id, _))| {
                let text = cut(
                    &format!(" {} {id}", if i == self.at { "▸" } else { " " }),
                    usize::from(list_width),
                );
                Line::styled(
                    text,
                    if i == self.at {
                        theme.focus()
                    } else {
                        ratatui::style::Style::new()
                    },
                )
            })
            .collect();
        frame.render_widget(
            Paragraph::new(list),
            Rect {
                width: list_width,
                ..area
            },
        );
        let rule = Rect {
            x: area.x + list_width,
            width: 1.min(area.width - list_width),
            ..area
        };
        let bar: Vec<Line<'_>> = (0..area.height)
            .map(|_| Line::styled("│", theme.muted()))
            .collect();
        frame.render_widget(Paragraph::new(bar), rule);
        let sheet = Rect {
            x: rule.x + rule.width,
            width: area.width - list_width - rule.width,
            ..area
        };
        if let Some((_, lines)) = self.pages.get(self.at) {
            let columns = usize::from(sheet.width).saturating_sub(2);
            let text: Vec<Line<'_>> = lines
                .iter()
                .flat_map(|l| {
                    if l.starts_with("  ") {
                        vec![cut(&safe(l), columns)]
                    } else {
                        wrap(&safe(l), columns)
                    }
                })
                .skip(self.top)
                .take(rows)
                .enumerate()
                .map(|(i, l)| {
                    Line::styled(
                        format!(" {l}"),
                        if i + self.top == 0 {
                            theme.strong()
                        } else {
                            ratatui::style::Style::new()
                        },
                    )
                })
                .collect();
            frame.render_widget(Paragraph::new(text), sheet);
        }
        Position::new(
            area.x + 1.min(area.width.saturating_sub(1)),
            area.y + (self.at - top).min(rows.saturating_sub(1)) as u16,
        )
    }
}
