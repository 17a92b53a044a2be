//! The Referrals place: who was referred this term, in the order in which they should be seen to.

use std::fmt::Write as _;

use chrono::NaiveDate;
use ratatui::Frame;
use ratatui::layout::{Position, Rect};
use ratatui::style::Style;
use ratatui::text::Line;
use ratatui::widgets::Paragraph;

use crate::actions::{DueBack, ORDER, Referred, Worklist, due_words};
use crate::domain::age::spoken;
use crate::domain::outcome::Urgency;
use crate::tui::app::{Effect, Request, Session};
use crate::tui::text::{cut, ends, fit, name, safe, wrap};

/// Rows under the list that say why the child stands where it stands.
const REASON_ROWS: usize = 7;

/// The worklist and the cursor.
#[derive(Debug, Default)]
pub struct Referrals {
    list: Option<Worklist>,
    at: usize,
}

impl Referrals {
    /// Takes the list; the cursor stays with its child.
    pub fn fill(&mut self, list: Worklist) {
        let child = self.child_id().map(str::to_owned);
        self.list = Some(list);
        let ids = || self.ids();
        let there = child.and_then(|id| ids().position(|other| *other == *id));
        self.at = there.unwrap_or(self.at.min(ids().count().saturating_sub(1)));
    }

    fn ids(&self) -> impl Iterator<Item = &str> {
        self.list.iter().flat_map(|list| {
            let back = list.back.iter().map(|b| b.child_id.as_str());
            list.referred
                .iter()
                .map(|r| r.child_id.as_str())
                .chain(back)
        })
    }

    /// Returns the child under the cursor.
    pub fn child_id(&self) -> Option<&str> {
        self.ids().nth(self.at)
    }

    /// Moves the cursor.
    pub fn step(&mut self, by: isize) {
        let last = self.ids().count().saturating_sub(1);
        self.at = self.at.saturating_add_signed(by).min(last);
    }

    /// Asks for the history of the child under the cursor.
    pub fn open(&self) -> Vec<Effect> {
        self.child_id()
            .map(|id| Effect::ask(Request::History(id.to_owned())))
            .into_iter()
            .collect()
    }

    /// Draws the list, and the reason of the child under the cursor.
    pub fn draw(&self, frame: &mut Frame<'_>, area: Rect, session: &Session) -> Position {
        let theme = session.theme;
        let columns = usize::from(area.width);
        let rows = usize::from(area.height);
        let at = Position::new(area.x, area.y);
        let Some(list) = &self.list else {
            frame.render_widget(Paragraph::new(" reading…"), area);
            return at;
        };
        let mut lines = vec![Line::styled(cut(&heading(list), columns), theme.strong())];
        if list.referred.is_empty() {
            lines.push(Line::raw(" nobody was referred in this term"));
        }
        let reasons = (list.referred.len() + list.back.len() > 0).then_some(REASON_ROWS);
        let room = rows
            .saturating_sub(lines.len() + reasons.map_or(0, |r| r + 1))
            .max(1);
        let (all, cursor) = self.list_lines(list, columns, session);
        let top = cursor
            .saturating_sub(room / 2)
            .min(all.len().saturating_sub(room));
        let shown = all.into_iter().skip(top).take(room);
        lines.extend(shown.map(|(text, style)| Line::styled(text, style)));
        if let Some(reason_rows) = reasons {
            lines.resize(rows.saturating_sub(reason_rows + 1), Line::default());
            lines.push(Line::styled("─".repeat(columns), theme.muted()));
            lines.extend(
                self.reason(list)
                    .into_iter()
                    .flat_map(|text| wrap(&text, columns.saturating_sub(2)))
                    .take(reason_rows)
                    .map(|text| Line::raw(format!(" {text}"))),
            );
        }
        frame.render_widget(Paragraph::new(lines), area);
        at
    }

