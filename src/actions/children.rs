//! Children: adding one at the table, finding one, and one child's whole history.

use std::collections::HashMap;

use uuid::Uuid;

use super::days::key_of;
use super::desk::Desk;
use super::error::{ActionError, Result};
use super::judging::known;
use super::search::{Indexed, SearchIndex};
use super::triage::Standing;
use super::united::unsettled;
use super::views::{
    ChildHistory, CorrectionView, DayChild, DayInfo, FoundChild, NewChild, Signature, VisitView,
};
use super::visit_rows::{judged, stored_outcome, tries_of};
use crate::clock::Moment;
use crate::domain::codes::{Consent, YesNo};
use crate::domain::text::is_unsafe;
use crate::rules::explain;
use crate::store::new_id;
use crate::store::read::{Recorded, VisitRecord};
use crate::store::row::{Child, Correction, Enrolment, Reading};

impl Desk {
    /// Adds a child who is not on the roster, under a provisional id that a person matches later.
    pub fn add_child(&mut self, new: &NewChild, day: &DayInfo) -> Result<DayChild> {
        for (what, text) in [
            ("family name", &new.family_name),
            ("given name", &new.given_name),
        ] {
            if text.trim().is_empty() || text.chars().any(is_unsafe) {
                return Err(ActionError::bad(format!(
                    "the {what} needs ordinary characters"
                )));
            }
        }
        if let Some(born) = new.dob.filter(|born| *born > day.date) {
            return Err(ActionError::bad(format!(
                "birth date {born} is after the day {}",
                day.date
            )));
        }
        let term = self.term_on(day.date)?;
        let id = new_id();
        // Short enough to read aloud; the tail of the id is random.
        let child_id = format!("P-{}", &id.simple().to_string()[22..]).to_uppercase();
        let child = Child {
            id,
            child_id: child_id.clone(),
            family_name: new.family_name.trim().to_owned(),
            given_name: new.given_name.trim().to_owned(),
            dob: new.dob,
            provisional: true,
        };
        let enrolment = Enrolment {
            id: new_id(),
            child_id: child_id.clone(),
            term: term.code,
            site: day.site.clone(),
            grade: new.grade,
            class: new.class.trim().to_owned(),
            teacher: String::new(),
            from_on: day.date,
            left_on: None,
        };
        let author = self.author();
        self.store.append(&author, |tx| {
            tx.add(&child)?;
            tx.add(&enrolment)
        })?;
        self.day_child(day, &child_id)
    }

    /// Returns an index to find any child of the store by typing; at a masked station telephone
    /// numbers are not in it.
    pub fn search_index(&self) -> Result<SearchIndex> {
        let masked = self.is_masked();
        let children = self
            .read()
            .find_index()?
            .into_iter()
            .map(|row| Indexed {
                phone: row.guardian_phone.filter(|_| !masked).unwrap_or_default(),
                child: FoundChild {
                    child_id: row.child_id,
                    family_name: row.family_name,
                    given_name: row.given_name,
                    dob: row.dob,
                    site: row.site.unwrap_or_default(),
                    class: row.class.unwrap_or_default(),
                    why: String::new(),
                },
            })
            .collect();
        Ok(SearchIndex::new(children))
    }

    /// Returns the visit of a child on a day, the rescreen before the first, if one is signed.
    pub fn visit(&self, day: &DayInfo, child_id: &str) -> Result<Option<VisitView>> {
        let key = key_of(day);
        let now = self
            .read()
            .visits_now(child_id)?
            .into_iter()
            .rfind(|v| v.day() == key);
        now.map(|now| self.visit_view(&self.read().visit_record(now)?))
            .transpose()
    }

    /// Returns a child with all visits, newest first, and every correction.
    pub fn history(&self, child_id: &str) -> Result<Option<ChildHistory>> {
        let Some(history) = self.read().child_history(child_id)? else {
            return Ok(None);
        };
        let mut facts = Vec::new();
        let mut fact = |what: &str, value: Option<String>| {
            if let Some(value) = value.filter(|v| !v.is_empty()) {
                facts.push((what.to_owned(), value));
            }
        };
        let now = &history.now;
        fact("consent", now.consent.map(|c| Consent::title(c).to_owned()));
        fact(
            "glasses",
            now.wears_glasses.map(|v| {
                if v == YesNo::Yes {
                    "owns glasses"
                } else {
                    "owns no glasses"
                }
                .to_owned()
            }),
        );
        fact("under care", now.under_care.map(|v| v.title().to_owned()));
        fact("last examination", now.last_exam_on.map(|d| d.to_string()));
        fact("known condition", now.known_condition.clone());
        fact("language", now.language.clone());
        fact("history", now.history.clone());
        if !self.is_masked() {
            fact("guardian", now.guardian_name.clone());
            fact("telephone", now.guardian_phone.clone());
        }
        fact("notes", now.notes.clone());
        for lost in self.lost_child(&now.child_id)? {
            fact(
                "lost",
                Some(format!("{}; code {}", lost.why, lost.referral.code)),
            );
        }
        if now.provisional {
            fact("id", Some("provisional: match to the roster".to_owned()));
        }
        let mut visits = Vec::new();
        for visit in history.visits {
            visits.push(self.visit_view(&visit)?);
        }
        visits.sort_by_key(|v| std::cmp::Reverse((v.date, v.attempt, v.entered.utc_ms)));
        let now = history.now;
        Ok(Some(ChildHistory {
            child_id: now.child_id,
            family_name: now.family_name,
            given_name: now.given_name,
            dob: now.dob,
            site: now.site.unwrap_or_default(),
            grade: now.grade,
            class: now.class.unwrap_or_default(),
            facts,
            visits,
        }))
    }

