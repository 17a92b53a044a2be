//! One message in, the new state and what is to be carried out.

use tui_input::InputRequest;

use crate::keys::{self, Command, Context, Key};
use crate::tui::app::{Answer, App, Effect, Message, PlaceName, Request, Tone};
use crate::tui::day::bench::Bench;
use crate::tui::day::{Day, Done};
use crate::tui::days::Days;
use crate::tui::prompt::{Ask, Body};

impl App {
    /// Takes a message. No I/O happens here.
    pub fn update(&mut self, message: Message) -> Vec<Effect> {
        let effects = match message {
            // Nobody was there for long: whoever comes finds the lock, and the key goes nowhere.
            Message::Key(_) | Message::Paste(_) | Message::Tick if self.is_idle() => {
                self.lock_now()
            }
            Message::Tick => self.tick(),
            Message::Key(key) => {
                self.touched();
                if self.lock.stands() {
                    self.gate_key(key)
                } else {
                    self.key(key)
                }
            }
            Message::Paste(text) => {
                self.touched();
                if self.lock.stands() {
                    self.gate_paste(&text);
                    Vec::new()
                } else {
                    self.paste(&text)
                }
            }
            Message::Answer(answer) => {
                if !matches!(answer, Answer::DraftsNotWritten(_)) {
                    self.asked.pop_front();
                }
                self.answer(answer)
            }
            Message::Suspend => self.run(Command::Suspend),
            Message::Leave => self.leave(),
        };
        self.note_asked(&effects);
        self.tour_on();
        effects
    }

    /// The clock moved on: a day board that is due is asked for.
    fn tick(&mut self) -> Vec<Effect> {
        match &self.day {
            Ok(day) => self.board.tick(&day.info, self.session.now_ms),
            Err(_) => Vec::new(),
        }
    }

    pub(crate) fn leave(&mut self) -> Vec<Effect> {
        let mut effects = self
            .day
            .as_mut()
            .map_or_else(|_| Vec::new(), Day::keep_draft);
        effects.push(Effect::FlushDrafts);
        effects.push(Effect::Quit);
        effects
    }

    fn key(&mut self, key: Key) -> Vec<Effect> {
        if self.prompt.is_some() {
            return self.prompt_key(key);
        }
        let context = self.context();
        let command = keys::command(context, key);
        if let Some(c) = key.typed()
            && command.is_none()
        {
            return self.type_char(context, c);
        }
        let Some(command) = command else {
            return Vec::new();
        };
        if matches!(command, Command::Accept | Command::Open)
            && matches!(context, Context::Bench | Context::List)
            && let Ok(day) = &mut self.day
            && let Some(done) = day.scanned(&self.session)
        {
            self.notice = None;
            return self.done(done);
        }
        if let Ok(day) = &mut self.day {
            day.end_burst();
        }
        if self.notice.as_ref().is_some_and(|n| n.tone != Tone::Error) || command == Command::Accept
        {
            self.notice = None;
        }
        self.run(command)
    }

    fn type_char(&mut self, context: Context, c: char) -> Vec<Effect> {
        match (context, &mut self.day) {
            (Context::Bench | Context::List, Ok(day)) => {
                let done = day.type_char(c, &self.session);
                self.done(done)
            }
            (Context::Children, _) => self.children.type_text(&c.to_string()),
            _ => Vec::new(),
        }
    }

    fn paste(&mut self, text: &str) -> Vec<Effect> {
        let line: String = text
            .split(['\r', '\n'])
            .next()
            .unwrap_or("")
            .chars()
            .filter(|c| !crate::domain::text::is_unsafe(*c))
            .take(200)
            .collect();
        if text.trim_end().chars().count() > line.chars().count() {
            self.say(
                Tone::Attention,
                "only the first line of what was pasted is taken, 200 characters at most",
            );
        }
        if let Some(prompt) = &mut self.prompt {
            match &mut prompt.body {
                Body::Form(form) => {
                    for c in line.chars() {
                        form.edit(InputRequest::InsertChar(c));
                    }
                }
                Body::Choices(choices) => {
                    if let Some(find) = &mut choices.find {
                        find.push_str(&line);
                        choices.at = 0;
                    }
                }
                _ => {}
            }
            self.refresh_hints();
            return Vec::new();
        }
        match (self.context(), &mut self.day) {
            (Context::Bench | Context::List, Ok(day)) => {
                let done = day.paste(&line);
                self.done(done)
            }
            (Context::Children, _) => self.children.type_text(&line),
            _ => Vec::new(),
        }
    }

