//! From key press to drawn frame with a large roster: `cargo bench --bench screens [N]`.
//!
//! The store's answers come on a thread of their own and are left out: what is measured is what a
//! person at the keys waits for. Baseline in the same run: the same screen drawn again without a key.
#![allow(clippy::unwrap_used, clippy::print_stdout, clippy::expect_used)]

use std::fmt::Write as _;
use std::time::{Duration, Instant};

use chrono::NaiveDate;
use crossterm::event::KeyCode;
use ratatui::Terminal;
use ratatui::backend::TestBackend;
use twoline::actions::{Desk, DeskOptions, Kdf, NewDay, NewStore, Secret, init};
use twoline::domain::acuity::Notation;
use twoline::domain::codes::AcuityMethod;
use twoline::keys::Key;
use twoline::tui::app::{Answer, App, Effect, Message, Request};
use twoline::tui::{Clerk, session};

struct Hands {
    app: App,
    clerk: Clerk,
    terminal: Terminal<TestBackend>,
    frames: Vec<Duration>,
}

impl Hands {
    fn press(&mut self, key: Key) {
        self.app.session.now_ms += 150;
        let start = Instant::now();
        let effects = self.app.update(Message::Key(key));
        self.terminal
            .draw(|frame| self.app.draw(frame))
            .expect("drawn");
        self.frames.push(start.elapsed());
        self.carry_out(effects);
    }

    fn carry_out(&mut self, effects: Vec<Effect>) {
        for effect in effects {
            match effect {
                Effect::Ask(request) => {
                    let answer = self.clerk.answer(*request);
                    let more = self.app.update(Message::Answer(answer));
                    self.carry_out(more);
                }
                Effect::SaveDraft(draft) => {
                    self.clerk.keeper().save(draft, self.app.session.now_ms);
                }
                Effect::DropDraft(day, child) => self.clerk.keeper().drop_draft(&day, &child),
                _ => {}
            }
        }
    }

    fn report(&mut self, what: &str) {
        self.frames.sort();
        let at = |share: usize| self.frames[(self.frames.len() - 1) * share / 100];
        println!(
            "{what:34} {:5} keys: median {:8.2?}  99% {:8.2?}  worst {:8.2?}",
            self.frames.len(),
            at(50),
            at(99),
            at(100)
        );
        self.frames.clear();
    }
}

fn main() {
    let n: usize = std::env::args()
        .skip(1)
        .find_map(|a| a.parse().ok())
        .unwrap_or(100_000);
    let folder = tempfile::TempDir::new_in(".").expect("a folder on this disk");
    let desk = desk(&folder.path().join("store"), n);
    let start = Instant::now();
    let mut app = session(&desk, true, 1_791_970_200_000, 0).expect("a session");
    let first = app.start();
    let mut hands = Hands {
        app,
        clerk: Clerk::new(desk),
        terminal: Terminal::new(TestBackend::new(120, 36)).expect("a terminal"),
        frames: Vec::new(),
    };
    hands.carry_out(first);
    println!(
        "{n} children; start to the day's queue {:.2?}",
        start.elapsed()
    );

    for _ in 0..500 {
        let start = Instant::now();
        hands
            .terminal
            .draw(|frame| hands.app.draw(frame))
            .expect("drawn");
        hands.frames.push(start.elapsed());
    }
    hands.report("the same screen drawn again");
    for _ in 0..200 {
        for c in "20".chars() {
            hands.press(Key::char(c));
        }
        hands.press(Key::plain(KeyCode::Enter));
        for c in "25".chars() {
            hands.press(Key::char(c));
        }
        hands.press(Key::plain(KeyCode::Enter));
        hands.press(Key::plain(KeyCode::Enter));
    }
    hands.report("entering and signing children");
    hands.press(Key::plain(KeyCode::Esc));
    hands.frames.clear();
    for _ in 0..1_000 {
        hands.press(Key::plain(KeyCode::Down));
    }
    hands.report("down the queue");
    for word in SOUGHT {
        for c in word.chars() {
            hands.press(Key::char(c));
        }
        for _ in word.chars() {
            hands.press(Key::plain(KeyCode::Backspace));
        }
    }
    hands.report("finding by typing, drawn");
    board(&mut hands, n);

    let index = hands.clerk.into_desk().search_index().expect("an index");
    let mut keys: Vec<Duration> = Vec::new();
    for _ in 0..20 {
        for word in SOUGHT {
            for (at, c) in word.char_indices() {
                let typed = &word[..at + c.len_utf8()];
                let start = Instant::now();
                std::hint::black_box(index.find(typed, 200));
                keys.push(start.elapsed());
            }
        }
    }
    keys.sort();
    let at = |share: usize| keys[(keys.len() - 1) * share / 100];
    println!(
        "{:34} {:5} keys: median {:8.2?}  99% {:8.2?}  worst {:8.2?}",
        "the search of a key alone",
        keys.len(),
        at(50),
        at(99),
        at(100)
    );
}

