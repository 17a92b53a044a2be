//! What is asked on a terminal: passphrase, recovery key, the question before writing, Ctrl-C.

use std::io::{Read, Write};
use std::num::NonZero;
use std::sync::mpsc::{Receiver, channel};
use std::time::{Duration, Instant};

use portable_pty::{Child, CommandBuilder, PtySize, native_pty_system};

use super::{Bench, ROSTER};

const PASSPHRASE: &str = "nine green kettles sing";

const ROWS: NonZero<u16> = NonZero::new(36).expect("rows");
const COLUMNS: NonZero<u16> = NonZero::new(120).expect("columns");

/// The program on a terminal of its own.
struct Terminal {
    child: Box<dyn Child + Send + Sync>,
    keys: Box<dyn Write + Send>,
    screen: Receiver<Vec<u8>>,
    seen: String,
    /// How much of `seen` was waited for already.
    at: usize,
    pair: Box<dyn portable_pty::MasterPty + Send>,
}

impl Terminal {
    fn run(bench: &Bench, args: &[&str]) -> Terminal {
        let size = PtySize {
            rows: ROWS.get(),
            cols: COLUMNS.get(),
            pixel_width: 0,
            pixel_height: 0,
        };
        let pair = native_pty_system().openpty(size).expect("a terminal");
        let mut command = CommandBuilder::new(env!("CARGO_BIN_EXE_twoline"));
        command.cwd(bench.folder.path());
        command.env("TWOLINE_STORE", bench.path("store"));
        command.env_remove("TWOLINE_PASSPHRASE_FILE");
        command.args(args);
        command.args(["--today", super::TODAY]);
        let child = pair.slave.spawn_command(command).expect("the program runs");
        drop(pair.slave);
        let mut reader = pair.master.try_clone_reader().expect("its screen");
        let keys = pair.master.take_writer().expect("its keys");
        let (to, screen) = channel();
        std::thread::spawn(move || {
            let mut buffer = [0; 4096];
            while let Ok(n) = reader.read(&mut buffer) {
                if n == 0 || to.send(buffer[..n].to_vec()).is_err() {
                    break;
                }
            }
        });
        Terminal {
            child,
            keys,
            screen,
            seen: String::new(),
            at: 0,
            pair: pair.master,
        }
    }

    /// Waits until a text that was not waited for yet is on the screen.
    fn until(&mut self, text: &str) {
        let give_up = Instant::now() + Duration::from_mins(1);
        loop {
            if let Some(found) = self.seen[self.at..].find(text) {
                self.at += found + text.len();
                return;
            }
            let left = give_up.saturating_duration_since(Instant::now());
            let Ok(bytes) = self.screen.recv_timeout(left) else {
                panic!("{text:?} never came; seen: {}", self.seen);
            };
            self.seen.push_str(&String::from_utf8_lossy(&bytes));
        }
    }

    /// Waits until a text can be read on the screen, wherever its parts were drawn.
    fn until_shown(&mut self, text: &str) {
        let mut screen = vt100::Parser::new(ROWS, COLUMNS, 0);
        screen.process(self.seen.as_bytes());
        let give_up = Instant::now() + Duration::from_mins(1);
        while !screen.screen().contents().contains(text) {
            let left = give_up.saturating_duration_since(Instant::now());
            let Ok(bytes) = self.screen.recv_timeout(left) else {
                panic!("{text:?} never came; shown: {}", screen.screen().contents());
            };
            screen.process(&bytes);
        }
    }

    /// Waits until the terminal shows no more what is typed: the prompt stands a moment before that,
    /// and nobody types as fast as a test.
    fn until_hidden(&self) {
        let name = self.pair.tty_name().expect("a terminal with a name");
        let tty = std::fs::File::open(name).expect("the terminal");
        let give_up = Instant::now() + Duration::from_mins(1);
        while rustix::termios::tcgetattr(&tty)
            .expect("its settings")
            .local_modes
            .contains(rustix::termios::LocalModes::ECHO)
        {
            assert!(
                Instant::now() < give_up,
                "what is typed is shown: {}",
                self.seen
            );
            std::thread::sleep(Duration::from_millis(5));
        }
    }

    fn type_secret(&mut self, text: &str) {
        self.until_hidden();
        self.type_in(text);
    }

    fn type_in(&mut self, text: &str) {
        self.keys.write_all(text.as_bytes()).expect("typed");
        self.keys.flush().expect("typed");
    }

    fn end(mut self) -> (u32, String) {
        let code = self.child.wait().expect("it ends").exit_code();
        while let Ok(bytes) = self.screen.recv_timeout(Duration::from_millis(500)) {
            self.seen.push_str(&String::from_utf8_lossy(&bytes));
        }
        (code, self.seen)
    }
}

