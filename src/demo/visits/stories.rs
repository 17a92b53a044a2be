//! What can happen to a child at the table, as readings.

use crate::demo::random::Random;
use crate::domain::acuity::{Acuity, Line, Notation, Step};
use crate::domain::age::AgeMonths;
use crate::domain::codes::{
    AcuityMethod, Correction, Cover, DeviatingEye, Direction, InstrumentResult, PlusLens, Reflex,
    Side, SignKind, Status, YesNo,
};
use crate::domain::readings::{AcuityResult, Eyes, InstrumentEye, NotTestable, Readings, Sign};
use crate::domain::refraction::{Axis, Diopters, Power};

/// One thing that happens on a screening day.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Story {
    /// Both lines pass, the eyes alike.
    Pass,
    /// Both lines pass, one step between the eyes.
    OneStep,
    /// Read with glasses on.
    PassWithGlasses,
    /// One eye fails its line and lies two steps behind the other.
    TwoSteps,
    /// Both lines pass and the eyes are two steps apart.
    TwoStepsPassing,
    /// Three steps apart.
    ThreeSteps,
    /// Both eyes fail their line.
    LineFails,
    /// One eye is far below its line.
    FarBelow,
    /// One eye counts fingers.
    CountsFingers,
    /// Only the critical line was shown.
    CriticalLine,
    /// The line is read through the plus lens.
    PlusLensRead,
    /// Color plates are missed; the eyes pass.
    ColorPlates,
    /// The cover test shows a constant squint.
    ConstantSquint,
    /// One red reflex differs from the other.
    UnequalReflex,
    /// A white pupil is seen.
    WhitePupil,
    /// Too shy for the chart, twice.
    NotTestable,
    /// Objects to the covering of one eye only.
    ObjectsToCover,
    /// Not testable by chart; the instrument finds the eyes unequal.
    InstrumentAnisometropia,
    /// Not testable by chart; the instrument finds nothing in either eye.
    InstrumentClear,
    /// Not testable by chart; the instrument reads one eye only.
    InstrumentHalf,
    /// Owns glasses that are at home today.
    GlassesAtHome,
    /// Owns glasses that are broken.
    GlassesBroken,
    /// Not at school.
    Absent,
    /// Went home before the second eye.
    LeftEarly,
    /// The guardian opted out.
    OptedOut,
    /// Already under care.
    UnderCare,
}

impl Story {
    /// Says whether it can happen to a child who owns glasses or not, of this age in months.
    pub fn suits(self, glasses: bool, months: u32) -> bool {
        match self {
            Story::PassWithGlasses | Story::GlassesAtHome | Story::GlassesBroken => glasses,
            Story::NotTestable
            | Story::ObjectsToCover
            | Story::InstrumentAnisometropia
            | Story::InstrumentClear
            | Story::InstrumentHalf => !glasses && (1..84).contains(&months),
            Story::PlusLensRead => !glasses && months >= 72,
            _ => !glasses && months > 0,
        }
    }

