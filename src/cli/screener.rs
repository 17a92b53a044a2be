//! `twoline screener`: who records.

use clap::{Args, Subcommand};

use super::{Failure, Global};

/// Add people who record
#[derive(Debug, Args)]
pub(super) struct Screener {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Add a screener
    Add {
        /// Initials
        initials: String,
        /// Name
        name: String,
    },
}

impl Screener {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        Err(Failure::failed("screener add is not part of this version"))
    }
}
