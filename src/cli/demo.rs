//! `twoline demo`: the program on invented data.

use clap::Args;

use super::{Failure, Global};

/// Open the screens on an invented district
#[derive(Debug, Args)]
pub(super) struct Demo {
    /// Make the demo anew, even where one is there
    #[arg(long)]
    fresh: bool,
    /// Seed of the invented data
    #[arg(long, value_name = "N")]
    seed: Option<u64>,
    /// Make the data and do not open the screens
    #[arg(long)]
    no_screens: bool,
}

impl Demo {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        Err(Failure::failed("demo is not part of this version"))
    }
}
