//! The screens for a screen reader: one column of plain lines, states in words, no drawn lines or
//! bars, the cursor on what has the focus. The first row says what changed, always there.

use ratatui::Frame;
use ratatui::Terminal;
use ratatui::backend::TestBackend;
use ratatui::buffer::Buffer;
use ratatui::layout::{Position, Rect};
use ratatui::text::Line;
use ratatui::widgets::Paragraph;

use crate::domain::age::spoken;
use crate::domain::codes::SignKind;
use crate::keys;
use crate::tui::app::{App, PlaceName, Tone};
use crate::tui::day::bench::{Bench, Spot, State};
use crate::tui::day::bench_view::value_words;
use crate::tui::day::bench_view::{self, cells::cell};
use crate::tui::day::kind::{self, Kind};
use crate::tui::day::verdict;
use crate::tui::prompt::{Body, Prompt, SignMarks};
use crate::tui::prompt_view;
use crate::tui::text::{name, safe, width, wrap};

/// Columns of a picture before it is taken apart: wide enough that nothing is cut short.
const WIDE: u16 = 120;

/// Lines to read, and where the focus is.
#[derive(Debug, Default)]
struct Read {
    lines: Vec<String>,
    /// The line that has the focus, and the column in it.
    at: usize,
    column: usize,
}

impl Read {
    fn say(&mut self, line: impl Into<String>) {
        let line = line.into();
        if !line.is_empty() {
            self.lines.push(line);
        }
    }

    fn say_here(&mut self, line: String, column: usize) {
        self.at = self.lines.len();
        self.column = column;
        self.lines.push(line);
    }

    /// Adds other lines with their focus.
    fn take(&mut self, other: Read) {
        self.at = self.lines.len() + other.at;
        self.column = other.column;
        self.lines.extend(other.lines);
    }
}

impl App {
    /// Draws everything as plain lines at any size.
    pub(crate) fn draw_linear(&self, frame: &mut Frame<'_>) {
        let area = frame.area();
        let (columns, rows) = (usize::from(area.width), usize::from(area.height));
        if columns == 0 || rows == 0 {
            return;
        }
        let read = self.read(rows);
        let mut lines: Vec<String> = Vec::new();
        let (mut row, mut column) = (0, 0);
        for (i, line) in read.lines.iter().enumerate() {
            let wrapped = wrap(line, columns);
            if i == read.at {
                // A long line is wrapped at words: the row is that in which the column falls.
                let mut left = read.column;
                let mut down = 0;
                while down + 1 < wrapped.len() && left > width(&wrapped[down]) {
                    left -= width(&wrapped[down]) + 1;
                    down += 1;
                }
                row = lines.len() + down;
                column = left;
            }
            lines.extend(wrapped);
        }
        // The first row stays where it is; the rest follows the focus.
        let said = crate::tui::text::cut(&self.news(), columns);
        let room = rows.saturating_sub(1);
        let top = (row + 1)
            .saturating_sub(room.saturating_sub(room / 3))
            .min(lines.len().saturating_sub(room));
        let shown = std::iter::once(said)
            .chain(lines.into_iter().skip(top).take(room))
            .map(Line::raw)
            .collect::<Vec<_>>();
        frame.render_widget(Paragraph::new(shown), area);
        frame.set_cursor_position(Position::new(
            area.x + column.min(columns - 1) as u16,
            area.y + (row + 1).saturating_sub(top).min(rows - 1) as u16,
        ));
    }

    /// What was last said, on a row of its own.
    fn news(&self) -> String {
        if self.lock.stands() {
            return "Locked.".into();
        }
        if let Some((_, words)) = self.waiting_words() {
            return format!("News: {}", safe(&words));
        }
        match &self.notice {
            // What helps against an error is said; the head of the ledger is not read out.
            Some(notice) if notice.tone == Tone::Error && !notice.hint.is_empty() => {
                format!("News: {}. {}", safe(&notice.text), safe(&notice.hint))
            }
            Some(notice) => format!("News: {}", safe(&notice.text)),
            None => "News: none".into(),
        }
    }

