//! Visits with their readings, outcomes and corrections.

use chrono::NaiveDate;
use rusqlite::params;
use uuid::Uuid;

use super::generic::{LATEST_FIRST, LIVE, OLDEST_FIRST};
use super::{Columns, Corrected, Reads};
use crate::domain::codes::{Attempt, Status};
use crate::domain::field::Field;
use crate::domain::outcome::{OutcomeKind, Urgency};
use crate::store::cell::Value;
use crate::store::error::Result;
use crate::store::row::{DayKey, Outcome, Reading, Visit};

/// Holds for a row `x` of any part of the visit `?1`.
pub(super) const OF_VISIT: &str = "x.visit_id IN (SELECT ?1 UNION SELECT q.visit_id \
    FROM visit_part p JOIN visit_part q ON q.lead = p.lead WHERE p.visit_id = ?1)";

/// What a screen shows of a visit.
#[derive(Debug, Clone, PartialEq, Eq)]
#[allow(missing_docs)]
pub struct VisitNow {
    pub visit_id: Uuid,
    pub child_id: String,
    pub site: String,
    pub screened_on: NaiveDate,
    pub protocol: String,
    pub attempt: Attempt,
    pub status: Option<Status>,
    /// How many readings are present, all tries together.
    pub readings: i64,
    /// The highest try.
    pub tries: i64,
    /// The present outcome entry; none while nobody signed.
    pub outcome_id: Option<Uuid>,
    pub kind: Option<OutcomeKind>,
    pub decided_by: Option<String>,
    pub urgency: Option<Urgency>,
    pub act_by: Option<NaiveDate>,
    pub due_on: Option<NaiveDate>,
    pub qualifiers: Option<String>,
    pub screener_id: Option<Uuid>,
    pub station_id: Option<Uuid>,
    /// Whether anything of it was corrected.
    pub corrected: bool,
    /// Whether two present values for one fact differ.
    pub conflict: bool,
    /// Under how many ids stations recorded it: the parts of one visit.
    pub parts: i64,
    /// How many present outcomes were signed for it.
    pub signatures: i64,
    /// When it was last recorded, UTC milliseconds.
    pub recorded_at_ms: i64,
}

pub(super) const VISIT_NOW: &str = "v.visit_id, v.child_id, v.site, v.screened_on, v.protocol, \
    v.attempt, v.status, v.readings, v.tries, v.outcome_id, v.kind, v.decided_by, v.urgency, \
    v.act_by, v.due_on, v.qualifiers, v.screener_id, v.station_id, v.corrected, v.conflict, \
    v.parts, v.signatures, \
    v.recorded_at_ms";

impl VisitNow {
    pub(super) fn take(c: &mut Columns<'_, '_>) -> Result<VisitNow> {
        Ok(VisitNow {
            visit_id: c.take()?,
            child_id: c.take()?,
            site: c.take()?,
            screened_on: c.take()?,
            protocol: c.take()?,
            attempt: c.take()?,
            status: c.take()?,
            readings: c.take()?,
            tries: c.take()?,
            outcome_id: c.take()?,
            kind: c.take()?,
            decided_by: c.take()?,
            urgency: c.take()?,
            act_by: c.take()?,
            due_on: c.take()?,
            qualifiers: c.take()?,
            screener_id: c.take()?,
            station_id: c.take()?,
            corrected: c.take()?,
            conflict: c.take()?,
            parts: c.take()?,
            signatures: c.take()?,
            recorded_at_ms: c.take()?,
        })
    }

    /// Says whether what was signed last need not be what the readings say together: several
    /// signatures stand, or values differ.
    pub fn is_several(&self) -> bool {
        self.signatures > 1 || self.conflict
    }

    /// Returns the key of its day.
    pub fn day(&self) -> DayKey {
        DayKey {
            site: self.site.clone(),
            screened_on: self.screened_on,
            protocol: self.protocol.clone(),
        }
    }
}

/// A present reading.
#[derive(Debug, Clone, PartialEq, Eq)]
#[allow(missing_docs)]
pub struct ReadingNow {
    pub id: Uuid,
    /// The part of the visit it was recorded under.
    pub visit_id: Uuid,
    pub try_no: i64,
    pub field: Field,
    pub value: String,
    /// Whether another present value of the same field differs.
    pub conflict: bool,
}

/// A visit with every entry of it.
#[derive(Debug, Clone, PartialEq, Eq)]
#[allow(missing_docs)]
pub struct VisitRecord {
    pub now: VisitNow,
    pub visit: Corrected<Visit>,
    pub readings: Corrected<Reading>,
    pub outcomes: Corrected<Outcome>,
}

