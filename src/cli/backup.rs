//! `twoline backup`: a copy under the same key.

use std::path::PathBuf;

use clap::Args;

use super::output::{busy, clean, print_lines};
use super::{Failure, Global, open};

/// Copy the store to a new folder and verify the copy
#[derive(Debug, Args)]
pub(super) struct Backup {
    /// Folder to write; it must not be there yet
    to: PathBuf,
}

impl Backup {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        let desk = open::to_read_without_rules(global)?;
        let head = busy("copying and verifying", || desk.backup(&self.to))?;
        print_lines(&[
            format!(
                "copied to {} and verified",
                clean(&self.to.to_string_lossy())
            ),
            format!("store head {} ({} entries)", head.short(), head.entries),
        ])
    }
}
