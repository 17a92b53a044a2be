//! What was recorded of one child on one visit, typed.
//!
//! A value is set from text by its [`Field`](crate::domain::field::Field) and read back as canonical text, so that the results
//! file, the store, the command line and the screens share one understanding of each field.

mod contradictions;
mod text;

use crate::domain::acuity::{Acuity, Distances, Notation};
use crate::domain::codes::{
    AcuityMethod, Correction, Cover, DeviatingEye, Direction, History, InstrumentResult, PlusLens,
    Reflex, Side, SignKind, Status, YesNo, code_list,
};
use crate::domain::refraction::{Axis, Power};

pub use text::{NOTE_CHARS, ReadingContext};

code_list! {
    /// Why a test could not be done with this child.
    NotTestable {
        Shy = "shy", "shy";
        DoesNotUnderstand = "does_not_understand", "does not understand";
        ObjectsToCoverRight = "objects_to_cover_right", "objects to covering the right eye";
        ObjectsToCoverLeft = "objects_to_cover_left", "objects to covering the left eye";
        Fatigue = "fatigue", "tired";
        Other = "other", "other reason";
    }
}

/// An acuity test of one eye that was tried.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum AcuityResult {
    /// It gave a value.
    Read(Acuity),
    /// It could not be done.
    NotTestable(NotTestable),
}

impl From<Acuity> for AcuityResult {
    fn from(acuity: Acuity) -> Self {
        AcuityResult::Read(acuity)
    }
}

impl AcuityResult {
    /// Returns the value, if there is one.
    pub fn acuity(self) -> Option<Acuity> {
        match self {
            AcuityResult::Read(acuity) => Some(acuity),
            AcuityResult::NotTestable(_) => None,
        }
    }

    /// Returns the result in words.
    pub fn in_words(self) -> String {
        match self {
            AcuityResult::Read(acuity) => acuity.in_words(),
            AcuityResult::NotTestable(why) => format!("not testable ({})", why.title()),
        }
    }
}

impl std::fmt::Display for AcuityResult {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match self {
            AcuityResult::Read(acuity) => acuity.fmt(f),
            AcuityResult::NotTestable(NotTestable::Other) => f.write_str("NT"),
            AcuityResult::NotTestable(why) => write!(f, "NT:{}", why.word()),
        }
    }
}

/// One value for each eye; right is always first.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default)]
pub struct Eyes<T> {
    /// Right eye.
    pub right: T,
    /// Left eye.
    pub left: T,
}

impl<T: Copy> Eyes<T> {
    /// Returns both values, right first.
    pub fn both(&self) -> [T; 2] {
        [self.right, self.left]
    }

    /// Returns the value of one eye.
    pub fn of(&self, eye: Eye) -> T {
        match eye {
            Eye::Right => self.right,
            Eye::Left => self.left,
        }
    }
}

/// One eye.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Eye {
    /// Right eye.
    Right,
    /// Left eye.
    Left,
}

impl Eye {
    /// Both eyes in the order of every screen and file.
    pub const BOTH: [Eye; 2] = [Eye::Right, Eye::Left];

    /// Returns `right eye` or `left eye`.
    pub fn title(self) -> &'static str {
        match self {
            Eye::Right => "right eye",
            Eye::Left => "left eye",
        }
    }
}

/// What an instrument measured in one eye.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct InstrumentEye {
    /// Sphere in dioptres.
    pub sphere: Option<Power>,
    /// Cylinder in dioptres; unknown when blank, none when zero.
    pub cylinder: Option<Power>,
    /// Axis in degrees.
    pub axis: Option<Axis>,
    /// Whether there was a reading at all.
    pub result: Option<InstrumentResult>,
    /// Pupil in hundredths of a millimetre.
    pub pupil: Option<Hundredths>,
    /// Media opacity in hundredths of a millimetre.
    pub opacity: Option<Hundredths>,
    /// Margin reflex distance in hundredths of a millimetre.
    pub reflex_distance: Option<Hundredths>,
}

/// A small measured quantity in hundredths of its unit.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Hundredths(pub i32);

impl std::fmt::Display for Hundredths {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        let (sign, v) = (if self.0 < 0 { "-" } else { "" }, self.0.abs());
        match v % 100 {
            0 => write!(f, "{sign}{}", v / 100),
            part if part % 10 == 0 => write!(f, "{sign}{}.{}", v / 100, part / 10),
            part => write!(f, "{sign}{}.{part:02}", v / 100),
        }
    }
}

/// A sign and the eye it was seen in, where that was said.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Sign {
    /// What was seen.
    pub kind: SignKind,
    /// Where.
    pub side: Option<Side>,
}

impl std::fmt::Display for Sign {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(self.kind.word())?;
        self.side
            .map_or(Ok(()), |side| write!(f, ":{}", side.word()))
    }
}

