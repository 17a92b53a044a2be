//! The tests of a screening, each with the fields that record it: what passes or is repeated whole.

use crate::domain::codes::code_list;
use crate::domain::field::Field;

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