    /// Says what is to be said and hands on what is to be carried out.
    pub(crate) fn done(&mut self, done: Done) -> Vec<Effect> {
        if let Some((refused, words)) = done.said {
            self.say(
                if refused {
                    Tone::Attention
                } else {
                    Tone::Quiet
                },
                words,
            );
        }
        done.effects
    }

    /// Carries out a command.
    pub(crate) fn run(&mut self, command: Command) -> Vec<Effect> {
        if let Some(tour) = &mut self.tour {
            tour.ran(command);
        }
        match command {
            Command::Tour => self.toggle_tour(),
            Command::Quit => return self.leave(),
            Command::Redraw => return vec![Effect::Redraw],
            Command::Suspend => {
                let mut effects = self.lock_now();
                effects.push(Effect::Suspend);
                return effects;
            }
            Command::Lock => return self.lock_now(),
            Command::DayPin => self.ask_pin(),
            Command::Theme => self.ask_theme(),
            Command::Help => self.ask_help(),
            Command::Palette => self.ask_palette(),
            Command::Screener => self.ask_screener(),
            Command::Told => self.ask_told(),
            Command::PlaceDay => return self.go(PlaceName::Day),
            Command::PlaceChildren => return self.go(PlaceName::Children),
            Command::PlaceReferrals => return self.go(PlaceName::Referrals),
            Command::PlaceTerm => return self.go(PlaceName::Term),
            Command::PlaceRules => return self.go(PlaceName::Rules),
            _ => {
                return match self.at {
                    PlaceName::Day => self.run_in_day(command),
                    _ => self.run_elsewhere(command),
                };
            }
        }
        Vec::new()
    }

    pub(crate) fn go(&mut self, place: PlaceName) -> Vec<Effect> {
        if self.lock.is_day_only() && place != PlaceName::Day {
            self.ask_for_place(place);
            return Vec::new();
        }
        if self.session.role.masked && matches!(place, PlaceName::Children | PlaceName::Referrals) {
            self.say(
                Tone::Attention,
                "this station is masked: it shows no child's history and nobody's telephone",
            );
            return Vec::new();
        }
        let mut effects = self
            .day
            .as_mut()
            .map_or_else(|_| Vec::new(), Day::keep_draft);
        self.at = place;
        match place {
            PlaceName::Referrals => effects.push(Effect::ask(Request::Referrals)),
            PlaceName::Term => effects.push(Effect::ask(Request::Term)),
            _ => {}
        }
        effects
    }

    fn run_in_day(&mut self, command: Command) -> Vec<Effect> {
        if self.context() == Context::Board {
            match command {
                Command::Cancel => self.board.close(),
                _ => self.board.command(command),
            }
            return Vec::new();
        }
        match command {
            Command::Discreet => {
                self.session.discreet = !self.session.discreet;
                let words = if self.session.discreet {
                    "outcomes, reasons and notes are not shown; Alt-i shows them again"
                } else {
                    "outcomes, reasons and notes are shown"
                };
                self.say(Tone::Quiet, words);
                return Vec::new();
            }
            Command::Station => {
                self.ask_station();
                return Vec::new();
            }
            Command::ValueHistory => return self.ask_value_history(),
            Command::OpenDay => {
                self.ask_new_day();
                return Vec::new();
            }
            Command::AddChild => {
                self.ask_add_child();
                return Vec::new();
            }
            Command::Swap => {
                let unsigned = self
                    .day
                    .as_ref()
                    .ok()
                    .and_then(|d| d.bench.as_ref())
                    .is_some_and(|b| !b.is_signed());
                if !unsigned {
                    self.ask_about_child(command);
                    return Vec::new();
                }
            }
            Command::NotTestable
            | Command::NotPresent
            | Command::Why
            | Command::Signs
            | Command::Tests
            | Command::Note
            | Command::Move
            | Command::Correct => {
                self.ask_about_child(command);
                return Vec::new();
            }
            _ => {}
        }
        match &mut self.day {
            Err(days) => days.command(command),
            Ok(_) => self.run_on_day(command),
        }
    }

