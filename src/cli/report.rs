//! `twoline report`: files to hand on.

use std::path::PathBuf;

use chrono::NaiveDate;
use clap::{Args, Subcommand};

use super::{Failure, Global};

/// Write reports
#[derive(Debug, Args)]
pub(super) struct Report {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// One row per child of a screening day
    Day {
        /// Site code; the only open day without it
        #[arg(long, value_name = "CODE")]
        site: Option<String>,
        /// Date of the day; today without it
        #[arg(long, value_name = "YYYY-MM-DD")]
        date: Option<NaiveDate>,
        /// The file to write; standard output without it
        #[arg(short, long, value_name = "OUT")]
        out: Option<PathBuf>,
        /// Form of the file
        #[arg(long, value_parser = ["csv"], default_value = "csv")]
        format: String,
        /// Text as it is: no byte order mark, no guard against spreadsheet formulas
        #[arg(long)]
        exact: bool,
    },
}

impl Report {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        Err(Failure::failed("report day is not part of this version"))
    }
}
