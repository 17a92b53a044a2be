//! `twoline roster`: the children expected.

use std::path::PathBuf;

use clap::{Args, Subcommand};

use super::{Failure, Global};

/// Read rosters
#[derive(Debug, Args)]
pub(super) struct Roster {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Read a roster: what is new, changed, unchanged and gone is shown before anything is written
    Add {
        /// Roster file in CSV
        file: PathBuf,
        /// Site of the children; without it every site of the file
        #[arg(long, value_name = "CODE")]
        site: Option<String>,
        /// Term of the enrolment
        #[arg(long, value_name = "NAME")]
        term: Option<String>,
        /// Show what would change and write nothing
        #[arg(long)]
        dry_run: bool,
        /// Write without asking
        #[arg(long)]
        yes: bool,
    },
}

impl Roster {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        Err(Failure::failed("roster add is not part of this version"))
    }
}
