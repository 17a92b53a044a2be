//! `twoline site`: schools and clinics.

use clap::{Args, Subcommand};

use super::{Failure, Global};

/// Add schools and clinics
#[derive(Debug, Args)]
pub(super) struct Site {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Add a site
    Add {
        /// Code of the site, as the roster writes it
        code: String,
        /// Name of the site
        name: String,
    },
}

impl Site {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        Err(Failure::failed("site add is not part of this version"))
    }
}
