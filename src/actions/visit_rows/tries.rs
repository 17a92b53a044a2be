//! Several tries of one visit: typed, and what of them is judged.

use super::super::error::{ActionError, Result};
use crate::domain::readings::{AcuityResult, Eyes, ReadingContext, Readings};
use crate::store::read::ReadingNow;

/// Returns the tries of a visit, oldest first; values that differ are left out.
pub(in crate::actions) fn tries_of(readings: &[ReadingNow]) -> Result<Vec<Readings>> {
    let count = readings.iter().map(|r| r.try_no).max().unwrap_or(0);
    let mut tries = vec![Readings::default(); count as usize];
    let mut sorted: Vec<&ReadingNow> = readings.iter().filter(|r| !r.conflict).collect();
    // Letters and method decide what an acuity means: the field list has them first.
    sorted.sort_by_key(|r| r.field);
    for reading in sorted {
        let place = usize::try_from(reading.try_no - 1).unwrap_or(0);
        tries[place]
            .set(reading.field, &reading.value, ReadingContext::default())
            .map_err(|e| ActionError::failed(format!("a stored value cannot be read: {e}")))?;
    }
    Ok(tries)
}

/// Returns what is judged of several tries: the distance acuity of the latest complete try, else the
/// latest that each eye read, and the latest of everything else.
pub fn judged(tries: &[Readings]) -> Readings {
    let Some(last) = tries.last() else {
        return Readings::default();
    };
    let mut out = Readings::default();
    for readings in tries {
        for (field, value) in readings.recorded() {
            // Canonical text of a typed value reads back to that value.
            let _ = out.set(field, &value, ReadingContext::default());
        }
    }
    let complete = |r: &&Readings| {
        r.distance
            .both()
            .iter()
            .all(|eye| matches!(eye, Some(AcuityResult::Read(_))))
    };
    let whole = tries.iter().rev().find(complete);
    let chart = whole.unwrap_or(last);
    Readings {
        // A try of one eye does not undo what the other eye read before it.
        distance: whole.map_or_else(
            || Eyes {
                right: latest_read(tries, |eyes| eyes.right),
                left: latest_read(tries, |eyes| eyes.left),
            },
            |whole| whole.distance,
        ),
        distance_both: chart.distance_both,
        testable: chart.testable,
        not_testable_reason: chart.not_testable_reason,
        ..out
    }
}

/// Returns the latest acuity that an eye read, else the latest word about it.
fn latest_read(
    tries: &[Readings],
    eye: impl Fn(Eyes<Option<AcuityResult>>) -> Option<AcuityResult>,
) -> Option<AcuityResult> {
    let results: Vec<AcuityResult> = tries.iter().rev().filter_map(|r| eye(r.distance)).collect();
    results
        .iter()
        .find(|result| matches!(result, AcuityResult::Read(_)))
        .or(results.first())
        .copied()
}
