//! Backups: a whole store in a new folder, proved before it gets its name.

use std::fs;
use std::path::Path;

use rusqlite::Connection;

use super::error::{Error, ErrorKind, Result};
use super::key::RawKey;
use super::open::{FILE, For, connect};
use super::{Access, Head, Store, files, key};

impl Store {
    /// Copies the store to a new folder and returns its head after reopening and verifying it.
    ///
    /// Drafts are not part of it. Nothing is ever overwritten.
    pub fn backup(&self, to: &Path) -> Result<Head> {
        if to.exists() {
            return Err(Error::new(
                ErrorKind::Exists,
                format!("{} is there already", to.display()),
            )
            .with_hint("a backup goes to a new folder; nothing is overwritten"));
        }
        let name = to.file_name().ok_or_else(|| {
            Error::new(ErrorKind::File, format!("{} names no folder", to.display()))
        })?;
        let mut aside_name = name.to_owned();
        aside_name.push(format!(".{}.partial", std::process::id()));
        let aside = to.with_file_name(aside_name);
        let head = self.copy_to(&aside).and_then(|head| {
            fs::rename(&aside, to).map_err(|e| Error::file(to, "write", e))?;
            files::sync_parent(to)?;
            Ok(head)
        });
        if head.is_err() {
            let _ = fs::remove_dir_all(&aside);
        }
        head
    }

    fn copy_to(&self, aside: &Path) -> Result<Head> {
        files::private_dir(aside)?;
        let path = aside.join(FILE);
        let copied = copy_database(&self.conn, &path, &self.raw_key);
        if let Err(error) = copied {
            if error.kind() == ErrorKind::Engine {
                // A page that cannot be read has no code of its own here: the check names it.
                self.verify(None, |_, _| {})?;
            }
            return Err(error);
        }
        copy_key_file(&self.dir, aside)?;
        files::sync(&path)?;
        let copy = Store::with_key(aside, self.raw_key.clone(), Access::ReadOnly)?;
        let head = copy.verify(None, |_, _| {})?.head;
        drop(copy);
        for extra in ["store.db-wal", "store.db-shm"] {
            let _ = fs::remove_file(aside.join(extra));
        }
        files::sync(aside)?;
        Ok(head)
    }
}

/// Copies a database into a new file under a key of its own.
pub(super) fn copy_database(from: &Connection, path: &Path, key: &RawKey) -> Result<()> {
    let mut target = connect(path, key, For::Entries)?;
    let backup = rusqlite::backup::Backup::new(from, &mut target)?;
    backup.run_to_completion(1024, std::time::Duration::ZERO, None)?;
    drop(backup);
    // One file is easier to carry than three.
    target.query_row("PRAGMA wal_checkpoint(TRUNCATE)", [], |_| Ok(()))?;
    Ok(())
}

/// Copies the key file of a store into the folder of its copy.
pub(super) fn copy_key_file(from: &Path, to: &Path) -> Result<()> {
    let file = from.join(key::FILE);
    let bytes = fs::read(&file).map_err(|e| Error::file(&file, "read", e))?;
    files::write_whole(&to.join(key::FILE), &bytes)
}
