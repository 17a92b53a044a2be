//! Children as they are now, and one child's whole history.

use chrono::NaiveDate;
use rusqlite::params;

use super::{Columns, Reads, Recorded, VisitRecord};
use crate::domain::age::Grade;
use crate::domain::codes::{Consent, YesNo};
use crate::domain::roster::{RosterChild, RosterDetails};
use crate::store::cell::Value;
use crate::store::error::Result;
use crate::store::row::{
    Child, ChildDetail, ConsentGiven, Correction, Enrolment, Guardian, UrgentAction,
};

/// What a screen shows of a child.
#[derive(Debug, Clone, PartialEq, Eq)]
#[allow(missing_docs)]
pub struct ChildNow {
    pub child_id: String,
    pub family_name: String,
    pub given_name: String,
    pub dob: Option<NaiveDate>,
    pub provisional: bool,
    /// Folded family and given name, as they are searched.
    pub search: String,
    pub site: Option<String>,
    pub term: Option<String>,
    pub grade: Option<Grade>,
    pub class: Option<String>,
    pub teacher: Option<String>,
    pub left_on: Option<NaiveDate>,
    pub sex: Option<String>,
    pub language: Option<String>,
    pub wears_glasses: Option<YesNo>,
    pub under_care: Option<YesNo>,
    pub last_exam_on: Option<NaiveDate>,
    pub known_condition: Option<String>,
    pub history: Option<String>,
    pub notes: Option<String>,
    pub guardian_name: Option<String>,
    pub guardian_phone: Option<String>,
    pub consent: Option<Consent>,
}

pub(super) const CHILD_NOW: &str = "c.child_id, c.family_name, c.given_name, c.dob, c.provisional, \
    c.search, c.site, c.term, c.grade, c.class, c.teacher, c.left_on, c.sex, c.language, \
    c.wears_glasses, c.under_care, c.last_exam_on, c.known_condition, c.history, c.notes, \
    c.guardian_name, c.guardian_phone, c.consent";

impl ChildNow {
    pub(super) fn take(c: &mut Columns<'_, '_>) -> Result<ChildNow> {
        Ok(ChildNow {
            child_id: c.take()?,
            family_name: c.take()?,
            given_name: c.take()?,
            dob: c.take()?,
            provisional: c.take()?,
            search: c.take()?,
            site: c.take()?,
            term: c.take()?,
            grade: c.take()?,
            class: c.take()?,
            teacher: c.take()?,
            left_on: c.take()?,
            sex: c.take()?,
            language: c.take()?,
            wears_glasses: c.take()?,
            under_care: c.take()?,
            last_exam_on: c.take()?,
            known_condition: c.take()?,
            history: c.take()?,
            notes: c.take()?,
            guardian_name: c.take()?,
            guardian_phone: c.take()?,
            consent: c.take()?,
        })
    }
}

/// What happened to one fact: every entry of it, the superseded ones too.
pub type Corrected<R> = Vec<Recorded<R>>;

/// Everything the store holds of one child, corrections with it.
#[derive(Debug, Clone, PartialEq, Eq)]
#[allow(missing_docs)]
pub struct ChildHistory {
    pub now: ChildNow,
    pub names: Corrected<Child>,
    pub details: Corrected<ChildDetail>,
    pub guardians: Corrected<Guardian>,
    pub consents: Corrected<ConsentGiven>,
    pub enrolments: Corrected<Enrolment>,
    /// Visits, latest day first.
    pub visits: Vec<VisitRecord>,
    pub urgent: Corrected<UrgentAction>,
    /// Corrections of any of these, in the order they were made.
    pub corrections: Corrected<Correction>,
}

