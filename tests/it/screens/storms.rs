//! The real program in a real terminal under bad weather: a class typed from a script, a storm of
//! resizes, a flood of paste, signals at random moments, a panic.

#![allow(clippy::print_stdout)]

use std::io::Write as _;
use std::time::{Duration, Instant};

use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::{Rng, SeedableRng};
use twoline::actions::{Desk, DeskOptions, QueueState, Secret};

use super::terminal::{Terminal, cells, size};

/// Returns the seed, which is printed; `TWOLINE_STORM_SEED` repeats one.
fn seed() -> u64 {
    let seed = std::env::var("TWOLINE_STORM_SEED")
        .ok()
        .and_then(|text| text.parse().ok())
        .unwrap_or_else(|| {
            let mut bytes = [0; 8];
            getrandom::fill(&mut bytes).unwrap();
            u64::from_le_bytes(bytes)
        });
    println!("TWOLINE_STORM_SEED={seed}");
    seed
}

/// Returns how many visits are signed in the demo's latest day, and how many children it has.
fn signed(store: &std::path::Path) -> (usize, usize) {
    let desk = Desk::open(store, &Secret::None, &DeskOptions::default()).unwrap();
    let day = desk
        .days()
        .unwrap()
        .into_iter()
        .max_by_key(|d| d.date)
        .unwrap();
    let children = desk.day_children(&day).unwrap();
    let done = children.iter().filter(|c| c.state != QueueState::ToCome);
    (done.count(), children.len())
}

fn kill(t: &Terminal, signal: &str) {
    let pid = t.child.process_id().unwrap();
    let done = std::process::Command::new("kill")
        .args([signal, &pid.to_string()])
        .status()
        .unwrap();
    assert!(done.success());
}

/// Begins at the demo with somebody who records.
fn begin(store: &std::path::Path) -> Terminal {
    let mut t = Terminal::open(store);
    t.wait_for("To come");
    if t.contents().contains("who is recording?") {
        t.send("1");
    }
    t
}

#[test]
fn a_whole_class_is_typed_from_a_script() {
    let folder = tempfile::tempdir().unwrap();
    let store = folder.path().join("demo");
    let mut t = begin(&store);
    t.send("\x11");
    assert!(t.ended());
    let before = signed(&store);
    let mut t = begin(&store);
    for _ in 0..25 {
        // Without waiting for the screen: as fast as the terminal takes it.
        t.type_in("\x0e20\r25\r\x13");
    }
    t.send("\x11");
    assert!(t.ended());
    let after = signed(&store);
    assert_eq!(after.1, before.1);
    assert!(
        after.0 >= before.0 + 20,
        "{before:?} became {after:?}: a class was typed"
    );
}

#[test]
fn a_storm_of_resizes_loses_nothing_typed() {
    let mut random = ChaCha8Rng::seed_from_u64(seed());
    let folder = tempfile::tempdir().unwrap();
    let mut t = begin(&folder.path().join("demo"));
    t.send("20/2");
    for _ in 0..300 {
        let columns = 1 + (random.next_u32() % 250) as u16;
        let rows = 1 + (random.next_u32() % 70) as u16;
        t.master.resize(size(columns, rows)).unwrap();
        if random.next_u32().is_multiple_of(16) {
            std::thread::sleep(Duration::from_millis(10));
        }
    }
    t.screen
        .lock()
        .unwrap()
        .screen_mut()
        .set_size(cells(36), cells(120));
    t.master.resize(size(120, 36)).unwrap();
    t.wait_for("To come");
    t.wait_for("20/2");
    t.send("\x11");
    assert!(t.ended());
}

#[test]
fn a_flood_of_paste_is_one_line_and_the_program_answers_afterwards() {
    let folder = tempfile::tempdir().unwrap();
    let mut t = begin(&folder.path().join("demo"));
    let line = "Okafor, Ada; 20/20; a line that was never meant for this program\r\n";
    let flood = format!("\x1b[200~{}\x1b[201~", line.repeat(10_000_000 / line.len()));
    t.writer.write_all(flood.as_bytes()).unwrap();
    t.writer.flush().unwrap();
    t.wait_for("only the first line of what was pasted is taken");
    t.send("?");
    t.wait_for("keys");
    t.send("\x11");
    t.ended();
}

/// Returns the child that the screen says is saved.
fn said_saved(t: &Terminal) -> Option<String> {
    let contents = t.contents();
    let (_, rest) = contents.split_once("─ saved ")?;
    let (name, _) = rest.split_once(':')?;
    Some(name.to_owned())
}

#[test]
fn signals_at_random_moments_lose_nothing_signed() {
    let mut random = ChaCha8Rng::seed_from_u64(seed());
    let folder = tempfile::tempdir().unwrap();
    let store = folder.path().join("demo");
    let mut all = 0;
    for signal in ["-TERM", "-HUP", "-TERM", "-HUP"] {
        let mut t = begin(&store);
        let mut saved: Vec<String> = Vec::new();
        for _ in 0..2 + random.next_u32() % 5 {
            t.type_in("\x0e20\r25\r\x13");
            std::thread::sleep(Duration::from_millis(u64::from(random.next_u32() % 250)));
            saved.extend(said_saved(&t));
        }
        kill(&t, signal);
        t.ended();
        // What the reader thread still has to take in of the last frames.
        std::thread::sleep(Duration::from_millis(300));
        assert!(
            !t.screen.lock().unwrap().screen().alternate_screen(),
            "the terminal is given back after {signal}"
        );
        let desk = Desk::open(&store, &Secret::None, &DeskOptions::default()).unwrap();
        let day = desk
            .days()
            .unwrap()
            .into_iter()
            .max_by_key(|d| d.date)
            .unwrap();
        let children = desk.day_children(&day).unwrap();
        for name in &saved {
            let kept = children.iter().any(|c| {
                c.state != QueueState::ToCome
                    && format!("{}, {}", c.family_name, c.given_name) == *name
            });
            assert!(kept, "{name} was said to be saved before {signal}");
        }
        all += saved.len();
    }
    assert!(all > 0, "something was saved before a signal came");
    let out = std::process::Command::new(env!("CARGO_BIN_EXE_twoline"))
        .args(["--store", store.to_str().unwrap(), "verify"])
        .output()
        .unwrap();
    assert!(
        out.status.success(),
        "{}",
        String::from_utf8_lossy(&out.stderr)
    );
}

#[test]
fn a_stop_signal_gives_the_terminal_back_and_locks() {
    let folder = tempfile::tempdir().unwrap();
    let mut t = begin(&folder.path().join("demo"));
    t.send("20/2");
    kill(&t, "-TSTP");
    let until = Instant::now() + Duration::from_mins(1);
    while t.screen.lock().unwrap().screen().alternate_screen() {
        assert!(Instant::now() < until, "the terminal is not given back");
        std::thread::sleep(Duration::from_millis(20));
    }
    // It stops a moment after it has given the terminal back: woken before that, it sleeps on.
    let until = Instant::now() + Duration::from_mins(1);
    while !t.contents().contains("Twoline is locked") {
        assert!(Instant::now() < until, "it does not wake");
        kill(&t, "-CONT");
        std::thread::sleep(Duration::from_millis(100));
    }
    assert!(!t.contents().contains("20/2"));
    t.send("\r");
    t.wait_for("20/2");
    t.send("\x11");
    assert!(t.ended());
}
