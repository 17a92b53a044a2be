//! `twoline results`: results of a screening day from a file.

use std::path::PathBuf;

use chrono::NaiveDate;
use clap::{Args, Subcommand};

use super::{Failure, Global};

/// Read results
#[derive(Debug, Args)]
pub(super) struct Results {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Read results into a screening day
    Add {
        /// Results file in CSV
        file: PathBuf,
        /// Site code
        #[arg(long, value_name = "CODE")]
        site: String,
        /// Date of rows that do not say one
        #[arg(long, value_name = "YYYY-MM-DD")]
        date: Option<NaiveDate>,
        /// Protocol id
        #[arg(long, value_name = "ID")]
        protocol: String,
        /// Show what would change and write nothing
        #[arg(long)]
        dry_run: bool,
        /// Write without asking
        #[arg(long)]
        yes: bool,
        /// Correct values that are recorded differently, for this reason
        #[arg(long, value_name = "REASON")]
        correct: Option<String>,
    },
}

impl Results {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        Err(Failure::failed("results add is not part of this version"))
    }
}
