//! `twoline verify`: recomputes the ledger.

use clap::Args;

use super::{Failure, Global};

/// Recompute the ledger and check the store
#[derive(Debug, Args)]
pub(super) struct Verify {
    /// A head printed elsewhere that the store must contain
    #[arg(long, value_name = "HEX")]
    head: Option<String>,
}

impl Verify {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        Err(Failure::failed("verify is not part of this version"))
    }
}
