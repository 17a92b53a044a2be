//! The Rules place: every rule set and protocol with thresholds, sources and basis.

use ratatui::Frame;
use ratatui::layout::{Position, Rect};
use ratatui::style::Style;
use ratatui::text::Line;
use ratatui::widgets::Paragraph;

use crate::tui::app::Session;
use crate::tui::judging::{Library, RulePage, rule_pages, show::RuleSheet};
use crate::tui::text::{cut, fit, safe, wrap, wrap_under};

/// The list of rule sets with their sheets.
#[derive(Debug)]
pub struct Rules {
    pages: Vec<(String, RulePage)>,
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
        self.top = self.top.saturating_add_signed(by).min(200);
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
                        Style::new()
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
        if let Some((_, page)) = self.pages.get(self.at) {
            let columns = usize::from(sheet.width).saturating_sub(2);
            let lines = match page {
                RulePage::Sheet(sheet) => sheet_lines(sheet, columns),
                RulePage::Lines(lines) => lines
                    .iter()
                    .flat_map(|l| wrap_under(&safe(l), columns))
                    .collect(),
            };
            let top = self.top.min(lines.len().saturating_sub(rows));
            let text: Vec<Line<'_>> = lines
                .iter()
                .enumerate()
                .skip(top)
                .take(rows)
                .map(|(i, l)| {
                    let style = if i == 0 { theme.strong() } else { Style::new() };
                    Line::styled(format!(" {l}"), style)
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

/// Sets a rule set as a table: one column a band, one row a finding.
fn sheet_lines(sheet: &RuleSheet, columns: usize) -> Vec<String> {
    let mut out = vec![safe(&sheet.title)];
    out.push(format!("{}  {}", safe(&sheet.id), safe(&sheet.edition)));
    if !sheet.approval.is_empty() {
        out.push(safe(&sheet.approval));
    }
    out.push(String::new());
    let bands = sheet.columns.len().max(1);
    let label = (columns / 3).clamp(18.min(columns), 40);
    let band = (columns.saturating_sub(label) / bands)
        .saturating_sub(1)
        .max(6);
    let mut row = |what: &str, cells: &[String]| {
        let mut parts = vec![wrap(&safe(what), label.saturating_sub(1))];
        parts.extend(cells.iter().map(|c| wrap(&safe(c), band.saturating_sub(1))));
        let height = parts.iter().map(Vec::len).max().unwrap_or(0);
        for i in 0..height {
            let mut line = String::new();
            for (at, part) in parts.iter().enumerate() {
                let wide = if at == 0 { label } else { band + 1 };
                line.push_str(&fit(part.get(i).map_or("", String::as_str), wide));
            }
            out.push(line.trim_end().to_owned());
        }
    };
    row("refer when", &sheet.columns);
    for (finding, cells) in &sheet.rows {
        row(finding, cells);
    }
    out.push(String::new());
    if !sheet.line_credit.is_empty() {
        out.extend(wrap(
            &format!("Line credit: {}", safe(&sheet.line_credit)),
            columns,
        ));
    }
    for (heading, lines) in [("Sources", &sheet.sources), ("Notes", &sheet.notes)] {
        if lines.is_empty() {
            continue;
        }
        out.push(String::new());
        out.push(heading.to_owned());
        for line in lines {
            out.extend(wrap_under(&format!("- {}", safe(line)), columns));
        }
    }
    out
}
