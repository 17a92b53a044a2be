//! Bringing a store of an older version up to date: a proved copy first, then all or nothing.

use std::fs;
use std::path::{Path, PathBuf};

use rusqlite::Connection;

use super::backup::{copy_database, copy_key_file};
use super::error::{Error, ErrorKind, Result};
use super::key::{FILE as KEY_FILE, RawKey};
use super::ledger::Head;
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
    let head = verify::ledger(conn)?.head;
    // A try before this one may have left a copy of the same entries.
    let kept = names(dir, from)
        .take_while(|copy| copy.exists())
        .any(|copy| is_proved(dir, &copy, key, &(from, head)));
    if !kept {
        let copy = names(dir, from)
            .find(|path| !path.exists())
            .unwrap_or_else(|| dir.join(format!("copy-of-version-{from}")));
        let made =
            files::private_dir(&copy).and_then(|()| copied(dir, conn, key, &copy, &(from, head)));
        if made.is_err() {
            let _ = fs::remove_dir_all(&copy);
        }
        made?;
    }
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

/// Returns the folders in the store's own that may hold a copy, in their order.
fn names(dir: &Path, from: usize) -> impl Iterator<Item = PathBuf> {
    (1..=u32::MAX).map(move |n| {
        let more = if n == 1 {
            String::new()
        } else {
            format!("-{n}")
        };
        dir.join(format!("copy-of-version-{from}{more}"))
    })
}

/// Says whether a folder holds a whole copy, of that version, that ends at a head and opens with the key of the store.
fn is_proved(dir: &Path, copy: &Path, key: &RawKey, wanted: &(usize, Head)) -> bool {
    let same_key_file = fs::read(dir.join(KEY_FILE))
        .and_then(|here| Ok(here == fs::read(copy.join(KEY_FILE))?))
        .unwrap_or(false);
    // What somebody works with is no copy to go back to.
    let in_use = copy.join("store.db-wal").exists();
    same_key_file && !in_use && held(copy, key).is_ok_and(|found| found == *wanted)
}

/// Returns the version and the proved head of a copy that nobody works with.
fn held(copy: &Path, key: &RawKey) -> Result<(usize, Head)> {
    let found = {
        let conn = connect(&copy.join(FILE), key, For::Reading)?;
        (schema::version(&conn)?, verify::ledger(&conn)?.head)
    };
    for extra in ["store.db-wal", "store.db-shm"] {
        let _ = fs::remove_file(copy.join(extra));
    }
    Ok(found)
}

fn copied(
    dir: &Path,
    conn: &Connection,
    key: &RawKey,
    copy: &Path,
    wanted: &(usize, Head),
) -> Result<()> {
    let path = copy.join(FILE);
    copy_database(conn, &path, key)?;
    copy_key_file(dir, copy)?;
    files::sync(&path)?;
    if held(copy, key)? != *wanted {
        return Err(Error::new(
            ErrorKind::Engine,
            "the copy made before bringing the store up to date is not the same",
        )
        .with_hint("nothing was changed; check the disk and open the store again"));
    }
    files::sync(copy)?;
    files::sync_parent(copy)
}