impl Reads<'_> {
    /// Returns a child as it is now.
    pub fn child(&self, child_id: &str) -> Result<Option<ChildNow>> {
        let mut found = self.conn.prepare_cached(&format!(
            "SELECT {CHILD_NOW} FROM child_current c WHERE c.child_id = ?1"
        ))?;
        let mut rows = found.query([child_id])?;
        rows.next()?
            .map(|row| ChildNow::take(&mut Columns::of(row, "child_current")))
            .transpose()
    }

    /// Returns pairs of children with the same folded name, at least one of them added at a table.
    pub fn same_names_as_provisional(&self) -> Result<Vec<(ChildNow, ChildNow)>> {
        let mut found = self.conn.prepare_cached(&format!(
            "SELECT {CHILD_NOW}, {} FROM child_current c JOIN child_current d ON d.search = c.search \
             WHERE d.provisional AND c.child_id <> d.child_id \
             AND (NOT c.provisional OR c.child_id < d.child_id) \
             ORDER BY c.search, c.child_id, d.child_id",
            CHILD_NOW.replace("c.", "d.")
        ))?;
        let mut rows = found.query([])?;
        let mut out = Vec::new();
        while let Some(row) = rows.next()? {
            let c = &mut Columns::of(row, "child_current");
            out.push((ChildNow::take(c)?, ChildNow::take(c)?));
        }
        Ok(out)
    }

    /// Returns a child with everything ever recorded of it.
    pub fn child_history(&self, child_id: &str) -> Result<Option<ChildHistory>> {
        let Some(now) = self.child(child_id)? else {
            return Ok(None);
        };
        let id = child_id.to_owned();
        let by_child = |what: &str| format!("x.{what} = ?1");
        let key = [id.cell()];
        let names = self.recorded::<Child>(&by_child("child_id"), &key)?;
        let details = self.recorded::<ChildDetail>(&by_child("child_id"), &key)?;
        let guardians = self.recorded::<Guardian>(&by_child("child_id"), &key)?;
        let consents = self.recorded::<ConsentGiven>(&by_child("child_id"), &key)?;
        let enrolments = self.recorded::<Enrolment>(&by_child("child_id"), &key)?;
        let urgent = self.recorded::<UrgentAction>(&by_child("child_id"), &key)?;
        let visits = self.visits_of(child_id)?;
        let mut superseded: Vec<uuid::Uuid> = Vec::new();
        collect(&names, &mut superseded);
        collect(&details, &mut superseded);
        collect(&guardians, &mut superseded);
        collect(&consents, &mut superseded);
        collect(&enrolments, &mut superseded);
        collect(&urgent, &mut superseded);
        for visit in &visits {
            collect(&visit.visit, &mut superseded);
            collect(&visit.readings, &mut superseded);
            collect(&visit.outcomes, &mut superseded);
        }
        let mut corrections: Corrected<Correction> = Vec::new();
        for id in superseded {
            for correction in self.corrections_of(id)? {
                if !corrections.iter().any(|c| c.row.id == correction.row.id) {
                    corrections.push(correction);
                }
            }
        }
        corrections.sort_by_key(|c| (c.at.utc_ms, c.row.id));
        Ok(Some(ChildHistory {
            now,
            names,
            details,
            guardians,
            consents,
            enrolments,
            visits,
            urgent,
            corrections,
        }))
    }

    /// Returns every child now on the roster of a term (or of any), as a roster file would say it.
    pub fn roster(&self, term: Option<&str>) -> Result<Vec<RosterChild>> {
        let mut found = self.conn.prepare_cached(&format!(
            "SELECT c.child_id, c.family_name, c.given_name, c.dob, c.grade, c.site, c.class, \
             c.teacher, c.consent, {} FROM child_current c \
             LEFT JOIN child_detail d ON d.id = c.detail_id \
             LEFT JOIN guardian g ON g.id = c.guardian_id \
             LEFT JOIN guardian h ON h.id = c.guardian2_id \
             WHERE c.site IS NOT NULL AND c.left_on IS NULL AND (?1 IS NULL OR c.term = ?1) \
             ORDER BY c.child_id",
            "d.sex, d.language, d.ethnicity, d.insurance, d.special_education, d.state_id, \
             d.wears_glasses, d.last_exam_on, d.under_care, d.known_condition, d.doctor_name, \
             d.doctor_phone, d.history, d.notes, g.name, g.phone, g.email, g.address, \
             h.name, h.phone, h.email"
        ))?;
        let mut rows = found.query(params![term])?;
        let mut out = Vec::new();
        while let Some(row) = rows.next()? {
            out.push(roster_child(&mut Columns::of(row, "child_current"))?);
        }
        Ok(out)
    }
}

fn roster_child(c: &mut Columns<'_, '_>) -> Result<RosterChild> {
    let mut child = RosterChild {
        child_id: c.take()?,
        family_name: c.take()?,
        given_name: c.take()?,
        dob: c.take()?,
        grade: c.take()?,
        site: c.take()?,
        details: RosterDetails {
            class: text(c)?,
            teacher: text(c)?,
            consent: c.take()?,
            sex: text(c)?,
            language: text(c)?,
            ethnicity: text(c)?,
            insurance: text(c)?,
            special_education: c.take()?,
            state_id: text(c)?,
            wears_glasses: c.take()?,
            last_exam_on: c.take()?,
            under_care: c.take()?,
            known_condition: text(c)?,
            doctor_name: text(c)?,
            doctor_phone: text(c)?,
            history: text(c)?,
            notes: text(c)?,
            ..RosterDetails::default()
        },
    };
    child.details.guardian_name = text(c)?;
    child.details.guardian_phone = text(c)?;
    child.details.guardian_email = text(c)?;
    child.details.guardian_address = text(c)?;
    child.details.guardian2_name = text(c)?;
    child.details.guardian2_phone = text(c)?;
    child.details.guardian2_email = text(c)?;
    Ok(child)
}

fn text(c: &mut Columns<'_, '_>) -> Result<String> {
    Ok(c.take::<Option<String>>()?.unwrap_or_default())
}

fn collect<R: crate::store::Row>(entries: &[Recorded<R>], out: &mut Vec<uuid::Uuid>) {
    out.extend(entries.iter().filter(|e| e.superseded).map(|e| e.row.id()));
}
