//! Fields as text: in, out, and what must hold between them.

use super::{AcuityResult, Distance, Hundredths, InstrumentEye, NotTestable, Readings, Sign};
use crate::domain::acuity::{AcuityContext, ChartLetters, Line, Notation, parse_acuity};
use crate::domain::codes::{
    AcuityMethod, Correction, Cover, DeviatingEye, Direction, History, InstrumentResult, PlusLens,
    Reflex, Side, SignKind, Status, YesNo,
};
use crate::domain::field::{Field, FieldError};
use crate::domain::number;
use crate::domain::refraction::{Axis, Power};
use crate::domain::text::one_of;

/// What decides the meaning of a bare or critical-line acuity.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct ReadingContext {
    /// What a bare `40` or `12` is the denominator of; without it a bare number is refused.
    pub bare: Option<Notation>,
    /// On a critical-line day: the pass line for this child.
    pub critical_line: Option<Line>,
}

impl Readings {
    /// Sets a field from text; an empty text makes it unknown again.
    ///
    /// Returns what a screener should see about the value, if anything.
    ///
    /// # Errors
    /// The field, what was found and what was expected; the field keeps its old value.
    pub fn set(
        &mut self,
        field: Field,
        text: &str,
        context: ReadingContext,
    ) -> Result<Option<String>, FieldError> {
        let text = text.trim();
        let blank = text.is_empty();
        let wrong = |expected: String| FieldError::new(field, text, expected);
        macro_rules! code {
            ($target:expr, $list:ident) => {{
                $target = if blank {
                    None
                } else {
                    Some(
                        $list::from_word(text)
                            .ok_or_else(|| wrong(one_of(&$list::words(), text)))?,
                    )
                };
            }};
        }
        match field {
            Field::Status => code!(self.status, Status),
            Field::AcuityMethod => code!(self.acuity_method, AcuityMethod),
            Field::CorrectionWorn => code!(self.correction, Correction),
            Field::LettersPerLine => {
                self.letters_per_line = optional(text, |t| count(t, 1, 10))
                    .map_err(|()| wrong("letters on a line, 1 to 10".into()))?;
            }
            Field::ChartDistanceM | Field::ChartDistanceFt => {
                self.chart_distance = distance(field, text, self.chart_distance)?;
            }
            Field::UsedDistanceM | Field::UsedDistanceFt => {
                self.used_distance = distance(field, text, self.used_distance)?;
            }
            Field::DistanceRight
            | Field::DistanceLeft
            | Field::DistanceBoth
            | Field::NearRight
            | Field::NearLeft
            | Field::NearBoth => return self.set_acuity(field, text, context),
            Field::NearDistanceCm => {
                self.near_distance_cm = optional(text, |t| hundredths(t, 1, 20_000))
                    .map_err(|()| wrong("a distance in centimetres, such as 40".into()))?;
            }
            Field::PlusLens => code!(self.plus_lens, PlusLens),
            Field::StereoCorrect => self.stereo_correct = small_count(text).map_err(wrong)?,
            Field::StereoShown => self.stereo_shown = small_count(text).map_err(wrong)?,
            Field::Cover => code!(self.cover, Cover),
            Field::DeviationPd => {
                self.deviation_pd = optional(text, |t| hundredths(t, 0, 20_000))
                    .map_err(|()| wrong("prism dioptres, such as 8".into()))?;
            }
            Field::DeviatingEye => code!(self.deviating_eye, DeviatingEye),
            Field::DeviationDirection => code!(self.deviation_direction, Direction),
            Field::RedReflexRight => code!(self.red_reflex.right, Reflex),
            Field::RedReflexLeft => code!(self.red_reflex.left, Reflex),
            Field::PlatesMissed => self.plates_missed = small_count(text).map_err(wrong)?,
            Field::PlatesShown => self.plates_shown = small_count(text).map_err(wrong)?,
            Field::InstrumentWorn => code!(self.instrument_worn, YesNo),
            Field::InstrumentRight => code!(self.instrument.right.result, InstrumentResult),
            Field::InstrumentLeft => code!(self.instrument.left.result, InstrumentResult),
            Field::SphereRight | Field::SphereLeft => {
                self.eye_mut(field).sphere =
                    optional(text, |t| power(t, 30_000)).map_err(|()| {
                        wrong("a sphere within ±30.00, or out of range as >7.50 or <-7.50".into())
                    })?;
            }
            Field::CylinderRight | Field::CylinderLeft => {
                self.eye_mut(field).cylinder =
                    optional(text, |t| power(t, 15_000)).map_err(|()| {
                        wrong("a cylinder within ±15.00, 0 or DS for none, >7.50 or <-7.50".into())
                    })?;
            }
            Field::AxisRight | Field::AxisLeft => {
                self.eye_mut(field).axis =
                    optional(text, |t| number::fixed(t, 0).and_then(Axis::new))
                        .map_err(|()| wrong("a whole axis from 1 to 180".into()))?;
            }
            Field::PupilMmRight | Field::PupilMmLeft => {
                self.eye_mut(field).pupil = millimetres(text).map_err(wrong)?;
            }
            Field::OpacityMmRight | Field::OpacityMmLeft => {
                self.eye_mut(field).opacity = millimetres(text).map_err(wrong)?;
            }
            Field::ReflexDistanceMmRight | Field::ReflexDistanceMmLeft => {
                self.eye_mut(field).reflex_distance = millimetres(text).map_err(wrong)?;
            }
            Field::Signs => {
                self.signs =
                    optional(text, |t| list(t, sign)).map_err(|()| wrong(signs_expected(text)))?;
            }
            Field::History => {
                self.history = optional(text, |t| list(t, History::from_word))
                    .map_err(|()| wrong(history_expected(text)))?;
            }
            Field::Testable => code!(self.testable, YesNo),
            Field::NotTestableReason => code!(self.not_testable_reason, NotTestable),
            Field::Note => {
                self.note = optional(text, note)
                    .map_err(|()| wrong(format!("one line of at most {NOTE_CHARS} characters")))?;
            }
        }
        Ok(None)
    }

