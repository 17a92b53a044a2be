//! The state of the screens, and the messages that change it.
//!
//! A key press becomes a [`Message`]; [`App::update`] changes the state and returns [`Effect`]s,
//! without any I/O; the run loop carries the effects out and brings the answers back as messages.

use std::collections::VecDeque;
use std::sync::Arc;

use chrono::NaiveDate;
use uuid::Uuid;

use crate::actions::{
    ChildHistory, DayChild, DayInfo, FoundChild, NewChild, NewDay, OpenUrgent, SignRequest, Signed,
    StationChange, StationRole, UrgentAnswer, ValueEntry, VisitView, Worklist,
};
use crate::domain::acuity::Notation;
use crate::domain::field::Field;
use crate::keys::{Context, Key};
use crate::tui::board::BoardPage;
use crate::tui::children::Children;
use crate::tui::day::Day;
use crate::tui::days::Days;
use crate::tui::gate::{Lock, Typed};
use crate::tui::judging::{Draft, Library};
use crate::tui::prompt::Prompt;
use crate::tui::referrals::Referrals;
use crate::tui::rules::Rules;
use crate::tui::tables::Table;
use crate::tui::theme::Theme;
use crate::tui::tour::Tour;
use crate::tui::waiting::Asked;

/// What stays the same while the screens are open, and the clock.
#[derive(Debug, Clone)]
pub struct Session {
    /// Name of the programme.
    pub programme: String,
    /// What this station is set to.
    pub role: StationRole,
    /// Whether outcomes, reasons and notes are kept off the screen until asked for.
    pub discreet: bool,
    /// Whether the data are invented.
    pub demo: bool,
    /// Who holds the store, when it can only be read.
    pub read_only: Option<String>,
    /// What a bare number means.
    pub notation: Notation,
    /// What a scanner puts before an id.
    pub scan_prefix: Option<String>,
    /// Who is recording.
    pub screener: Option<String>,
    /// Who could be.
    pub screeners: Vec<String>,
    /// Sites as (code, name).
    pub sites: Vec<(String, String)>,
    /// The civil date.
    pub today: NaiveDate,
    /// The rules.
    pub library: Arc<Library>,
    /// Triage sets whose bands are shown.
    pub triage: Vec<String>,
    /// Styles.
    pub theme: Theme,
    /// Whether colors may be used at all.
    pub color: bool,
    /// Minutes without a key after which the screen is locked; 0 never.
    pub idle_minutes: u32,
    /// Makes the id of a visit.
    pub new_id: fn() -> Uuid,
    /// The clock on the wall in milliseconds since 1970, as of the last message.
    pub now_ms: i64,
    /// Minutes east of UTC.
    pub offset_minutes: i32,
}

/// Which place is shown.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum PlaceName {
    /// The screening day.
    Day,
    /// Every child.
    Children,
    /// Open referrals.
    Referrals,
    /// The term in figures.
    Term,
    /// Rule sets.
    Rules,
}

impl PlaceName {
    /// Every place in the order of the heading.
    pub const ALL: [PlaceName; 5] = [
        PlaceName::Day,
        PlaceName::Children,
        PlaceName::Referrals,
        PlaceName::Term,
        PlaceName::Rules,
    ];

    /// Returns the name on the screen.
    pub fn title(self) -> &'static str {
        match self {
            PlaceName::Day => "Day",
            PlaceName::Children => "Children",
            PlaceName::Referrals => "Referrals",
            PlaceName::Term => "Term",
            PlaceName::Rules => "Rules",
        }
    }
}

/// How loud a notice is.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Tone {
    /// Good to know.
    Quiet,
    /// Look at it.
    Attention,
    /// Something was not done.
    Error,
}

/// What the program last said.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Notice {
    /// How loud.
    pub tone: Tone,
    /// The words.
    pub text: String,
    /// What helps, empty if nothing is known.
    pub hint: String,
}

