//! The parts of a visit that several stations recorded.

use uuid::Uuid;

use super::{Edit, SEPARATOR, VisitRows, judged, no_protocol, stored_outcome, tries_of, visit_row};
use crate::actions::desk::Desk;
use crate::actions::error::Result;
use crate::actions::views::{DayChild, DayInfo};
use crate::domain::field::Field;
use crate::store::new_id;
use crate::store::read::ReadingNow;
use crate::store::row::Reading;

impl Desk {
    /// Returns what was noted while entering beside the present outcomes of a visit: every note that
    /// judging the visit, or a part of it, does not make.
    pub(in crate::actions) fn remarks_of(
        &self,
        visit: Uuid,
        day: &DayInfo,
        child: &DayChild,
    ) -> Result<Vec<String>> {
        let present = self.read().readings(visit)?;
        let mut judgings = vec![present.clone()];
        for part in self.read().parts_of(visit)? {
            judgings.push(
                present
                    .iter()
                    .filter(|r| r.visit_id == part)
                    .map(|r| ReadingNow {
                        conflict: false,
                        ..r.clone()
                    })
                    .collect(),
            );
        }
        let mut made = String::new();
        for readings in judgings {
            for note in self
                .judged_together(day, child, &readings)?
                .map(|outcome| outcome.protocol_notes)
                .unwrap_or_default()
            {
                made.push_str(&note);
                made.push_str(SEPARATOR);
            }
        }
        let made: Vec<&str> = made.split(SEPARATOR).map(str::trim).collect();
        let mut remarks = Vec::new();
        for signed in self.read().outcomes(visit)?.into_iter().rev() {
            for note in stored_outcome(&signed).notes {
                if !made.contains(&note.as_str()) && !remarks.contains(&note) {
                    remarks.push(note);
                }
            }
        }
        Ok(remarks)
    }

    /// Prepares what one more station adds to a visit: readings of fields that no part has yet.
    pub(in crate::actions) fn further_part(
        &self,
        day: &DayInfo,
        child: &DayChild,
        (whole, part): (Uuid, Uuid),
        more: Vec<(Field, String)>,
    ) -> Result<VisitRows> {
        let mut present = self.read().readings(whole)?;
        let try_no = present.iter().map(|r| r.try_no).max().unwrap_or(1);
        present.extend(more.iter().map(|(field, value)| ReadingNow {
            id: Uuid::nil(),
            visit_id: part,
            try_no,
            field: *field,
            value: value.clone(),
            conflict: false,
        }));
        let readings = judged(&tries_of(&present)?);
        let outcome = self
            .judged_together(day, child, &present)?
            .ok_or_else(|| no_protocol(day))?;
        Ok(VisitRows {
            visit: part,
            new: Some(visit_row(day, child, part)),
            readings: more
                .into_iter()
                .map(|(field, value)| Reading {
                    id: new_id(),
                    visit_id: part,
                    try_no,
                    field,
                    value,
                })
                .collect(),
            edits: Vec::new(),
            outcome: self.outcome_row(part, day, child, &outcome, self.is_late(day)),
            raise: self.emergency(whole, child, &readings, &outcome)?,
            rules: self.rules_used(day),
            reason: None,
        })
    }
}

/// Returns what puts one value in the place of what the parts of a visit say of a field: a part that
/// says it already keeps it, else the first one gets it, and the others take theirs back.
pub(super) fn edits_of(
    visit: Uuid,
    (try_no, field): (i64, Field),
    old: &[&ReadingNow],
    value: Option<&str>,
) -> Vec<Edit> {
    let mut parts: Vec<(Uuid, Vec<&ReadingNow>)> = Vec::new();
    for reading in old {
        match parts.iter_mut().find(|(part, _)| *part == reading.visit_id) {
            Some((_, of_part)) => of_part.push(reading),
            None => parts.push((reading.visit_id, vec![reading])),
        }
    }
    if parts.is_empty() {
        parts.push((visit, Vec::new()));
    }
    let says = |readings: &[&ReadingNow]| {
        !readings.is_empty() && readings.iter().all(|r| Some(r.value.as_str()) == value)
    };
    let keeper = parts.iter().position(|(_, of)| says(of)).unwrap_or(0);
    let mut edits = Vec::new();
    for (at, (part, readings)) in parts.into_iter().enumerate() {
        if value.is_some() && says(&readings) {
            continue;
        }
        let new = value.filter(|_| at == keeper).map(|value| Reading {
            id: new_id(),
            visit_id: part,
            try_no,
            field,
            value: value.to_owned(),
        });
        edits.push(Edit {
            old: readings.iter().map(|r| r.id).collect(),
            new,
        });
    }
    edits
}
