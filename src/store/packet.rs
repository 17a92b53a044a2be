//! Packets: all that a store holds, in one encrypted file on a stick.
//!
//! A packet is a readable header and a database of the store's own schema, encrypted with the packet
//! key. That key is 32 random bytes, made with the programme's first store and kept inside every store
//! of it, so that an exchange asks for nothing. A packet for joining also holds it wrapped by a
//! passphrase (Argon2id, XChaCha20-Poly1305, as in `store.key`); `init --join` takes it over.
//!
//! Layout: `twoline-packet` and a line break, the length of the header in four bytes (big-endian), the
//! header in TOML, SHA-256 of all that, then the database, whose length and SHA-256 the header says.

mod file;
mod merge;

use std::fs;
use std::path::{Path, PathBuf};

use rusqlite::{Connection, OptionalExtension};
use uuid::Uuid;

use super::backup::copy_database;
use super::cell::Value;
use super::error::{Error, ErrorKind, Result};
use super::key::{KeyFile, RawKey, random, raw};
use super::open::{For, connect};
use super::{Author, Head, Kdf, Secret, Store, files, schema, verify};

use file::Header;
pub use merge::{Fork, Merged};

/// Who may make a store of a packet, beside the stores of its programme.
#[derive(Debug, Clone)]
pub enum ForJoin {
    /// Nobody.
    No,
    /// Who has this passphrase.
    With(Secret, Kdf),
}

/// What a packet says of itself in the clear.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct PacketInfo {
    /// Name of the programme.
    pub programme: String,
    /// Id of the programme.
    pub programme_id: Uuid,
    /// Name of the station that wrote it.
    pub station: String,
    /// Whether a new store can be made of it.
    pub joinable: bool,
    /// Whether a passphrase is needed for that.
    pub protected: bool,
}

/// Returns what a packet says of itself, after its header was checked.
pub fn info(path: &Path) -> Result<PacketInfo> {
    let (header, _) = Header::open(path)?;
    let key = header.access.info()?;
    Ok(PacketInfo {
        programme: key.programme,
        programme_id: key.programme_id,
        station: header.station,
        joinable: header.access.opens(),
        protected: key.protected,
    })
}

/// Fills an empty database with what a packet holds; returns the packet key too.
pub(super) fn begin_with(
    conn: &mut Connection,
    dir: &Path,
    from: &Path,
    secret: &Secret,
) -> Result<(RawKey, Merged)> {
    let mut found = None;
    let packet = Packet::open(from, dir, None, |access| {
        let key = access.unlock(secret).map_err(|e| match e.kind() {
            ErrorKind::WrongSecret => Error::new(
                ErrorKind::WrongSecret,
                "the passphrase does not open this packet",
            )
            .with_hint("it is the one chosen with `twoline packet write FILE --for-join`"),
            _ => e,
        })?;
        found = Some(key.clone());
        Ok(key)
    })?;
    let key = found.ok_or_else(|| Error::new(ErrorKind::Engine, "the packet has no key"))?;
    let (merged, _) = merge::merge(conn, &packet.conn, None, |_, _| {})?;
    Ok((key, merged))
}

/// Makes the key of a programme's packets.
pub(super) fn new_key() -> Result<RawKey> {
    random::<32>()
}

impl Store {
    /// Writes all that this store holds as a packet and returns its head.
    ///
    /// It is written aside, synced, read back and only then gets its name. A file that is there
    /// already is replaced only when that is wanted and it is a packet of the same programme.
    pub fn write_packet(&self, to: &Path, join: &ForJoin, replace: bool) -> Result<Head> {
        self.may_be_written(to, replace)?;
        let key = self.packet_key()?;
        let unprotected = ForJoin::With(Secret::None, Kdf::Calibrated);
        let join = if self.info.protected {
            join
        } else {
            &unprotected
        };
        let access = KeyFile::for_packet(&self.info, join, &key)?;
        let station = self.read().station(self.station)?;
        files::sweep(&self.dir, "packet-");
        let folder = to.parent().filter(|folder| !folder.as_os_str().is_empty());
        let named = to.file_name().unwrap_or_default().to_string_lossy();
        files::sweep(folder.unwrap_or(Path::new(".")), &format!("{named}."));
        let database = Aside::new(
            self.dir
                .join(format!("packet-{}.partial", std::process::id())),
        );
        copy_database(&self.conn, &database.0, &key)?;
        let head = {
            let conn = connect(&database.0, &key, For::Packet)?;
            verify::ledger(&conn)?.head
        };
        let mut name = to.as_os_str().to_owned();
        name.push(format!(".{}.partial", std::process::id()));
        let aside = Aside::new(PathBuf::from(name));
        let header = Header {
            version: file::VERSION,
            station: station.map(|s| s.name).unwrap_or_default(),
            schema: schema::NEWEST,
            bytes: 0,
            sha256: String::new(),
            access,
        };
        file::write(&aside.0, header, &database.0)?;
        file::read_back(&aside.0)?;
        fs::rename(&aside.0, to).map_err(|e| Error::file(to, "write", e))?;
        files::sync_parent(to)?;
        Ok(head)
    }

