//! TOML text to typed rule sets and protocols; every fault is found before anything is refused.

mod based_on;
mod criterion;
mod grading;
mod protocol;
mod reader;
mod source;

use std::sync::Arc;

use sha2::{Digest, Sha256};
use toml::de::DeTable;

use crate::domain::acuity::LineCredit;
use crate::domain::number;
use crate::domain::outcome::Source;
use crate::rules::error::RuleError;
use crate::rules::grading::{Grading, GradingKind};
use crate::rules::{Applies, Approval, Criterion, Kind, Library, Protocol, RuleSet, threshold};
use reader::{Reader, Section};

/// What one file turned out to be.
pub(super) enum Loaded {
    /// A rule set.
    Set(Box<RuleSet>),
    /// A protocol, still to be checked against the library.
    Protocol(Box<Protocol>),
    /// A table of condition groups or clinic bands.
    Grading(Box<Grading>),
}

const SET_KEYS: &[&str] = &[
    "id",
    "title",
    "short_title",
    "edition",
    "kind",
    "region",
    "status",
    "note",
    "ages",
    "line_credit",
    "line_credit_source",
    "approved_by",
    "approved_on",
    "based_on",
    "remove",
    "source",
    "criterion",
];

/// Loads one file; `local` files must say who approved them. Protocols look up their rule sets in
/// `library`.
pub(super) fn load(
    file: &str,
    text: &str,
    local: bool,
    library: &Library,
) -> Result<Loaded, Vec<RuleError>> {
    let (table, faults) = DeTable::parse_recoverable(text);
    let mut reader = Reader::new(file, text);
    for fault in faults {
        let span = fault.span().unwrap_or(0..0);
        let message = fault
            .message()
            .lines()
            .next()
            .unwrap_or_default()
            .to_owned();
        reader.fault(
            span,
            format!("not valid TOML: {message}"),
            "TOML, as in the shipped rule files",
            "",
        );
    }
    if !reader.errors.is_empty() {
        return Err(reader.errors);
    }
    let root = Section {
        table: table.get_ref(),
        span: 0..text.lines().next().map_or(0, str::len),
    };
    let kind = match base_kind(&root, library) {
        Some(kind) => Some((kind, 0..0)),
        None => reader.string(&root, "kind"),
    };
    let is_protocol = kind.as_ref().is_some_and(|(k, _)| k == "protocol");
    let loaded = if is_protocol {
        protocol::load(&mut reader, &root, local, library).map(|p| Loaded::Protocol(Box::new(p)))
    } else if let Some(kind) = kind.as_ref().and_then(|(k, _)| match k.as_str() {
        "severity" => Some(GradingKind::Severity),
        "triage" => Some(GradingKind::Triage),
        _ => None,
    }) {
        grading::load(&mut reader, &root, kind, local).map(|g| Loaded::Grading(Box::new(g)))
    } else {
        let kind = kind.and_then(|(word, span)| {
            reader.word(
                &word,
                span,
                "kind",
                "acuity, refraction, signs, severity, triage or protocol",
                Kind::from_word,
            )
        });
        rule_set(&mut reader, &root, kind, local, library).map(|s| Loaded::Set(Box::new(s)))
    };
    match loaded {
        Some(loaded) if reader.errors.is_empty() => Ok(loaded),
        _ => {
            reader.errors.sort_by_key(|e| (e.line, e.column));
            Err(reader.errors)
        }
    }
}

/// Returns the kind of the rule set that a local file is based on, where the file names none.
fn base_kind(root: &Section<'_, '_>, library: &Library) -> Option<String> {
    let base = root.table.get("based_on")?.get_ref().as_str()?;
    let unsaid = !root.table.contains_key("kind");
    let set = library.rule_set(base).filter(|_| unsaid)?;
    Some(set.kind.word().to_owned())
}

fn rule_set(
    reader: &mut Reader<'_>,
    root: &Section<'_, '_>,
    kind: Option<Kind>,
    local: bool,
    library: &Library,
) -> Option<RuleSet> {
    reader.only(root, SET_KEYS);
    let base = based_on::read(reader, root, local, library);
    let head = head(reader, root, local);
    let sources = source::all(reader, root);
    let (credit, credit_text, credit_source) = line_credit(reader, root, &sources);
    let set_ages = reader.optional(root, "ages").and_then(|(text, span)| {
        let ages = threshold::ages(&text);
        if ages.is_none() {
            reader.fault(
                span,
                format!("`{text}` is not an age band"),
                "completed months, such as 36..48 or 60..",
                "",
            );
        }
        ages
    });
    let criteria = criterion::load_all(reader, root, "criterion", &sources, base.as_ref());
    let kept = base.as_ref().is_some_and(|b| {
        b.kept(|id| criteria.iter().any(|c| *c.id == *id))
            .next()
            .is_some()
    });
    if criteria.is_empty() && !kept && reader.errors.is_empty() {
        reader.fault(
            root.span.clone(),
            "a rule set without a criterion",
            "at least one [[criterion]]",
            "",
        );
    }
    let (head, kind) = (head?, kind?);
    let span = set_ages.or_else(|| span_of(&criteria));
    let by_grade = criteria
        .iter()
        .any(|c| matches!(c.applies, Applies::Grades(_)));
    let set = RuleSet {
        id: head.id.into(),
        short_title: said_by(head.short_title, head.approval.as_ref()),
        title: head.title,
        edition: head.edition.into(),
        kind,
        region: reader
            .optional(root, "region")
            .map(|v| v.0)
            .unwrap_or_default(),
        status: reader
            .optional(root, "status")
            .map(|v| v.0)
            .unwrap_or_default(),
        note: reader
            .optional(root, "note")
            .map(|v| v.0)
            .unwrap_or_default(),
        credit,
        credit_text,
        credit_source,
        sources,
        criteria,
        local: head.approval,
        text: reader.text.into(),
        content_hash: hash([reader.text]),
        span,
        by_grade,
        based_on: None,
    };
    Some(based_on::approved(match base {
        Some(base) => base.completed(set),
        None => set,
    }))
}

