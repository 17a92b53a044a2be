//! `twoline backup`: a copy under the same key.

use std::path::PathBuf;

use clap::Args;

use super::{Failure, Global};

/// Copy the store
#[derive(Debug, Args)]
pub(super) struct Backup {
    /// Folder to write
    to: PathBuf,
}

impl Backup {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        Err(Failure::failed("backup is not part of this version"))
    }
}
