//! Many examination reports from one file: planned and shown first, then written whole.

use sha2::{Digest, Sha256};

use super::super::desk::Desk;
use super::super::error::Result;
use super::exam::is_same;
use super::{ReferralView, closed_words, near_words};
use crate::domain::exam::{Confirmed, ExamReport, contradictions};
use crate::domain::form_code::{FormCode, FormCodeError};
use crate::intake::exams::{ExamRow, read_exams};
use crate::intake::{Place, Problem, Problems};
use crate::store::new_id;
use crate::store::row::Import;

/// What a reports file would change, before anything is written.
#[derive(Debug)]
pub struct ExamPlan {
    /// Reports to keep, each with the open referral that it closes.
    pub new: Vec<PlannedExam>,
    /// Reports that are in already, or stand in the file twice.
    pub unchanged: Vec<PlannedExam>,
    file: String,
    file_hash: String,
}

/// A report of a file, and the referral it is of.
#[derive(Debug)]
pub struct PlannedExam {
    /// Where it stands in the file.
    pub place: Place,
    /// The referral as it stands.
    pub referral: ReferralView,
    /// The report.
    pub report: ExamReport,
    /// Whether it confirms a finding.
    pub confirmed: Confirmed,
}

impl Desk {
    /// Reads a file of examination reports and finds the referral of each.
    ///
    /// # Errors
    /// Everything that is wrong with the file: nothing is written.
    pub fn plan_exams(&self, file: &str, bytes: &[u8]) -> Result<ExamPlan> {
        let rows = read_exams(file, bytes, Some(self.notation()))?;
        let list = self.referral_list()?;
        let mut plan = ExamPlan {
            new: Vec::new(),
            unchanged: Vec::new(),
            file: file.to_owned(),
            file_hash: crate::store::ledger::hex(&Sha256::digest(bytes)),
        };
        let mut problems = Problems::default();
        for row in rows {
            for problem in self.plan_exam(file, &list, &row, &mut plan) {
                problems.push(problem);
            }
        }
        Ok(problems.or(plan)?)
    }

    /// Adds a row to the plan, or returns what is wrong with it.
    fn plan_exam(
        &self,
        file: &str,
        list: &[ReferralView],
        row: &ExamRow,
        plan: &mut ExamPlan,
    ) -> Vec<Problem> {
        let (column, cell) = row.whose();
        let about =
            |expected: String| Problem::of_cell(file, row.place, column.word(), cell, expected);
        let report = self.completed(row.report.clone());
        let found = match of_row(list, row, &about) {
            Ok(found) => found,
            Err(problem) => return vec![*problem],
        };
        let planned = |referral: &ReferralView| PlannedExam {
            place: row.place,
            confirmed: report.confirmed(self.group_of_report(referral.dob, &report)),
            referral: referral.clone(),
            report: report.clone(),
        };
        let known = |r: &&&ReferralView| r.reports.iter().any(|known| is_same(known, &report));
        if let Some(referral) = found.iter().find(known) {
            plan.unchanged.push(planned(referral));
            return Vec::new();
        }
        let open: Vec<&ReferralView> = found
            .iter()
            .copied()
            .filter(|r| r.standing.state.is_open())
            .collect();
        let referral = match (&open[..], &found[..]) {
            ([one], _) => *one,
            ([], [.., closed]) => return vec![closed_problem(closed, &about)],
            _ => {
                return vec![
                    about("one open referral of the child".to_owned())
                        .cure(format!("give the code instead: {}", words(&open))),
                ];
            }
        };
        if let Some(earlier) = plan.new.iter().find(|p| p.referral.id == referral.id) {
            if is_same(&earlier.report, &report) {
                plan.unchanged.push(planned(referral));
                return Vec::new();
            }
            return vec![about("each referral once".to_owned()).cure(format!(
                "another report of {} stands in {}; enter a second one with twoline exam add",
                named(referral),
                earlier.place
            ))];
        }
        let wrong: Vec<Problem> = contradictions(&report, referral.opened.on, self.today)
            .into_iter()
            .map(|e| Problem::of_cell(file, row.place, e.field.word(), &e.found, e.expected))
            .collect();
        if wrong.is_empty() {
            plan.new.push(planned(referral));
        }
        wrong
    }

    /// Keeps every new report of a plan and closes its referrals as examined, in one transaction.
    pub fn add_exams(&mut self, plan: &ExamPlan) -> Result<()> {
        let mut rows = Vec::new();
        for planned in &plan.new {
            rows.push(self.exam_rows(&planned.referral, &planned.report)?);
        }
        let import = Import {
            id: new_id(),
            import_id: new_id(),
            kind: "exams".to_owned(),
            file_name: plan.file.clone(),
            file_hash: plan.file_hash.clone(),
            rows_new: plan.new.len() as i64,
            rows_changed: 0,
            rows_unchanged: plan.unchanged.len() as i64,
            rows_gone: 0,
        };
        let author = self.author();
        self.store.append(&author, |tx| {
            rows.iter().try_for_each(|report| report.add(tx))?;
            tx.add(&import)
        })?;
        Ok(())
    }
}

