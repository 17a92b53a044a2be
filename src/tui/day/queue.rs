//! The children of a day by class. Everything a frame needs is worked out when the list changes,
//! so that drawing costs the same for 100 children and for 100,000.

use std::collections::{HashMap, HashSet};

use ratatui::Frame;
use ratatui::layout::Rect;
use ratatui::style::Style;
use ratatui::text::{Line, Span};
use ratatui::widgets::Paragraph;

use crate::actions::{DayChild, QueueState};
use crate::domain::codes::Attempt;
use crate::domain::outcome::OutcomeKind;
use crate::domain::text::folded;
use crate::tui::text::{cut, ends, fit, name, safe};
use crate::tui::theme::Theme;

/// A run of children under one heading.
#[derive(Debug, Clone, PartialEq, Eq)]
struct Class {
    title: String,
    total: usize,
    to_come: usize,
}

/// A row of the list.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Row {
    Class(usize),
    Child(usize),
}

/// The children of a day.
#[derive(Debug, Default)]
pub struct Queue {
    children: Vec<DayChild>,
    searched: Vec<String>,
    by_id: HashMap<String, usize>,
    class_of: Vec<usize>,
    classes: Vec<Class>,
    rows: Vec<Row>,
    hits: Vec<usize>,
    to_come: usize,
    /// The row under the cursor (in the hits while something is sought).
    at: usize,
    /// What is sought.
    find: String,
    /// Whether those who are done are listed too.
    all: bool,
}

/// How many hits of a find are kept.
const HITS: usize = 500;

impl Queue {
    /// Takes the children in the order in which they are to come.
    pub fn new(children: Vec<DayChild>) -> Queue {
        let mut queue = Queue {
            children,
            ..Queue::default()
        };
        queue.arrange();
        queue.at = queue.first_child_row();
        queue
    }

    fn arrange(&mut self) {
        self.searched = self.children.iter().map(searched_text).collect();
        self.by_id = self
            .children
            .iter()
            .enumerate()
            .map(|(i, c)| (c.child_id.to_lowercase(), i))
            .collect();
        self.classes.clear();
        self.class_of.clear();
        for child in &self.children {
            let title = heading(child);
            if self.classes.last().is_none_or(|c| c.title != title) {
                self.classes.push(Class {
                    title,
                    total: 0,
                    to_come: 0,
                });
            }
            self.class_of.push(self.classes.len() - 1);
        }
        self.count();
    }

    /// Counts the states and lists the rows again, in one pass.
    fn count(&mut self) {
        for class in &mut self.classes {
            class.total = 0;
            class.to_come = 0;
        }
        self.to_come = 0;
        self.rows.clear();
        let mut last = usize::MAX;
        for (i, child) in self.children.iter().enumerate() {
            let class = self.class_of[i];
            if class != last {
                self.rows.push(Row::Class(class));
                last = class;
            }
            self.classes[class].total += 1;
            if child.state == QueueState::ToCome {
                self.classes[class].to_come += 1;
                self.to_come += 1;
            }
            if self.all || is_open(child.state) {
                self.rows.push(Row::Child(i));
            }
        }
    }

    fn first_child_row(&self) -> usize {
        self.rows
            .iter()
            .position(
                |r| matches!(r, Row::Child(i) if self.children[*i].state == QueueState::ToCome),
            )
            .or_else(|| self.rows.iter().position(|r| matches!(r, Row::Child(_))))
            .unwrap_or(0)
    }

    /// Returns the children still to come and all children.
    pub fn counts(&self) -> (usize, usize) {
        (self.to_come, self.children.len())
    }

    /// Returns the child of an id, whatever its case.
    pub fn child(&self, id: &str) -> Option<&DayChild> {
        self.by_id
            .get(&id.trim().to_lowercase())
            .map(|i| &self.children[*i])
    }

    /// Returns the children whose name or id holds a text, the best first.
    pub fn matching(&self, text: &str, limit: usize) -> Vec<&DayChild> {
        self.search(text, limit)
            .into_iter()
            .map(|i| &self.children[i])
            .collect()
    }

