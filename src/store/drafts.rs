//! What is typed and not yet signed.
//!
//! `drafts.db` lies beside the store under the same key and is in no ledger, report or backup. A
//! thread owns the connection: whoever types never waits for it, and a kill loses at most what was
//! typed in the last half second.

use std::collections::HashMap;
use std::path::Path;
use std::sync::mpsc::{Receiver, RecvTimeoutError, Sender, channel};
use std::thread::JoinHandle;
use std::time::Duration;

use rusqlite::{Connection, params};
use uuid::Uuid;

use super::cell::Value;
use super::error::{Error, ErrorKind, Result};
use super::files;
use super::key::RawKey;
use super::open::{For, connect};
use super::row::DayKey;
use crate::domain::codes::Attempt;

const FILE: &str = "drafts.db";
/// The longest that typing is only in memory.
const PAUSE: Duration = Duration::from_millis(400);

/// The screening day a draft belongs to.
pub type DraftDay = DayKey;

/// What is typed of one child on one day.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Draft {
    /// The day.
    pub day: DraftDay,
    /// The child.
    pub child_id: String,
    /// The id the visit will have, given at the first key.
    pub visit_id: Uuid,
    /// Which visit.
    pub attempt: Attempt,
    /// Raw text by field name, in the order of the screen.
    pub fields: Vec<(String, String)>,
    /// Where the cursor stands.
    pub cursor: String,
    /// When it was last typed in, UTC milliseconds.
    pub updated_at_ms: i64,
}

enum Message {
    Save(Box<Draft>),
    Delete(DraftDay, String),
    Flush(Sender<Result<()>>),
    Load(Option<DraftDay>, Sender<Result<Vec<Draft>>>),
}

/// A handle on the thread that keeps drafts; when it is dropped everything is written first.
#[derive(Debug)]
pub struct Drafts {
    to: Option<Sender<Message>>,
    thread: Option<JoinHandle<()>>,
}

impl Drafts {
    pub(super) fn open(dir: &Path, key: &RawKey) -> Result<Drafts> {
        let path = dir.join(FILE);
        let conn = match Drafts::prepared(&path, key) {
            // Drafts that cannot be read must not keep anybody from working: they are kept aside.
            Err(error) if error.kind() == ErrorKind::Damaged => {
                files::set_aside(&path)?;
                Drafts::prepared(&path, key)?
            }
            opened => opened?,
        };
        let (to, from) = channel();
        let thread = std::thread::Builder::new()
            .name("drafts".to_owned())
            .spawn(move || Keeper::new(conn).run(&from))
            .map_err(|e| Error::file(&path, "start the thread of", e))?;
        Ok(Drafts {
            to: Some(to),
            thread: Some(thread),
        })
    }

    fn prepared(path: &Path, key: &RawKey) -> Result<Connection> {
        let conn = connect(path, key, For::Drafts)?;
        conn.execute_batch(
            "CREATE TABLE IF NOT EXISTS draft (
                 site TEXT NOT NULL,
                 screened_on TEXT NOT NULL,
                 protocol TEXT NOT NULL,
                 child_id TEXT NOT NULL,
                 visit_id BLOB NOT NULL,
                 attempt TEXT NOT NULL,
                 fields TEXT NOT NULL,
                 cursor TEXT NOT NULL,
                 updated_at_ms INTEGER NOT NULL,
                 PRIMARY KEY (site, screened_on, protocol, child_id)
             ) STRICT, WITHOUT ROWID;",
        )?;
        conn.query_row("SELECT count(*) FROM draft", [], |_| Ok(()))?;
        Ok(conn)
    }

    fn send(&self, message: Message) -> Result<()> {
        self.to
            .as_ref()
            .and_then(|to| to.send(message).ok())
            .ok_or_else(gone)
    }

    /// Takes a draft; it is on disk half a second later at most. Never waits.
    pub fn save(&self, draft: Draft) -> Result<()> {
        self.send(Message::Save(Box::new(draft)))
    }

    /// Forgets the draft of a child, once it was signed. Never waits.
    pub fn delete(&self, day: &DraftDay, child_id: &str) -> Result<()> {
        self.send(Message::Delete(day.clone(), child_id.to_owned()))
    }

    /// Waits until everything given so far is on disk, and says what went wrong if it is not.
    pub fn flush(&self) -> Result<()> {
        let (back, answer) = channel();
        self.send(Message::Flush(back))?;
        answer.recv().map_err(|_| gone())?
    }

    /// Returns the drafts of a day, those just given included.
    pub fn load_all(&self, day: &DraftDay) -> Result<Vec<Draft>> {
        self.load(Some(day.clone()))
    }

    /// Returns every draft, to say at the start that there are some.
    pub fn load_every(&self) -> Result<Vec<Draft>> {
        self.load(None)
    }

    fn load(&self, day: Option<DraftDay>) -> Result<Vec<Draft>> {
        let (back, answer) = channel();
        self.send(Message::Load(day, back))?;
        answer.recv().map_err(|_| gone())?
    }
}

