//! The command line: arguments to actions. One command, one file.

mod failure;
mod leaves;
mod open;
mod output;
mod values;
mod write;

mod backup;
mod chart;
mod child;
mod correct;
mod day;
mod demo;
mod exam;
mod init;
mod judge;
mod keys;
mod letters;
mod packet;
mod record;
mod refer;
mod report;
mod restore;
mod results;
mod roster;
mod rules;
mod screener;
mod screens;
mod setting;
mod site;
mod station;
mod step;
mod term;
mod verify;

use std::ffi::OsString;
use std::path::PathBuf;
use std::sync::Arc;
use std::sync::atomic::AtomicBool;

use chrono::NaiveDate;
use clap::{Args, Parser, Subcommand};
use signal_hook::consts::SIGINT;

pub use failure::Failure;

/// Records children's vision screenings, applies published referral rules and explains each
/// outcome.
///
/// Without a command the store is opened in the terminal screens.
#[derive(Debug, Parser)]
#[command(name = "twoline", version, max_term_width = 100)]
pub struct Cli {
    #[command(flatten)]
    global: Global,
    #[command(flatten)]
    how: screens::How,
    #[command(subcommand)]
    command: Option<Command>,
}

/// What every command takes.
#[derive(Debug, Clone, Args)]
pub struct Global {
    /// Folder of the store; without it the platform's data folder
    #[arg(
        long,
        global = true,
        env = "TWOLINE_STORE",
        hide_env_values = true,
        value_name = "DIR"
    )]
    pub store: Option<PathBuf>,
    /// File that holds the passphrase
    #[arg(
        long,
        global = true,
        env = "TWOLINE_PASSPHRASE_FILE",
        hide_env_values = true,
        value_name = "FILE"
    )]
    pub passphrase_file: Option<PathBuf>,
    /// Who records: initials or name of a screener of the store
    #[arg(long, global = true, value_name = "NAME")]
    pub screener: Option<String>,
    /// The civil date for ages and due dates, where it is not today's
    #[arg(long, global = true, value_name = "YYYY-MM-DD")]
    pub today: Option<NaiveDate>,
}

impl Global {
    /// Returns the civil date to count from.
    pub fn today(&self) -> NaiveDate {
        self.today.unwrap_or_else(crate::clock::today)
    }
}

#[derive(Debug, Subcommand)]
enum Command {
    Demo(demo::Demo),
    Init(init::Init),
    Site(site::Site),
    Term(term::Term),
    Screener(screener::Screener),
    Setting(setting::Setting),
    Chart(chart::Chart),
    Station(station::Station),
    Roster(roster::Roster),
    Day(day::Day),
    Record(record::Record),
    Correct(correct::Correct),
    Child(child::Child),
    Results(results::Results),
    Judge(judge::Judge),
    Rules(rules::Rules),
    Report(report::Report),
    Refer(refer::Refer),
    Step(step::Step),
    Exam(exam::Exam),
    Letters(letters::Letters),
    Verify(verify::Verify),
    Backup(backup::Backup),
    Restore(restore::Restore),
    Packet(packet::Packet),
    Keys(keys::Keys),
}

/// Parses the arguments and runs the command.
///
/// # Errors
/// What went wrong, with a hint and the exit code: 1 failed, 2 bad input or usage, 130 interrupted.
pub fn run(args: impl IntoIterator<Item = OsString>) -> Result<(), Failure> {
    let cli = match Cli::try_parse_from(args) {
        Ok(cli) => cli,
        Err(error) if error.use_stderr() => return Err(Failure::usage_text(&error)),
        // Help and version are not errors; a closed pipe is none either.
        Err(text) => return output::print(&text.render().to_string()),
    };
    let global = &cli.global;
    if !matches!(
        cli.command,
        None | Some(Command::Demo(_) | Command::Judge(_))
    ) {
        // The screens and judge catch the signal themselves. Nothing is half written whenever it comes.
        let always = Arc::new(AtomicBool::new(true));
        signal_hook::flag::register_conditional_shutdown(SIGINT, 130, always)?;
    }
    match &cli.command {
        None => screens::run(global, &cli.how),
        Some(Command::Demo(args)) => args.run(global),
        Some(Command::Init(args)) => args.run(global),
        Some(Command::Site(args)) => args.run(global),
        Some(Command::Term(args)) => args.run(global),
        Some(Command::Screener(args)) => args.run(global),
        Some(Command::Setting(args)) => args.run(global),
        Some(Command::Chart(args)) => args.run(global),
        Some(Command::Station(args)) => args.run(global),
        Some(Command::Roster(args)) => args.run(global),
        Some(Command::Day(args)) => args.run(global),
        Some(Command::Record(args)) => args.run(global),
        Some(Command::Correct(args)) => args.run(global),
        Some(Command::Child(args)) => args.run(global),
        Some(Command::Results(args)) => args.run(global),
        Some(Command::Judge(args)) => args.run(global),
        Some(Command::Rules(args)) => args.run(global),
        Some(Command::Report(args)) => args.run(global),
        Some(Command::Refer(args)) => args.run(global),
        Some(Command::Step(args)) => args.run(global),
        Some(Command::Exam(args)) => args.run(global),
        Some(Command::Letters(args)) => args.run(global),
        Some(Command::Verify(args)) => args.run(global),
        Some(Command::Backup(args)) => args.run(global),
        Some(Command::Restore(args)) => args.run(global),
        Some(Command::Packet(args)) => args.run(global),
        Some(Command::Keys(args)) => args.run(global),
    }
}
