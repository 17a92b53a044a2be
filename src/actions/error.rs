//! What went wrong with an intention, and what to do about it.

use std::fmt;

use crate::store::ErrorKind;

/// A result of an action.
pub type Result<T> = std::result::Result<T, ActionError>;

/// The kind of an error: it decides the exit code.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Kind {
    /// What was given is not right; nothing was done.
    BadInput,
    /// It could not be done.
    Failed,
    /// Saving was not confirmed; the draft is kept.
    NotConfirmed,
}

/// An action that was not done.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct ActionError {
    /// The kind.
    pub kind: Kind,
    /// What happened.
    pub message: String,
    /// What to do.
    pub hint: Option<String>,
}

impl ActionError {
    /// Makes an error of bad input.
    pub fn bad(message: impl Into<String>) -> ActionError {
        ActionError {
            kind: Kind::BadInput,
            message: message.into(),
            hint: None,
        }
    }

    /// Makes an error of something that could not be done.
    pub fn failed(message: impl Into<String>) -> ActionError {
        ActionError {
            kind: Kind::Failed,
            message: message.into(),
            hint: None,
        }
    }

    /// Adds what to do about it.
    #[must_use]
    pub fn hint(mut self, hint: impl Into<String>) -> ActionError {
        self.hint = Some(hint.into());
        self
    }
}

impl fmt::Display for ActionError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.message)
    }
}

impl std::error::Error for ActionError {}

impl From<crate::store::Error> for ActionError {
    fn from(error: crate::store::Error) -> ActionError {
        let kind = match error.kind() {
            ErrorKind::NotConfirmed | ErrorKind::DiskFull => Kind::NotConfirmed,
            ErrorKind::WeakPassphrase
            | ErrorKind::Refused
            | ErrorKind::Missing
            | ErrorKind::NotAStore
            | ErrorKind::NotAPacket
            | ErrorKind::Exists => Kind::BadInput,
            _ => Kind::Failed,
        };
        ActionError {
            kind,
            message: error.to_string(),
            hint: error.hint(),
        }
    }
}

impl From<crate::intake::Problems> for ActionError {
    fn from(problems: crate::intake::Problems) -> ActionError {
        ActionError::bad(problems.to_string()).hint("nothing was written")
    }
}
