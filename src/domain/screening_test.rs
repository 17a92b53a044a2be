//! The tests of a screening, each with the fields that record it: what passes or is repeated whole.

use crate::domain::codes::code_list;
use crate::domain::field::Field;
use crate::domain::readings::Readings;

code_list! {
    /// One test of a screening.
    ScreeningTest {
        Distance = "distance", "distance acuity";
        Near = "near", "near acuity";
        PlusLens = "plus_lens", "plus lens";
        Stereo = "stereo", "stereo";
        Cover = "cover", "cover test";
        RedReflex = "red_reflex", "red reflex";
        ColorPlates = "color_plates", "color plates";
        Instrument = "instrument", "instrument";
    }
}

impl ScreeningTest {
    /// Says whether anything was found by this test; how the chart is read and which chart hangs there
    /// is known before anybody looks at it.
    pub fn is_touched(self, readings: &Readings) -> bool {
        self.fields()
            .iter()
            .filter(|f| {
                !matches!(
                    f,
                    Field::AcuityMethod
                        | Field::LettersPerLine
                        | Field::ChartDistanceM
                        | Field::ChartDistanceFt
                        | Field::UsedDistanceM
                        | Field::UsedDistanceFt
                )
            })
            .any(|f| readings.get(*f).is_some())
    }

    /// Returns the fields that record it, both eyes.
    pub fn fields(self) -> &'static [Field] {
        match self {
            ScreeningTest::Distance => &[
                Field::AcuityMethod,
                Field::LettersPerLine,
                Field::ChartDistanceM,
                Field::UsedDistanceM,
                Field::ChartDistanceFt,
                Field::UsedDistanceFt,
                Field::DistanceRight,
                Field::DistanceLeft,
                Field::DistanceBoth,
                Field::Testable,
                Field::NotTestableReason,
            ],
            ScreeningTest::Near => &[
                Field::NearRight,
                Field::NearLeft,
                Field::NearBoth,
                Field::NearDistanceCm,
            ],
            ScreeningTest::PlusLens => &[Field::PlusLens],
            ScreeningTest::Stereo => &[Field::StereoCorrect, Field::StereoShown],
            ScreeningTest::Cover => &[
                Field::Cover,
                Field::DeviationPd,
                Field::DeviatingEye,
                Field::DeviationDirection,
            ],
            ScreeningTest::RedReflex => &[Field::RedReflexRight, Field::RedReflexLeft],
            ScreeningTest::ColorPlates => &[Field::PlatesMissed, Field::PlatesShown],
            ScreeningTest::Instrument => &[
                Field::SphereRight,
                Field::CylinderRight,
                Field::AxisRight,
                Field::SphereLeft,
                Field::CylinderLeft,
                Field::AxisLeft,
                Field::InstrumentWorn,
                Field::InstrumentRight,
                Field::InstrumentLeft,
                Field::PupilMmRight,
                Field::PupilMmLeft,
                Field::OpacityMmRight,
                Field::OpacityMmLeft,
                Field::ReflexDistanceMmRight,
                Field::ReflexDistanceMmLeft,
            ],
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::domain::readings::ReadingContext;

    // The screens set the day's method and the station's chart before anything is read: a distance
    // acuity that passed before must still carry over then.
    #[test]
    fn the_days_method_and_the_chart_touch_no_test() {
        let mut readings = Readings::default();
        let mut set = |field, text: &str| readings.set(field, text, ReadingContext::default());
        assert!(set(Field::AcuityMethod, "threshold").is_ok());
        assert!(set(Field::LettersPerLine, "4").is_ok());
        assert!(!ScreeningTest::Distance.is_touched(&readings));
        let mut set = |field, text: &str| readings.set(field, text, ReadingContext::default());
        assert!(set(Field::DistanceLeft, "NT").is_ok());
        assert!(ScreeningTest::Distance.is_touched(&readings));
        assert!(!ScreeningTest::Near.is_touched(&readings));
    }
}
