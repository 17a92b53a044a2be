//! Making and opening a store.

use std::path::Path;
use std::sync::{Mutex, OnceLock};

use rusqlite::{Connection, OpenFlags};
use uuid::Uuid;

use super::cell::Value;
use super::error::{Error, ErrorKind, Result};
use super::key::{KeyFile, RawKey, RecoveryKey, Secret};
use super::ledger::hex;
use super::row::{Chain, Programme, Setting, Station};
use super::{
    Access, Author, Joining, Kdf, Merged, New, Store, files, lock, new_id, packet, project, schema,
    upgrade, write,
};

/// Name of the database.
pub(super) const FILE: &str = "store.db";

/// What a connection is opened for.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum For {
    /// Entries: every commit is durable.
    Entries,
    /// Reading only.
    Reading,
    /// Reading a packet, beside the store itself: less memory.
    Packet,
    /// Drafts: a power loss may cost the last second.
    Drafts,
}

/// Opens a keyed connection, with the pragmas in the order they must have.
pub(super) fn connect(path: &Path, key: &RawKey, purpose: For) -> Result<Connection> {
    let flags = OpenFlags::SQLITE_OPEN_NO_MUTEX
        | if matches!(purpose, For::Reading | For::Packet) {
            OpenFlags::SQLITE_OPEN_READ_ONLY
        } else {
            files::private_file(path)?;
            OpenFlags::SQLITE_OPEN_READ_WRITE
        };
    engine_stays();
    let conn = Connection::open_with_flags(path, flags)?;
    keyed(&conn, key, purpose).map_err(|e| not_ours(path, e))?;
    project::functions(&conn)?;
    Ok(conn)
}

/// Keeps one keyed connection for as long as the program runs.
///
/// The engine sets its cipher up with the first keyed connection and puts it away with the last; two
/// threads that do so at the same time made opening fail once in some sixty runs of the tests.
fn engine_stays() {
    static KEPT: OnceLock<Option<Mutex<Connection>>> = OnceLock::new();
    KEPT.get_or_init(|| {
        let conn = Connection::open_in_memory().ok()?;
        pragma(&conn, "cipher_log_level = NONE").ok()?;
        pragma(&conn, "key = 'no data'").ok()?;
        Some(Mutex::new(conn))
    });
}

fn keyed(conn: &Connection, key: &RawKey, purpose: For) -> rusqlite::Result<()> {
    // First of all, else the engine writes about a wrong key to the terminal.
    pragma(conn, "cipher_log_level = NONE")?;
    let raw = zeroize::Zeroizing::new(format!("key = \"x'{}'\"", hex(&key[..])));
    pragma(conn, &raw)?;
    for one in [
        "foreign_keys = ON",
        "recursive_triggers = ON",
        "trusted_schema = OFF",
    ] {
        pragma(conn, one)?;
    }
    if matches!(purpose, For::Entries | For::Drafts) {
        pragma(conn, "journal_mode = WAL")?;
    }
    pragma(
        conn,
        match purpose {
            For::Drafts => "synchronous = NORMAL",
            For::Entries | For::Reading | For::Packet => "synchronous = FULL",
        },
    )?;
    let cache = if purpose == For::Packet {
        "cache_size = -8192"
    } else {
        "cache_size = -65536"
    };
    pragma(conn, cache)?;
    // A large import leaves no large log behind.
    pragma(conn, "journal_size_limit = 67108864")?;
    conn.busy_timeout(std::time::Duration::from_secs(5))?;
    conn.set_prepared_statement_cache_capacity(256);
    conn.query_row("SELECT count(*) FROM sqlite_schema", [], |_| Ok(()))
}

fn not_ours(path: &Path, error: rusqlite::Error) -> Error {
    match error.sqlite_error_code() {
        Some(rusqlite::ErrorCode::NotADatabase) => Error::new(
            ErrorKind::Damaged,
            format!("{} does not fit its key file", path.display()),
        )
        .with_hint("store.db and store.key belong together: copy both from the same backup"),
        _ => error.into(),
    }
}

fn pragma(conn: &Connection, text: &str) -> rusqlite::Result<()> {
    let mut statement = conn.prepare(&format!("PRAGMA {text}"))?;
    let mut rows = statement.query([])?;
    while rows.next()?.is_some() {}
    Ok(())
}

fn refuse_taken(dir: &Path) -> Result<()> {
    if dir.join(super::key::FILE).exists() {
        return Err(Error::new(
            ErrorKind::Exists,
            format!("there is a store in {} already", dir.display()),
        )
        .with_hint("open it, or name another folder with --store"));
    }
    if dir.join(FILE).exists() {
        return Err(Error::new(
            ErrorKind::Exists,
            format!("{} holds a {FILE} without its key file", dir.display()),
        )
        .with_hint("copy store.key back from a backup, or name another folder with --store"));
    }
    Ok(())
}

