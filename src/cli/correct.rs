//! `twoline correct`: a new entry that supersedes an old one.

use clap::Args;

use super::{Failure, Global};

/// Correct a recorded value; the old one stays
#[derive(Debug, Args)]
pub(super) struct Correct {
    /// Id of the entry
    entry: String,
    /// New values, such as `distance_right=20/40`
    #[arg(value_name = "FIELD=VALUE", required = true)]
    values: Vec<String>,
    /// Why
    #[arg(long, value_name = "TEXT")]
    reason: String,
}

impl Correct {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        Err(Failure::failed("correct is not part of this version"))
    }
}
