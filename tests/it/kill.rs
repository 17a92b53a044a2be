//! The real program in a terminal, killed with SIGKILL while somebody types: no signed child is
//! lost, and no draft older than a second.
//!
//! `TWOLINE_KILLS=200 cargo test --release --locked kill -- --nocapture` is the long form; without it
//! a few kills. The seed is printed and taken from `TWOLINE_SEED`.

#![allow(clippy::print_stdout)]

use std::fmt::Write as _;
use std::io::{Read, Write};
use std::path::Path;
use std::sync::mpsc::{Receiver, channel};
use std::time::{Duration, Instant, SystemTime};

use portable_pty::{Child, CommandBuilder, MasterPty, PtySize, native_pty_system};
use twoline::actions::{Desk, DeskOptions, QueueState, Secret};
use twoline::domain::codes::AcuityMethod;

use crate::actions::{date, empty_desk, open};

const TODAY: &str = "2026-10-14";

/// A small seeded generator: this test needs moments, not good randomness.
struct Moments(u64);

impl Moments {
    fn between(&mut self, low: u64, high: u64) -> u64 {
        self.0 ^= self.0 << 13;
        self.0 ^= self.0 >> 7;
        self.0 ^= self.0 << 17;
        low + self.0 % (high - low)
    }
}

fn rows(n: u16) -> std::num::NonZero<u16> {
    std::num::NonZero::new(n).expect("a size")
}

fn setting(name: &str, otherwise: u64) -> u64 {
    std::env::var(name)
        .ok()
        .and_then(|v| v.parse().ok())
        .unwrap_or(otherwise)
}

#[test]
fn no_signed_child_and_no_draft_older_than_a_second_is_lost() {
    let kills = setting("TWOLINE_KILLS", 6);
    let now = SystemTime::now()
        .duration_since(SystemTime::UNIX_EPOCH)
        .map_or(1, |d| d.as_nanos());
    let seed = setting("TWOLINE_SEED", now as u64) | 1;
    println!("seed: TWOLINE_SEED={seed}, {kills} kills");
    let mut moments = Moments(seed);

    let (folder, mut desk) = empty_desk();
    let mut csv =
        String::from("child_id,family_name,given_name,dob,grade,site,class,wears_glasses\n");
    for i in 0..kills * 60 + 60 {
        let _ = writeln!(csv, "K-{i:06},Okafor {i:06},Ada,2020-03-02,1,QE,1B,no");
    }
    let plan = desk
        .plan_roster("roster.csv", csv.as_bytes(), None, None)
        .expect("a plan");
    desk.add_roster(&plan).expect("written");
    open(&mut desk, TODAY, "us-school", AcuityMethod::Threshold);
    drop(desk);

    let dir = folder.path().join("store");
    let (mut saved, mut drafts) = (0, 0);
    for round in 0..kills {
        let (s, d) = one_kill(&dir, &mut moments, round);
        saved += s;
        drafts += d;
    }
    println!(
        "{kills} kills: {saved} children shown as saved, all there; {drafts} drafts older than a second, all there"
    );
    assert!(
        saved > 0 || kills < 3,
        "the script signed nobody: it tests nothing"
    );
    let desk = reopen(&dir);
    let entries = desk.head().expect("a head").entries;
    desk.verify(None, |_, _| {})
        .expect("a store without damage");
    assert!(entries > 0);
}