    /// Returns the rows of the list and the row of the cursor.
    fn list_lines(
        &self,
        list: &Worklist,
        columns: usize,
        session: &Session,
    ) -> (Vec<(String, Style)>, usize) {
        let theme = session.theme;
        let style = |i: usize, plain: Style| {
            if i == self.at {
                theme.selected()
            } else {
                plain
            }
        };
        let mark = |i: usize| if i == self.at { "▸" } else { " " };
        let mut out = Vec::new();
        let mut cursor = 0;
        let grouped = list.referred.iter().any(|r| r.standing.group().is_some());
        for (i, r) in list.referred.iter().enumerate() {
            if i == self.at {
                cursor = out.len();
            }
            let plain = match (r.urgency, r.late(list.today)) {
                (Some(Urgency::Emergency), _) => theme.emergency(),
                (_, Some(late)) if late > 0 => theme.attention(),
                _ => Style::new(),
            };
            out.push((
                referred_line(mark(i), r, list.today, grouped, columns),
                style(i, plain),
            ));
        }
        if !list.back.is_empty() {
            out.push((String::new(), Style::new()));
            out.push((
                format!(" due to come back: {}", list.back.len()),
                theme.strong(),
            ));
        }
        for (i, b) in list.back.iter().enumerate() {
            let i = i + list.referred.len();
            if i == self.at {
                cursor = out.len();
            }
            let line = back_line(mark(i), b, list.today, columns);
            out.push((line, style(i, Style::new())));
        }
        (out, cursor)
    }

    /// Returns why the child under the cursor stands where it stands, in paragraphs.
    fn reason(&self, list: &Worklist) -> Vec<String> {
        let Some(r) = list.referred.get(self.at) else {
            return vec![
                "Due to come back, soonest first.".to_owned(),
                ORDER.to_owned(),
                safe(&list.bands),
            ];
        };
        let mut first = format!(
            "{}: {}. Place: {}.",
            name(&r.family_name, &r.given_name),
            safe(&r.why),
            safe(&r.order_reason())
        );
        if !r.act_by_from.is_empty() {
            let _ = write!(first, " Date from: {}.", safe(&r.act_by_from));
        }
        if !r.next.is_empty() {
            let _ = write!(first, " Next: {}.", safe(&r.next));
        }
        let mut out = vec![first];
        if let Some((said, spoke)) = r.standing.band() {
            let remarks = spoke.remarks.join("; ");
            out.push(safe(&format!(
                "Band {} ({}){}{remarks}.",
                spoke.level.in_words(),
                said.by,
                if remarks.is_empty() { "" } else { ": " }
            )));
        }
        if r.standing.bands.is_empty() {
            out.push(safe(&list.bands));
        }
        out.push(ORDER.to_owned());
        out
    }
}

fn heading(list: &Worklist) -> String {
    format!(
        " Referrals {} · {} late · {} · {}",
        list.referred.len(),
        list.overdue(),
        safe(&list.term),
        safe(&list.bands)
    )
}

fn referred_line(
    mark: &str,
    r: &Referred,
    today: NaiveDate,
    grouped: bool,
    columns: usize,
) -> String {
    let due = if r.urgency == Some(Urgency::Emergency) {
        "at once".to_owned()
    } else {
        due_words(r.act_by, today)
    };
    let age = r.age.map_or_else(|| "age ?".to_owned(), |a| a.to_string());
    let group = match r.standing.group() {
        Some(group) if grouped => format!("group {group} "),
        None if grouped => " ".repeat(8),
        _ => String::new(),
    };
    let room = columns.saturating_sub(33 + group.len());
    let named = room * 2 / 5;
    // The eyes are written out below the list.
    let why = safe(&r.why)
        .replace("right eye ", "R ")
        .replace("left eye ", "L ");
    format!(
        " {mark} {} {} {} {} {group}{}",
        fit(&due, 12),
        fit(&name(&r.family_name, &r.given_name), named),
        fit(&age, 8),
        fit(&why, room - named),
        cut(&format!("{} d", r.days_waited), 6)
    )
}

fn back_line(mark: &str, b: &DueBack, today: NaiveDate, columns: usize) -> String {
    let due = b.due_on.map_or_else(
        || "no date".to_owned(),
        |d| format!("{}, {}", due_words(Some(d), today), spoken(d)),
    );
    let (left, right) = ends(
        &format!(" {mark} {}", name(&b.family_name, &b.given_name)),
        &format!("{} {} {due}", fit(&safe(&b.class), 6), fit(b.what, 11)),
        columns.saturating_sub(1),
    );
    format!("{left}{right}")
}