/// Returns the referrals that a row can be of: at least one.
fn of_row<'l>(
    list: &'l [ReferralView],
    row: &ExamRow,
    about: &impl Fn(String) -> Problem,
) -> std::result::Result<Vec<&'l ReferralView>, Box<Problem>> {
    if row.code.is_empty() {
        let found: Vec<&ReferralView> =
            list.iter().filter(|r| r.child_id == row.child_id).collect();
        return if found.is_empty() {
            Err(Box::new(about("a child with a referral".to_owned()).cure(
                "twoline child find TEXT finds the child, twoline refer open opens one",
            )))
        } else {
            Ok(found)
        };
    }
    let code = match FormCode::parse(&row.code) {
        Ok(code) => code,
        Err(FormCodeError::Check { .. }) => {
            let near = near_words(list, &row.code);
            return Err(Box::new(
                about("a form code: a digit is wrong, or two are swapped".to_owned()).cure(
                    if near.is_empty() {
                        "no referral has a code near it; read it off the form once more".to_owned()
                    } else {
                        format!("near it: {}", near.join("; "))
                    },
                ),
            ));
        }
        Err(FormCodeError::Form { .. }) => {
            let problem = about("the ten digits of the code on the form".to_owned());
            let padded = format!("{:0>10}", row.code);
            return Err(Box::new(if FormCode::parse(&padded).is_ok() {
                problem.cure(format!(
                    "a spreadsheet drops a leading 0: is {padded} meant? format the column as text"
                ))
            } else if row.code.contains(['e', 'E']) {
                problem.cure("a spreadsheet wrote it as a number: format the column as text")
            } else {
                problem
            }));
        }
    };
    // Among many thousands two referrals may share a code; then only the child's id tells them apart.
    let with_code: Vec<&ReferralView> = list.iter().filter(|r| r.has_code(code)).collect();
    let found: Vec<&ReferralView> = with_code
        .iter()
        .copied()
        .filter(|r| row.child_id.is_empty() || r.child_id == row.child_id)
        .collect();
    match (&found[..], &with_code[..]) {
        ([_], _) => Ok(found),
        ([], []) => Err(Box::new(
            about("the code of a referral of this store".to_owned())
                .cure("was the form from another programme? give child_id instead"),
        )),
        ([], _) => Err(Box::new(
            about(format!("the code of a referral of {}", row.child_id)).cure(format!(
                "{code} is {}; one of the two cells is wrong",
                all_named(&with_code)
            )),
        )),
        (several, _) => Err(Box::new(
            about("a code that one referral has".to_owned()).cure(format!(
                "give child_id as well; it is the code of {}",
                all_named(several)
            )),
        )),
    }
}

fn closed_problem(closed: &ReferralView, about: &impl Fn(String) -> Problem) -> Problem {
    about(format!(
        "an open referral; that of {} is {}",
        named(closed),
        closed_words(closed.standing.state).unwrap_or_default()
    ))
    .cure(format!(
        "open it again first: twoline step {} reopened",
        closed.code.digits()
    ))
}

fn named(referral: &ReferralView) -> String {
    format!(
        "{}, {} ({})",
        referral.family_name, referral.given_name, referral.child_id
    )
}

fn all_named(list: &[&ReferralView]) -> String {
    list.iter()
        .map(|r| named(r))
        .collect::<Vec<_>>()
        .join(" and ")
}

fn words(list: &[&ReferralView]) -> String {
    list.iter()
        .map(|r| format!("{} of {}", r.code, r.opened.on))
        .collect::<Vec<_>>()
        .join(", ")
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;
    use crate::domain::outcome::Urgency;
    use crate::domain::referral::{FollowUp, Opened, standing};

    fn referral(child_id: &str, code: FormCode) -> ReferralView {
        let opened = Opened {
            on: "2026-10-14".parse().unwrap(),
            urgency: Urgency::Routine,
            act_by: None,
        };
        ReferralView {
            id: new_id(),
            code,
            other_codes: Vec::new(),
            child_id: child_id.to_owned(),
            family_name: "Okafor".to_owned(),
            given_name: "Ada".to_owned(),
            dob: None,
            age: None,
            grade: None,
            class: String::new(),
            site: String::new(),
            referred_at: String::new(),
            last_exam_on: None,
            standing: standing(&opened, &[], None, &FollowUp::default()),
            opened,
            why: String::new(),
            outcome_now: None,
            steps: Vec::new(),
            reports: Vec::new(),
            responsible: String::new(),
            consent_to_share: None,
            interpreter: None,
            language: String::new(),
            prior_exam: String::new(),
            reachable: true,
        }
    }

    #[test]
    fn a_code_that_two_referrals_share_is_no_answer_without_the_child() {
        let code = FormCode::new(48_291_356);
        let list = [
            referral("Q-1", code),
            referral("Q-2", code),
            referral("Q-3", FormCode::new(7)),
        ];
        let asked = |code: FormCode, child_id: &str| {
            let place = Place { row: 2, line: 2 };
            let row = ExamRow {
                place,
                code: code.to_string(),
                child_id: child_id.to_owned(),
                report: ExamReport::default(),
            };
            let about = |expected: String| {
                Problem::of_cell("reports.csv", place, "code", &row.code, expected)
            };
            of_row(&list, &row, &about)
                .map(|found| found.iter().map(|r| r.child_id.clone()).collect::<Vec<_>>())
                .map_err(|problem| problem.to_string())
        };
        assert_eq!(asked(code, "Q-2").unwrap(), ["Q-2"]);
        assert_eq!(asked(FormCode::new(7), "").unwrap(), ["Q-3"]);
        let said = asked(code, "").unwrap_err();
        assert!(
            said.contains("give child_id as well") && said.contains("(Q-1) and Okafor, Ada (Q-2)"),
            "{said}"
        );
        let said = asked(code, "Q-3").unwrap_err();
        assert!(said.contains("one of the two cells is wrong"), "{said}");
        let said = asked(FormCode::new(8), "").unwrap_err();
        assert!(said.contains("another programme"), "{said}");
    }
}