/// All values of one visit. Every field is unknown until somebody recorded it.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Readings {
    /// Whether and how the child took part.
    pub status: Option<Status>,
    /// How far the chart was read.
    pub acuity_method: Option<AcuityMethod>,
    /// Glasses or contact lenses during the acuity test.
    pub correction: Option<Correction>,
    /// Letters on a line of the chart, where it is not five.
    pub letters_per_line: Option<u8>,
    /// The chart's own distance in millimetres, and how it was written.
    pub chart_distance: Option<Distance>,
    /// The distance used in millimetres.
    pub used_distance: Option<Distance>,
    /// Distance acuity of each eye.
    pub distance: Eyes<Option<AcuityResult>>,
    /// Distance acuity with both eyes open.
    pub distance_both: Option<AcuityResult>,
    /// Near acuity of each eye.
    pub near: Eyes<Option<AcuityResult>>,
    /// Near acuity with both eyes open.
    pub near_both: Option<AcuityResult>,
    /// Near testing distance in hundredths of a centimetre.
    pub near_distance_cm: Option<Hundredths>,
    /// Plus lens test.
    pub plus_lens: Option<PlusLens>,
    /// Stereo presentations answered correctly.
    pub stereo_correct: Option<u8>,
    /// Stereo presentations shown.
    pub stereo_shown: Option<u8>,
    /// Cover test.
    pub cover: Option<Cover>,
    /// Size of a manifest deviation in hundredths of a prism dioptre.
    pub deviation_pd: Option<Hundredths>,
    /// Which eye deviates.
    pub deviating_eye: Option<DeviatingEye>,
    /// Where it turns.
    pub deviation_direction: Option<Direction>,
    /// Red reflex of each eye.
    pub red_reflex: Eyes<Option<Reflex>>,
    /// Color plates missed.
    pub plates_missed: Option<u8>,
    /// Color plates shown.
    pub plates_shown: Option<u8>,
    /// Instrument values of each eye.
    pub instrument: Eyes<InstrumentEye>,
    /// Whether glasses were worn at the instrument.
    pub instrument_worn: Option<YesNo>,
    /// Signs seen: none when nobody looked, empty when somebody looked and saw none.
    pub signs: Option<Vec<Sign>>,
    /// History: none when nobody asked, empty when there is none.
    pub history: Option<Vec<History>>,
    /// Whether the chart could be tested at all.
    pub testable: Option<YesNo>,
    /// Why not.
    pub not_testable_reason: Option<NotTestable>,
    /// What a person wants to be read beside the values: one line, never judged.
    pub note: Option<String>,
}

/// A distance as written, in metres or feet.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Distance {
    /// The value in thousandths of its unit.
    pub thousandths: u32,
    /// Whether the unit is feet (else metres).
    pub in_feet: bool,
}

impl Distance {
    /// Returns the distance in millimetres (1 ft is 304.8 mm).
    pub fn millimetres(self) -> u32 {
        if self.in_feet {
            (self.thousandths * 3048 + 5_000) / 10_000
        } else {
            self.thousandths
        }
    }

    /// Makes a distance from millimetres, written in feet or metres.
    pub fn of_millimetres(millimetres: u32, in_feet: bool) -> Distance {
        Distance {
            // A foot is 304.8 mm.
            thousandths: if in_feet {
                (millimetres * 10_000 + 1_524) / 3_048
            } else {
                millimetres
            },
            in_feet,
        }
    }

    /// Returns the distance with its unit.
    pub fn in_words(self) -> String {
        format!(
            "{} {}",
            self.number(),
            if self.in_feet { "ft" } else { "m" }
        )
    }

    pub(crate) fn number(self) -> String {
        let (whole, part) = (self.thousandths / 1000, self.thousandths % 1000);
        if part == 0 {
            whole.to_string()
        } else {
            format!("{whole}.{part:03}")
                .trim_end_matches('0')
                .to_owned()
        }
    }
}

impl Readings {
    /// Returns the chart's and the used distance, when both are known.
    pub fn distances(&self) -> Option<Distances> {
        self.chart_distance
            .zip(self.used_distance)
            .map(|(chart, used)| Distances {
                chart_mm: chart.millimetres(),
                used_mm: used.millimetres(),
            })
    }

    /// Says whether anything was tested or looked at (status and history are not tests).
    pub fn anything_tested(&self) -> bool {
        self.distance != Eyes::default()
            || self.near != Eyes::default()
            || self.distance_both.is_some()
            || self.near_both.is_some()
            || self.plus_lens.is_some()
            || self.stereo_correct.is_some()
            || self.cover.is_some()
            || self.deviation_pd.is_some()
            || self.red_reflex != Eyes::default()
            || self.plates_missed.is_some()
            || self.instrument != Eyes::default()
            || self.testable == Some(YesNo::No)
    }

    /// Says whether an entry of the history list was recorded.
    pub fn has_history(&self, what: History) -> bool {
        self.history
            .as_ref()
            .is_some_and(|list| list.contains(&what))
    }

    /// Says whether a sign was recorded, in whichever eye.
    pub fn has_sign(&self, what: SignKind) -> bool {
        self.signs
            .as_ref()
            .is_some_and(|list| list.iter().any(|sign| sign.kind == what))
    }

    /// Says whether the chart was judged impossible: said so, or not testable in both eyes.
    pub fn chart_not_testable(&self) -> bool {
        self.testable == Some(YesNo::No)
            || self
                .distance
                .both()
                .iter()
                .all(|eye| matches!(eye, Some(AcuityResult::NotTestable(_))))
    }

    /// Says whether distance acuity of any eye was tried and failed for not being testable.
    pub fn any_eye_not_testable(&self) -> bool {
        self.testable == Some(YesNo::No)
            || self
                .distance
                .both()
                .iter()
                .any(|e| matches!(e, Some(AcuityResult::NotTestable(_))))
    }

    /// Returns a notation to show derived lines in: that of the first acuity, else feet.
    pub fn notation(&self) -> Notation {
        self.distance
            .both()
            .into_iter()
            .chain(self.near.both())
            .flatten()
            .find_map(|r| r.acuity()?.line())
            .map_or(Notation::Feet, crate::domain::acuity::Line::notation)
    }
}
