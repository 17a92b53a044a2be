//! `twoline record`: readings of one child.

use clap::Args;

use super::{Failure, Global};

/// Record readings of a child on an open screening day
#[derive(Debug, Args)]
pub(super) struct Record {
    /// Child id
    child: String,
    /// Readings, such as `distance_right=20/40`
    #[arg(value_name = "FIELD=VALUE", required = true)]
    values: Vec<String>,
    /// Sign the visit: its outcome is written
    #[arg(long)]
    sign: bool,
}

impl Record {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        Err(Failure::failed("record is not part of this version"))
    }
}
