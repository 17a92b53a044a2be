//! A visit that several stations recorded: what its united readings say now, and what differs.
//!
//! What was signed last stands as it was signed. What all readings say together is judged anew
//! whenever it is shown; of values that differ every combination is judged, and what they do not
//! agree on is unknown.

use std::collections::BTreeMap;

use uuid::Uuid;

use super::days::{day_child, key_of};
use super::desk::Desk;
use super::error::{ActionError, Result};
use super::judging::{preview, preview_alternatives};
use super::views::{DayChild, DayInfo, QueueState, Signed, Together, Unsettled};
use super::visit_rows::{judged, tries_of};
use crate::domain::field::Field;
use crate::domain::outcome::{DecidedBy, Outcome, OutcomeKind};
use crate::domain::readings::Readings;
use crate::rules::{CONFLICT, explain};
use crate::store::read::{ChildNow, DayChild as StoredChild, ReadingNow, VisitNow};

/// How many combinations of unsettled values are judged; beyond it each value is judged by itself.
const COMBINATIONS: usize = 64;

/// What an unsettled visit may have been, with whether all combinations are there.
struct Alternatives {
    /// The judged readings of each combination.
    readings: Vec<Readings>,
    /// Whether there were too many, so that only what is settled is here, first by itself and then
    /// with each unsettled value alone.
    too_many: bool,
}

/// Returns the readings that a visit may consist of: one for each combination of values that differ.
fn alternatives(present: &[ReadingNow]) -> Result<Alternatives> {
    let mut choices: BTreeMap<(i64, Field), Vec<&ReadingNow>> = BTreeMap::new();
    for reading in present.iter().filter(|r| r.conflict) {
        let values = choices.entry((reading.try_no, reading.field)).or_default();
        if !values.iter().any(|r| r.value == reading.value) {
            values.push(reading);
        }
    }
    let settled: Vec<ReadingNow> = present.iter().filter(|r| !r.conflict).cloned().collect();
    let combinations = choices
        .values()
        .try_fold(1usize, |n, values| n.checked_mul(values.len()))
        .filter(|n| *n <= COMBINATIONS);
    let Some(combinations) = combinations else {
        let mut readings = vec![judged(&tries_of(&settled)?)];
        for value in choices.into_values().flatten() {
            let mut chosen = settled.clone();
            chosen.push(ReadingNow {
                conflict: false,
                ..value.clone()
            });
            readings.push(judged(&tries_of(&chosen)?));
        }
        return Ok(Alternatives {
            readings,
            too_many: true,
        });
    };
    let mut readings = Vec::with_capacity(combinations);
    for mut which in 0..combinations {
        let mut chosen = settled.clone();
        for values in choices.values() {
            chosen.push(ReadingNow {
                conflict: false,
                ..values[which % values.len()].clone()
            });
            which /= values.len();
        }
        readings.push(judged(&tries_of(&chosen)?));
    }
    Ok(Alternatives {
        readings,
        too_many: false,
    })
}

/// Returns the values that nobody has settled.
pub(super) fn unsettled(present: &[ReadingNow]) -> Vec<Unsettled> {
    let mut fields: BTreeMap<(i64, Field), Vec<String>> = BTreeMap::new();
    for reading in present.iter().filter(|r| r.conflict) {
        let values = fields.entry((reading.try_no, reading.field)).or_default();
        if !values.contains(&reading.value) {
            values.push(reading.value.clone());
        }
    }
    fields
        .into_iter()
        .map(|((try_no, field), values)| Unsettled {
            try_no,
            field,
            values,
        })
        .collect()
}

