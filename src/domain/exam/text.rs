//! Fields of a report as text: in, out, and what must hold between them.

use chrono::NaiveDate;

use super::{
    Amblyopia, Confirmed, Cycloplegia, Evidence, ExamField, ExamReport, Fundus, GlassesWear,
    RefractionMethod, Treatment, With,
};
use crate::domain::codes::YesNo;
use crate::domain::diagnosis::Diagnosis;
use crate::domain::readings::{ReadingContext, Readings};
use crate::domain::text::{one_line, one_of, shown};

/// Longest free text of a report, in characters.
const LONGEST: usize = 500;

/// Why a text is not a value of its field.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("{}: found {found:?}, expected {expected}", field.word())]
pub struct ExamError {
    /// The field.
    pub field: ExamField,
    /// What was there, shortened and made safe to print.
    pub found: String,
    /// What would have been taken.
    pub expected: String,
}

impl ExamReport {
    /// Sets a field from text; an empty text makes it unknown again.
    ///
    /// Returns what a person should see about the value, if anything.
    ///
    /// # Errors
    /// The field, what was found and what was expected; the field keeps its old value.
    pub fn set(
        &mut self,
        field: ExamField,
        text: &str,
        context: ReadingContext,
    ) -> Result<Option<String>, ExamError> {
        use ExamField as E;
        let text = text.trim();
        let wrong = |expected: String| ExamError {
            field,
            found: shown(text, 40),
            expected,
        };
        if let Some((with, reading)) = field.reading() {
            return self
                .measured_mut(with)
                .set(reading, text, context)
                .map_err(|e| wrong(e.expected));
        }
        macro_rules! code {
            ($target:expr, $list:ident) => {
                $target = optional(text, |t| {
                    $list::from_word(t).ok_or_else(|| one_of(&$list::words(), t))
                })
                .map_err(wrong)?
            };
        }
        match field {
            E::ExaminedOn => self.examined_on = optional(text, date).map_err(wrong)?,
            E::ReceivedOn => self.received_on = optional(text, date).map_err(wrong)?,
            E::ReturnOn => self.return_on = optional(text, date).map_err(wrong)?,
            E::Evidence => code!(self.evidence, Evidence),
            E::Examiner => self.examiner = one_line(text, LONGEST).map_err(wrong)?,
            E::ExaminerPhone => self.examiner_phone = one_line(text, LONGEST).map_err(wrong)?,
            E::ClassroomAdvice => self.classroom_advice = one_line(text, LONGEST).map_err(wrong)?,
            E::RefractionMethod => code!(self.refraction_method, RefractionMethod),
            E::Cycloplegia => code!(self.cycloplegia, Cycloplegia),
            E::StereoSeconds => {
                self.stereo_seconds = optional(text, |t| {
                    t.parse::<u16>()
                        .ok()
                        .filter(|s| (1..=5000).contains(s))
                        .ok_or_else(|| "seconds of arc, 1 to 5000".to_owned())
                })
                .map_err(wrong)?;
            }
            E::FundusRight => code!(self.fundus.right, Fundus),
            E::FundusLeft => code!(self.fundus.left, Fundus),
            E::AmblyopiaRight => code!(self.amblyopia.right, Amblyopia),
            E::AmblyopiaLeft => code!(self.amblyopia.left, Amblyopia),
            E::NoAbnormality => code!(self.no_abnormality, YesNo),
            E::ReleaseConsent => code!(self.release_consent, YesNo),
            E::GlassesWear => code!(self.glasses_wear, GlassesWear),
            E::Findings => {
                self.findings = list(text, |w| {
                    Diagnosis::parse(w).ok_or_else(|| {
                        format!(
                            "ICD-10-CM codes separated by ;, such as H53.021 (found {})",
                            shown(w, 20)
                        )
                    })
                })
                .map_err(wrong)?;
            }
            E::Treatment => {
                self.treatment = optional(text, |t| {
                    list(t, |w| {
                        Treatment::from_word(w).ok_or_else(|| one_of(&Treatment::words(), w))
                    })
                })
                .map_err(wrong)?;
            }
            // Every other field is a reading.
            _ => {}
        }
        Ok(None)
    }

    /// Returns a field as canonical text, which [`ExamReport::set`] reads back to the same value.
    pub fn get(&self, field: ExamField) -> Option<String> {
        use ExamField as E;
        if let Some((with, reading)) = field.reading() {
            return self.measured(with).get(reading);
        }
        let word = |text: &str| (!text.is_empty()).then(|| text.to_owned());
        let on = |date: Option<NaiveDate>| date.map(|d| d.to_string());
        match field {
            E::ExaminedOn => on(self.examined_on),
            E::ReceivedOn => on(self.received_on),
            E::ReturnOn => on(self.return_on),
            E::Evidence => self.evidence.map(|v| v.word().to_owned()),
            E::Examiner => word(&self.examiner),
            E::ExaminerPhone => word(&self.examiner_phone),
            E::ClassroomAdvice => word(&self.classroom_advice),
            E::RefractionMethod => self.refraction_method.map(|v| v.word().to_owned()),
            E::Cycloplegia => self.cycloplegia.map(|v| v.word().to_owned()),
            E::StereoSeconds => self.stereo_seconds.map(|v| v.to_string()),
            E::FundusRight => self.fundus.right.map(|v| v.word().to_owned()),
            E::FundusLeft => self.fundus.left.map(|v| v.word().to_owned()),
            E::AmblyopiaRight => self.amblyopia.right.map(|v| v.word().to_owned()),
            E::AmblyopiaLeft => self.amblyopia.left.map(|v| v.word().to_owned()),
            E::NoAbnormality => self.no_abnormality.map(|v| v.word().to_owned()),
            E::ReleaseConsent => self.release_consent.map(|v| v.word().to_owned()),
            E::GlassesWear => self.glasses_wear.map(|v| v.word().to_owned()),
            E::Findings => word(
                &self
                    .findings
                    .iter()
                    .map(Diagnosis::code)
                    .collect::<Vec<_>>()
                    .join(";"),
            ),
            E::Treatment => self
                .treatment
                .as_ref()
                .map(|list| list.iter().map(|t| t.word()).collect::<Vec<_>>().join(";")),
            _ => None,
        }
    }

