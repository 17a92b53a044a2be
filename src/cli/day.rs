//! `twoline day`: screening days.

use chrono::NaiveDate;
use clap::{Args, Subcommand};

use super::{Failure, Global};

/// Open screening days
#[derive(Debug, Args)]
pub(super) struct Day {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Open a screening day
    Open {
        /// Site code
        #[arg(long, value_name = "CODE")]
        site: String,
        /// Date of the day; today without it
        #[arg(long, value_name = "YYYY-MM-DD")]
        date: Option<NaiveDate>,
        /// Protocol id
        #[arg(long, value_name = "ID")]
        protocol: String,
        /// How far the chart is read
        #[arg(long, value_parser = ["threshold", "critical_line"], default_value = "threshold")]
        method: String,
    },
}

impl Day {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        Err(Failure::failed("day open is not part of this version"))
    }
}
