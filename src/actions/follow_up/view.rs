//! A referral put together from what the store holds of it.

use std::collections::HashMap;

use uuid::Uuid;

use super::super::desk::Desk;
use super::super::error::Result;
use super::{ReferralView, StepView, code_of, exam, steps};
use crate::domain::age::AgeMonths;
use crate::domain::codes::YesNo;
use crate::domain::exam::ExamReport;
use crate::domain::outcome::{OutcomeKind, Urgency};
use crate::domain::referral::{FollowUp, Opened, Step, standing};
use crate::store::read::{ReferralRecord, VisitNow};
use crate::store::row::{Referral, StepEntry};

impl Desk {
    /// Returns when and how urgently a referral was opened: by its visit, else by hand.
    fn opened(
        &self,
        row: Option<&Referral>,
        visit: Option<&VisitNow>,
        steps: &[StepEntry],
    ) -> Opened {
        match (row, visit) {
            (Some(row), None) => Opened {
                on: row.opened_on,
                urgency: row.urgency,
                act_by: row.act_by,
            },
            (_, Some(visit)) => Opened {
                on: visit.screened_on,
                urgency: visit.urgency.unwrap_or(Urgency::Routine),
                act_by: visit.act_by,
            },
            (None, None) => Opened {
                on: steps.first().map_or(self.today, |s| s.done_on),
                urgency: Urgency::Routine,
                act_by: None,
            },
        }
    }

    pub(super) fn viewed(
        &self,
        record: ReferralRecord,
        settings: &FollowUp,
        screeners: &HashMap<Uuid, String>,
    ) -> Result<ReferralView> {
        let ReferralRecord {
            referral_id,
            child,
            visit,
            row,
            steps,
            reports,
        } = record;
        let steps = self.with_told(visit.as_ref(), steps)?;
        let opened = self.opened(row.as_ref(), visit.as_ref(), &steps);
        let why = match (&visit, &row) {
            (Some(visit), _) => self.why_now(visit)?,
            (None, Some(row)) => row.reason.clone(),
            (None, None) => String::new(),
        };
        let reports: Vec<ExamReport> =
            reports.iter().map(exam::report_of).collect::<Result<_>>()?;
        let plain: Vec<Step> = steps.iter().map(steps::step_of).collect();
        let glasses_from = reports
            .last()
            .filter(|r| r.prescribes_glasses())
            .and_then(|r| r.examined_on);
        let other_codes = match &visit {
            Some(visit) if visit.parts > 1 => self
                .read()
                .parts_of(referral_id)?
                .into_iter()
                .filter(|id| *id != referral_id)
                .map(code_of)
                .collect(),
            _ => Vec::new(),
        };
        let mut standing = standing(&opened, &plain, glasses_from, settings);
        let outcome_now = visit
            .as_ref()
            .and_then(|v| v.kind)
            .filter(|kind| *kind != OutcomeKind::Refer);
        if let Some(kind) = outcome_now {
            standing.no_longer_refers(kind);
        }
        let yes_no = |pick: fn(&Referral) -> Option<YesNo>| row.as_ref().and_then(pick);
        let word = |pick: fn(&Referral) -> &String| row.as_ref().map(pick).cloned();
        Ok(ReferralView {
            id: referral_id,
            code: code_of(referral_id),
            other_codes,
            age: child
                .dob
                .and_then(|born| AgeMonths::between(born, self.today)),
            outcome_now,
            referred_at: visit.as_ref().map(|v| v.site.clone()).unwrap_or_default(),
            last_exam_on: child.last_exam_on,
            opened,
            why,
            standing,
            steps: plain
                .into_iter()
                .zip(&steps)
                .map(|(step, entry)| StepView {
                    step,
                    screener: entry
                        .screener_id
                        .and_then(|id| screeners.get(&id).cloned())
                        .unwrap_or_default(),
                    entered_on: entry.entered_on,
                })
                .collect(),
            reports,
            responsible: word(|r| &r.responsible).unwrap_or_default(),
            consent_to_share: yes_no(|r| r.consent_to_share),
            interpreter: yes_no(|r| r.interpreter),
            language: word(|r| &r.language)
                .filter(|l| !l.is_empty())
                .or(child.language)
                .unwrap_or_default(),
            prior_exam: word(|r| &r.prior_exam)
                .filter(|p| !p.is_empty())
                .or_else(|| child.last_exam_on.map(|d| format!("examined {d} (roster)")))
                .unwrap_or_default(),
            reachable: child.guardian_phone.is_some_and(|p| !p.trim().is_empty()),
            child_id: child.child_id,
            family_name: child.family_name,
            given_name: child.given_name,
            dob: child.dob,
            grade: child.grade,
            class: child.class.unwrap_or_default(),
            site: child.site.unwrap_or_default(),
        })
    }
}
