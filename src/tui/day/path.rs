//! Which fields stand on the bench, in which order, and at which of them Enter stops.
//!
//! The order (common practice): glasses, history, signs, stereo, cover, distance, near, instrument,
//! red reflex, color, the plus lens last.

use crate::actions::BenchTests;
use crate::domain::acuity::Notation;
use crate::domain::codes::Cover;
use crate::domain::field::Field;
use crate::domain::readings::Readings;
use crate::domain::screening_test::ScreeningTest;

/// Fields that are entered together.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Group {
    /// Glasses or contact lenses.
    Glasses,
    /// What is told.
    History,
    /// What is seen.
    Signs,
    /// Stereo.
    Stereo,
    /// Cover test and deviation.
    Cover,
    /// The chart and the distance at which it was read.
    Chart,
    /// Distance acuity of each eye.
    Distance,
    /// Distance acuity, both eyes open.
    DistanceBoth,
    /// Near acuity.
    Near,
    /// Refraction by instrument.
    Instrument,
    /// Pupils, media and lids by instrument.
    Lids,
    /// Red reflex.
    RedReflex,
    /// Color plates.
    ColorPlates,
    /// Plus lens.
    PlusLens,
}

use Field as F;

impl Group {
    /// Every group in the order of the bench.
    pub const ALL: [Group; 14] = [
        Group::Glasses,
        Group::History,
        Group::Signs,
        Group::Stereo,
        Group::Cover,
        Group::Chart,
        Group::Distance,
        Group::DistanceBoth,
        Group::Near,
        Group::Instrument,
        Group::Lids,
        Group::RedReflex,
        Group::ColorPlates,
        Group::PlusLens,
    ];

    /// Returns what it is called where tests are chosen.
    pub fn title(self) -> &'static str {
        match self {
            Group::Glasses => "glasses or contact lenses",
            Group::History => "history",
            Group::Signs => "signs",
            Group::Stereo => "stereo",
            Group::Cover => "cover test and deviation",
            Group::Chart => "chart used: letters on a line, another distance",
            Group::Distance => "distance acuity, each eye",
            Group::DistanceBoth => "distance acuity, both eyes open",
            Group::Near => "near acuity, and its distance",
            Group::Instrument => "instrument refraction, both eyes",
            Group::Lids => "pupils, media opacity, lids by instrument",
            Group::RedReflex => "red reflex",
            Group::ColorPlates => "color plates",
            Group::PlusLens => "plus lens",
        }
    }

    /// Returns the fields it may hold, in order.
    pub fn fields(self) -> &'static [Field] {
        match self {
            Group::Glasses => &[F::CorrectionWorn],
            Group::History => &[F::History],
            Group::Signs => &[F::Signs],
            Group::Stereo => &[F::StereoCorrect, F::StereoShown],
            Group::Cover => &[
                F::Cover,
                F::DeviationPd,
                F::DeviatingEye,
                F::DeviationDirection,
            ],
            Group::Chart => &[
                F::LettersPerLine,
                F::ChartDistanceFt,
                F::UsedDistanceFt,
                F::ChartDistanceM,
                F::UsedDistanceM,
                F::Testable,
                F::NotTestableReason,
            ],
            Group::Distance => &[F::DistanceRight, F::DistanceLeft],
            Group::DistanceBoth => &[F::DistanceBoth],
            Group::Near => &[F::NearRight, F::NearLeft, F::NearBoth, F::NearDistanceCm],
            Group::Instrument => &[
                F::SphereRight,
                F::CylinderRight,
                F::AxisRight,
                F::SphereLeft,
                F::CylinderLeft,
                F::AxisLeft,
                F::InstrumentRight,
                F::InstrumentLeft,
                F::InstrumentWorn,
            ],
            Group::Lids => &[
                F::PupilMmRight,
                F::PupilMmLeft,
                F::OpacityMmRight,
                F::OpacityMmLeft,
                F::ReflexDistanceMmRight,
                F::ReflexDistanceMmLeft,
            ],
            Group::RedReflex => &[F::RedReflexRight, F::RedReflexLeft],
            Group::ColorPlates => &[F::PlatesMissed, F::PlatesShown],
            Group::PlusLens => &[F::PlusLens],
        }
    }

    /// Returns the group of a field; nothing for what has no row on the bench.
    pub fn of(field: Field) -> Option<Group> {
        Group::ALL.into_iter().find(|g| g.fields().contains(&field))
    }

    /// Returns the group that records a test.
    pub fn of_test(test: ScreeningTest) -> Group {
        match test {
            ScreeningTest::Distance => Group::Distance,
            ScreeningTest::Near => Group::Near,
            ScreeningTest::PlusLens => Group::PlusLens,
            ScreeningTest::Stereo => Group::Stereo,
            ScreeningTest::Cover => Group::Cover,
            ScreeningTest::RedReflex => Group::RedReflex,
            ScreeningTest::ColorPlates => Group::ColorPlates,
            ScreeningTest::Instrument => Group::Instrument,
        }
    }
}

