//! `twoline keys`: the key table.

use clap::Args;

use super::{Failure, Global};

/// Show the key table
#[derive(Debug, Args)]
pub(super) struct Keys {}

impl Keys {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        Err(Failure::failed("keys is not part of this version"))
    }
}
