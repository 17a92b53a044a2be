//! `twoline judge`: rows of a file in, rows with their outcome out.

use std::io::{self, ErrorKind, IsTerminal};
use std::path::PathBuf;
use std::sync::Arc;
use std::sync::atomic::AtomicBool;

use chrono::NaiveDate;
use clap::Args;

use super::output::say;
use super::{Failure, Global};
use crate::actions::judge::{By, JudgeError, JudgeRequest, Tally, judge_file, read_input};
use crate::actions::rulebook::library_with;
use crate::domain::outcome::OutcomeKind;

/// Judge the rows of a results file without a store
///
/// Writes every column of FILE followed by the outcome, its urgency, the kinds of amblyopia risk,
/// the criteria that referred or stayed unknown, the reasons and the rule set. A bad row is listed with row and column, and
/// nothing is written.
#[derive(Debug, Args)]
pub(super) struct Judge {
    /// Results file in CSV, one row per child and visit; - for standard input
    file: PathBuf,
    /// Judge by this rule set alone
    #[arg(long, value_name = "ID", required_unless_present = "protocol")]
    rules: Option<String>,
    /// Judge by this protocol
    #[arg(long, value_name = "ID", conflicts_with = "rules")]
    protocol: Option<String>,
    /// The screening day of rows that do not say one
    #[arg(long, value_name = "YYYY-MM-DD")]
    date: Option<NaiveDate>,
    /// The file to write; standard output without it
    #[arg(short, long, value_name = "OUT")]
    out: Option<PathBuf>,
    /// Hand unknown columns through instead of refusing them
    #[arg(long)]
    pass_through: bool,
    /// Write the good rows, and the bad ones to OUT.refused.csv
    #[arg(long, requires = "out")]
    keep_going: bool,
    /// A local rule file to load beside the shipped ones
    #[arg(long, value_name = "FILE")]
    rule_file: Vec<PathBuf>,
}

impl Judge {
    pub(super) fn run(&self, _global: &Global) -> Result<(), Failure> {
        let library = library_with(&self.rule_file)?;
        let by = match (&self.rules, &self.protocol) {
            (Some(id), _) => By::rule_set(&library, id)?,
            (None, Some(id)) => By::protocol(&library, id)?,
            (None, None) => {
                return Err(Failure::bad_input("--rules ID or --protocol ID is needed")
                    .hint("twoline rules list shows all of them"));
            }
        };
        let request = JudgeRequest {
            file: self.file.clone(),
            date: self.date,
            out: self.out.clone(),
            pass_through: self.pass_through,
            keep_going: self.keep_going,
        };
        // Read before signals are caught, so that waiting for standard input can be broken off.
        let input = read_input(&request.file)?;
        let stop = Arc::new(AtomicBool::new(false));
        for signal in [signal_hook::consts::SIGINT, signal_hook::consts::SIGTERM] {
            signal_hook::flag::register(signal, Arc::clone(&stop))?;
        }
        // Drawn on standard error, and only where that is a terminal.
        // Not among the rows, though, where they go to the same terminal.
        let bar = if self.out.is_none() && io::stdout().is_terminal() {
            indicatif::ProgressBar::hidden()
        } else {
            indicatif::ProgressBar::new_spinner().with_message("rows read")
        };
        let mut progress = |rows| {
            bar.set_message(format!("{rows} rows read"));
            bar.tick();
        };
        let mut stdout = io::stdout().lock();
        let result = judge_file(by, &request, &input, &mut stdout, &stop, &mut progress);
        bar.finish_and_clear();
        match result {
            Ok(tally) => self.report(&tally),
            Err(JudgeError::Write { error, .. }) if error.kind() == ErrorKind::BrokenPipe => Ok(()),
            Err(error @ JudgeError::Input(_)) if !self.keep_going => {
                Err(Failure::from(error).hint("--keep-going -o OUT writes the good rows of a file whose header and quoting are right"))
            }
            Err(error) => Err(error.into()),
        }
    }

    fn report(&self, tally: &Tally) -> Result<(), Failure> {
        for remark in &tally.remarks {
            say(&format!("note: {remark}"));
        }
        if self.out.is_some() {
            say(&summary(tally));
        }
        if tally.refused == 0 {
            return Ok(());
        }
        let path = tally.refused_file.as_ref().map(|p| p.to_string_lossy());
        let rows = if tally.refused == 1 {
            "row was"
        } else {
            "rows were"
        };
        Err(Failure::bad_input(format!(
            "{} {rows} refused, see {}",
            tally.refused,
            crate::domain::text::shown(&path.unwrap_or_default(), 200)
        ))
        .details(&tally.problems))
    }
}

fn summary(tally: &Tally) -> String {
    let counts: Vec<String> = OutcomeKind::ALL
        .iter()
        .zip(tally.outcomes)
        .filter(|(_, n)| *n > 0)
        .map(|(kind, n)| format!("{} {n}", kind.title()))
        .collect();
    format!("{} rows judged: {}", tally.judged, counts.join(", "))
}