    fn search(&self, text: &str, limit: usize) -> Vec<usize> {
        let text = folded(text);
        let words: Vec<&str> = text.split([' ', ',']).filter(|w| !w.is_empty()).collect();
        if words.is_empty() {
            return Vec::new();
        }
        let mut starts = Vec::new();
        let mut inside = Vec::new();
        for (i, searched) in self.searched.iter().enumerate() {
            if !words.iter().all(|w| searched.contains(w)) {
                continue;
            }
            if searched.starts_with(words[0]) {
                starts.push(i);
                if starts.len() == limit * 4 {
                    break;
                }
            } else if inside.len() < limit * 4 {
                inside.push(i);
            }
        }
        // Enter takes the first: beginnings of names come before middles, who is to come before who
        // is done.
        let begins = |i: usize, word: &str| {
            self.searched[i]
                .split(' ')
                .any(|part| part.starts_with(word))
        };
        let rank = |i: &usize| {
            (
                !words.iter().all(|word| begins(*i, word)),
                self.children[*i].state != QueueState::ToCome,
            )
        };
        starts.sort_by_key(rank);
        inside.sort_by_key(rank);
        starts.extend(inside);
        starts.truncate(limit);
        starts
    }

    /// Puts a child's new state into the list.
    pub fn update(&mut self, child: DayChild) {
        match self.by_id.get(&child.child_id.to_lowercase()).copied() {
            Some(i) => {
                let kept = self.selected().map(|c| c.child_id.clone());
                self.children[i] = child;
                self.count();
                match kept {
                    Some(id) if self.find.is_empty() => self.select(&id),
                    _ => {}
                }
                self.clamp();
            }
            None => self.insert(child),
        }
    }

    fn insert(&mut self, child: DayChild) {
        let title = heading(&child);
        let key = |c: &DayChild| (folded(&c.family_name), folded(&c.given_name));
        let same: Vec<usize> = (0..self.children.len())
            .filter(|i| self.classes[self.class_of[*i]].title == title)
            .collect();
        let position = same
            .iter()
            .copied()
            .find(|i| key(&self.children[*i]) > key(&child))
            .or_else(|| same.last().map(|i| i + 1))
            .unwrap_or(self.children.len());
        self.children.insert(position, child);
        self.arrange();
    }

    /// Returns the child under the cursor.
    pub fn selected(&self) -> Option<&DayChild> {
        if self.find.is_empty() {
            match self.rows.get(self.at) {
                Some(Row::Child(i)) => Some(&self.children[*i]),
                _ => None,
            }
        } else {
            self.hits.get(self.at).map(|i| &self.children[*i])
        }
    }

    /// Puts the cursor on a child; a child that is not listed leaves it near by.
    pub fn select(&mut self, id: &str) {
        let Some(wanted) = self.by_id.get(&id.to_lowercase()).copied() else {
            return;
        };
        self.end_find();
        // Rows are in the order of the children, so the place is found by halving.
        self.at = self.rows.partition_point(|row| match row {
            Row::Child(i) => *i < wanted,
            Row::Class(c) => *c <= self.class_of[wanted],
        });
        self.clamp();
    }

    /// Returns the next child to come after one, in the order of the list, going round.
    pub fn next_to_come(&self, after: &str, busy: &HashSet<String>) -> Option<&DayChild> {
        let start = self.by_id.get(&after.to_lowercase()).map_or(0, |i| i + 1);
        let n = self.children.len();
        (0..n).map(|k| &self.children[(start + k) % n]).find(|c| {
            c.state == QueueState::ToCome && c.child_id != after && !busy.contains(&c.child_id)
        })
    }

    /// Returns how many were not testable and wait for a second try today.
    pub fn second_tries(&self) -> usize {
        self.children
            .iter()
            .filter(|c| c.waits_for_second_try())
            .count()
    }

    /// Moves the cursor by so many children; class headings are passed over.
    pub fn step(&mut self, by: isize) {
        if !self.find.is_empty() {
            self.at = self
                .at
                .saturating_add_signed(by)
                .min(self.hits.len().saturating_sub(1));
            return;
        }
        let last = self.rows.len().saturating_sub(1);
        let mut to = self.at.saturating_add_signed(by).min(last);
        let forward = by > 0;
        while matches!(self.rows.get(to), Some(Row::Class(_))) {
            if forward && to < last {
                to += 1;
            } else if !forward && to > 0 {
                to -= 1;
            } else {
                to = self.at;
                break;
            }
        }
        self.at = to;
        self.clamp();
    }

