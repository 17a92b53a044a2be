//! What the day report, the Referrals and the Term place read.

use std::collections::HashMap;

use chrono::NaiveDate;
use rusqlite::params;
use uuid::Uuid;

use super::generic::OLDEST_FIRST;
use super::visit::{OF_VISIT, VISIT_NOW};
use super::{ChildNow, Columns, ReadingNow, Reads, VisitNow};
use crate::clock::Moment;
use crate::store::cell::Value;
use crate::store::error::Result;
use crate::store::row::{DayKey, Outcome, UrgentAction, Visit};

/// A row of the day report.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct ReportRow {
    /// The child.
    pub child: ChildNow,
    /// The visit; none for a child not seen.
    pub visit: Option<VisitNow>,
    /// When the visit was first entered.
    pub entered: Option<Moment>,
    /// Its present readings.
    pub readings: Vec<ReadingNow>,
    /// Its present outcome, as signed.
    pub outcome: Option<Outcome>,
}

/// An emergency nobody was told of yet.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct UrgentOpen {
    /// The entry that raised it.
    pub raised: UrgentAction,
    /// The child; none when its id is not known.
    pub child: Option<ChildNow>,
}

/// Counts of a term, each a count of children.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
#[allow(missing_docs)]
pub struct TermCounts {
    pub enrolled: i64,
    /// Seen at least once in the term.
    pub visited: i64,
    /// With the latest outcome in the term of each kind.
    pub passed: i64,
    pub rescreen: i64,
    pub referred: i64,
    pub incomplete: i64,
    pub exempt: i64,
}

