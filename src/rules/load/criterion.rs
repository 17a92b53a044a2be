//! One `[[criterion]]`, and what must hold between those of a file.

use std::ops::Range;
use std::sync::Arc;

use crate::domain::age::Grade;
use crate::domain::codes::{History, Reflex, SignKind};
use crate::domain::outcome::{RiskKind, Source, Then, Urgency};
use crate::rules::{
    Applies, Compare, Criterion, Finding, Measure, Metric, RiskRule, Test, threshold,
};

use super::based_on::Base;
use super::reader::{Reader, Section};

const KEYS: &[&str] = &[
    "id",
    "ages",
    "grades",
    "measure",
    "refer",
    "compare",
    "metric",
    "axis_beyond",
    "seen",
    "with",
    "without",
    "source",
    "note",
    "amblyopia_risk",
    "urgency",
    "act_within_days",
    "required",
    "informs",
    "then",
    "after_months",
    "priority",
];

/// Whom one criterion is for and where the file says so, kept even if the rest of it is faulty.
struct Band {
    id: String,
    applies: Applies,
    span: Range<usize>,
}

/// Loads every criterion under a key and checks their bands against each other.
pub(super) fn load_all(
    reader: &mut Reader<'_>,
    root: &Section<'_, '_>,
    key: &str,
    sources: &[Arc<Source>],
    base: Option<&Base>,
) -> Vec<Criterion> {
    let mut out: Vec<Criterion> = Vec::new();
    let mut bands: Vec<Band> = Vec::new();
    for section in reader.sections(root, key) {
        out.extend(load(reader, &section, sources, &mut bands));
    }
    if let Some(base) = base {
        bands.extend(
            base.kept(|id| bands.iter().any(|b| b.id == id))
                .map(|kept| Band {
                    id: kept.id.to_string(),
                    applies: kept.applies.clone(),
                    span: base.span.clone(),
                })
                .collect::<Vec<_>>(),
        );
    }
    check_bands(reader, &bands);
    out
}

#[allow(clippy::too_many_lines)] // one key after the other
fn load(
    reader: &mut Reader<'_>,
    section: &Section<'_, '_>,
    sources: &[Arc<Source>],
    bands: &mut Vec<Band>,
) -> Option<Criterion> {
    reader.only(section, KEYS);
    let id = reader.string(section, "id");
    let (applies, band_span) = applies(reader, section);
    if let Some((id, id_span)) = &id {
        if bands.iter().any(|b| b.id == *id) {
            reader.fault(
                id_span.clone(),
                format!("criterion `{id}` stands twice"),
                "an id of its own",
                "",
            );
        }
        check_id(reader, id, id_span, &applies);
        bands.push(Band {
            id: id.clone(),
            applies: applies.clone(),
            span: band_span.unwrap_or_else(|| section.span.clone()),
        });
    }
    let measure = reader.string(section, "measure").and_then(|(word, span)| {
        reader.word(
            &word,
            span,
            "measure",
            &Measure::words(),
            Measure::from_word,
        )
    });
    let refer = reader.string(section, "refer");
    let source = super::source::named(reader, section, "source", sources);
    let test = match (measure, &refer) {
        (Some(measure), Some((text, span))) => match threshold::parse(measure, text) {
            Ok(typed) => Some(typed),
            Err(expected) => {
                let what = format!("`{text}` is not a threshold for {}", measure.title());
                reader.fault(span.clone(), what, expected, "");
                None
            }
        },
        _ => None,
    };
    let compare = reader
        .optional(section, "compare")
        .and_then(|(word, span)| {
            reader.word(
                &word,
                span,
                "compare",
                &Compare::words(),
                Compare::from_word,
            )
        });
    let metric = measure.and_then(|measure| metric(reader, section, measure));
    let risk = risk(reader, section);
    let urgency = reader
        .optional(section, "urgency")
        .and_then(|(word, span)| {
            reader.word(
                &word,
                span,
                "urgency",
                &Urgency::words(),
                Urgency::from_word,
            )
        });
    let seen = findings(reader, section, "seen");
    let with = findings(reader, section, "with");
    let without = findings(reader, section, "without");
    let needs_seen = matches!(
        measure,
        Some(Measure::Signs | Measure::History | Measure::RedReflex)
    );
    if needs_seen && !section.table.contains_key("seen") {
        reader.fault(
            section.span.clone(),
            "`seen` is missing",
            "seen = [\"…\"]",
            "",
        );
    }
    let axis_beyond = reader
        .number(section, "axis_beyond")
        .map(|v| v.min(90) as u8);
    let act_within_days = reader.number(section, "act_within_days");
    let required = reader.flag(section, "required");
    let informs = reader.flag(section, "informs").unwrap_or(false);
    let then = then(reader, section, informs);
    let high_priority = reader
        .optional(section, "priority")
        .and_then(|(word, span)| {
            reader.word(&word, span, "priority", "high", |w| {
                (w == "high").then_some(())
            })
        })
        .is_some();
    if let (Some(Test::LettersOrWorse { .. }), Some((_, span))) = (&test, &refer)
        && compare != Some(Compare::Letter)
    {
        reader.fault(
            span.clone(),
            "letters missed in a threshold by line",
            "compare = \"letter\"",
            "",
        );
    }
    let note = reader
        .optional(section, "note")
        .map(|v| v.0)
        .unwrap_or_default();
    let ((id, _), measure, test) = (id?, measure?, test?);
    let default_required = !matches!(
        measure,
        Measure::DistanceBetweenEyes
            | Measure::Strabismus
            | Measure::MediaOpacity
            | Measure::Ptosis
    ) && axis_beyond.is_none()
        && !informs;
    Some(Criterion {
        id: id.into(),
        applies,
        measure,
        test,
        threshold: refer?.0.into(),
        compare: compare.unwrap_or(Compare::Line),
        metric,
        axis_beyond,
        seen,
        with,
        without,
        source: source?,
        note: note.into(),
        risk,
        urgency: urgency.unwrap_or(Urgency::Routine),
        act_within_days,
        required: required.unwrap_or(default_required),
        informs,
        then,
        high_priority,
    })
}