    /// Returns the readings of such a visit.
    #[allow(clippy::too_many_lines)] // one arm per story, read side by side
    pub fn readings(self, random: &mut Random, age: Option<AgeMonths>) -> Readings {
        let mut r = Readings {
            status: Some(Status::Present),
            correction: Some(Correction::None),
            signs: Some(Vec::new()),
            ..Readings::default()
        };
        let best = i32::from(age.is_none_or(|age| age.0 < 84) || random.percent(40));
        // Which eye is the weaker one.
        let right = random.percent(50);
        match self {
            Story::Pass => {
                r.distance = eyes(read(best), letters(random, best));
                passes(&mut r, random);
            }
            Story::OneStep => {
                r.distance = ordered(right, read(best), read(best + 1));
                passes(&mut r, random);
            }
            Story::PassWithGlasses => {
                r.correction = Some(Correction::Worn);
                r.distance = eyes(read(1), read(1 + i32::from(random.percent(30))));
            }
            Story::TwoSteps => r.distance = ordered(right, read(1), read(3)),
            Story::TwoStepsPassing => r.distance = ordered(right, read(0), read(2)),
            Story::ThreeSteps => r.distance = ordered(right, read(1), read(4)),
            Story::LineFails => r.distance = eyes(read(3), read(3 + i32::from(right))),
            Story::FarBelow => r.distance = ordered(right, read(1), read(8)),
            Story::CountsFingers => {
                r.distance = ordered(right, read(0), Acuity::CountsFingers.into());
            }
            Story::CriticalLine => {
                r.acuity_method = Some(AcuityMethod::CriticalLine);
                let passed = Acuity::AtLeast(Line::at(Step(2), Notation::Feet));
                r.distance = eyes(passed.into(), passed.into());
            }
            Story::PlusLensRead => {
                r.distance = eyes(read(0), read(0));
                r.plus_lens = Some(PlusLens::Read);
            }
            Story::ColorPlates => {
                r.distance = eyes(read(1), read(1));
                r.plates_shown = Some(8);
                r.plates_missed = Some(5);
            }
            Story::ConstantSquint => {
                r.distance = ordered(right, read(1), read(2));
                r.cover = Some(Cover::Constant);
                r.deviating_eye = Some(if right {
                    DeviatingEye::Right
                } else {
                    DeviatingEye::Left
                });
                r.deviation_direction = Some(Direction::In);
                r.signs = Some(vec![Sign {
                    kind: SignKind::KnownSquint,
                    side: None,
                }]);
            }
            Story::UnequalReflex => {
                r.distance = eyes(read(1), read(1));
                r.red_reflex = Eyes {
                    right: Some(Reflex::Normal),
                    left: Some(Reflex::Unequal),
                };
            }
            Story::WhitePupil => {
                r.distance = ordered(right, read(1), read(6));
                r.signs = Some(vec![Sign {
                    kind: SignKind::WhitePupil,
                    side: Some(if right { Side::Right } else { Side::Left }),
                }]);
            }
            Story::NotTestable => r.distance = no_chart(NotTestable::Shy),
            Story::ObjectsToCover => {
                r.distance = Eyes {
                    right: Some(read(2)),
                    left: Some(AcuityResult::NotTestable(NotTestable::ObjectsToCoverRight)),
                };
            }
            Story::InstrumentAnisometropia => {
                r.distance = no_chart(NotTestable::DoesNotUnderstand);
                r.instrument = Eyes {
                    right: measured(750, -500, 175),
                    left: measured(3_250, -750, 10),
                };
            }
            Story::InstrumentClear => {
                r.distance = no_chart(NotTestable::Fatigue);
                r.instrument = Eyes {
                    right: measured(1_000, -500, 180),
                    left: measured(1_250, -250, 5),
                };
            }
            Story::InstrumentHalf => {
                r.distance = no_chart(NotTestable::Shy);
                r.instrument = Eyes {
                    right: InstrumentEye {
                        result: Some(InstrumentResult::NoReading),
                        ..InstrumentEye::default()
                    },
                    left: measured(1_250, -500, 180),
                };
            }
            Story::GlassesAtHome => {
                r.correction = Some(Correction::LeftAtHome);
                r.distance = eyes(read(6), read(5));
            }
            Story::GlassesBroken => {
                r.correction = Some(Correction::BrokenOrLost);
                r.distance = eyes(read(4), read(5));
            }
            Story::LeftEarly => {
                r.status = Some(Status::LeftEarly);
                r.distance.right = Some(read(1));
            }
            Story::Absent | Story::OptedOut | Story::UnderCare => {
                r = Readings {
                    status: Some(match self {
                        Story::Absent => Status::Absent,
                        Story::OptedOut => Status::OptedOut,
                        _ => Status::UnderCare,
                    }),
                    ..Readings::default()
                };
            }
        }
        if r.instrument != Eyes::default() {
            r.instrument_worn = Some(YesNo::No);
        }
        r
    }
}

/// What is often done beside the chart with a child who passes it.
fn passes(r: &mut Readings, random: &mut Random) {
    if random.percent(60) {
        r.plus_lens = Some(PlusLens::Blurred);
    }
    if random.percent(25) {
        r.plates_shown = Some(8);
        r.plates_missed = Some(0);
    }
    if random.percent(30) {
        r.stereo_shown = Some(6);
        r.stereo_correct = Some(5 + u8::from(random.percent(70)));
    }
    if random.percent(40) {
        r.red_reflex = Eyes {
            right: Some(Reflex::Normal),
            left: Some(Reflex::Normal),
        };
        r.cover = Some(Cover::None);
    }
}

fn read(step: i32) -> AcuityResult {
    with_letters(step, 0)
}

fn with_letters(step: i32, letters: i8) -> AcuityResult {
    AcuityResult::Read(Acuity::Read {
        line: Line::at(Step(step), Notation::Feet),
        letters,
    })
}

/// The same line, sometimes with a letter missed or read beyond.
fn letters(random: &mut Random, step: i32) -> AcuityResult {
    with_letters(step, random.pick([0, 0, 0, -1, 1]))
}

fn eyes(right: AcuityResult, left: AcuityResult) -> Eyes<Option<AcuityResult>> {
    Eyes {
        right: Some(right),
        left: Some(left),
    }
}

/// The better and the weaker eye, the weaker on the right or on the left.
fn ordered(
    weaker_right: bool,
    better: AcuityResult,
    weaker: AcuityResult,
) -> Eyes<Option<AcuityResult>> {
    if weaker_right {
        eyes(weaker, better)
    } else {
        eyes(better, weaker)
    }
}

fn no_chart(why: NotTestable) -> Eyes<Option<AcuityResult>> {
    eyes(
        AcuityResult::NotTestable(why),
        AcuityResult::NotTestable(why),
    )
}

fn measured(sphere: i32, cylinder: i32, axis: i64) -> InstrumentEye {
    InstrumentEye {
        sphere: Some(Power::Value(Diopters(sphere))),
        cylinder: Some(Power::Value(Diopters(cylinder))),
        axis: Axis::new(axis),
        result: Some(InstrumentResult::Ok),
        ..InstrumentEye::default()
    }
}
