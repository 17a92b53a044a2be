//! `twoline restore`: a backup becomes a store again.

use std::path::PathBuf;

use clap::Args;

use super::open::{folder, options, secret_of};
use super::output::{busy, clean, print_lines};
use super::{Failure, Global};
use crate::actions;

/// Make a store of a backup, in the folder of --store
///
/// The passphrase is that of the backup. The backup stays as it is; from here on the store writes a
/// new chain, so that what a lost laptop wrote after the backup can still be told apart.
#[derive(Debug, Args)]
pub(super) struct Restore {
    /// Folder of the backup
    from: PathBuf,
}

impl Restore {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        let dir = folder(global)?;
        let Some(info) = actions::store_info(&self.from)? else {
            return Err(Failure::bad_input(format!(
                "there is no backup in {}",
                clean(&self.from.to_string_lossy())
            ))
            .hint("name the folder that twoline backup wrote"));
        };
        let secret = secret_of(global, &info)?;
        let (desk, head) = busy("copying and verifying", || {
            actions::restore(&self.from, &dir, &secret, &options(global))
        })?;
        let now = desk.head()?;
        print_lines(&[
            format!("made a store of it in {}", clean(&dir.to_string_lossy())),
            format!("backup head {} ({} entries)", head.short(), head.entries),
            format!(
                "store head {} ({} entries), with the beginning of its new chain",
                now.short(),
                now.entries
            ),
        ])
    }
}
