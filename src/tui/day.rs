//! The Day place: who is to come on the left, one child on the bench on the right, the outcome
//! below.

mod answers;
pub mod bench;
pub mod bench_view;
pub mod doubt;
pub mod echo;
pub mod kind;
pub mod ladder;
pub mod path;
pub mod queue;
pub mod scan;
pub mod verdict;

use std::collections::{HashMap, HashSet};
use std::sync::Arc;

use ratatui::Frame;
use ratatui::layout::{Position, Rect};
use ratatui::text::Line;
use ratatui::widgets::Paragraph;
use uuid::Uuid;

use crate::actions::{DayChild, DayInfo};
use crate::domain::field::Field;
use crate::keys::Command;
use crate::tui::app::{Effect, Request, Session};
use crate::tui::day::bench::{Bench, State};
use crate::tui::day::kind::Kind;
use crate::tui::day::queue::{Queue, QueueMarks};
use crate::tui::day::scan::{Before, Scan};
use crate::tui::judging::Draft;
use crate::tui::text::name;

/// The screening day on the screen.
#[derive(Debug)]
pub struct Day {
    /// Site, date, protocol.
    pub info: Arc<DayInfo>,
    /// The children.
    pub queue: Queue,
    /// The child on the bench.
    pub bench: Option<Bench>,
    /// The last signature, which can be taken back: visit, child's id, child's name.
    pub last_signed: Option<(Uuid, String, String)>,
    list_focus: bool,
    drafts: HashMap<String, Draft>,
    draft_ids: HashSet<String>,
    saving: HashSet<String>,
    scan: Scan,
}

/// What came of something the day was asked to do.
#[derive(Debug, Default)]
pub struct Done {
    /// What is to be carried out.
    pub effects: Vec<Effect>,
    /// What is to be said, and whether it is a refusal.
    pub said: Option<(bool, String)>,
}

impl Done {
    /// Makes what came of it: only something to carry out.
    pub fn effects(effects: Vec<Effect>) -> Done {
        Done {
            effects,
            said: None,
        }
    }

    /// Makes what came of it: a refusal in words.
    pub fn refused(words: impl Into<String>) -> Done {
        Done {
            effects: Vec::new(),
            said: Some((true, words.into())),
        }
    }

    /// Makes what came of it: only words.
    pub fn said(words: impl Into<String>) -> Done {
        Done {
            effects: Vec::new(),
            said: Some((false, words.into())),
        }
    }
}

impl Day {
    /// Takes a day with its children and drafts; the first child to come is on the bench.
    pub fn new(
        session: &Session,
        info: Arc<DayInfo>,
        children: Vec<DayChild>,
        drafts: Vec<Draft>,
    ) -> (Day, Vec<Effect>) {
        let draft_ids = drafts.iter().map(|d| d.child_id.clone()).collect();
        let mut day = Day {
            info,
            queue: Queue::new(children),
            bench: None,
            last_signed: None,
            list_focus: true,
            drafts: drafts
                .into_iter()
                .map(|d| (d.child_id.clone(), d))
                .collect(),
            draft_ids,
            saving: HashSet::new(),
            scan: Scan::default(),
        };
        let first = day
            .queue
            .next_to_come("", &day.saving)
            .map(|c| c.child_id.clone());
        let effects = first.map_or_else(Vec::new, |id| day.bring(session, &id).effects);
        (day, effects)
    }

    /// Says whether the list has the focus.
    pub fn in_list(&self) -> bool {
        self.list_focus || self.bench.is_none()
    }

    /// Gives the focus to the list or the bench.
    pub fn focus_list(&mut self, list: bool) {
        self.list_focus = list;
    }

