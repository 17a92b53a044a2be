//! `twoline chart`: the charts in use.

use clap::{Args, Subcommand};

use super::{Failure, Global};

/// Add charts
#[derive(Debug, Args)]
pub(super) struct Chart {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Add a chart
    Add {
        /// Name of the chart
        name: String,
        /// Letters or symbols on a line
        #[arg(long, value_name = "N", default_value_t = 5)]
        letters_per_line: u8,
        /// The distance the chart is made for, such as 10ft or 3m
        #[arg(long, value_name = "DISTANCE")]
        distance: String,
        /// Largest line, such as 20/200
        #[arg(long, value_name = "LINE")]
        largest: String,
        /// Smallest line, such as 20/16
        #[arg(long, value_name = "LINE")]
        smallest: String,
    },
}

impl Chart {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        Err(Failure::failed("chart add is not part of this version"))
    }
}
