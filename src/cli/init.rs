//! `twoline init`: makes a store.

use clap::Args;

use super::{Failure, Global};

/// Make a store
#[derive(Debug, Args)]
pub(super) struct Init {
    /// Name of the programme
    #[arg(long, value_name = "NAME")]
    programme: String,
    /// Name of this table or laptop
    #[arg(long, value_name = "NAME")]
    station: String,
    /// What a bare acuity number stands under: 40 is 20/40, or 12 is 6/12
    #[arg(long, value_parser = ["feet", "metres"], default_value = "feet")]
    notation: String,
}

impl Init {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        Err(Failure::failed("init is not part of this version"))
    }
}
