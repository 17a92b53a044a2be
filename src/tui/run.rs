//! The run loop: the terminal, its events, the signals, and the thread that owns the store.
//!
//! The terminal is given back after an error and after a panic; a panic message is shown only then.

use std::io::{self, Stdout};
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::mpsc::{Receiver, Sender, channel};
use std::thread;
use std::time::Duration;

use crossterm::event::{
    DisableBracketedPaste, EnableBracketedPaste, Event, KeyEventKind, poll, read,
};
use crossterm::execute;
use crossterm::terminal::{
    EnterAlternateScreen, LeaveAlternateScreen, disable_raw_mode, enable_raw_mode,
};
use ratatui::Terminal;
use ratatui::backend::{Backend, CrosstermBackend};

use super::watch::Watch;
use crate::actions::Desk;
use crate::clock;
use crate::keys::Key;
use crate::tui::app::{Answer, App, Effect, Message, Request};
use crate::tui::desk::{Clerk, Keeper, session};
use crate::tui::theme::{Theme, ThemeName};

/// How the screens are shown.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Options {
    /// Whether colors are used; `NO_COLOR`, or a terminal without colors, turns them off.
    pub color: bool,
    /// The theme, where another than the kept one is wanted.
    pub theme: Option<ThemeName>,
    /// Whether everything is shown as plain lines for a screen reader.
    pub linear: bool,
    /// Whether the tour of the demo begins.
    pub tour: bool,
}

impl Default for Options {
    fn default() -> Self {
        let asked_not_to = std::env::var_os("NO_COLOR").is_some_and(|v| !v.is_empty());
        let cannot = std::env::var("TERM").is_ok_and(|term| {
            ["dumb", "vt100", "vt102", "vt220", "xterm-mono"].contains(&term.as_str())
        });
        Options {
            color: !asked_not_to && !cannot,
            theme: None,
            linear: false,
            tour: false,
        }
    }
}