    /// Moves the cursor to the first or the last child.
    pub fn jump(&mut self, last: bool) {
        let by = isize::try_from(self.rows.len().max(self.hits.len())).unwrap_or(isize::MAX);
        self.step(if last { by } else { -by });
    }

    fn clamp(&mut self) {
        self.at = self.at.min(self.rows.len().saturating_sub(1));
        if matches!(self.rows.get(self.at), Some(Row::Class(_))) {
            let after = (self.at..self.rows.len()).find(|i| matches!(self.rows[*i], Row::Child(_)));
            let before = (0..self.at)
                .rev()
                .find(|i| matches!(self.rows[*i], Row::Child(_)));
            self.at = after.or(before).unwrap_or(self.at);
        }
    }

    /// Returns what is sought.
    pub fn find(&self) -> &str {
        &self.find
    }

    /// Seeks another text.
    pub fn seek(&mut self, text: String) {
        let here = self.selected().map(|c| c.child_id.clone());
        self.find = text;
        if self.find.is_empty() {
            if let Some(id) = here {
                self.select(&id);
            }
            self.clamp();
        } else {
            self.hits = self.search(&self.find, HITS);
            self.at = 0;
        }
    }

    /// Ends the find.
    pub fn end_find(&mut self) {
        if !self.find.is_empty() {
            self.find.clear();
            self.hits.clear();
            self.at = self.first_child_row();
        }
    }

    /// Lists everybody, or only those who are not done; returns which.
    pub fn toggle_all(&mut self) -> bool {
        let here = self.selected().map(|c| c.child_id.clone());
        self.all = !self.all;
        self.count();
        if let Some(id) = here {
            self.select(&id);
        }
        self.clamp();
        self.all
    }
}

/// Says whether a child stays in the short list: to come, or to come back to today.
fn is_open(state: QueueState) -> bool {
    match state {
        QueueState::Signed(kind) => kind == OutcomeKind::Incomplete,
        QueueState::OptedOut | QueueState::UnderCare => false,
        _ => true,
    }
}

fn heading(child: &DayChild) -> String {
    if child.due_on.is_some() || child.attempt == Attempt::Rescreen {
        "Rescreens due".into()
    } else if child.class.is_empty() {
        child
            .grade
            .map_or_else(|| "no class".into(), |g| format!("grade {g}"))
    } else {
        safe(&child.class)
    }
}

fn searched_text(child: &DayChild) -> String {
    let mut text = folded(&child.family_name);
    text.push(' ');
    text.push_str(&folded(&child.given_name));
    text.push(' ');
    text.push_str(&folded(&child.child_id));
    text
}

/// What the list shows beside its own content.
#[derive(Debug, Clone, Copy)]
pub struct QueueMarks<'a> {
    /// The child on the bench.
    pub on_bench: Option<&'a str>,
    /// Children with a draft.
    pub drafts: &'a HashSet<String>,
    /// Children whose signature is on its way to the disk.
    pub saving: &'a HashSet<String>,
    /// Whether the list has the focus.
    pub focused: bool,
    /// Whether outcomes are not shown.
    pub discreet: bool,
}

