//! A protocol file.

use std::sync::Arc;

use crate::domain::acuity::LineCredit;
use crate::domain::codes::AcuityMethod;
use crate::domain::outcome::Source;
use crate::rules::{
    Applies, Exemption, FirstFail, Kind, Library, Measure, NotTestablePolicy, Protocol,
    RequiredTests, RuleSet,
};

use super::reader::{Reader, Section};
use super::{criterion, hash, head, source};

const KEYS: &[&str] = &[
    "id",
    "title",
    "short_title",
    "edition",
    "kind",
    "note",
    "rule_sets",
    "when_done",
    "instrument",
    "instrument_below_months",
    "instrument_stands_in",
    "required",
    "required_at",
    "rescreen_days",
    "rescreen_working_days",
    "rescreen_source",
    "settings_source",
    "exempt",
    "broken_glasses",
    "leave_out",
    "glasses_return_days",
    "glasses_visits",
    "consent",
    "acuity_method",
    "refer_at_once",
    "at_once",
    "not_testable",
    "approved_by",
    "approved_on",
    "source",
];
const NOT_TESTABLE_KEYS: &[&str] = &["ages", "rescreen_months", "source"];

#[allow(clippy::too_many_lines)] // one key after the other
pub(super) fn load(
    reader: &mut Reader<'_>,
    root: &Section<'_, '_>,
    local: bool,
    library: &Library,
) -> Option<Protocol> {
    reader.only(root, KEYS);
    let head = head(reader, root, local);
    let sources = source::all(reader, root);
    let rule_sets = known_sets(reader, root, "rule_sets", library);
    let when_done = known_sets(reader, root, "when_done", library);
    if rule_sets.is_empty() && reader.errors.is_empty() {
        reader.fault(
            root.span.clone(),
            "a protocol without rule sets",
            "rule_sets = [\"…\"]",
            "",
        );
    }
    let instrument = reader.optional(root, "instrument").and_then(|(id, span)| {
        let found = library.rule_set(&id).map(|s| s.id.clone());
        if found.is_none() {
            reader.fault(
                span,
                format!("no rule set `{id}`"),
                "the id of a rule set",
                "",
            );
        }
        found
    });
    let required = required(reader, root);
    let settings_source = source::named_if_given(reader, root, "settings_source", &sources)
        .unwrap_or_else(source::practice);
    let first_fail_source = source::named_if_given(reader, root, "rescreen_source", &sources)
        .unwrap_or_else(|| Arc::clone(&settings_source));
    let first_fail = first_fail(reader, root);
    let exempt = exempt(reader, root);
    let broken_glasses_refer = reader
        .optional(root, "broken_glasses")
        .and_then(|(word, span)| {
            reader.word(
                &word,
                span,
                "broken_glasses",
                "refer, return",
                |w| match w {
                    "refer" => Some(true),
                    "return" => Some(false),
                    _ => None,
                },
            )
        })
        .unwrap_or(true);
    let consent_opt_in = match reader.optional(root, "consent") {
        None => false,
        Some((word, span)) => reader
            .word(&word, span, "consent", "opt-out, opt-in", |w| match w {
                "opt-out" => Some(false),
                "opt-in" => Some(true),
                _ => None,
            })
            .unwrap_or(false),
    };
    let acuity_method = reader
        .optional(root, "acuity_method")
        .and_then(|(word, span)| {
            reader.word(
                &word,
                span,
                "acuity method",
                &AcuityMethod::words(),
                AcuityMethod::from_word,
            )
        });
    let used: Vec<Arc<str>> = rule_sets
        .iter()
        .chain(&when_done)
        .chain(&instrument)
        .cloned()
        .collect();
    let refer_at_once = known_ids(reader, root, "refer_at_once", &used, library);
    let leave_out = known_ids(reader, root, "leave_out", &used, library);
    let at_once = criterion::load_all(reader, root, "at_once", &sources, None);
    let not_testable = not_testable(reader, root, &sources);
    let instrument_below_months = reader.number(root, "instrument_below_months");
    let instrument_stands_in = reader.flag(root, "instrument_stands_in").unwrap_or(false);
    let glasses_return_days = reader.number(root, "glasses_return_days").unwrap_or(14);
    let glasses_visits = reader.number(root, "glasses_visits").unwrap_or(2);
    let note = reader
        .optional(root, "note")
        .map(|v| v.0)
        .unwrap_or_default();
    let head = head?;
    let id: Arc<str> = head.id.into();
    let edition: Arc<str> = head.edition.into();
    let mut texts = vec![reader.text];
    let mut seen: Vec<&Arc<str>> = Vec::new();
    for set in &used {
        if !seen.contains(&set) {
            seen.push(set);
            texts.extend(library.rule_set(set).map(|s| &*s.text));
        }
    }
    let text: Arc<str> = reader.text.into();
    let content_hash = hash(texts);
    Some(Protocol {
        title: head.title,
        note,
        rule_sets,
        when_done,
        instrument,
        instrument_below_months,
        instrument_stands_in,
        required,
        first_fail,
        settings_source,
        first_fail_source,
        exempt,
        broken_glasses_refer,
        leave_out,
        glasses_return_days,
        glasses_visits,
        consent_opt_in,
        acuity_method,
        refer_at_once,
        at_once: RuleSet {
            id: id.clone(),
            title: String::new(),
            short_title: super::said_by(head.short_title, head.approval.as_ref()),
            edition: edition.clone(),
            kind: Kind::Signs,
            region: String::new(),
            status: String::new(),
            note: String::new(),
            credit: LineCredit::Majority,
            credit_text: "".into(),
            credit_source: source::practice(),
            sources: sources.clone(),
            criteria: at_once,
            local: None,
            text: text.clone(),
            content_hash: content_hash.clone(),
            span: None,
            by_grade: false,
            based_on: None,
        },
        not_testable,
        sources,
        local: head.approval,
        id,
        edition,
        text,
        content_hash,
    })
}

