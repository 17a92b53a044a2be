//! Signing, correcting, moving and taking back a visit.

use uuid::Uuid;

use super::days::key_of;
use super::desk::Desk;
use super::error::{ActionError, Result};
use super::views::{DayChild, DayInfo, SignRequest, Signed};
use super::visit_rows::{reasoned, stored_outcome, take_back};
use crate::domain::field::Field;
use crate::domain::readings::Readings;
use crate::domain::screening_test::ScreeningTest;
use crate::store::new_id;
use crate::store::read::VisitNow;

impl Desk {
    /// Signs a visit: readings, outcome and, for an emergency, the running line, in one transaction.
    ///
    /// The same visit id with the same readings again is a retry and writes nothing. Another try of a
    /// child whose chart was not testable is kept as a second try of the same visit. Readings of
    /// fields that the signed visit lacks, and that contradict none of it, are a further part of it:
    /// one station did the chart, another one the instrument.
    pub fn sign(&mut self, request: SignRequest) -> Result<Signed> {
        let day = self.day_info(request.day)?;
        let child = self.day_child(&day, &request.child_id)?;
        let child = DayChild {
            attempt: request.attempt,
            ..child
        };
        let readings = self
            .by_method(&day, &child, request.readings)
            .map_err(|e| ActionError::bad(e.to_string()))?;
        let existing = self
            .read()
            .visit_on(&request.child_id, &key_of(&day), request.attempt)?;
        let Some(visit) = existing else {
            let mut rows = self.new_visit(&day, &child, request.visit, &[readings])?;
            rows.remark(&request.remarks);
            self.write_visits(vec![rows])?;
            return self.signed(&day, &request.child_id, request.visit);
        };
        let mut tries = self.tries(visit.visit_id)?;
        if visit.visit_id == request.visit && tries.last() == Some(&readings) {
            return self.signed(&day, &request.child_id, visit.visit_id);
        }
        let whole = visit.visit_id;
        let chart_again = tries.last().is_some_and(Readings::any_eye_not_testable)
            && ScreeningTest::Distance
                .fields()
                .iter()
                .any(|field| readings.get(*field).is_some());
        let adds = if chart_again {
            None
        } else {
            self.adds_to(whole, &readings)?
        };
        match adds {
            // The same part again is a retry.
            Some(more) if more.is_empty() && self.read().visit(request.visit)?.is_some() => {
                return self.signed(&day, &request.child_id, whole);
            }
            Some(more) if !more.is_empty() => {
                let ids = (whole, request.visit);
                let mut rows = self.further_part(&day, &child, ids, more)?;
                rows.remark(&request.remarks);
                self.write_visits(vec![rows])?;
                return self.signed(&day, &request.child_id, whole);
            }
            _ => {}
        }
        if !tries.last().is_some_and(Readings::any_eye_not_testable) {
            return Err(ActionError::bad(format!(
                "{}, {} is signed already on this day",
                child.family_name, child.given_name
            ))
            .hint("correct the signed value with a reason"));
        }
        tries.push(readings);
        let mut rows = self.further_try(&day, &child, visit.visit_id, &tries)?;
        rows.remark(&self.remarks_of(visit.visit_id, &day, &child)?);
        rows.remark(&request.remarks);
        self.write_visits(vec![rows])?;
        self.signed(&day, &request.child_id, visit.visit_id)
    }

    /// Returns the readings of fields that a signed visit does not have yet, where all others say what
    /// it says: another station's part of the visit. Nothing where anything differs.
    fn adds_to(&self, visit: Uuid, readings: &Readings) -> Result<Option<Vec<(Field, String)>>> {
        let present = self.read().readings(visit)?;
        let mut more = Vec::new();
        for (field, value) in readings.recorded() {
            let mut of_field = present.iter().filter(|r| r.field == field).peekable();
            if of_field.peek().is_none() {
                more.push((field, value));
            } else if of_field.any(|r| r.value != value) {
                return Ok(None);
            }
        }
        Ok(Some(more))
    }