fn gone() -> Error {
    Error::new(
        ErrorKind::Engine,
        "drafts are no longer kept: their thread ended",
    )
    .with_hint("sign what is on the screen, then start again")
}

impl Drop for Drafts {
    fn drop(&mut self) {
        // The thread writes what is left when nobody can send any more.
        self.to = None;
        if let Some(thread) = self.thread.take() {
            let _ = thread.join();
        }
    }
}

/// The thread's side: only the latest text of each draft is written.
struct Keeper {
    conn: Connection,
    waiting: HashMap<(DraftDay, String), Option<Draft>>,
}

impl Keeper {
    fn new(conn: Connection) -> Keeper {
        Keeper {
            conn,
            waiting: HashMap::new(),
        }
    }

    fn run(mut self, from: &Receiver<Message>) {
        // The pause ends that long after the first change, however fast the typing goes on.
        while let Ok(message) = from.recv() {
            self.take(message);
            let mut left = PAUSE;
            while !self.waiting.is_empty() {
                let step = Duration::from_millis(50).min(left);
                match from.recv_timeout(step) {
                    Ok(message) => self.take(message),
                    Err(RecvTimeoutError::Timeout) => {}
                    Err(RecvTimeoutError::Disconnected) => break,
                }
                left = left.saturating_sub(step);
                if left.is_zero() {
                    // A full disk is told at the next flush; the text stays in memory until then.
                    let _ = self.write();
                    break;
                }
            }
        }
        let _ = self.write();
    }

    fn take(&mut self, message: Message) {
        match message {
            Message::Save(draft) => {
                let key = (draft.day.clone(), draft.child_id.clone());
                self.waiting.insert(key, Some(*draft));
            }
            Message::Delete(day, child) => {
                self.waiting.insert((day, child), None);
            }
            Message::Flush(back) => {
                let _ = back.send(self.write().and_then(|()| self.make_durable()));
            }
            Message::Load(day, back) => {
                let loaded = self.write().and_then(|()| self.load(day.as_ref()));
                let _ = back.send(loaded);
            }
        }
    }

    fn write(&mut self) -> Result<()> {
        if self.waiting.is_empty() {
            return Ok(());
        }
        let tx = self.conn.transaction()?;
        for ((day, child), draft) in &self.waiting {
            match draft {
                None => tx
                    .prepare_cached(
                        "DELETE FROM draft WHERE site = ?1 AND screened_on = ?2 AND protocol = ?3 \
                         AND child_id = ?4",
                    )?
                    .execute(params![
                        day.site,
                        day.screened_on.cell(),
                        day.protocol,
                        child
                    ])?,
                Some(draft) => tx
                    .prepare_cached(
                        "INSERT OR REPLACE INTO draft (site, screened_on, protocol, child_id, \
                         visit_id, attempt, fields, cursor, updated_at_ms) \
                         VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9)",
                    )?
                    .execute(params![
                        day.site,
                        day.screened_on.cell(),
                        day.protocol,
                        child,
                        draft.visit_id.cell(),
                        draft.attempt.cell(),
                        encoded(&draft.fields),
                        draft.cursor,
                        draft.updated_at_ms,
                    ])?,
            };
        }
        tx.commit()?;
        self.waiting.clear();
        Ok(())
    }