/// Says whether a field of a group on the bench has a row although nothing is in it.
fn has_row(field: Field, readings: &Readings, notation: Notation) -> bool {
    let feet = notation == Notation::Feet;
    match field {
        F::DeviationPd | F::DeviatingEye | F::DeviationDirection => {
            matches!(readings.cover, Some(Cover::Intermittent | Cover::Constant))
        }
        F::ChartDistanceFt | F::UsedDistanceFt => feet,
        F::ChartDistanceM | F::UsedDistanceM => !feet,
        F::Testable | F::NotTestableReason => false,
        F::NearBoth | F::NearDistanceCm => readings.near.both().iter().any(Option::is_some),
        F::InstrumentWorn => readings
            .correction
            .is_none_or(|c| c != crate::domain::codes::Correction::None),
        _ => true,
    }
}

/// What a known chart answers by itself.
fn of_the_chart(field: Field) -> bool {
    matches!(
        field,
        F::LettersPerLine | F::ChartDistanceFt | F::ChartDistanceM
    )
}

/// Says whether only Tab goes to a field: what most visits leave empty does not cost each one a key.
fn by_tab_alone(field: Field) -> bool {
    matches!(
        field,
        F::InstrumentRight
            | F::InstrumentLeft
            | F::NearBoth
            | F::NearDistanceCm
            | F::Testable
            | F::NotTestableReason
    )
}

/// What stands on the bench, and at which of it Enter stops.
#[derive(Debug, Clone, Default)]
pub struct Plan {
    needed: Vec<Group>,
    offered: Vec<Group>,
    opened: Vec<Group>,
    instrument: bool,
    /// Whether the chart's own distance is known.
    chart_known: bool,
}

impl Plan {
    /// Makes the plan of a protocol and an age; with a task only that test's fields.
    pub fn new(tests: &BenchTests, task: Option<ScreeningTest>, asks_glasses: bool) -> Plan {
        let groups = |tests: &[ScreeningTest]| -> Vec<Group> {
            tests.iter().copied().map(Group::of_test).collect()
        };
        let mut plan = Plan {
            needed: groups(&tests.needed),
            offered: groups(&tests.offered),
            ..Plan::default()
        };
        if let Some(task) = task {
            plan.needed = vec![Group::of_test(task)];
            plan.offered.clear();
            if task == ScreeningTest::Instrument || asks_glasses {
                plan.offered.push(Group::Glasses);
            }
        } else {
            plan.offered
                .extend([Group::Glasses, Group::History, Group::Signs]);
        }
        plan
    }

    /// Leaves out what the station's chart answers.
    pub fn with_chart(&mut self) {
        self.chart_known = true;
    }

    /// Brings a group to the bench.
    pub fn open(&mut self, group: Group) {
        if !self.opened.contains(&group) {
            self.opened.push(group);
        }
    }

    /// Offers the instrument: the chart was not testable, or instrument values stand there already.
    pub fn offer_instrument(&mut self, offered: bool) {
        self.instrument = offered;
    }

    /// Says whether a group stands on the bench, whatever is in it.
    pub fn shows(&self, group: Group) -> bool {
        self.needed.contains(&group)
            || self.offered.contains(&group)
            || self.opened.contains(&group)
            || (self.instrument && group == Group::Instrument)
    }

    /// Says whether Enter stops at a field by itself.
    pub fn is_main(&self, field: Field) -> bool {
        !by_tab_alone(field)
            && Group::of(field).is_some_and(|group| {
                self.needed.contains(&group)
                    || self.opened.contains(&group)
                    || (self.instrument && group == Group::Instrument)
            })
    }

    /// Says whether Enter goes from one field to another: a needed one, or the rest of the same test.
    pub fn leads_to(&self, from: Field, to: Field) -> bool {
        self.is_main(to) || (Group::of(from) == Group::of(to) && !by_tab_alone(to))
    }

    /// Returns the fields on the bench in their order; `filled` says which hold something.
    pub fn fields(
        &self,
        filled: impl Fn(Field) -> bool,
        readings: &Readings,
        notation: Notation,
    ) -> Vec<Field> {
        Group::ALL
            .into_iter()
            .flat_map(|group| group.fields().iter().map(move |field| (group, *field)))
            .filter(|(group, field)| {
                filled(*field)
                    || (self.shows(*group)
                        && has_row(*field, readings, notation)
                        && !(self.chart_known && of_the_chart(*field)))
            })
            .map(|(_, field)| field)
            .collect()
    }
}
