//! A barcode reader types a whole id and Enter, faster than hands do, wherever the focus happens to
//! be. What it typed is taken back from that place before the child comes to the bench.

use crate::domain::acuity::{AcuityContext, parse_acuity};
use crate::tui::app::Session;
use crate::tui::day::bench::Checkpoint;

/// Characters that arrive closer together than this belong to one burst.
const GAP_MS: i64 = 60;

/// Fewer characters than this are never called an unknown id.
const SHORTEST: usize = 5;

/// What stood on the screen before a burst began.
#[derive(Debug, Clone, Default)]
pub struct Before {
    /// The bench.
    pub bench: Option<Checkpoint>,
    /// The find in the list.
    pub find: String,
}

/// The characters of the present burst.
#[derive(Debug, Default)]
pub struct Scan {
    text: String,
    last_ms: i64,
    before: Before,
}

impl Scan {
    /// Says whether a character at this moment begins a new burst.
    pub fn begins(&self, now_ms: i64) -> bool {
        self.text.is_empty() || now_ms - self.last_ms > GAP_MS
    }

    /// Begins a burst, remembering what stood there.
    pub fn begin(&mut self, before: Before) {
        self.text.clear();
        self.before = before;
    }

    /// Takes a character.
    pub fn take(&mut self, c: char, now_ms: i64) {
        if self.text.len() < 128 {
            self.text.push(c);
        }
        self.last_ms = now_ms;
    }

    /// Forgets the burst: another key was pressed.
    pub fn forget(&mut self) {
        self.text.clear();
    }

    /// Ends the burst with Enter and returns what was typed with what stood there before.
    pub fn end(&mut self, now_ms: i64) -> Option<(String, Before)> {
        let text = std::mem::take(&mut self.text);
        let before = std::mem::take(&mut self.before);
        (text.len() > 1 && now_ms - self.last_ms <= GAP_MS).then_some((text, before))
    }
}

/// Says whether a burst is long enough to be called an unknown id.
pub fn looks_like_an_id(text: &str) -> bool {
    text.chars().count() >= SHORTEST
}

/// Returns the id that a text names, if it may stand for one: a text that reads as an acuity needs
/// the scanner's prefix.
pub fn id_of<'a>(text: &'a str, session: &Session) -> Option<&'a str> {
    let text = text.trim();
    if let Some(prefix) = session.scan_prefix.as_deref().filter(|p| !p.is_empty())
        && let Some(rest) = text.strip_prefix(prefix)
    {
        return Some(rest);
    }
    let context = AcuityContext {
        bare: Some(session.notation),
        ..AcuityContext::default()
    };
    (!text.is_empty() && parse_acuity(text, &context).is_err()).then_some(text)
}