    fn run_on_day(&mut self, command: Command) -> Vec<Effect> {
        let in_list = self.context() == Context::List;
        if command == Command::Accept && !in_list && self.ask_settle() {
            return Vec::new();
        }
        let now_ms = self.session.now_ms;
        let Ok(day) = &mut self.day else {
            return Vec::new();
        };
        let done = match command {
            Command::Sign => {
                if let Some(bench) = &mut day.bench {
                    bench.judge();
                }
                day.sign(&self.session)
            }
            Command::Board => {
                let mut effects = day.keep_draft();
                effects.extend(self.board.open(&day.info, now_ms));
                return effects;
            }
            Command::NextChild => day.next_child(&self.session),
            Command::SecondTry => day.second_try(&self.session),
            Command::ShowAll => Done::said(if day.queue.toggle_all() {
                "all children of the day are listed"
            } else {
                "those who are done are not listed"
            }),
            Command::Swap => day.swap(),
            Command::Undo => {
                let undone = day
                    .bench
                    .as_mut()
                    .is_some_and(|b| !b.is_signed() && b.undo());
                if !undone {
                    self.ask_retract();
                    return Vec::new();
                }
                Done::effects(day.keep_draft())
            }
            Command::Days => {
                let mut effects = day.keep_draft();
                effects.push(Effect::FlushDrafts);
                effects.push(Effect::ask(Request::Days));
                self.day = Err(Days::default());
                return effects;
            }
            Command::Accept if day.bench.as_ref().is_some_and(Bench::wants_history) => {
                self.ask_history();
                return Vec::new();
            }
            command if in_list => day.list_command(command, &self.session),
            command => day.bench_command(command, &self.session),
        };
        self.done(done)
    }

    fn run_elsewhere(&mut self, command: Command) -> Vec<Effect> {
        let by = match command {
            Command::ListUp => -1,
            Command::ListDown => 1,
            Command::PageUp => -10,
            Command::PageDown => 10,
            _ => 0,
        };
        let paging = matches!(command, Command::PageUp | Command::PageDown);
        match self.at {
            PlaceName::Children => match command {
                Command::Open => return self.children.open(),
                Command::EraseFind => return self.children.erase(),
                Command::ClearFind => self.children.clear(),
                _ if paging => self.children.scroll(by),
                _ => self.children.step(by),
            },
            PlaceName::Referrals if command == Command::Open => {
                let effects = self.referrals.open();
                if !effects.is_empty() {
                    self.at = PlaceName::Children;
                }
                return effects;
            }
            PlaceName::Referrals => self.referrals.step(by),
            PlaceName::Term => self.term.scroll(by),
            PlaceName::Rules => {
                let done = self.rules.command(command, by, paging);
                return self.done(done);
            }
            PlaceName::Day => {}
        }
        Vec::new()
    }

    // --- questions ---------------------------------------------------------------------------

    fn prompt_key(&mut self, key: Key) -> Vec<Effect> {
        let context = self.context();
        let command = keys::command(context, key);
        if command == Some(Command::Quit) {
            return self.leave();
        }
        if command == Some(Command::Cancel) {
            self.cancel();
            return Vec::new();
        }
        let Some(prompt) = &mut self.prompt else {
            return Vec::new();
        };
        match &mut prompt.body {
            Body::Choices(_) => self.choices_key(command, key),
            Body::Form(form) => {
                match command {
                    Some(Command::Submit) => {
                        if form.enter()
                            && let Some(prompt) = self.prompt.take()
                        {
                            return self.submitted(prompt);
                        }
                    }
                    Some(Command::FormNext) => form.step(1),
                    Some(Command::FormPrevious) => form.step(-1),
                    _ => {
                        if let Some(request) = edit_of(key) {
                            form.edit(request);
                        }
                        self.refresh_hints();
                    }
                }
                Vec::new()
            }
            Body::Signs(_) => self.signs_key(command),
            Body::Page(page) => {
                let by: isize = match command {
                    Some(Command::ListUp) => -1,
                    Some(Command::ListDown) => 1,
                    Some(Command::PageUp) => -10,
                    Some(Command::PageDown) => 10,
                    _ => 0,
                };
                page.top = page
                    .top
                    .saturating_add_signed(by)
                    .min(page.lines.len().saturating_sub(1));
                Vec::new()
            }
        }
    }

