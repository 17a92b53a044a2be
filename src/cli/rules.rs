//! `twoline rules`: what the shipped and local rule files say.

use std::path::PathBuf;

use clap::{Args, Subcommand};

use super::output::print_lines;
use super::{Failure, Global};
use crate::actions::rulebook;

/// Show rule sets and protocols with their thresholds, sources and basis
#[derive(Debug, Args)]
pub(super) struct Rules {
    #[command(subcommand)]
    command: Command,
    /// A local rule file to load beside the shipped ones
    #[arg(long, global = true, value_name = "FILE")]
    rule_file: Vec<PathBuf>,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// List every rule set and protocol
    List,
    /// Show one of them in full
    Show {
        /// Id of a rule set or protocol
        id: String,
    },
}

impl Rules {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        let library = rulebook::library_with(&self.rule_file)?;
        match &self.command {
            Command::List => print_lines(&rulebook::list(&library)),
            Command::Show { id } => print_lines(&rulebook::show(&library, id)?),
        }
    }
}
