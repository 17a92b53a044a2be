//! Referrals with their steps, examination reports and what left the programme.

use std::collections::HashMap;

use uuid::Uuid;

use super::generic::{IN_ORDER, LIVE};
use super::{ChildNow, Columns, Reads, VisitNow};
use crate::store::cell::Value;
use crate::store::error::Result;
use crate::store::row::{Disclosure, ExamEntry, ExamValue, Referral, StepEntry};

/// A referral as the store holds it.
#[derive(Debug, Clone, PartialEq, Eq)]
#[allow(missing_docs)]
pub struct ReferralRecord {
    /// That of the visit whose outcome opened it, else its own.
    pub referral_id: Uuid,
    pub child: ChildNow,
    /// The visit whose outcome opened it, as it is now.
    pub visit: Option<VisitNow>,
    /// What is known beside the outcome.
    pub row: Option<Referral>,
    /// Steps in the order they were done.
    pub steps: Vec<StepEntry>,
    pub reports: Vec<ExamRecord>,
}

/// An examination report as the store holds it.
#[derive(Debug, Clone, PartialEq, Eq)]
#[allow(missing_docs)]
pub struct ExamRecord {
    pub entry: ExamEntry,
    pub values: Vec<ExamValue>,
}

/// Everything of the follow-up, by referral.
#[derive(Debug, Default)]
struct FollowUp {
    rows: HashMap<Uuid, Referral>,
    steps: HashMap<Uuid, Vec<StepEntry>>,
    reports: HashMap<Uuid, Vec<ExamRecord>>,
}