    fn set_acuity(
        &mut self,
        field: Field,
        text: &str,
        context: ReadingContext,
    ) -> Result<Option<String>, FieldError> {
        let near = matches!(field, Field::NearRight | Field::NearLeft | Field::NearBoth);
        let (value, echo) = if text.is_empty() {
            (None, None)
        } else {
            let context = AcuityContext {
                bare: context.bare,
                near,
                letters: ChartLetters(self.letters_per_line.unwrap_or(5)),
                critical_line: context
                    .critical_line
                    .filter(|_| !near && self.acuity_method == Some(AcuityMethod::CriticalLine)),
            };
            let understood = parse_acuity(text, &context)
                .map_err(|expected| FieldError::new(field, text, expected))?;
            (Some(understood.value), understood.echo)
        };
        match field {
            Field::DistanceRight => self.distance.right = value,
            Field::DistanceLeft => self.distance.left = value,
            Field::DistanceBoth => self.distance_both = value,
            Field::NearRight => self.near.right = value,
            Field::NearLeft => self.near.left = value,
            _ => self.near_both = value,
        }
        Ok(echo)
    }

    fn eye_mut(&mut self, field: Field) -> &mut InstrumentEye {
        if field.word().ends_with("left") {
            &mut self.instrument.left
        } else {
            &mut self.instrument.right
        }
    }

