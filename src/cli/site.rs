//! `twoline site`: schools and clinics.

use chrono::{NaiveDate, Weekday};
use clap::{Args, Subcommand};

use super::output::{clean, print_clean, print_lines};
use super::{Failure, Global, open};
use crate::actions::{CalendarChange, CalendarView, Put};
use crate::domain::school_calendar::SchoolCalendar;

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
    /// Show or change the days on which school is held: working days are counted on them
    ///
    /// Without a change it lists every calendar. Without a site the change is for every site that
    /// has no calendar of its own.
    Calendar {
        /// Code of the site
        code: Option<String>,
        /// Days of the week on which school is held, such as mon-fri or sun-thu
        #[arg(long, value_name = "DAYS", value_parser = week)]
        held: Option<Week>,
        /// Days without school to add, such as 2026-12-25 or 2026-11-26..2026-11-27
        #[arg(long, value_name = "DAYS", value_parser = SchoolCalendar::parse_holiday)]
        holiday: Vec<(NaiveDate, NaiveDate)>,
        /// Days without school to take away again, as they were added
        #[arg(long, value_name = "DAYS", value_parser = SchoolCalendar::parse_holiday)]
        drop: Vec<(NaiveDate, NaiveDate)>,
    },
}

/// Days of the week.
type Week = std::sync::Arc<[Weekday]>;

fn week(text: &str) -> Result<Week, String> {
    SchoolCalendar::parse_days(text).map(Into::into)
}

impl Site {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        match &self.command {
            Command::Add { code, name } => {
                let put = open::to_write(global)?.add_site(code, name)?;
                print_lines(&[format!(
                    "{} site {}, {}",
                    done(put),
                    clean(code.trim()),
                    clean(name.trim())
                )])
            }
            Command::Calendar {
                code,
                held,
                holiday,
                drop,
            } => {
                if held.is_none() && holiday.is_empty() && drop.is_empty() {
                    let all = open::to_read(global)?.school_calendars()?;
                    let meant = |view: &&CalendarView| {
                        code.as_ref()
                            .is_none_or(|c| *c == view.site || view.site.is_empty())
                    };
                    return print_clean(&listed(all.iter().filter(meant)));
                }
                let site = code.as_deref().unwrap_or_default();
                let mut desk = open::to_write(global)?;
                let put = desk.change_calendar(
                    site,
                    &CalendarChange {
                        held: held.as_ref().map(|days| days.to_vec()),
                        add: holiday.clone(),
                        drop: drop.clone(),
                    },
                )?;
                let all = desk.school_calendars()?;
                let mut lines = vec![format!("{} school calendar", done(put))];
                lines.extend(listed(all.iter().filter(|view| view.site == site)));
                print_clean(&lines)
            }
        }
    }
}

fn listed<'v>(calendars: impl Iterator<Item = &'v CalendarView>) -> Vec<String> {
    let mut lines = Vec::new();
    for view in calendars {
        let days = view.calendar.days_held_text();
        lines.push(match view.site.as_str() {
            "" => format!("{}: school is held {days}", view.name),
            code => format!("{} ({code}): school is held {days}", view.name),
        });
        for (first, last) in view.calendar.holidays() {
            lines.push(if first == last {
                format!("  no school on {first}")
            } else {
                format!("  no school from {first} to {last}")
            });
        }
    }
    if lines.is_empty() {
        lines.push(
            "no school calendar: working days are counted Monday to Friday, without holidays"
                .to_owned(),
        );
    }
    lines
}

/// Returns what became of an addition.
pub(super) fn done(put: Put) -> &'static str {
    match put {
        Put::New => "added",
        Put::Changed => "changed",
        Put::Unchanged => "unchanged:",
    }
}
