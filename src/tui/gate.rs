//! The lock: a blank screen with one question, and the day PIN that opens Day alone.
//!
//! While it stands nothing of a child is drawn and no key reaches what is behind it.

use std::fmt;

use ratatui::Frame;
use ratatui::layout::Position;
use ratatui::text::Line;
use ratatui::widgets::Paragraph;
use zeroize::Zeroizing;

use crate::keys::{self, Command, Context, Key};
use crate::tui::app::{App, Effect, PlaceName, Request, Tone};
use crate::tui::day::Day;
use crate::tui::text::{cut, safe};
use crate::tui::view::elapsed;

/// Wrong PINs after which the PIN is forgotten.
const TRIES: u8 = 5;

/// Digits of a day PIN.
const DIGITS: usize = 6;

/// Longest text that the question takes; room for it is made at once, so that typing leaves no copy
/// of what was typed elsewhere in memory.
const LONGEST: usize = 400;

/// A typed passphrase, which no debug text shows.
#[derive(Clone, PartialEq, Eq)]
pub struct Typed(Zeroizing<String>);

impl Typed {
    fn new() -> Typed {
        Typed(Zeroizing::new(String::with_capacity(LONGEST)))
    }

    /// Returns the text.
    pub fn text(&self) -> &str {
        &self.0
    }

    fn push(&mut self, text: &str) {
        for c in text.chars().filter(|c| !crate::domain::text::is_unsafe(*c)) {
            if self.0.len() + c.len_utf8() <= LONGEST {
                self.0.push(c);
            }
        }
    }

    fn is_pin(&self) -> bool {
        self.0.len() == DIGITS && self.0.bytes().all(|b| b.is_ascii_digit())
    }

    /// Says whether a PIN is one that is tried first: one digit six times, or up or down in ones.
    fn is_easy(&self) -> bool {
        let steps: Vec<i32> = self
            .0
            .as_bytes()
            .windows(2)
            .map(|pair| i32::from(pair[1]) - i32::from(pair[0]))
            .collect();
        [0, 1, -1]
            .iter()
            .any(|step| steps.iter().all(|s| s == step))
    }
}

impl fmt::Debug for Typed {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("Typed")
    }
}

/// What is asked, and so what opens.
#[derive(Debug, Clone, PartialEq, Eq)]
enum Purpose {
    /// The screen is locked.
    Locked,
    /// A place that the day PIN does not open.
    Place(PlaceName),
    /// A new day PIN.
    NewPin,
    /// The same again.
    Again(Typed),
}

/// The question on the blank screen.
#[derive(Debug)]
struct Gate {
    purpose: Purpose,
    typed: Typed,
    /// Whether the passphrase is being checked; keys typed meanwhile go nowhere.
    checking: bool,
    words: String,
}

impl Gate {
    fn new(purpose: Purpose) -> Gate {
        Gate {
            purpose,
            typed: Typed::new(),
            checking: false,
            words: String::new(),
        }
    }
}

/// The lock and what opens it.
#[derive(Debug, Default)]
pub struct Lock {
    gate: Option<Gate>,
    pin: Option<Typed>,
    wrong: u8,
    day_only: bool,
    last_key_ms: i64,
}

impl Lock {
    /// Makes an open lock; the time without a key counts from now.
    pub fn open(now_ms: i64) -> Lock {
        Lock {
            last_key_ms: now_ms,
            ..Lock::default()
        }
    }

    /// Says whether the question stands, so that nothing else is drawn and typed into.
    pub fn stands(&self) -> bool {
        self.gate.is_some()
    }

    /// Says whether the PIN opened it, for Day alone.
    pub fn is_day_only(&self) -> bool {
        self.day_only
    }
}

impl App {
    /// Says whether nobody has pressed a key for so long that the screen is to be locked.
    pub fn is_idle(&self) -> bool {
        let since = self.session.now_ms - self.lock.last_key_ms;
        self.session.idle_minutes > 0
            && !matches!(&self.lock.gate, Some(g) if g.purpose == Purpose::Locked)
            && since >= i64::from(self.session.idle_minutes) * 60_000
    }

    /// Notes that somebody is there.
    pub(crate) fn touched(&mut self) {
        self.lock.last_key_ms = self.session.now_ms;
    }

    /// Locks the screen; what was typed is written first.
    pub(crate) fn lock_now(&mut self) -> Vec<Effect> {
        let mut effects = self
            .day
            .as_mut()
            .map_or_else(|_| Vec::new(), Day::keep_draft);
        effects.push(Effect::FlushDrafts);
        self.lock.gate = Some(Gate::new(Purpose::Locked));
        effects
    }

