//! What the focused field understood, in words, or how it is entered while it is empty.

use ratatui::text::Line;

use crate::domain::field::Field;
use crate::domain::readings::{AcuityResult, Distance, Eye, Readings};
use crate::domain::refraction::Power;
use crate::tui::day::bench::{Bench, State};
use crate::tui::day::kind::{AcuityOf, eye};
use crate::tui::text::safe;
use crate::tui::theme::Theme;

/// Returns the line under the fields.
pub fn line(bench: &Bench, theme: Theme) -> Line<'static> {
    if let Some(doubt) = bench.asking() {
        let keys = if doubt.fields.is_empty() {
            "Enter: yes"
        } else {
            "Enter: yes, F6 swaps"
        };
        return Line::styled(safe(&format!("{} {keys}", doubt.words)), theme.attention());
    }
    let Some(field) = bench.field() else {
        return Line::default();
    };
    match bench.state(field) {
        State::Empty => Line::styled(hint(field).unwrap_or_default(), theme.muted()),
        State::Invalid { .. } => Line::styled("not understood", theme.error()),
        State::Valid { .. } if bench.shows_as_typed(field) => {
            let who = eye(field).map_or(String::new(), |e| format!("{} ", e.title()));
            Line::styled(format!("{who}{}", safe(bench.typed(field))), theme.focus())
        }
        State::Valid { echo } => {
            let mut words = understood(&bench.readings, field).unwrap_or_default();
            if let Some(echo) = echo {
                words = if echo.contains(&words) {
                    echo.clone()
                } else {
                    format!("{words}: {echo}")
                };
            }
            if words.is_empty() {
                return Line::default();
            }
            let who = eye(field).map_or(String::new(), |e| format!("{} ", e.title()));
            Line::styled(format!("{who}{}", safe(&words)), theme.focus())
        }
    }
}

/// Returns how an empty field is entered, where that is not plain.
fn hint(field: Field) -> Option<&'static str> {
    use Field as F;
    Some(match field {
        F::SphereRight | F::SphereLeft => "-2.50, out of range >7.50 or <-7.50; x no reading",
        F::CylinderRight | F::CylinderLeft => "-1.25; 0 or ds for none",
        F::AxisRight | F::AxisLeft => "1 to 180; empty beside no cylinder",
        F::StereoCorrect => "how many were answered correctly",
        F::StereoShown => "how many were shown",
        F::PlatesMissed => "how many were missed",
        F::PlatesShown => "how many were shown",
        F::DeviationPd => "size in prism dioptres, if it was measured",
        F::ChartDistanceFt | F::ChartDistanceM => "the distance the chart is made for",
        F::UsedDistanceFt | F::UsedDistanceM => "the distance at which it was read",
        F::LettersPerLine => "letters on a line, where it is not five",
        F::NearDistanceCm => "the distance of the near chart",
        _ => return None,
    })
}

/// Returns a value in words, where it says more than what was typed.
pub fn understood(readings: &Readings, field: Field) -> Option<String> {
    use Field as F;
    if let Some(result) = readings.acuity_of(field) {
        return Some(AcuityResult::in_words(result));
    }
    let instrument = match eye(field) {
        Some(Eye::Left) => readings.instrument.left,
        _ => readings.instrument.right,
    };
    let count = |n: Option<u8>, words: &str| n.map(|n| format!("{n} {words}"));
    let millimetres = |h: Option<crate::domain::readings::Hundredths>| h.map(|h| format!("{h} mm"));
    match field {
        F::SphereRight | F::SphereLeft => instrument.sphere.map(power_words),
        F::CylinderRight | F::CylinderLeft => instrument.cylinder.map(|c| {
            if c.value().is_some_and(|v| v.0 == 0) {
                "no cylinder".to_owned()
            } else {
                power_words(c)
            }
        }),
        F::AxisRight | F::AxisLeft => instrument.axis.map(|a| format!("axis {a}°")),
        F::PupilMmRight | F::PupilMmLeft => millimetres(instrument.pupil),
        F::OpacityMmRight | F::OpacityMmLeft => millimetres(instrument.opacity),
        F::ReflexDistanceMmRight | F::ReflexDistanceMmLeft => {
            millimetres(instrument.reflex_distance)
        }
        F::StereoCorrect => count(readings.stereo_correct, "answered correctly"),
        F::StereoShown => count(readings.stereo_shown, "shown"),
        F::PlatesMissed => count(readings.plates_missed, "plates missed"),
        F::PlatesShown => count(readings.plates_shown, "plates shown"),
        F::DeviationPd => readings
            .deviation_pd
            .map(|size| format!("{size} prism dioptres")),
        F::LettersPerLine => count(readings.letters_per_line, "letters on a line"),
        F::NearDistanceCm => readings
            .near_distance_cm
            .map(|d| format!("near chart at {d} cm")),
        F::ChartDistanceFt | F::ChartDistanceM => readings
            .chart_distance
            .map(|d| format!("chart made for {}", d.in_words())),
        F::UsedDistanceFt | F::UsedDistanceM => readings
            .used_distance
            .map(|used| used_words(readings, used)),
        _ => None,
    }
}

fn power_words(power: Power) -> String {
    match power {
        Power::Value(v) => format!("{v} dioptres"),
        Power::Above(v) => format!("more than {v} dioptres, out of range"),
        Power::Below(v) => format!("less than {v} dioptres, out of range"),
    }
}

/// A shorter distance than the chart's makes each line count as a worse one.
fn used_words(readings: &Readings, used: Distance) -> String {
    let read = format!("read at {}", used.in_words());
    match readings.distances() {
        Some(d) if d.used_mm < d.chart_mm => {
            format!("{read}, nearer: each line counts as a worse one")
        }
        Some(d) if d.used_mm > d.chart_mm => {
            format!("{read}, farther: each line counts as a better one")
        }
        Some(_) => format!("{read}, the chart's own distance"),
        None => format!("{read}; the chart's own distance is missing"),
    }
}
