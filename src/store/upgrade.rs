//! Bringing a store of an older version up to date: a proved copy first, then all or nothing.

use std::fs;
use std::path::{Path, PathBuf};

use rusqlite::Connection;

use super::backup::{copy_database, copy_key_file};
use super::error::{Error, ErrorKind, Result};
use super::key::RawKey;
use super::open::{FILE, For, connect};
use super::{files, packet, schema, verify};

/// Says what to do about an older store that was opened for reading only.
pub(super) fn must_be_written(version: usize) -> Error {
    Error::new(
        ErrorKind::Older,
        format!(
            "this store has schema version {version} and must be brought to {} first",
            schema::NEWEST
        ),
    )
    .with_hint(
        "run `twoline` once, or any command that writes: it makes a copy beside the store first",
    )
}

/// Copies the store beside itself, proves the copy, migrates, and keeps that only if it verifies.
///
/// The caller holds the lock. Whatever fails, the old store is as it was.
pub(super) fn run(dir: &Path, conn: &mut Connection, key: &RawKey, from: usize) -> Result<()> {
    let copy = free_name(dir, from);
    let made = files::private_dir(&copy).and_then(|()| copied(dir, conn, key, &copy));
    if made.is_err() {
        let _ = fs::remove_dir_all(&copy);
    }
    made?;
    let packet_key = packet::new_key()?;
    schema::migrate(conn, |conn| {
        conn.execute(
            "UPDATE here SET packet_key = coalesce(packet_key, ?1)",
            [&packet_key[..]],
        )?;
        verify::uncommitted(conn)?;
        Ok(())
    })
}

/// Returns a folder in the store's own that no earlier try left behind.
fn free_name(dir: &Path, from: usize) -> PathBuf {
    let named = |n: u32| {
        let more = if n == 1 {
            String::new()
        } else {
            format!("-{n}")
        };
        dir.join(format!("copy-of-version-{from}{more}"))
    };
    (1..=u32::MAX)
        .map(named)
        .find(|path| !path.exists())
        .unwrap_or_else(|| named(1))
}

fn copied(dir: &Path, conn: &Connection, key: &RawKey, copy: &Path) -> Result<()> {
    let path = copy.join(FILE);
    let head = verify::ledger(conn)?.head;
    copy_database(conn, &path, key)?;
    copy_key_file(dir, copy)?;
    files::sync(&path)?;
    let found = {
        let conn = connect(&path, key, For::Reading)?;
        verify::ledger(&conn)?.head
    };
    for extra in ["store.db-wal", "store.db-shm"] {
        let _ = fs::remove_file(copy.join(extra));
    }
    if found != head {
        return Err(Error::new(
            ErrorKind::Engine,
            "the copy made before bringing the store up to date is not the same",
        )
        .with_hint("nothing was changed; check the disk and open the store again"));
    }
    files::sync(copy)?;
    files::sync_parent(copy)
}