    fn may_be_written(&self, to: &Path, replace: bool) -> Result<()> {
        if !to.exists() {
            return Ok(());
        }
        let there = Error::new(
            ErrorKind::Exists,
            format!("{} is there already", to.display()),
        );
        if !replace {
            return Err(there.with_hint("name another file, or replace an older packet: --replace"));
        }
        let here = self.read().station(self.station_id())?.map(|s| s.name);
        match info(to) {
            Ok(found) if found.programme_id != self.programme => Err(there.with_hint(
                "it is a packet of another programme, so it is not replaced; name another file",
            )),
            Ok(found) if Some(&found.station) != here.as_ref() => Err(there.with_hint(format!(
                "it was written by {}: read it first, then name another file",
                found.station
            ))),
            Ok(_) => Ok(()),
            Err(_) => {
                Err(there.with_hint("it is not a packet, so it is not replaced; name another file"))
            }
        }
    }

    /// Takes over what a packet holds and this store does not; whole or not at all.
    ///
    /// `progress` gets entries done and in all.
    pub fn read_packet(
        &mut self,
        from: &Path,
        author: &Author,
        progress: impl FnMut(u64, u64),
    ) -> Result<Merged> {
        if !self.is_writable() {
            return Err(Error::read_only(&self.dir));
        }
        let key = self.packet_key()?;
        let packet = Packet::open(
            from,
            &self.dir,
            Some((self.programme, &self.info.programme)),
            |_| Ok(key),
        )?;
        let own = merge::Own {
            chain: self.chain,
            author: *author,
        };
        let (merged, chain) = merge::merge(&mut self.conn, &packet.conn, Some(&own), progress)?;
        self.chain = chain.unwrap_or(self.chain);
        Ok(merged)
    }

    fn packet_key(&self) -> Result<RawKey> {
        let stored: Option<Vec<u8>> = self
            .conn
            .query_row("SELECT packet_key FROM here", [], |r| r.get(0))
            .optional()?
            .flatten();
        let missing = || Error::damaged("here", None, "it has no packet key");
        let bytes = zeroize::Zeroizing::new(stored.ok_or_else(missing)?);
        raw(&bytes).map_err(|_| missing())
    }
}

/// A file that is removed when it is not needed any more; renamed away it is not there to remove.
struct Aside(PathBuf);

impl Aside {
    fn new(path: PathBuf) -> Aside {
        let _ = fs::remove_file(&path);
        Aside(path)
    }
}

impl Drop for Aside {
    fn drop(&mut self) {
        for ending in ["", "-wal", "-shm", "-journal"] {
            let mut name = self.0.as_os_str().to_owned();
            name.push(ending);
            let _ = fs::remove_file(name);
        }
    }
}

/// A packet that was checked from end to end, open for reading.
pub(super) struct Packet {
    pub(super) conn: Connection,
    /// Last, so that the connection is closed before its file goes.
    _database: Aside,
}

impl Packet {
    /// Opens a packet: its database goes, still encrypted, into a file of its own in `dir`, and every
    /// entry is checked before anything else is done with it.
    pub(super) fn open(
        from: &Path,
        dir: &Path,
        programme: Option<(Uuid, &str)>,
        key: impl FnOnce(&KeyFile) -> Result<RawKey>,
    ) -> Result<Packet> {
        let (header, mut rest) = Header::open(from)?;
        let info = header.access.info()?;
        if let Some((id, name)) = programme
            && id != info.programme_id
        {
            return Err(Error::new(
                ErrorKind::Refused,
                format!(
                    "this packet is of another programme, {}; this store belongs to {name}",
                    info.programme
                ),
            )
            .with_hint(
                "nothing was taken; only stores that joined one programme exchange packets",
            ));
        }
        if header.schema > schema::NEWEST {
            return Err(Error::newer(header.schema as i64, schema::NEWEST)
                .with_hint("read it with the newer twoline that wrote it; nothing was taken"));
        }
        files::sweep(dir, "packet-");
        let key = key(&header.access)?;
        let database = Aside::new(dir.join(format!("packet-{}.partial", std::process::id())));
        header.extract(from, &mut rest, &database.0)?;
        let conn = readable(&database.0, &key, header.schema).map_err(|e| match e.kind() {
            ErrorKind::DiskFull | ErrorKind::Newer => e,
            _ => Error::new(
                ErrorKind::Damaged,
                format!("{} cannot be opened with the packet key of this programme", from.display()),
            )
            .with_hint("nothing was taken; write the packet again, with a store that joined this programme"),
        })?;
        verify::ledger(&conn).map_err(|damage| {
            Error::new(
                ErrorKind::Damaged,
                format!("the packet {}: {damage}", from.display()),
            )
            .with_hint("nothing was taken; run `twoline verify` on the store that wrote it")
        })?;
        let holds: Uuid = conn
            .query_row("SELECT programme FROM here", [], |r| {
                Ok(r.get_ref(0).map(Uuid::from_stored))
            })??
            .unwrap_or_default();
        if holds != info.programme_id {
            return Err(Error::new(
                ErrorKind::Refused,
                "this packet holds another programme than its header says",
            )
            .with_hint("nothing was taken"));
        }
        Ok(Packet {
            conn,
            _database: database,
        })
    }
}

/// Opens the database of a packet for reading; one of an older schema is brought up to date first,
/// which the file aside is there for.
fn readable(path: &Path, key: &RawKey, said: usize) -> Result<Connection> {
    if said < schema::NEWEST {
        let mut conn = connect(path, key, For::Entries)?;
        schema::migrate(&mut conn, |_| Ok(()))?;
    }
    let conn = connect(path, key, For::Packet)?;
    let id: i32 = conn.query_row("PRAGMA application_id", [], |r| r.get(0))?;
    if id != schema::APPLICATION_ID || schema::version(&conn)? != schema::NEWEST {
        return Err(Error::new(ErrorKind::Damaged, "not what its header says"));
    }
    Ok(conn)
}