    fn read(&self, rows: usize) -> Read {
        let mut out = Read::default();
        if self.lock.stands() {
            let (lines, at) = self.gate_lines();
            for (i, line) in lines.into_iter().enumerate() {
                if i == at {
                    let column = width(&line);
                    out.say_here(line, column);
                } else {
                    out.say(line);
                }
            }
            return out;
        }
        for urgent in &self.urgent {
            let minutes = (self.session.now_ms - urgent.since.utc_ms).max(0) / 60_000;
            out.say(format!(
                "Emergency for {minutes} minutes: {}: {}. F9 enters who was told.",
                safe(&urgent.name),
                safe(&urgent.what)
            ));
        }
        out.say(self.heading());
        if let Some(tour) = &self.tour {
            let line = tour.line().replace('↑', "Up");
            out.say(format!("{line}. Alt-g leaves the tour."));
        }
        match &self.prompt {
            Some(prompt) => out.take(self.read_prompt(prompt, rows)),
            None => out.take(self.read_place(rows)),
        }
        let keys = keys::foot(self.context())
            .into_iter()
            .map(|(key, word)| format!("{} {word}", key_words(&key)))
            .collect::<Vec<_>>()
            .join("; ");
        out.say(format!("Keys: {keys}."));
        out
    }

    fn heading(&self) -> String {
        let who = self.session.screener.as_deref().map_or_else(
            || "nobody is recording".to_owned(),
            |s| format!("{} is recording", safe(s)),
        );
        let what = match &self.day {
            Ok(day) => format!("{}, {}", safe(&day.info.site_name), spoken(day.info.date)),
            Err(_) => safe(&self.session.programme),
        };
        let demo = if self.session.demo {
            " Demo: everybody here is invented."
        } else {
            ""
        };
        let read_only = self
            .session
            .read_only
            .as_deref()
            .map_or(String::new(), |h| format!(" Read only: {}.", safe(h)));
        format!("{}. {what}. {who}.{demo}{read_only}", self.at.title())
    }

    fn read_place(&self, rows: usize) -> Read {
        if self.at == PlaceName::Day
            && self.context() == keys::Context::Bench
            && let Ok(day) = &self.day
            && let Some(bench) = &day.bench
        {
            return self.read_bench(bench);
        }
        let height = rows.clamp(12, 60) as u16;
        let list_only = self.context() == keys::Context::List;
        flat(height, list_only, |frame, area| {
            self.draw_place(frame, area)
        })
    }

