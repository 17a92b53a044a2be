//! Takes the answers to questions.

use chrono::NaiveDate;

use crate::actions::{NewChild, NewDay, StationChange, UrgentAnswer};
use crate::domain::age::Grade;
use crate::domain::codes::{AcuityMethod, Correction, History, SignKind, Status};
use crate::domain::field::Field;
use crate::domain::readings::{Eye, Readings, Sign};
use crate::domain::screening_test::ScreeningTest;
use crate::keys::Command;
use crate::tui::app::{App, Effect, Request, Tone};
use crate::tui::day::bench::{Bench, pairs};
use crate::tui::day::path::Group;
use crate::tui::day::queue;
use crate::tui::prompt::{Ask, Body, Form, Prompt};
use crate::tui::text::safe;
use crate::tui::view::wall_clock;

/// What to carry out, or the field that stands against it and why.
type Taken = Result<Vec<Effect>, (usize, String)>;

impl App {
    /// Takes a choice.
    pub(crate) fn chosen(&mut self, prompt: &Prompt, word: &str) -> Vec<Effect> {
        match &prompt.ask {
            Ask::NotTestable => {
                let Body::Choices(choices) = &prompt.body else {
                    return Vec::new();
                };
                let eyes = choices.scope.map(App::eyes_of).unwrap_or_default();
                let mut effects = Vec::new();
                if let Ok(day) = &mut self.day {
                    for eye in eyes {
                        let field = match eye {
                            Eye::Right => Field::DistanceRight,
                            Eye::Left => Field::DistanceLeft,
                        };
                        effects = day.put(field, &format!("NT:{word}"));
                        if let Some(bench) = &mut day.bench {
                            bench.go_to(field);
                            bench.advance();
                        }
                    }
                }
                effects
            }
            Ask::NotPresent => self.not_present(word),
            Ask::Tests => self.open_test(&prompt.body, word),
            Ask::Emergency if word == "save" => self.run(Command::Sign),
            Ask::Emergency => {
                self.say(
                    Tone::Attention,
                    "not saved yet: sign as soon as you can, Ctrl-S",
                );
                Vec::new()
            }
            Ask::History => self.toggle_history(word),
            Ask::CorrectWhat => {
                if let Some(field) = Field::from_word(word) {
                    let example = example_of(field);
                    self.prompt = Some(Prompt::form(
                        Ask::Correct(field),
                        format!("correct {}", field.title()),
                        Form::new(&[
                            (
                                "new value",
                                &format!("{example}; a single - takes the value back"),
                                false,
                            ),
                            ("reason", "typed the wrong row", false),
                        ]),
                    ));
                }
                Vec::new()
            }
            Ask::ToldWhich => {
                if let Some(urgent) = self
                    .urgent
                    .iter()
                    .find(|u| u.visit.to_string() == word)
                    .cloned()
                {
                    self.ask_told_of(&urgent);
                }
                Vec::new()
            }
            Ask::Palette => self.run_named(word),
            Ask::Theme => self.set_theme(word),
            Ask::Settle(field) => {
                self.ask_settle_why(*field, word);
                Vec::new()
            }
            Ask::Screener => vec![Effect::ask(Request::Screener(word.to_owned()))],
            _ => Vec::new(),
        }
    }

    fn open_test(&mut self, body: &Body, word: &str) -> Vec<Effect> {
        let place = match body {
            Body::Choices(choices) => choices.items.iter().position(|c| c.word == word),
            _ => None,
        };
        if let Ok(day) = &mut self.day
            && let Some(group) = place.and_then(|i| Group::ALL.get(i))
        {
            day.open_test(*group);
        }
        Vec::new()
    }

    fn not_present(&mut self, word: &str) -> Vec<Effect> {
        let Ok(day) = &mut self.day else {
            return Vec::new();
        };
        let effects = if Correction::from_word(word).is_some() {
            day.put(Field::CorrectionWorn, word)
        } else if word.is_empty() || Status::from_word(word).is_some() {
            day.put(Field::Status, word)
        } else {
            Vec::new()
        };
        if let Some(bench) = &mut day.bench {
            bench.at = crate::tui::day::bench::Spot::Sign;
        }
        effects
    }

