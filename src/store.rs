//! The encrypted, append-only store; the only place with SQL.
//!
//! - [`row`]: every table of entries, declared once
//! - [`ledger`]: the exact bytes that are hashed
//! - [`key`]: the wrapped key and who may open it
//! - [`Store`]: open, append, read, verify, back up
//! - [`Reads`]: typed reads for screens and reports
//! - [`Drafts`]: what is typed and not yet signed

mod backup;
mod cell;
mod chain;
mod drafts;
mod error;
mod files;
pub mod key;
pub mod ledger;
mod lock;
mod open;
mod packet;
mod preferences;
mod project;
pub mod read;
mod restore;
pub mod row;
mod schema;
mod upgrade;
mod verify;
mod write;

use std::path::{Path, PathBuf};
use std::sync::Mutex;
use std::time::Duration;

use rusqlite::Connection;
use uuid::{ContextV7, Timestamp, Uuid};

pub use cell::{Cell, Ids, Value};
pub use chain::ChainStart;
pub use drafts::{Draft, DraftDay, Drafts};
pub use error::{Error, ErrorKind, Result};
pub use key::{Info, Kdf, RecoveryKey, Secret};
pub use ledger::{ExpectedHead, Head};
pub use lock::Holder;
pub use packet::{ForJoin, Fork, Merged, PacketInfo, info as packet_info};
pub use read::Reads;
pub use row::{DayKey, Row};
pub use verify::{Damage, Verified};
pub use write::{Author, Put, Tx};

/// What a new store is made with.
#[derive(Debug)]
pub struct New {
    /// Name of the programme.
    pub programme: String,
    /// The programme to join; none makes a new one.
    pub programme_id: Option<Uuid>,
    /// Name of this station.
    pub station: String,
    /// How bare acuities are read and shown: `feet` or `metres`.
    pub notation: String,
    /// What opens it.
    pub secret: Secret,
    /// How dear a guess is made.
    pub kdf: Kdf,
}

/// What a store is made with that joins a programme.
#[derive(Debug)]
pub struct Joining<'a> {
    /// A packet for joining.
    pub packet: &'a Path,
    /// What opens it.
    pub packet_secret: &'a Secret,
    /// Name of this station.
    pub station: String,
    /// What opens the new store.
    pub secret: Secret,
    /// How dear a guess is made.
    pub kdf: Kdf,
}

/// How a store is opened.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Access {
    /// For writing, waiting so long for another process to let go.
    Write {
        /// How long to wait.
        wait: Duration,
    },
    /// For reading only.
    ReadOnly,
}

/// An open store: one connection, one chain, one thread.
pub struct Store {
    conn: Connection,
    dir: PathBuf,
    info: Info,
    raw_key: key::RawKey,
    lock: Option<lock::Lock>,
    programme: Uuid,
    station: Uuid,
    chain: Uuid,
}

// By hand: the key must never reach a log.
impl std::fmt::Debug for Store {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Store")
            .field("dir", &self.dir)
            .field("writable", &self.is_writable())
            .finish_non_exhaustive()
    }
}

impl Store {
    /// Returns the folder of the store.
    pub fn dir(&self) -> &Path {
        &self.dir
    }

    /// Returns the readable part of the key file.
    pub fn key_info(&self) -> &Info {
        &self.info
    }

    /// Returns the id of the programme.
    pub fn programme_id(&self) -> Uuid {
        self.programme
    }

    /// Returns the id of this station.
    pub fn station_id(&self) -> Uuid {
        self.station
    }

    /// Returns the chain this store writes.
    pub fn chain(&self) -> Uuid {
        self.chain
    }

    /// Says whether this process may write.
    pub fn is_writable(&self) -> bool {
        self.lock.is_some()
    }

    /// Returns who holds the lock, when this store is read-only because another process writes.
    pub fn holder(&self) -> Option<Holder> {
        if self.is_writable() {
            None
        } else {
            lock::holder(&self.dir)
        }
    }

    /// Returns who writes the store in a folder just now, without opening it.
    pub fn writer(dir: &Path) -> Result<Option<Holder>> {
        match lock::take(dir, Duration::ZERO) {
            Ok(_) => Ok(None),
            Err(error) if error.kind() == ErrorKind::Locked => Ok(lock::holder(dir)),
            Err(error) => Err(error),
        }
    }

    /// Returns the typed reads.
    pub fn read(&self) -> Reads<'_> {
        Reads::new(&self.conn)
    }

    /// Opens the drafts beside the store, on a thread of their own.
    pub fn drafts(&self) -> Result<Drafts> {
        if !self.is_writable() {
            return Err(Error::read_only(&self.dir));
        }
        Drafts::open(&self.dir, &self.raw_key)
    }
}

/// Makes the id of a new entry: `UUIDv7`, so that entries lie in the file in the order they were made.
pub fn new_id() -> Uuid {
    static CONTEXT: Mutex<Option<ContextV7>> = Mutex::new(None);
    let now = u64::try_from(crate::clock::now().utc_ms).unwrap_or(0);
    let mut guard = CONTEXT
        .lock()
        .unwrap_or_else(std::sync::PoisonError::into_inner);
    let context = guard.get_or_insert_with(ContextV7::new);
    Uuid::new_v7(Timestamp::from_unix(
        &*context,
        now / 1000,
        (now % 1000) as u32 * 1_000_000,
    ))
}