/// The first entries of a store.
struct First<'a> {
    programme_id: Uuid,
    /// None where a packet brings it.
    programme: Option<(Programme, Setting)>,
    station: Station,
    /// What is taken over before anything else, and the key of packets.
    packet: Option<(&'a Path, &'a Secret)>,
}

impl First<'_> {
    fn make(
        &self,
        dir: &Path,
        raw_key: &RawKey,
        file: &KeyFile,
    ) -> Result<(Store, Option<Merged>)> {
        files::private_dir(dir)?;
        files::refuse_network(dir)?;
        let lock = lock::take(dir, std::time::Duration::ZERO)?;
        // Asked again, since another process may have made one while the key was derived. From here
        // on whatever is in the folder is ours to remove.
        refuse_taken(dir)?;
        let made = self.fill(dir, raw_key, file);
        if made.is_err() {
            for name in [FILE, "store.db-wal", "store.db-shm", "lock"] {
                let _ = std::fs::remove_file(dir.join(name));
            }
        }
        let (conn, chain, merged) = made?;
        let store = Store {
            conn,
            dir: dir.to_owned(),
            info: file.info()?,
            raw_key: raw_key.clone(),
            lock: Some(lock),
            programme: self.programme_id,
            station: self.station.station_id,
            chain,
        };
        Ok((store, merged))
    }

    /// Writes the database and then the key file, which makes it a store.
    fn fill(
        &self,
        dir: &Path,
        raw_key: &RawKey,
        file: &KeyFile,
    ) -> Result<(Connection, Uuid, Option<Merged>)> {
        let mut conn = connect(&dir.join(FILE), raw_key, For::Entries)?;
        pragma(
            &conn,
            &format!("application_id = {}", schema::APPLICATION_ID),
        )?;
        schema::migrate(&mut conn, |_| Ok(()))?;
        let (packet_key, merged) = match self.packet {
            None => (packet::new_key()?, None),
            Some((from, secret)) => {
                let (key, merged) = packet::begin_with(&mut conn, dir, from, secret)?;
                (key, Some(merged))
            }
        };
        let (station, chain) = (self.station.station_id, new_id());
        let author = Author {
            screener: None,
            at: crate::clock::now(),
        };
        write::append(&mut conn, chain, &author, |tx| {
            tx.add(&Chain {
                id: new_id(),
                chain_id: chain,
                why: "init".to_owned(),
                follows_chain: None,
                follows_seq: None,
                follows_hash: None,
            })?;
            if let Some((programme, _)) = &self.programme {
                tx.add(programme)?;
            }
            tx.add(&self.station)?;
            if let Some((_, notation)) = &self.programme {
                tx.add(notation)?;
            }
            tx.write_first_here(self.programme_id, station, chain, &packet_key)
        })?;
        // The key file last: a folder without one is no store.
        file.write(dir)?;
        Ok((conn, chain, merged))
    }
}

impl First<'_> {
    /// Makes the key and the store.
    fn begin(
        &self,
        dir: &Path,
        programme: &str,
        secret: &Secret,
        kdf: Kdf,
    ) -> Result<(Store, Option<RecoveryKey>, Option<Merged>)> {
        let raw_key = super::key::random::<32>()?;
        // Refuses a weak passphrase before anything is made.
        let (file, recovery) = KeyFile::make(programme, self.programme_id, secret, kdf, &raw_key)?;
        let stood = dir.exists();
        let made = self.make(dir, &raw_key, &file);
        if made.is_err() && !stood {
            // Stays where another process has put something in it.
            let _ = std::fs::remove_dir(dir);
        }
        made.map(|(store, merged)| (store, recovery, merged))
    }
}

fn new_station(name: String) -> Station {
    Station {
        id: new_id(),
        station_id: new_id(),
        name,
        chart_id: None,
        task: None,
        masked: None,
    }
}

impl Store {
    /// Makes a new store in a folder that has none.
    ///
    /// Returns the recovery key, to be printed once, where the store is protected.
    pub fn create(dir: &Path, new: New) -> Result<(Store, Option<RecoveryKey>)> {
        files::keep_private();
        refuse_taken(dir)?;
        let New {
            programme,
            programme_id,
            station,
            notation,
            secret,
            kdf,
        } = new;
        let programme_id = programme_id.unwrap_or_else(new_id);
        let first = First {
            programme_id,
            programme: Some((
                Programme {
                    id: new_id(),
                    programme_id,
                    name: programme.clone(),
                },
                Setting {
                    id: new_id(),
                    name: "notation".to_owned(),
                    value: notation,
                },
            )),
            station: new_station(station),
            packet: None,
        };
        let (store, recovery, _) = first.begin(dir, &programme, &secret, kdf)?;
        Ok((store, recovery))
    }

