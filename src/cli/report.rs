//! `twoline report`: files to hand on.

use std::path::{Path, PathBuf};

use clap::{Args, Subcommand};

use super::output::{clean, print_bytes, print_clean, say};
use super::values::{WhichDay, title};
use super::{Failure, Global, open, write};
use crate::actions::Report as Made;

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
        #[command(flatten)]
        to: To,
        /// Form of the file
        #[arg(long, value_parser = ["csv"], default_value = "csv")]
        format: String,
    },
    /// This term's referrals in the order in which they should be seen to, with the reason
    Referrals {
        #[command(flatten)]
        to: To,
        /// Form of the file: a table, or text for people
        #[arg(long, value_parser = ["csv", "text"], default_value = "csv")]
        format: String,
    },
}

/// Where a report goes.
#[derive(Debug, Args)]
struct To {
    /// The file to write, with the rule sets used and the cautions beside it in OUT.about.txt;
    /// standard output without it
    #[arg(short, long, value_name = "OUT")]
    out: Option<PathBuf>,
    /// Text as it is: no byte order mark, no guard against spreadsheet formulas
    #[arg(long)]
    exact: bool,
}

impl To {
    /// Writes a report; `what` says of whom.
    fn write(&self, report: &Made, what: &str) -> Result<(), Failure> {
        let Some(out) = &self.out else {
            return print_bytes(&report.bytes);
        };
        let about = beside(out);
        write::whole(&[(&about, report.about.as_bytes()), (out, &report.bytes)])?;
        say(&format!(
            "{} {what}: {} and {}",
            report.rows,
            clean(&out.to_string_lossy()),
            clean(&about.to_string_lossy())
        ));
        Ok(())
    }
}

fn beside(out: &Path) -> PathBuf {
    let mut about = out.as_os_str().to_owned();
    about.push(".about.txt");
    PathBuf::from(about)
}

impl Report {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        let desk = open::to_read(global)?;
        match &self.command {
            Command::Day { day, to, .. } => {
                let day = day.of(&desk)?;
                let report = desk.day_report(&day, to.exact)?;
                to.write(&report, &format!("children of {}", title(&day)))
            }
            Command::Referrals { to, format } => {
                let csv = format == "csv";
                let report = desk.referrals_report(csv, to.exact)?;
                if !csv && to.out.is_none() {
                    let text = String::from_utf8_lossy(&report.bytes);
                    let lines: Vec<String> = text.lines().map(str::to_owned).collect();
                    return print_clean(&lines);
                }
                to.write(&report, "referrals")
            }
        }
    }
}
