//! The run loop in a real terminal: begun, resized, ended by a signal; the terminal comes back.

use std::io::{Read, Write};
use std::sync::{Arc, Mutex};
use std::time::{Duration, Instant};

use portable_pty::{Child, CommandBuilder, MasterPty, PtySize, native_pty_system};

pub(super) struct Terminal {
    pub(super) master: Box<dyn MasterPty>,
    pub(super) writer: Box<dyn Write + Send>,
    pub(super) child: Box<dyn Child + Send + Sync>,
    pub(super) screen: Arc<Mutex<vt100::Parser>>,
}

pub(super) fn cells(n: u16) -> std::num::NonZero<u16> {
    std::num::NonZero::new(n).unwrap()
}

pub(super) fn size(columns: u16, rows: u16) -> PtySize {
    PtySize {
        rows,
        cols: columns,
        pixel_width: 0,
        pixel_height: 0,
    }
}

impl Terminal {
    pub(super) fn open(store: &std::path::Path) -> Terminal {
        let pair = native_pty_system().openpty(size(80, 24)).unwrap();
        let mut command = CommandBuilder::new(env!("CARGO_BIN_EXE_twoline"));
        command.args(["--store", store.to_str().unwrap(), "demo"]);
        command.env("TERM", "xterm-256color");
        let child = pair.slave.spawn_command(command).unwrap();
        drop(pair.slave);
        let screen = Arc::new(Mutex::new(vt100::Parser::new(cells(24), cells(80), 0)));
        let mut reader = pair.master.try_clone_reader().unwrap();
        let parser = Arc::clone(&screen);
        std::thread::spawn(move || {
            let mut bytes = [0; 8192];
            while let Ok(n) = reader.read(&mut bytes) {
                if n == 0 {
                    break;
                }
                parser.lock().unwrap().process(&bytes[..n]);
            }
        });
        Terminal {
            writer: pair.master.take_writer().unwrap(),
            master: pair.master,
            child,
            screen,
        }
    }

    pub(super) fn contents(&self) -> String {
        self.screen.lock().unwrap().screen().contents()
    }

    #[track_caller]
    pub(super) fn wait_for(&self, text: &str) {
        let until = Instant::now() + Duration::from_mins(1);
        while Instant::now() < until {
            if self.contents().contains(text) {
                return;
            }
            std::thread::sleep(Duration::from_millis(20));
        }
        panic!("not on the screen: {text}\n{}", self.contents());
    }

    /// Types without waiting, as a script does.
    pub(super) fn type_in(&mut self, text: &str) {
        self.writer.write_all(text.as_bytes()).unwrap();
        self.writer.flush().unwrap();
    }

    /// Waits for the end, a minute at most, and says whether it was an orderly one.
    #[track_caller]
    pub(super) fn ended(&mut self) -> bool {
        let until = Instant::now() + Duration::from_mins(1);
        loop {
            if let Some(status) = self.child.try_wait().unwrap() {
                return status.success();
            }
            assert!(
                Instant::now() < until,
                "it does not end:\n{}",
                self.contents()
            );
            std::thread::sleep(Duration::from_millis(20));
        }
    }

    pub(super) fn send(&mut self, text: &str) {
        self.type_in(text);
        std::thread::sleep(Duration::from_millis(120));
    }
}

#[test]
fn a_day_in_a_real_terminal_survives_resize_and_signal() {
    let folder = tempfile::tempdir().unwrap();
    let store = folder.path().join("demo");
    let mut t = Terminal::open(&store);
    t.wait_for("To come");
    t.send("20");
    t.send("\r");
    t.send("20/2");
    t.wait_for("20/2");
    t.screen
        .lock()
        .unwrap()
        .screen_mut()
        .set_size(cells(10), cells(60));
    t.master.resize(size(60, 10)).unwrap();
    t.wait_for("Twoline needs 80");
    t.screen
        .lock()
        .unwrap()
        .screen_mut()
        .set_size(cells(36), cells(120));
    t.master.resize(size(120, 36)).unwrap();
    t.wait_for("F6 swap eyes");
    let pid = t.child.process_id().unwrap();
    let killed = std::process::Command::new("kill")
        .args(["-TERM", &pid.to_string()])
        .status()
        .unwrap();
    assert!(killed.success());
    assert!(t.ended(), "a signal is an orderly end");
    let screen = t.screen.lock().unwrap();
    assert!(
        !screen.screen().alternate_screen(),
        "the terminal is given back"
    );
    drop(screen);

    let mut again = Terminal::open(&store);
    again.wait_for("who is recording?");
    again.send("1");
    again.wait_for("draft");
    again.send("\x11");
    assert!(again.ended());
}