/// A closed window ends the program, and lets go of the store.
#[test]
fn a_terminal_that_goes_away_ends_the_program() {
    let (folder, mut desk) = empty_desk();
    let csv = "child_id,family_name,given_name,dob,grade,site,class,wears_glasses\n\
               K-1,Okafor,Ada,2020-03-02,1,QE,1B,no\n";
    let plan = desk
        .plan_roster("roster.csv", csv.as_bytes(), None, None)
        .expect("a plan");
    desk.add_roster(&plan).expect("written");
    open(&mut desk, TODAY, "us-school", AcuityMethod::Threshold);
    drop(desk);
    let dir = folder.path().join("store");

    let (pty, mut child) = in_a_terminal(&dir);
    let mut keys = pty.take_writer().expect("a writer");
    let mut reader = pty.try_clone_reader().expect("a reader");
    let mut terminal = vt100::Parser::new(rows(36), rows(120), 0);
    let mut buffer = vec![0; 65_536];
    while !terminal.screen().contents().contains("RIGHT EYE") {
        let n = reader.read(&mut buffer).expect("a screen");
        terminal.process(&buffer[..n]);
    }
    keys.write_all(b"20")
        .and_then(|()| keys.flush())
        .expect("typed");
    while !terminal.screen().contents().contains("right eye 20/20") {
        let n = reader.read(&mut buffer).expect("a screen");
        terminal.process(&buffer[..n]);
    }
    drop((keys, reader, pty));

    let patience = Instant::now();
    while child.try_wait().expect("its state").is_none() {
        assert!(
            patience.elapsed() < Duration::from_mins(1),
            "it goes on without a terminal"
        );
        std::thread::sleep(Duration::from_millis(50));
    }
    let desk = reopen(&dir);
    let drafts = desk.drafts().expect("drafts").load_every().expect("read");
    assert!(
        drafts[0]
            .fields
            .contains(&("distance_right".to_owned(), "20".to_owned())),
        "{drafts:?}"
    );
}

fn in_a_terminal(dir: &Path) -> (Box<dyn MasterPty + Send>, Box<dyn Child + Send + Sync>) {
    let pty = native_pty_system()
        .openpty(PtySize {
            rows: 36,
            cols: 120,
            pixel_width: 0,
            pixel_height: 0,
        })
        .expect("a terminal");
    let mut command = CommandBuilder::new(env!("CARGO_BIN_EXE_twoline"));
    command.args(["--store", &dir.to_string_lossy(), "--today", TODAY]);
    command.env("RUST_BACKTRACE", "0");
    command.env("TERM", "xterm-256color");
    let child = pty.slave.spawn_command(command).expect("the program");
    (pty.master, child)
}

fn reopen(dir: &Path) -> Desk {
    let options = DeskOptions {
        today: Some(date(TODAY)),
        ..DeskOptions::default()
    };
    Desk::open(dir, &Secret::None, &options).expect("the store opens after a kill")
}

/// What somebody typed for a child, and when.
struct Typed {
    at: Instant,
    child: usize,
    right: String,
    left: String,
}

/// Types, kills, reopens and compares; returns how many children were shown as saved and how many
/// drafts were old enough to be asked for.
fn one_kill(dir: &Path, moments: &mut Moments, round: u64) -> (usize, usize) {
    let queue = to_come(dir);
    let mut program = Program::start(dir);
    let length = Duration::from_millis(moments.between(30, 2_600));
    let log = program.type_for(length, moments);
    let killed = program.kill();
    let desk = reopen(dir);
    let day = desk.days().expect("days").remove(0);
    for name in &program.shown {
        let id = name.replace("Okafor ", "K-");
        let child = desk.day_child(&day, &id).expect("a child");
        assert_ne!(
            child.state,
            QueueState::ToCome,
            "round {round}: {name} was shown as saved"
        );
    }
    let old = log
        .iter()
        .rev()
        .find(|t| killed - t.at > Duration::from_secs(1))
        .filter(|t| !t.right.is_empty());
    let Some(typed) = old else {
        return (program.shown.len(), 0);
    };
    let id = &queue[typed.child];
    if desk.day_child(&day, id).expect("a child").state != QueueState::ToCome {
        return (program.shown.len(), 0);
    }
    let drafts = desk.drafts().expect("drafts").load_every().expect("read");
    let draft = drafts.iter().find(|d| d.child_id == *id);
    for (field, typed) in [
        ("distance_right", &typed.right),
        ("distance_left", &typed.left),
    ] {
        let kept = draft
            .and_then(|d| d.fields.iter().find(|(f, _)| f == field))
            .map_or("", |(_, text)| text);
        assert!(
            kept.contains(typed.as_str()),
            "round {round}: {id} {field} was {typed:?} more than a second ago, the draft has {kept:?}"
        );
    }
    (program.shown.len(), 1)
}

