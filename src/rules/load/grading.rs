//! A table of condition groups or clinic bands.

use std::sync::Arc;

use crate::domain::outcome::Source;
use crate::rules::Applies;
use crate::rules::grading::{
    CONDITION_EXPECTED, Condition, Entry, Grading, GradingKind, Level, Taken, Terms, Window,
};

use super::reader::{Reader, Section};
use super::{criterion, hash, head, said_by, source};

const KEYS: &[&str] = &[
    "id",
    "title",
    "short_title",
    "edition",
    "kind",
    "region",
    "status",
    "note",
    "ages",
    "risk_factors",
    "taken",
    "approved_by",
    "approved_on",
    "source",
    "column",
    "entry",
    "window",
];
const LEVEL_KEYS: [&str; 4] = ["at_once", "within_days", "group", "repeat_months"];
const ENTRY_KEYS: &[&str] = &[
    "id",
    "finding",
    "ages",
    "at_once",
    "within_days",
    "group",
    "repeat_months",
    "all",
    "except",
    "source",
    "note",
];

pub(super) fn load(
    reader: &mut Reader<'_>,
    root: &Section<'_, '_>,
    kind: GradingKind,
    local: bool,
) -> Option<Grading> {
    reader.only(root, KEYS);
    let head = head(reader, root, local);
    let sources = source::all(reader, root);
    let (applies, _) = criterion::applies(reader, root);
    let mut terms = Terms {
        taken: taken(reader, root, &sources),
        ..Terms::default()
    };
    terms.factors = conditions(reader, root, "risk_factors", &terms);
    let mut titles = Vec::new();
    for section in reader.sections(root, "column") {
        reader.only(
            &section,
            &["at_once", "within_days", "group", "repeat_months", "title"],
        );
        let title = reader.string(&section, "title");
        if let (Some(level), Some((title, _))) = (level(reader, &section, kind), title) {
            titles.push((level, Arc::from(title)));
        }
    }
    let mut entries: Vec<Entry> = Vec::new();
    for section in reader.sections(root, "entry") {
        let loaded = entry(reader, &section, kind, &sources, &terms);
        if let Some(twice) = loaded
            .as_ref()
            .filter(|e| entries.iter().any(|o| o.id == e.id))
        {
            let what = format!("entry `{}` stands twice", twice.id);
            reader.fault(section.span.clone(), what, "an id of its own", "");
        }
        entries.extend(loaded);
    }
    if entries.is_empty() && reader.errors.is_empty() {
        reader.fault(
            root.span.clone(),
            "a table without an entry",
            "at least one [[entry]]",
            "",
        );
    }
    let windows = windows(reader, root, &sources);
    let mut text = |key: &str| reader.optional(root, key).map(|v| v.0).unwrap_or_default();
    let (region, status, note) = (text("region"), text("status"), text("note"));
    let head = head?;
    Some(Grading {
        id: head.id.into(),
        short_title: said_by(head.short_title, head.approval.as_ref()),
        title: head.title,
        edition: head.edition.into(),
        kind,
        region,
        status,
        note,
        applies,
        titles,
        entries,
        taken: terms.taken,
        windows,
        sources,
        local: head.approval,
        text: reader.text.into(),
        content_hash: hash([reader.text]),
    })
}

fn conditions(
    reader: &mut Reader<'_>,
    section: &Section<'_, '_>,
    key: &str,
    terms: &Terms,
) -> Vec<Condition> {
    let mut out = Vec::new();
    for (text, span) in reader.list(section, key) {
        match Condition::parse(&text, terms) {
            Some(condition) => out.push(condition),
            None => reader.fault(
                span,
                format!("`{text}` is not a condition"),
                CONDITION_EXPECTED,
                "",
            ),
        }
    }
    out
}

/// Reads what words without a number are taken as.
fn taken(reader: &mut Reader<'_>, root: &Section<'_, '_>, sources: &[Arc<Source>]) -> Vec<Taken> {
    let mut out = Vec::new();
    for section in reader.sections(root, "taken") {
        reader.only(&section, &["word", "as", "source"]);
        let word = reader.string(&section, "word");
        let stands_for = reader.string(&section, "as");
        let source = source::named(reader, &section, "source", sources);
        let Some((stands_for, span)) = stands_for else {
            continue;
        };
        if Condition::parse(&stands_for, &Terms::default()).is_none() {
            reader.fault(
                span,
                format!("`{stands_for}` is not a condition"),
                CONDITION_EXPECTED,
                "",
            );
        }
        if let (Some((word, _)), Some(source)) = (word, source) {
            out.push(Taken {
                word: word.into(),
                stands_for: stands_for.into(),
                source,
            });
        }
    }
    out
}

/// Reads the group or band; exactly one must be named, and one that goes with the kind.
fn level(reader: &mut Reader<'_>, section: &Section<'_, '_>, kind: GradingKind) -> Option<Level> {
    let given: Vec<&str> = LEVEL_KEYS
        .into_iter()
        .filter(|key| section.table.contains_key(*key))
        .collect();
    let fits = |key: &str| (key == "group") == (kind == GradingKind::Severity);
    let [key] = given.as_slice() else {
        let what = "not exactly one group or band";
        reader.fault(
            section.span.clone(),
            what,
            "within_days = 30, at_once = true or group = 1",
            "",
        );
        return None;
    };
    if !fits(key) {
        let what = format!("`{key}` does not go with this kind of table");
        reader.fault(
            section.span.clone(),
            what,
            "groups for severity, bands for triage",
            "",
        );
        return None;
    }
    match *key {
        "at_once" => reader
            .flag(section, key)
            .filter(|f| *f)
            .map(|_| Level::AtOnce),
        "within_days" => reader.number(section, key).map(Level::Within),
        "group" => reader.number(section, key).map(Level::Group),
        _ => reader.number(section, key).map(Level::RepeatAfter),
    }
}

fn entry(
    reader: &mut Reader<'_>,
    section: &Section<'_, '_>,
    kind: GradingKind,
    sources: &[Arc<Source>],
    terms: &Terms,
) -> Option<Entry> {
    reader.only(section, ENTRY_KEYS);
    let id = reader.string(section, "id");
    let finding = reader.string(section, "finding");
    let level = level(reader, section, kind);
    let (applies, _) = criterion::applies(reader, section);
    let all = conditions(reader, section, "all", terms);
    let except = conditions(reader, section, "except", terms);
    if all.is_empty() && reader.errors.is_empty() {
        reader.fault(
            section.span.clone(),
            "an entry without a condition",
            "all = [\"…\"]",
            "",
        );
    }
    let source = source::named(reader, section, "source", sources);
    let note = reader
        .optional(section, "note")
        .map(|v| v.0)
        .unwrap_or_default();
    Some(Entry {
        id: id?.0.into(),
        finding: finding?.0.into(),
        level: level?,
        applies,
        all,
        except,
        source: source?,
        note: note.into(),
    })
}

fn windows(
    reader: &mut Reader<'_>,
    root: &Section<'_, '_>,
    sources: &[Arc<Source>],
) -> Vec<Window> {
    let mut out = Vec::new();
    for section in reader.sections(root, "window") {
        reader.only(&section, &["ages", "rank", "words", "source"]);
        let (applies, _) = criterion::applies(reader, &section);
        let rank = reader.number(&section, "rank");
        let words = reader.string(&section, "words");
        let source = source::named(reader, &section, "source", sources);
        if let (Some(rank), Some((words, _)), Some(source)) = (rank, words, source)
            && applies != Applies::Everyone
        {
            out.push(Window {
                applies,
                rank,
                words: words.into(),
                source,
            });
        }
    }
    out
}
