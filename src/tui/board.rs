//! The day board: how the day stands, by class and by station, as a page of Day.

pub mod lines;
mod stations;

use std::cell::{Cell, RefCell};
use std::collections::HashSet;

use ratatui::Frame;
use ratatui::layout::{Position, Rect};
use ratatui::style::Style;
use ratatui::text::{Line, Span};
use ratatui::widgets::Paragraph;

use crate::actions::board::watch::{Level, Watch};
use crate::actions::board::{Board, Side};
use crate::actions::{DayInfo, QueueState};
use crate::keys::Command;
use crate::tui::app::{Effect, Request, Session};
use crate::tui::board::lines::{Look, Meaning, Text};
use crate::tui::theme::Theme;

/// Shortest time between two boards while the page is open, in milliseconds.
const OPEN_MS: i64 = 3_000;

/// Shortest time while it is not: only the station watch needs it then.
const CLOSED_MS: i64 = 60_000;

/// After this long without an answer the store is asked anew.
const LOST_MS: i64 = 120_000;

/// A board may take this share of the store's time, so that signatures do not wait for it.
const SHARE: i64 = 20;

/// The page, and when the store is asked for it.
#[derive(Debug, Default)]
pub struct BoardPage {
    shown: bool,
    board: Option<Box<Board>>,
    /// The board set for a window of so many columns: worked out once, not in each frame.
    set: RefCell<Option<(usize, Vec<Text>)>>,
    top: usize,
    /// How far the last frame could be scrolled.
    furthest: Cell<Option<usize>>,
    /// Whether something was signed since the last board.
    stale: bool,
    asked_ms: Option<i64>,
    answered_ms: Option<i64>,
    took_ms: i64,
    told: HashSet<(String, bool, Level)>,
}

impl BoardPage {
    /// Says whether the page is shown.
    pub fn is_shown(&self) -> bool {
        self.shown
    }

    /// Opens the page and asks for it.
    pub fn open(&mut self, day: &DayInfo, now_ms: i64) -> Vec<Effect> {
        self.shown = true;
        self.top = 0;
        self.ask(day, now_ms)
    }

    /// Closes the page.
    pub fn close(&mut self) {
        self.shown = false;
    }

    /// Forgets everything: another day is open.
    pub fn forget(&mut self) {
        *self = BoardPage::default();
    }

    /// Notes that something was signed, corrected, moved or taken back.
    pub fn changed(&mut self) {
        self.stale = true;
    }

    /// Asks for a new board where one is due.
    pub fn tick(&mut self, day: &DayInfo, now_ms: i64) -> Vec<Effect> {
        let since = |at: Option<i64>| at.map_or(i64::MAX, |at| now_ms.abs_diff(at) as i64);
        if self.asked_ms > self.answered_ms && since(self.asked_ms) < LOST_MS {
            return Vec::new();
        }
        let shortest = if self.shown { OPEN_MS } else { CLOSED_MS };
        let due = since(self.asked_ms) >= shortest.max(SHARE * self.took_ms);
        if due && (self.shown || self.stale) {
            self.ask(day, now_ms)
        } else {
            Vec::new()
        }
    }

    fn ask(&mut self, day: &DayInfo, now_ms: i64) -> Vec<Effect> {
        self.asked_ms = Some(now_ms);
        self.stale = false;
        vec![Effect::ask(Request::Board(day.clone()))]
    }

    /// Takes a board; returns what is to be said of a station that has passed a limit since.
    pub fn take(&mut self, board: Box<Board>, now_ms: i64) -> Option<String> {
        self.took_ms = self.asked_ms.map_or(0, |asked| (now_ms - asked).max(0));
        self.answered_ms = Some(now_ms.max(self.asked_ms.unwrap_or(now_ms)));
        let mut said = None;
        for station in &board.stations {
            if let Watch::Compared(compared) = &station.watch
                && let Some((level, side)) = compared.passed
                && self
                    .told
                    .insert((station.name.clone(), side == Side::Above, level))
            {
                said = (!self.shown).then(|| stations::notice(station, compared));
            }
        }
        self.board = Some(board);
        self.set.replace(None);
        said
    }

    /// Scrolls.
    pub fn command(&mut self, command: Command) {
        let by = match command {
            Command::ListUp => -1,
            Command::ListDown => 1,
            Command::PageUp => -15,
            Command::PageDown => 15,
            Command::First => isize::MIN,
            Command::Last => isize::MAX,
            _ => 0,
        };
        let furthest = self.furthest.get().unwrap_or(usize::MAX);
        self.top = self
            .top
            .min(furthest)
            .saturating_add_signed(by)
            .min(furthest);
    }

    /// Draws the page; returns where the cursor belongs.
    pub fn draw(&self, frame: &mut Frame<'_>, area: Rect, session: &Session) -> Position {
        let theme = session.theme;
        let Some(board) = &self.board else {
            let words = Line::styled(" reading…", theme.muted());
            frame.render_widget(Paragraph::new(words), area);
            return Position::new(area.x, area.y);
        };
        let (rows, columns) = (usize::from(area.height), usize::from(area.width));
        let mut set = self.set.borrow_mut();
        let (_, all) = match set.take() {
            Some(kept) if kept.0 == columns => set.insert(kept),
            _ => set.insert((
                columns,
                lines::lines(
                    board,
                    Look {
                        columns,
                        pictures: true,
                    },
                ),
            )),
        };
        let furthest = all.len().saturating_sub(rows);
        self.furthest.set(Some(furthest));
        let top = self.top.min(furthest);
        let below = all.len().saturating_sub(top + rows);
        let mut shown: Vec<Line<'_>> = all
            .iter()
            .skip(top)
            .take(rows)
            .map(|text| styled(text, theme))
            .collect();
        if below > 0 && rows > 1 {
            shown.truncate(rows - 1);
            shown.push(Line::styled(
                format!(" … ↓ for {} lines more", below + 1),
                theme.muted(),
            ));
        }
        frame.render_widget(Paragraph::new(shown), area);
        Position::new(area.x, area.y)
    }
}

fn styled(text: &Text, theme: Theme) -> Line<'static> {
    Line::from(
        text.iter()
            .map(|(meaning, words)| Span::styled(words.clone(), style(*meaning, theme)))
            .collect::<Vec<_>>(),
    )
}

fn style(meaning: Meaning, theme: Theme) -> Style {
    match meaning {
        Meaning::Plain => Style::new(),
        Meaning::Strong => theme.strong(),
        Meaning::Muted => theme.muted(),
        Meaning::Attention => theme.attention(),
        Meaning::Loud => theme.refer(),
        Meaning::State(QueueState::ToCome) => Style::new(),
        Meaning::State(state) => theme.state(state),
    }
}

/// Returns the board as plain lines, for the command line.
pub fn plain(board: &Board, columns: usize) -> Vec<String> {
    let look = Look {
        columns,
        pictures: true,
    };
    lines::lines(board, look)
        .into_iter()
        .map(|text| {
            let line: String = text.into_iter().map(|(_, words)| words).collect();
            line.trim_end().to_owned()
        })
        .collect()
}