    /// Asks for a new day PIN.
    pub(crate) fn ask_pin(&mut self) {
        if self.lock.day_only {
            self.say(
                Tone::Attention,
                "the day PIN opened this: a new one is set after the passphrase",
            );
        } else {
            self.lock.gate = Some(Gate::new(Purpose::NewPin));
        }
    }

    /// Asks for the passphrase before a place that the day PIN does not open.
    pub(crate) fn ask_for_place(&mut self, place: PlaceName) {
        self.lock.gate = Some(Gate::new(Purpose::Place(place)));
    }

    /// Takes a pasted text at the lock.
    pub(crate) fn gate_paste(&mut self, text: &str) {
        if let Some(gate) = self.lock.gate.as_mut().filter(|g| !g.checking) {
            gate.typed.push(text.lines().next().unwrap_or(""));
        }
    }

    /// Takes a key at the lock.
    pub(crate) fn gate_key(&mut self, key: Key) -> Vec<Effect> {
        let command = keys::command(Context::Locked, key);
        if command == Some(Command::Quit) {
            return self.leave();
        }
        let Some(gate) = self.lock.gate.as_mut().filter(|g| !g.checking) else {
            return Vec::new();
        };
        match command {
            Some(Command::Submit) => return self.gate_submit(),
            Some(Command::Erase) => {
                gate.typed.0.pop();
            }
            Some(Command::ClearField) => gate.typed = Typed::new(),
            Some(Command::Cancel) if gate.purpose != Purpose::Locked => self.lock.gate = None,
            _ => {
                if let Some(c) = key.typed() {
                    gate.words.clear();
                    gate.typed.push(c.encode_utf8(&mut [0; 4]));
                }
            }
        }
        Vec::new()
    }

    fn gate_submit(&mut self) -> Vec<Effect> {
        let Some(gate) = &mut self.lock.gate else {
            return Vec::new();
        };
        let typed = std::mem::replace(&mut gate.typed, Typed::new());
        match &gate.purpose {
            Purpose::NewPin | Purpose::Again(_) => {
                self.new_pin(typed);
                return Vec::new();
            }
            Purpose::Locked if typed.is_pin() && self.lock.pin.is_some() => {
                self.try_pin(&typed);
                return Vec::new();
            }
            Purpose::Locked | Purpose::Place(_) => {}
        }
        if self.session.demo {
            if typed.text().is_empty() {
                return self.opened();
            }
            gate.words = "nothing protects the demo: Enter alone opens it".into();
            return Vec::new();
        }
        if typed.text().is_empty() {
            return Vec::new();
        }
        gate.checking = true;
        gate.words = "checking…".into();
        vec![Effect::ask(Request::Unlock(typed))]
    }

    fn try_pin(&mut self, typed: &Typed) {
        let Some(gate) = &mut self.lock.gate else {
            return;
        };
        if self.lock.pin.as_ref() == Some(typed) {
            self.lock.gate = None;
            self.lock.wrong = 0;
            self.lock.day_only = true;
            if self.at != PlaceName::Day {
                self.at = PlaceName::Day;
                self.prompt = None;
            }
            self.say(Tone::Quiet, "opened by the day PIN: Day alone");
            return;
        }
        self.lock.wrong += 1;
        if self.lock.wrong >= TRIES {
            self.lock.pin = None;
            self.lock.wrong = 0;
            gate.words = "five wrong PINs: only the passphrase opens it now".into();
        } else {
            gate.words = format!("wrong PIN, {} tries are left", TRIES - self.lock.wrong);
        }
    }

    fn new_pin(&mut self, typed: Typed) {
        let Some(gate) = &mut self.lock.gate else {
            return;
        };
        match &gate.purpose {
            Purpose::Again(first) if *first == typed => {
                self.lock.pin = Some(typed);
                self.lock.wrong = 0;
                self.lock.gate = None;
                self.say(
                    Tone::Quiet,
                    "day PIN set: it opens Day after a lock, until the program ends",
                );
            }
            Purpose::Again(_) => {
                *gate = Gate::new(Purpose::NewPin);
                gate.words = "the two were not the same; once more".into();
            }
            _ if !typed.is_pin() => gate.words = "six digits are needed".into(),
            _ if typed.is_easy() => gate.words = "too easy to guess; another one".into(),
            _ => *gate = Gate::new(Purpose::Again(typed)),
        }
    }

    /// Takes the answer to a passphrase: nothing when it opens, else why not.
    pub(crate) fn unlocked(&mut self, why_not: Option<String>) -> Vec<Effect> {
        match (why_not, &mut self.lock.gate) {
            (None, Some(_)) => self.opened(),
            (Some(why), Some(gate)) => {
                gate.checking = false;
                gate.words = why;
                Vec::new()
            }
            (_, None) => Vec::new(),
        }
    }

