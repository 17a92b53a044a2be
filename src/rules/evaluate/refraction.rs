//! Refraction criteria, by interval arithmetic on what the instrument gave.

use std::fmt::Write;

use crate::domain::codes::YesNo;
use crate::domain::outcome::{Answer, Margin, Open};
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

/// Returns the threshold as printed, in thousandths.
fn printed(criterion: &Criterion) -> i32 {
    match criterion.test {
        Test::MoreThanDiopters(v) | Test::DioptersOrMore(v) => v,
        _ => 0,
    }
}

/// Says what does not cross the threshold: "4.00 D or less", "less than 4.00 D".
fn within(criterion: &Criterion) -> String {
    let limit = Diopters(printed(criterion)).unsigned();
    match criterion.test {
        Test::DioptersOrMore(_) => format!("less than {} D", limit.trim()),
        _ => format!("{} D or less", limit.trim()),
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
    let by_size = ranges.map(|range| against(range, limit));
    let mut answers = by_size;
    if let Some(beyond) = criterion.axis_beyond {
        for (answer, eye) in answers.iter_mut().zip(&eyes) {
            *answer = with_axis(*answer, eye, beyond);
        }
    }
    let mut out = Answered::new(either_eye(answers), words(criterion.measure, &eyes, ranges));
    out.by_eye = Some(answers);
    out.eye = deciding_eye(answers);
    // What an axis sets aside has no distance to the threshold.
    let [right, left] = [0, 1].map(|i| {
        if answers[i] == by_size[i] {
            ranges[i]
        } else {
            Range::UNKNOWN
        }
    });
    out.margin = margin([right, left], answers, printed(criterion));
    let name = criterion.measure.title();
    match out.answer {
        Answer::Refer => {
            let whose = out.eye.map_or_else(|| "both eyes".to_owned(), in_the);
            out.would_change =
                format!("{name} of {} in {whose} would not refer", within(criterion));
        }
        Answer::Pass => {
            let whose = nearer(ranges).map_or_else(|| "either eye".to_owned(), in_the);
            let axis = criterion.axis_beyond.map_or_else(String::new, |beyond| {
                format!(", axis more than {beyond}° from 90 and 180,")
            });
            out.would_change = format!(
                "{name} of {}{axis} in {whose} would not pass",
                criterion.threshold
            );
        }
        Answer::Unknown => out.open = why_open(&eyes),
    }
    out
}

fn in_the(eye: Eye) -> String {
    format!("the {}", eye.title())
}

/// Returns the eye with the larger value; none where both are alike or one is not bounded.
fn nearer(ranges: [Range; 2]) -> Option<Eye> {
    match (ranges[0].high?, ranges[1].high?) {
        (right, left) if right > left => Some(Eye::Right),
        (right, left) if left > right => Some(Eye::Left),
        _ => None,
    }
}

/// Says why what an instrument gave decides nothing.
fn why_open(eyes: &[InstrumentEye; 2]) -> Open {
    if eyes
        .iter()
        .any(|e| e.sphere.is_none() || e.cylinder.is_none())
    {
        Open::NotDone
    } else {
        Open::NotDecided
    }
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
            (range, _) => in_dioptres(range, measure == Measure::Astigmatism),
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

/// Returns a power that may lie in a range; one that is not above zero is none, unless it is shown.
pub(in crate::rules) fn in_dioptres(range: Range, zero_shown: bool) -> String {
    let positive = |v: i32| {
        if v <= 0 && !zero_shown {
            "none".to_owned()
        } else {
            format!("{} D", Diopters(v).unsigned().trim())
        }
    };
    match (range.low, range.high) {
        (Some(low), Some(high)) if low == high => positive(low),
        (Some(low), Some(high)) => format!("{} to {}", positive(low), positive(high)),
        (Some(low), None) if low > 0 => at_least(low),
        (None, Some(high)) => format!("{} at most", positive(high)),
        _ => "not known".to_owned(),
    }
}

/// Returns a lower bound in words. Readings are hundredths, so that a bound one thousandth above one is
/// everything above it.
fn at_least(low: i32) -> String {
    if low % 10 == 1 {
        format!("more than {} D", Diopters(low - 1).unsigned().trim())
    } else {
        format!("{} D or more", Diopters(low).unsigned().trim())
    }
}

fn through_glasses(facts: &Facts<'_>) -> Option<Answered> {
    (facts.readings.instrument_worn == Some(YesNo::Yes)).then(|| {
        let mut out = Answered::open(Open::NotJudged, "measured through glasses");
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
    let limit = printed(criterion);
    let measured = match metric {
        Metric::Meridional => along.map(|v| limit - v),
        Metric::EquivalentOrCylinder
            if by_equivalent == Answer::Pass && by_cylinder == Answer::Refer =>
        {
            cylinders.low.map(|v| limit - v)
        }
        _ => match answer {
            Answer::Refer => equivalents.low,
            Answer::Pass => equivalents.high,
            Answer::Unknown => None,
        }
        .map(|v| limit - (v + 1) / 2),
    };
    out.margin = measured.map_or(Margin::None, Margin::Diopters);
    if metric == Metric::SphericalEquivalent && by_equivalent == Answer::Pass {
        notes(along, cylinders, once, &mut out.remarks);
    }
    match answer {
        Answer::Refer => {
            out.would_change = format!("a difference of {} would not refer", within(criterion));
        }
        Answer::Pass => {
            out.would_change = format!("a difference of {} would not pass", criterion.threshold);
        }
        Answer::Unknown => out.open = why_open(&[right, left]),
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
        (Some(low), None) if low > 0 => format!("anisometropia {}", at_least(low)),
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