/// Returns the children to come in the order of the queue, without drafts, so that every key is
/// known to go to the right eye first.
fn to_come(dir: &Path) -> Vec<String> {
    let desk = reopen(dir);
    let day = desk.days().expect("days").remove(0);
    let drafts = desk.drafts().expect("drafts");
    for draft in drafts.load_every().expect("read") {
        drafts.delete(&draft.day, &draft.child_id).expect("deleted");
    }
    drafts.flush().expect("flushed");
    desk.day_children(&day)
        .expect("children")
        .into_iter()
        .filter(|c| c.state == QueueState::ToCome)
        .map(|c| c.child_id)
        .collect()
}

/// The program in a terminal.
struct Program {
    child: Box<dyn Child + Send + Sync>,
    keys: Box<dyn Write + Send>,
    screen: Receiver<Vec<u8>>,
    terminal: vt100::Parser,
    /// The children of whom it said "saved".
    shown: Vec<String>,
    _pty: Box<dyn MasterPty + Send>,
}

impl Program {
    /// Starts it and waits until a child is on the bench.
    fn start(dir: &Path) -> Program {
        let (pty, child) = in_a_terminal(dir);
        let mut program = Program {
            child,
            keys: pty.take_writer().expect("a writer"),
            screen: watch(pty.try_clone_reader().expect("a reader")),
            terminal: vt100::Parser::new(rows(36), rows(120), 0),
            shown: Vec::new(),
            _pty: pty,
        };
        let patience = Instant::now();
        while !program.terminal.screen().contents().contains("RIGHT EYE") {
            assert!(
                patience.elapsed() < Duration::from_mins(1),
                "{}",
                program.terminal.screen().contents()
            );
            program.look(Duration::from_millis(50));
        }
        program
    }

    fn press(&mut self, keys: &str) {
        self.keys
            .write_all(keys.as_bytes())
            .and_then(|()| self.keys.flush())
            .expect("typed");
    }

    /// Looks at the screen, and notes the child of whom it says "saved".
    fn look(&mut self, wait: Duration) {
        if let Ok(bytes) = self.screen.recv_timeout(wait) {
            self.terminal.process(&bytes);
        }
        while let Ok(bytes) = self.screen.try_recv() {
            self.terminal.process(&bytes);
        }
        let contents = self.terminal.screen().contents();
        if let Some(at) = contents.find("saved Okafor ") {
            let name: String = contents[at + 6..].chars().take(13).collect();
            if self.shown.last() != Some(&name) && name.len() == 13 {
                self.shown.push(name);
            }
        }
    }

    /// Types child after child until the time is over.
    fn type_for(&mut self, length: Duration, moments: &mut Moments) -> Vec<Typed> {
        let end = Instant::now() + length;
        let mut log: Vec<Typed> = Vec::new();
        for child in 0.. {
            let (mut right, mut left) = (String::new(), String::new());
            for key in ["2", "0", "\r", "2", "5", "\r", "\x13"] {
                // Now and then a child takes its time: long enough for a draft to grow old.
                let slow = moments.between(0, 24) == 0;
                let pause = if slow { 1_300 } else { moments.between(4, 16) };
                let until = (Instant::now() + Duration::from_millis(pause)).min(end);
                while Instant::now() < until {
                    self.look(Duration::from_millis(2));
                }
                if Instant::now() >= end {
                    return log;
                }
                self.press(key);
                match key {
                    "2" | "0" | "5" if right.len() < 2 => right.push_str(key),
                    "2" | "5" => left.push_str(key),
                    _ => {}
                }
                log.push(Typed {
                    at: Instant::now(),
                    child,
                    right: right.clone(),
                    left: left.clone(),
                });
            }
        }
        log
    }

    /// Kills it and returns when.
    fn kill(&mut self) -> Instant {
        self.child.clone_killer().kill().expect("killed");
        let killed = Instant::now();
        // It is gone: how it ended is known.
        let _ = self.child.wait();
        self.look(Duration::from_millis(20));
        killed
    }
}

/// Reads what the program draws, on a thread of its own.
fn watch(mut from: Box<dyn Read + Send>) -> Receiver<Vec<u8>> {
    let (to, screen) = channel();
    std::thread::spawn(move || {
        let mut buffer = vec![0; 65_536];
        while let Ok(n) = from.read(&mut buffer) {
            if n == 0 || to.send(buffer[..n].to_vec()).is_err() {
                break;
            }
        }
    });
    screen
}
