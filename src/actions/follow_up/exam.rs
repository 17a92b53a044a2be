//! Reports of examinations.

use uuid::Uuid;

use super::super::desk::Desk;
use super::super::error::{ActionError, Result};
use super::{ReferralView, context};
use crate::domain::age::AgeMonths;
use crate::domain::exam::{Confirmed, Evidence, ExamField, ExamReport, contradictions};
use crate::domain::readings::ReadingContext;
use crate::domain::referral::{Closing, Step, StepKind};
use crate::rules::grading::{Clinical, Level, severity};
use crate::store::new_id;
use crate::store::read::ExamRecord;
use crate::store::row::{ExamEntry, ExamValue};

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
    pub fn add_exam(&mut self, referral: Uuid, mut report: ExamReport) -> Result<ExamKept> {
        let now = self.referral(referral)?;
        report.received_on.get_or_insert(self.today);
        let evidence = *report.evidence.get_or_insert(Evidence::Form);
        let wrong = contradictions(&report, now.opened.on, self.today);
        if !wrong.is_empty() {
            let words: Vec<String> = wrong.iter().map(ToString::to_string).collect();
            return Err(ActionError::bad(words.join("\n")));
        }
        let same = |known: &ExamReport| {
            ExamReport {
                received_on: report.received_on,
                ..known.clone()
            } == report
        };
        if now.reports.iter().any(same) {
            return Err(ActionError::bad(format!(
                "this report of {}, {} is in already",
                now.family_name, now.given_name
            )));
        }
        let (Some(examined_on), Some(received_on)) = (report.examined_on, report.received_on)
        else {
            return Err(ActionError::bad("enter the date of the examination"));
        };
        let mut received = Step::new(StepKind::ReportReceived, self.today);
        received.evidence = Some(evidence);
        self.check_step(&now, &received)?;
        let mut closed = Step::new(StepKind::Closed, self.today);
        closed.closing = Some(Closing::Examined);
        closed.evidence = Some(evidence);
        let report_id = new_id();
        let entry = ExamEntry {
            id: new_id(),
            report_id,
            referral_id: referral,
            child_id: now.child_id.clone(),
            examined_on,
            received_on,
            evidence,
            screener_id: self.screener.as_ref().map(|s| s.screener_id),
        };
        let values: Vec<ExamValue> = report
            .recorded()
            .into_iter()
            .map(|(field, value)| ExamValue {
                id: new_id(),
                report_id,
                field,
                value,
            })
            .collect();
        let steps = [received, closed].map(|step| self.step_row(referral, &now.child_id, step));
        let author = self.author();
        self.store.append(&author, |tx| {
            tx.add(&entry)?;
            for value in &values {
                tx.add(value)?;
            }
            steps.iter().try_for_each(|step| tx.add(step))
        })?;
        let referral = self.referral(referral)?;
        let group = self.group_of(&referral);
        Ok(ExamKept {
            confirmed: referral.confirmed(group),
            group,
            referral,
        })
    }

    /// Returns the condition group of the newest report's values at the age of the examination.
    pub fn group_of(&self, referral: &ReferralView) -> Option<u32> {
        let report = referral.report()?;
        let grading = self.library.grading(GROUPS)?;
        let age = AgeMonths::between(referral.dob?, report.examined_on?);
        let graded = severity(grading, &Clinical::of_examination(age, &report.readings));
        match graded.first()?.level {
            Level::Group(group) => Some(group),
            _ => None,
        }
    }
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