impl Reads<'_> {
    /// Returns the rows of the day report: one per child and visit, children not seen with none.
    pub fn day_report(&self, day: &DayKey) -> Result<Vec<ReportRow>> {
        let mut outcomes: HashMap<Uuid, Outcome> = HashMap::new();
        for outcome in self.rows::<Outcome>(
            "x.id IN (SELECT v.outcome_id FROM visit_current v WHERE v.site = ?1 \
             AND v.screened_on = ?2 AND v.protocol = ?3)",
            OLDEST_FIRST,
            &[day.site.cell(), day.screened_on.cell(), day.protocol.cell()],
        )? {
            outcomes.insert(outcome.id, outcome);
        }
        let mut out = Vec::new();
        for child in self.day_children(day, day.screened_on)? {
            if child.visits.is_empty() {
                out.push(ReportRow {
                    child: child.child,
                    visit: None,
                    entered: None,
                    readings: Vec::new(),
                    outcome: None,
                });
                continue;
            }
            for visit in child.visits {
                out.push(ReportRow {
                    child: child.child.clone(),
                    readings: self.readings(visit.visit_id)?,
                    outcome: visit.outcome_id.and_then(|id| outcomes.remove(&id)),
                    entered: self
                        .recorded::<Visit>(OF_VISIT, &[visit.visit_id.cell()])?
                        .first()
                        .map(|entry| entry.at),
                    visit: Some(visit),
                });
            }
        }
        Ok(out)
    }

    /// Returns every emergency whose action was not entered, oldest first. One that several stations
    /// raised is there once.
    pub fn urgent_open(&self) -> Result<Vec<UrgentOpen>> {
        self.rows::<UrgentAction>(
            &format!(
                "x.step = 'raised' AND {} AND NOT EXISTS (SELECT 1 FROM urgent_action y \
                 WHERE y.urgent_id = x.urgent_id AND y.step = 'told' \
                 AND NOT EXISTS (SELECT 1 FROM superseded s WHERE s.id = y.id)) \
                 AND NOT EXISTS (SELECT 1 FROM urgent_action z \
                 WHERE z.urgent_id = x.urgent_id AND z.step = 'raised' \
                 AND (z.at_ms, z.id) < (x.at_ms, x.id) \
                 AND NOT EXISTS (SELECT 1 FROM superseded s WHERE s.id = z.id))",
                super::generic::LIVE
            ),
            &format!("x.at_ms, {OLDEST_FIRST}"),
            &[],
        )?
        .into_iter()
        .map(|raised| {
            Ok(UrgentOpen {
                child: self.child(&raised.child_id)?,
                raised,
            })
        })
        .collect()
    }

    /// Returns what raised the emergencies of a visit, answered or not.
    pub fn urgent_of(&self, visit: Uuid) -> Result<Vec<UrgentAction>> {
        self.rows::<UrgentAction>(
            &format!(
                "{OF_VISIT} AND x.step = 'raised' AND {}",
                super::generic::LIVE
            ),
            OLDEST_FIRST,
            &[visit.cell()],
        )
    }

    /// Returns who was told of the emergencies of a visit.
    pub fn told_of(&self, visit: Uuid) -> Result<Vec<UrgentAction>> {
        self.rows::<UrgentAction>(
            &format!(
                "{OF_VISIT} AND x.step = 'told' AND {}",
                super::generic::LIVE
            ),
            OLDEST_FIRST,
            &[visit.cell()],
        )
    }

    /// Returns the visits whose present outcome is refer, by the date to act by, then day.
    pub fn referred(&self) -> Result<Vec<(ChildNow, VisitNow)>> {
        self.with_children(&format!(
            "SELECT {VISIT_NOW} FROM visit_current v WHERE v.kind = 'refer' \
             ORDER BY v.act_by IS NULL, v.act_by, v.screened_on, v.visit_id"
        ))
    }

    /// Returns the visits whose present outcome waits for another visit (a rescreen, or anything
    /// with a date), and none came since that settles it, by due date. A child who was only absent
    /// still waits.
    pub fn due(&self) -> Result<Vec<(ChildNow, VisitNow)>> {
        self.with_children(&format!(
            "SELECT {VISIT_NOW} FROM visit_current v \
             WHERE (v.kind = 'rescreen' OR (v.kind <> 'refer' AND v.due_on IS NOT NULL)) \
             AND NOT EXISTS (SELECT 1 FROM visit_current w WHERE w.child_id = v.child_id \
                 AND (w.kind <> 'incomplete' OR w.due_on IS NOT NULL) AND (w.screened_on > v.screened_on \
                 OR (w.screened_on = v.screened_on AND w.attempt > v.attempt))) \
             ORDER BY v.due_on IS NULL, v.due_on, v.visit_id"
        ))
    }

    /// Returns the visits for which several signatures stand or values differ: what
    /// they say now may be something else than what was signed last.
    pub fn several(&self) -> Result<Vec<(ChildNow, VisitNow)>> {
        self.with_children(&format!(
            "SELECT {VISIT_NOW} FROM visit_current v WHERE v.signatures > 1 OR v.conflict \
             ORDER BY v.screened_on, v.child_id, v.attempt, v.visit_id"
        ))
    }

    fn with_children(self, sql: &str) -> Result<Vec<(ChildNow, VisitNow)>> {
        let mut found = self.conn.prepare_cached(sql)?;
        let mut rows = found.query([])?;
        let mut out = Vec::new();
        while let Some(row) = rows.next()? {
            let visit = VisitNow::take(&mut Columns::of(row, "visit_current"))?;
            if let Some(child) = self.child(&visit.child_id)? {
                out.push((child, visit));
            }
        }
        Ok(out)
    }

    /// Counts the children of a term, at one site or all.
    pub fn term_counts(
        &self,
        term: &str,
        starts_on: NaiveDate,
        ends_on: NaiveDate,
        site: Option<&str>,
    ) -> Result<TermCounts> {
        let enrolled = self.conn.query_row(
            "SELECT count(*) FROM child_current WHERE term = ?1 AND left_on IS NULL \
             AND (?2 IS NULL OR site = ?2)",
            params![term, site],
            |r| r.get(0),
        )?;
        let mut counts = TermCounts {
            enrolled,
            ..TermCounts::default()
        };
        // The latest signed visit of each child decides; a visit nobody signed is only a visit.
        let mut found = self.conn.prepare_cached(
            "SELECT kind, count(*) FROM (SELECT kind, row_number() OVER (PARTITION BY child_id \
             ORDER BY kind IS NULL, screened_on DESC, attempt DESC, recorded_at_ms DESC, visit_id) AS place \
             FROM visit_current WHERE screened_on BETWEEN ?1 AND ?2 AND (?3 IS NULL OR site = ?3)) \
             WHERE place = 1 GROUP BY kind",
        )?;
        let mut rows = found.query(params![starts_on.cell(), ends_on.cell(), site])?;
        while let Some(row) = rows.next()? {
            let n: i64 = row.get(1)?;
            counts.visited += n;
            match row.get::<_, Option<String>>(0)?.as_deref() {
                Some("pass") => counts.passed += n,
                Some("rescreen") => counts.rescreen += n,
                Some("refer") => counts.referred += n,
                Some("incomplete") => counts.incomplete += n,
                Some("exempt") => counts.exempt += n,
                _ => {}
            }
        }
        Ok(counts)
    }
}
