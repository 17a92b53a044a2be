//! `twoline site`: schools and clinics.

use clap::{Args, Subcommand};

use super::output::{clean, print_lines};
use super::{Failure, Global, open};
use crate::actions::Put;

/// Add schools and clinics
#[derive(Debug, Args)]
pub(super) struct Site {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Add a site, or rename the one of this code
    Add {
        /// Code of the site, as the roster writes it
        code: String,
        /// Name of the site
        #[arg(long, value_name = "NAME")]
        name: String,
    },
}

impl Site {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        let Command::Add { code, name } = &self.command;
        let put = open::to_write(global)?.add_site(code, name)?;
        print_lines(&[format!(
            "{} site {}, {}",
            done(put),
            clean(code.trim()),
            clean(name.trim())
        )])
    }
}

/// Returns what became of an addition.
pub(super) fn done(put: Put) -> &'static str {
    match put {
        Put::New => "added",
        Put::Changed => "changed",
        Put::Unchanged => "unchanged:",
    }
}