/// Returns what stands where there were too many combinations to judge them all: what is settled
/// refers, or nothing is known; the soonest urgency and dates of any value stand.
fn beyond_the_bound(any: Outcome, settled: Outcome) -> Outcome {
    let mut out = if settled.kind == OutcomeKind::Refer {
        Outcome {
            urgency: any.urgency,
            act_within_days: any.act_within_days,
            act_by: any.act_by,
            due_on: any.due_on,
            unknown: any.unknown,
            ..settled
        }
    } else {
        Outcome {
            kind: OutcomeKind::Incomplete,
            decided_by: DecidedBy::Conflict,
            criteria: Vec::new(),
            risks: Vec::new(),
            qualifiers: vec!["too many values that nobody has settled".to_owned()],
            ..any
        }
    };
    if !out.unknown.iter().any(|word| word == CONFLICT) {
        out.unknown.insert(0, CONFLICT.to_owned());
    }
    out
}

/// Says whether a visit is one to act on: it refers, or its values differ and one of them has an
/// urgency.
fn may_refer(visit: &VisitNow) -> bool {
    visit.kind == Some(OutcomeKind::Refer) || (in_conflict(visit) && visit.urgency.is_some())
}

/// Says whether what a visit came to is open because its values differ.
fn in_conflict(visit: &VisitNow) -> bool {
    visit.decided_by.as_deref() == Some(DecidedBy::Conflict.word())
}

impl Desk {
    /// Settles a value that differs between the parts of a visit, with a reason: one value stands.
    pub fn settle(
        &mut self,
        visit: Uuid,
        field: Field,
        value: &str,
        reason: &str,
    ) -> Result<Signed> {
        let present = self.read().readings(visit)?;
        if !present.iter().any(|r| r.conflict && r.field == field) {
            return Err(
                ActionError::bad(format!("{} is not in conflict", field.title()))
                    .hint("a value that was recorded once is corrected: twoline correct"),
            );
        }
        self.correct(visit, &[(field, value.to_owned())], reason)
    }

    /// Returns what the readings of a visit say together, where several signatures stand for it or
    /// values differ; nothing for any other visit.
    pub(super) fn together(&self, visit: &VisitNow) -> Result<Option<Together>> {
        if !visit.is_several() {
            return Ok(None);
        }
        let key = visit.day();
        let Some(day) = self.days()?.into_iter().find(|d| key_of(d) == key) else {
            return Ok(None);
        };
        let child = self.child_on(&day, visit)?;
        self.together_on(&day, &child, visit)
    }

    /// The same for a child whose day and roster are at hand.
    pub(super) fn together_on(
        &self,
        day: &DayInfo,
        child: &DayChild,
        visit: &VisitNow,
    ) -> Result<Option<Together>> {
        if !visit.is_several() {
            return Ok(None);
        }
        let present = self.read().readings(visit.visit_id)?;
        let Some(outcome) = self.judged_together(day, child, &present)? else {
            return Ok(None);
        };
        Ok(Some(Together {
            signed: visit.kind,
            headline: explain::headline(&outcome),
            unsettled: unsettled(&present),
            now: outcome,
        }))
    }

    /// Judges present readings, all combinations of those that differ; nothing where the library does
    /// not hold the protocol.
    pub(super) fn judged_together(
        &self,
        day: &DayInfo,
        child: &DayChild,
        present: &[ReadingNow],
    ) -> Result<Option<Outcome>> {
        let alternatives = alternatives(present)?;
        let outcome = preview_alternatives(&self.library, day, child, &alternatives.readings);
        if !alternatives.too_many {
            return Ok(outcome);
        }
        let settled = preview(&self.library, day, child, &alternatives.readings[0]);
        Ok(outcome
            .zip(settled)
            .map(|(outcome, settled)| beyond_the_bound(outcome, settled)))
    }

    /// Returns a visit with what its readings say now in the place of what was signed last.
    pub(super) fn as_now(&self, visit: VisitNow) -> Result<VisitNow> {
        Ok(match self.together(&visit)? {
            Some(together) => said_now(visit, &together.now),
            None => visit,
        })
    }

    /// Returns visits with what their readings say now.
    pub(super) fn all_now(&self, visits: Vec<VisitNow>) -> Result<Vec<VisitNow>> {
        visits.into_iter().map(|visit| self.as_now(visit)).collect()
    }

