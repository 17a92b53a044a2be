//! Draws the whole screen from a shared reference, and puts the terminal's cursor where the focus
//! is.

use ratatui::Frame;
use ratatui::layout::{Position, Rect};
use ratatui::style::Color;
use ratatui::text::{Line, Span};
use ratatui::widgets::{Clear, Paragraph};

use crate::domain::age::spoken;
use crate::keys;
use crate::tui::app::{App, PlaceName, Tone};
use crate::tui::day::verdict;
use crate::tui::prompt_view;
use crate::tui::text::{cut, ends, safe, settle_rtl, width, wrap};

/// The smallest screen on which everything fits.
pub const SMALLEST: (u16, u16) = (80, 24);

/// Rows of the outcome.
const VERDICT: u16 = 3;

/// Returns the wall clock's `10:42`.
pub fn wall_clock(utc_ms: i64, offset_minutes: i32) -> String {
    let minutes = (utc_ms.div_euclid(60_000) + i64::from(offset_minutes)).rem_euclid(24 * 60);
    format!("{:02}:{:02}", minutes / 60, minutes % 60)
}

/// Returns how long ago something was, as `00:03:41`.
pub fn elapsed(ms: i64) -> String {
    let s = (ms / 1000).max(0);
    format!("{:02}:{:02}:{:02}", s / 3600, s / 60 % 60, s % 60)
}

impl App {
    /// Draws everything.
    pub fn draw(&self, frame: &mut Frame<'_>) {
        let area = frame.area();
        if self.linear {
            self.draw_linear(frame);
            self.paint(frame);
            return;
        }
        if self.lock.stands() {
            self.draw_gate(frame);
            self.paint(frame);
            return;
        }
        if area.width < SMALLEST.0 || area.height < SMALLEST.1 {
            draw_too_small(frame, area);
            self.paint(frame);
            return;
        }
        let urgent_rows = self.urgent_rows();
        let mut y = area.y;
        let mut take = |rows: u16| {
            let place = Rect {
                y,
                height: rows,
                ..area
            };
            y += rows;
            place
        };
        let head = take(1);
        let urgent = take(urgent_rows);
        let upper_rule = take(1);
        let bench_shown = self.at == PlaceName::Day && self.day.is_ok() && !self.board.is_shown();
        let verdict_rows = if bench_shown {
            VERDICT + u16::from(area.height >= 30) + u16::from(area.height >= 36)
        } else {
            0
        };
        let notice_rows =
            u16::from(self.notice.as_ref().is_some_and(|n| n.tone == Tone::Error)) * 2;
        let tour_rows = u16::from(self.tour.is_some());
        let body = take(area.height - 3 - urgent_rows - verdict_rows - notice_rows - tour_rows);
        let lower_rule = Rect {
            y: body.bottom(),
            height: 1,
            ..area
        };
        let verdict_area = Rect {
            y: lower_rule.bottom(),
            height: verdict_rows + notice_rows,
            ..area
        };
        let foot = Rect {
            y: area.bottom() - 1,
            height: 1,
            ..area
        };
        let body = Rect {
            height: body.height.saturating_sub(1),
            ..body
        };
        let lower_rule = Rect {
            y: body.bottom(),
            ..lower_rule
        };
        let verdict_area = Rect {
            y: lower_rule.bottom(),
            height: (foot.y - tour_rows).saturating_sub(lower_rule.bottom()),
            ..verdict_area
        };

        self.draw_head(frame, head);
        self.draw_urgent(frame, urgent);
        self.draw_rule(frame, upper_rule, false);
        let cursor = self.draw_place(frame, body);
        self.draw_rule(frame, lower_rule, true);
        self.draw_verdict(frame, verdict_area);
        self.draw_foot(frame, foot);
        self.draw_tour(frame, foot);
        let cursor = match &self.prompt {
            Some(prompt) => {
                let limit = area.height - 2 - urgent_rows - tour_rows - 4;
                let rows = prompt_view::height(prompt, area.width).min(limit);
                let place = Rect {
                    y: foot.y - tour_rows - rows,
                    height: rows,
                    ..area
                };
                frame.render_widget(Clear, place);
                prompt_view::draw(frame, place, prompt, self.session.theme)
            }
            None => cursor,
        };
        frame.set_cursor_position(Position::new(
            cursor.x.min(area.right().saturating_sub(1)),
            cursor.y.min(area.bottom().saturating_sub(1)),
        ));
        settle_rtl(frame.buffer_mut());
        self.paint(frame);
    }

    /// Gives letters and ground a color where nothing else was said.
    fn paint(&self, frame: &mut Frame<'_>) {
        let ground = self.session.theme.ground();
        let (Some(letters), Some(under)) = (ground.fg, ground.bg) else {
            return;
        };
        for cell in &mut frame.buffer_mut().content {
            if cell.fg == Color::Reset {
                cell.fg = letters;
            }
            if cell.bg == Color::Reset {
                cell.bg = under;
            }
        }
    }

