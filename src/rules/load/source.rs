//! The sources of a file, and the one that each number names.

use std::sync::Arc;

use crate::domain::outcome::{Basis, Source};

use super::reader::{Reader, Section};

const SOURCE_KEYS: &[&str] = &["key", "citation", "doi", "url", "basis", "quoted_in"];

/// Reads every source that a file declares.
pub(super) fn all(reader: &mut Reader<'_>, root: &Section<'_, '_>) -> Vec<Arc<Source>> {
    let mut out: Vec<Arc<Source>> = Vec::new();
    for section in reader.sections(root, "source") {
        reader.only(&section, SOURCE_KEYS);
        let key = reader.string(&section, "key");
        let citation = reader.string(&section, "citation");
        let basis = reader.string(&section, "basis").and_then(|(word, span)| {
            reader.word(&word, span, "basis", &Basis::words(), Basis::from_word)
        });
        let quoted_in = reader
            .optional(&section, "quoted_in")
            .map(|v| v.0)
            .unwrap_or_default();
        if basis == Some(Basis::Secondary) && quoted_in.is_empty() {
            reader.fault(
                section.span.clone(),
                "`quoted_in` is missing",
                "where the number was read",
                "a secondary source says where it is quoted",
            );
        }
        let locator = reader
            .optional(&section, "doi")
            .map(|v| format!("doi {}", v.0))
            .or_else(|| reader.optional(&section, "url").map(|v| v.0))
            .unwrap_or_default();
        // A source with another fault is still known by its key, so that one fault is one error.
        let Some((key, key_span)) = key else {
            continue;
        };
        let citation = citation.map(|v| v.0).unwrap_or_default();
        let basis = basis.unwrap_or(Basis::Memory);
        if out.iter().any(|s| s.key == key) {
            reader.fault(
                key_span,
                format!("source `{key}` stands twice"),
                "a key of its own",
                "",
            );
            continue;
        }
        out.push(Arc::new(Source {
            key,
            citation,
            locator,
            basis,
            quoted_in,
            approval: String::new(),
        }));
    }
    out
}

/// Returns common practice, which no file needs to declare.
pub(super) fn practice() -> Arc<Source> {
    Arc::new(Source {
        key: "practice".into(),
        citation: "common practice".into(),
        locator: String::new(),
        basis: Basis::Practice,
        quoted_in: String::new(),
        approval: String::new(),
    })
}

/// Returns the source that a key names, which must be there.
pub(super) fn named(
    reader: &mut Reader<'_>,
    section: &Section<'_, '_>,
    key: &str,
    sources: &[Arc<Source>],
) -> Option<Arc<Source>> {
    let (name, span) = reader.string(section, key)?;
    let found = sources.iter().find(|s| s.key == name).cloned();
    if found.is_none() {
        let known = sources
            .iter()
            .map(|s| s.key.as_str())
            .collect::<Vec<_>>()
            .join(", ");
        reader.fault(
            span,
            format!("no source `{name}` in this file"),
            format!("one of {known}"),
            "add a [[source]] with this key",
        );
    }
    found
}

/// Returns the source that a key names, where the key is there.
pub(super) fn named_if_given(
    reader: &mut Reader<'_>,
    section: &Section<'_, '_>,
    key: &str,
    sources: &[Arc<Source>],
) -> Option<Arc<Source>> {
    section
        .table
        .contains_key(key)
        .then(|| named(reader, section, key, sources))
        .flatten()
}
