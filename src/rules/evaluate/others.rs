//! Everything beside acuity and refraction: alignment, lids and media, signs, lens, stereo, color.

use std::fmt::Write;

use crate::domain::codes::{Correction, Cover, PlusLens, Reflex, YesNo};
use crate::domain::outcome::{Answer, Margin, Open};
use crate::domain::readings::{Eye, Hundredths, Sign};
use crate::rules::{Criterion, Finding, Measure, Test};

use super::set::eye_words;
use super::{Answered, Facts, deciding_eye, either_eye};

/// Judges strabismus from the cover test and the size of a manifest deviation.
pub(super) fn strabismus(criterion: &Criterion, facts: &Facts<'_>) -> Answered {
    let (cover, size) = (facts.readings.cover, facts.readings.deviation_pd);
    let manifest = size.is_some_and(|s| s.0 > 0);
    let answer = match (&criterion.test, cover) {
        (_, Some(Cover::Constant)) => Answer::Refer,
        (Test::Constant, Some(_)) => Answer::Pass,
        (Test::Constant, None) => Answer::Unknown,
        (Test::AnyManifest, Some(Cover::Intermittent)) => Answer::Refer,
        (Test::AnyManifest, _) if manifest => Answer::Refer,
        (Test::MoreThanPrism(limit), _) if size.is_some_and(|s| s.0 > *limit) => Answer::Refer,
        // No movement or a phoria passes only where no manifest size says otherwise.
        (_, Some(Cover::None | Cover::Phoria)) if !manifest => Answer::Pass,
        (_, Some(Cover::None | Cover::Phoria)) => Answer::Unknown,
        (_, _) if size.is_some() => Answer::Pass,
        _ => Answer::Unknown,
    };
    let mut reading = cover.map_or("cover test not done", Cover::title).to_owned();
    if let Some(size) = size {
        let _ = write!(reading, ", {size} prism dioptres");
    }
    let mut out = Answered::new(answer, reading);
    if let (Test::MoreThanPrism(limit), Some(size)) = (&criterion.test, size) {
        out.margin = Margin::PrismDiopters(limit - size.0);
        if answer == Answer::Refer && cover != Some(Cover::Constant) {
            out.would_change = format!(
                "{} prism dioptres or less would not refer",
                Hundredths(*limit)
            );
        }
    }
    if answer == Answer::Pass {
        out.would_change = match criterion.test {
            Test::AnyManifest => "a manifest deviation would not pass".to_owned(),
            Test::Constant => "a constant deviation would not pass".to_owned(),
            _ => format!("{} would not pass", criterion.threshold),
        };
    }
    if cover.is_none() && size.is_none() {
        out.open = Open::NotDone;
    }
    if answer == Answer::Unknown && manifest {
        out.remarks
            .push("the cover test and the size of the deviation contradict each other".to_owned());
    }
    out
}

/// Judges media opacity or margin reflex distance of each eye.
pub(super) fn millimetres(criterion: &Criterion, facts: &Facts<'_>) -> Answered {
    let opacity = criterion.measure == Measure::MediaOpacity;
    let values = facts.readings.instrument.both().map(|eye| {
        if opacity {
            eye.opacity
        } else {
            eye.reflex_distance
        }
    });
    let over = |value: Hundredths| match criterion.test {
        Test::MoreThanMillimetres(limit) => (value.0 > limit, limit - value.0),
        Test::MillimetresOrLess(limit) => (value.0 <= limit, value.0 - limit),
        _ => (false, 0),
    };
    // What was seen through glasses refers; that nothing was seen through them does not pass.
    let worn = facts.readings.instrument_worn == Some(YesNo::Yes);
    let answers = values.map(|value| match value.map(over) {
        Some((true, _)) => Answer::Refer,
        Some((false, _)) if !worn => Answer::Pass,
        _ => Answer::Unknown,
    });
    let [right, left] =
        values.map(|v| v.map_or_else(|| "not measured".to_owned(), |v| format!("{v} mm")));
    let mut out = Answered::new(
        either_eye(answers),
        format!(
            "{}: {}, {}",
            criterion.measure.title(),
            eye_words(Eye::Right, &right),
            eye_words(Eye::Left, &left)
        ),
    );
    out.by_eye = Some(answers);
    out.eye = deciding_eye(answers);
    match out.answer {
        Answer::Pass => {
            out.would_change = format!(
                "{} of {} in either eye would not pass",
                criterion.measure.title(),
                criterion.threshold
            );
        }
        Answer::Unknown if worn => out.open = Open::NotJudged,
        Answer::Unknown => out.open = Open::NotDone,
        Answer::Refer => {
            let within = match criterion.test {
                Test::MillimetresOrLess(limit) => format!("more than {} mm", Hundredths(limit)),
                Test::MoreThanMillimetres(limit) => format!("{} mm or less", Hundredths(limit)),
                _ => String::new(),
            };
            let whose = out
                .eye
                .map_or("both eyes".to_owned(), |e| format!("the {}", e.title()));
            out.would_change = format!(
                "{} of {within} in {whose} would not refer",
                criterion.measure.title()
            );
        }
    }
    out.margin = values
        .into_iter()
        .flatten()
        .map(|v| over(v).1)
        .min()
        .map_or(Margin::None, Margin::Millimetres);
    out
}