    fn toggle_history(&mut self, word: &str) -> Vec<Effect> {
        let (Ok(day), Some(what)) = (&mut self.day, History::from_word(word)) else {
            return Vec::new();
        };
        let Some(bench) = &day.bench else {
            return Vec::new();
        };
        let mut list = bench.readings.history.clone().unwrap_or_default();
        if let Some(i) = list.iter().position(|h| *h == what) {
            list.remove(i);
        } else {
            list.push(what);
        }
        let text: Vec<&str> = list.iter().map(|h| h.word()).collect();
        let effects = day.put(Field::History, &text.join(";"));
        self.ask_history();
        effects
    }

    /// Takes the marked signs; an emergency asks to be saved at once.
    pub(crate) fn signs_chosen(&mut self, marked: &[Sign]) -> Vec<Effect> {
        let text = if marked.is_empty() {
            "none".to_owned()
        } else {
            marked
                .iter()
                .map(Sign::to_string)
                .collect::<Vec<_>>()
                .join(";")
        };
        let Ok(day) = &mut self.day else {
            return Vec::new();
        };
        let effects = day.put(Field::Signs, &text);
        if day
            .bench
            .as_ref()
            .is_some_and(|b| b.is_emergency() && !marked.is_empty())
        {
            self.ask_emergency();
        }
        effects
    }

    /// Returns the sign under the cursor of the choice of signs.
    pub(crate) fn sign_at(at: usize) -> Option<SignKind> {
        SignKind::ALL.get(at).copied()
    }

    /// Takes a finished form. The form comes back with an error when a value cannot be taken.
    pub(crate) fn submitted(&mut self, mut prompt: Prompt) -> Vec<Effect> {
        let Body::Form(form) = &mut prompt.body else {
            return Vec::new();
        };
        match self.take_form(&prompt.ask, form) {
            Ok(effects) => effects,
            Err((index, words)) => {
                form.at = index;
                form.error = words;
                self.prompt = Some(prompt);
                Vec::new()
            }
        }
    }

    fn take_form(&mut self, ask: &Ask, form: &Form) -> Taken {
        let one = |request| Ok(vec![Effect::ask(request)]);
        let visit = self
            .day
            .as_ref()
            .ok()
            .and_then(|d| d.bench.as_ref())
            .and_then(|b| b.signed.as_ref());
        match ask {
            Ask::Correct(field) => {
                let Some(visit) = visit else {
                    return Ok(Vec::new());
                };
                let text = match form.value(0) {
                    "-" | "\u{2212}" => String::new(),
                    text => self
                        .checked(*field, text, &visit.readings)
                        .map_err(|w| (0, w))?,
                };
                one(Request::Correct(
                    visit.id,
                    vec![(*field, text)],
                    form.value(1).to_owned(),
                ))
            }
            Ask::SwapSigned => {
                let Some(visit) = visit else {
                    return Ok(Vec::new());
                };
                let get = |f| visit.readings.get(f).unwrap_or_default();
                let groups = self
                    .day
                    .as_ref()
                    .ok()
                    .and_then(|d| d.bench.as_ref())
                    .map(Bench::swap_groups)
                    .unwrap_or_default();
                let mut changes = Vec::new();
                for (right, left) in groups.into_iter().flat_map(pairs) {
                    let (r, l) = (get(right), get(left));
                    if r != l {
                        changes.push((right, l));
                        changes.push((left, r));
                    }
                }
                if changes.is_empty() {
                    return Err((0, "both eyes have the same values".into()));
                }
                one(Request::Correct(
                    visit.id,
                    changes,
                    form.value(0).to_owned(),
                ))
            }
            Ask::Note => {
                let text = form.value(0);
                let signed = visit.map(|v| v.id);
                let text = self
                    .checked(Field::Note, text, &Readings::default())
                    .map_err(|w| (0, w))?;
                match (signed, &mut self.day) {
                    (Some(visit), _) => one(Request::Correct(
                        visit,
                        vec![(Field::Note, text)],
                        form.value(1).to_owned(),
                    )),
                    (None, Ok(day)) => Ok(day.put(Field::Note, &text)),
                    _ => Ok(Vec::new()),
                }
            }
            Ask::SettleWhy(field, value) => match visit {
                Some(visit) => one(Request::Settle(
                    visit.id,
                    *field,
                    value.clone(),
                    form.value(0).to_owned(),
                )),
                None => Ok(Vec::new()),
            },
            Ask::MoveTo => self.move_to(form),
            Ask::Retract => match self.day.as_ref().ok().and_then(|d| d.last_signed.clone()) {
                Some((visit, _, _)) => one(Request::Retract(visit, form.value(0).to_owned())),
                None => Ok(Vec::new()),
            },
            Ask::AddChild => self.add_child(form),
            Ask::Told(urgent) => one(Request::Told(UrgentAnswer {
                visit: urgent.visit,
                told: form.value(0).to_owned(),
                // What the form offers beside the blank is taken by Enter.
                told_at: or(form.value(1), || {
                    wall_clock(self.session.now_ms, self.session.offset_minutes)
                }),
                told_by: or(form.value(2), || {
                    self.session.screener.clone().unwrap_or_default()
                }),
            })),
            Ask::NewDay => self.new_day(form),
            Ask::Station => {
                station_change(form).map(|change| vec![Effect::ask(Request::SetStation(change))])
            }
            _ => Ok(Vec::new()),
        }
    }

