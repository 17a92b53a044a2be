//! `--recipient` and `--purpose`: a file that leaves the programme.

use std::path::Path;

use clap::Args;

use super::Failure;
use super::output::clean;
use crate::actions::Recipient;

/// Who outside the programme gets a file.
#[derive(Debug, Args)]
pub(super) struct Leaves {
    /// Who outside the programme gets the file; each child in it is entered in the disclosure log.
    /// Without it the file is for the programme's own use
    #[arg(long, value_name = "TEXT", requires = "purpose")]
    recipient: Option<String>,
    /// What they need it for
    #[arg(long, value_name = "TEXT", requires = "recipient")]
    purpose: Option<String>,
}

impl Leaves {
    /// Returns the recipient with the purpose; nothing for the programme's own use.
    ///
    /// # Errors
    /// Exit code 2 where one of the two says nothing.
    pub(super) fn to(&self) -> Result<Option<Recipient>, Failure> {
        match (&self.recipient, &self.purpose) {
            (Some(who), Some(purpose)) => Ok(Some(Recipient::new(who, purpose)?)),
            _ => Ok(None),
        }
    }
}

/// Returns the name of a file as the log has it, without its folder.
pub(super) fn file_name(path: Option<&Path>) -> String {
    path.and_then(Path::file_name)
        .map(|name| clean(&name.to_string_lossy()))
        .unwrap_or_default()
}