fn known_sets(
    reader: &mut Reader<'_>,
    root: &Section<'_, '_>,
    key: &str,
    library: &Library,
) -> Vec<Arc<str>> {
    let mut out = Vec::new();
    for (id, span) in reader.list(root, key) {
        if let Some(set) = library.rule_set(&id) {
            out.push(set.id.clone());
            continue;
        }
        let known = library
            .rule_sets()
            .map(|s| &*s.id)
            .collect::<Vec<_>>()
            .join(", ");
        reader.fault(
            span,
            format!("no rule set `{id}`"),
            format!("one of {known}"),
            "",
        );
    }
    out
}

fn measures(reader: &mut Reader<'_>, section: &Section<'_, '_>, key: &str) -> Vec<Measure> {
    reader
        .list(section, key)
        .into_iter()
        .filter_map(|(word, span)| {
            let words = Measure::words();
            reader.word(&word, span, "measure", &words, Measure::from_word)
        })
        .collect()
}

fn required(reader: &mut Reader<'_>, root: &Section<'_, '_>) -> Vec<RequiredTests> {
    let mut out = vec![RequiredTests {
        applies: Applies::Everyone,
        measures: measures(reader, root, "required"),
    }];
    for section in reader.sections(root, "required_at") {
        reader.only(&section, &["ages", "tests"]);
        let (applies, span) = criterion::applies(reader, &section);
        if span.is_none() {
            reader.fault(
                section.span.clone(),
                "`ages` is missing",
                "ages = \"60..\"",
                "what is required of everybody stands in `required`",
            );
        }
        out.push(RequiredTests {
            applies,
            measures: measures(reader, &section, "tests"),
        });
    }
    out
}

fn first_fail(reader: &mut Reader<'_>, root: &Section<'_, '_>) -> FirstFail {
    let days = reader.number(root, "rescreen_days");
    let working = reader.number(root, "rescreen_working_days");
    if let (Some(_), Some(value)) = (days, root.table.get("rescreen_working_days")) {
        reader.fault(
            value.span(),
            "both calendar and working days",
            "one of rescreen_days and rescreen_working_days",
            "",
        );
    }
    match (days, working) {
        (Some(days), _) => FirstFail::WithinDays(days),
        (None, Some(days)) => FirstFail::WithinSchoolDays(days),
        (None, None) => FirstFail::Refer,
    }
}

fn exempt(reader: &mut Reader<'_>, root: &Section<'_, '_>) -> Vec<Exemption> {
    if !root.table.contains_key("exempt") {
        return Exemption::ALL.to_vec();
    }
    reader
        .list(root, "exempt")
        .into_iter()
        .filter_map(|(word, span)| {
            let words = Exemption::words();
            reader.word(&word, span, "exemption", &words, Exemption::from_word)
        })
        .collect()
}

fn known_ids(
    reader: &mut Reader<'_>,
    root: &Section<'_, '_>,
    key: &str,
    used: &[Arc<str>],
    library: &Library,
) -> Vec<String> {
    let mut out = Vec::new();
    for (id, span) in reader.list(root, key) {
        let known = id.split_once('/').is_some_and(|(set, criterion)| {
            used.iter().any(|u| &**u == set)
                && library
                    .rule_set(set)
                    .is_some_and(|s| s.criteria.iter().any(|c| &*c.id == criterion))
        });
        if known {
            out.push(id);
        } else {
            reader.fault(
                span,
                format!("no criterion `{id}` in this protocol"),
                "rule-set/criterion of a rule set it uses",
                "",
            );
        }
    }
    out
}

fn not_testable(
    reader: &mut Reader<'_>,
    root: &Section<'_, '_>,
    sources: &[Arc<Source>],
) -> Vec<NotTestablePolicy> {
    let mut out = Vec::new();
    for section in reader.sections(root, "not_testable") {
        reader.only(&section, NOT_TESTABLE_KEYS);
        let (applies, _) = criterion::applies(reader, &section);
        let source = source::named(reader, &section, "source", sources);
        // Without a number the next try is when the service says.
        let rescreen_months = reader.number(&section, "rescreen_months");
        if let Some(source) = source {
            out.push(NotTestablePolicy {
                applies,
                rescreen_months,
                source,
            });
        }
    }
    out
}