/// Why the screens ended.
#[derive(Debug, thiserror::Error)]
pub enum Error {
    /// The terminal could not be read or written.
    #[error("terminal: {0}")]
    Terminal(#[from] io::Error),
    /// The store could not be read.
    #[error("{0}")]
    Store(#[from] crate::actions::ActionError),
    /// The thread that owns the store has ended.
    #[error("the store's thread has ended; what was signed is saved, what was typed is a draft")]
    Gone,
    /// Something asked just before leaving was refused.
    #[error("not done when the screens were left: {0}")]
    NotDone(String),
}

/// Longest wait for a key before the clock and the answers are looked at.
const PAUSE: Duration = Duration::from_millis(250);

/// Shortest wait, while an answer is on its way.
const BRIEF: Duration = Duration::from_millis(8);

/// Runs the screens until the person leaves.
pub fn run(desk: Desk, options: Options) -> Result<(), Error> {
    let now = clock::now();
    let mut app = session(&desk, options.color, now.utc_ms, now.offset_minutes)?;
    if let Some(theme) = options.theme.filter(|_| options.color) {
        app.session.theme = Theme::named(theme);
    }
    app.linear = options.linear;
    if options.tour {
        app.begin_tour();
    }
    let (to_store, jobs) = channel();
    let (answers, from_store) = channel();
    let leaving = Arc::new(AtomicBool::new(false));
    let clerk = Clerk::new(desk);
    let keeper = clerk.keeper();
    if let Some(refused) = keeper.refusal() {
        app.refuse(refused);
    }
    let store = thread::Builder::new().name("store".into()).spawn({
        let leaving = Arc::clone(&leaving);
        move || serve(clerk, &jobs, &answers, &leaving)
    })?;
    let signals = Signals::default();
    let mut handlers = Vec::new();
    for signal in [
        signal_hook::consts::SIGTERM,
        signal_hook::consts::SIGHUP,
        signal_hook::consts::SIGINT,
    ] {
        handlers.push(signal_hook::flag::register(
            signal,
            Arc::clone(&signals.leave),
        )?);
    }
    handlers.push(signal_hook::flag::register(
        signal_hook::consts::SIGTSTP,
        Arc::clone(&signals.suspend),
    )?);
    let watch = Watch::begin(keeper.clone(), Arc::clone(&signals.leave))?;
    let result = Screen::open().and_then(|mut screen| {
        let mut wires = Wires {
            to_store: to_store.clone(),
            from_store: &from_store,
            keeper,
            waiting: 0,
        };
        let result = event_loop(&mut app, &mut screen, &mut wires, &signals);
        if result.is_err() {
            // Whatever happened, what was typed is kept.
            let effects = app.update(Message::Leave);
            let _ = wires.carry_out(effects);
        }
        result
    });
    drop(watch);
    for handler in handlers {
        signal_hook::low_level::unregister(handler);
    }
    leaving.store(true, Ordering::Relaxed);
    drop(to_store);
    // Everything already asked is written, and every draft, before the program ends.
    store.join().map_err(|_| Error::Gone)?;
    let unseen = unseen(&from_store);
    match result {
        Ok(()) if !unseen.is_empty() => Err(Error::NotDone(unseen.join("; "))),
        result => result,
    }
}

/// What signals ask for.
#[derive(Debug, Default)]
struct Signals {
    leave: Arc<AtomicBool>,
    suspend: Arc<AtomicBool>,
}

/// Something for the store's thread.
enum Job {
    Ask(Box<Request>),
    Flush,
}

/// Does every job until no more can come. When the screens leave, reads are left out; whatever is to
/// be written is still written, and so is every draft.
fn serve(mut clerk: Clerk, jobs: &Receiver<Job>, answers: &Sender<Answer>, leaving: &AtomicBool) {
    let keeper = clerk.keeper();
    let flush = || keeper.flush().map_err(Answer::DraftsNotWritten).err();
    while let Ok(job) = jobs.recv() {
        let answer = match job {
            Job::Ask(request) if leaving.load(Ordering::Relaxed) && !request.writes() => None,
            Job::Ask(request) => Some(clerk.answer(*request)),
            Job::Flush => flush(),
        };
        // Nobody listens any more only when the program ends by a fault: what was asked is done.
        let _ = answer.map(|answer| answers.send(answer));
    }
    let _ = flush().map(|answer| answers.send(answer));
}

/// Returns what the store refused and nobody saw any more.
fn unseen(from_store: &Receiver<Answer>) -> Vec<String> {
    from_store
        .try_iter()
        .filter_map(|answer| match answer {
            Answer::NotSigned(child, refused) => {
                let child = crate::tui::text::safe(&child);
                Some(format!(
                    "{child}: not confirmed, the draft is kept. {}",
                    refused.message
                ))
            }
            Answer::Refused(refused) | Answer::DraftsNotWritten(refused) => Some(refused.message),
            _ => None,
        })
        .collect()
}

/// The channels to the store's thread.
struct Wires<'a> {
    to_store: Sender<Job>,
    from_store: &'a Receiver<Answer>,
    keeper: Keeper,
    waiting: usize,
}

impl Wires<'_> {
    /// Carries effects out; says whether the program is to suspend or to end.
    fn carry_out(&mut self, effects: Vec<Effect>) -> Result<Next, Error> {
        let mut next = Next::GoOn;
        for effect in effects {
            let job = match effect {
                Effect::Ask(request) => {
                    self.waiting += 1;
                    Job::Ask(request)
                }
                Effect::SaveDraft(draft) => {
                    self.keeper.save(draft, clock::now().utc_ms);
                    continue;
                }
                Effect::DropDraft(day, child) => {
                    self.keeper.drop_draft(&day, &child);
                    continue;
                }
                Effect::FlushDrafts => Job::Flush,
                Effect::Redraw => {
                    next = Next::Redraw;
                    continue;
                }
                Effect::Suspend => {
                    next = Next::Suspend;
                    continue;
                }
                Effect::Quit => {
                    next = Next::End;
                    continue;
                }
            };
            self.to_store.send(job).map_err(|_| Error::Gone)?;
        }
        Ok(next)
    }

