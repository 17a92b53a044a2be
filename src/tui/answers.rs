//! What the store answered.

use std::fmt::Write as _;

use crate::actions::{DayChild, QueueState, Signed};
use crate::domain::age::spoken;
use crate::domain::outcome::Urgency;
use crate::tui::app::{Answer, App, Effect, Notice, Refused, Request, Tone};
use crate::tui::day::Day;
use crate::tui::days::Days;
use crate::tui::text::name;

impl App {
    /// Takes an answer.
    pub(crate) fn answer(&mut self, answer: Answer) -> Vec<Effect> {
        match answer {
            Answer::Days(days) => {
                if self.day.is_err() {
                    self.day = Err(Days::new(days));
                }
            }
            Answer::Day(info, children, drafts) => {
                let n = drafts.len();
                self.board.forget();
                let (day, effects) = Day::new(&self.session, info, children, drafts);
                self.day = Ok(day);
                if n > 0 {
                    self.say(
                        Tone::Attention,
                        format!(
                            "{n} draft{} kept from before",
                            if n == 1 { "" } else { "s" }
                        ),
                    );
                }
                return effects;
            }
            Answer::Board(board) => {
                let of_this_day = self.day.as_ref().is_ok_and(|d| d.info.id == board.day.id);
                if of_this_day && let Some(words) = self.board.take(board, self.session.now_ms) {
                    self.say(Tone::Attention, words);
                }
            }
            Answer::Signed(signed) => return self.signed(*signed, "saved"),
            Answer::NotSigned(id, refused) => {
                let who = self
                    .day
                    .as_mut()
                    .map_or_else(|_| id.clone(), |d| d.not_signed(&id));
                self.refuse(Refused {
                    message: format!(
                        "{who}: not confirmed, the draft is kept. {}",
                        refused.message
                    ),
                    hint: refused.hint,
                });
            }
            Answer::Visit(id, visit) => {
                if let Ok(day) = &mut self.day {
                    day.show_visit(&id, visit.map(|v| *v));
                }
            }
            Answer::Corrected(signed) => {
                return self.signed(*signed, "corrected");
            }
            Answer::Moved(signed, from) => return self.moved(*signed, *from),
            Answer::Retracted(child) => return self.retracted(*child),
            Answer::Added(child) => {
                let id = child.child_id.clone();
                self.say(
                    Tone::Quiet,
                    format!(
                        "added {} as {id}",
                        name(&child.family_name, &child.given_name)
                    ),
                );
                if let Ok(day) = &mut self.day {
                    day.queue.update(*child);
                    return day.bring(&self.session, &id).effects;
                }
            }
            Answer::Urgent(urgent) => self.urgent = urgent,
            Answer::Told(visit, urgent) => {
                let mut words = "saved: who was told of the emergency".to_owned();
                if let Some(told) = self.urgent.iter().find(|u| u.visit == visit) {
                    let _ = write!(words, ", {}", crate::tui::text::safe(&told.name));
                }
                self.say(Tone::Quiet, words);
                self.urgent = urgent;
            }
            Answer::Compared(compared) => self.rules.compared(*compared),
            Answer::Found(text, found) => self.children.found(&text, found),
            Answer::History(history) => self.children.show(history.map(|h| *h)),
            Answer::Referrals(list) => self.referrals.fill(*list),
            Answer::Term(rows) => self.term.fill(rows),
            Answer::Screener(name) => {
                self.say(
                    Tone::Quiet,
                    format!("recording as {}", crate::tui::text::safe(&name)),
                );
                self.session.screener = Some(name);
            }
            Answer::Station(role) => return self.station_set(*role),
            Answer::ValueHistory(field, entries) => self.show_value_history(field, &entries),
            Answer::Unlocked(why_not) => return self.unlocked(why_not),
            Answer::Preferred(what, value) => {
                self.say(
                    Tone::Quiet,
                    format!("{what} {value}, kept for this installation"),
                );
            }
            Answer::DraftsNotWritten(refused) | Answer::Refused(refused) => self.refuse(refused),
        }
        Vec::new()
    }

    fn moved(&mut self, signed: Signed, from: DayChild) -> Vec<Effect> {
        let to = signed.child.child_id.clone();
        let mut effects = match &mut self.day {
            Ok(day) => day.refresh(&self.session, from),
            Err(_) => Vec::new(),
        };
        effects.extend(self.signed(signed, "moved to"));
        if let Ok(day) = &mut self.day {
            effects.extend(day.bring(&self.session, &to).effects);
        }
        effects
    }

    fn retracted(&mut self, child: DayChild) -> Vec<Effect> {
        let who = name(&child.family_name, &child.given_name);
        let id = child.child_id.clone();
        let mut effects = vec![Effect::ask(Request::Urgent)];
        self.board.changed();
        if let Ok(day) = &mut self.day {
            day.last_signed = None;
            effects.extend(day.refresh(&self.session, child));
            effects.extend(day.bring(&self.session, &id).effects);
        }
        self.say(
            Tone::Quiet,
            format!("the signature for {who} is taken back; both entries stay"),
        );
        effects
    }

    fn signed(&mut self, signed: Signed, verb: &str) -> Vec<Effect> {
        self.board.changed();
        let outcome = &signed.outcome;
        let who = name(&signed.child.family_name, &signed.child.given_name);
        let mut words = match signed.child.state {
            QueueState::Signed(kind) => format!("{verb} {who}: {}", kind.title()),
            // One of the states that are not a result comes first; the outcome stands behind it.
            state => format!("{verb} {who}: {}, {}", state.title(), outcome.kind.title()),
        };
        if let Some(on) = outcome.act_by.or(outcome.due_on) {
            let _ = write!(words, " by {}", spoken(on));
        }
        if !outcome.qualifiers.is_empty() {
            let _ = write!(words, " ({})", outcome.qualifiers.join("; "));
        }
        let emergency = outcome.urgency == Some(Urgency::Emergency);
        if self.session.discreet {
            words = format!("{verb} {who}");
        }
        self.notice = Some(Notice {
            tone: Tone::Quiet,
            text: words,
            hint: signed.head.clone(),
        });
        if verb == "saved"
            && let Some(tour) = &mut self.tour
        {
            tour.signed(outcome.kind);
        }
        let urgent_now = emergency || self.urgent.iter().any(|u| u.visit == signed.visit);
        let mut effects = match &mut self.day {
            Ok(day) => day.signed(signed),
            Err(_) => Vec::new(),
        };
        if urgent_now || verb != "saved" {
            effects.push(Effect::ask(Request::Urgent));
        }
        effects
    }
}
