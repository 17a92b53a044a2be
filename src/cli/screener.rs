//! `twoline screener`: who records.

use clap::{Args, Subcommand};

use super::output::{clean, print_lines};
use super::{Failure, Global, open};

/// Add people who record
#[derive(Debug, Args)]
pub(super) struct Screener {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Add a screener
    Add {
        /// Name
        #[arg(long, value_name = "NAME")]
        name: String,
        /// Initials
        #[arg(long, value_name = "XX")]
        initials: String,
    },
}

impl Screener {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        let Command::Add { name, initials } = &self.command;
        open::to_write(global)?.add_screener(initials, name)?;
        print_lines(&[format!(
            "added screener {} ({})",
            clean(name.trim()),
            clean(initials.trim())
        )])
    }
}