    fn add_child(&self, form: &Form) -> Taken {
        let Ok(day) = &self.day else {
            return Ok(Vec::new());
        };
        let dob = date(form.value(2)).map_err(|w| (2, w))?;
        if dob.is_some_and(|d| d > day.info.date) {
            return Err((2, "a birth date before the screening day".into()));
        }
        let grade = match form.value(3) {
            "" => None,
            text => Some(Grade::parse(text).ok_or((3, "PK, TK, KG or 1 to 12".to_owned()))?),
        };
        let child = NewChild {
            family_name: form.value(0).to_owned(),
            given_name: form.value(1).to_owned(),
            dob,
            grade,
            class: form.value(4).to_owned(),
            site: day.info.site.clone(),
        };
        Ok(vec![Effect::ask(Request::AddChild(
            child,
            (*day.info).clone(),
        ))])
    }

    fn new_day(&self, form: &Form) -> Taken {
        let site = self
            .session
            .sites
            .iter()
            .find(|(code, name)| {
                code.eq_ignore_ascii_case(form.value(0)) || name.eq_ignore_ascii_case(form.value(0))
            })
            .map(|(code, _)| code.clone())
            .ok_or((0, "one of the sites".to_owned()))?;
        let on = date(form.value(1))
            .map_err(|w| (1, w))?
            .unwrap_or(self.session.today);
        let protocols = crate::tui::judging::protocol_ids(&self.session.library);
        let protocol = protocols
            .iter()
            .find(|p| p.eq_ignore_ascii_case(form.value(2)))
            .cloned()
            .ok_or_else(|| (2, format!("one of {}", protocols.join(", "))))?;
        let method = match form.value(3) {
            "" => AcuityMethod::Threshold,
            word => AcuityMethod::from_word(word)
                .ok_or_else(|| (3, format!("one of {}", AcuityMethod::words())))?,
        };
        Ok(vec![Effect::ask(Request::NewDay(NewDay {
            site,
            date: on,
            protocol,
            method,
        }))])
    }

    /// Checks a corrected value and returns it as it is stored.
    fn checked(&self, field: Field, text: &str, readings: &Readings) -> Result<String, String> {
        let pass = self
            .day
            .as_ref()
            .ok()
            .and_then(|d| d.bench.as_ref())
            .and_then(|b| b.pass_line.as_ref())
            .map(|p| p.line);
        let mut readings = readings.clone();
        let context = crate::domain::readings::ReadingContext {
            bare: Some(self.session.notation),
            critical_line: pass,
        };
        readings
            .set(field, text, context)
            .map_err(|e| format!("expected {}", e.expected))?;
        Ok(readings.get(field).unwrap_or_default())
    }