#[test]
fn a_store_is_made_and_opened_by_typing() {
    let bench = Bench::empty();
    let make = ["init", "--programme", "Quillmere", "--station", "east"];

    let mut terminal = Terminal::run(&bench, &make);
    terminal.until("15 characters or more:");
    terminal.type_secret(&format!("{PASSPHRASE}\r"));
    terminal.until("again:");
    terminal.type_secret("something else, longer\r");
    let (code, seen) = terminal.end();
    assert_eq!(code, 2, "{seen}");
    assert!(
        seen.contains("not the same") && !bench.path("store").exists(),
        "{seen}"
    );

    let mut terminal = Terminal::run(&bench, &make);
    terminal.until("15 characters or more:");
    terminal.type_secret(&format!("{PASSPHRASE}\r"));
    terminal.until("again:");
    terminal.type_secret(&format!("{PASSPHRASE}\r"));
    terminal.until("last four characters");
    let key = terminal
        .seen
        .split_whitespace()
        .find(|word| word.len() == 34 && word.split('-').count() == 7)
        .expect("the recovery key")
        .to_owned();
    terminal.type_in("!!!!\r");
    terminal.until("not its last four");
    terminal.until("last four characters");
    terminal.type_in(&format!("{}\r", key[30..].to_lowercase()));
    let (code, seen) = terminal.end();
    assert_eq!(code, 0, "{seen}");
    assert!(
        !seen.contains(PASSPHRASE),
        "a passphrase is never shown: {seen}"
    );

    // The recovery key opens it as the passphrase does.
    let mut terminal = Terminal::run(&bench, &["verify"]);
    terminal.until("Passphrase of Quillmere:");
    terminal.type_secret(&format!("{key}\r"));
    let (code, seen) = terminal.end();
    assert!(code == 0 && seen.contains("verified: "), "{seen}");

    let mut terminal = Terminal::run(&bench, &["verify"]);
    terminal.until("Passphrase of Quillmere:");
    terminal.type_secret("nine green\u{3}");
    let (code, seen) = terminal.end();
    assert_eq!(code, 130, "Ctrl-C: {seen}");
}

#[test]
fn the_screens_say_who_writes_the_store() {
    let bench = Bench::on_a_day("us-school", "threshold");
    let options = twoline::actions::DeskOptions::default();
    let secret = twoline::actions::Secret::None;
    let writer =
        twoline::actions::Desk::open(&bench.path("store"), &secret, &options).expect("the store");
    let mut terminal = Terminal::run(&bench, &[]);
    terminal.until_shown(&format!("process {}", std::process::id()));
    terminal.child.kill().expect("ended");
    drop(writer);
}

#[test]
fn a_roster_is_written_only_after_a_yes() {
    let bench = Bench::with_children();
    let head = bench.head();
    bench.write("second.csv", ROSTER.replace("Marigold", "Marigolde"));
    for (answer, written) in [("n\r", false), ("\r", false), ("y\r", true)] {
        let mut terminal = Terminal::run(&bench, &["roster", "add", "second.csv"]);
        terminal.until("0 new, 1 changed, 4 unchanged, 0 gone");
        terminal.until("Write this? [y/N]");
        terminal.type_in(answer);
        let (code, seen) = terminal.end();
        assert_eq!(code, 0, "{seen}");
        assert_eq!(seen.contains("saved; store head"), written, "{seen}");
        assert_eq!(bench.head() != head, written);
    }
}

#[test]
fn a_letter_to_the_doctor_asks_who_gets_it_and_reports_ask_before_they_are_written() {
    let bench = super::follow_up::referred();
    let letter = ["letters", "--kind", "to_doctor", "--child", "Q-2"];
    let mut terminal = Terminal::run(&bench, &[&letter[..], &["-o", "doctor.html"]].concat());
    terminal.until("To whom does the letter to the doctor go?");
    terminal.type_in("Dr A. Hale\r");
    terminal.until("What do they need it for?");
    terminal.type_in("\r");
    let (code, seen) = terminal.end();
    assert_eq!(code, 2, "no purpose: {seen}");
    assert!(!bench.path("doctor.html").exists());
    let mut terminal = Terminal::run(&bench, &[&letter[..], &["-o", "doctor.html"]].concat());
    terminal.until("To whom does the letter to the doctor go?");
    terminal.type_in("Dr A. Hale\r");
    terminal.until("What do they need it for?");
    terminal.type_in("care of the child\r");
    let (code, seen) = terminal.end();
    assert_eq!(code, 0, "{seen}");
    let log = bench.ok(&["report", "disclosures", "--format", "text"]);
    assert!(
        log.contains("to Dr A. Hale, for care of the child"),
        "{log}"
    );

    bench.write(
        "reports.csv",
        "child_id,examined_on,no_abnormality\nQ-2,2026-10-14,yes\n",
    );
    for (answer, says) in [("n", "nothing was written"), ("y", "saved; store head")] {
        let mut terminal = Terminal::run(&bench, &["exam", "read", "reports.csv"]);
        terminal.until("close these referrals as examined? [y/N]");
        terminal.type_in(&format!("{answer}\r"));
        let (code, seen) = terminal.end();
        assert!(code == 0 && seen.contains(says), "{seen}");
    }
}
