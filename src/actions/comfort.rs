//! What an installation prefers at its screens, and the passphrase asked again at the lock.

use super::desk::Desk;
use super::error::Result;
use crate::store::{ErrorKind, Secret, key};

impl Desk {
    /// Returns a preference of this installation (`theme`, `idle_minutes`).
    pub fn preference(&self, name: &str) -> Option<String> {
        self.store.preference(name)
    }

    /// Keeps a preference of this installation.
    pub fn set_preference(&self, name: &str, value: &str) -> Result<()> {
        Ok(self.store.set_preference(name, value)?)
    }

    /// Says whether a typed passphrase or recovery key opens this store. It takes as long as opening.
    pub fn opens_with(&self, typed: &str) -> Result<bool> {
        match key::unlock(self.store.dir(), &Secret::typed(typed)) {
            Ok(_) => Ok(true),
            Err(error) if error.kind() == ErrorKind::WrongSecret => Ok(false),
            Err(error) => Err(error.into()),
        }
    }
}