    fn answers(&mut self) -> Vec<Message> {
        let answers: Vec<Message> = self.from_store.try_iter().map(Message::Answer).collect();
        self.waiting = self.waiting.saturating_sub(answers.len());
        answers
    }
}

#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Next {
    GoOn,
    Suspend,
    Redraw,
    End,
}

fn event_loop(
    app: &mut App,
    screen: &mut Screen,
    wires: &mut Wires<'_>,
    signals: &Signals,
) -> Result<(), Error> {
    wires.carry_out(app.start())?;
    let mut place = app.at;
    let mut stale = true;
    loop {
        // Terminals do not agree on the width of some scripts; a new place starts on a clean screen.
        if place != app.at {
            place = app.at;
            screen.redraw()?;
        }
        if stale {
            screen.terminal.draw(|frame| app.draw(frame))?;
        }
        let mut messages = Vec::new();
        let pause = if wires.waiting > 0 { BRIEF } else { PAUSE };
        if poll(pause)? {
            // Whatever has been typed meanwhile is taken before the next frame.
            while messages.len() < 64 && poll(Duration::ZERO)? {
                messages.extend(message_of(read()?));
            }
        }
        messages.extend(wires.answers());
        if signals.leave.load(Ordering::Relaxed) {
            messages.push(Message::Leave);
        }
        if signals.suspend.swap(false, Ordering::Relaxed) {
            messages.push(Message::Suspend);
        }
        let now = clock::now();
        // The running line of an emergency and a slow disk count seconds, the clock at the foot
        // minutes.
        // A screen reader would speak each second.
        let counts = !app.linear && (!app.urgent.is_empty() || app.is_waiting());
        let tick = if counts { 1_000 } else { 60_000 };
        stale = !messages.is_empty() || now.utc_ms / tick != app.session.now_ms / tick;
        app.session.now_ms = now.utc_ms;
        app.session.offset_minutes = now.offset_minutes;
        stale |= app.is_idle();
        for message in messages.into_iter().chain([Message::Tick]) {
            match wires.carry_out(app.update(message))? {
                Next::GoOn => {}
                Next::Suspend => {
                    // Every thread stands still then: what was typed is written before. What went
                    // wrong is told by the flush that the lock asked for.
                    let _ = wires.keeper.flush();
                    screen.suspend()?;
                }
                Next::Redraw => screen.redraw()?,
                Next::End => return Ok(()),
            }
        }
    }
}

/// Returns the message of a terminal event; releases and repeats of the release kind are none.
fn message_of(event: Event) -> Option<Message> {
    match event {
        Event::Key(key) if key.kind != KeyEventKind::Release => Some(Message::Key(Key::of(&key))),
        Event::Paste(text) => Some(Message::Paste(text)),
        Event::Resize(_, _) => Some(Message::Tick),
        _ => None,
    }
}

/// The terminal while it is ours; dropping it gives it back.
struct Screen {
    terminal: Terminal<CrosstermBackend<Stdout>>,
}

impl Screen {
    fn open() -> Result<Screen, Error> {
        let before = std::panic::take_hook();
        std::panic::set_hook(Box::new(move |info| {
            let _ = give_back();
            before(info);
        }));
        take()?;
        let mut screen = Screen {
            terminal: Terminal::new(CrosstermBackend::new(io::stdout()))?,
        };
        screen.redraw()?;
        Ok(screen)
    }

    fn suspend(&mut self) -> Result<(), Error> {
        give_back()?;
        signal_hook::low_level::emulate_default_handler(signal_hook::consts::SIGTSTP)?;
        take()?;
        self.redraw()
    }

    /// Clears the terminal and forgets what stood there, so that the next frame draws everything.
    ///
    /// `Terminal::clear` would ask the terminal where its cursor is, which takes long on a slow line
    /// and fails where nothing answers.
    fn redraw(&mut self) -> Result<(), Error> {
        self.terminal.backend_mut().clear()?;
        self.terminal.swap_buffers();
        Ok(())
    }
}