/// Draws the list and returns where the cursor belongs, if the list has the focus.
pub fn draw(
    frame: &mut Frame<'_>,
    area: Rect,
    queue: &Queue,
    marks: QueueMarks<'_>,
    theme: Theme,
) -> (u16, u16) {
    let columns = usize::from(area.width);
    let height = usize::from(area.height);
    let mut lines: Vec<Line<'_>> = Vec::with_capacity(height);
    let finding = !queue.find.is_empty();
    let (to_come, all) = queue.counts();
    let head = if finding {
        let (left, right) = ends(
            &format!(" find {}", queue.find),
            &match queue.hits.len() {
                HITS => format!("{HITS} or more"),
                n => format!("{n} found"),
            },
            columns.saturating_sub(1),
        );
        Line::from(vec![
            Span::styled(left, theme.focus()),
            Span::styled(right, theme.muted()),
        ])
    } else {
        let title = if queue.all { "All" } else { "To come" };
        Line::styled(
            cut(&format!(" {title} {to_come} of {all}"), columns),
            if marks.focused {
                theme.focus()
            } else {
                theme.strong()
            },
        )
    };
    lines.push(head);
    let room = height.saturating_sub(1);
    let total = if finding {
        queue.hits.len()
    } else {
        queue.rows.len()
    };
    let top = queue
        .at
        .saturating_sub(room / 2)
        .min(total.saturating_sub(room));
    if total == 0 && room > 0 {
        let words = if finding {
            " no child of this day"
        } else {
            " nobody is on the roster"
        };
        lines.push(Line::styled(cut(words, columns), theme.attention()));
    }
    for row in top..total.min(top + room) {
        let here = row == queue.at;
        let item = if finding {
            Row::Child(queue.hits[row])
        } else {
            queue.rows[row]
        };
        lines.push(match item {
            Row::Class(c) => class_line(&queue.classes[c], columns, theme),
            Row::Child(i) => child_line(&queue.children[i], here, marks, columns, theme),
        });
    }
    frame.render_widget(Paragraph::new(lines), area);
    let find_end = 6 + crate::tui::text::width(&queue.find);
    let x = if finding {
        find_end.min(columns.saturating_sub(1))
    } else {
        1.min(columns.saturating_sub(1))
    };
    let y = if finding {
        0
    } else {
        (queue.at - top + 1).min(height.saturating_sub(1))
    };
    (area.x + x as u16, area.y + y as u16)
}

fn class_line(class: &Class, columns: usize, theme: Theme) -> Line<'static> {
    let seen = class.total - class.to_come;
    let figures = format!("{seen}/{}", class.total);
    let title = cut(&class.title, columns.saturating_sub(figures.len() + 6));
    let used = crate::tui::text::width(&title) + figures.len() + 4;
    let bar = columns.saturating_sub(used).min(24);
    let full = (seen * bar).checked_div(class.total).unwrap_or(0);
    let mut spans = vec![Span::styled(format!(" {title} "), theme.strong())];
    if bar >= 3 {
        spans.push(Span::styled("█".repeat(full), theme.muted()));
        spans.push(Span::styled("░".repeat(bar - full), theme.muted()));
        spans.push(Span::raw(" "));
    }
    spans.push(Span::styled(figures, theme.muted()));
    Line::from(spans)
}

fn child_line(
    child: &DayChild,
    here: bool,
    marks: QueueMarks<'_>,
    columns: usize,
    theme: Theme,
) -> Line<'static> {
    let (word, style) = state_word(child, marks, theme);
    let on_bench = marks.on_bench == Some(child.child_id.as_str());
    let mark = if on_bench { "▸" } else { " " };
    let (left, right) = ends(
        &format!(" {mark} {}", name(&child.family_name, &child.given_name)),
        word,
        columns.saturating_sub(1),
    );
    let base = if here && marks.focused {
        theme.selected()
    } else if on_bench {
        theme.strong()
    } else if child.state == QueueState::ToCome {
        Style::new()
    } else {
        theme.muted()
    };
    let style = if here && marks.focused {
        theme.selected()
    } else {
        style
    };
    Line::from(vec![
        Span::styled(left, base),
        Span::styled(right, style),
        Span::styled(fit("", 1), base),
    ])
}

/// Returns how a child stands in a word or two, empty where nothing is to be known.
pub fn state_word(child: &DayChild, marks: QueueMarks<'_>, theme: Theme) -> (&'static str, Style) {
    if marks.saving.contains(&child.child_id) {
        return ("saving…", theme.muted());
    }
    // That a child is absent is no outcome of a test.
    if marks.discreet && !matches!(child.state, QueueState::ToCome | QueueState::Absent) {
        return ("seen", theme.muted());
    }
    if child.waits_for_second_try() {
        let word = if marks.drafts.contains(&child.child_id) {
            "draft, 2nd try"
        } else {
            "second try"
        };
        return (word, theme.attention());
    }
    if child.state != QueueState::ToCome {
        return (short_state(child.state), theme.state(child.state));
    }
    if marks.drafts.contains(&child.child_id) {
        return ("draft", theme.focus());
    }
    if child.attempt == Attempt::Rescreen {
        return ("rescreen", theme.attention());
    }
    if child.glasses_visits > 0 {
        return ("glasses", theme.attention());
    }
    ("", Style::new())
}

fn short_state(state: QueueState) -> &'static str {
    match state {
        QueueState::NotTestable => "not testable",
        QueueState::NotAttempted => "not att.",
        other => other.title(),
    }
}
