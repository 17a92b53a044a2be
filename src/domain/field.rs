//! The fields of a visit: one column of the results file, one row of the store, one box on a screen.

use crate::domain::codes::code_list;

code_list! {
    /// A recorded value of a visit.
    Field {
        Status = "status", "took part";
        AcuityMethod = "acuity_method", "acuity method";
        CorrectionWorn = "correction_worn", "glasses";
        LettersPerLine = "letters_per_line", "letters per line";
        ChartDistanceM = "chart_distance_m", "chart distance (m)";
        UsedDistanceM = "used_distance_m", "used distance (m)";
        ChartDistanceFt = "chart_distance_ft", "chart distance (ft)";
        UsedDistanceFt = "used_distance_ft", "used distance (ft)";
        DistanceRight = "distance_right", "distance acuity, right eye";
        DistanceLeft = "distance_left", "distance acuity, left eye";
        DistanceBoth = "distance_both", "distance acuity, both eyes";
        NearRight = "near_right", "near acuity, right eye";
        NearLeft = "near_left", "near acuity, left eye";
        NearBoth = "near_both", "near acuity, both eyes";
        NearDistanceCm = "near_distance_cm", "near distance (cm)";
        PlusLens = "plus_lens", "plus lens";
        StereoCorrect = "stereo_correct", "stereo, correct";
        StereoShown = "stereo_shown", "stereo, shown";
        Cover = "cover", "cover test";
        DeviationPd = "deviation_pd", "deviation (prism dioptres)";
        DeviatingEye = "deviating_eye", "deviating eye";
        DeviationDirection = "deviation_direction", "deviation direction";
        RedReflexRight = "red_reflex_right", "red reflex, right eye";
        RedReflexLeft = "red_reflex_left", "red reflex, left eye";
        PlatesMissed = "plates_missed", "color plates missed";
        PlatesShown = "plates_shown", "color plates shown";
        SphereRight = "sphere_right", "sphere, right eye";
        CylinderRight = "cylinder_right", "cylinder, right eye";
        AxisRight = "axis_right", "axis, right eye";
        SphereLeft = "sphere_left", "sphere, left eye";
        CylinderLeft = "cylinder_left", "cylinder, left eye";
        AxisLeft = "axis_left", "axis, left eye";
        InstrumentWorn = "instrument_worn", "glasses worn at the instrument";
        InstrumentRight = "instrument_right", "instrument, right eye";
        InstrumentLeft = "instrument_left", "instrument, left eye";
        PupilMmRight = "pupil_mm_right", "pupil (mm), right eye";
        PupilMmLeft = "pupil_mm_left", "pupil (mm), left eye";
        OpacityMmRight = "opacity_mm_right", "media opacity (mm), right eye";
        OpacityMmLeft = "opacity_mm_left", "media opacity (mm), left eye";
        ReflexDistanceMmRight = "reflex_distance_mm_right", "margin reflex distance (mm), right eye";
        ReflexDistanceMmLeft = "reflex_distance_mm_left", "margin reflex distance (mm), left eye";
        Signs = "signs", "signs";
        History = "history", "history";
        Testable = "testable", "chart testable";
        NotTestableReason = "not_testable_reason", "why not testable";
        Note = "note", "note";
    }
}

/// Why a text is not a value of its field.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("{}: found {found:?}, expected {expected}", field.word())]
pub struct FieldError {
    /// The field.
    pub field: Field,
    /// What was there, shortened and made safe to print.
    pub found: String,
    /// What would have been taken.
    pub expected: String,
}

impl FieldError {
    /// Makes an error whose `found` is safe to print.
    pub fn new(field: Field, found: &str, expected: impl Into<String>) -> FieldError {
        FieldError {
            field,
            found: super::text::shown(found, 40),
            expected: expected.into(),
        }
    }
}
