//! `twoline report`: files to hand on.

use std::path::PathBuf;

use clap::{Args, Subcommand};

use super::output::{clean, print_bytes, say};
use super::values::{WhichDay, title};
use super::{Failure, Global, open, write};

/// Write reports
#[derive(Debug, Args)]
pub(super) struct Report {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// One row per child of a screening day
    Day {
        #[command(flatten)]
        day: WhichDay,
        /// The file to write, with the rule sets used and the cautions beside it in OUT.about.txt;
        /// standard output without it
        #[arg(short, long, value_name = "OUT")]
        out: Option<PathBuf>,
        /// Form of the file
        #[arg(long, value_parser = ["csv"], default_value = "csv")]
        format: String,
        /// Text as it is: no byte order mark, no guard against spreadsheet formulas
        #[arg(long)]
        exact: bool,
    },
}

impl Report {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        let Command::Day {
            day, out, exact, ..
        } = &self.command;
        let desk = open::to_read(global)?;
        let day = day.of(&desk)?;
        let report = desk.day_report(&day, *exact)?;
        let Some(out) = out else {
            return print_bytes(&report.bytes);
        };
        let mut about = out.as_os_str().to_owned();
        about.push(".about.txt");
        let about = PathBuf::from(about);
        write::whole(&[(&about, report.about.as_bytes()), (out, &report.bytes)])?;
        say(&format!(
            "{} children of {}: {} and {}",
            report.rows,
            title(&day),
            clean(&out.to_string_lossy()),
            clean(&about.to_string_lossy())
        ));
        Ok(())
    }
}
