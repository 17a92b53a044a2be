//! Making a store of a backup: the same entries, and a new chain from here on.

use std::fs;
use std::path::Path;
use std::time::Duration;

use super::error::{Error, ErrorKind, Result};
use super::key::{self, KeyFile};
use super::open::FILE;
use super::{Access, Author, ChainStart, Head, Secret, Store, files};

impl Store {
    /// Makes a store in `dir` of the backup in `from`, which stays as it is.
    ///
    /// The copy is verified and begins a new chain before it gets its name, so that what this store
    /// writes from now on is told apart from what the one that was lost may have written.
    pub fn restore(
        from: &Path,
        dir: &Path,
        secret: &Secret,
        author: &Author,
    ) -> Result<(Store, Head)> {
        files::keep_private();
        let raw_key = KeyFile::read(from)?.unlock(secret)?;
        if from.join("lock").exists()
            && let Some(holder) = Store::writer(from)?
        {
            return Err(Error::locked(Some(holder)));
        }
        let empty = fs::read_dir(dir).map_or(!dir.exists(), |mut found| found.next().is_none());
        if !empty {
            return Err(Error::new(
                ErrorKind::Exists,
                format!("{} is there already", dir.display()),
            )
            .with_hint("a backup is restored to a new folder: name one with --store; nothing is overwritten"));
        }
        let name = dir.file_name().ok_or_else(|| {
            Error::new(
                ErrorKind::File,
                format!("{} names no folder", dir.display()),
            )
        })?;
        let mut aside_name = name.to_owned();
        aside_name.push(format!(".{}.partial", std::process::id()));
        let aside = dir.with_file_name(aside_name);
        let restored = (|| {
            files::private_dir(&aside)?;
            // A backup is one file; the log is there only where a whole folder was copied.
            for name in [FILE, "store.db-wal", key::FILE] {
                let source = from.join(name);
                if name != "store.db-wal" || source.exists() {
                    let to = aside.join(name);
                    fs::copy(&source, &to).map_err(|e| Error::file(&source, "copy", e))?;
                    files::sync(&to)?;
                }
            }
            let access = Access::Write {
                wait: Duration::ZERO,
            };
            let mut store = Store::with_key(&aside, raw_key.clone(), access)?;
            let head = store.verify(None, |_, _| {})?.head;
            store.begin_chain(ChainStart::Restore, author)?;
            drop(store);
            files::sync(&aside)?;
            fs::rename(&aside, dir).map_err(|e| Error::file(dir, "write", e))?;
            files::sync_parent(dir)?;
            Ok((Store::with_key(dir, raw_key, access)?, head))
        })();
        if restored.is_err() {
            let _ = fs::remove_dir_all(&aside);
        }
        restored
    }
}
