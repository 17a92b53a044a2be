//! `twoline child`: find and show.

use clap::{Args, Subcommand};

use super::{Failure, Global};

/// Find and show children
#[derive(Debug, Args)]
pub(super) struct Child {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Find children by name or id
    Find {
        /// Part of a name or an id
        text: String,
    },
    /// Show the whole history of a child with every correction
    Show {
        /// Child id
        id: String,
    },
}

impl Child {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        Err(Failure::failed("child is not part of this version"))
    }
}