    /// Returns a field as canonical text, which [`Readings::set`] reads back to the same value.
    pub fn get(&self, field: Field) -> Option<String> {
        fn words<T: ToString>(list: Option<&Vec<T>>) -> Option<String> {
            list.map(|list| {
                if list.is_empty() {
                    "none".to_owned()
                } else {
                    list.iter()
                        .map(ToString::to_string)
                        .collect::<Vec<_>>()
                        .join(";")
                }
            })
        }
        let acuity = |value: Option<AcuityResult>| value.map(|v| v.to_string());
        let eye = if field.word().ends_with("left") {
            &self.instrument.left
        } else {
            &self.instrument.right
        };
        let measured =
            |d: Option<Distance>, feet: bool| d.filter(|d| d.in_feet == feet).map(Distance::number);
        match field {
            Field::Status => self.status.map(|v| v.word().to_owned()),
            Field::AcuityMethod => self.acuity_method.map(|v| v.word().to_owned()),
            Field::CorrectionWorn => self.correction.map(|v| v.word().to_owned()),
            Field::LettersPerLine => self.letters_per_line.map(|v| v.to_string()),
            Field::ChartDistanceM => measured(self.chart_distance, false),
            Field::UsedDistanceM => measured(self.used_distance, false),
            Field::ChartDistanceFt => measured(self.chart_distance, true),
            Field::UsedDistanceFt => measured(self.used_distance, true),
            Field::DistanceRight => acuity(self.distance.right),
            Field::DistanceLeft => acuity(self.distance.left),
            Field::DistanceBoth => acuity(self.distance_both),
            Field::NearRight => acuity(self.near.right),
            Field::NearLeft => acuity(self.near.left),
            Field::NearBoth => acuity(self.near_both),
            Field::NearDistanceCm => self.near_distance_cm.map(|v| v.to_string()),
            Field::PlusLens => self.plus_lens.map(|v| v.word().to_owned()),
            Field::StereoCorrect => self.stereo_correct.map(|v| v.to_string()),
            Field::StereoShown => self.stereo_shown.map(|v| v.to_string()),
            Field::Cover => self.cover.map(|v| v.word().to_owned()),
            Field::DeviationPd => self.deviation_pd.map(|v| v.to_string()),
            Field::DeviatingEye => self.deviating_eye.map(|v| v.word().to_owned()),
            Field::DeviationDirection => self.deviation_direction.map(|v| v.word().to_owned()),
            Field::RedReflexRight => self.red_reflex.right.map(|v| v.word().to_owned()),
            Field::RedReflexLeft => self.red_reflex.left.map(|v| v.word().to_owned()),
            Field::PlatesMissed => self.plates_missed.map(|v| v.to_string()),
            Field::PlatesShown => self.plates_shown.map(|v| v.to_string()),
            Field::SphereRight | Field::SphereLeft => eye.sphere.map(|v| v.to_string()),
            Field::CylinderRight | Field::CylinderLeft => eye.cylinder.map(|v| v.to_string()),
            Field::AxisRight | Field::AxisLeft => eye.axis.map(|v| v.to_string()),
            Field::InstrumentWorn => self.instrument_worn.map(|v| v.word().to_owned()),
            Field::InstrumentRight | Field::InstrumentLeft => {
                eye.result.map(|v| v.word().to_owned())
            }
            Field::PupilMmRight | Field::PupilMmLeft => eye.pupil.map(|v| v.to_string()),
            Field::OpacityMmRight | Field::OpacityMmLeft => eye.opacity.map(|v| v.to_string()),
            Field::ReflexDistanceMmRight | Field::ReflexDistanceMmLeft => {
                eye.reflex_distance.map(|v| v.to_string())
            }
            Field::Signs => words(self.signs.as_ref()),
            Field::History => {
                let list: Option<Vec<&str>> = self
                    .history
                    .as_ref()
                    .map(|l| l.iter().map(|h| h.word()).collect());
                words(list.as_ref())
            }
            Field::Testable => self.testable.map(|v| v.word().to_owned()),
            Field::NotTestableReason => self.not_testable_reason.map(|v| v.word().to_owned()),
            Field::Note => self.note.clone(),
        }
    }

    /// Returns every recorded field with its canonical text, in the order of the field list.
    pub fn recorded(&self) -> Vec<(Field, String)> {
        Field::ALL
            .iter()
            .filter_map(|f| self.get(*f).map(|text| (*f, text)))
            .collect()
    }
}