/// Reads what a criterion asks for when it speaks.
fn then(reader: &mut Reader<'_>, section: &Section<'_, '_>, informs: bool) -> Then {
    let months = reader.number(section, "after_months").filter(|m| *m > 0);
    let Some((word, span)) = reader.optional(section, "then") else {
        return if informs { Then::Inform } else { Then::Refer };
    };
    match (word.as_str(), months) {
        ("refer", None) => Then::Refer,
        ("rescreen", None) => Then::Rescreen,
        ("recheck", Some(months)) => Then::Recheck(months),
        ("recheck", None) => {
            reader.fault(span, "a recheck without its date", "after_months = 12", "");
            Then::Refer
        }
        ("refer" | "rescreen", Some(_)) => {
            reader.fault(
                span,
                "`after_months` goes with a recheck",
                "then = \"recheck\"",
                "",
            );
            Then::Refer
        }
        _ => {
            reader.word(
                &word,
                span,
                "then",
                "refer, rescreen, recheck",
                |_| None::<()>,
            );
            Then::Refer
        }
    }
}

pub(super) fn applies(
    reader: &mut Reader<'_>,
    section: &Section<'_, '_>,
) -> (Applies, Option<Range<usize>>) {
    let ages = reader.optional(section, "ages");
    let grades = reader.list(section, "grades");
    if let (Some((_, span)), Some(_)) = (&ages, section.table.get("grades")) {
        reader.fault(span.clone(), "both ages and grades", "one of the two", "");
    }
    if let Some((text, span)) = ages {
        if let Some((from, to)) = threshold::ages(&text) {
            return (Applies::Ages { from, to }, Some(span));
        }
        reader.fault(
            span,
            format!("`{text}` is not an age band"),
            "completed months, such as 36..48 or 60..",
            "36..48 is 36 completed months or more and fewer than 48",
        );
        return (Applies::Everyone, None);
    }
    if section.table.contains_key("grades") {
        let mut list = Vec::new();
        for (text, span) in grades {
            match Grade::parse(&text) {
                Some(grade) => list.push(grade),
                None => reader.fault(
                    span,
                    format!("`{text}` is not a grade"),
                    "PK, TK, KG or 01 to 12",
                    "",
                ),
            }
        }
        list.sort_unstable();
        list.dedup();
        let span = section.table.get("grades").map(toml::Spanned::span);
        return (Applies::Grades(list), span);
    }
    (Applies::Everyone, None)
}

/// Notes an id whose band is not the band of its ages.
fn check_id(reader: &mut Reader<'_>, id: &str, span: &Range<usize>, applies: &Applies) {
    if let (Applies::Ages { from, to }, (finding, Some(band))) =
        (applies, threshold::split_band(id))
    {
        let expected = threshold::band((*from, *to));
        if band != expected {
            reader.fault(
                span.clone(),
                format!("the id says {band}, the ages say {expected}"),
                format!("{finding}.{expected}"),
                "",
            );
        }
    }
}

