//! The entries that a signature, a further try or a correction consists of.

mod parts;
mod tries;

use sha2::{Digest, Sha256};
use uuid::Uuid;

use super::desk::Desk;
use super::error::{ActionError, Result};
use super::follow_up::out_of_date;
use super::judging::{pass_line_for, preview};
use super::views::{DayChild, DayInfo, StoredOutcome};
use crate::clock;
use crate::domain::codes::AcuityMethod;
use crate::domain::field::{Field, FieldError};
use crate::domain::outcome::{Answer, Open, Outcome, RiskKind, Urgency};
use crate::domain::readings::{ReadingContext, Readings};
use crate::rules::explain;
use crate::store::read::ReadingNow;
use crate::store::row::{self, Reading, RuleSetUsed, UrgentAction, Visit};
use crate::store::{Row, Tx, new_id};

use parts::edits_of;
pub use tries::judged;
pub(super) use tries::tries_of;

/// What separates list items in a stored cell.
const SEPARATOR: &str = ";";

/// Everything that one intention about one visit writes.
pub(super) struct VisitRows {
    visit: Uuid,
    /// The visit itself, where it is new.
    new: Option<Visit>,
    readings: Vec<Reading>,
    edits: Vec<Edit>,
    outcome: row::Outcome,
    raise: Option<UrgentAction>,
    rules: Vec<RuleSetUsed>,
    /// Why the present outcome is replaced, where there is one.
    reason: Option<String>,
}

/// One value that replaces, adds to or takes back what stands there.
struct Edit {
    old: Vec<Uuid>,
    new: Option<Reading>,
}

impl VisitRows {
    /// Lets the running line of an emergency go on from when it was first raised.
    pub(super) fn raised_at(&mut self, raised: &UrgentAction) {
        if let Some(line) = &mut self.raise {
            line.at_ms = raised.at_ms;
            line.at_offset_minutes = raised.at_offset_minutes;
        }
    }

    /// Notes beside the outcome what was done while entering.
    pub(super) fn remark(&mut self, remarks: &[String]) {
        for remark in remarks {
            let notes = &mut self.outcome.protocol_notes;
            if !notes.is_empty() {
                notes.push_str(SEPARATOR);
            }
            notes.push_str(remark);
        }
    }

    /// Keeps the word whether the visit was entered late, where it is only moved.
    pub(super) fn entered_late(&mut self, late: bool) {
        self.outcome.late = late;
    }

    /// Adds the entries; a correction that changes nothing adds none.
    pub(super) fn write(self, tx: &mut Tx<'_>) -> crate::store::Result<()> {
        if self.new.is_none() && self.readings.is_empty() && self.edits.is_empty() {
            return Ok(());
        }
        if let Some(visit) = &self.new {
            tx.add(visit)?;
        }
        for reading in &self.readings {
            tx.add(reading)?;
        }
        let reason = self.reason.as_deref().unwrap_or_default();
        for Edit { old, new } in self.edits {
            match (old.is_empty(), new) {
                (true, Some(new)) => tx.add(&new)?,
                (_, new) => {
                    tx.supersede(&old, new, reason)?;
                }
            }
        }
        if self.new.is_some() {
            tx.add(&self.outcome)?;
        } else {
            replace_outcome(tx, self.visit, self.outcome, reason)?;
        }
        for rules in self.rules {
            if tx.read().rule_set_used(&rules.content_hash)?.is_none() {
                tx.add(&rules)?;
            }
        }
        self.raise.map_or(Ok(()), |raise| tx.add(&raise))
    }
}

impl Desk {
    /// Writes all of them in one transaction.
    pub(super) fn write_visits(&mut self, visits: Vec<VisitRows>) -> Result<()> {
        let author = self.author();
        Ok(self.store.append(&author, |tx| {
            for visit in visits {
                visit.write(tx)?;
            }
            Ok(())
        })?)
    }