    fn opened(&mut self) -> Vec<Effect> {
        let purpose = self.lock.gate.take().map(|g| g.purpose);
        self.lock.wrong = 0;
        self.lock.day_only = false;
        match purpose {
            Some(Purpose::Place(place)) => self.go(place),
            _ => Vec::new(),
        }
    }

    /// Returns the lines of the locked screen, and the one that is typed into.
    pub(crate) fn gate_lines(&self) -> (Vec<String>, usize) {
        let Some(gate) = &self.lock.gate else {
            return (Vec::new(), 0);
        };
        let (title, question) = match &gate.purpose {
            Purpose::Locked => (
                "Twoline is locked. What was typed is kept.".to_owned(),
                match (self.session.demo, self.lock.pin.is_some()) {
                    (true, true) => "day PIN, or Enter alone (this is the demo)",
                    (true, false) => "Enter opens it (this is the demo)",
                    (false, true) => "day PIN for Day alone, or passphrase",
                    (false, false) => "passphrase",
                },
            ),
            Purpose::Place(place) => (
                format!(
                    "The day PIN opens Day alone. {} needs the passphrase. Esc goes back.",
                    place.title()
                ),
                if self.session.demo {
                    "Enter opens it (this is the demo)"
                } else {
                    "passphrase"
                },
            ),
            Purpose::NewPin => (
                "A day PIN opens Day after a lock, until the program ends. Esc goes back.".into(),
                "six digits",
            ),
            Purpose::Again(_) => (
                "The same six digits once more. Esc goes back.".into(),
                "six digits again",
            ),
        };
        let dots = "*".repeat(gate.typed.text().chars().count().min(40));
        let mut lines = Vec::new();
        for urgent in &self.urgent {
            lines.push(format!(
                "EMERGENCY {} waits for the word who was told.",
                elapsed(self.session.now_ms - urgent.since.utc_ms)
            ));
        }
        lines.push(title);
        lines.push(safe(&format!(
            "{} · station {}",
            self.session.programme, self.session.role.name
        )));
        let at = lines.len();
        lines.push(format!("{question}: {dots}"));
        lines.push(gate.words.clone());
        lines.push("Enter unlocks · Ctrl-Q leaves".into());
        (lines, at)
    }

    /// Draws the locked screen at any size.
    pub(crate) fn draw_gate(&self, frame: &mut Frame<'_>) {
        let area = frame.area();
        let columns = usize::from(area.width);
        let theme = self.session.theme;
        let (lines, at) = self.gate_lines();
        let urgent = self.urgent.len();
        // Where the window is low the question itself is what must be seen.
        let top = (at + 1).saturating_sub(usize::from(area.height));
        let cursor = lines.get(at).map_or(0, |l| crate::tui::text::width(l) + 1);
        let text: Vec<Line<'_>> = lines
            .iter()
            .enumerate()
            .skip(top)
            .map(|(i, line)| {
                let style = match i {
                    i if i < urgent => theme.emergency(),
                    i if i == at => theme.focus(),
                    i if i == urgent => theme.strong(),
                    _ => ratatui::style::Style::new(),
                };
                Line::styled(cut(&format!(" {line}"), columns), style)
            })
            .collect();
        frame.render_widget(Paragraph::new(text), area);
        frame.set_cursor_position(Position::new(
            area.x + (cursor.min(columns.saturating_sub(1))) as u16,
            area.y + (at - top).min(usize::from(area.height.saturating_sub(1))) as u16,
        ));
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn typed(text: &str) -> Typed {
        let mut typed = Typed::new();
        typed.push(text);
        typed
    }

    #[test]
    fn a_pin_is_six_digits_and_not_the_first_that_anybody_tries() {
        assert!(typed("402917").is_pin());
        for text in ["40291", "4029171", "40291a", "٤٠٢٩١٧", ""] {
            assert!(!typed(text).is_pin(), "{text}");
        }
        for text in ["000000", "777777", "123456", "987654"] {
            assert!(typed(text).is_easy(), "{text}");
        }
        assert!(!typed("402917").is_easy());
    }

    #[test]
    fn what_is_typed_is_in_no_debug_text_and_has_an_end() {
        assert_eq!(format!("{:?}", typed("nine green kettles")), "Typed");
        assert!(typed(&"x".repeat(10_000)).text().len() <= LONGEST);
        assert_eq!(typed("a\u{1b}b").text(), "ab");
    }
}
