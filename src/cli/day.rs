//! `twoline day`: screening days.

use chrono::NaiveDate;
use clap::{Args, Subcommand};

use super::output::print_lines;
use super::values::title;
use super::{Failure, Global, open};
use crate::actions::NewDay;
use crate::domain::codes::AcuityMethod;

/// Open screening days
#[derive(Debug, Args)]
pub(super) struct Day {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Open a screening day; one that is open already stays as it is
    Open {
        /// Site code
        #[arg(long, value_name = "CODE")]
        site: String,
        /// Date of the day; today without it
        #[arg(long, value_name = "YYYY-MM-DD")]
        date: Option<NaiveDate>,
        /// Protocol id
        #[arg(long, value_name = "ID")]
        protocol: String,
        /// How far the chart is read
        #[arg(long, value_parser = ["threshold", "critical_line"], default_value = "threshold")]
        method: String,
    },
}

impl Day {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        let Command::Open {
            site,
            date,
            protocol,
            method,
        } = &self.command;
        let mut desk = open::to_write(global)?;
        let day = desk.open_day(NewDay {
            site: site.clone(),
            date: date.unwrap_or(desk.today()),
            protocol: protocol.clone(),
            method: AcuityMethod::from_word(method).unwrap_or(AcuityMethod::Threshold),
        })?;
        let children = desk.day_children(&day)?;
        let due = children
            .iter()
            .filter(|c| c.due_on.is_some_and(|due| due <= day.date))
            .count();
        print_lines(&[
            format!("open: {}", title(&day)),
            format!(
                "{} children expected, {due} of them due to come back",
                children.len()
            ),
        ])
    }
}
