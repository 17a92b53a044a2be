//! Refraction criteria, by interval arithmetic on what the instrument gave.

use std::fmt::Write;

use crate::domain::codes::YesNo;
use crate::domain::outcome::{Answer, Margin};
use crate::domain::readings::{Eye, InstrumentEye, Readings};
use crate::domain::refraction::{Axis, Diopters, Power, Range, Refraction};
use crate::rules::{Criterion, Measure, Metric, Test};

use super::set::eye_words;
use super::{Answered, Facts, deciding_eye, either_eye};

/// Returns the largest value that still passes, in thousandths times `scale`.
fn limit(criterion: &Criterion, scale: i32) -> Option<i32> {
    match criterion.test {
        Test::MoreThanDiopters(limit) => Some(limit.saturating_mul(scale)),
        Test::DioptersOrMore(limit) => Some(limit.saturating_mul(scale) - 1),
        _ => None,
    }
}

/// Returns the largest difference that a criterion in dioptres still passes, in thousandths.
pub(in crate::rules) fn largest_passing(criterion: &Criterion) -> Option<i32> {
    limit(criterion, 1)
}

fn against(range: Range, limit: i32) -> Answer {
    if range.low.is_some_and(|low| low > limit) {
        Answer::Refer
    } else if range.high.is_some_and(|high| high <= limit) {
        Answer::Pass
    } else {
        Answer::Unknown
    }
}

fn sphere(eye: &InstrumentEye) -> Range {
    eye.sphere.map_or(Range::UNKNOWN, Power::range)
}

fn cylinder(eye: &InstrumentEye) -> Range {
    eye.cylinder.map_or(Range::UNKNOWN, Power::range)
}

fn quantity(measure: Measure, eye: &InstrumentEye) -> Range {
    let (s, c) = (sphere(eye), cylinder(eye));
    match measure {
        Measure::Hyperopia => s.larger(s.plus(c)),
        Measure::Myopia => s.negated().larger(s.plus(c).negated()),
        _ => c.magnitude(),
    }
}

/// Judges hyperopia, myopia or astigmatism of each eye.
pub(super) fn each_eye(criterion: &Criterion, facts: &Facts<'_>) -> Answered {
    let Some(limit) = limit(criterion, 1) else {
        return Answered::new(Answer::Unknown, "not a threshold in dioptres");
    };
    if let Some(unknown) = through_glasses(facts) {
        return unknown;
    }
    let eyes = facts.readings.instrument.both();
    let ranges = eyes.map(|eye| quantity(criterion.measure, &eye));
    let mut answers = ranges.map(|range| against(range, limit));
    if let Some(beyond) = criterion.axis_beyond {
        for (answer, eye) in answers.iter_mut().zip(&eyes) {
            *answer = with_axis(*answer, eye, beyond);
        }
    }
    let mut out = Answered::new(either_eye(answers), words(criterion.measure, &eyes, ranges));
    out.by_eye = Some(answers);
    out.eye = deciding_eye(answers);
    out.margin = margin(ranges, answers, limit);
    if out.answer == Answer::Refer {
        let passes = Diopters(limit).unsigned();
        let name = criterion.measure.title();
        out.would_change = match out.eye {
            Some(eye) => format!(
                "{name} of {} D or less in the {} would not refer",
                passes.trim(),
                eye.title()
            ),
            None => format!(
                "{name} of {} D or less in both eyes would not refer",
                passes.trim()
            ),
        };
    }
    out
}

/// Keeps an oblique cylinder and sets one on the main meridians aside.
fn with_axis(answer: Answer, eye: &InstrumentEye, beyond: u8) -> Answer {
    match (answer, eye.axis) {
        (Answer::Pass, _) => Answer::Pass,
        (_, Some(axis)) if axis.from_the_main_meridians() <= beyond => Answer::Pass,
        (answer, Some(_)) => answer,
        (_, None) => Answer::Unknown,
    }
}

fn margin(ranges: [Range; 2], answers: [Answer; 2], limit: i32) -> Margin {
    let all = either_eye(answers);
    ranges
        .into_iter()
        .zip(answers)
        .filter(|(_, answer)| *answer == all)
        .filter_map(|(range, _)| {
            if all == Answer::Refer {
                range.low
            } else {
                range.high
            }
        })
        .max()
        .filter(|_| all != Answer::Unknown)
        .map_or(Margin::None, |value| Margin::Diopters(limit - value))
}

fn words(measure: Measure, eyes: &[InstrumentEye; 2], ranges: [Range; 2]) -> String {
    let of = |eye: Eye, i: usize| {
        let value = match (ranges[i], &eyes[i]) {
            (
                _,
                InstrumentEye {
                    sphere: None,
                    cylinder: None,
                    ..
                },
            ) => "no reading".to_owned(),
            (range, _) => in_dioptres(range, measure),
        };
        eye_words(eye, &value)
    };
    format!(
        "{}: {}, {}",
        measure.title(),
        of(Eye::Right, 0),
        of(Eye::Left, 1)
    )
}

fn in_dioptres(range: Range, measure: Measure) -> String {
    let positive = |v: i32| {
        if v <= 0 && measure != Measure::Astigmatism {
            "none".to_owned()
        } else {
            format!("{} D", Diopters(v).unsigned().trim())
        }
    };
    match (range.low, range.high) {
        (Some(low), Some(high)) if low == high => positive(low),
        (Some(low), Some(high)) => format!("{} to {}", positive(low), positive(high)),
        (Some(low), None) if low > 0 => format!("{} or more", positive(low)),
        (None, Some(high)) => format!("{} at most", positive(high)),
        _ => "not known".to_owned(),
    }
}

