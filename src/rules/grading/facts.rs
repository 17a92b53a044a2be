//! What is known of a child when a table of groups or bands is asked.

use crate::domain::acuity::{Distances, StepRange};
use crate::domain::age::AgeMonths;
use crate::domain::codes::{Cover, DeviatingEye, SignKind, YesNo};
use crate::domain::readings::{AcuityResult, Eye, InstrumentEye, Readings};
use crate::domain::refraction::{Power, Range};

use super::{CREDIT, Truth};

/// With what the acuity was measured.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Correctedness {
    /// With the best correction, as an examiner measures it.
    BestCorrected,
    /// As the child came, as a screening measures it.
    #[default]
    Presenting,
}

/// Facts from a screening or an examination; what nobody knows stays none.
#[derive(Debug, Clone, Copy)]
pub struct Clinical<'a> {
    /// Completed months.
    pub age: Option<AgeMonths>,
    /// Acuity, refraction, cover test and signs, of a screening or an examination.
    pub readings: &'a Readings,
    /// With what the acuity was measured.
    pub corrected: Correctedness,
    /// Months since the squint was first noticed.
    pub onset_months: Option<u32>,
    /// Whether the child fixes and follows.
    pub fixes_and_follows: Option<bool>,
    /// Whether a child too young to read a chart is suspected of poor vision.
    pub suspected_poor_vision: Option<bool>,
    /// Whether binocularity was lost.
    pub binocularity_lost: Option<bool>,
}

impl<'a> Clinical<'a> {
    /// Returns what a screening knows.
    pub fn of_screening(age: Option<AgeMonths>, readings: &'a Readings) -> Clinical<'a> {
        Clinical {
            age,
            readings,
            corrected: Correctedness::Presenting,
            onset_months: None,
            fixes_and_follows: None,
            suspected_poor_vision: None,
            binocularity_lost: None,
        }
    }

    /// Returns what an examiner measured, with the best correction.
    pub fn of_examination(age: Option<AgeMonths>, readings: &'a Readings) -> Clinical<'a> {
        Clinical {
            corrected: Correctedness::BestCorrected,
            ..Clinical::of_screening(age, readings)
        }
    }

    /// Returns the steps each eye may lie at.
    pub(super) fn steps(&self) -> [Option<StepRange>; 2] {
        let letters = self.readings.letters_per_line.unwrap_or(5).max(1);
        let shift = self.readings.distances().map_or(0, Distances::shift);
        self.readings
            .distance
            .both()
            .map(|value| value?.acuity()?.steps(CREDIT, letters, shift))
    }

    /// Returns the eye that surely sees worse; the right one where both see alike, none where it
    /// cannot be said.
    pub(super) fn worse_eye(&self) -> Option<Eye> {
        let [right, left] = self.steps();
        let (right, left) = (right?, left?);
        if right
            .best
            .is_some_and(|r| left.worst.is_some_and(|l| r >= l))
        {
            Some(Eye::Right)
        } else if left
            .best
            .is_some_and(|l| right.worst.is_some_and(|r| l > r))
        {
            Some(Eye::Left)
        } else {
            None
        }
    }

    /// Returns each eye's refraction; what was measured through glasses says nothing.
    pub(super) fn eyes(&self) -> [InstrumentEye; 2] {
        if self.readings.instrument_worn == Some(YesNo::Yes) {
            [InstrumentEye::default(); 2]
        } else {
            self.readings.instrument.both()
        }
    }

    /// Says whether there is a squint at all.
    pub(super) fn squint(&self) -> Truth {
        let said = |kind| self.readings.has_sign(kind);
        if matches!(
            self.readings.cover,
            Some(Cover::Constant | Cover::Intermittent)
        ) || self.readings.deviation_pd.is_some_and(|d| d.0 > 0)
            || said(SignKind::NewSquint)
            || said(SignKind::KnownSquint)
        {
            Truth::Yes
        } else if self.readings.cover.is_some() {
            Truth::No
        } else {
            Truth::Unknown
        }
    }

    /// Says whether the eye is the one that turns.
    pub(super) fn turns(&self, eye: Eye) -> Truth {
        match (self.squint(), self.readings.deviating_eye) {
            (Truth::Yes, Some(DeviatingEye::Alternating)) => Truth::Yes,
            (Truth::Yes, Some(DeviatingEye::Right)) => (eye == Eye::Right).into(),
            (Truth::Yes, Some(DeviatingEye::Left)) => (eye == Eye::Left).into(),
            (Truth::Yes, None) => Truth::Unknown,
            (other, _) => other,
        }
    }

    /// Returns the months since the onset, least and most; a new squint was noticed within so many.
    pub(super) fn onset(&self, new_squint: Option<u32>) -> Option<(u32, u32)> {
        match self.onset_months {
            Some(months) => Some((months, months)),
            None if self.readings.has_sign(SignKind::NewSquint) => Some((0, new_squint?)),
            None => None,
        }
    }

    pub(super) fn acuity_words(&self) -> String {
        let [right, left] = self
            .readings
            .distance
            .both()
            .map(|v| v.map_or_else(|| "not done".to_owned(), AcuityResult::in_words));
        format!("right eye {right}, left eye {left}")
    }
}

impl From<bool> for Truth {
    fn from(value: bool) -> Truth {
        if value { Truth::Yes } else { Truth::No }
    }
}

/// Returns the most-plus power of an eye, the size of its most-minus power, its cylinder and twice
/// its spherical equivalent.
pub(super) struct Powers {
    pub hyperopia: Range,
    pub myopia: Range,
    pub astigmatism: Range,
    pub twice_equivalent: Range,
}

impl Powers {
    pub fn of(eye: &InstrumentEye) -> Powers {
        let s = eye.sphere.map_or(Range::UNKNOWN, Power::range);
        let c = eye.cylinder.map_or(Range::UNKNOWN, Power::range);
        Powers {
            hyperopia: s.larger(s.plus(c)),
            myopia: s.negated().larger(s.plus(c).negated()),
            astigmatism: c.magnitude(),
            twice_equivalent: s.times(2).plus(c),
        }
    }
}