fn optional<T>(text: &str, parse: impl FnOnce(&str) -> Option<T>) -> Result<Option<T>, ()> {
    if text.is_empty() {
        Ok(None)
    } else {
        parse(text).map(Some).ok_or(())
    }
}

/// Characters of a note (practice: it is read in one look, and is no place for a second record).
pub const NOTE_CHARS: usize = 500;

fn note(text: &str) -> Option<String> {
    (text.chars().count() <= NOTE_CHARS && !text.chars().any(char::is_control))
        .then(|| text.to_owned())
}

fn count(text: &str, low: i64, high: i64) -> Option<u8> {
    number::fixed(text, 0)
        .filter(|v| (low..=high).contains(v))
        .map(|v| v as u8)
}

fn small_count(text: &str) -> Result<Option<u8>, String> {
    optional(text, |t| count(t, 0, 99)).map_err(|()| "a whole number from 0 to 99".into())
}

fn hundredths(text: &str, low: i64, high: i64) -> Option<Hundredths> {
    number::signed(text, 2)
        .filter(|v| (low..=high).contains(v))
        .map(|v| Hundredths(v as i32))
}

fn millimetres(text: &str) -> Result<Option<Hundredths>, String> {
    optional(text, |t| hundredths(t, -2_000, 3_000)).map_err(|()| "millimetres, such as 1.5".into())
}

fn power(text: &str, limit: i32) -> Option<Power> {
    Power::parse(text).filter(|p| p.written().0.abs() <= limit)
}

fn distance(
    field: Field,
    text: &str,
    old: Option<Distance>,
) -> Result<Option<Distance>, FieldError> {
    let in_feet = matches!(field, Field::ChartDistanceFt | Field::UsedDistanceFt);
    if text.is_empty() {
        // The empty column of one unit does not wipe the value of the other.
        return Ok(old.filter(|d| d.in_feet != in_feet));
    }
    let unit = if in_feet { "feet" } else { "metres" };
    if old.is_some_and(|d| d.in_feet != in_feet) {
        return Err(FieldError::new(
            field,
            text,
            format!("one distance only, not both {unit} and the other unit"),
        ));
    }
    number::fixed(text, 3)
        .filter(|v| (100..=100_000).contains(v))
        .map(|v| {
            Some(Distance {
                thousandths: v as u32,
                in_feet,
            })
        })
        .ok_or_else(|| {
            FieldError::new(
                field,
                text,
                format!(
                    "a distance in {unit}, such as {}",
                    if in_feet { "10" } else { "3" }
                ),
            )
        })
}

/// Reads a list separated by `;`, or `none`; order and repeats do not matter.
fn list<T: Ord>(text: &str, item: impl Fn(&str) -> Option<T>) -> Option<Vec<T>> {
    if text == "none" {
        return Some(Vec::new());
    }
    let mut values: Vec<T> = text
        .split(';')
        .map(str::trim)
        .filter(|w| !w.is_empty())
        .map(item)
        .collect::<Option<_>>()?;
    values.sort_unstable();
    values.dedup();
    (!values.is_empty()).then_some(values)
}

fn sign(text: &str) -> Option<Sign> {
    let (kind, side) = match text.split_once(':') {
        Some((kind, side)) => (kind, Some(Side::from_word(side)?)),
        None => (text, None),
    };
    SignKind::from_word(kind).map(|kind| Sign { kind, side })
}

fn signs_expected(text: &str) -> String {
    let bad = text
        .split(';')
        .map(str::trim)
        .find(|w| *w != "none" && sign(w).is_none())
        .unwrap_or(text);
    let kind = bad.split(':').next().unwrap_or(bad);
    if SignKind::from_word(kind).is_some() {
        return format!("{kind}, {kind}:right, {kind}:left or {kind}:both");
    }
    one_of(&format!("none, {}", SignKind::words()), kind)
}

fn history_expected(text: &str) -> String {
    let bad = text
        .split(';')
        .map(str::trim)
        .find(|w| History::from_word(w).is_none())
        .unwrap_or(text);
    one_of(&format!("none, {}", History::words()), bad)
}