/// Everything the screens know.
#[derive(Debug)]
pub struct App {
    /// What stays the same, and the clock.
    pub session: Session,
    /// The place that is shown.
    pub at: PlaceName,
    /// The screening day, or the list of days while none is open.
    pub day: Result<Day, Days>,
    /// The day board.
    pub board: BoardPage,
    /// Every child.
    pub children: Children,
    /// Referrals.
    pub referrals: Referrals,
    /// Term.
    pub term: Table,
    /// Rule sets.
    pub rules: Rules,
    /// The question on the screen.
    pub prompt: Option<Prompt>,
    /// What was last said.
    pub notice: Option<Notice>,
    /// Emergencies that wait for the word who was told.
    pub urgent: Vec<OpenUrgent>,
    /// Whether everything is shown as plain lines for a screen reader.
    pub linear: bool,
    /// The lock, and what opens it.
    pub lock: Lock,
    /// The tour, where somebody takes it.
    pub tour: Option<Tour>,
    /// What the store was asked and has not answered, in that order.
    pub(crate) asked: VecDeque<Asked>,
}

/// Something that happened.
#[derive(Debug)]
pub enum Message {
    /// A key was pressed.
    Key(Key),
    /// Text was pasted: one edit, never a submit.
    Paste(String),
    /// The clock moved on.
    Tick,
    /// The store answered.
    Answer(Answer),
    /// A signal asks to leave.
    Leave,
    /// A signal asks to give the terminal back.
    Suspend,
}

/// What the run loop carries out.
#[derive(Debug, Clone, PartialEq)]
pub enum Effect {
    /// Asks the store.
    Ask(Box<Request>),
    /// Saves a draft, soon.
    SaveDraft(Draft),
    /// Writes all drafts now.
    FlushDrafts,
    /// Deletes the draft of a day and a child.
    DropDraft(Arc<DayInfo>, String),
    /// Draws the whole screen anew.
    Redraw,
    /// Gives the terminal back until the program is woken.
    Suspend,
    /// Leaves.
    Quit,
}

/// A question to the store thread; each is one action.
#[derive(Debug, Clone, PartialEq)]
pub enum Request {
    /// The list of days, and what is urgent.
    Days,
    /// Opens a new day.
    NewDay(NewDay),
    /// The children and drafts of a day.
    LoadDay(DayInfo),
    /// The board of a day.
    Board(DayInfo),
    /// Signs a visit.
    Sign(SignRequest),
    /// The signed visit of a child.
    Visit(DayInfo, String),
    /// Corrects values of a visit.
    Correct(Uuid, Vec<(Field, String)>, String),
    /// Moves a visit to another child.
    MoveVisit(Uuid, String, String),
    /// Takes a visit back.
    Retract(Uuid, String),
    /// Adds a child.
    AddChild(NewChild, DayInfo),
    /// Enters what was done about an urgent finding.
    Told(UrgentAnswer),
    /// What is urgent.
    Urgent,
    /// Finds children.
    Find(String),
    /// The history of a child.
    History(String),
    /// The referrals as a worklist.
    Referrals,
    /// The term as a table.
    Term,
    /// Two rule sets on the children of this term.
    Compare(String, String),
    /// Changes who is recording.
    Screener(String),
    /// Changes what this station is set to.
    SetStation(StationChange),
    /// Everything that was ever recorded of a field of a visit.
    ValueHistory(Uuid, Field),
    /// Checks a passphrase at the lock.
    Unlock(Typed),
    /// Keeps a preference of this installation: its name and its value.
    Prefer(&'static str, String),
    /// Settles a value that differs between the parts of a visit, with the reason.
    Settle(Uuid, Field, String, String),
}

/// Why something could not be done.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Refused {
    /// What happened.
    pub message: String,
    /// What helps, empty if nothing is known.
    pub hint: String,
}

