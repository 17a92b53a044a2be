//! What one installation prefers at its screens: a small text file beside the store, in no ledger,
//! report or backup, and without anything about a child.

use super::error::{Error, ErrorKind, Result};
use super::{Store, files};

const FILE: &str = "screens.toml";

impl Store {
    /// Returns a preference of this installation; a file that cannot be read counts as none.
    pub fn preference(&self, name: &str) -> Option<String> {
        match self.read_preferences().ok()?.get(name)? {
            toml::Value::String(text) => Some(text.clone()),
            other => Some(other.to_string()),
        }
    }

    /// Keeps a preference of this installation; the file is whole or as it was.
    ///
    /// A file that cannot be read is not written over.
    pub fn set_preference(&self, name: &str, value: &str) -> Result<()> {
        let path = self.dir().join(FILE);
        let mut all = self.read_preferences()?;
        all.insert(name.to_owned(), toml::Value::String(value.to_owned()));
        let text = toml::to_string(&all)
            .map_err(|e| Error::file(&path, "write", std::io::Error::other(e)))?;
        files::write_whole(&path, text.as_bytes())
    }

    fn read_preferences(&self) -> Result<toml::Table> {
        let path = self.dir().join(FILE);
        let text = match std::fs::read_to_string(&path) {
            Ok(text) => text,
            Err(error) if error.kind() == std::io::ErrorKind::NotFound => String::new(),
            Err(error) => return Err(Error::file(&path, "read", error)),
        };
        text.parse().map_err(|error: toml::de::Error| {
            let before = error.span().and_then(|span| text.get(..span.start));
            let line = before.map_or(1, |before| before.matches('\n').count() + 1);
            Error::new(
                ErrorKind::File,
                format!("{}, line {line}: {}", path.display(), error.message()),
            )
            .with_hint("mend this line or take the file away; nothing was written over it")
        })
    }
}
