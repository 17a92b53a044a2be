//! Thresholds as the guidance prints them, typed.

use crate::domain::acuity::{Acuity, AcuityContext, Line, Notation, parse_acuity};
use crate::domain::number;
use crate::domain::readings::AcuityResult;
use crate::rules::{Measure, Metric, Test};

/// Reads a threshold in the unit of its measure, or says what would have been taken.
pub(super) fn parse(measure: Measure, text: &str) -> Result<Test, String> {
    let text = text.trim();
    let expected = expected(measure);
    let found = match measure {
        Measure::DistanceEachEye | Measure::NearEachEye => acuity(text),
        Measure::DistanceBetweenEyes => text
            .strip_suffix("lines or more")
            .and_then(|n| number::fixed(n.trim(), 0))
            .filter(|n| (1..=20).contains(n))
            .map(|n| Test::LinesOrMore(n as i32)),
        Measure::Anisometropia | Measure::Hyperopia | Measure::Astigmatism | Measure::Myopia => {
            more_than(text, "D", 3)
                .map(Test::MoreThanDiopters)
                .or_else(|| or_more(text, "D", 3).map(Test::DioptersOrMore))
        }
        Measure::Strabismus => match text {
            "any manifest" => Some(Test::AnyManifest),
            "constant" => Some(Test::Constant),
            _ => more_than(text, "prism dioptres", 2).map(Test::MoreThanPrism),
        },
        Measure::MediaOpacity => more_than(text, "mm", 2).map(Test::MoreThanMillimetres),
        Measure::Ptosis => text
            .strip_suffix("mm or less")
            .and_then(|n| number::fixed(n.trim(), 2))
            .map(|n| Test::MillimetresOrLess(n as i32)),
        Measure::Signs | Measure::History | Measure::RedReflex => {
            (text == "present").then_some(Test::Present)
        }
        Measure::PlusLens => {
            (text == "line read through the lens").then_some(Test::ReadThroughLens)
        }
        Measure::Stereo => text
            .strip_prefix("fewer than")
            .and_then(|rest| rest.split_once(" of "))
            .and_then(|(need, of)| {
                let need = number::fixed(need.trim(), 0)?;
                let of = number::fixed(of.trim(), 0)?;
                ((1..=of).contains(&need) && of < 100).then_some(Test::FewerThan {
                    need: need as u8,
                    of: of as u8,
                })
            }),
        Measure::ColorPlates => (text == "any plate missed").then_some(Test::AnyMissed),
    };
    found.ok_or_else(|| expected.to_owned())
}

fn expected(measure: Measure) -> &'static str {
    match measure {
        Measure::DistanceEachEye | Measure::NearEachEye => {
            "an acuity line, such as \"worse than 20/50\" or \"20/50 or worse\""
        }
        Measure::DistanceBetweenEyes => "\"2 lines or more\"",
        Measure::Anisometropia | Measure::Hyperopia | Measure::Astigmatism | Measure::Myopia => {
            "dioptres, such as \"more than 4.00 D\" or \"4.00 D or more\""
        }
        Measure::Strabismus => "\"any manifest\", \"constant\" or \"more than 8 prism dioptres\"",
        Measure::MediaOpacity => "millimetres, such as \"more than 1 mm\"",
        Measure::Ptosis => "millimetres, such as \"1 mm or less\"",
        Measure::Signs | Measure::History | Measure::RedReflex => "\"present\"",
        Measure::PlusLens => "\"line read through the lens\"",
        Measure::Stereo => "\"fewer than 4 of 6\"",
        Measure::ColorPlates => "\"any plate missed\"",
    }
}

fn acuity(text: &str) -> Option<Test> {
    if let Some(rest) = text.strip_prefix("worse than") {
        line(rest.trim()).map(Test::WorseThanLine)
    } else {
        let text = text.strip_suffix("or worse")?.trim();
        line(text).map(Test::LineOrWorse).or_else(|| letters(text))
    }
}

/// Reads `6/9-2`: a line with letters missed, for sets that score by letter.
fn letters(text: &str) -> Option<Test> {
    match parse_acuity(text, &AcuityContext::default()).ok()?.value {
        AcuityResult::Read(Acuity::Read { line, letters })
            if letters < 0 && line.is_on_a_chart() =>
        {
            Some(Test::LettersOrWorse {
                line,
                missed: letters.unsigned_abs(),
            })
        }
        _ => None,
    }
}

fn line(text: &str) -> Option<Line> {
    if let Some(value) = text.strip_prefix("logMAR") {
        let value = number::signed(value.trim(), 3)?;
        return Line::new(Notation::LogMar, i32::try_from(value).ok()?);
    }
    match parse_acuity(text, &AcuityContext::default()).ok()?.value {
        AcuityResult::Read(Acuity::Read { line, letters: 0 }) if line.is_on_a_chart() => Some(line),
        _ => None,
    }
}

fn more_than(text: &str, unit: &str, places: u32) -> Option<i32> {
    let rest = text.strip_prefix("more than ")?.strip_suffix(unit)?;
    number::fixed(rest.trim(), places).and_then(|v| i32::try_from(v).ok())
}

fn or_more(text: &str, unit: &str, places: u32) -> Option<i32> {
    let rest = text.strip_suffix("or more")?.trim().strip_suffix(unit)?;
    number::fixed(rest.trim(), places).and_then(|v| i32::try_from(v).ok())
}

/// Returns the quantities that may stand for a measure; none where there is nothing to choose.
pub(super) fn metrics(measure: Measure) -> &'static [Metric] {
    match measure {
        Measure::Hyperopia => &[Metric::MostPlusMeridian],
        Measure::Myopia => &[Metric::MostMinusMeridian],
        Measure::Astigmatism => &[Metric::Cylinder],
        Measure::Anisometropia => &[
            Metric::SphericalEquivalent,
            Metric::EquivalentOrCylinder,
            Metric::Meridional,
        ],
        _ => &[],
    }
}

/// Reads `36..48`, `60..` or `..60`, in completed months.
pub(super) fn ages(text: &str) -> Option<(u32, Option<u32>)> {
    let (from, to) = text.trim().split_once("..")?;
    let month = |t: &str| number::fixed(t.trim(), 0).and_then(|v| u32::try_from(v).ok());
    let low = if from.trim().is_empty() {
        0
    } else {
        month(from)?
    };
    let high = if to.trim().is_empty() {
        None
    } else {
        Some(month(to)?)
    };
    ((low > 0 || high.is_some()) && high.is_none_or(|h| h > low && h <= 1200))
        .then_some((low, high))
}

/// Returns the band as ids write it: `36-47`, `60+`.
pub(super) fn band((from, to): (u32, Option<u32>)) -> String {
    match to {
        Some(to) => format!("{from}-{}", to - 1),
        None => format!("{from}+"),
    }
}

/// Splits a criterion id into its finding and its band, if it ends in one.
pub(super) fn split_band(id: &str) -> (&str, Option<&str>) {
    match id.rsplit_once('.') {
        Some((finding, band))
            if band
                .bytes()
                .all(|b| b.is_ascii_digit() || b == b'-' || b == b'+')
                && band.bytes().any(|b| b == b'-' || b == b'+') =>
        {
            (finding, Some(band))
        }
        Some((finding, band))
            if band.starts_with("KG") || band.starts_with("PK") || band.starts_with("TK") =>
        {
            (finding, Some(band))
        }
        _ => (id, None),
    }
}