    /// Brings a child to the bench; what was entered for the one before stays as that child's draft.
    pub fn bring(&mut self, session: &Session, id: &str) -> Done {
        let Some(child) = self.queue.child(id).cloned() else {
            return Done::refused(format!(
                "no child of this day has the id {}",
                crate::tui::text::safe(id)
            ));
        };
        if self.saving.contains(&child.child_id) {
            return Done::refused(format!(
                "{} is still being saved",
                name(&child.family_name, &child.given_name)
            ));
        }
        if let Some(waiting) = self.unsaved_emergency(&child.child_id) {
            return Done::refused(waiting);
        }
        let mut effects = self.keep_draft();
        self.queue.select(&child.child_id);
        if child.state != crate::actions::QueueState::ToCome {
            effects.push(Effect::ask(Request::Visit(
                (*self.info).clone(),
                child.child_id.clone(),
            )));
        }
        let draft = self.drafts.get(&child.child_id);
        self.bench = Some(Bench::new(session, &self.info, child, draft));
        self.list_focus = false;
        Done::effects(effects)
    }

    /// Says in words that an emergency on the bench is not saved: no other child comes before it is.
    fn unsaved_emergency(&self, next: &str) -> Option<String> {
        let bench = self.bench.as_ref()?;
        let child = &bench.child;
        let open = !bench.is_signed() && !self.saving.contains(&child.child_id);
        (bench.is_emergency() && open && child.child_id != next).then(|| {
            let name = name(&child.family_name, &child.given_name);
            format!("an emergency of {name} is not saved: Ctrl-S saves it, F5 changes the signs")
        })
    }

    /// Keeps what stands on the bench as the child's draft.
    pub fn keep_draft(&mut self) -> Vec<Effect> {
        let Some(bench) = &self.bench else {
            return Vec::new();
        };
        let id = &bench.child.child_id;
        if bench.is_signed() || self.saving.contains(id) {
            return Vec::new();
        }
        if bench.is_blank() {
            self.draft_ids.remove(id);
            return match self.drafts.remove(id) {
                Some(draft) => vec![Effect::DropDraft(draft.day, draft.child_id)],
                None => Vec::new(),
            };
        }
        let draft = bench.draft();
        if self.drafts.get(id) == Some(&draft) {
            return Vec::new();
        }
        self.drafts.insert(id.clone(), draft.clone());
        self.draft_ids.insert(id.clone());
        vec![Effect::SaveDraft(draft)]
    }

    fn forget_draft(&mut self, id: &str) -> Vec<Effect> {
        self.draft_ids.remove(id);
        self.drafts.remove(id);
        vec![Effect::DropDraft(Arc::clone(&self.info), id.to_owned())]
    }

    // --- keys --------------------------------------------------------------------------------

    /// Takes a printable character: a find in the list, a value on the bench.
    pub fn type_char(&mut self, c: char, session: &Session) -> Done {
        if self.scan.begins(session.now_ms) {
            let before = Before {
                bench: self.bench.as_ref().map(Bench::checkpoint),
                find: self.queue.find().to_owned(),
            };
            self.scan.begin(before);
        }
        self.scan.take(c, session.now_ms);
        if self.in_list() {
            let find = format!("{}{c}", self.queue.find());
            self.queue.seek(find.trim_start().to_owned());
            return Done::default();
        }
        let Some(bench) = &mut self.bench else {
            return Done::default();
        };
        if bench.is_signed() {
            return Done::refused("this visit is signed: Ctrl-E corrects a value, with the reason");
        }
        let taken = bench.type_char(c);
        let refused = (!taken && c.is_ascii_digit()).then(|| bench.no_number_here());
        Done {
            effects: self.keep_draft(),
            said: refused.map(|words| (true, words)),
        }
    }

    /// Takes a pasted text as one edit.
    pub fn paste(&mut self, text: &str) -> Done {
        self.scan.forget();
        let line: String = text.split(['\r', '\n']).next().unwrap_or("").to_owned();
        if self.in_list() {
            let find = format!("{}{}", self.queue.find(), crate::tui::text::safe(&line));
            self.queue.seek(find);
            return Done::default();
        }
        if let Some(bench) = self.bench.as_mut().filter(|b| !b.is_signed()) {
            bench.insert(&line);
        }
        Done::effects(self.keep_draft())
    }

