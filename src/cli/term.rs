//! `twoline term`: the terms of a year.

use chrono::NaiveDate;
use clap::{Args, Subcommand};

use super::{Failure, Global};

/// Add terms
#[derive(Debug, Args)]
pub(super) struct Term {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Add a term
    Add {
        /// Name of the term
        name: String,
        /// First day
        #[arg(long, value_name = "YYYY-MM-DD")]
        from: NaiveDate,
        /// Last day
        #[arg(long, value_name = "YYYY-MM-DD")]
        to: NaiveDate,
    },
}

impl Term {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        Err(Failure::failed("term add is not part of this version"))
    }
}