    fn move_to(&mut self, form: &Form) -> Taken {
        let Ok(day) = &mut self.day else {
            return Ok(Vec::new());
        };
        let text = form.value(0);
        let to = match day.queue.child(text) {
            Some(child) => child.child_id.clone(),
            None => match day.queue.matching(text, 2).as_slice() {
                [only] => only.child_id.clone(),
                [] => return Err((0, "no child of this day has this name or id".into())),
                _ => {
                    return Err((
                        0,
                        "more than one child: type more of the name, or the id".into(),
                    ));
                }
            },
        };
        let Some(bench) = &day.bench else {
            return Ok(Vec::new());
        };
        if to == bench.child.child_id {
            return Err((0, "this is the child on the bench".into()));
        }
        if let Some(visit) = &bench.signed {
            return Ok(vec![Effect::ask(Request::MoveVisit(
                visit.id,
                to,
                form.value(1).to_owned(),
            ))]);
        }
        let done = day.move_draft(&self.session, &to);
        Ok(self.done(done))
    }

    /// Shows the children that the first field of "move to" could mean.
    pub(crate) fn refresh_hints(&mut self) {
        let Some(prompt) = &mut self.prompt else {
            return;
        };
        if let (Ask::MoveTo, Body::Form(form), Ok(day)) = (&prompt.ask, &mut prompt.body, &self.day)
        {
            let text = form.value(0).to_owned();
            let marks = day.marks(&self.session);
            form.hints = day
                .queue
                .matching(&text, 5)
                .into_iter()
                .map(|c| {
                    format!(
                        "{}  {}  {}",
                        crate::tui::text::fit(
                            &crate::tui::text::name(&c.family_name, &c.given_name),
                            28
                        ),
                        crate::tui::text::fit(&safe(&c.child_id), 12),
                        match queue::state_word(c, marks, self.session.theme).0 {
                            "" => c.state.title(),
                            word => word,
                        }
                    )
                })
                .collect();
        }
    }
}

/// Reads what a station is set to; an empty field changes nothing.
fn station_change(form: &Form) -> Result<StationChange, (usize, String)> {
    let task = match form.value(0) {
        "" => None,
        "all" => Some(None),
        word => Some(Some(ScreeningTest::from_word(word).ok_or_else(|| {
            (0, format!("expected all, {}", ScreeningTest::words()))
        })?)),
    };
    let masked = match form.value(1) {
        "" => None,
        "yes" => Some(true),
        "no" => Some(false),
        _ => return Err((1, "expected yes or no".into())),
    };
    let chart = match form.value(2) {
        "" => None,
        "none" => Some(None),
        name => Some(Some(name.to_owned())),
    };
    Ok(StationChange {
        task,
        masked,
        chart,
    })
}

/// Reads an ISO date; empty is unknown.
fn date(text: &str) -> Result<Option<NaiveDate>, String> {
    if text.is_empty() {
        return Ok(None);
    }
    NaiveDate::parse_from_str(text, "%Y-%m-%d")
        .map(Some)
        .map_err(|_| "a date as 2020-09-01".into())
}

fn example_of(field: Field) -> String {
    use crate::tui::day::kind::{Kind, kind};
    match kind(field) {
        Kind::Acuity => "20/40".into(),
        Kind::Choice(choices) => choices
            .iter()
            .map(|(_, word, _)| *word)
            .collect::<Vec<_>>()
            .join(", "),
        Kind::List => "none, or words separated by ;".into(),
        Kind::Text if field == Field::Status => Status::words(),
        Kind::Text => "1.25".into(),
    }
}

/// Returns what was typed, or else what is offered.
fn or(typed: &str, offered: impl FnOnce() -> String) -> String {
    if typed.is_empty() {
        offered()
    } else {
        typed.to_owned()
    }
}