    /// Returns the readings as the day's method understands them: on a critical-line day a bare pass
    /// line is "this line or better", and what is worse is "worse than it".
    ///
    /// # Errors
    /// The first contradiction between the readings.
    pub fn by_method(
        &self,
        day: &DayInfo,
        child: &DayChild,
        mut readings: Readings,
    ) -> std::result::Result<Readings, FieldError> {
        let method = *readings.acuity_method.get_or_insert(day.method);
        if method == AcuityMethod::CriticalLine {
            let context = ReadingContext {
                critical_line: pass_line_for(&self.library, day, child).map(|p| p.line),
                ..ReadingContext::default()
            };
            for field in [
                Field::DistanceRight,
                Field::DistanceLeft,
                Field::DistanceBoth,
            ] {
                if let Some(text) = readings.get(field) {
                    readings.set(field, &text, context)?;
                }
            }
        } else if day.method == AcuityMethod::Threshold {
            // The ordinary case needs no entry of its own.
            readings.acuity_method = None;
        }
        match readings.contradictions().into_iter().next() {
            Some(problem) => Err(problem),
            None => Ok(readings),
        }
    }

    /// Prepares a visit that is not in the store yet.
    pub(super) fn new_visit(
        &self,
        day: &DayInfo,
        child: &DayChild,
        visit: Uuid,
        tries: &[Readings],
    ) -> Result<VisitRows> {
        let mut rows = self.further_try(day, child, visit, tries)?;
        rows.readings = tries
            .iter()
            .zip(1..)
            .flat_map(|(r, n)| reading_rows(visit, n, r))
            .collect();
        rows.new = Some(visit_row(day, child, visit));
        Ok(rows)
    }

    /// Prepares the last of several tries of a visit; the earlier ones are in the store.
    pub(super) fn further_try(
        &self,
        day: &DayInfo,
        child: &DayChild,
        visit: Uuid,
        tries: &[Readings],
    ) -> Result<VisitRows> {
        let readings = judged(tries);
        let outcome = self.outcome_of(day, child, &readings)?;
        Ok(VisitRows {
            visit,
            new: None,
            readings: tries
                .last()
                .map(|last| reading_rows(visit, tries.len() as i64, last))
                .unwrap_or_default(),
            edits: Vec::new(),
            outcome: self.outcome_row(visit, day, child, &outcome, self.is_late(day)),
            raise: self.emergency(visit, child, &readings, &outcome)?,
            rules: self.rules_used(day),
            reason: Some("another try of the same visit".to_owned()),
        })
    }

    /// Prepares a correction; an empty text takes a value back.
    pub(super) fn corrected_visit(
        &self,
        visit: Uuid,
        changes: &[(Field, String)],
        reason: &str,
    ) -> Result<VisitRows> {
        let reason = reasoned(reason)?;
        let (now, day) = self.visit_and_day(visit)?;
        let child = DayChild {
            attempt: now.attempt,
            ..self.day_child(&day, &now.child_id)?
        };
        let present = self.read().readings(visit)?;
        let mut tries = tries_of(&present)?;
        if tries.is_empty() {
            tries.push(Readings::default());
        }
        let context = ReadingContext {
            bare: Some(self.notation()),
            critical_line: pass_line_for(&self.library, &day, &child).map(|p| p.line),
        };
        let mut edits = Vec::new();
        let mut after = present;
        for (field, text) in changes {
            // What differs is settled where it differs; anything else is of the last try.
            let differs = after.iter().filter(|r| r.conflict && r.field == *field);
            let try_no = differs
                .map(|r| r.try_no)
                .max()
                .unwrap_or(tries.len() as i64);
            let readings = &mut tries[try_no as usize - 1];
            readings
                .set(*field, text, context)
                .map_err(|e| ActionError::bad(e.to_string()))?;
            let value = readings.get(*field);
            let of_field = |r: &ReadingNow| r.field == *field && r.try_no == try_no;
            let old: Vec<&ReadingNow> = after.iter().filter(|r| of_field(r)).collect();
            if old.iter().all(|r| Some(&r.value) == value.as_ref())
                && old.is_empty() == value.is_none()
            {
                continue;
            }
            edits.extend(edits_of(
                now.visit_id,
                (try_no, *field),
                &old,
                value.as_deref(),
            ));
            after.retain(|r| !of_field(r));
            after.extend(value.map(|value| ReadingNow {
                id: Uuid::nil(),
                visit_id: now.visit_id,
                try_no,
                field: *field,
                value,
                conflict: false,
            }));
        }
        if let Some(problem) = tries.iter().flat_map(Readings::contradictions).next() {
            return Err(ActionError::bad(problem.to_string()));
        }
        let readings = judged(&tries);
        let outcome = self
            .judged_together(&day, &child, &after)?
            .ok_or_else(|| no_protocol(&day))?;
        // A correction on a later day does not make the visit itself a late one.
        let late = match self.read().outcomes(now.visit_id)?.first() {
            Some(signed) => signed.late,
            None => self.is_late(&day),
        };
        let remarks = self.remarks_of(now.visit_id, &day, &child)?;
        let mut rows = VisitRows {
            visit: now.visit_id,
            new: None,
            readings: Vec::new(),
            edits,
            outcome: self.outcome_row(now.visit_id, &day, &child, &outcome, late),
            raise: self.emergency(now.visit_id, &child, &readings, &outcome)?,
            rules: self.rules_used(&day),
            reason: Some(reason),
        };
        rows.remark(&remarks);
        Ok(rows)
    }

