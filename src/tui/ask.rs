//! Opens questions.

use crate::domain::codes::{Correction, History, Status};
use crate::domain::field::Field;
use crate::domain::readings::{Eye, NotTestable};
use crate::domain::screening_test::ScreeningTest;
use crate::keys::{self, Command};
use crate::tui::app::{App, Session, Tone};
use crate::tui::day::bench::Bench;
use crate::tui::day::bench_view::value_words;
use crate::tui::day::kind;
use crate::tui::day::path::Group;
use crate::tui::judging::{self, Standing};
use crate::tui::prompt::{Ask, Body, Form, Prompt, Scope, SignMarks, listed};
use crate::tui::text::{name, safe};

impl App {
    /// Opens the question of a command that needs a child on the bench.
    pub(crate) fn ask_about_child(&mut self, command: Command) {
        let Ok(day) = &self.day else {
            return;
        };
        let Some(bench) = &day.bench else {
            self.say(Tone::Attention, "no child is on the bench");
            return;
        };
        if command == Command::Why && bench.keeps_back() {
            self.say(
                Tone::Attention,
                "this station is masked: reasons are shown when both eyes are entered",
            );
            return;
        }
        let who = name(&bench.child.family_name, &bench.child.given_name);
        let signed = bench.is_signed();
        if signed
            && matches!(
                command,
                Command::NotTestable | Command::NotPresent | Command::Signs | Command::Tests
            )
        {
            self.say(
                Tone::Attention,
                "this visit is signed: Ctrl-E corrects a value, with the reason",
            );
            return;
        }
        let prompt = match command {
            Command::NotTestable => ask_not_testable(&who, bench),
            Command::NotPresent => ask_not_present(&who),
            Command::Tests => ask_tests(&who),
            Command::Note => ask_note(&who, bench),
            Command::Signs => Prompt {
                ask: Ask::Signs,
                title: format!("{who}: signs seen"),
                body: Body::Signs(SignMarks {
                    marked: bench.readings.signs.clone().unwrap_or_default(),
                    at: 0,
                }),
            },
            Command::Why => whole_reason(&who, bench, &self.session),
            Command::Swap if signed => Prompt::form(
                Ask::SwapSigned,
                format!("{who}: swap right eye and left eye"),
                Form::new(&[("reason", "entered for the other eye", false)]),
            ),
            Command::Move => ask_move(&who, signed),
            Command::Correct if signed => ask_correct(&who, bench),
            Command::Correct => {
                self.say(
                    Tone::Attention,
                    "nothing is signed yet: simply type over the value",
                );
                return;
            }
            _ => return,
        };
        self.prompt = Some(prompt);
    }

    /// Opens the list of history entries.
    pub(crate) fn ask_history(&mut self) {
        let keys = "123456789abcdefghijklmnopqrstuvwxyz".chars();
        let chosen = self
            .day
            .as_ref()
            .ok()
            .and_then(|d| d.bench.as_ref())
            .and_then(|b| b.readings.history.clone())
            .unwrap_or_default();
        let choices = listed(History::ALL.iter().zip(keys).map(|(h, key)| {
            let mark = if chosen.contains(h) { "✓ " } else { "" };
            (key, format!("{mark}{}", h.title()), h.word())
        }));
        self.prompt = Some(Prompt::choices(
            Ask::History,
            "history: choose to add, again to take away",
            choices,
        ));
    }

    /// Asks to save an emergency with one key.
    pub(crate) fn ask_emergency(&mut self) {
        let what = self
            .day
            .as_ref()
            .ok()
            .and_then(|d| d.bench.as_ref())
            .map(|b| {
                let signs = b
                    .readings
                    .signs
                    .iter()
                    .flatten()
                    .map(|s| crate::tui::day::bench_view::sign_words(*s));
                format!(
                    "EMERGENCY  {}: {}",
                    name(&b.child.family_name, &b.child.given_name),
                    signs.collect::<Vec<_>>().join("; ")
                )
            })
            .unwrap_or_default();
        let mut choices = listed([
            ('f', "nurse fetched: save it now", "save"),
            (
                'g',
                "go on testing first: it stays a draft, not saved",
                "later",
            ),
        ]);
        // Neither is taken by the Enter that closed the choice of signs.
        choices.at = usize::MAX;
        self.prompt = Some(Prompt::choices(Ask::Emergency, what, choices));
    }

    /// Asks for the reason to take back the last signature.
    pub(crate) fn ask_retract(&mut self) {
        let last = self.day.as_ref().ok().and_then(|d| d.last_signed.clone());
        match last {
            Some((_, _, who)) => {
                self.prompt = Some(Prompt::form(
                    Ask::Retract,
                    format!("nothing to undo on the bench: take back the signature for {who}?"),
                    Form::new(&[("reason", "signed the wrong child", false)]),
                ));
            }
            None => self.say(Tone::Quiet, "nothing to undo"),
        }
    }

