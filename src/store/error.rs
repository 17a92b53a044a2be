//! What can go wrong with a store, in words a nurse can act on.

use std::fmt;
use std::path::Path;

use super::lock::Holder;

const MAKE_ROOM: &str = "make room on the disk, then save again; everything saved before is safe";

/// A result of the store.
pub type Result<T> = std::result::Result<T, Error>;

/// The kind of an error, for those who decide by it.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum ErrorKind {
    /// There is no store in the folder.
    NotAStore,
    /// A file is not a packet.
    NotAPacket,
    /// There is one already.
    Exists,
    /// The passphrase or recovery key does not open it.
    WrongSecret,
    /// The chosen passphrase is too weak.
    WeakPassphrase,
    /// Another process writes.
    Locked,
    /// The store was opened for reading only.
    ReadOnly,
    /// It was made by a newer program.
    Newer,
    /// It must be opened for writing once, to be brought up to date.
    Older,
    /// It lies in a network folder.
    NetworkFolder,
    /// An entry is not what the ledger says.
    Damaged,
    /// The disk is full; the entry was not saved.
    DiskFull,
    /// It is not known whether the entry was saved.
    NotConfirmed,
    /// The entry contradicts what is in the store.
    Refused,
    /// What was asked for is not there.
    Missing,
    /// A file could not be read or written.
    File,
    /// The engine failed.
    Engine,
}

/// An error of the store.
#[derive(Debug)]
pub struct Error {
    kind: ErrorKind,
    message: String,
    hint: Option<String>,
    source: Option<Box<dyn std::error::Error + Send + Sync>>,
}

impl Error {
    /// Makes an error of a kind.
    pub fn new(kind: ErrorKind, message: impl Into<String>) -> Error {
        Error {
            kind,
            message: message.into(),
            hint: None,
            source: None,
        }
    }

    /// Adds what can be done about it.
    #[must_use]
    pub fn with_hint(mut self, hint: impl Into<String>) -> Error {
        self.hint = Some(hint.into());
        self
    }

    fn caused_by(mut self, source: impl std::error::Error + Send + Sync + 'static) -> Error {
        self.source = Some(Box::new(source));
        self
    }

    /// Returns the kind.
    pub fn kind(&self) -> ErrorKind {
        self.kind
    }

    /// Returns what can be done about it.
    pub fn hint(&self) -> Option<String> {
        self.hint.clone()
    }

    pub(super) fn file(path: &Path, doing: &str, source: std::io::Error) -> Error {
        let full = source.kind() == std::io::ErrorKind::StorageFull;
        let kind = if full {
            ErrorKind::DiskFull
        } else {
            ErrorKind::File
        };
        let hint = match source.kind() {
            std::io::ErrorKind::StorageFull => Some(MAKE_ROOM),
            std::io::ErrorKind::PermissionDenied | std::io::ErrorKind::ReadOnlyFilesystem => {
                Some("the folder and its files must belong to you and be writable")
            }
            _ => None,
        };
        Error {
            kind,
            message: format!("cannot {doing} {}: {source}", path.display()),
            hint: hint.map(str::to_owned),
            source: Some(Box::new(source)),
        }
    }

    pub(super) fn read_only(dir: &Path) -> Error {
        let by = super::lock::holder(dir).map_or_else(String::new, |h| format!(": {h}"));
        Error::new(
            ErrorKind::ReadOnly,
            format!("this store is open for reading only{by}"),
        )
        .with_hint("close the other window, then open the store again")
    }

    pub(super) fn locked(holder: Option<Holder>) -> Error {
        let by = holder.map_or_else(|| "another process".to_owned(), |h| h.to_string());
        Error::new(ErrorKind::Locked, format!("the store is in use: {by}")).with_hint(
            "close the other window, or try again when it is done; reading works meanwhile",
        )
    }

    pub(super) fn wrong_secret(what: &str) -> Error {
        Error::new(
            ErrorKind::WrongSecret,
            format!("the {what} does not open this store"),
        )
        .with_hint("check the keyboard layout and caps lock; the recovery key printed when the store was made opens it too")
    }

    pub(super) fn newer(found: i64, known: usize) -> Error {
        Error::new(
            ErrorKind::Newer,
            format!("this store has schema version {found}; this program, twoline {}, knows up to {known}", env!("CARGO_PKG_VERSION")),
        )
        .with_hint("open it with the newer twoline that wrote it, or a later one; nothing was changed")
    }

    pub(super) fn damaged(table: &str, id: Option<uuid::Uuid>, what: &str) -> Error {
        let id = id.map_or_else(String::new, |id| format!(" entry {id}"));
        Error::new(ErrorKind::Damaged, format!("damaged: {table}{id}: {what}"))
            .with_hint("run `twoline verify` and restore the newest backup that verifies")
    }

    pub(super) fn not_saved_disk_full() -> Error {
        Error::new(ErrorKind::DiskFull, "not saved: the disk is full").with_hint(MAKE_ROOM)
    }

    pub(super) fn not_confirmed(source: rusqlite::Error) -> Error {
        Error::new(
            ErrorKind::NotConfirmed,
            format!("not confirmed: the entry was not found after saving failed ({source})"),
        )
        .caused_by(source)
        .with_hint("check the disk, then do the same again: a draft is kept until it is signed, and nothing is saved twice")
    }
}

impl fmt::Display for Error {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.message)
    }
}

impl std::error::Error for Error {
    fn source(&self) -> Option<&(dyn std::error::Error + 'static)> {
        self.source.as_deref().map(|s| s as _)
    }
}

impl From<rusqlite::Error> for Error {
    fn from(source: rusqlite::Error) -> Error {
        match source.sqlite_error_code() {
            Some(rusqlite::ErrorCode::DiskFull) => Error::not_saved_disk_full(),
            Some(rusqlite::ErrorCode::DatabaseBusy | rusqlite::ErrorCode::DatabaseLocked) => {
                Error::locked(None)
            }
            Some(rusqlite::ErrorCode::DatabaseCorrupt) => {
                Error::damaged("file", None, &source.to_string())
            }
            Some(rusqlite::ErrorCode::NotADatabase) => {
                Error::damaged("file", None, &source.to_string())
            }
            Some(
                rusqlite::ErrorCode::SystemIoFailure
                | rusqlite::ErrorCode::CannotOpen
                | rusqlite::ErrorCode::ReadOnly,
            ) => {
                Error::new(ErrorKind::Engine, format!("the disk failed the store: {source}"))
                    .caused_by(source)
                    .with_hint("check that the disk is not full or failing and that the folder is yours, then try again; everything saved before is safe")
            }
            _ => Error::new(ErrorKind::Engine, format!("the store's engine: {source}"))
                .caused_by(source),
        }
    }
}