/// Returns how a set names itself in one sentence; a local one says that it is.
fn said_by(short_title: String, approval: Option<&Approval>) -> Arc<str> {
    match approval {
        Some(_) => format!("{short_title}, local").into(),
        None => short_title.into(),
    }
}

/// Returns the ages that all bands of a set cover together.
fn span_of(criteria: &[Criterion]) -> Option<(u32, Option<u32>)> {
    criteria
        .iter()
        .filter_map(|c| match c.applies {
            Applies::Ages { from, to } => Some((from, to)),
            _ => None,
        })
        .reduce(|a, b| (a.0.min(b.0), a.1.zip(b.1).map(|(x, y)| x.max(y))))
}

/// Returns the SHA-256 of several texts in hex; one text alone hashes as its bytes.
pub(super) fn hash<'a>(texts: impl IntoIterator<Item = &'a str>) -> Arc<str> {
    use std::fmt::Write;
    let mut hasher = Sha256::new();
    for (i, text) in texts.into_iter().enumerate() {
        if i > 0 {
            hasher.update([0]);
        }
        hasher.update(text.as_bytes());
    }
    let mut hex = String::with_capacity(64);
    for byte in hasher.finalize() {
        let _ = write!(hex, "{byte:02x}");
    }
    hex.into()
}

/// What every file starts with.
struct Head {
    id: String,
    title: String,
    short_title: String,
    edition: String,
    approval: Option<Approval>,
}

fn head(reader: &mut Reader<'_>, root: &Section<'_, '_>, local: bool) -> Option<Head> {
    let id = reader.string(root, "id").filter(|(id, span)| {
        let good = !id.is_empty()
            && id.len() <= 64
            && id
                .bytes()
                .all(|b| b.is_ascii_lowercase() || b.is_ascii_digit() || b == b'-' || b == b'.');
        if !good {
            reader.fault(
                span.clone(),
                "not an id",
                "small letters, digits, `-` and `.`",
                "",
            );
        }
        good
    });
    let title = reader.string(root, "title");
    let short_title = reader.optional(root, "short_title").map(|v| v.0);
    let edition = reader.string(root, "edition");
    let by = if root.table.contains_key("approved_by") {
        reader.string(root, "approved_by")
    } else {
        None
    };
    let on = reader.date(root, "approved_on");
    let approval = by.zip(on).map(|((by, _), on)| Approval { by, on });
    if local {
        for key in ["approved_by", "approved_on"] {
            if !root.table.contains_key(key) {
                reader.fault(
                    root.span.clone(),
                    format!("`{key}` is missing"),
                    format!("{key} = \"…\""),
                    "a local file names the licensed professional who approved it, and the date",
                );
            }
        }
    }
    let title = title?.0;
    Some(Head {
        id: id?.0,
        short_title: short_title.unwrap_or_else(|| title.clone()),
        title,
        edition: edition?.0,
        approval,
    })
}

fn line_credit(
    reader: &mut Reader<'_>,
    root: &Section<'_, '_>,
    sources: &[Arc<Source>],
) -> (LineCredit, Arc<str>, Arc<Source>) {
    let Some((text, span)) = reader.optional(root, "line_credit") else {
        return (
            LineCredit::Majority,
            "majority of the line".into(),
            source::practice(),
        );
    };
    let credit = if text == "majority" {
        Some(LineCredit::Majority)
    } else {
        text.split_once(" of ").and_then(|(correct, of)| {
            let correct = u32::try_from(number::fixed(correct.trim(), 0)?).ok()?;
            let of = u32::try_from(number::fixed(of.trim(), 0)?).ok()?;
            (1..=of)
                .contains(&correct)
                .then_some(LineCredit::Ratio { correct, of })
        })
    };
    if credit.is_none() {
        reader.fault(
            span,
            format!("`{text}` is not a line credit"),
            "\"majority\" or \"3 of 4\"",
            "",
        );
    }
    let source = source::named(reader, root, "line_credit_source", sources);
    (
        credit.unwrap_or(LineCredit::Majority),
        if text == "majority" {
            "majority of the line".into()
        } else {
            text.into()
        },
        source.unwrap_or_else(source::practice),
    )
}