    fn draw_head(&self, frame: &mut Frame<'_>, area: Rect) {
        let theme = self.session.theme;
        let mut spans = vec![Span::raw(" ")];
        let mut used = 1;
        for place in PlaceName::ALL {
            let style = if place == self.at {
                theme
                    .focus()
                    .add_modifier(ratatui::style::Modifier::UNDERLINED)
            } else {
                theme.muted()
            };
            spans.push(Span::styled(place.title(), style));
            spans.push(Span::raw("  "));
            used += place.title().len() + 2;
        }
        let screener = self
            .session
            .screener
            .as_deref()
            .map_or_else(|| "nobody is recording".to_owned(), safe);
        let room = usize::from(area.width).saturating_sub(used + 1);
        let (place, rest) = match &self.day {
            Ok(day) => (
                &day.info.site_name,
                format!(" · {} · {screener}", spoken(day.info.date)),
            ),
            Err(_) => (&self.session.programme, format!(" · {screener}")),
        };
        // Where space is short the place gives way first: who records and when must be seen.
        let place = cut(&safe(place), room.saturating_sub(width(&rest)).max(8));
        let right = format!("{place}{rest}");
        let right = cut(&right, room);
        spans.push(Span::raw(" ".repeat(room.saturating_sub(width(&right)))));
        spans.push(Span::raw(right));
        frame.render_widget(Paragraph::new(Line::from(spans)), area);
    }

    fn urgent_rows(&self) -> u16 {
        match self.urgent.len() {
            0 => 0,
            n => n.min(2) as u16 + 1,
        }
    }

    fn draw_urgent(&self, frame: &mut Frame<'_>, area: Rect) {
        if area.height == 0 {
            return;
        }
        let theme = self.session.theme;
        let columns = usize::from(area.width);
        let mut lines: Vec<Line<'_>> = self
            .urgent
            .iter()
            .take(2)
            .map(|u| {
                let class = if u.class.is_empty() {
                    String::new()
                } else {
                    format!(" ({})", safe(&u.class))
                };
                let what = if self.session.discreet {
                    "see F9".to_owned()
                } else {
                    safe(&u.what)
                };
                let text = format!(
                    " ██ EMERGENCY {}  {}{class}: {what}",
                    elapsed(self.session.now_ms - u.since.utc_ms),
                    safe(&u.name),
                );
                Line::styled(crate::tui::text::fit(&text, columns), theme.emergency())
            })
            .collect();
        let more = match self.urgent.len() {
            0..=2 => String::new(),
            n => format!(" {} more wait too.", n - 2),
        };
        lines.push(Line::styled(
            cut(
                &format!("    Enter who was told, and when: F9. The line stays until then.{more}"),
                columns,
            ),
            theme.strong(),
        ));
        frame.render_widget(Paragraph::new(lines), area);
    }

    /// The rule between regions; the lower one carries what was last said.
    fn draw_rule(&self, frame: &mut Frame<'_>, area: Rect, lower: bool) {
        let theme = self.session.theme;
        let columns = usize::from(area.width);
        let mark = match (lower, &self.session.read_only) {
            (true, _) => String::new(),
            (_, Some(holder)) if holder == "read only" => " READ ONLY ".into(),
            (_, Some(holder)) => format!(" READ ONLY: {} ", safe(holder)),
            _ if self.session.demo => " DEMO: everybody here is invented ".into(),
            _ => String::new(),
        };
        let mark = cut(&mark, columns.saturating_sub(4));
        let mut spans = vec![
            Span::styled(
                "─".repeat(columns.saturating_sub(width(&mark) + 2)),
                theme.muted(),
            ),
            Span::styled(mark, theme.attention()),
            Span::styled("──", theme.muted()),
        ];
        if lower && let Some((tone, words)) = self.waiting_words() {
            let style = if tone == Tone::Attention {
                theme.attention()
            } else {
                theme.strong()
            };
            let text = cut(&safe(&words), columns.saturating_sub(6));
            let rest = columns.saturating_sub(width(&text) + 4);
            spans = vec![
                Span::styled("── ", theme.muted()),
                Span::styled(text, style),
                Span::styled(format!(" {}", "─".repeat(rest)), theme.muted()),
            ];
        } else if lower && let Some(notice) = self.notice.as_ref().filter(|n| n.tone != Tone::Error)
        {
            let style = if notice.tone == Tone::Attention {
                theme.attention()
            } else {
                theme.strong()
            };
            let head = if notice.hint.is_empty() {
                String::new()
            } else {
                format!(" {}", notice.hint)
            };
            let text = cut(&safe(&notice.text), columns.saturating_sub(8 + head.len()));
            let rest = columns.saturating_sub(width(&text) + width(&head) + 5);
            spans = vec![
                Span::styled("── ", theme.muted()),
                Span::styled(text, style),
                Span::styled(head, theme.muted()),
                Span::styled(format!(" {}", "─".repeat(rest + 1)), theme.muted()),
            ];
        }
        frame.render_widget(Paragraph::new(Line::from(spans)), area);
    }