/// Names, an id, a telephone number's end, and names with a slip.
const SOUGHT: [&str; 8] = [
    "okafor 12",
    "tamalira",
    "q-00999",
    "ada 35",
    "miraleno sana",
    "0190",
    "belaronta",
    "ha si",
];

/// Returns an invented name: 24,000 family names, 600 given ones.
fn name(i: usize) -> (String, String) {
    const PARTS: [&str; 30] = [
        "ta", "ma", "li", "ra", "oka", "for", "ny", "bel", "aro", "min", "sa", "na", "pé", "ti",
        "qui", "ro", "ga", "hal", "e", "ben", "si", "lu", "vé", "ga", "do", "rin", "mo", "tan",
        "ki", "wen",
    ];
    let part = |n: usize| PARTS[n % PARTS.len()];
    (
        format!("{}{}{}", part(i), part(i / 7), part(i / 211)),
        format!("{}{}", part(i / 3), part(i / 5)),
    )
}

/// The board of the day: what the store's thread needs for it, and the keys while it is open.
fn board(hands: &mut Hands, n: usize) {
    let day = hands.app.day.as_ref().expect("a day").info.clone();
    let mut took: Vec<Duration> = (0..7)
        .map(|_| {
            let start = Instant::now();
            let answer = hands.clerk.answer(Request::Board((*day).clone()));
            assert!(matches!(answer, Answer::Board(_)));
            start.elapsed()
        })
        .collect();
    took.sort();
    println!(
        "board of {n} children in the store's thread: median {:.2?}",
        took[3]
    );
    hands.press(Key::alt('b'));
    hands.frames.clear();
    for _ in 0..300 {
        hands.press(Key::plain(KeyCode::Down));
    }
    hands.report("scrolling the board");
}

fn desk(dir: &std::path::Path, n: usize) -> Desk {
    let date = |text: &str| -> NaiveDate { text.parse().expect("a date") };
    let options = DeskOptions {
        today: Some(date("2026-10-14")),
        ..DeskOptions::default()
    };
    let new = NewStore {
        programme: "Quillmere".into(),
        station: "east".into(),
        notation: Notation::Feet,
        secret: Secret::None,
        kdf: Kdf::test(),
    };
    let (mut desk, _) = init(dir, new, &options).expect("a store");
    desk.add_screener("JI", "J. Imani").expect("a screener");
    desk.add_site("QE", "Quillmere East").expect("a site");
    desk.add_term(
        "2026-autumn",
        "Autumn 2026",
        date("2026-08-01"),
        date("2026-12-31"),
    )
    .expect("a term");
    let mut csv = String::from(
        "child_id,family_name,given_name,dob,grade,site,class,wears_glasses,guardian_phone\n",
    );
    for i in 0..n {
        let (family, given) = name(i);
        let _ = writeln!(
            csv,
            "Q-{i:07},{family},{given},2020-{:02}-{:02},1,QE,{}{},no,555-{:07}",
            i % 12 + 1,
            i % 28 + 1,
            i / 25 % 12 + 1,
            i / 300,
            i * 7 % 10_000_000
        );
    }
    let plan = desk
        .plan_roster("roster.csv", csv.as_bytes(), None, None)
        .expect("a plan");
    desk.add_roster(&plan).expect("written");
    desk.open_day(NewDay {
        site: "QE".into(),
        date: date("2026-10-14"),
        protocol: "us-school".into(),
        method: AcuityMethod::Threshold,
    })
    .expect("a day");
    desk
}