    /// Returns the child of a visit as that day knew it.
    pub(super) fn child_on(&self, day: &DayInfo, visit: &VisitNow) -> Result<DayChild> {
        let child = self.day_child(day, &visit.child_id)?;
        Ok(DayChild {
            attempt: visit.attempt,
            ..child
        })
    }

    /// Returns a child of a day as it stands, from what the store knows: visits of several parts
    /// count as what they say now.
    pub(super) fn child_of_day(&self, mut stored: StoredChild, day: &DayInfo) -> Result<DayChild> {
        stored.earlier = self.all_now(stored.earlier)?;
        let last = stored.visits.last().filter(|v| v.is_several()).cloned();
        let Some(last) = last else {
            return self.with_before(stored, day);
        };
        let child = self.with_before(stored.clone(), day)?;
        let Some(together) = self.together_on(day, &child, &last)? else {
            return Ok(child);
        };
        let tries = last.tries;
        stored.visits.pop();
        stored.visits.push(said_now(last, &together.now));
        let standing = day_child(stored, day.date);
        Ok(DayChild {
            tries: if standing.state == QueueState::NotTestable {
                u32::try_from(tries).unwrap_or(1)
            } else {
                0
            },
            state: standing.state,
            together: Some(together),
            ..child
        })
    }

    /// Returns who is referred now, by the date to act by; visits of several parts count as what they
    /// say now, and those whose values differ are here where one of the values refers.
    pub(super) fn referred_now(&self) -> Result<Vec<(ChildNow, VisitNow)>> {
        let mut out = self.read().referred()?;
        self.replace_several(&mut out, may_refer)?;
        out.sort_by_key(|(_, v)| (v.act_by.is_none(), v.act_by, v.screened_on, v.visit_id));
        Ok(out)
    }

    /// Returns who waits for another visit, by its date; visits of several parts count as what they
    /// say now.
    pub(super) fn due_now(&self) -> Result<Vec<(ChildNow, VisitNow)>> {
        let waits = |v: &VisitNow| {
            v.kind == Some(OutcomeKind::Rescreen)
                || (v.kind.is_some_and(|kind| kind != OutcomeKind::Refer) && v.due_on.is_some())
        };
        let mut out = self.read().due()?;
        self.replace_several(&mut out, waits)?;
        out.sort_by_key(|(_, v)| (v.due_on.is_none(), v.due_on, v.visit_id));
        Ok(out)
    }

    /// Puts visits of several parts into a list only where they belong there as they are now, and no
    /// later visit of the child came to anything.
    fn replace_several(
        &self,
        list: &mut Vec<(ChildNow, VisitNow)>,
        belongs: impl Fn(&VisitNow) -> bool,
    ) -> Result<()> {
        list.retain(|(_, visit)| !visit.is_several());
        for (child, visit) in self.read().several()? {
            let now = self.as_now(visit)?;
            if !belongs(&now) {
                continue;
            }
            let refers = may_refer(&now);
            let later = |v: &VisitNow| {
                (v.screened_on, v.attempt) > (now.screened_on, now.attempt)
                    && (v.kind != Some(OutcomeKind::Incomplete) || v.due_on.is_some())
            };
            let mut after = self.read().visits_now(&now.child_id)?.into_iter();
            if refers || !after.any(|v| later(&v)) {
                list.push((child, now));
            }
        }
        Ok(())
    }
}

/// Returns a visit that came to an outcome.
fn said_now(visit: VisitNow, outcome: &Outcome) -> VisitNow {
    VisitNow {
        kind: Some(outcome.kind),
        decided_by: Some(outcome.decided_by.word().to_owned()),
        urgency: outcome.urgency,
        act_by: outcome.act_by,
        due_on: outcome.due_on,
        qualifiers: Some(outcome.qualifiers.join(";")),
        ..visit
    }
}