impl Reads<'_> {
    /// Returns a visit as it is now, by the id of any of its parts.
    pub fn visit(&self, visit_id: Uuid) -> Result<Option<VisitNow>> {
        Ok(self
            .visits_where(
                "v.visit_id = (SELECT p.lead FROM visit_part p WHERE p.visit_id = ?1)",
                params![visit_id.cell()],
            )?
            .pop())
    }

    /// Returns the visit of a child on a day, the retracted ones left out.
    pub fn visit_on(
        &self,
        child_id: &str,
        day: &DayKey,
        attempt: Attempt,
    ) -> Result<Option<VisitNow>> {
        Ok(self
            .visits_where(
                "v.child_id = ?1 AND v.site = ?2 AND v.screened_on = ?3 AND v.protocol = ?4 \
                 AND v.attempt = ?5",
                params![
                    child_id,
                    day.site,
                    day.screened_on.cell(),
                    day.protocol,
                    attempt.word()
                ],
            )?
            .pop())
    }

    /// Returns the ids under which a visit was recorded, its own among them.
    pub fn parts_of(&self, visit_id: Uuid) -> Result<Vec<Uuid>> {
        let mut found = self.conn.prepare_cached(
            "SELECT ?1 UNION SELECT q.visit_id FROM visit_part p \
             JOIN visit_part q ON q.lead = p.lead WHERE p.visit_id = ?1",
        )?;
        let mut rows = found.query([visit_id.cell()])?;
        let mut out = Vec::new();
        while let Some(row) = rows.next()? {
            out.extend(Uuid::from_stored(row.get_ref(0)?));
        }
        Ok(out)
    }

    /// Returns the visits of a child as they are now, earliest day first.
    pub fn visits_now(&self, child_id: &str) -> Result<Vec<VisitNow>> {
        self.visits_where("v.child_id = ?1", params![child_id])
    }

    /// Returns the present readings of a visit, all its parts together, by try and field.
    ///
    /// Where present values for one fact differ all are here and say so.
    pub fn readings(&self, visit_id: Uuid) -> Result<Vec<ReadingNow>> {
        let mut found = self.conn.prepare_cached(&format!(
            "SELECT x.id, x.visit_id, x.try_no, x.field, x.value, \
             min(x.value) OVER same <> max(x.value) OVER same \
             FROM reading x LEFT JOIN tx t ON t.tx = x.tx WHERE {OF_VISIT} AND {LIVE} \
             WINDOW same AS (PARTITION BY x.try_no, x.field) \
             ORDER BY x.try_no, {OLDEST_FIRST}"
        ))?;
        let mut rows = found.query([visit_id.cell()])?;
        let mut out = Vec::new();
        while let Some(row) = rows.next()? {
            let c = &mut Columns::of(row, "reading");
            out.push(ReadingNow {
                id: c.take()?,
                visit_id: c.take()?,
                try_no: c.take()?,
                field: c.take()?,
                value: c.take()?,
                conflict: c.take()?,
            });
        }
        Ok(out)
    }

    /// Returns the present outcomes of a visit, latest first.
    pub fn outcomes(&self, visit_id: Uuid) -> Result<Vec<Outcome>> {
        self.rows(
            &format!("{OF_VISIT} AND {LIVE}"),
            LATEST_FIRST,
            &[visit_id.cell()],
        )
    }

    /// Returns the visits of a child with every entry of them, latest day first.
    pub fn visits_of(&self, child_id: &str) -> Result<Vec<VisitRecord>> {
        let mut now = self.visits_now(child_id)?;
        now.reverse();
        now.into_iter().map(|now| self.visit_record(now)).collect()
    }

    /// Returns a visit with every entry of it.
    pub fn visit_record(&self, now: VisitNow) -> Result<VisitRecord> {
        let id = now.visit_id;
        Ok(VisitRecord {
            visit: self.recorded(OF_VISIT, &[id.cell()])?,
            readings: self.recorded(OF_VISIT, &[id.cell()])?,
            outcomes: self.recorded(OF_VISIT, &[id.cell()])?,
            now,
        })
    }

    pub(super) fn visits_where(
        self,
        condition: &str,
        params: impl rusqlite::Params,
    ) -> Result<Vec<VisitNow>> {
        let mut found = self.conn.prepare_cached(&format!(
            "SELECT {VISIT_NOW} FROM visit_current v WHERE {condition} \
             ORDER BY v.screened_on, v.attempt, v.recorded_at_ms, v.visit_id"
        ))?;
        let mut rows = found.query(params)?;
        let mut out = Vec::new();
        while let Some(row) = rows.next()? {
            out.push(VisitNow::take(&mut Columns::of(row, "visit_current"))?);
        }
        Ok(out)
    }
}