impl Drop for Screen {
    fn drop(&mut self) {
        let _ = give_back();
        let _ = self.terminal.show_cursor();
    }
}

fn take() -> io::Result<()> {
    enable_raw_mode()?;
    execute!(io::stdout(), EnterAlternateScreen, EnableBracketedPaste)
}

fn give_back() -> io::Result<()> {
    disable_raw_mode()?;
    execute!(io::stdout(), DisableBracketedPaste, LeaveAlternateScreen)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crossterm::event::{KeyCode, KeyEvent, KeyModifiers, MouseEvent, MouseEventKind};

    /// A desk in a fresh folder.
    fn desk(dir: &std::path::Path) -> Desk {
        use crate::actions::{DeskOptions, Kdf, NewStore, Secret, init};
        let new = NewStore {
            programme: "Quillmere".into(),
            station: "east".into(),
            notation: crate::domain::acuity::Notation::Feet,
            secret: Secret::None,
            kdf: Kdf::test(),
        };
        let (mut desk, _) = init(dir, new, &DeskOptions::default()).expect("a store");
        desk.add_screener("JI", "J. Imani").expect("a screener");
        desk.add_site("QE", "Quillmere East").expect("a site");
        let on = |m, d| chrono::NaiveDate::from_ymd_opt(2026, m, d).expect("a date");
        desk.add_term("2026A", "Autumn 2026", on(8, 1), on(12, 31))
            .expect("a term");
        desk
    }

    #[test]
    fn whatever_was_asked_before_leaving_is_written_and_a_refusal_is_told() {
        use crate::actions::{NewDay, StationChange};
        let folder = tempfile::tempdir().expect("a folder");
        let clerk = Clerk::new(desk(&folder.path().join("store")));
        let (to_store, jobs) = channel();
        let (answers, from_store) = channel();
        let day = NewDay {
            site: "QE".into(),
            date: chrono::NaiveDate::from_ymd_opt(2026, 10, 14).expect("a date"),
            protocol: "us-school".into(),
            method: crate::domain::codes::AcuityMethod::Threshold,
        };
        let nobody = uuid::Uuid::from_u128(7);
        for request in [
            Request::Days,
            Request::NewDay(day),
            Request::SetStation(StationChange {
                masked: Some(true),
                ..StationChange::default()
            }),
            Request::Screener("J. Imani".into()),
            Request::Prefer("theme", "dark".into()),
            Request::Retract(nobody, "never seen".into()),
        ] {
            assert!(to_store.send(Job::Ask(Box::new(request))).is_ok());
        }
        drop(to_store);
        serve(clerk, &jobs, &answers, &AtomicBool::new(true));
        let refused = unseen(&from_store);
        assert_eq!(refused.len(), 1, "only the retraction: {refused:?}");
        let options = crate::actions::DeskOptions::default();
        let secret = crate::actions::Secret::None;
        let desk = Desk::open(&folder.path().join("store"), &secret, &options).expect("a desk");
        assert_eq!(desk.days().expect("days").len(), 1);
        assert!(desk.station_role().expect("a role").masked);
        assert_eq!(desk.screener().as_deref(), Some("J. Imani"));
        assert_eq!(desk.preference("theme").as_deref(), Some("dark"));
    }

    #[test]
    fn a_repeat_is_a_press_and_a_release_or_the_mouse_is_nothing() {
        let event = |kind| {
            let key = KeyEvent::new_with_kind(KeyCode::Char('2'), KeyModifiers::NONE, kind);
            message_of(Event::Key(key))
        };
        for kind in [KeyEventKind::Press, KeyEventKind::Repeat] {
            assert!(matches!(event(kind), Some(Message::Key(key)) if key == Key::char('2')));
        }
        assert!(event(KeyEventKind::Release).is_none());
        let mouse = MouseEvent {
            kind: MouseEventKind::Moved,
            column: 1,
            row: 1,
            modifiers: KeyModifiers::NONE,
        };
        assert!(message_of(Event::Mouse(mouse)).is_none());
    }
}
