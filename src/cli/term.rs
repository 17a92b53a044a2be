//! `twoline term`: the terms of a year.

use chrono::NaiveDate;
use clap::{Args, Subcommand};

use super::output::{clean, print_lines};
use super::site::done;
use super::{Failure, Global, open};

/// Add terms
#[derive(Debug, Args)]
pub(super) struct Term {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Add a term, or change the title and dates of the one of this code
    Add {
        /// Code of the term, such as 2026-autumn
        code: String,
        /// Title for people; the code without it
        #[arg(long, value_name = "TITLE")]
        title: Option<String>,
        /// First day
        #[arg(long, value_name = "YYYY-MM-DD")]
        from: NaiveDate,
        /// Last day
        #[arg(long, value_name = "YYYY-MM-DD")]
        to: NaiveDate,
    },
}

impl Term {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        let Command::Add {
            code,
            title,
            from,
            to,
        } = &self.command;
        let title = title.as_ref().unwrap_or(code);
        let put = open::to_write(global)?.add_term(code, title, *from, *to)?;
        print_lines(&[format!(
            "{} term {}, {from} to {to}",
            done(put),
            clean(code.trim())
        )])
    }
}
