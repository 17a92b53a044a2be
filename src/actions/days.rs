//! Screening days and their queues.

use std::collections::HashMap;

use chrono::{Months, NaiveDate};
use uuid::Uuid;

use super::desk::Desk;
use super::error::{ActionError, Result};
use super::views::{DayChild, DayInfo, NewDay, QueueState};
use crate::domain::acuity::Line;
use crate::domain::age::AgeMonths;
use crate::domain::codes::{Attempt, Consent, History, Status, YesNo};
use crate::domain::outcome::{DecidedBy, OutcomeKind};
use crate::domain::school_calendar::SchoolCalendar;
use crate::store::new_id;
use crate::store::read::{DayChild as StoredChild, VisitNow};
use crate::store::row::{DayKey, ScreeningDay};

impl Desk {
    /// Returns the screening days, latest first.
    pub fn days(&self) -> Result<Vec<DayInfo>> {
        let names = self.sites()?;
        let chart = self.chart_lines()?;
        let calendars = self.calendars()?;
        Ok(self
            .read()
            .days()?
            .into_iter()
            .map(|day| info(day, &names, &calendars, &chart))
            .collect())
    }

    /// Opens a screening day, or returns it when it is open already.
    pub fn open_day(&mut self, new: NewDay) -> Result<DayInfo> {
        let sites = self.sites()?;
        if !sites.iter().any(|(code, _)| *code == new.site) {
            let known: Vec<&str> = sites.iter().map(|(code, _)| code.as_str()).collect();
            return Err(
                ActionError::bad(format!("this store has no site {:?}", new.site)).hint(
                    if known.is_empty() {
                        "add it: twoline site add CODE --name NAME".to_owned()
                    } else {
                        format!(
                            "known: {}; or twoline site add CODE --name NAME",
                            known.join(", ")
                        )
                    },
                ),
            );
        }
        let Some(protocol) = self.library.protocol(&new.protocol) else {
            let known: Vec<&str> = self.library.protocols().map(|p| &*p.id).collect();
            return Err(
                ActionError::bad(format!("there is no protocol {:?}", new.protocol))
                    .hint(format!("known: {}", known.join(", "))),
            );
        };
        if let Some(required) = protocol.acuity_method.filter(|m| *m != new.method) {
            return Err(ActionError::bad(format!(
                "{} asks for acuity by {}",
                protocol.id,
                required.title()
            )));
        }
        let key = DayKey {
            site: new.site.clone(),
            screened_on: new.date,
            protocol: new.protocol.clone(),
        };
        if let Some(day) = self.read().day(&key)? {
            if day.acuity_method != new.method {
                return Err(ActionError::bad(format!(
                    "this day is open already, with acuity by {}",
                    day.acuity_method.title()
                )));
            }
            return Ok(info(day, &sites, &self.calendars()?, &self.chart_lines()?));
        }
        let term = self.term_on(new.date)?;
        let row = ScreeningDay {
            id: new_id(),
            site: new.site,
            screened_on: new.date,
            protocol: new.protocol,
            term: term.code,
            acuity_method: new.method,
            chart_id: None,
        };
        let author = self.author();
        self.store.append(&author, |tx| tx.add(&row))?;
        Ok(info(row, &sites, &self.calendars()?, &self.chart_lines()?))
    }

    /// Returns every child of a day: rescreens and returns that are due first, then by class and
    /// name.
    pub fn day_children(&self, day: &DayInfo) -> Result<Vec<DayChild>> {
        let since = self.earlier_since(day)?;
        let mut children: Vec<DayChild> = self
            .read()
            .day_children(&key_of(day), since)?
            .into_iter()
            .map(|child| self.child_of_day(child, day))
            .collect::<Result<_>>()?;
        children.sort_by_key(|c| c.due_on.is_none_or(|due| due > day.date));
        Ok(children)
    }

    /// Returns one child of a day.
    pub fn day_child(&self, day: &DayInfo, child_id: &str) -> Result<DayChild> {
        let Some(child) = self.read().child(child_id)? else {
            return Err(ActionError::bad(format!(
                "no child has the id {child_id:?}"
            )));
        };
        let since = self.earlier_since(day)?;
        let key = key_of(day);
        let (mut visits, mut earlier) = (Vec::new(), Vec::new());
        for visit in self.read().visits_now(child_id)? {
            if visit.day() == key {
                visits.push(visit);
            } else if visit.screened_on >= since && visit.screened_on < day.date {
                earlier.push(visit);
            }
        }
        let stored = StoredChild {
            child,
            visits,
            earlier,
        };
        self.child_of_day(stored, day)
    }

    /// Returns a child of a day with what an earlier visit leaves to it.
    pub(super) fn with_before(&self, stored: StoredChild, day: &DayInfo) -> Result<DayChild> {
        let asked_back = asked_back(&stored.earlier).cloned();
        let visit = stored.visits.last().map(|v| v.visit_id);
        let mut child = day_child(stored, day.date);
        if let Some(visit) = visit.filter(|_| child.state == QueueState::NotTestable) {
            let tries = self.read().readings(visit)?;
            let last = tries.iter().map(|r| r.try_no).max();
            child.tries = last.and_then(|n| u32::try_from(n).ok()).unwrap_or(1);
        }
        if let Some(visit) = asked_back.filter(|_| child.attempt == Attempt::Rescreen) {
            child.before = self.before(&visit)?;
        }
        Ok(child)
    }