/// Three-valued: seen, not seen, not looked for.
fn is_seen(finding: Finding, facts: &Facts<'_>) -> Option<bool> {
    let readings = facts.readings;
    match finding {
        Finding::Sign(kind) => readings
            .signs
            .as_ref()
            .map(|list| list.iter().any(|s| s.kind == kind)),
        Finding::History(what) => readings.history.as_ref().map(|list| list.contains(&what)),
        Finding::Reflex(reflex) => reflex_seen(facts, reflex),
        Finding::UnderCare => Some(facts.under_care),
    }
}

fn reflex_seen(facts: &Facts<'_>, reflex: Reflex) -> Option<bool> {
    let eyes = facts.readings.red_reflex.both();
    if eyes.contains(&Some(reflex)) {
        Some(true)
    } else if eyes.contains(&None) {
        None
    } else {
        Some(false)
    }
}

fn any_seen(findings: &[Finding], facts: &Facts<'_>) -> Option<bool> {
    let mut unknown = false;
    for finding in findings {
        match is_seen(*finding, facts) {
            Some(true) => return Some(true),
            None => unknown = true,
            Some(false) => {}
        }
    }
    if unknown { None } else { Some(false) }
}

/// Judges whether one of the findings is there, with what must stand beside it.
pub(super) fn present(criterion: &Criterion, facts: &Facts<'_>) -> Answered {
    let mut seen = any_seen(&criterion.seen, facts);
    // A red reflex belongs to its own test: among signs, one that was not tested is not missing.
    let has_sign = criterion.seen.iter().any(|f| matches!(f, Finding::Sign(_)));
    if seen.is_none()
        && criterion.measure == Measure::Signs
        && (has_sign || facts.readings.signs.is_some())
    {
        seen = facts.readings.signs.as_ref().map(|_| false);
    }
    let with = if criterion.with.is_empty() {
        Some(true)
    } else {
        any_seen(&criterion.with, facts)
    };
    let without = any_seen(&criterion.without, facts);
    let answer = match (seen, with, without) {
        (Some(false), _, _) | (_, Some(false), _) | (_, _, Some(true)) => Answer::Pass,
        (Some(true), Some(true), Some(false)) => Answer::Refer,
        _ => Answer::Unknown,
    };
    let reading = match answer {
        Answer::Refer => {
            let mut parts: Vec<String> = Vec::new();
            for finding in criterion.seen.iter().chain(&criterion.with) {
                if is_seen(*finding, facts) == Some(true) {
                    parts.push(finding_words(*finding, facts));
                }
            }
            parts.join(", ")
        }
        Answer::Pass
            if criterion
                .without
                .iter()
                .any(|f| is_seen(*f, facts) == Some(true))
                && seen == Some(true) =>
        {
            "under care".to_owned()
        }
        Answer::Pass => "none seen".to_owned(),
        Answer::Unknown if seen == Some(true) => {
            "what would go with it was not looked for".to_owned()
        }
        Answer::Unknown => "not looked for".to_owned(),
    };
    Answered {
        open: Open::NotLookedFor,
        ..Answered::new(answer, reading)
    }
}