    fn read_bench(&self, bench: &Bench) -> Read {
        let mut out = Read::default();
        let child = &bench.child;
        let age = child
            .age
            .map_or_else(|| "age unknown".to_owned(), |a| a.to_string());
        let born = child.dob.map_or_else(
            || "birth date unknown".to_owned(),
            |d| format!("born {}", spoken(d)),
        );
        out.say(format!(
            "{}. {age}, {born}, class {}, id {}.",
            name(&child.family_name, &child.given_name),
            safe(&child.class),
            safe(&child.child_id)
        ));
        let standing: Vec<String> =
            crate::tui::day::bench_view::head::standing(bench, self.session.theme)
                .iter()
                .skip(1)
                .map(|span| span.content.trim().to_owned())
                .filter(|text| !text.is_empty())
                .collect();
        out.say(standing.join(", "));
        let quiet = bench.keeps_back() || self.session.discreet;
        if let Some(pass) = bench.pass_line.as_ref().filter(|_| !quiet) {
            out.say(format!("{} {}", pass.line, pass.words));
        }
        for field in &bench.path {
            let title = kind::eye(*field).map_or_else(
                || kind::label(*field).to_owned(),
                |eye| format!("{}, {}", eye.title(), kind::label(*field)),
            );
            let raw = bench.typed(*field);
            let here = bench.field() == Some(*field);
            let typed = here && matches!(kind::kind(*field), Kind::Acuity | Kind::Text);
            let value = match bench.state(*field) {
                State::Invalid { expected } => {
                    let wrong = format!("not understood, expected {}", safe(expected));
                    if typed {
                        wrong
                    } else {
                        format!("{}, {wrong}", safe(raw))
                    }
                }
                State::Valid { .. } if bench.shows_as_typed(*field) => safe(bench.typed(*field)),
                State::Valid { echo: Some(echo) } => {
                    let words = value_words(&bench.readings, *field, raw);
                    if echo.contains(&words) {
                        safe(echo)
                    } else {
                        format!("{words}, {}", safe(echo))
                    }
                }
                // Not as the one that has the focus, whose value is drawn as what was typed.
                _ => match cell(*field, bench, false, self.session.theme).0.as_str() {
                    "·" => "nothing entered".to_owned(),
                    words => words.to_owned(),
                },
            };
            // What is being typed stands first, so that the cursor is where the next key goes.
            let line = if typed && !raw.is_empty() && value != safe(raw) {
                format!("{title}: {} ({value})", safe(raw))
            } else {
                format!("{title}: {value}")
            };
            if !here {
                out.say(line);
                continue;
            }
            let column = width(&title) + 2 + if typed { width(&safe(raw)) } else { 0 };
            out.say_here(line, column);
            if let Kind::Choice(choices) = kind::kind(*field) {
                let offered: Vec<String> = choices
                    .into_iter()
                    .map(|(key, _, title)| format!("{key} {title}"))
                    .collect();
                out.say(format!("choices: {}", offered.join("; ")));
            }
        }
        if let Some(note) = &bench.readings.note {
            out.say(if self.session.discreet {
                "note: there is one".to_owned()
            } else {
                format!("note: {}", safe(note))
            });
        }
        let (line, _) = bench_view::sign_line(bench, &self.session, usize::from(WIDE), true);
        let sign = clean(&line.to_string()).replacen(", ", ": ", 1);
        if bench.at == Spot::Sign {
            out.say_here(sign, 0);
        } else {
            out.say("sign");
        }
        let at = (out.at, out.column);
        for line in verdict::lines(bench, &self.session, usize::from(WIDE), 12) {
            out.say(clean(&line.to_string()));
        }
        (out.at, out.column) = at;
        out
    }

    fn read_prompt(&self, prompt: &Prompt, rows: usize) -> Read {
        if let Body::Signs(signs) = &prompt.body {
            return read_signs(&prompt.title, signs);
        }
        let height = prompt_view::height(prompt, WIDE).min(rows.clamp(8, 60) as u16);
        flat(height, false, |frame, area| {
            prompt_view::draw(frame, area, prompt, self.session.theme)
        })
    }
}

fn read_signs(title: &str, signs: &SignMarks) -> Read {
    let mut out = Read::default();
    out.say(safe(title));
    for (i, kind) in SignKind::ALL.iter().enumerate() {
        let marked = signs.marked.iter().find(|s| s.kind == *kind);
        let line = match marked {
            Some(sign) => format!("{}: marked", crate::tui::day::bench_view::sign_words(*sign)),
            None => format!("{}: not marked", kind.title()),
        };
        if i == signs.at {
            out.say_here(line, 0);
        } else {
            out.say(line);
        }
    }
    out
}

