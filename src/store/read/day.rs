//! A screening day: its queue and its counts.

use std::collections::HashMap;

use chrono::NaiveDate;
use rusqlite::params;

use super::child::CHILD_NOW;
use super::{ChildNow, Columns, Reads, VisitNow};
use crate::domain::codes::Attempt;
use crate::domain::outcome::OutcomeKind;
use crate::store::cell::Value;
use crate::store::error::Result;
use crate::store::row::{DayKey, ScreeningDay};

/// A child in the queue of a day.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct DayChild {
    /// The child.
    pub child: ChildNow,
    /// Its visits on this day.
    pub visits: Vec<VisitNow>,
    /// Its earlier visits since the given date, earliest first.
    pub earlier: Vec<VisitNow>,
}

/// How many visits of a day came to what.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct DayCount {
    /// Which visit.
    pub attempt: Attempt,
    /// What it came to; none while nobody signed.
    pub kind: Option<OutcomeKind>,
    /// How many.
    pub count: i64,
}

impl Reads<'_> {
    /// Returns a screening day by its key.
    pub fn day(&self, key: &DayKey) -> Result<Option<ScreeningDay>> {
        Ok(self
            .rows(
                &format!(
                    "x.site = ?1 AND x.screened_on = ?2 AND x.protocol = ?3 AND {}",
                    super::generic::LIVE
                ),
                super::generic::LATEST_FIRST,
                &[key.site.cell(), key.screened_on.cell(), key.protocol.cell()],
            )?
            .into_iter()
            .next())
    }

    /// Returns the children of a day: those on the site's roster and those seen there, by class and
    /// name, with their visits since `since` (the start of the term).
    pub fn day_children(&self, day: &DayKey, since: NaiveDate) -> Result<Vec<DayChild>> {
        let mut on_day: HashMap<String, Vec<VisitNow>> = HashMap::new();
        let mut earlier: HashMap<String, Vec<VisitNow>> = HashMap::new();
        let until = day.screened_on;
        for visit in self.visits_where(
            "v.screened_on BETWEEN ?1 AND ?2",
            params![since.min(until).cell(), until.cell()],
        )? {
            let of = if visit.day() == *day {
                &mut on_day
            } else if visit.screened_on < until {
                &mut earlier
            } else {
                continue;
            };
            of.entry(visit.child_id.clone()).or_default().push(visit);
        }
        let mut found = self.conn.prepare_cached(&format!(
            "SELECT {CHILD_NOW} FROM child_current c \
             WHERE (c.site = ?1 AND (c.left_on IS NULL OR c.left_on > ?2)) \
             OR c.child_id IN (SELECT v.child_id FROM visit_current v \
                               WHERE v.site = ?1 AND v.screened_on = ?2 AND v.protocol = ?3) \
             ORDER BY c.grade, c.class, c.search, c.child_id"
        ))?;
        let mut rows = found.query(params![day.site, day.screened_on.cell(), day.protocol])?;
        let mut out = Vec::new();
        while let Some(row) = rows.next()? {
            let child = ChildNow::take(&mut Columns::of(row, "child_current"))?;
            out.push(DayChild {
                visits: on_day.remove(&child.child_id).unwrap_or_default(),
                earlier: earlier.remove(&child.child_id).unwrap_or_default(),
                child,
            });
        }
        Ok(out)
    }

    /// Returns how many visits of a day came to what.
    pub fn day_counts(&self, day: &DayKey) -> Result<Vec<DayCount>> {
        let mut found = self.conn.prepare_cached(
            "SELECT attempt, kind, count(*) FROM visit_current \
             WHERE site = ?1 AND screened_on = ?2 AND protocol = ?3 GROUP BY attempt, kind",
        )?;
        let mut rows = found.query(params![day.site, day.screened_on.cell(), day.protocol])?;
        let mut out = Vec::new();
        while let Some(row) = rows.next()? {
            let c = &mut Columns::of(row, "visit_current");
            out.push(DayCount {
                attempt: c.take()?,
                kind: c.take()?,
                count: c.take()?,
            });
        }
        Ok(out)
    }
}