fn finding_words(finding: Finding, facts: &Facts<'_>) -> String {
    match finding {
        Finding::Sign(kind) => {
            let sides: Vec<&str> = facts
                .readings
                .signs
                .iter()
                .flatten()
                .filter(|s| s.kind == kind)
                .filter_map(|s: &Sign| s.side.map(crate::domain::codes::Side::title))
                .collect();
            if sides.is_empty() {
                kind.title().to_owned()
            } else {
                format!("{}, {}", kind.title(), sides.join(" and "))
            }
        }
        Finding::Reflex(reflex) => {
            let eyes = facts.readings.red_reflex;
            let sides: Vec<&str> = Eye::BOTH
                .into_iter()
                .filter(|eye| eyes.of(*eye) == Some(reflex))
                .map(Eye::title)
                .collect();
            format!("{} red reflex, {}", reflex.title(), sides.join(" and "))
        }
        Finding::History(what) => what.title().to_owned(),
        Finding::UnderCare => "under care".to_owned(),
    }
}

/// Judges the plus lens: for a child who owns no glasses and passed the chart.
pub(super) fn plus_lens(facts: &Facts<'_>) -> Answered {
    let not_applicable = match facts.readings.correction {
        Some(Correction::None) => match facts.distance_passed {
            Some(false) => Some("distance acuity was not passed in each eye"),
            _ => None,
        },
        Some(_) => Some("the child owns glasses or contact lenses"),
        None => Some("whether the child owns glasses is not answered"),
    };
    if let Some(why) = not_applicable {
        let mut out = Answered::open(Open::NotApplicable, why);
        out.not_applicable = Some(why);
        return out;
    }
    let mut out = match facts.readings.plus_lens {
        Some(PlusLens::Read) => Answered::new(Answer::Refer, PlusLens::Read.title()),
        Some(PlusLens::Blurred) => Answered::new(Answer::Pass, PlusLens::Blurred.title()),
        None => Answered::open(Open::NotDone, "plus lens not done"),
    };
    out.would_change = match out.answer {
        Answer::Pass => "the line read through the lens would not pass".to_owned(),
        Answer::Refer => "the line blurred by the lens would pass".to_owned(),
        Answer::Unknown => String::new(),
    };
    if facts.distance_passed.is_none() {
        out.remarks
            .push("whether distance acuity was passed is not judged by this set".to_owned());
    }
    out
}

/// Judges counted stereo presentations.
pub(super) fn stereo(criterion: &Criterion, facts: &Facts<'_>) -> Answered {
    let Test::FewerThan { need, of } = criterion.test else {
        return Answered::new(Answer::Unknown, "not a counted test");
    };
    let (Some(correct), Some(shown)) = (facts.readings.stereo_correct, facts.readings.stereo_shown)
    else {
        return Answered::open(Open::NotDone, "stereo not done");
    };
    let missed = shown.saturating_sub(correct);
    let mut out = Answered::new(
        if shown > of {
            Answer::Unknown
        } else if correct >= need {
            Answer::Pass
        } else if missed > of - need {
            Answer::Refer
        } else {
            Answer::Unknown
        },
        format!("stereo {correct} of {shown}"),
    );
    out.margin = Margin::Count(i32::from(correct) - i32::from(need));
    if shown > of {
        out.remarks
            .push(format!("more than {of} shown: the score is not defined"));
    }
    if out.answer == Answer::Refer {
        out.would_change = format!("{need} of {of} would pass");
    } else if out.answer == Answer::Pass {
        out.would_change = format!("{} would not pass", criterion.threshold);
    }
    out
}

/// Judges color plates; a criterion that informs never refers.
pub(super) fn color_plates(criterion: &Criterion, facts: &Facts<'_>) -> Answered {
    let Some(missed) = facts.readings.plates_missed else {
        return Answered::open(Open::NotDone, "color plates not done");
    };
    let reading = match facts.readings.plates_shown {
        Some(shown) => format!("{missed} of {shown} plates missed"),
        None => format!("{missed} plates missed"),
    };
    let mut out = Answered::new(
        match (missed > 0, criterion.informs) {
            (false, _) | (true, true) => Answer::Pass,
            (true, false) => Answer::Refer,
        },
        reading,
    );
    if missed == 0 && !criterion.informs {
        out.would_change = format!("{} would not pass", criterion.threshold);
    }
    if missed > 0 && criterion.informs {
        out.remarks.push(
            "plates missed: information for the family and the school, not an eye referral"
                .to_owned(),
        );
    }
    out
}
