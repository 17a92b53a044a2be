//! What a rescreen takes over from the visit before: failed tests are repeated, passed ones carry
//! over, marked so.

use chrono::NaiveDate;

use super::desk::Desk;
use super::error::Result;
use super::views::{Before, DayChild};
use super::visit_rows::{judged, stored_outcome, tries_of};
use crate::domain::field::Field;
use crate::domain::readings::{ReadingContext, Readings};
use crate::domain::screening_test::ScreeningTest;
use crate::rules::Library;
use crate::store::read::VisitNow;

impl Desk {
    /// Returns what the visit that asked for a rescreen leaves to it.
    pub(super) fn before(&self, visit: &VisitNow) -> Result<Option<Before>> {
        let read = self.read();
        // What one station failed did not pass because another one signed later.
        let (criteria, unknown) = if let Some(together) = self.together(visit)? {
            (together.now.criteria, together.now.unknown)
        } else {
            let Some(signed) = read.outcomes(visit.visit_id)?.into_iter().next() else {
                return Ok(None);
            };
            let outcome = stored_outcome(&signed);
            (outcome.criteria, outcome.unknown)
        };
        let readings = judged(&tries_of(&read.readings(visit.visit_id)?)?);
        let mut passed = Readings::default();
        for test in ScreeningTest::ALL {
            // A test of which anything failed or could not be answered is done again, whole.
            let open = criteria
                .iter()
                .chain(&unknown)
                .any(|id| test_of(&self.library, id).is_none_or(|t| t == Some(*test)));
            if !open {
                copy(&readings, &mut passed, test.fields());
            }
        }
        Ok(Some(Before {
            on: visit.screened_on,
            failed: criteria,
            passed,
        }))
    }
}

/// Returns the test that a criterion (`rule-set/criterion`) judges; nothing for a criterion that is
/// not in the library any more, of which nobody can say what it judged.
#[allow(clippy::option_option)]
fn test_of(library: &Library, id: &str) -> Option<Option<ScreeningTest>> {
    let Some((set, criterion)) = id.split_once('/') else {
        return Some(None);
    };
    if matches!(criterion, "signs" | "history") {
        return Some(None);
    }
    library.criterion(set, criterion).map(|c| c.measure.test())
}

fn copy(from: &Readings, to: &mut Readings, fields: &[Field]) {
    for field in fields {
        if let Some(text) = from.get(*field) {
            // Canonical text reads back to the same value.
            let _ = to.set(*field, &text, ReadingContext::default());
        }
    }
}

/// Returns the readings with every test that passed before and was not touched today, and the words
/// for it; nothing where nothing carries over.
pub(super) fn carried_over(child: &DayChild, readings: &Readings) -> Option<(Readings, String)> {
    let before = child.before.as_ref()?;
    let mut out = readings.clone();
    let mut carried = Vec::new();
    for test in ScreeningTest::ALL {
        let touched = test.is_touched(readings);
        let known = test
            .fields()
            .iter()
            .any(|f| before.passed.get(*f).is_some());
        if !touched && known {
            copy(&before.passed, &mut out, test.fields());
            carried.push(test.title());
        }
    }
    (!carried.is_empty()).then(|| (out, words(&carried, before.on)))
}

fn words(tests: &[&str], on: NaiveDate) -> String {
    format!(
        "carried over from {}: {}",
        crate::domain::age::spoken(on),
        tests.join(", ")
    )
}
