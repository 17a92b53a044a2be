//! The signed visits of a day with what the day board asks of them.

use chrono::NaiveDate;
use rusqlite::params;
use uuid::Uuid;

use super::generic::{LATEST_FIRST, LIVE, OLDEST_FIRST};
use super::{Columns, Reads};
use crate::clock::Moment;
use crate::domain::age::Grade;
use crate::domain::codes::{Attempt, Status};
use crate::domain::field::Field;
use crate::domain::outcome::OutcomeKind;
use crate::store::cell::Value;
use crate::store::error::Result;
use crate::store::row::DayKey;

/// What one station signed of a visit: what it came to there, and when it was first signed.
#[derive(Debug, Clone, PartialEq, Eq)]
#[allow(missing_docs)]
pub struct SignedVisit {
    pub child_id: String,
    pub attempt: Attempt,
    pub status: Option<Status>,
    pub kind: OutcomeKind,
    pub decided_by: String,
    /// Where it was first signed.
    pub station_id: Option<Uuid>,
    /// Grade as it was judged.
    pub grade: Option<Grade>,
    /// Age as it was judged, in completed months.
    pub age_months: Option<i64>,
    /// Whether an acuity was read from a chart.
    pub chart: bool,
    /// Whether an instrument gave a value.
    pub instrument: bool,
    /// When it was first signed.
    pub signed: Moment,
    /// The transaction of that signature.
    pub tx: i64,
}

impl Reads<'_> {
    /// Returns the signed visits of a day, each station's part of one by itself.
    pub fn signed_visits(&self, day: &DayKey) -> Result<Vec<SignedVisit>> {
        self.signed_where(
            "v.screened_on = ?1 AND v.site = ?2 AND v.protocol = ?3",
            params![day.screened_on.cell(), day.site, day.protocol],
        )
    }

    /// Returns the signed visits of a protocol at every site from `from` to the day before `before`.
    pub fn signed_between(
        &self,
        protocol: &str,
        from: NaiveDate,
        before: NaiveDate,
    ) -> Result<Vec<SignedVisit>> {
        self.signed_where(
            "v.screened_on >= ?1 AND v.screened_on < ?2 AND v.protocol = ?3",
            params![from.cell(), before.cell(), protocol],
        )
    }

    fn signed_where(
        self,
        condition: &str,
        params: impl rusqlite::Params,
    ) -> Result<Vec<SignedVisit>> {
        let has = |fields: &[Field]| {
            let words: Vec<String> = fields.iter().map(|f| format!("'{}'", f.word())).collect();
            format!(
                "EXISTS (SELECT 1 FROM reading x WHERE x.visit_id = q.visit_id AND x.field IN ({}) \
                 AND {LIVE})",
                words.join(", ")
            )
        };
        // Of the outcomes of a part the first one says when and where it was signed: bare columns
        // beside min() are those of the row with the smallest value. What it came to the present one
        // says; of a visit of several parts each station's first one, as a correction of the whole
        // takes the others' place.
        let mut found = self.conn.prepare_cached(&format!(
            "SELECT v.child_id, v.attempt, (SELECT x.value FROM reading x \
             WHERE x.visit_id = q.visit_id AND x.field = '{}' AND {LIVE} LIMIT 1), \
             o.kind, o.decided_by, p.station_id, o.grade, o.age_months, {}, {}, \
             f.offset_minutes, f.tx, min(f.recorded_at_ms) \
             FROM visit_current v JOIN visit_part q ON q.lead = v.visit_id \
             JOIN outcome o ON o.id = CASE v.parts WHEN 1 THEN \
             (SELECT x.id FROM outcome x JOIN tx t ON t.tx = x.tx \
             WHERE x.visit_id = q.visit_id AND {LIVE} ORDER BY {LATEST_FIRST} LIMIT 1) ELSE \
             (SELECT x.id FROM outcome x JOIN tx t ON t.tx = x.tx \
             WHERE x.visit_id = q.visit_id ORDER BY {OLDEST_FIRST} LIMIT 1) END \
             JOIN outcome p ON p.visit_id = q.visit_id JOIN tx f ON f.tx = p.tx \
             WHERE {condition} GROUP BY q.visit_id",
            Field::Status.word(),
            has(&[
                Field::DistanceRight,
                Field::DistanceLeft,
                Field::NearRight,
                Field::NearLeft
            ]),
            has(&[
                Field::SphereRight,
                Field::SphereLeft,
                Field::InstrumentRight,
                Field::InstrumentLeft
            ]),
        ))?;
        let mut rows = found.query(params)?;
        let mut out = Vec::new();
        while let Some(row) = rows.next()? {
            let c = &mut Columns::of(row, "visit_current");
            out.push(SignedVisit {
                child_id: c.take()?,
                attempt: c.take()?,
                status: c.take()?,
                kind: c.take()?,
                decided_by: c.take()?,
                station_id: c.take()?,
                grade: c.take()?,
                age_months: c.take()?,
                chart: c.take()?,
                instrument: c.take()?,
                signed: Moment {
                    offset_minutes: row.get(10)?,
                    utc_ms: row.get(12)?,
                },
                tx: row.get(11)?,
            });
        }
        Ok(out)
    }
}
