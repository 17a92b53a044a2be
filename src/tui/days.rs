//! The start of Day: the list of screening days, and the cautions.

use chrono::NaiveDate;
use ratatui::Frame;
use ratatui::layout::{Position, Rect};
use ratatui::text::{Line, Span};
use ratatui::widgets::Paragraph;

use crate::actions::DayInfo;
use crate::domain::age::spoken;
use crate::keys::Command;
use crate::tui::app::{Effect, Request, Session};
use crate::tui::judging::CAUTIONS;
use crate::tui::text::{cut, fit, safe};

/// The screening days of the store.
#[derive(Debug, Default)]
pub struct Days {
    days: Vec<DayInfo>,
    at: usize,
}

impl Days {
    /// Takes the days.
    pub fn new(mut days: Vec<DayInfo>) -> Days {
        days.sort_by(|a, b| b.date.cmp(&a.date).then_with(|| a.site.cmp(&b.site)));
        Days { days, at: 0 }
    }

    /// Returns today's day when there is exactly one.
    pub fn of_today(&self, today: NaiveDate) -> Option<DayInfo> {
        let mut of_today = self.days.iter().filter(|d| d.date == today);
        let first = of_today.next()?;
        of_today.next().is_none().then(|| first.clone())
    }

    /// Returns the day under the cursor.
    fn selected(&self) -> Option<&DayInfo> {
        self.days.get(self.at)
    }

    /// Carries out a command of the list.
    pub fn command(&mut self, command: Command) -> Vec<Effect> {
        match command {
            Command::ListUp => self.step(-1),
            Command::ListDown => self.step(1),
            Command::Open => {
                let day = self.selected().cloned();
                return day
                    .map(|d| Effect::ask(Request::LoadDay(d)))
                    .into_iter()
                    .collect();
            }
            _ => {}
        }
        Vec::new()
    }

    /// Moves the cursor.
    fn step(&mut self, by: isize) {
        self.at = self
            .at
            .saturating_add_signed(by)
            .min(self.days.len().saturating_sub(1));
    }

    /// Draws the list; returns where the cursor belongs.
    pub fn draw(&self, frame: &mut Frame<'_>, area: Rect, session: &Session) -> Position {
        let theme = session.theme;
        let columns = usize::from(area.width);
        let mut lines = vec![
            Line::default(),
            Line::styled(
                cut(&format!("  {}", safe(&session.programme)), columns),
                theme.strong(),
            ),
            Line::styled(
                cut(
                    &format!(
                        "  station {} · {}",
                        safe(&session.role.name),
                        spoken(session.today)
                    ),
                    columns,
                ),
                theme.muted(),
            ),
            Line::default(),
        ];
        for caution in CAUTIONS {
            lines.push(Line::raw(cut(&format!("  {caution}"), columns)));
        }
        lines.push(Line::default());
        let head = lines.len();
        let mut y = area.y + (head.min(usize::from(area.height.saturating_sub(1)))) as u16;
        if self.days.is_empty() {
            lines.push(Line::styled(
                cut("  No screening day is open. n opens one; a roster is read with `twoline roster add`.", columns),
                theme.attention(),
            ));
        } else {
            lines.push(Line::styled(
                cut(&format!("  {}", header()), columns),
                theme.muted(),
            ));
            let room = usize::from(area.height).saturating_sub(lines.len());
            let top = self
                .at
                .saturating_sub(room / 2)
                .min(self.days.len().saturating_sub(room));
            for (i, day) in self.days.iter().enumerate().skip(top).take(room) {
                if i == self.at {
                    y = area.y
                        + (lines.len().min(usize::from(area.height.saturating_sub(1)))) as u16;
                }
                let today = if day.date == session.today {
                    "today"
                } else {
                    ""
                };
                let text = format!(
                    "{} {} {} {} {today}",
                    fit(&spoken(day.date), 13),
                    fit(&safe(&day.site_name), 22),
                    fit(&safe(&day.protocol), 14),
                    fit(day.method.title(), 18),
                );
                let style = if i == self.at {
                    theme.selected()
                } else {
                    ratatui::style::Style::new()
                };
                lines.push(Line::from(vec![
                    Span::raw(if i == self.at { "▸ " } else { "  " }),
                    Span::styled(cut(text.trim_end(), columns.saturating_sub(3)), style),
                ]));
            }
        }
        frame.render_widget(Paragraph::new(lines), area);
        Position::new(area.x, y)
    }
}

fn header() -> String {
    format!(
        "{} {} {} chart",
        fit("date", 13),
        fit("site", 22),
        fit("protocol", 14)
    )
}
