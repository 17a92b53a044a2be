//! `twoline exam`: reports of examinations.

use clap::{Args, Subcommand};

use super::output::{print_clean, wrapped};
use super::values::assigned;
use super::{Failure, Global, open, refer};
use crate::domain::exam::ExamField;

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