/// What the store thread answers.
#[derive(Debug)]
pub enum Answer {
    /// The list of days.
    Days(Vec<DayInfo>),
    /// A day with its children and drafts.
    Day(Arc<DayInfo>, Vec<DayChild>, Vec<Draft>),
    /// The board of a day.
    Board(Box<crate::actions::board::Board>),
    /// A visit was signed.
    Signed(Box<Signed>),
    /// A visit was not signed; its draft stays.
    NotSigned(String, Refused),
    /// The signed visit of a child.
    Visit(String, Option<Box<VisitView>>),
    /// A visit was corrected.
    Corrected(Box<Signed>),
    /// A visit was moved: the new one, and the child it came from.
    Moved(Box<Signed>, Box<DayChild>),
    /// A visit was taken back.
    Retracted(Box<DayChild>),
    /// A child was added.
    Added(Box<DayChild>),
    /// What is urgent.
    Urgent(Vec<OpenUrgent>),
    /// It is entered who was told of the emergency of a visit; what is urgent still.
    Told(Uuid, Vec<OpenUrgent>),
    /// Children found for a text.
    Found(String, Vec<FoundChild>),
    /// A child's history.
    History(Option<Box<ChildHistory>>),
    /// The referrals.
    Referrals(Box<Worklist>),
    /// The term.
    Term(Vec<Vec<String>>),
    /// Two rule sets on the children of a term.
    Compared(Box<crate::tui::rules::Compared>),
    /// Who is recording now.
    Screener(String),
    /// What this station is set to now.
    Station(Box<StationRole>),
    /// Everything that was ever recorded of a field of a visit.
    ValueHistory(Field, Vec<ValueEntry>),
    /// The passphrase opens the lock, or why not.
    Unlocked(Option<String>),
    /// A preference is kept: its name and its value.
    Preferred(&'static str, String),
    /// Drafts could not be written.
    DraftsNotWritten(Refused),
    /// Something could not be done.
    Refused(Refused),
}

impl Request {
    /// Says whether the store is to write something, which leaving must not lose.
    pub fn writes(&self) -> bool {
        match self {
            Request::NewDay(_)
            | Request::Sign(_)
            | Request::Correct(..)
            | Request::MoveVisit(..)
            | Request::Retract(..)
            | Request::AddChild(..)
            | Request::Told(_)
            | Request::Screener(_)
            | Request::SetStation(_)
            | Request::Prefer(..)
            | Request::Settle(..) => true,
            Request::Days
            | Request::LoadDay(_)
            | Request::Board(_)
            | Request::Visit(..)
            | Request::Urgent
            | Request::Find(_)
            | Request::History(_)
            | Request::Referrals
            | Request::Term
            | Request::Compare(..)
            | Request::ValueHistory(..)
            | Request::Unlock(_) => false,
        }
    }
}

impl Effect {
    /// Makes the effect that asks the store.
    pub fn ask(request: Request) -> Effect {
        Effect::Ask(Box::new(request))
    }
}

impl App {
    /// Makes the screens, with the list of days to begin with.
    pub fn new(session: Session, days: Vec<DayInfo>, urgent: Vec<OpenUrgent>) -> App {
        let rules = Rules::new(&session.library);
        App {
            at: PlaceName::Day,
            day: Err(Days::new(days)),
            board: BoardPage::default(),
            children: Children::default(),
            referrals: Referrals::default(),
            term: Table::default(),
            rules,
            prompt: None,
            notice: None,
            urgent,
            linear: false,
            lock: Lock::open(session.now_ms),
            tour: None,
            asked: VecDeque::new(),
            session,
        }
    }

    /// Returns what to ask first: today's day if there is one and only one.
    ///
    /// Who is recording is asked once, where it is not known.
    pub fn start(&mut self) -> Vec<Effect> {
        if self.session.screener.is_none() && !self.session.screeners.is_empty() {
            self.ask_screener();
        }
        match &self.day {
            Err(days) => days
                .of_today(self.session.today)
                .map(|day| vec![Effect::ask(Request::LoadDay(day))])
                .unwrap_or_default(),
            Ok(_) => Vec::new(),
        }
    }

    /// Returns the context of the next key.
    pub fn context(&self) -> Context {
        if self.lock.stands() {
            return Context::Locked;
        }
        if let Some(prompt) = &self.prompt {
            return prompt.context();
        }
        match (self.at, &self.day) {
            (PlaceName::Day, Err(_)) => Context::Days,
            (PlaceName::Day, Ok(_)) if self.board.is_shown() => Context::Board,
            (PlaceName::Day, Ok(day)) if day.in_list() => Context::List,
            (PlaceName::Day, Ok(_)) => Context::Bench,
            (PlaceName::Children, _) => Context::Children,
            (PlaceName::Referrals, _) => Context::Referrals,
            (PlaceName::Term, _) => Context::Tables,
            (PlaceName::Rules, _) => self.rules.context(),
        }
    }

    /// Returns the day if one is open.
    pub fn open_day(&mut self) -> Option<&mut Day> {
        self.day.as_mut().ok()
    }

    /// Says something.
    pub fn say(&mut self, tone: Tone, text: impl Into<String>) {
        self.notice = Some(Notice {
            tone,
            text: text.into(),
            hint: String::new(),
        });
    }

    /// Says that something was not done, with what helps.
    pub fn refuse(&mut self, refused: Refused) {
        self.notice = Some(Notice {
            tone: Tone::Error,
            text: refused.message,
            hint: refused.hint,
        });
    }
}
