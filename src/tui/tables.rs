//! Term: what is known, in a table.

use ratatui::Frame;
use ratatui::layout::{Position, Rect};
use ratatui::text::Line;
use ratatui::widgets::Paragraph;

use crate::tui::app::Session;
use crate::tui::text::{cut, fit, safe, width};

/// A table that can be scrolled.
#[derive(Debug, Default)]
pub struct Table {
    rows: Option<Vec<Vec<String>>>,
    widths: Vec<usize>,
    top: usize,
}

impl Table {
    /// Takes the rows; the first is the header.
    pub fn fill(&mut self, rows: Vec<Vec<String>>) {
        let rows: Vec<Vec<String>> = rows
            .into_iter()
            .map(|row| {
                row.iter()
                    .map(|c| crate::domain::text::shown(c, 120))
                    .collect()
            })
            .collect();
        let columns = rows.iter().map(Vec::len).max().unwrap_or(0);
        self.widths = (0..columns)
            .map(|c| {
                rows.iter()
                    .filter_map(|r| r.get(c))
                    .map(|t| width(t))
                    .max()
                    .unwrap_or(0)
            })
            .collect();
        self.top = self.top.min(rows.len().saturating_sub(2));
        self.rows = Some(rows);
    }

    /// Scrolls.
    pub fn scroll(&mut self, by: isize) {
        let last = self.rows.as_ref().map_or(0, |r| r.len().saturating_sub(2));
        self.top = self.top.saturating_add_signed(by).min(last);
    }

    /// Draws the table.
    pub fn draw(
        &self,
        frame: &mut Frame<'_>,
        area: Rect,
        session: &Session,
        empty: &str,
    ) -> Position {
        let theme = session.theme;
        let columns = usize::from(area.width);
        let mut lines = Vec::new();
        match self.rows.as_deref() {
            None => lines.push(Line::styled(" reading…", theme.muted())),
            Some([header, body @ ..]) => {
                lines.push(Line::styled(
                    cut(&self.row(header, columns), columns),
                    theme.strong(),
                ));
                if body.is_empty() {
                    lines.push(Line::raw(cut(&format!(" {empty}"), columns)));
                }
                let room = usize::from(area.height).saturating_sub(1);
                for row in body.iter().skip(self.top).take(room) {
                    lines.push(Line::raw(cut(&self.row(row, columns), columns)));
                }
            }
            Some([]) => lines.push(Line::raw(cut(&format!(" {empty}"), columns))),
        }
        frame.render_widget(Paragraph::new(lines), area);
        Position::new(area.x, area.y)
    }

    /// Sets a row in columns; numbers go to the right; wide columns give way when space is short.
    fn row(&self, row: &[String], columns: usize) -> String {
        let widths = self.fitted(columns);
        let mut out = String::from(" ");
        for (i, wide) in widths.iter().enumerate() {
            let text = row.get(i).map_or("", String::as_str);
            let number = !text.is_empty()
                && text
                    .chars()
                    .all(|c| c.is_ascii_digit() || ",.%".contains(c));
            if number {
                out.push_str(&" ".repeat(wide.saturating_sub(width(text))));
                out.push_str(&safe(text));
            } else {
                out.push_str(&fit(text, *wide));
            }
            out.push_str("  ");
        }
        out
    }

    fn fitted(&self, columns: usize) -> Vec<usize> {
        let mut widths = self.widths.clone();
        let gaps = 2 * widths.len() + 1;
        while widths.iter().sum::<usize>() + gaps > columns {
            let Some(widest) = widths.iter_mut().max().filter(|w| **w > 6) else {
                break;
            };
            *widest -= 1;
        }
        widths
    }
}
