//! What one installation prefers at its screens: a small text file beside the store, in no ledger,
//! report or backup, and without anything about a child.

use super::error::{Error, Result};
use super::{Store, files};

const FILE: &str = "screens.toml";

impl Store {
    /// Returns a preference of this installation; a file that cannot be read counts as none.
    pub fn preference(&self, name: &str) -> Option<String> {
        match self.preferences().get(name)? {
            toml::Value::String(text) => Some(text.clone()),
            other => Some(other.to_string()),
        }
    }

    /// Keeps a preference of this installation; the file is whole or as it was.
    pub fn set_preference(&self, name: &str, value: &str) -> Result<()> {
        let path = self.dir().join(FILE);
        let mut all = self.preferences();
        all.insert(name.to_owned(), toml::Value::String(value.to_owned()));
        let text = toml::to_string(&all)
            .map_err(|e| Error::file(&path, "write", std::io::Error::other(e)))?;
        files::write_whole(&path, text.as_bytes())
    }

    fn preferences(&self) -> toml::Table {
        std::fs::read_to_string(self.dir().join(FILE))
            .ok()
            .and_then(|text| text.parse().ok())
            .unwrap_or_default()
    }
}