    /// Returns the tries of a visit, oldest first, as typed readings.
    pub(super) fn tries(&self, visit: Uuid) -> Result<Vec<Readings>> {
        tries_of(&self.read().readings(visit)?)
    }

    fn outcome_of(&self, day: &DayInfo, child: &DayChild, readings: &Readings) -> Result<Outcome> {
        preview(&self.library, day, child, readings).ok_or_else(|| no_protocol(day))
    }

    /// Returns the running line that an emergency raises, unless this visit has one that still runs
    /// or that was answered for the same signs.
    pub(super) fn emergency(
        &self,
        visit: Uuid,
        child: &DayChild,
        readings: &Readings,
        outcome: &Outcome,
    ) -> Result<Option<UrgentAction>> {
        if outcome.urgency != Some(Urgency::Emergency) {
            return Ok(None);
        }
        let signs = emergency_words(readings, outcome);
        let read = self.read();
        let parts = read.parts_of(visit)?;
        if read.urgent_of(visit)?.iter().any(|u| u.signs == signs)
            || read
                .urgent_open()?
                .iter()
                .any(|u| u.raised.visit_id.is_some_and(|id| parts.contains(&id)))
        {
            return Ok(None);
        }
        let at = self.moment();
        Ok(Some(UrgentAction {
            id: new_id(),
            urgent_id: line_of(parts.iter().min().copied().unwrap_or(visit), &signs),
            step: "raised".to_owned(),
            child_id: child.child_id.clone(),
            visit_id: Some(visit),
            signs,
            told: String::new(),
            at_ms: at.utc_ms,
            at_offset_minutes: i64::from(at.offset_minutes),
            screener_id: self.screener.as_ref().map(|s| s.screener_id),
            note: String::new(),
        }))
    }

    fn outcome_row(
        &self,
        visit: Uuid,
        day: &DayInfo,
        child: &DayChild,
        outcome: &Outcome,
        late: bool,
    ) -> row::Outcome {
        let mut reasons = String::new();
        explain::reasons_text(outcome, &mut reasons);
        row::Outcome {
            id: new_id(),
            visit_id: visit,
            kind: outcome.kind,
            decided_by: outcome.decided_by.word().to_owned(),
            urgency: outcome.urgency,
            act_within_days: outcome.act_within_days.map(i64::from),
            act_by: outcome.act_by,
            due_on: outcome.due_on,
            risks: outcome
                .risks
                .iter()
                .map(|r| r.word())
                .collect::<Vec<_>>()
                .join(SEPARATOR),
            criteria: outcome.criteria.join(SEPARATOR),
            unknown: outcome.unknown.join(SEPARATOR),
            qualifiers: outcome.qualifiers.join(SEPARATOR),
            reasons,
            protocol_notes: outcome.protocol_notes.join(SEPARATOR),
            rule_set: outcome.rule_set.to_string(),
            edition: outcome.edition.to_string(),
            content_hash: outcome.content_hash.to_string(),
            age_months: child.age.map(|a| i64::from(a.0)),
            grade: child.grade,
            screener_id: self.screener.as_ref().map(|s| s.screener_id),
            station_id: Some(self.here()),
            tested_on: day.date,
            entered_on: clock::today(),
            late,
        }
    }

