//! A case as criteria ask it: readings with the day's circumstances worked in.

use crate::domain::acuity::{Acuity, Line, Notation};
use crate::domain::codes::{AcuityMethod, History, Status, YesNo};
use crate::domain::readings::{AcuityResult, Eyes, NotTestable, Readings};
use crate::rules::Case;

/// What criteria ask.
pub(in crate::rules) struct Facts<'a> {
    pub case: &'a Case<'a>,
    pub readings: &'a Readings,
    /// Distance acuity, with critical-line values as bounds.
    pub distance: Eyes<Option<AcuityResult>>,
    pub letters: u8,
    /// Shift by distance, in thousandths of logMAR.
    pub shift: i32,
    pub notation: Notation,
    pub under_care: bool,
    pub critical_line: bool,
    /// Whether both eyes passed the distance chart, where a chart was judged.
    pub distance_passed: Option<bool>,
}

impl<'a> Facts<'a> {
    pub fn new(case: &'a Case<'a>, pass_line: Option<Line>) -> Facts<'a> {
        let readings = case.readings;
        let critical_line =
            readings.acuity_method.or(case.method) == Some(AcuityMethod::CriticalLine);
        let mut distance = readings.distance;
        if let Some(line) = pass_line.filter(|_| critical_line) {
            distance.right = bounded(distance.right, line);
            distance.left = bounded(distance.left, line);
        }
        if readings.testable == Some(YesNo::No) {
            let why = AcuityResult::NotTestable(
                readings.not_testable_reason.unwrap_or(NotTestable::Other),
            );
            distance.right = distance.right.or(Some(why));
            distance.left = distance.left.or(Some(why));
        }
        Facts {
            case,
            readings,
            distance,
            letters: readings.letters_per_line.unwrap_or(5).max(1),
            shift: readings
                .distances()
                .map_or(0, crate::domain::acuity::Distances::shift),
            notation: readings.notation(),
            under_care: under_care(case),
            critical_line,
            distance_passed: None,
        }
    }
}

/// On a critical-line day only this line is shown: reading it means "this line or better", and
/// anything worse means "worse than it".
fn bounded(result: Option<AcuityResult>, pass_line: Line) -> Option<AcuityResult> {
    match result {
        Some(AcuityResult::Read(Acuity::Read { line, letters: 0 }))
            if line.step() == pass_line.step() =>
        {
            Some(AcuityResult::Read(Acuity::AtLeast(line)))
        }
        Some(AcuityResult::Read(Acuity::Read { line, letters: 0 }))
            if line.step() > pass_line.step() =>
        {
            Some(AcuityResult::Read(Acuity::WorseThan(pass_line)))
        }
        other => other,
    }
}

/// Says whether the child is under care, by roster, status or history.
pub(in crate::rules) fn under_care(case: &Case<'_>) -> bool {
    case.under_care
        || case.readings.status == Some(Status::UnderCare)
        || case.readings.has_history(History::UnderCare)
}