/// Draws a picture aside and takes it apart into lines.
///
/// Where a drawn line divides it, what stands right of it follows the row of the left-hand list that
/// has the focus.
fn flat(height: u16, list_only: bool, draw: impl FnOnce(&mut Frame<'_>, Rect) -> Position) -> Read {
    let mut at = Position::new(0, 0);
    let Ok(mut terminal) = Terminal::new(TestBackend::new(WIDE, height));
    let Ok(_) = terminal.draw(|frame| at = draw(frame, frame.area()));
    let buffer = terminal.backend().buffer();
    let divided = (0..WIDE).find(|x| {
        let bars = (0..height).filter(|y| buffer[(*x, *y)].symbol() == "│");
        bars.count() * 2 > usize::from(height)
    });
    let mut out = Read::default();
    let Some(x) = divided else {
        for y in 0..height {
            put(&mut out, buffer, (0, WIDE), y, at);
        }
        return out;
    };
    let (list, beside) = ((0, x), (x + 1, WIDE));
    for y in 0..height {
        // Beside a page to read, the row of the list that has the focus is enough.
        if list_only || y == at.y {
            put(&mut out, buffer, list, y, at);
        }
    }
    if !list_only {
        for y in 0..height {
            put(&mut out, buffer, beside, y, at);
        }
    }
    out
}

/// Adds the words of one row between two columns; pictures and empty rows are left out.
fn put(out: &mut Read, buffer: &Buffer, (from, to): (u16, u16), y: u16, at: Position) {
    let row = text_of(buffer, from, to, y);
    // A rung of the ladder repeats what the fields say; the bar of a station stands beside figures.
    if row.contains('┤') && !row.contains('├') {
        return;
    }
    let line = clean(&row);
    let here = y == at.y && (from..to).contains(&at.x);
    if line.is_empty() && !here {
        return;
    }
    if here {
        let column = width(&clean(&text_of(buffer, from, at.x, y)));
        let column = column.min(width(&line));
        out.say_here(line, column);
    } else {
        out.say(line);
    }
}

fn text_of(buffer: &Buffer, from: u16, to: u16, y: u16) -> String {
    let mut text = String::new();
    let mut skip = 0;
    for x in from..to {
        if skip > 0 {
            skip -= 1;
            continue;
        }
        let symbol = buffer[(x, y)].symbol();
        skip = width(symbol).saturating_sub(1);
        text.push_str(symbol);
    }
    text
}

/// Returns a drawn row as words: columns become parts of a sentence, marks become words.
fn clean(row: &str) -> String {
    let plain: String = row
        .chars()
        .map(|c| match c {
            '▸' => '▸',
            '\u{2500}'..='\u{25FF}' | '\u{200E}' | '\u{200F}' => ' ',
            other => other,
        })
        .collect();
    let parts: Vec<String> = plain
        .split("  ")
        .map(str::trim)
        .filter(|part| !part.is_empty())
        .map(|part| match part {
            "·" => "none".to_owned(),
            "✓" => "chosen".to_owned(),
            part => part
                .replace("▸ ", "here: ")
                .replace("✓ ", "chosen: ")
                .replace(" · ", ", ")
                .replace(" → ", " to ")
                .replace('›', "find:"),
        })
        .collect();
    eyes(&parts.join(", "))
}

/// Writes out `R` and `L` before a value.
fn eyes(line: &str) -> String {
    let words: Vec<&str> = line.split(' ').collect();
    let value = |word: Option<&&str>| {
        word.and_then(|w| w.chars().next())
            .is_some_and(|c| c.is_ascii_digit() || "<>≥·".contains(c))
    };
    words
        .iter()
        .enumerate()
        .map(|(i, word)| match *word {
            "R" if value(words.get(i + 1)) => "right eye",
            "L" if value(words.get(i + 1)) => "left eye",
            word => word,
        })
        .collect::<Vec<_>>()
        .join(" ")
}

/// Returns a key's name as it is said.
fn key_words(key: &str) -> String {
    match key {
        "↑" => "Up".into(),
        "↓" => "Down".into(),
        "←" => "Left".into(),
        "→" => "Right".into(),
        "?" => "question mark".into(),
        key => key.to_owned(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_drawn_row_becomes_words() {
        assert_eq!(clean("── palette ───────"), "palette");
        assert_eq!(clean(" 2B ██████░░░░ 2/5 "), "2B, 2/5");
        assert_eq!(
            clean(" 17 Nov 2026  first   R 20/40  L 20/32   rescreen · late"),
            "17 Nov 2026, first, right eye 20/40, left eye 20/32, rescreen, late"
        );
        assert_eq!(clean(" west   ·   4"), "west, none, 4");
        assert_eq!(clean(" ▸ Sands, Oliver   1C"), "here: Sands, Oliver, 1C");
        // A middle initial stays what it is.
        assert_eq!(clean("Vance L Sands"), "Vance L Sands");
    }
}
