//! `twoline report`: files to hand on.

use std::io::{self, IsTerminal};
use std::path::{Path, PathBuf};

use clap::{Args, Subcommand};

use super::leaves::{Leaves, file_name};
use super::output::{clean, print_bytes, print_clean, say};
use super::values::{WhichDay, title};
use super::{Failure, Global, open, write};
use crate::actions::{Desk, Report as Made, SheetRequest};
use crate::tui::board::plain;

/// Blank rows that one sheet has at most.
const MOST_BLANK: usize = 500;

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
    /// Who is eligible on a screening day: to screen, due, opted out, under care, examined, moved
    Children {
        #[command(flatten)]
        day: WhichDay,
        #[command(flatten)]
        to: To,
        /// Form of the file: a table, or a page that prints
        #[arg(long, value_parser = ["csv", "html"], default_value = "csv")]
        format: String,
    },
    /// Class lists with blank boxes and blank forms for paper, or a table to fill in and read back
    Sheet {
        #[command(flatten)]
        day: WhichDay,
        /// One class only
        #[arg(long, value_name = "CLASS")]
        class: Option<String>,
        /// Rows of blank forms for children who are not on the roster
        #[arg(long, value_name = "N", default_value_t = 8)]
        blank: usize,
        #[command(flatten)]
        to: To,
        /// Form of the file: pages that print, or a table for results add
        #[arg(long, value_parser = ["html", "csv"], default_value = "html")]
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
    /// What left the programme: each child of each file, to whom, what for, when and by whom
    Disclosures {
        /// Only this child
        #[arg(long, value_name = "ID")]
        child: Option<String>,
        #[command(flatten)]
        to: To,
        /// Form of the file: a table, or text for people
        #[arg(long, value_parser = ["csv", "text"], default_value = "csv")]
        format: String,
    },
    /// How a screening day stands: by class, by station, and when it will end
    Board {
        #[command(flatten)]
        day: WhichDay,
        /// Words for people, or a table for other programs
        #[arg(long, value_parser = ["text", "csv"], default_value = "text")]
        format: String,
        /// Text as it is in CSV: no byte order mark, no guard against spreadsheet formulas
        #[arg(long)]
        exact: bool,
    },
}

impl Command {
    /// Returns where the report goes, for those that are files.
    fn to(&self) -> Option<&To> {
        match self {
            Command::Day { to, .. }
            | Command::Children { to, .. }
            | Command::Sheet { to, .. }
            | Command::Referrals { to, .. }
            | Command::Disclosures { to, .. } => Some(to),
            Command::Board { .. } => None,
        }
    }
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
    #[command(flatten)]
    leaves: Leaves,
}

impl To {
    /// Writes a report, and first enters who gets it where it leaves the programme; `what` says of
    /// whom it is.
    fn write(&self, desk: &mut Desk, report: &Made, what: &str) -> Result<(), Failure> {
        let Some(out) = &self.out else {
            self.enter(desk, report)?;
            return print_bytes(&report.bytes);
        };
        let to = self.leaves.to()?;
        let about = beside(out);
        write::whole_once(
            &[
                (&about, report.about_for(to.as_ref()).as_bytes()),
                (out, &report.bytes),
            ],
            || self.enter(desk, report),
        )?;
        say(&format!(
            "{} {what}: {} and {}",
            report.rows,
            clean(&out.to_string_lossy()),
            clean(&about.to_string_lossy())
        ));
        Ok(())
    }

    /// Writes a report that is text for people: as lines where it goes to standard output.
    fn write_text(&self, desk: &mut Desk, report: &Made, what: &str) -> Result<(), Failure> {
        if self.out.is_some() {
            return self.write(desk, report, what);
        }
        self.enter(desk, report)?;
        let text = String::from_utf8_lossy(&report.bytes);
        print_clean(&text.lines().map(str::to_owned).collect::<Vec<_>>())
    }

    /// Enters who gets a report; nothing where it is for the programme's own use.
    fn enter(&self, desk: &mut Desk, report: &Made) -> Result<(), Failure> {
        if let Some(to) = self.leaves.to()? {
            let file = file_name(self.out.as_deref());
            let entered = desk.disclose(&to, &report.title, &file, &report.children)?;
            say(&format!("{entered} children entered in the disclosure log"));
        }
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
        let leaves = self.command.to().map(|to| to.leaves.to()).transpose()?;
        let mut desk = if leaves.flatten().is_some() {
            open::to_sign(global)?
        } else {
            open::to_read(global)?
        };
        match &self.command {
            Command::Day { day, to, .. } => {
                let day = day.of(&desk)?;
                let report = desk.day_report(&day, to.exact)?;
                to.write(&mut desk, &report, &format!("children of {}", title(&day)))
            }
            Command::Children { day, to, format } => {
                let day = day.of(&desk)?;
                let report = desk.door_report(&day, format == "html", to.exact)?;
                to.write(&mut desk, &report, &format!("children of {}", title(&day)))
            }
            Command::Sheet {
                day,
                class,
                blank,
                to,
                format,
            } => {
                let day = day.of(&desk)?;
                let request = SheetRequest {
                    class: class.clone(),
                    blank: (*blank).min(MOST_BLANK),
                    html: format == "html",
                    exact: to.exact,
                };
                let report = desk.sheet(&day, &request)?;
                to.write(&mut desk, &report, &format!("children of {}", title(&day)))
            }
            Command::Referrals { to, format } => {
                let csv = format == "csv";
                let report = desk.referrals_report(csv, to.exact)?;
                if csv {
                    to.write(&mut desk, &report, "referrals")
                } else {
                    to.write_text(&mut desk, &report, "referrals")
                }
            }
            Command::Disclosures { child, to, format } => {
                let csv = format == "csv";
                let report = desk.disclosures_report(child.as_deref(), csv, to.exact)?;
                if csv {
                    to.write(&mut desk, &report, "disclosures")
                } else {
                    to.write_text(&mut desk, &report, "disclosures")
                }
            }
            Command::Board { day, format, exact } => {
                let board = desk.board(&day.of(&desk)?)?;
                if format == "csv" {
                    print_bytes(&board.csv(*exact)?)
                } else {
                    print_clean(&plain(&board, columns()))
                }
            }
        }
    }
}

/// Returns the width of the terminal, or one for a page where there is none.
fn columns() -> usize {
    if io::stdout().is_terminal() {
        crossterm::terminal::size().map_or(80, |(columns, _)| usize::from(columns).max(40))
    } else {
        100
    }
}