fn through_glasses(facts: &Facts<'_>) -> Option<Answered> {
    (facts.readings.instrument_worn == Some(YesNo::Yes)).then(|| {
        let mut out = Answered::new(Answer::Unknown, "measured through glasses");
        out.remarks
            .push("measured through glasses: it says nothing of the eye alone".to_owned());
        out
    })
}

/// Judges the difference of refraction between the eyes.
pub(super) fn anisometropia(criterion: &Criterion, facts: &Facts<'_>) -> Answered {
    let (Some(once), Some(twice)) = (limit(criterion, 1), limit(criterion, 2)) else {
        return Answered::new(Answer::Unknown, "not a threshold in dioptres");
    };
    if let Some(unknown) = through_glasses(facts) {
        return unknown;
    }
    let [right, left] = facts.readings.instrument.both();
    let twice_equivalent = |eye: &InstrumentEye| sphere(eye).times(2).plus(cylinder(eye));
    let equivalents = twice_equivalent(&right)
        .plus(twice_equivalent(&left).negated())
        .magnitude();
    let cylinders = cylinder(&right)
        .magnitude()
        .plus(cylinder(&left).magnitude().negated())
        .magnitude();
    let along = meridional(facts.readings);
    let metric = criterion.metric.unwrap_or(Metric::SphericalEquivalent);
    let by_equivalent = against(equivalents, twice);
    let by_cylinder = against(cylinders, once);
    let answer = match metric {
        Metric::EquivalentOrCylinder => either_eye([by_equivalent, by_cylinder]),
        Metric::Meridional => along.map_or(Answer::Unknown, |v| against(Range::exactly(v), once)),
        _ => by_equivalent,
    };
    let mut out = Answered::new(
        answer,
        reading(metric, equivalents, cylinders, along, by_equivalent),
    );
    let measured = match metric {
        Metric::Meridional => along.map(|v| once - v),
        Metric::EquivalentOrCylinder
            if by_equivalent == Answer::Pass && by_cylinder == Answer::Refer =>
        {
            cylinders.low.map(|v| once - v)
        }
        _ => match answer {
            Answer::Refer => equivalents.low,
            Answer::Pass => equivalents.high,
            Answer::Unknown => None,
        }
        .map(|v| once - (v + 1) / 2),
    };
    out.margin = measured.map_or(Margin::None, Margin::Diopters);
    if metric == Metric::SphericalEquivalent && by_equivalent == Answer::Pass {
        notes(along, cylinders, once, &mut out.remarks);
    }
    if answer == Answer::Refer {
        out.would_change = format!(
            "a difference of {} D or less would not refer",
            Diopters(once).unsigned().trim()
        );
    }
    out
}

/// Returns the largest difference in power between the eyes along any meridian, in thousandths.
pub(in crate::rules) fn meridional(readings: &Readings) -> Option<i32> {
    let [right, left] = readings.instrument.both();
    let both = refraction(&right).zip(refraction(&left));
    both.map(|(r, l)| r.meridional_difference(l).0)
}

fn reading(
    metric: Metric,
    twice: Range,
    cylinders: Range,
    along: Option<i32>,
    by_equivalent: Answer,
) -> String {
    if metric == Metric::Meridional {
        return along.map_or_else(
            || "anisometropia not known".to_owned(),
            |v| {
                format!(
                    "anisometropia {} D along one meridian",
                    Diopters(v).unsigned().trim()
                )
            },
        );
    }
    // Twice the equivalent is whole; half of it is shown to the thousandth.
    let half = Range {
        low: twice.low.map(|v| v / 2),
        high: twice.high.map(|v| (v + 1) / 2),
    };
    let mut text = match (half.low, half.high) {
        (Some(_), Some(high)) if twice.low == twice.high => {
            format!("anisometropia {} D", Diopters(high).unsigned().trim())
        }
        (Some(low), None) if low > 0 => {
            format!(
                "anisometropia {} D or more",
                Diopters(low).unsigned().trim()
            )
        }
        _ => "anisometropia not known".to_owned(),
    };
    if metric == Metric::EquivalentOrCylinder
        && by_equivalent != Answer::Refer
        && let Some(v) = cylinders.low.filter(|_| cylinders.low == cylinders.high)
    {
        let _ = write!(
            text,
            ", cylinders differ by {} D",
            Diopters(v).unsigned().trim()
        );
    }
    text
}

/// Notes what a comparison by spherical equivalent does not see; it does not refer.
fn notes(along: Option<i32>, cylinders: Range, limit: i32, out: &mut Vec<String>) {
    if let Some(along) = along.filter(|v| *v > limit) {
        out.push(format!(
            "{} D between the eyes in one meridian; the spherical equivalents agree, which does not refer",
            Diopters(along).unsigned().trim()
        ));
    }
    if let Some(low) = cylinders.low.filter(|v| *v > limit) {
        out.push(format!(
            "the cylinders differ by {} D, which does not refer",
            Diopters(low).unsigned().trim()
        ));
    }
}

/// Returns the refraction of an eye when every part of it was measured.
fn refraction(eye: &InstrumentEye) -> Option<Refraction> {
    let sphere = eye.sphere?.value()?;
    let cylinder = eye.cylinder?.value()?;
    let axis = match eye.axis {
        Some(axis) => axis,
        None if cylinder.0 == 0 => Axis::new(180)?,
        None => return None,
    };
    Some(Refraction {
        sphere,
        cylinder,
        axis,
    })
}
