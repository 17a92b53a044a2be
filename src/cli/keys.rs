//! `twoline keys`: the key table.

use clap::Args;

use super::output::{aligned, print_lines};
use super::{Failure, Global};
use crate::keys::rows;

/// Show the key table of the screens
#[derive(Debug, Args)]
pub(super) struct Keys {}

impl Keys {
    #[allow(clippy::unused_self)]
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        let header = ["where", "keys", "command", "what it does"].map(str::to_owned);
        let table: Vec<Vec<String>> = std::iter::once(header)
            .chain(rows())
            .map(Vec::from)
            .collect();
        print_lines(&aligned(&table))
    }
}
