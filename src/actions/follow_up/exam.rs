//! Reports of examinations.

use chrono::NaiveDate;
use uuid::Uuid;

use super::super::desk::Desk;
use super::super::error::{ActionError, Result};
use super::{ReferralView, context};
use crate::domain::age::AgeMonths;
use crate::domain::exam::{Confirmed, Evidence, ExamField, ExamReport, contradictions};
use crate::domain::readings::ReadingContext;
use crate::domain::referral::{Closing, Step, StepKind};
use crate::rules::grading::{Clinical, Level, severity};
use crate::store::read::ExamRecord;
use crate::store::row::{ExamEntry, ExamValue, StepEntry};
use crate::store::{Tx, new_id};

/// The severity table that "confirmed" goes by.
const GROUPS: &str = "preschool-groups";

/// What became of a report.
#[derive(Debug, Clone, PartialEq)]
pub struct ExamKept {
    /// The referral it closed.
    pub referral: ReferralView,
    /// The condition group of its values, where one is known.
    pub group: Option<u32>,
    /// Whether it confirmed a finding.
    pub confirmed: Confirmed,
}

impl Desk {
    /// Reads the fields of a report as they were written.
    ///
    /// # Errors
    /// Bad input naming every field that cannot be, not only the first.
    pub fn exam_report(&self, fields: &[(ExamField, String)]) -> Result<ExamReport> {
        let mut report = ExamReport::default();
        let mut wrong = Vec::new();
        for (field, text) in fields {
            if let Err(error) = report.set(*field, text, context(self)) {
                wrong.push(error.to_string());
            }
        }
        if wrong.is_empty() {
            Ok(report)
        } else {
            Err(ActionError::bad(wrong.join("\n")))
        }
    }

    /// Keeps the report of a referral and closes it as examined, in one transaction.
    ///
    /// # Errors
    /// Bad input where the report cannot be, is in already, or the referral is closed.
    pub fn add_exam(&mut self, referral: Uuid, report: ExamReport) -> Result<ExamKept> {
        let now = self.referral(referral)?;
        let report = self.completed(report);
        let wrong = contradictions(&report, now.opened.on, self.today);
        if !wrong.is_empty() {
            let words: Vec<String> = wrong.iter().map(ToString::to_string).collect();
            return Err(ActionError::bad(words.join("\n")));
        }
        if now.reports.iter().any(|known| is_same(known, &report)) {
            return Err(ActionError::bad(format!(
                "this report of {}, {} is in already",
                now.family_name, now.given_name
            )));
        }
        let rows = self.exam_rows(&now, &report)?;
        let author = self.author();
        self.store.append(&author, |tx| rows.add(tx))?;
        let referral = self.referral(referral)?;
        let group = self.group_of(&referral);
        Ok(ExamKept {
            confirmed: referral.confirmed(group),
            group,
            referral,
        })
    }

    /// Returns a report with what is taken for granted: received today, on the examiner's form.
    pub(super) fn completed(&self, mut report: ExamReport) -> ExamReport {
        report.received_on.get_or_insert(self.today);
        report.evidence.get_or_insert(Evidence::Form);
        report
    }

    /// Returns what is written for a report: it, its values, and that its referral is closed by it.
    pub(super) fn exam_rows(&self, now: &ReferralView, report: &ExamReport) -> Result<ExamRows> {
        let (Some(examined_on), Some(received_on), Some(evidence)) =
            (report.examined_on, report.received_on, report.evidence)
        else {
            return Err(ActionError::bad("enter the date of the examination"));
        };
        let mut received = Step::new(StepKind::ReportReceived, self.today);
        received.evidence = Some(evidence);
        self.check_step(now, &received)?;
        let mut closed = Step::new(StepKind::Closed, self.today);
        closed.closing = Some(Closing::Examined);
        closed.evidence = Some(evidence);
        let report_id = new_id();
        Ok(ExamRows {
            entry: ExamEntry {
                id: new_id(),
                report_id,
                referral_id: now.id,
                child_id: now.child_id.clone(),
                examined_on,
                received_on,
                evidence,
                screener_id: self.screener.as_ref().map(|s| s.screener_id),
            },
            values: report
                .recorded()
                .into_iter()
                .map(|(field, value)| ExamValue {
                    id: new_id(),
                    report_id,
                    field,
                    value,
                })
                .collect(),
            steps: [received, closed].map(|step| self.step_row(now.id, &now.child_id, step)),
        })
    }

    /// Returns the condition group of the newest report's values at the age of the examination.
    pub fn group_of(&self, referral: &ReferralView) -> Option<u32> {
        self.group_of_report(referral.dob, referral.report()?)
    }

    /// Returns the condition group of a report's values at the age of the examination.
    pub(super) fn group_of_report(
        &self,
        dob: Option<NaiveDate>,
        report: &ExamReport,
    ) -> Option<u32> {
        let grading = self.library.grading(GROUPS)?;
        let age = AgeMonths::between(dob?, report.examined_on?);
        let graded = severity(grading, &Clinical::of_examination(age, &report.readings));
        match graded.first()?.level {
            Level::Group(group) => Some(group),
            _ => None,
        }
    }
}

/// What is written for a report.
pub(super) struct ExamRows {
    entry: ExamEntry,
    values: Vec<ExamValue>,
    steps: [StepEntry; 2],
}

impl ExamRows {
    /// Adds them to a transaction.
    pub(super) fn add(&self, tx: &mut Tx<'_>) -> crate::store::Result<()> {
        tx.add(&self.entry)?;
        self.values.iter().try_for_each(|value| tx.add(value))?;
        self.steps.iter().try_for_each(|step| tx.add(step))
    }
}

/// Says whether two reports say the same, whenever each was received.
pub(super) fn is_same(known: &ExamReport, report: &ExamReport) -> bool {
    let said = |r: &ExamReport| {
        let mut said = r.recorded();
        said.retain(|(field, _)| *field != ExamField::ReceivedOn);
        said
    };
    said(known) == said(report)
}

/// Returns the report of a record.
pub(super) fn report_of(record: &ExamRecord) -> Result<ExamReport> {
    let mut report = ExamReport::default();
    let mut values: Vec<&ExamValue> = record.values.iter().collect();
    values.sort_by_key(|v| v.field);
    for value in values {
        report
            .set(value.field, &value.value, ReadingContext::default())
            .map_err(|e| ActionError::failed(format!("a stored value cannot be read: {e}")))?;
    }
    Ok(report)
}