    /// Returns every field that was reported with its canonical text, in the order of the list.
    pub fn recorded(&self) -> Vec<(ExamField, String)> {
        ExamField::ALL
            .iter()
            .filter_map(|f| self.get(*f).map(|text| (*f, text)))
            .collect()
    }

    fn measured(&self, with: With) -> &Readings {
        match with {
            With::Nothing => &self.uncorrected,
            With::OwnGlasses => &self.presenting,
            With::Best => &self.readings,
            With::Prescribed => &self.glasses,
        }
    }

    fn measured_mut(&mut self, with: With) -> &mut Readings {
        match with {
            With::Nothing => &mut self.uncorrected,
            With::OwnGlasses => &mut self.presenting,
            With::Best => &mut self.readings,
            With::Prescribed => &mut self.glasses,
        }
    }
}

/// Returns what cannot be in a report of a referral made on `referred_on`, read on `today`: the
/// field, and what is wrong with it.
pub fn contradictions(
    report: &ExamReport,
    referred_on: NaiveDate,
    today: NaiveDate,
) -> Vec<ExamError> {
    use ExamField as E;
    let mut wrong = Vec::new();
    let mut say = |field: ExamField, expected: String| {
        wrong.push(ExamError {
            field,
            found: shown(&report.get(field).unwrap_or_default(), 40),
            expected,
        });
    };
    match report.examined_on {
        None => say(E::ExaminedOn, "the date of the examination".into()),
        Some(on) if on < referred_on => say(
            E::ExaminedOn,
            format!(
                "a date on or after the referral ({referred_on}); an earlier examination is recorded as \"already under care\""
            ),
        ),
        Some(on) if on > today => say(E::ExaminedOn, format!("a date not after today ({today})")),
        Some(on) => {
            if report.received_on.is_some_and(|received| received < on) {
                say(
                    E::ReceivedOn,
                    format!("a date on or after the examination ({on})"),
                );
            }
            if report.return_on.is_some_and(|next| next <= on) {
                say(E::ReturnOn, format!("a date after the examination ({on})"));
            }
        }
    }
    if report.received_on.is_some_and(|received| received > today) {
        say(E::ReceivedOn, format!("a date not after today ({today})"));
    }
    for (with, fields) in [
        (
            With::Best,
            [
                (E::CylinderRight, E::AxisRight),
                (E::CylinderLeft, E::AxisLeft),
            ],
        ),
        (
            With::Prescribed,
            [
                (E::GlassesCylinderRight, E::GlassesAxisRight),
                (E::GlassesCylinderLeft, E::GlassesAxisLeft),
            ],
        ),
    ] {
        let eyes = report.measured(with).instrument.both();
        for (eye, (cylinder, axis)) in eyes.iter().zip(fields) {
            match (eye.cylinder, eye.axis) {
                (Some(power), None) if power.written().0 != 0 => {
                    say(
                        axis,
                        "an axis from 1 to 180, since there is a cylinder".into(),
                    );
                }
                (None, Some(_)) => {
                    say(cylinder, "a cylinder, since there is an axis".into());
                }
                _ => {}
            }
        }
    }
    if report.no_abnormality == Some(YesNo::Yes)
        && matches!(report.confirmed(None), Confirmed::Yes(_))
    {
        say(
            E::NoAbnormality,
            "no, since the report names a finding or a treatment".into(),
        );
    }
    if let Some(list) = &report.treatment
        && list.len() > 1
        && list.contains(&Treatment::None)
    {
        say(E::Treatment, "either none or what was begun".into());
    }
    wrong
}

fn optional<T>(
    text: &str,
    parse: impl FnOnce(&str) -> Result<T, String>,
) -> Result<Option<T>, String> {
    if text.is_empty() {
        Ok(None)
    } else {
        parse(text).map(Some)
    }
}

fn date(text: &str) -> Result<NaiveDate, String> {
    NaiveDate::parse_from_str(text, "%Y-%m-%d").map_err(|_| "a date as YYYY-MM-DD".to_owned())
}

fn list<T: PartialEq>(
    text: &str,
    item: impl Fn(&str) -> Result<T, String>,
) -> Result<Vec<T>, String> {
    let mut values = Vec::new();
    for word in text.split(';').map(str::trim).filter(|w| !w.is_empty()) {
        let value = item(word)?;
        if !values.contains(&value) {
            values.push(value);
        }
    }
    Ok(values)
}
