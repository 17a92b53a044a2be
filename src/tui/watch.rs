//! Ends the program when its terminal is gone.
//!
//! A closed window leaves the event reader turning on an end of file that it does not report: the
//! process would keep a core busy and, worse, keep the store locked. A thread beside it asks the
//! terminal twice a second whether it is still there.

use std::io;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};
use std::thread;
use std::time::Duration;

use super::desk::Keeper;

/// How often the terminal is asked.
const EVERY: Duration = Duration::from_millis(500);

/// How long the screens have to leave by themselves before the process is ended.
const PATIENCE: u32 = 6;

/// The exit code of a program whose terminal hung up.
const HUNG_UP: i32 = 129;

/// Watches until it is dropped.
pub struct Watch(Arc<AtomicBool>);

impl Watch {
    /// Begins to watch; where standard input is no terminal there is nothing to watch.
    pub fn begin(keeper: Keeper, leave: Arc<AtomicBool>) -> io::Result<Watch> {
        let over = Arc::new(AtomicBool::new(false));
        if is_there() {
            let seen = Arc::clone(&over);
            thread::Builder::new()
                .name("terminal".into())
                .spawn(move || watch(&keeper, &leave, &seen))?;
        }
        Ok(Watch(over))
    }
}

impl Drop for Watch {
    fn drop(&mut self) {
        self.0.store(true, Ordering::Relaxed);
    }
}

fn watch(keeper: &Keeper, leave: &AtomicBool, over: &AtomicBool) {
    let mut stuck = 0;
    while !over.load(Ordering::Relaxed) {
        thread::sleep(EVERY);
        if !is_there() {
            leave.store(true, Ordering::Relaxed);
        }
        if !leave.load(Ordering::Relaxed) {
            continue;
        }
        stuck += 1;
        if stuck > PATIENCE && !over.load(Ordering::Relaxed) {
            // What was signed is committed by the store's thread; what was typed is written here.
            let _ = keeper.flush();
            std::process::exit(HUNG_UP);
        }
    }
}

fn is_there() -> bool {
    rustix::termios::tcgetattr(io::stdin()).is_ok()
}
