//! `twoline exam`: reports of examinations.

use std::path::{Path, PathBuf};

use clap::{Args, Subcommand};

use super::output::{busy, confirmed, print_clean, print_lines, wrapped};
use super::roster::{listed, read};
use super::values::assigned;
use super::{Failure, Global, open, refer};
use crate::actions::{ExamPlan, PlannedExam};
use crate::domain::age::spoken;
use crate::domain::exam::{CONFIRMED, Confirmed, ExamField};

/// Enter what an examiner reported
#[derive(Debug, Args)]
pub(super) struct Exam {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Enter the report of a referral and close it as examined
    Add {
        /// Code on the form, or the child's id
        code: String,
        /// Values, such as `examined_on=2026-12-02` or `best_left=20/50`
        #[arg(value_name = "FIELD=VALUE", required = true)]
        values: Vec<String>,
    },
    /// Read many reports from one file, whole or not at all: what is new is shown before anything is
    /// written
    ///
    /// One row per report: a column `code` or `child_id`, `examined_on`, then any of the fields that
    /// `twoline exam fields` lists, in any order. A report that is in already counts as unchanged.
    Read {
        /// Reports file in CSV
        file: PathBuf,
        /// Show what would change and write nothing
        #[arg(long)]
        dry_run: bool,
        /// Write without asking
        #[arg(long)]
        yes: bool,
    },
    /// List the fields of a report
    Fields,
}

impl Exam {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        match &self.command {
            Command::Add { code, values } => {
                let fields = assigned(
                    values,
                    "examined_on=2026-12-02",
                    ExamField::from_word,
                    ExamField::ALL.iter().map(|f| f.word()),
                )?;
                let mut desk = open::to_sign(global)?;
                let report = desk.exam_report(&fields)?;
                let id = desk.find_referral(code)?.id;
                let kept = desk.add_exam(id, report)?;
                print_clean(&refer::whole(&desk, &kept.referral)?)
            }
            Command::Read { file, dry_run, yes } => read_file(global, file, *dry_run, *yes),
            Command::Fields => {
                let mut lines = Vec::new();
                for field in ExamField::ALL {
                    lines.extend(wrapped(
                        &format!("{}: {}", field.word(), field.title()),
                        "    ",
                    ));
                }
                print_clean(&lines)
            }
        }
    }
}

fn read_file(global: &Global, file: &Path, dry_run: bool, yes: bool) -> Result<(), Failure> {
    let (name, bytes) = read(file)?;
    let mut desk = if dry_run {
        open::to_read(global)?
    } else {
        open::to_sign(global)?
    };
    let plan = desk.plan_exams(&name, &bytes)?;
    print_clean(&plan_lines(&plan))?;
    if dry_run || plan.new.is_empty() {
        return print_lines(&["nothing was written".to_owned()]);
    }
    if !yes && !confirmed("Write this and close these referrals as examined?")? {
        return print_lines(&["nothing was written".to_owned()]);
    }
    busy("writing", || desk.add_exams(&plan))?;
    let head = desk.head()?;
    print_lines(&[format!(
        "saved; store head {} ({} entries)",
        head.short(),
        head.entries
    )])
}

/// Returns what a reports file would change.
fn plan_lines(plan: &ExamPlan) -> Vec<String> {
    let count =
        |wanted: fn(&Confirmed) -> bool| plan.new.iter().filter(|p| wanted(&p.confirmed)).count();
    let mut lines = vec![format!(
        "{} new, {} unchanged",
        plan.new.len(),
        plan.unchanged.len()
    )];
    let line = |planned: &PlannedExam| {
        let referral = &planned.referral;
        let confirmed = match &planned.confirmed {
            Confirmed::Yes(why) => format!("confirmed: {}", why.join("; ")),
            Confirmed::No => "nothing confirmed".to_owned(),
            Confirmed::NotKnown => "does not say whether anything was confirmed".to_owned(),
        };
        format!(
            "{}: {} {}, {}, code {}, examined {}; {confirmed}",
            planned.place,
            referral.child_id,
            referral.family_name,
            referral.given_name,
            referral.code,
            planned.report.examined_on.map(spoken).unwrap_or_default(),
        )
    };
    listed(&mut lines, "new", &plan.new, line);
    listed(&mut lines, "unchanged", &plan.unchanged, line);
    if !plan.new.is_empty() {
        lines.push(format!(
            "of the {} new: {} confirmed, {} not, {} do not say",
            plan.new.len(),
            count(|c| matches!(c, Confirmed::Yes(_))),
            count(|c| *c == Confirmed::No),
            count(|c| *c == Confirmed::NotKnown),
        ));
        lines.extend(wrapped(CONFIRMED, "  "));
    }
    lines
}