    fn visit_view(&self, record: &VisitRecord) -> Result<VisitView> {
        let screeners = self.screener_names()?;
        let named = |id: Option<Uuid>| {
            id.and_then(|id| screeners.get(&id).cloned())
                .unwrap_or_default()
        };
        let present = self.read().readings(record.now.visit_id)?;
        let mut tries = tries_of(&present)?;
        let readings = judged(&tries);
        tries.pop();
        let outcome = record.outcomes.iter().rev().find(|o| !o.superseded);
        let entered = record.visit.first().map_or(
            Moment {
                utc_ms: record.now.recorded_at_ms,
                offset_minutes: 0,
            },
            |v| v.at,
        );
        let corrections = self.corrections(&record.readings, &screeners)?;
        let key = record.now.day();
        let day = self.days()?.into_iter().find(|d| key_of(d) == key);
        let mut standing = Standing::default();
        let mut now = None;
        if let (Some(day), Some(signed)) = (&day, outcome) {
            let child = DayChild {
                attempt: record.now.attempt,
                ..self.day_child(day, &record.now.child_id)?
            };
            let (whole, _) = known(&child, &readings);
            standing = Standing::of(&self.library, &self.triage_sets(), child.age, &whole);
            now = self
                .judged_together(day, &child, &present)?
                .filter(|o| {
                    o.kind != signed.row.kind || o.criteria.join(";") != signed.row.criteria
                })
                .map(|o| explain::headline(&o));
        }
        let stations = self.stations()?;
        let station_name = |id: Option<Uuid>| {
            id.and_then(|id| stations.get(&id).map(|s| s.name.clone()))
                .unwrap_or_default()
        };
        Ok(VisitView {
            id: record.now.visit_id,
            day: day.map_or_else(Uuid::nil, |d| d.id),
            date: record.now.screened_on,
            site: record.now.site.clone(),
            attempt: record.now.attempt,
            readings,
            earlier_tries: tries,
            outcome: outcome.map(|o| stored_outcome(&o.row)),
            now,
            unsettled: unsettled(&present),
            signatures: record
                .outcomes
                .iter()
                .filter(|o| !o.superseded)
                .map(|o| Signature {
                    kind: o.row.kind,
                    screener: named(o.row.screener_id),
                    station: station_name(o.row.station_id),
                    at: o.at,
                })
                .collect(),
            screener: named(outcome.and_then(|o| o.row.screener_id)),
            station: station_name(outcome.and_then(|o| o.row.station_id)),
            entered,
            late: record.outcomes.first().is_some_and(|o| o.row.late),
            corrections,
            standing,
        })
    }

    fn corrections(
        &self,
        readings: &[Recorded<Reading>],
        screeners: &HashMap<Uuid, String>,
    ) -> Result<Vec<CorrectionView>> {
        let by_id: HashMap<Uuid, &Reading> = readings.iter().map(|r| (r.row.id, &r.row)).collect();
        let mut out = Vec::new();
        for old in readings.iter().filter(|r| r.superseded) {
            for Recorded {
                row:
                    Correction {
                        replacement,
                        reason,
                        screener_id,
                        ..
                    },
                at,
                ..
            } in self.read().corrections_of(old.row.id)?
            {
                out.push(CorrectionView {
                    what: old.row.field.title().to_owned(),
                    before: old.row.value.clone(),
                    after: replacement
                        .and_then(|id| by_id.get(&id).map(|r| r.value.clone()))
                        .unwrap_or_default(),
                    reason,
                    screener: screener_id
                        .and_then(|id| screeners.get(&id).cloned())
                        .unwrap_or_default(),
                    at,
                });
            }
        }
        out.sort_by_key(|c| c.at.utc_ms);
        Ok(out)
    }
}