    /// Forgets a burst of characters: another key was pressed.
    pub fn end_burst(&mut self) {
        self.scan.forget();
    }

    /// Takes an Enter that ends a scan; nothing when it was an ordinary Enter.
    pub fn scanned(&mut self, session: &Session) -> Option<Done> {
        let burst = self.scan.end(session.now_ms);
        let known = |day: &Day, text: &str| {
            scan::id_of(text, session)
                .and_then(|id| day.queue.child(id))
                .map(|c| c.child_id.clone())
        };
        if let Some((text, before)) = burst {
            if let Some(id) = known(self, &text) {
                self.take_back(before);
                return Some(self.bring(session, &id));
            }
            let strange = !self.in_list()
                && scan::looks_like_an_id(&text)
                && self
                    .focused_state()
                    .is_none_or(|s| matches!(s, State::Invalid { .. }));
            if strange && scan::id_of(&text, session).is_some() {
                self.take_back(before);
                let mut done = Done::refused(format!(
                    "“{}” is no value of this field and no id of this day; nothing was changed",
                    crate::domain::text::shown(&text, 40)
                ));
                done.effects = self.keep_draft();
                return Some(done);
            }
        }
        if self.in_list() {
            let id = known(self, self.queue.find())?;
            return Some(self.bring(session, &id));
        }
        // Typed by hand: the whole field is an id.
        let bench = self.bench.as_mut()?;
        let field = bench.field()?;
        if !matches!(bench.state(field), State::Invalid { .. }) {
            return None;
        }
        let raw = bench.raw(field).to_owned();
        let id = known(self, &raw)?;
        if let Some(bench) = &mut self.bench {
            bench.put(field, "");
        }
        Some(self.bring(session, &id))
    }

    fn focused_state(&self) -> Option<&State> {
        let bench = self.bench.as_ref()?;
        let field = bench.field()?;
        matches!(kind::kind(field), Kind::Acuity | Kind::Text).then(|| bench.state(field))
    }

    fn take_back(&mut self, before: Before) {
        if let (Some(bench), Some(checkpoint)) = (&mut self.bench, before.bench) {
            bench.restore(checkpoint);
        }
        if self.queue.find() != before.find {
            self.queue.seek(before.find);
        }
    }

    /// Carries out a command of the list.
    pub fn list_command(&mut self, command: Command, session: &Session) -> Done {
        match command {
            Command::ListUp => self.queue.step(-1),
            Command::ListDown => self.queue.step(1),
            Command::PageUp => self.queue.step(-15),
            Command::PageDown => self.queue.step(15),
            Command::First => self.queue.jump(false),
            Command::Last => self.queue.jump(true),
            Command::EraseFind => {
                let mut find = self.queue.find().to_owned();
                find.pop();
                self.queue.seek(find);
            }
            Command::ClearFind => {
                if self.queue.find().is_empty() {
                    self.list_focus = self.bench.is_none();
                } else {
                    self.queue.end_find();
                }
            }
            Command::ToBench => self.list_focus = false,
            Command::Open => {
                return match self.queue.selected().map(|c| c.child_id.clone()) {
                    Some(id) => self.bring(session, &id),
                    None => Done::refused("no child is under the cursor"),
                };
            }
            _ => {}
        }
        Done::default()
    }