    /// Says whether what is entered now is entered after the day, or under another date than today's.
    pub(super) fn is_late(&self, day: &DayInfo) -> bool {
        let entered_on = clock::today();
        entered_on > day.date || entered_on != self.today
    }

    /// Returns the texts that this day's outcomes are made with: the protocol's and its rule sets'.
    fn rules_used(&self, day: &DayInfo) -> Vec<RuleSetUsed> {
        let Some(protocol) = self.library.protocol(&day.protocol) else {
            return Vec::new();
        };
        let used = |hash: &str, id: &str, edition: &str, text: &str| RuleSetUsed {
            id: new_id(),
            content_hash: hash.to_owned(),
            rule_set: id.to_owned(),
            edition: edition.to_owned(),
            text: text.to_owned(),
        };
        let sets = protocol
            .rule_sets
            .iter()
            .chain(&protocol.when_done)
            .chain(&protocol.instrument);
        std::iter::once(used(
            &protocol.content_hash,
            &protocol.id,
            &protocol.edition,
            &protocol.text,
        ))
        .chain(
            sets.filter_map(|id| self.library.rule_set(id))
                .map(|set| used(&set.content_hash, &set.id, &set.edition, &set.text)),
        )
        .collect()
    }
}

fn visit_row(day: &DayInfo, child: &DayChild, visit: Uuid) -> Visit {
    Visit {
        id: new_id(),
        visit_id: visit,
        child_id: child.child_id.clone(),
        site: day.site.clone(),
        screened_on: day.date,
        protocol: day.protocol.clone(),
        attempt: child.attempt,
    }
}

fn no_protocol(day: &DayInfo) -> ActionError {
    ActionError::failed(format!(
        "the protocol {} is not among the rule files",
        day.protocol
    ))
    .hint("put its file back into the store's rules folder")
}

fn reading_rows(visit: Uuid, try_no: i64, readings: &Readings) -> Vec<Reading> {
    readings
        .recorded()
        .into_iter()
        .map(|(field, value)| Reading {
            id: new_id(),
            visit_id: visit,
            try_no,
            field,
            value,
        })
        .collect()
}

/// Puts a new outcome in the place of the present ones.
fn replace_outcome(
    tx: &mut Tx<'_>,
    visit: Uuid,
    new: row::Outcome,
    reason: &str,
) -> crate::store::Result<()> {
    let old = tx.read().outcomes(visit)?;
    out_of_date(tx, visit, &old, Some(&new))?;
    let (same, other): (Vec<_>, Vec<_>) = old.into_iter().partition(|o| {
        o.visit_id == new.visit_id && o.rule_set == new.rule_set && o.edition == new.edition
    });
    let ids = |rows: &[row::Outcome]| rows.iter().map(Row::id).collect::<Vec<_>>();
    if !other.is_empty() {
        tx.supersede::<row::Outcome>(&ids(&other), None, reason)?;
    }
    if same.is_empty() {
        tx.add(&new)
    } else {
        tx.supersede(&ids(&same), Some(new), reason).map(|_| ())
    }
}

