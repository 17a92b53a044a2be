//! What was tested, as a family reads it.

use crate::domain::codes::{Cover, PlusLens, Reflex, YesNo};
use crate::domain::readings::{AcuityResult, Eyes, InstrumentEye, Readings};
use crate::domain::screening_test::ScreeningTest;
use crate::reports::letters::{Found, FoundValue, FoundValues};

/// Returns what was tested, in the order of the tests, as a family reads it.
pub(super) fn found(readings: &Readings) -> Vec<Found> {
    let mut out = Vec::new();
    let acuity = |eyes: Eyes<Option<AcuityResult>>| {
        FoundValues::Eyes(eyes.both().map(|eye| match eye {
            Some(AcuityResult::Read(acuity)) => FoundValue::Value(acuity.in_words()),
            Some(AcuityResult::NotTestable(_)) => FoundValue::NotTestable,
            None => FoundValue::NotDone,
        }))
    };
    let look = |fine: bool| {
        if fine {
            FoundValue::Fine
        } else {
            FoundValue::Look
        }
    };
    for test in ScreeningTest::ALL {
        let values = match test {
            ScreeningTest::Distance if readings.testable == Some(YesNo::No) => {
                Some(FoundValues::Together(FoundValue::NotTestable))
            }
            ScreeningTest::Distance => {
                (readings.distance != Eyes::default()).then(|| acuity(readings.distance))
            }
            ScreeningTest::Near => {
                (readings.near != Eyes::default()).then(|| acuity(readings.near))
            }
            ScreeningTest::PlusLens => readings
                .plus_lens
                .map(|p| FoundValues::Together(look(p == PlusLens::Blurred))),
            ScreeningTest::Stereo => readings.stereo_correct.map(|n| {
                let of = readings.stereo_shown.map(|s| format!(" / {s}"));
                FoundValues::Together(FoundValue::Value(format!("{n}{}", of.unwrap_or_default())))
            }),
            ScreeningTest::Cover => readings
                .cover
                .map(|c| FoundValues::Together(look(matches!(c, Cover::None | Cover::Phoria)))),
            ScreeningTest::RedReflex => (readings.red_reflex != Eyes::default()).then(|| {
                FoundValues::Eyes(readings.red_reflex.both().map(|reflex| {
                    reflex.map_or(FoundValue::NotDone, |r| look(r == Reflex::Normal))
                }))
            }),
            ScreeningTest::ColorPlates => readings.plates_missed.map(|missed| {
                FoundValues::Together(FoundValue::Value(match readings.plates_shown {
                    Some(shown) => format!("{} / {shown}", shown.saturating_sub(missed)),
                    None => format!("−{missed}"),
                }))
            }),
            ScreeningTest::Instrument => (readings.instrument != Eyes::default())
                .then(|| FoundValues::Eyes(readings.instrument.both().map(measured))),
        };
        out.extend(values.map(|values| Found {
            test: *test,
            values,
        }));
    }
    out
}

fn measured(eye: InstrumentEye) -> FoundValue {
    let parts: Vec<String> = [
        eye.sphere.map(|p| p.to_string()),
        eye.cylinder.map(|p| p.to_string()),
        eye.axis.map(|a| format!("× {a}")),
    ]
    .into_iter()
    .flatten()
    .collect();
    if parts.is_empty() {
        FoundValue::NotDone
    } else {
        FoundValue::Value(parts.join(" "))
    }
}
