//! What the store was asked to write and has not confirmed yet.

use crate::tui::app::{App, Effect, Request, Tone};
use crate::tui::text::name;

/// After so long a person sees that something is being saved.
const SLOW_MS: i64 = 1_000;

/// After so long a person is told what to look at.
const TOO_LONG_MS: i64 = 5_000;

/// A request on its way: what it writes, and since when.
#[derive(Debug)]
pub struct Asked {
    what: Option<String>,
    since_ms: i64,
}

impl App {
    /// Notes what is asked; the store answers in the same order.
    pub(crate) fn note_asked(&mut self, effects: &[Effect]) {
        for effect in effects {
            if let Effect::Ask(request) = effect {
                let asked = Asked {
                    what: self.written_by(request),
                    since_ms: self.session.now_ms,
                };
                self.asked.push_back(asked);
            }
        }
    }

    /// Returns what a request writes; nothing when it only reads.
    fn written_by(&self, request: &Request) -> Option<String> {
        let who = |id: &str| {
            self.day
                .as_ref()
                .ok()
                .and_then(|day| day.queue.child(id))
                .map_or_else(
                    || crate::tui::text::safe(id),
                    |c| name(&c.family_name, &c.given_name),
                )
        };
        if !request.writes() {
            return None;
        }
        Some(match request {
            Request::Sign(sign) => who(&sign.child_id),
            Request::Correct(..) => "the correction".into(),
            Request::MoveVisit(..) => "the moved visit".into(),
            Request::Retract(..) => "the signature taken back".into(),
            Request::AddChild(child, _) => name(&child.family_name, &child.given_name),
            Request::Told(_) => "who was told".into(),
            Request::NewDay(_) => "the new day".into(),
            Request::Settle(..) => "the value that stands".into(),
            Request::SetStation(_) => "what the station is set to".into(),
            Request::Screener(_) => "who is recording".into(),
            _ => "the setting".into(),
        })
    }

    /// Says whether something written waits for the store's word.
    pub fn is_waiting(&self) -> bool {
        self.asked.iter().any(|a| a.what.is_some())
    }

    /// Returns what is said while the store is slow; never that anything is saved.
    pub(crate) fn waiting_words(&self) -> Option<(Tone, String)> {
        let waits: Vec<&Asked> = self.asked.iter().filter(|a| a.what.is_some()).collect();
        let oldest = waits.first()?;
        let what = oldest.what.as_deref().unwrap_or_default();
        let more = match waits.len() {
            1 => String::new(),
            n => format!(" and {} more", n - 1),
        };
        match self.session.now_ms - oldest.since_ms {
            ..SLOW_MS => None,
            SLOW_MS..TOO_LONG_MS => Some((Tone::Quiet, format!("saving {what}{more} …"))),
            _ => Some((
                Tone::Attention,
                format!("not confirmed yet: {what}{more}; draft kept. Is the disk full or slow?"),
            )),
        }
    }
}