/// Takes back everything of a visit.
pub(super) fn take_back(tx: &mut Tx<'_>, visit: Uuid, reason: &str) -> crate::store::Result<()> {
    let readings: Vec<Uuid> = tx.read().readings(visit)?.iter().map(|r| r.id).collect();
    for reading in readings {
        tx.supersede::<Reading>(&[reading], None, reason)?;
    }
    let outcomes = tx.read().outcomes(visit)?;
    out_of_date(tx, visit, &outcomes, None)?;
    let outcomes: Vec<Uuid> = outcomes.iter().map(Row::id).collect();
    for outcome in outcomes {
        tx.supersede::<row::Outcome>(&[outcome], None, reason)?;
    }
    let parts = tx.read().parts_of(visit)?;
    let mut open = tx.read().urgent_open()?;
    open.retain(|u| u.raised.visit_id.is_some_and(|id| parts.contains(&id)));
    for raised in tx.read().urgent_of(visit)? {
        if open.iter().any(|u| u.raised.urgent_id == raised.urgent_id) {
            tx.supersede::<UrgentAction>(&[raised.id], None, reason)?;
        }
    }
    let Some(now) = tx.read().visit(visit)? else {
        return Ok(());
    };
    let record = tx.read().visit_record(now)?;
    let visits: Vec<Uuid> = record
        .visit
        .iter()
        .filter(|v| !v.superseded)
        .map(|v| v.row.id)
        .collect();
    if !visits.is_empty() {
        tx.supersede::<Visit>(&visits, None, reason)?;
    }
    Ok(())
}

/// Returns the id of the running line of a visit and its signs: stations that each raise it after a
/// merge mean the same one.
fn line_of(visit: Uuid, signs: &str) -> Uuid {
    let hash = Sha256::new()
        .chain_update(b"twoline-urgent\0")
        .chain_update(visit.as_bytes())
        .chain_update(signs)
        .finalize();
    let mut first = [0; 16];
    first.copy_from_slice(&hash[..16]);
    uuid::Builder::from_custom_bytes(first).into_uuid()
}

fn emergency_words(readings: &Readings, outcome: &Outcome) -> String {
    let signs: Vec<String> = readings
        .signs
        .iter()
        .flatten()
        .map(|sign| match sign.side {
            Some(side) => format!("{}, {}", sign.kind.title(), side.title()),
            None => sign.kind.title().to_owned(),
        })
        .collect();
    if !signs.is_empty() {
        return signs.join("; ");
    }
    let mut seen: Vec<&str> = outcome
        .reasons
        .iter()
        .filter(|r| r.answer == Answer::Refer && r.urgency == Urgency::Emergency)
        .map(|r| r.reading.as_str())
        .collect();
    seen.dedup();
    if !seen.is_empty() {
        return seen.join("; ");
    }
    // Of values that differ one is an emergency.
    let open: Vec<&str> = outcome
        .reasons
        .iter()
        .filter(|r| r.open == Open::NotSettled && r.urgency == Urgency::Emergency)
        .map(|r| r.reading.as_str())
        .collect();
    format!("not settled: {}", open.join(", "))
}

pub(super) fn stored_outcome(row: &row::Outcome) -> StoredOutcome {
    let list = |text: &str| -> Vec<String> {
        text.split(SEPARATOR)
            .map(str::trim)
            .filter(|t| !t.is_empty())
            .map(str::to_owned)
            .collect()
    };
    StoredOutcome {
        kind: row.kind,
        urgency: row.urgency,
        act_by: row.act_by,
        due_on: row.due_on,
        risks: list(&row.risks)
            .iter()
            .filter_map(|r| RiskKind::from_word(r))
            .collect(),
        criteria: list(&row.criteria),
        unknown: list(&row.unknown),
        qualifiers: list(&row.qualifiers),
        reasons: row.reasons.clone(),
        notes: list(&row.protocol_notes),
        rule_set: row.rule_set.clone(),
        edition: row.edition.clone(),
    }
}

pub(super) fn reasoned(reason: &str) -> Result<String> {
    let reason = reason.trim();
    if reason.is_empty() {
        return Err(ActionError::bad("a correction needs a reason"));
    }
    Ok(crate::domain::text::shown(reason, 200))
}