    pub(super) fn day_info(&self, id: Uuid) -> Result<DayInfo> {
        // Two stations may both have opened the day: either entry means it.
        let opened = self.read().entry::<ScreeningDay>(id)?;
        let key = opened.map(|day| DayKey {
            site: day.site,
            screened_on: day.screened_on,
            protocol: day.protocol,
        });
        self.days()?
            .into_iter()
            .find(|day| Some(key_of(day)) == key)
            .ok_or_else(|| ActionError::bad("this screening day is not in the store"))
    }

    /// Returns the lines of the chart that hangs at this station.
    fn chart_lines(&self) -> Result<Vec<Line>> {
        Ok(self
            .station_role()?
            .chart
            .map(|c| c.lines)
            .unwrap_or_default())
    }

    /// Returns the day from which earlier visits of the same term count.
    pub(super) fn earlier_since(&self, day: &DayInfo) -> Result<NaiveDate> {
        Ok(self.term_on(day.date)?.starts_on)
    }
}

pub(super) fn key_of(day: &DayInfo) -> DayKey {
    DayKey {
        site: day.site.clone(),
        screened_on: day.date,
        protocol: day.protocol.clone(),
    }
}

fn info(
    day: ScreeningDay,
    names: &[(String, String)],
    calendars: &HashMap<String, SchoolCalendar>,
    chart: &[Line],
) -> DayInfo {
    let site_name = names
        .iter()
        .find(|(code, _)| *code == day.site)
        .map_or_else(|| day.site.clone(), |(_, name)| name.clone());
    DayInfo {
        id: day.id,
        // The general calendar is nobody's own: the site is named only beside its own.
        calendar: calendars
            .get(&day.site)
            .map(|calendar| calendar.clone().of(&*site_name))
            .or_else(|| calendars.get("").cloned()),
        site: day.site,
        site_name,
        date: day.screened_on,
        protocol: day.protocol,
        method: day.acuity_method,
        chart: chart.to_vec(),
    }
}

/// Returns the visit that asked for a rescreen, if the last one that judged the child did.
fn asked_back(earlier: &[VisitNow]) -> Option<&VisitNow> {
    earlier
        .iter()
        .rfind(|v| v.kind.is_some_and(|kind| kind != OutcomeKind::Incomplete))
        .filter(|v| v.kind == Some(OutcomeKind::Rescreen))
}

pub(super) fn day_child(stored: StoredChild, on: NaiveDate) -> DayChild {
    let StoredChild {
        child,
        visits,
        earlier,
    } = stored;
    let decided = |visit: &VisitNow, by: DecidedBy| visit.decided_by.as_deref() == Some(by.word());
    // The last visit that judged the child says whether this day is a rescreen. One that came to
    // nothing (absent, no glasses, stopped half-way) neither uses up an attempt nor clears a date.
    let judged = earlier
        .iter()
        .rposition(|v| v.kind.is_some_and(|kind| kind != OutcomeKind::Incomplete));
    let rescreen = asked_back(&earlier).is_some();
    let due_on = earlier[judged.unwrap_or(0)..]
        .iter()
        .rev()
        .find_map(|v| v.due_on);
    let here = visits.last();
    DayChild {
        age: child.dob.and_then(|born| AgeMonths::between(born, on)),
        attempt: here.map_or(
            if rescreen {
                Attempt::Rescreen
            } else {
                Attempt::First
            },
            |visit| visit.attempt,
        ),
        glasses_visits: earlier
            .iter()
            .filter(|v| decided(v, DecidedBy::GlassesNotWorn))
            .count() as u32,
        not_testable_before: earlier.iter().any(|v| decided(v, DecidedBy::NotTestable)),
        due_on,
        before: None,
        tries: 0,
        together: None,
        state: here.map_or(QueueState::ToCome, |visit| state_of(visit, child.consent)),
        wears_glasses: child.wears_glasses.map(|v| v == YesNo::Yes),
        consent: child.consent,
        under_care: child.under_care == Some(YesNo::Yes),
        examined_recently: child.last_exam_on.is_some_and(|last| {
            last <= on
                && last
                    .checked_add_months(Months::new(12))
                    .is_some_and(|until| on < until)
        }),
        history: child
            .history
            .as_deref()
            .unwrap_or_default()
            .split(';')
            .filter_map(|word| History::from_word(word.trim()))
            .collect(),
        child_id: child.child_id,
        family_name: child.family_name,
        given_name: child.given_name,
        dob: child.dob,
        grade: child.grade,
        class: child.class.unwrap_or_default(),
    }
}

fn state_of(visit: &VisitNow, consent: Option<Consent>) -> QueueState {
    let by = visit.decided_by.as_deref().and_then(DecidedBy::from_word);
    match (visit.kind, by) {
        (Some(kind @ (OutcomeKind::Refer | OutcomeKind::Pass)), _) => QueueState::Signed(kind),
        (_, Some(DecidedBy::GlassesNotWorn)) => QueueState::GlassesAtHome,
        (_, Some(DecidedBy::NotTestable)) => QueueState::NotTestable,
        (Some(OutcomeKind::Exempt), _) => {
            if visit.status == Some(Status::OptedOut) || consent == Some(Consent::No) {
                QueueState::OptedOut
            } else {
                QueueState::UnderCare
            }
        }
        (kind, _) => match visit.status {
            Some(Status::Absent) => QueueState::Absent,
            Some(Status::OptedOut) => QueueState::OptedOut,
            Some(Status::UnderCare) => QueueState::UnderCare,
            Some(Status::NotAttempted) => QueueState::NotAttempted,
            Some(Status::LeftEarly) => QueueState::LeftEarly,
            Some(Status::Present) | None => kind.map_or(QueueState::ToCome, QueueState::Signed),
        },
    }
}