    /// Carries out a command of the bench.
    pub fn bench_command(&mut self, command: Command, session: &Session) -> Done {
        let Some(bench) = &mut self.bench else {
            return Done::default();
        };
        let edits = matches!(command, Command::Erase | Command::ClearField);
        if edits && bench.is_signed() {
            return Done::refused("this visit is signed: Ctrl-E corrects a value, with the reason");
        }
        match command {
            Command::Accept => return self.accept(session),
            Command::NextField => bench.forward(),
            Command::PreviousField => bench.back(),
            // Nothing of a signed visit is typed over: the arrows go through its rows.
            Command::Better if bench.is_signed() => bench.back(),
            Command::Worse if bench.is_signed() => bench.forward(),
            Command::Better => bench.step(true),
            Command::Worse => bench.step(false),
            Command::OtherEyeLeft => bench.across(false),
            Command::OtherEyeRight => bench.across(true),
            Command::Erase => bench.erase(),
            Command::ClearField => bench.clear_field(),
            Command::ToList => {
                self.list_focus = true;
                let mut effects = self.keep_draft();
                effects.push(Effect::FlushDrafts);
                return Done::effects(effects);
            }
            _ => {}
        }
        Done::effects(self.keep_draft())
    }

    fn accept(&mut self, session: &Session) -> Done {
        let Some(bench) = &mut self.bench else {
            return Done::default();
        };
        match bench.field() {
            None if bench.is_signed() => self.next_child(session),
            None => self.sign(session),
            Some(field) => {
                if !matches!(bench.state(field), State::Invalid { .. }) && !bench.asks() {
                    bench.advance();
                }
                Done::effects(self.keep_draft())
            }
        }
    }

    /// Brings the next child to come.
    pub fn next_child(&mut self, session: &Session) -> Done {
        let after = self
            .bench
            .as_ref()
            .map_or(String::new(), |b| b.child.child_id.clone());
        match self
            .queue
            .next_to_come(&after, &self.saving)
            .map(|c| c.child_id.clone())
        {
            Some(id) => self.bring(session, &id),
            None => Done::said(match self.queue.second_tries() {
                0 => "nobody is left to come".to_owned(),
                1 => "nobody is left to come; one child waits for a second try".to_owned(),
                n => format!("nobody is left to come; {n} wait for a second try"),
            }),
        }
    }

    /// Signs the visit on the bench and brings the next child; the draft stays until the store has
    /// confirmed.
    pub fn sign(&mut self, session: &Session) -> Done {
        if let Some(holder) = &session.read_only {
            return Done::refused(format!(
                "nothing can be signed: this store is open for reading only ({holder})"
            ));
        }
        let Some(bench) = &mut self.bench else {
            return Done::refused("no child is on the bench");
        };
        if bench.is_signed() {
            return Done::refused("this visit is signed already");
        }
        if bench.asks() {
            return Done::effects(self.keep_draft());
        }
        let request = match bench.to_sign() {
            Ok(request) => request,
            Err((field, words)) => {
                if let Some(field) = field {
                    bench.go_to(field);
                }
                return Done::refused(words);
            }
        };
        let id = request.child_id.clone();
        let mut effects = self.keep_draft();
        self.saving.insert(id.clone());
        effects.push(Effect::ask(Request::Sign(request)));
        let next = self.queue.next_to_come(&id, &self.saving);
        if let Some(next) = next.map(|c| c.child_id.clone()) {
            effects.extend(self.bring(session, &next).effects);
        } else {
            self.bench = None;
            self.list_focus = true;
        }
        Done {
            effects,
            said: None,
        }
    }

    /// Moves what was entered, but not signed, to another child.
    pub fn move_draft(&mut self, session: &Session, to: &str) -> Done {
        let Some(bench) = &mut self.bench else {
            return Done::default();
        };
        let entered = bench.entered();
        let from = bench.child.child_id.clone();
        bench.take_over(Vec::new());
        let mut effects = self.forget_draft(&from);
        let done = self.bring(session, to);
        effects.extend(done.effects);
        if let Some(bench) = &mut self.bench
            && !bench.is_signed()
        {
            bench.take_over(entered);
        }
        effects.extend(self.keep_draft());
        Done {
            effects,
            said: Some((false, "moved; nothing is signed yet".into())),
        }
    }

