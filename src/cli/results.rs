//! `twoline results`: results of a screening day from a file.

use std::path::PathBuf;

use clap::{Args, Subcommand};

use super::output::{busy, confirmed, print_clean, print_lines};
use super::roster::{listed, read};
use super::values::{WhichDay, title};
use super::{Failure, Global, open};
use crate::actions::ResultsPlan;

/// Read results
#[derive(Debug, Args)]
pub(super) struct Results {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Read results into an open screening day: what is new, unchanged and different is shown before
    /// anything is written
    Add {
        /// Results file in CSV
        file: PathBuf,
        #[command(flatten)]
        day: WhichDay,
        /// Show what would change and write nothing
        #[arg(long)]
        dry_run: bool,
        /// Write without asking
        #[arg(long)]
        yes: bool,
        /// Correct values that are signed differently, for this reason
        #[arg(long, value_name = "REASON")]
        correct: Option<String>,
    },
}

impl Results {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        let Command::Add {
            file,
            day,
            dry_run,
            yes,
            correct,
        } = &self.command;
        let (name, bytes) = read(file)?;
        let mut desk = if *dry_run {
            open::to_read(global)?
        } else {
            open::to_sign(global)?
        };
        let day = day.of(&desk)?;
        let plan = desk.plan_results(&name, &bytes, &day)?;
        print_clean(&plan_lines(&plan))?;
        if *dry_run || (plan.new.is_empty() && plan.different.is_empty()) {
            return print_lines(&["nothing was written".to_owned()]);
        }
        if !plan.different.is_empty() && correct.is_none() {
            let visits = if plan.different.len() == 1 {
                "1 visit is".to_owned()
            } else {
                format!("{} visits are", plan.different.len())
            };
            return Err(Failure::bad_input(format!(
                "{visits} signed with other values; nothing was written"
            ))
            .hint("--correct REASON corrects them"));
        }
        if !*yes && !confirmed("Write this?")? {
            return print_lines(&["nothing was written".to_owned()]);
        }
        busy("writing", || desk.add_results(&plan, correct.as_deref()))?;
        let head = desk.head()?;
        print_lines(&[format!(
            "saved; store head {} ({} entries)",
            head.short(),
            head.entries
        )])
    }
}

/// Returns what a results file would change.
fn plan_lines(plan: &ResultsPlan) -> Vec<String> {
    let mut lines = vec![
        title(&plan.day),
        format!(
            "{} new, {} unchanged, {} different",
            plan.new.len(),
            plan.unchanged,
            plan.different.len()
        ),
    ];
    if plan.empty > 0 {
        lines.push(format!("{} rows with nothing entered", plan.empty));
    }
    listed(
        &mut lines,
        "signed with other values",
        &plan.different,
        |different| {
            let child = &different.child;
            let fields: Vec<String> = different
                .fields
                .iter()
                .map(|(field, old, new)| format!("{} signed {old:?}, file {new:?}", field.word()))
                .collect();
            format!(
                "{}: {} {}, {}: {}",
                different.place,
                child.child_id,
                child.family_name,
                child.given_name,
                fields.join(", ")
            )
        },
    );
    lines
}