fn metric(reader: &mut Reader<'_>, section: &Section<'_, '_>, measure: Measure) -> Option<Metric> {
    let known = threshold::metrics(measure);
    if known.is_empty() {
        if let Some((_, span)) = reader.optional(section, "metric") {
            reader.fault(
                span,
                format!("{} has no metric", measure.title()),
                "no metric here",
                "",
            );
        }
        return None;
    }
    let words = known
        .iter()
        .map(|m| m.word())
        .collect::<Vec<_>>()
        .join(", ");
    let (word, span) = reader.string(section, "metric")?;
    reader.word(&word, span, "metric", &words, |w| {
        Metric::from_word(w).filter(|m| known.contains(m))
    })
}

fn risk(reader: &mut Reader<'_>, section: &Section<'_, '_>) -> RiskRule {
    let Some((word, span)) = reader.optional(section, "amblyopia_risk") else {
        return RiskRule::None;
    };
    let words = format!(
        "{}, isoametropic or one eye anisometropic, one eye anisometropic",
        RiskKind::words()
    );
    match word.as_str() {
        "" => RiskRule::None,
        "isoametropic or one eye anisometropic" => RiskRule::ByEyes,
        "one eye anisometropic" => RiskRule::OneEyeAlone,
        other => reader
            .word(other, span, "amblyopia risk", &words, RiskKind::from_word)
            .map_or(RiskRule::None, RiskRule::Kind),
    }
}

fn findings(reader: &mut Reader<'_>, section: &Section<'_, '_>, key: &str) -> Vec<Finding> {
    let words = format!(
        "{}, {}, red reflex absent",
        SignKind::words(),
        History::words()
    );
    reader
        .list(section, key)
        .into_iter()
        .filter_map(|(word, span)| reader.word(&word, span, "finding", &words, finding))
        .collect()
}

fn finding(word: &str) -> Option<Finding> {
    if word == "under_care" {
        return Some(Finding::UnderCare);
    }
    if let Some(reflex) = word.strip_prefix("red reflex ") {
        return Reflex::from_word(reflex).map(Finding::Reflex);
    }
    SignKind::from_word(word)
        .map(Finding::Sign)
        .or_else(|| History::from_word(word).map(Finding::History))
}

/// Notes overlaps and holes between the bands of one finding.
fn check_bands(reader: &mut Reader<'_>, all: &[Band]) {
    let mut findings: Vec<&str> = all.iter().map(|b| threshold::split_band(&b.id).0).collect();
    findings.sort_unstable();
    findings.dedup();
    for finding in findings {
        let of_finding = || {
            all.iter()
                .filter(|b| threshold::split_band(&b.id).0 == finding)
        };
        let mut bands: Vec<(u32, Option<u32>, &Range<usize>)> = of_finding()
            .filter_map(|b| match b.applies {
                Applies::Ages { from, to } => Some((from, to, &b.span)),
                _ => None,
            })
            .collect();
        bands.sort_by_key(|b| (b.0, b.1.unwrap_or(u32::MAX)));
        for pair in bands.windows(2) {
            let (before, after) = (&pair[0], &pair[1]);
            match before.1 {
                Some(end) if end == after.0 => {}
                Some(end) if end < after.0 => reader.fault(
                    after.2.clone(),
                    format!(
                        "a hole in the age bands of {finding}: nothing for {end} to {} months",
                        after.0 - 1
                    ),
                    format!("a band that starts at {end}"),
                    "each band starts where the one before ends",
                ),
                end => reader.fault(
                    after.2.clone(),
                    format!("age bands of {finding} overlap from {} months", after.0),
                    end.map_or("one band".to_owned(), |end| {
                        format!("a band that starts at {end}")
                    }),
                    "each band starts where the one before ends",
                ),
            }
        }
        let mut grades: Vec<Grade> = Vec::new();
        for band in of_finding() {
            if let Applies::Grades(list) = &band.applies {
                if let Some(twice) = list.iter().find(|g| grades.contains(g)) {
                    reader.fault(
                        band.span.clone(),
                        format!("grade {twice} of {finding} stands twice"),
                        "each grade once",
                        "",
                    );
                }
                grades.extend(list);
            }
        }
    }
}