    fn cancel(&mut self) {
        let emergency = self
            .prompt
            .as_ref()
            .is_some_and(|p| p.ask == Ask::Emergency);
        self.prompt = None;
        if emergency {
            self.say(
                Tone::Attention,
                "the emergency is not saved yet: Ctrl-S saves it",
            );
        }
    }

    fn choices_key(&mut self, command: Option<Command>, key: Key) -> Vec<Effect> {
        let Some(Body::Choices(choices)) = self.prompt.as_mut().map(|p| &mut p.body) else {
            return Vec::new();
        };
        let word = match command {
            Some(Command::ChoiceUp) => {
                choices.step(-1);
                None
            }
            Some(Command::ChoiceDown) => {
                choices.at = if choices.at == usize::MAX {
                    0
                } else {
                    choices.at
                };
                choices.step(1);
                None
            }
            Some(Command::Scope) => {
                choices.scope = choices.scope.map(super::prompt::Scope::next);
                None
            }
            Some(Command::Choose) => choices.shown().get(choices.at).map(|c| c.word.clone()),
            _ => {
                if let Some(find) = &mut choices.find {
                    match key.typed() {
                        Some(c) => find.push(c),
                        None if key == Key::plain(crossterm::event::KeyCode::Backspace) => {
                            find.pop();
                        }
                        None => {}
                    }
                    choices.at = 0;
                    None
                } else {
                    key.typed().and_then(|c| {
                        choices
                            .items
                            .iter()
                            .find(|i| i.key == c)
                            .map(|i| i.word.clone())
                    })
                }
            }
        };
        match word {
            Some(word) => match self.prompt.take() {
                Some(prompt) => self.chosen(&prompt, &word),
                None => Vec::new(),
            },
            None => Vec::new(),
        }
    }

    fn signs_key(&mut self, command: Option<Command>) -> Vec<Effect> {
        use crate::domain::codes::{Side, SignKind};
        use crate::domain::readings::Sign;
        let Some(Body::Signs(signs)) = self.prompt.as_mut().map(|p| &mut p.body) else {
            return Vec::new();
        };
        let kind = App::sign_at(signs.at);
        let mark = |side: Option<Side>, signs: &mut crate::tui::prompt::SignMarks| {
            if let Some(kind) = kind {
                let same = signs.marked.iter().position(|s| s.kind == kind);
                let was = same.map(|i| signs.marked.remove(i));
                if side.is_some() || was.is_none() {
                    signs.marked.push(Sign { kind, side });
                    signs.marked.sort_unstable();
                }
            }
        };
        match command {
            Some(Command::ChoiceUp) => signs.at = signs.at.saturating_sub(1),
            Some(Command::ChoiceDown) => signs.at = (signs.at + 1).min(SignKind::ALL.len() - 1),
            Some(Command::Toggle) => mark(None, signs),
            Some(Command::SideRight) => mark(Some(Side::Right), signs),
            Some(Command::SideLeft) => mark(Some(Side::Left), signs),
            Some(Command::SideBoth) => mark(Some(Side::Both), signs),
            Some(Command::NoneSeen) => {
                self.prompt = None;
                return self.signs_chosen(&[]);
            }
            Some(Command::Submit) => {
                if signs.marked.is_empty() {
                    mark(None, signs);
                }
                let marked = signs.marked.clone();
                self.prompt = None;
                return self.signs_chosen(&marked);
            }
            _ => {}
        }
        Vec::new()
    }
}

/// Returns the edit of a key in a text field.
fn edit_of(key: Key) -> Option<InputRequest> {
    use crossterm::event::KeyCode as C;
    if let Some(c) = key.typed() {
        return (!crate::domain::text::is_unsafe(c)).then_some(InputRequest::InsertChar(c));
    }
    if key.ctrl && key.code == C::Char('u') {
        return Some(InputRequest::DeleteLine);
    }
    match key.code {
        C::Backspace => Some(InputRequest::DeletePrevChar),
        C::Delete => Some(InputRequest::DeleteNextChar),
        C::Left => Some(InputRequest::GoToPrevChar),
        C::Right => Some(InputRequest::GoToNextChar),
        C::Home => Some(InputRequest::GoToStart),
        C::End => Some(InputRequest::GoToEnd),
        _ => None,
    }
}