    /// Makes a store of a packet: a further station of its programme, with all that the packet holds.
    ///
    /// Returns the recovery key, to be printed once, where the store is protected.
    pub fn join(dir: &Path, new: Joining<'_>) -> Result<(Store, Option<RecoveryKey>, Merged)> {
        files::keep_private();
        refuse_taken(dir)?;
        let info = packet::info(new.packet)?;
        if !info.joinable {
            return Err(Error::new(
                ErrorKind::Refused,
                "no new store can be made of this packet: it is for stores that joined already",
            )
            .with_hint("write one for joining: twoline packet write FILE --for-join"));
        }
        let first = First {
            programme_id: info.programme_id,
            programme: None,
            station: new_station(new.station),
            packet: Some((new.packet, new.packet_secret)),
        };
        let (store, recovery, merged) = first.begin(dir, &info.programme, &new.secret, new.kdf)?;
        let merged = merged.ok_or_else(|| Error::new(ErrorKind::Engine, "no packet was read"))?;
        Ok((store, recovery, merged))
    }

    /// Opens a store.
    pub fn open(dir: &Path, secret: &Secret, access: Access) -> Result<Store> {
        let raw_key = KeyFile::read(dir)?.unlock(secret)?;
        Store::with_key(dir, raw_key, access)
    }

    pub(super) fn with_key(dir: &Path, raw_key: RawKey, access: Access) -> Result<Store> {
        files::keep_private();
        let file = KeyFile::read(dir)?;
        files::refuse_network(dir)?;
        let path = dir.join(FILE);
        if std::fs::metadata(&path).is_ok_and(|found| found.len() == 0) {
            return Err(
                Error::new(ErrorKind::Damaged, format!("{} is empty", path.display()))
                    .with_hint("copy store.db back from a backup of this store"),
            );
        }
        if !path.exists() {
            return Err(Error::new(
                ErrorKind::NotAStore,
                format!("{} is missing beside its key file", path.display()),
            )
            .with_hint("copy store.db back from a backup of this store"));
        }
        let (lock, purpose) = match access {
            Access::Write { wait } => {
                let lock = lock::take(dir, wait)?;
                files::keep_to_owner(dir, &dir.join(super::key::FILE));
                (Some(lock), For::Entries)
            }
            Access::ReadOnly => (None, For::Reading),
        };
        let mut conn = connect(&path, &raw_key, purpose)?;
        let id: i32 = conn.query_row("PRAGMA application_id", [], |r| r.get(0))?;
        if id != schema::APPLICATION_ID {
            return Err(Error::new(
                ErrorKind::NotAStore,
                format!("{} was not made by twoline", path.display()),
            ));
        }
        let version = schema::version(&conn)?;
        if version < schema::NEWEST {
            if lock.is_none() {
                return Err(upgrade::must_be_written(version));
            }
            upgrade::run(dir, &mut conn, &raw_key, version)?;
        }
        let here = conn.query_row("SELECT programme, station, chain FROM here", [], |r| {
            let id = |at| r.get_ref(at).map(Uuid::from_stored);
            Ok((id(0)?, id(1)?, id(2)?))
        });
        let Ok((Some(programme), Some(station), Some(chain))) = here else {
            return Err(Error::damaged(
                "here",
                None,
                "it does not say what this installation is",
            ));
        };
        Ok(Store {
            conn,
            dir: dir.to_owned(),
            info: file.info()?,
            raw_key,
            lock,
            programme,
            station,
            chain,
        })
    }

    /// Opens a store for writing, or, while another process writes, for reading only; then
    /// [`Store::holder`] says who.
    pub fn open_or_read(dir: &Path, secret: &Secret, wait: std::time::Duration) -> Result<Store> {
        match Store::open(dir, secret, Access::Write { wait }) {
            Err(error) if error.kind() == ErrorKind::Locked => {
                Store::open(dir, secret, Access::ReadOnly)
            }
            opened => opened,
        }
    }

    /// Returns the head of the ledger.
    pub fn head(&self) -> Result<super::Head> {
        self.read().head()
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    /// Stores are opened and closed on several threads at once: the engine sets itself up with the
    /// first keyed connection and puts itself away with the last.
    #[test]
    fn threads_open_and_close_at_once() {
        let temp = tempfile::TempDir::new().unwrap();
        std::thread::scope(|scope| {
            for thread in 0..8 {
                let path = temp.path().join(format!("{thread}.db"));
                scope.spawn(move || {
                    let key = RawKey::new([7; 32]);
                    for round in 0..500 {
                        let purpose = if round == 0 {
                            For::Drafts
                        } else {
                            For::Reading
                        };
                        drop(connect(&path, &key, purpose).unwrap());
                    }
                });
            }
        });
    }
}