impl Reads<'_> {
    /// Returns every referral: each visit whose present outcome is refer, each that was opened by
    /// hand, and each about which something was done although its outcome has changed since.
    pub fn referrals(&self) -> Result<Vec<ReferralRecord>> {
        let mut known = self.follow_up(None)?;
        let mut out = Vec::new();
        for (child, visit) in self.referred()? {
            out.push(known.record(visit.visit_id, child, Some(visit)));
        }
        let mut rest: Vec<Uuid> = known
            .rows
            .keys()
            .chain(known.steps.keys())
            .chain(known.reports.keys())
            .copied()
            .collect();
        rest.sort_unstable();
        rest.dedup();
        for id in rest {
            out.extend(self.rest(&mut known, id, self.visit(id)?)?);
        }
        Ok(out)
    }

    /// Returns one referral, by the id of any part of its visit.
    pub fn referral(&self, id: Uuid) -> Result<Option<ReferralRecord>> {
        let visit = self.visit(id)?;
        let id = visit.as_ref().map_or(id, |v| v.visit_id);
        self.rest(&mut self.follow_up(Some(id))?, id, visit)
    }

    /// Returns the referrals of one child: those of [`Reads::referrals`] that are its.
    pub fn referrals_of(&self, child_id: &str) -> Result<Vec<ReferralRecord>> {
        let filter = format!("x.child_id = ?1 AND {LIVE}");
        let child = child_id.to_owned();
        let key = [child.cell()];
        let visits = self.visits_now(child_id)?;
        let rows: Vec<Referral> = self.rows(&filter, IN_ORDER, &key)?;
        let steps: Vec<StepEntry> = self.rows(&filter, IN_ORDER, &key)?;
        let reports: Vec<ExamEntry> = self.rows(&filter, IN_ORDER, &key)?;
        let about = visits
            .iter()
            .map(|v| v.visit_id)
            .chain(rows.iter().map(|r| r.referral_id))
            .chain(steps.iter().map(|s| s.referral_id))
            .chain(reports.iter().map(|r| r.referral_id));
        let mut out: Vec<ReferralRecord> = Vec::new();
        for id in about {
            let Some(record) = self.referral(id)? else {
                continue;
            };
            // A visit may have been moved to another child since.
            let mine = record.child.child_id == child_id;
            if mine && out.iter().all(|r| r.referral_id != record.referral_id) {
                out.push(record);
            }
        }
        Ok(out)
    }

    /// Returns everything that left the programme, in the order it was written down.
    pub fn disclosures(&self) -> Result<Vec<Disclosure>> {
        self.rows(LIVE, &format!("x.disclosed_on, {IN_ORDER}"), &[])
    }

    fn rest(
        self,
        known: &mut FollowUp,
        id: Uuid,
        visit: Option<VisitNow>,
    ) -> Result<Option<ReferralRecord>> {
        let child_id = visit
            .as_ref()
            .map(|v| v.child_id.clone())
            .or_else(|| known.rows.get(&id).map(|r| r.child_id.clone()))
            .or_else(|| {
                let step = known.steps.get(&id).and_then(|s| s.first());
                step.map(|s| s.child_id.clone())
            });
        let Some(child) = child_id.map(|c| self.child(&c)).transpose()?.flatten() else {
            return Ok(None);
        };
        Ok(Some(known.record(id, child, visit)))
    }

    /// Stations may have recorded parts of one visit: what is about any part is about the visit.
    /// `only` is the first part of one visit, or a referral of its own.
    fn follow_up(self, only: Option<Uuid>) -> Result<FollowUp> {
        let (filter, key) = match &only {
            Some(id) => (
                format!(
                    "(x.referral_id = ?1 OR x.referral_id IN (SELECT q.visit_id FROM visit_part p \
                     JOIN visit_part q ON q.lead = p.lead WHERE p.visit_id = ?1)) AND {LIVE}"
                ),
                vec![id.cell()],
            ),
            None => (LIVE.to_owned(), Vec::new()),
        };
        let leads = match only {
            Some(_) => HashMap::new(),
            None => self.leads()?,
        };
        let lead = |id: Uuid| only.or_else(|| leads.get(&id).copied()).unwrap_or(id);
        let mut known = FollowUp::default();
        for row in self.rows::<Referral>(&filter, IN_ORDER, &key)? {
            known.rows.insert(lead(row.referral_id), row);
        }
        for step in self.rows::<StepEntry>(&filter, &format!("x.done_on, {IN_ORDER}"), &key)? {
            known
                .steps
                .entry(lead(step.referral_id))
                .or_default()
                .push(step);
        }
        let mut values: HashMap<Uuid, Vec<ExamValue>> = HashMap::new();
        let entries =
            self.rows::<ExamEntry>(&filter, &format!("x.examined_on, {IN_ORDER}"), &key)?;
        if only.is_none() {
            for value in self.rows::<ExamValue>(LIVE, IN_ORDER, &[])? {
                values.entry(value.report_id).or_default().push(value);
            }
        }
        for entry in entries {
            let values = match only {
                None => values.remove(&entry.report_id).unwrap_or_default(),
                Some(_) => self.rows(
                    &format!("x.report_id = ?1 AND {LIVE}"),
                    IN_ORDER,
                    &[entry.report_id.cell()],
                )?,
            };
            known
                .reports
                .entry(lead(entry.referral_id))
                .or_default()
                .push(ExamRecord { entry, values });
        }
        Ok(known)
    }
}

impl Reads<'_> {
    /// Returns the first id of each visit of several parts, by each of its other ids.
    fn leads(self) -> Result<HashMap<Uuid, Uuid>> {
        let mut found = self
            .conn
            .prepare_cached("SELECT visit_id, lead FROM visit_part WHERE visit_id <> lead")?;
        let mut rows = found.query([])?;
        let mut leads = HashMap::new();
        while let Some(row) = rows.next()? {
            let mut columns = Columns::of(row, "visit_part");
            leads.insert(columns.take()?, columns.take()?);
        }
        Ok(leads)
    }
}

impl FollowUp {
    fn record(&mut self, id: Uuid, child: ChildNow, visit: Option<VisitNow>) -> ReferralRecord {
        ReferralRecord {
            referral_id: id,
            child,
            visit,
            row: self.rows.remove(&id),
            steps: self.steps.remove(&id).unwrap_or_default(),
            reports: self.reports.remove(&id).unwrap_or_default(),
        }
    }
}
