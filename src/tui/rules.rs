//! The Rules place: every rule set and protocol with thresholds, sources and basis.

mod compare;
mod picture;

use ratatui::Frame;
use ratatui::layout::{Position, Rect};
use ratatui::style::Style;
use ratatui::text::Line;
use ratatui::widgets::Paragraph;

use std::cell::Cell;

use crate::keys::{Command, Context};
use crate::tui::app::{Effect, Request, Session};
use crate::tui::day::Done;
use crate::tui::judging::{Library, RulePage, rule_pages, show::RuleSheet};
use crate::tui::text::{cut, fit, safe, wrap, wrap_under};

pub use compare::Compared;

/// The list of rule sets with their sheets.
#[derive(Debug)]
pub struct Rules {
    pages: Vec<Page>,
    at: usize,
    top: usize,
    /// How far the sheet on the screen can be scrolled; known once it was drawn.
    last_top: Cell<usize>,
    /// The kind that is listed; all of them when none.
    kind: Option<&'static str>,
    /// The first of two rule sets to compare.
    marked: Option<String>,
    compared: Option<Compared>,
}

#[derive(Debug)]
struct Page {
    id: String,
    kind: &'static str,
    /// Whether it is a rule set, which judges children by itself.
    comparable: bool,
    superseded: bool,
    body: RulePage,
    picture: Vec<String>,
}

/// What the protocols are listed as.
const PROTOCOLS: &str = "protocols";
/// What condition groups and clinic bands are listed as.
const TABLES: &str = "groups and bands";

impl Rules {
    /// Reads the library.
    pub fn new(library: &Library) -> Rules {
        let pages = rule_pages(library)
            .into_iter()
            .map(|(id, body)| {
                let set = library.rule_set(&id);
                Page {
                    kind: set
                        .map(|s| s.kind.title())
                        .or_else(|| library.grading(&id).map(|_| TABLES))
                        .unwrap_or(PROTOCOLS),
                    comparable: set.is_some(),
                    superseded: set.is_some_and(|s| s.status.starts_with("superseded")),
                    picture: set.map(picture::lines).unwrap_or_default(),
                    id,
                    body,
                }
            })
            .collect();
        Rules {
            pages,
            at: 0,
            top: 0,
            last_top: Cell::new(0),
            kind: None,
            marked: None,
            compared: None,
        }
    }

    /// Returns the context of the next key.
    pub fn context(&self) -> Context {
        if self.compared.is_some() {
            Context::Compare
        } else {
            Context::Rules
        }
    }

    /// Shows two rule sets beside each other.
    pub fn compared(&mut self, compared: Compared) {
        self.compared = Some(compared);
    }

    /// Carries out a command.
    pub fn command(&mut self, command: Command, by: isize, paging: bool) -> Done {
        if let Some(compared) = &mut self.compared {
            if command == Command::Cancel {
                self.compared = None;
            } else {
                compared.command(command, by, paging);
            }
            return Done::effects(Vec::new());
        }
        match command {
            Command::CompareSets => return self.mark(),
            Command::OneKind => self.next_kind(),
            _ if paging => self.scroll(by),
            _ => self.step(by),
        }
        Done::effects(Vec::new())
    }

    /// Marks the rule set, or compares it with the one that is marked.
    fn mark(&mut self) -> Done {
        let Some(page) = self.listed().nth(self.at) else {
            return Done::effects(Vec::new());
        };
        if !page.comparable {
            return Done::said("only rule sets are compared");
        }
        let id = page.id.clone();
        match self.marked.take() {
            Some(first) if first != id => {
                let mut done = Done::said("comparing on the children of this term");
                done.effects.push(Effect::ask(Request::Compare(first, id)));
                done
            }
            _ => {
                self.marked = Some(id);
                Done::said("marked; choose the other rule set and press c again")
            }
        }
    }

    fn next_kind(&mut self) {
        // Local sets stand behind all shipped ones, so that a kind comes up again.
        let mut kinds: Vec<&'static str> = Vec::new();
        for page in &self.pages {
            if !kinds.contains(&page.kind) {
                kinds.push(page.kind);
            }
        }
        self.kind = match self.kind {
            None => kinds.first().copied(),
            Some(kind) => kinds
                .iter()
                .position(|k| *k == kind)
                .and_then(|i| kinds.get(i + 1))
                .copied(),
        };
        (self.at, self.top) = (0, 0);
    }

    fn listed(&self) -> impl Iterator<Item = &Page> {
        self.pages
            .iter()
            .filter(|p| self.kind.is_none_or(|kind| p.kind == kind))
    }

    /// Goes to another rule set.
    fn step(&mut self, by: isize) {
        self.at = self
            .at
            .saturating_add_signed(by)
            .min(self.listed().count().saturating_sub(1));
        self.top = 0;
    }

    /// Scrolls the sheet.
    fn scroll(&mut self, by: isize) {
        self.top = self.top.saturating_add_signed(by).min(self.last_top.get());
    }

    /// Draws list and sheet.
    pub fn draw(&self, frame: &mut Frame<'_>, area: Rect, session: &Session) -> Position {
        let theme = session.theme;
        if let Some(compared) = &self.compared {
            return compared.draw(frame, area, session);
        }
        let list_width = 24.min(area.width);
        let rows = usize::from(area.height);
        let head = usize::from(self.kind.is_some());
        let room = rows.saturating_sub(head);
        let listed: Vec<&Page> = self.listed().collect();
        let top = self
            .at
            .saturating_sub(room / 2)
            .min(listed.len().saturating_sub(room));
        let mut list: Vec<Line<'_>> = Vec::with_capacity(rows);
        if let Some(kind) = self.kind {
            let text = cut(&format!(" only {kind}"), usize::from(list_width));
            list.push(Line::styled(text, theme.muted()));
        }
        list.extend(
            listed
                .iter()
                .enumerate()
                .skip(top)
                .take(room)
                .map(|(i, page)| {
                    let sign = match (i == self.at, self.marked.as_ref() == Some(&page.id)) {
                        (_, true) => "c",
                        (true, false) => "▸",
                        (false, false) => " ",
                    };
                    // What came after it stands on the sheet; here a superseded set is bracketed.
                    let id = if page.superseded {
                        format!("[{}]", page.id)
                    } else {
                        page.id.clone()
                    };
                    let text = cut(&format!(" {sign} {id}"), usize::from(list_width));
                    let style = if i == self.at {
                        theme.focus()
                    } else if page.superseded {
                        theme.muted()
                    } else {
                        Style::new()
                    };
                    Line::styled(text, style)
                }),
        );
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
        if let Some(page) = listed.get(self.at) {
            let columns = usize::from(sheet.width).saturating_sub(2);
            let lines: Vec<String> = match &page.body {
                RulePage::Sheet(sheet) => sheet_lines(sheet, &page.picture, columns),
                RulePage::Lines(lines) => lines
                    .iter()
                    .flat_map(|l| wrap_under(&safe(l), columns))
                    .collect(),
            };
            self.last_top.set(lines.len().saturating_sub(rows));
            let top = self.top.min(self.last_top.get());
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
            area.y + (head + self.at - top).min(rows.saturating_sub(1)) as u16,
        )
    }
}

/// Sets a rule set as a table: one column a band, one row a finding.
fn sheet_lines(sheet: &RuleSheet, picture: &[String], columns: usize) -> Vec<String> {
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
    if !picture.is_empty() {
        out.push(String::new());
        out.extend(picture.iter().map(|line| cut(line, columns)));
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
