//! One writer: an exclusive advisory lock with a name on it.

use std::fmt;
use std::fs::{self, File, TryLockError};
use std::io::{Seek, Write};
use std::path::Path;
use std::time::Duration;

use super::error::{Error, Result};
use super::files;

const FILE: &str = "lock";

/// Who holds the lock.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Holder {
    /// The process.
    pub pid: u32,
    /// Since when, by the wall clock.
    pub since: String,
}

impl fmt::Display for Holder {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "process {} is writing since {}", self.pid, self.since)
    }
}

/// The held lock; it ends with the process, however that ends.
#[derive(Debug)]
pub(super) struct Lock {
    _file: File,
}

/// Takes the lock, trying again until `wait` is over.
pub(super) fn take(dir: &Path, wait: Duration) -> Result<Lock> {
    const PAUSE: Duration = Duration::from_millis(50);
    let path = dir.join(FILE);
    let mut file = files::private_file(&path)?;
    let mut left = wait;
    loop {
        match file.try_lock() {
            Ok(()) => break,
            Err(TryLockError::WouldBlock) if left > Duration::ZERO => {
                let pause = PAUSE.min(left);
                std::thread::sleep(pause);
                left -= pause;
            }
            Err(TryLockError::WouldBlock) => return Err(Error::locked(holder(dir))),
            Err(TryLockError::Error(e)) => return Err(Error::file(&path, "lock", e)),
        }
    }
    let text = format!("{}\n{}\n", std::process::id(), since());
    file.set_len(0)
        .and_then(|()| file.rewind())
        .and_then(|()| file.write_all(text.as_bytes()))
        .map_err(|e| Error::file(&path, "write", e))?;
    Ok(Lock { _file: file })
}

fn since() -> String {
    let now = crate::clock::now();
    chrono::DateTime::from_timestamp_millis(now.utc_ms + i64::from(now.offset_minutes) * 60_000)
        .map_or_else(String::new, |t| t.format("%Y-%m-%d %H:%M").to_string())
}

/// Reads who holds the lock, as the holder wrote it.
pub(super) fn holder(dir: &Path) -> Option<Holder> {
    let text = fs::read_to_string(dir.join(FILE)).ok()?;
    let mut lines = text.lines();
    Some(Holder {
        pid: lines.next()?.parse().ok()?,
        since: lines.next()?.to_owned(),
    })
}