    /// Asks who is added at the table.
    pub(crate) fn ask_add_child(&mut self) {
        if let Ok(day) = &self.day {
            self.prompt = Some(Prompt::form(
                Ask::AddChild,
                format!("add a child at {}", safe(&day.info.site_name)),
                Form::new(&[
                    ("family name", "", false),
                    ("given name", "", false),
                    ("birth date", "2020-09-01, empty if unknown", true),
                    ("grade", "PK, KG, 1 to 12, empty if unknown", true),
                    ("class", "1B", true),
                ]),
            ));
        }
    }

    /// Asks who was told of an emergency.
    pub(crate) fn ask_told(&mut self) {
        match self.urgent.as_slice() {
            [] => self.say(Tone::Quiet, "no emergency waits for an answer"),
            [only] => {
                let only = only.clone();
                self.ask_told_of(&only);
            }
            several => {
                let choices = listed(several.iter().zip('1'..='9').map(|(u, key)| {
                    (
                        key,
                        format!("{} ({}): {}", safe(&u.name), safe(&u.class), safe(&u.what)),
                        u.visit.to_string(),
                    )
                }));
                self.prompt = Some(Prompt::choices(Ask::ToldWhich, "which emergency?", choices));
            }
        }
    }

    /// Asks who was told of one emergency.
    pub(crate) fn ask_told_of(&mut self, urgent: &crate::actions::OpenUrgent) {
        let now = crate::tui::view::wall_clock(self.session.now_ms, self.session.offset_minutes);
        let me = self.session.screener.clone().unwrap_or_default();
        let by = format!("Enter: {me}");
        self.prompt = Some(Prompt::form(
            Ask::Told(urgent.clone()),
            format!("EMERGENCY  {}: {}", safe(&urgent.name), safe(&urgent.what)),
            Form::new(&[
                (
                    "who was told",
                    "mother by telephone; eye doctor on call",
                    false,
                ),
                ("when", &format!("Enter: {now}, as on the clock"), true),
                (
                    "by whom",
                    if me.is_empty() {
                        "initials and name"
                    } else {
                        &by
                    },
                    !me.is_empty(),
                ),
            ]),
        ));
    }

    /// Opens the page of all keys.
    pub(crate) fn ask_help(&mut self) {
        let mut lines = Vec::new();
        let here = self.context().stack();
        let mut order: Vec<keys::Context> = here.to_vec();
        order.extend(keys::Context::ALL.iter().filter(|c| !here.contains(c)));
        for context in order {
            lines.push(context.title().to_uppercase());
            for binding in keys::TABLE.iter().filter(|b| b.context == context) {
                lines.push(format!(
                    "  {} {}",
                    crate::tui::text::fit(&keys::keys_text(binding), 14),
                    binding.help
                ));
            }
            lines.push(String::new());
        }
        self.prompt = Some(Prompt::page("keys", lines));
    }

    /// Asks who is recording.
    pub(crate) fn ask_screener(&mut self) {
        let choices = listed(
            self.session
                .screeners
                .iter()
                .zip("123456789abcdefghijklmnop".chars())
                .map(|(s, key)| (key, safe(s), s.clone())),
        );
        if choices.items.is_empty() {
            self.say(
                Tone::Attention,
                "no screener is entered yet: `twoline screener add` adds one",
            );
        } else {
            self.prompt = Some(Prompt::choices(Ask::Screener, "who is recording?", choices));
        }
    }

    /// Asks what this station is set to; Enter on an empty field leaves it as it is.
    pub(crate) fn ask_station(&mut self) {
        let role = &self.session.role;
        let task = role.task.map_or("all", ScreeningTest::word);
        let masked = if role.masked { "yes" } else { "no" };
        let chart = role
            .chart
            .as_ref()
            .map_or("none".to_owned(), |c| safe(&c.name));
        self.prompt = Some(Prompt::form(
            Ask::Station,
            format!("station {}", safe(&role.name)),
            Form::new(&[
                (
                    "task",
                    &format!("now {task}; all, {}", ScreeningTest::words()),
                    true,
                ),
                ("masked", &format!("now {masked}; yes or no"), true),
                (
                    "chart",
                    &format!("now {chart}; the name of a chart, or none"),
                    true,
                ),
            ]),
        ));
    }

    /// Asks for a new screening day.
    pub(crate) fn ask_new_day(&mut self) {
        let sites = self
            .session
            .sites
            .iter()
            .map(|(code, _)| code.clone())
            .collect::<Vec<_>>()
            .join(", ");
        let protocols = crate::tui::judging::protocol_ids(&self.session.library).join(", ");
        self.prompt = Some(Prompt::form(
            Ask::NewDay,
            "open a screening day",
            Form::new(&[
                ("site", &sites, false),
                (
                    "date",
                    &format!("{}, empty for today", self.session.today),
                    true,
                ),
                ("protocol", &protocols, false),
                (
                    "chart",
                    "threshold (smallest line read) or critical_line; empty for threshold",
                    true,
                ),
            ]),
        ));
    }

