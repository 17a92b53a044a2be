//! `twoline rules`: what the shipped and local rule files say.

mod check;
mod compare;
mod new;
mod show;

use std::path::PathBuf;

use std::io::IsTerminal as _;

use clap::{Args, Subcommand};

use super::output::{folded_under, print_lines, width};
use super::{Failure, Global};
use crate::actions::rulebook;

/// Show, check, begin and compare rule sets
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
    Show(show::Show),
    Check(check::Check),
    New(new::New),
    Compare(compare::Compare),
}

impl Rules {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        if let Command::Check(args) = &self.command {
            return args.run();
        }
        let library = rulebook::library_with(&self.rule_file)?;
        match &self.command {
            Command::List => print_lines(&in_columns(rulebook::list(&library))),
            Command::Show(args) => args.run(&library),
            Command::New(args) => args.run(&library),
            Command::Compare(args) => args.run(global, &library, !self.rule_file.is_empty()),
            Command::Check(args) => args.run(),
        }
    }
}

/// Breaks lines that are wider than the terminal under what stands behind their id; where there is no
/// terminal they stay whole, a line each.
fn in_columns(lines: Vec<String>) -> Vec<String> {
    if !std::io::stdout().is_terminal() {
        return lines;
    }
    let columns = width();
    lines
        .into_iter()
        .flat_map(|line| {
            let gap = line.find("  ").map_or(0, |gap| {
                gap + line[gap..].len() - line[gap..].trim_start().len()
            });
            let (id, what) = line.split_at(gap);
            folded_under(id, what, columns)
        })
        .collect()
}
