//! What the bench hands over to be signed.

use super::{Bench, State};
use crate::actions::SignRequest;
use crate::domain::codes::{Correction, Status};
use crate::domain::field::Field;
use crate::domain::readings::Eyes;

impl Bench {
    /// Says whether signing will state "no signs seen".
    pub fn will_state_no_signs(&self) -> bool {
        self.task().is_none()
            && self.readings.signs.is_none()
            && self.status().is_none()
            && self.earlier.iter().all(|t| t.signs.is_none())
            && self.elsewhere.is_none()
    }

    /// Returns what to sign, or the field that stands against it and why.
    pub fn to_sign(&self) -> Result<SignRequest, (Option<Field>, String)> {
        for (field, state) in &self.states {
            if let State::Invalid { expected } = state {
                return Err((
                    Some(*field),
                    format!("{}: expected {expected}", field.title()),
                ));
            }
        }
        let mut readings = self.readings.clone();
        let speaks = readings.anything_tested()
            || readings.signs.is_some()
            || self.status().is_some()
            || matches!(
                readings.correction,
                Some(Correction::LeftAtHome | Correction::BrokenOrLost | Correction::NotWorn)
            );
        if !speaks {
            let spot = self.path.iter().copied().find(|f| self.plan.is_main(*f));
            return Err((
                spot,
                "nothing was tested yet; F3 says why a child is not tested".into(),
            ));
        }
        if let Some(error) = readings.contradictions().into_iter().next() {
            return Err((
                Some(error.field),
                format!("{}: expected {}", error.field.title(), error.expected),
            ));
        }
        if readings.distance == Eyes::default() && self.raw(Field::LettersPerLine).is_empty() {
            // Nothing was read from the station's chart.
            readings.letters_per_line = None;
        }
        if self.will_state_no_signs() {
            readings.signs = Some(Vec::new());
        }
        if readings.status.is_none() {
            readings.status = Some(Status::Present);
        }
        Ok(SignRequest {
            day: self.given.day.id,
            child_id: self.child.child_id.clone(),
            attempt: self.child.attempt,
            visit: self.visit,
            readings,
            remarks: self.swapped_words(),
        })
    }
}