    /// Returns the eyes that a scope names.
    pub(crate) fn eyes_of(scope: Scope) -> Vec<Eye> {
        match scope {
            Scope::One(eye) => vec![eye],
            Scope::Both => Eye::BOTH.to_vec(),
        }
    }
}

fn ask_not_testable(who: &str, bench: &Bench) -> Prompt {
    let mut choices = listed(
        NotTestable::ALL
            .iter()
            .zip('1'..)
            .map(|(why, key)| (key, why.title(), why.word())),
    );
    choices.scope = Some(
        bench
            .field()
            .and_then(kind::eye)
            .map_or(Scope::Both, Scope::One),
    );
    Prompt::choices(
        Ask::NotTestable,
        format!("{who}: distance not testable, why?"),
        choices,
    )
}

fn ask_tests(who: &str) -> Prompt {
    let keys = "123456789abcdefghijklmnopqrstuvwxyz".chars();
    let groups = Group::ALL.iter().zip(keys);
    Prompt::choices(
        Ask::Tests,
        format!("{who}: which test?"),
        listed(groups.map(|(group, key)| (key, group.title(), key))),
    )
}

/// The note that stands there is in the field: Enter on it keeps it.
fn ask_note(who: &str, bench: &Bench) -> Prompt {
    let fields = [
        ("note", "one line; it is kept and shown, never judged", true),
        ("reason", "why the signed note changes", false),
    ];
    let shown = if bench.is_signed() { 2 } else { 1 };
    let mut form = Form::new(&fields[..shown]);
    if let Some(note) = &bench.readings.note {
        form.fields[0].input = tui_input::Input::new(note.clone());
    }
    Prompt::form(Ask::Note, format!("{who}: note"), form)
}

fn ask_not_present(who: &str) -> Prompt {
    Prompt::choices(
        Ask::NotPresent,
        format!("{who}: not tested today, why?"),
        listed([
            ('a', Status::Absent.title(), Status::Absent.word()),
            ('o', Status::OptedOut.title(), Status::OptedOut.word()),
            (
                'n',
                Status::NotAttempted.title(),
                Status::NotAttempted.word(),
            ),
            ('l', Status::LeftEarly.title(), Status::LeftEarly.word()),
            ('u', Status::UnderCare.title(), Status::UnderCare.word()),
            (
                'h',
                Correction::LeftAtHome.title(),
                Correction::LeftAtHome.word(),
            ),
            (
                'b',
                Correction::BrokenOrLost.title(),
                Correction::BrokenOrLost.word(),
            ),
            ('p', "present after all: take the answer back", ""),
        ]),
    )
}

fn whole_reason(who: &str, bench: &Bench, session: &Session) -> Prompt {
    let mut lines = Vec::new();
    if let Some(outcome) = bench.signed.as_ref().and_then(|v| v.outcome.as_ref()) {
        lines.push(format!(
            "Signed as {}: {}",
            outcome.kind.title(),
            safe(&outcome.reasons)
        ));
        lines.extend(
            outcome
                .notes
                .iter()
                .map(|note| format!("Noted: {}", safe(note))),
        );
        lines.push(String::new());
        lines.push("The same readings now:".into());
    }
    let child = &bench.child;
    let (readings, _) = judging::known(child, &bench.readings);
    let standing = Standing::of(&session.library, &session.triage, child.age, &readings);
    let whole = judging::whole_reason(&bench.outcome, &standing);
    lines.extend(whole.iter().map(|l| safe(l)));
    Prompt::page(format!("{who}: the whole reason"), lines)
}

fn ask_move(who: &str, signed: bool) -> Prompt {
    let reason = [
        ("to", "name or id of the child they belong to", false),
        ("reason", "wrong child on the bench", false),
    ];
    let fields = if signed { &reason[..] } else { &reason[..1] };
    Prompt::form(
        Ask::MoveTo,
        format!("move what was entered for {who} to another child"),
        Form::new(fields),
    )
}

fn ask_correct(who: &str, bench: &Bench) -> Prompt {
    let keys = "123456789abcdefghijklmnopqrstuvwxyz".chars();
    let fields: Vec<Field> = bench
        .readings
        .recorded()
        .into_iter()
        .map(|(f, _)| f)
        .chain(bench.path.iter().copied())
        .filter(|f| *f != Field::AcuityMethod)
        .collect();
    let mut seen = Vec::new();
    let items = fields.into_iter().filter(|f| {
        let new = !seen.contains(f);
        seen.push(*f);
        new
    });
    let readings = &bench.readings;
    let choices = listed(items.zip(keys).map(|(f, key)| {
        let now = readings
            .get(f)
            .map_or_else(|| "·".to_owned(), |raw| value_words(readings, f, &raw));
        (key, format!("{}: {now}", f.title()), f.word())
    }));
    Prompt::choices(
        Ask::CorrectWhat,
        format!("{who}: which value is wrong?"),
        choices,
    )
}