    /// Brings another test to the bench.
    pub fn open_test(&mut self, group: path::Group) {
        if let Some(bench) = &mut self.bench {
            bench.open(group);
            self.list_focus = false;
        }
    }

    /// Begins another try of the child on the bench, or the part that nobody has signed.
    pub fn second_try(&mut self, session: &Session) -> Done {
        match &mut self.bench {
            Some(bench) if bench.may_try_again() => {
                bench.try_again((session.new_id)(), None);
                self.list_focus = false;
                Done::said("another try of the same visit; the one before stays")
            }
            Some(bench) if bench.is_signed() && bench.may_add_part() => {
                bench.begin_part((session.new_id)(), None);
                self.list_focus = false;
                Done::said("a further part of the same visit; what is signed stays")
            }
            _ => Done::refused(
                "another try is for a signed child who was not testable, a further part for one of \
                 whom no test is signed",
            ),
        }
    }

    /// Swaps right and left on the bench.
    pub fn swap(&mut self) -> Done {
        let groups = self.bench.as_mut().map(Bench::swap).unwrap_or_default();
        let said = if groups.is_empty() {
            (true, "there is nothing to swap yet".to_owned())
        } else {
            (
                false,
                "right eye and left eye swapped; Ctrl-Z swaps them back".to_owned(),
            )
        };
        Done {
            effects: self.keep_draft(),
            said: Some(said),
        }
    }

    /// Sets a field of the bench from a question, as one edit.
    pub fn put(&mut self, field: Field, text: &str) -> Vec<Effect> {
        if let Some(bench) = &mut self.bench {
            bench.put(field, text);
        }
        self.keep_draft()
    }

    // --- drawing -----------------------------------------------------------------------------

    /// Returns what the list shows beside its own content. At a masked station no outcome of another
    /// station's part is told.
    pub fn marks(&self, session: &Session) -> QueueMarks<'_> {
        QueueMarks {
            on_bench: self.bench.as_ref().map(|b| b.child.child_id.as_str()),
            drafts: &self.draft_ids,
            saving: &self.saving,
            focused: self.in_list(),
            discreet: session.discreet || session.role.masked,
        }
    }

    /// Draws list and bench; returns where the cursor belongs.
    pub fn draw(&self, frame: &mut Frame<'_>, area: Rect, session: &Session) -> Position {
        let theme = session.theme;
        let list_width = (area.width * 3 / 10).clamp(26.min(area.width), 44);
        let list = Rect {
            width: list_width,
            ..area
        };
        let rule = Rect {
            x: area.x + list_width,
            width: 1.min(area.width - list_width),
            ..area
        };
        let bench_area = Rect {
            x: rule.x + rule.width,
            width: area.width - list_width - rule.width,
            ..area
        };
        let (x, y) = queue::draw(frame, list, &self.queue, self.marks(session), theme);
        let bar: Vec<Line<'_>> = (0..area.height)
            .map(|_| Line::styled("│", theme.muted()))
            .collect();
        frame.render_widget(Paragraph::new(bar), rule);
        let bench_cursor = if let Some(bench) = &self.bench {
            bench_view::draw(frame, bench_area, bench, session, !self.in_list())
        } else {
            draw_nobody(frame, bench_area, session);
            Position::new(bench_area.x, bench_area.y)
        };
        if self.in_list() {
            Position::new(x, y)
        } else {
            bench_cursor
        }
    }
}

fn draw_nobody(frame: &mut Frame<'_>, area: Rect, session: &Session) {
    let words = vec![
        Line::default(),
        Line::styled("  Nobody is on the bench.", session.theme.strong()),
        Line::default(),
        Line::raw("  Type a name or an id to find a child, or scan the id."),
        Line::raw("  Alt-l lists those who are done as well."),
    ];
    frame.render_widget(Paragraph::new(words), area);
}
