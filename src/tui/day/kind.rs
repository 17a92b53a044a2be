//! How each field of the bench is entered and called.

use crate::domain::codes::{
    Correction, Cover, DeviatingEye, Direction, InstrumentResult, PlusLens, Reflex, YesNo,
};
use crate::domain::field::Field;
use crate::domain::readings::{AcuityResult, Eye, Readings};

/// One choice of a field: its key, its word in files, its words for people.
pub type FieldChoice = (char, &'static str, &'static str);

/// How a field is entered.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Kind {
    /// An acuity: typed, or moved along the ladder.
    Acuity,
    /// One key each.
    Choice(Vec<FieldChoice>),
    /// A list that is chosen in a question of its own; `n` says none.
    List,
    /// A number or another short text.
    Text,
}

/// Returns how a field is entered.
pub fn kind(field: Field) -> Kind {
    use Field as F;
    match field {
        F::DistanceRight
        | F::DistanceLeft
        | F::DistanceBoth
        | F::NearRight
        | F::NearLeft
        | F::NearBoth => Kind::Acuity,
        F::CorrectionWorn => Kind::Choice(
            [
                ('n', Correction::None),
                ('w', Correction::Worn),
                ('c', Correction::ContactLenses),
                ('o', Correction::NotWorn),
                ('h', Correction::LeftAtHome),
                ('b', Correction::BrokenOrLost),
            ]
            .map(|(k, v)| (k, v.word(), v.title()))
            .to_vec(),
        ),
        F::PlusLens => Kind::Choice(
            [('b', PlusLens::Blurred), ('r', PlusLens::Read)]
                .map(|(k, v)| (k, v.word(), v.title()))
                .to_vec(),
        ),
        F::Cover => Kind::Choice(
            [
                ('n', Cover::None),
                ('p', Cover::Phoria),
                ('i', Cover::Intermittent),
                ('c', Cover::Constant),
            ]
            .map(|(k, v)| (k, v.word(), v.title()))
            .to_vec(),
        ),
        F::RedReflexRight | F::RedReflexLeft => Kind::Choice(
            [
                ('n', Reflex::Normal),
                ('a', Reflex::Absent),
                ('w', Reflex::White),
                ('d', Reflex::Dull),
                ('s', Reflex::DarkSpot),
                ('u', Reflex::Unequal),
            ]
            .map(|(k, v)| (k, v.word(), v.title()))
            .to_vec(),
        ),
        F::InstrumentRight | F::InstrumentLeft => Kind::Choice(
            [
                ('o', InstrumentResult::Ok),
                ('x', InstrumentResult::NoReading),
            ]
            .map(|(k, v)| (k, v.word(), v.title()))
            .to_vec(),
        ),
        F::InstrumentWorn | F::Testable => Kind::Choice(
            [('y', YesNo::Yes), ('n', YesNo::No)]
                .map(|(k, v)| (k, v.word(), v.title()))
                .to_vec(),
        ),
        F::DeviatingEye => Kind::Choice(
            [
                ('r', DeviatingEye::Right),
                ('l', DeviatingEye::Left),
                ('a', DeviatingEye::Alternating),
            ]
            .map(|(k, v)| (k, v.word(), v.title()))
            .to_vec(),
        ),
        F::DeviationDirection => Kind::Choice(
            [
                ('i', Direction::In),
                ('o', Direction::Out),
                ('u', Direction::Up),
                ('d', Direction::Down),
            ]
            .map(|(k, v)| (k, v.word(), v.title()))
            .to_vec(),
        ),
        F::Signs | F::History => Kind::List,
        _ => Kind::Text,
    }
}

/// Returns the pair of fields, right and left, that a field belongs to.
pub fn pair(field: Field) -> Option<(Field, Field)> {
    use Field as F;
    const PAIRS: [(Field, Field); 10] = [
        (F::DistanceRight, F::DistanceLeft),
        (F::NearRight, F::NearLeft),
        (F::RedReflexRight, F::RedReflexLeft),
        (F::InstrumentRight, F::InstrumentLeft),
        (F::SphereRight, F::SphereLeft),
        (F::CylinderRight, F::CylinderLeft),
        (F::AxisRight, F::AxisLeft),
        (F::PupilMmRight, F::PupilMmLeft),
        (F::OpacityMmRight, F::OpacityMmLeft),
        (F::ReflexDistanceMmRight, F::ReflexDistanceMmLeft),
    ];
    PAIRS
        .into_iter()
        .find(|(right, left)| *right == field || *left == field)
}

/// Returns the eye of a field, if it has one.
pub fn eye(field: Field) -> Option<Eye> {
    pair(field).map(|(right, _)| {
        if right == field {
            Eye::Right
        } else {
            Eye::Left
        }
    })
}

/// Returns the label of the row of a field; the eyes are named above the columns.
pub fn label(field: Field) -> &'static str {
    use Field as F;
    match field {
        F::DistanceRight | F::DistanceLeft => "distance",
        F::DistanceBoth => "dist., both",
        F::NearRight | F::NearLeft => "near",
        F::NearBoth => "near, both",
        F::NearDistanceCm => "near at, cm",
        F::CorrectionWorn => "glasses",
        F::PlusLens => "plus lens",
        F::RedReflexRight | F::RedReflexLeft => "red reflex",
        F::InstrumentRight | F::InstrumentLeft => "instrument",
        F::InstrumentWorn => "through gl.",
        F::SphereRight | F::SphereLeft => "sphere",
        F::CylinderRight | F::CylinderLeft => "cylinder",
        F::AxisRight | F::AxisLeft => "axis",
        F::PupilMmRight | F::PupilMmLeft => "pupil, mm",
        F::OpacityMmRight | F::OpacityMmLeft => "opacity, mm",
        F::ReflexDistanceMmRight | F::ReflexDistanceMmLeft => "lid refl. mm",
        F::Cover => "cover test",
        F::DeviationPd => "deviation",
        F::DeviatingEye => "which eye",
        F::DeviationDirection => "direction",
        F::StereoCorrect => "stereo right",
        F::StereoShown => "stereo shown",
        F::PlatesMissed => "color missed",
        F::PlatesShown => "color shown",
        other => other.title(),
    }
}

/// Reads one acuity out of the readings by its field.
pub trait AcuityOf {
    /// Returns the result of an acuity field.
    fn acuity_of(&self, field: Field) -> Option<AcuityResult>;
}

impl AcuityOf for Readings {
    fn acuity_of(&self, field: Field) -> Option<AcuityResult> {
        match field {
            Field::DistanceRight => self.distance.right,
            Field::DistanceLeft => self.distance.left,
            Field::DistanceBoth => self.distance_both,
            Field::NearRight => self.near.right,
            Field::NearLeft => self.near.left,
            Field::NearBoth => self.near_both,
            _ => None,
        }
    }
}