    /// Corrects fields of a signed visit, with a reason; an empty text takes a value back.
    pub fn correct(
        &mut self,
        visit: Uuid,
        changes: &[(Field, String)],
        reason: &str,
    ) -> Result<Signed> {
        let (now, day) = self.visit_and_day(visit)?;
        let rows = self.corrected_visit(visit, changes, reason)?;
        self.write_visits(vec![rows])?;
        self.signed(&day, &now.child_id, visit)
    }

    /// Moves a whole visit to the child it belongs to, and leaves the other one to come.
    pub fn move_visit(
        &mut self,
        visit: Uuid,
        to_child_id: &str,
        reason: &str,
    ) -> Result<(Signed, DayChild)> {
        let reason = reasoned(reason)?;
        let (now, day) = self.visit_and_day(visit)?;
        if now.child_id == to_child_id {
            return Err(ActionError::bad("this visit is that child's already"));
        }
        if now.conflict {
            return Err(
                ActionError::bad("values of this visit differ between stations")
                    .hint("settle them first: twoline correct"),
            );
        }
        let to = self.day_child(&day, to_child_id)?;
        if self
            .read()
            .visit_on(to_child_id, &key_of(&day), to.attempt)?
            .is_some()
        {
            return Err(ActionError::bad(format!(
                "{}, {} has a visit on this day already",
                to.family_name, to.given_name
            ))
            .hint("take that one back or move it first"));
        }
        let there = new_id();
        let mut rows = self.new_visit(&day, &to, there, &self.tries(visit)?)?;
        let from = self.child_on(&day, &now)?;
        rows.remark(&self.remarks_of(visit, &day, &from)?);
        if let Some(signed) = self.read().outcomes(visit)?.first() {
            rows.entered_late(signed.late);
        }
        let open = self.read().urgent_open()?;
        let parts = self.read().parts_of(visit)?;
        let of_visit = |id: Option<Uuid>| id.is_some_and(|id| parts.contains(&id));
        if let Some(line) = open.iter().find(|u| of_visit(u.raised.visit_id)) {
            rows.raised_at(&line.raised);
        }
        let author = self.author();
        self.store.append(&author, |tx| {
            take_back(tx, visit, &reason)?;
            rows.write(tx)
        })?;
        let from = self.day_child(&day, &now.child_id)?;
        Ok((self.signed(&day, to_child_id, there)?, from))
    }

    /// Takes a signed visit back; everything stays in the history.
    pub fn retract(&mut self, visit: Uuid, reason: &str) -> Result<DayChild> {
        let reason = reasoned(reason)?;
        let (now, day) = self.visit_and_day(visit)?;
        let author = self.author();
        self.store
            .append(&author, |tx| take_back(tx, visit, &reason))?;
        self.day_child(&day, &now.child_id)
    }

    pub(super) fn visit_and_day(&self, visit: Uuid) -> Result<(VisitNow, DayInfo)> {
        let now = self
            .read()
            .visit(visit)?
            .ok_or_else(|| ActionError::bad("there is no such visit, or it was taken back"))?;
        let key = now.day();
        let day = self
            .days()?
            .into_iter()
            .find(|d| key_of(d) == key)
            .ok_or_else(|| ActionError::failed("the screening day of this visit is missing"))?;
        Ok((now, day))
    }

    /// Returns what was stored, read back.
    fn signed(&self, day: &DayInfo, child_id: &str, visit: Uuid) -> Result<Signed> {
        let outcome = self
            .read()
            .outcomes(visit)?
            .into_iter()
            .next()
            .ok_or_else(|| ActionError::failed("the outcome was not found after saving"))?;
        Ok(Signed {
            visit,
            child: self.day_child(day, child_id)?,
            outcome: stored_outcome(&outcome),
            head: self.head()?.short(),
        })
    }
}