    pub(crate) fn draw_place(&self, frame: &mut Frame<'_>, area: Rect) -> Position {
        match (self.at, &self.day) {
            (PlaceName::Day, Ok(_)) if self.board.is_shown() => {
                self.board.draw(frame, area, &self.session)
            }
            (PlaceName::Day, Ok(day)) => day.draw(frame, area, &self.session),
            (PlaceName::Day, Err(days)) => days.draw(frame, area, &self.session),
            (PlaceName::Children, _) => self.children.draw(frame, area, &self.session),
            (PlaceName::Referrals, _) => self.referrals.draw(frame, area, &self.session),
            (PlaceName::Term, _) => {
                self.term
                    .draw(frame, area, &self.session, "nobody was screened yet")
            }
            (PlaceName::Rules, _) => self.rules.draw(frame, area, &self.session),
        }
    }

    /// The outcome, or an error with what helps against it.
    fn draw_verdict(&self, frame: &mut Frame<'_>, area: Rect) {
        let theme = self.session.theme;
        let columns = usize::from(area.width);
        let mut lines: Vec<Line<'_>> = Vec::new();
        if let Some(notice) = self.notice.as_ref().filter(|n| n.tone == Tone::Error) {
            let text = wrap(&safe(&notice.text), columns.saturating_sub(2));
            lines.extend(
                text.into_iter()
                    .take(2)
                    .map(|l| Line::styled(format!(" {l}"), theme.error())),
            );
            if !notice.hint.is_empty() {
                lines.push(Line::raw(cut(&format!(" {}", safe(&notice.hint)), columns)));
            }
        }
        if self.at == PlaceName::Day
            && !self.board.is_shown()
            && let Ok(day) = &self.day
            && let Some(bench) = &day.bench
        {
            let room = usize::from(area.height).saturating_sub(lines.len());
            lines.extend(verdict::lines(bench, &self.session, columns, room));
        }
        frame.render_widget(Paragraph::new(lines), area);
    }

    /// The step of the tour, in the line above the foot.
    fn draw_tour(&self, frame: &mut Frame<'_>, foot: Rect) {
        let Some(tour) = &self.tour else {
            return;
        };
        let theme = self.session.theme;
        let (left, right) = ends(
            &format!(" {}", tour.line()),
            "Alt-g leaves ",
            usize::from(foot.width),
        );
        let line = Line::from(vec![
            Span::styled(left, theme.focus()),
            Span::styled(right, theme.muted()),
        ]);
        let place = Rect {
            y: foot.y - 1,
            ..foot
        };
        frame.render_widget(Paragraph::new(line), place);
    }

    /// The keys of the context; the whole list is always last and always there.
    fn draw_foot(&self, frame: &mut Frame<'_>, area: Rect) {
        let theme = self.session.theme;
        let columns = usize::from(area.width);
        let words = keys::foot(self.context());
        let (last, first) = match words.split_last() {
            Some((last, first)) if matches!(last.1, "keys" | "back") => (Some(last), first),
            _ => (None, words.as_slice()),
        };
        let reserved = last.map_or(0, |(k, w)| width(k) + w.len() + 4);
        let mut spans = vec![Span::raw(" ")];
        let mut used = 1;
        let mut put = |key: &str, word: &str, used: &mut usize| {
            if *used > 1 {
                spans.push(Span::styled(" · ", theme.muted()));
                *used += 3;
            }
            spans.push(Span::styled(key.to_owned(), theme.focus()));
            spans.push(Span::raw(format!(" {word}")));
            *used += width(key) + 1 + width(word);
        };
        for (key, word) in first {
            if used + width(key) + width(word) + 4 + reserved <= columns {
                put(key, word, &mut used);
            }
        }
        if let Some((key, word)) = last {
            put(key, word, &mut used);
        }
        let (clock, right) = ends(
            "",
            &wall_clock(self.session.now_ms, self.session.offset_minutes),
            columns.saturating_sub(used),
        );
        if used + 8 <= columns {
            spans.push(Span::raw(clock));
            spans.push(Span::styled(right, theme.muted()));
        }
        frame.render_widget(Paragraph::new(Line::from(spans)), area);
    }
}

fn draw_too_small(frame: &mut Frame<'_>, area: Rect) {
    let words = format!(
        "This window has {} columns and {} rows; Twoline needs {} by {}. Make it larger or the letters smaller. Nothing is lost.",
        area.width, area.height, SMALLEST.0, SMALLEST.1
    );
    let lines: Vec<Line<'_>> = wrap(&words, usize::from(area.width))
        .into_iter()
        .map(Line::raw)
        .collect();
    frame.render_widget(Paragraph::new(lines), area);
}