    /// In `synchronous = NORMAL` a commit is on disk for certain after a checkpoint.
    fn make_durable(&self) -> Result<()> {
        self.conn
            .query_row("PRAGMA wal_checkpoint(FULL)", [], |_| Ok(()))?;
        Ok(())
    }

    fn load(&self, day: Option<&DraftDay>) -> Result<Vec<Draft>> {
        let mut statement = self.conn.prepare_cached(
            "SELECT site, screened_on, protocol, child_id, visit_id, attempt, fields, cursor, \
             updated_at_ms FROM draft ORDER BY updated_at_ms, child_id",
        )?;
        let mut rows = statement.query([])?;
        let mut out = Vec::new();
        while let Some(row) = rows.next()? {
            let draft =
                read(row).ok_or_else(|| Error::damaged("draft", None, "it cannot be read back"))?;
            if day.is_none_or(|day| *day == draft.day) {
                out.push(draft);
            }
        }
        Ok(out)
    }
}

fn read(row: &rusqlite::Row<'_>) -> Option<Draft> {
    fn take<T: Value>(row: &rusqlite::Row<'_>, at: usize) -> Option<T> {
        T::from_stored(row.get_ref(at).ok()?)
    }
    Some(Draft {
        day: DayKey {
            site: take(row, 0)?,
            screened_on: take(row, 1)?,
            protocol: take(row, 2)?,
        },
        child_id: take(row, 3)?,
        visit_id: take(row, 4)?,
        attempt: take(row, 5)?,
        fields: decoded(&take::<String>(row, 6)?)?,
        cursor: take(row, 7)?,
        updated_at_ms: take(row, 8)?,
    })
}

/// Writes fields as `name=value` lines; a backslash escapes itself and the end of a line.
fn encoded(fields: &[(String, String)]) -> String {
    let mut out = String::new();
    for (name, value) in fields {
        for (text, end) in [(name, '='), (value, '\n')] {
            for c in text.chars() {
                match c {
                    '\\' => out.push_str("\\\\"),
                    '\n' => out.push_str("\\n"),
                    '=' => out.push_str("\\e"),
                    c => out.push(c),
                }
            }
            out.push(end);
        }
    }
    out
}

fn decoded(text: &str) -> Option<Vec<(String, String)>> {
    let plain = |text: &str| {
        let mut out = String::new();
        let mut chars = text.chars();
        while let Some(c) = chars.next() {
            out.push(match c {
                '\\' => match chars.next()? {
                    'n' => '\n',
                    'e' => '=',
                    '\\' => '\\',
                    _ => return None,
                },
                c => c,
            });
        }
        Some(out)
    };
    text.split_terminator('\n')
        .map(|line| {
            let (name, value) = line.split_once('=')?;
            Some((plain(name)?, plain(value)?))
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::{decoded, encoded};

    #[test]
    fn any_text_comes_back() {
        let fields: Vec<(String, String)> = [
            ("a", ""),
            ("", "b"),
            ("distance_right", "20/40-1"),
            ("note", "two\nlines = \\n \\\\ \u{1b}[31m é"),
        ]
        .map(|(n, v)| (n.to_owned(), v.to_owned()))
        .to_vec();
        assert_eq!(decoded(&encoded(&fields)), Some(fields));
        assert_eq!(decoded(""), Some(Vec::new()));
        assert_eq!(decoded("no sign"), None);
    }
}
