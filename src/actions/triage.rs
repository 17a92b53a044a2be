//! How serious and how soon: the condition group and the clinic bands of a child, in words.

use std::sync::Arc;

use crate::domain::age::AgeMonths;
use crate::domain::outcome::{Outcome, OutcomeKind};
use crate::domain::readings::Readings;
use crate::rules::Library;
use crate::rules::explain::source_words;
use crate::rules::grading::{
    Clinical, Graded, Grading, GradingKind, Level, Spoke, Window, severity, triage,
};

/// What is said where a programme has chosen no triage set.
pub const NO_TRIAGE_SET: &str = "no clinic bands: the programme has chosen no triage set \
(twoline setting set triage ID; twoline rules list names them)";

/// What one table says of a child.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Said {
    /// The table, as it is named in a sentence.
    pub by: Arc<str>,
    /// Edition; with who approved it where it is local.
    pub edition: String,
    /// What it answers.
    pub graded: Graded,
}

impl Said {
    fn new(grading: &Grading, graded: Graded) -> Said {
        let edition = match &grading.local {
            Some(a) => format!(
                "{}, local, approved by {} on {}",
                grading.edition, a.by, a.on
            ),
            None => grading.edition.to_string(),
        };
        Said {
            by: Arc::clone(&grading.short_title),
            edition,
            graded,
        }
    }

    /// Returns the group or band that stands, if one does.
    pub fn level(&self) -> Option<Level> {
        self.graded.first().map(|s| s.level)
    }
}

/// What the tables of condition groups and of clinic bands say of a child.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Standing {
    /// One for each table of condition groups.
    pub groups: Vec<Said>,
    /// One for each triage set that the programme has chosen.
    pub bands: Vec<Said>,
    /// Chosen triage sets that are not among the rule files.
    pub missing: Vec<String>,
}

impl Standing {
    /// Says what the tables say of a screening. The age is that of the screening day.
    pub fn of(
        library: &Library,
        chosen: &[String],
        age: Option<AgeMonths>,
        readings: &Readings,
    ) -> Standing {
        let facts = Clinical::of_screening(age, readings);
        let groups = library
            .gradings()
            .filter(|g| g.kind == GradingKind::Severity)
            .map(|g| Said::new(g, severity(g, &facts)))
            .collect();
        let mut bands = Vec::new();
        let mut missing = Vec::new();
        for id in chosen {
            match triage_set(library, id) {
                Some(set) => bands.push(Said::new(set, triage(set, &facts))),
                None => missing.push(id.clone()),
            }
        }
        Standing {
            groups,
            bands,
            missing,
        }
    }

    /// Returns the condition group, the more serious where tables differ.
    pub fn group(&self) -> Option<u32> {
        self.groups
            .iter()
            .filter_map(|said| match said.level() {
                Some(Level::Group(group)) => Some(group),
                _ => None,
            })
            .min()
    }

    /// Returns the table whose band is the soonest, with the entry that spoke.
    pub fn band(&self) -> Option<(&Said, &Spoke)> {
        self.bands
            .iter()
            .filter_map(|said| said.graded.first().map(|spoke| (said, spoke)))
            .min_by_key(|(_, spoke)| spoke.level)
    }

    /// Returns the soonest number of days that a band prints.
    pub fn act_within_days(&self) -> Option<u32> {
        self.band()
            .and_then(|(_, spoke)| spoke.level.act_within_days())
    }

    /// Returns where two chosen sets differ: the sooner is taken, both are named.
    pub fn conflict(&self) -> Option<String> {
        let (by, soonest) = self.band()?;
        let others: Vec<String> = self
            .bands
            .iter()
            .filter_map(|said| Some((said, said.level()?)))
            .filter(|(_, level)| *level != soonest.level)
            .map(|(said, level)| format!("{} says {}", said.by, level.in_words()))
            .collect();
        (!others.is_empty()).then(|| {
            format!(
                "{} says {}; {}: the sooner is taken",
                by.by,
                soonest.level.in_words(),
                others.join("; ")
            )
        })
    }

    /// Returns group and band in one line, where something was referred or asked back and they are
    /// known.
    pub fn short(&self, outcome: OutcomeKind) -> Option<String> {
        if !is_asked(outcome) {
            return None;
        }
        let group = self.group().map(|group| format!("condition group {group}"));
        let band = self.band().map(|(said, spoke)| {
            let words = spoke.level.in_words();
            format!("clinic band {words} ({})", with_remarks(&said.by, spoke))
        });
        let parts: Vec<String> = group.into_iter().chain(band).collect();
        (!parts.is_empty()).then(|| parts.join(" · "))
    }

    /// Returns all of it as plain lines, empty where nothing was referred or asked back.
    pub fn lines_for(&self, outcome: OutcomeKind) -> Vec<String> {
        if is_asked(outcome) {
            self.lines()
        } else {
            Vec::new()
        }
    }

    /// Returns all of it as plain lines.
    pub fn lines(&self) -> Vec<String> {
        let mut out =
            vec!["How serious and how soon (for the order of a list, not a diagnosis)".to_owned()];
        for said in &self.groups {
            said_lines("condition group", said, &mut out);
        }
        for said in &self.bands {
            said_lines("clinic band", said, &mut out);
        }
        out.extend(self.conflict().map(|words| format!("  conflict   {words}")));
        out.extend(
            self.missing
                .iter()
                .map(|id| format!("  the triage set {id} is not among the rule files")),
        );
        if self.bands.is_empty() && self.missing.is_empty() {
            out.push(NO_TRIAGE_SET.to_owned());
        }
        out
    }
}

/// Says whether the question how serious and how soon is asked at all.
fn is_asked(outcome: OutcomeKind) -> bool {
    matches!(outcome, OutcomeKind::Refer | OutcomeKind::Rescreen)
}

fn said_lines(what: &str, said: &Said, out: &mut Vec<String>) {
    let head = |words: &str| format!("{what} ({}): {words}", said.by);
    if let Some(outside) = &said.graded.outside {
        out.push(head(&format!("none, {outside}")));
        return;
    }
    let Some(first) = said.graded.first() else {
        out.push(head(if said.graded.could_be.is_empty() {
            "none of this table"
        } else {
            "not known"
        }));
        could_be(&said.graded, out);
        return;
    };
    out.push(head(&format!(
        "{}, {}",
        first.level.in_words(),
        first.finding
    )));
    for (name, text) in [
        ("reading", first.reading.clone()),
        ("threshold", first.threshold.clone()),
        ("source", source_words(&first.source)),
        ("edition", said.edition.clone()),
        ("note", notes(first)),
    ] {
        if !text.is_empty() {
            out.push(format!("  {name:<9}  {text}"));
        }
    }
    for other in said.graded.spoke.iter().skip(1) {
        out.push(format!(
            "  also       {}, {}{}",
            other.level.in_words(),
            other.finding,
            match notes(other) {
                notes if notes.is_empty() => notes,
                notes => format!(" ({notes})"),
            }
        ));
    }
    could_be(&said.graded, out);
}

/// Returns a text with what an entry says of itself behind it.
pub(super) fn with_remarks(text: &str, spoke: &Spoke) -> String {
    std::iter::once(text)
        .chain(spoke.remarks.iter().map(String::as_str))
        .collect::<Vec<_>>()
        .join("; ")
}

fn notes(spoke: &Spoke) -> String {
    spoke
        .remarks
        .iter()
        .cloned()
        .chain((!spoke.note.is_empty()).then(|| spoke.note.to_string()))
        .collect::<Vec<_>>()
        .join("; ")
}

fn could_be(graded: &Graded, out: &mut Vec<String>) {
    let mut said: Vec<String> = Vec::new();
    for spoke in &graded.could_be {
        let words = format!("{} ({})", spoke.level.in_words(), spoke.finding);
        if !said.contains(&words) {
            said.push(words);
        }
    }
    if !said.is_empty() {
        out.push(format!(
            "  could be   {}: not enough was measured to rule it out",
            said.join("; ")
        ));
    }
}

/// Returns a triage set by its id.
pub(super) fn triage_set<'l>(library: &'l Library, id: &str) -> Option<&'l Grading> {
    library
        .grading(id)
        .filter(|g| g.kind == GradingKind::Triage)
}

/// Returns the treatment window of the chosen sets: the first set that names one.
pub(super) fn windows<'l>(library: &'l Library, chosen: &[String]) -> &'l [Window] {
    chosen
        .iter()
        .filter_map(|id| triage_set(library, id))
        .map(|set| &set.windows[..])
        .find(|windows| !windows.is_empty())
        .unwrap_or(&[])
}

/// Returns the whole reason of an outcome, with how serious and how soon it is after the criteria
/// where it refers or asks back.
pub fn whole_reason(outcome: &Outcome, standing: &Standing) -> Vec<String> {
    let mut lines = crate::rules::explain::whole(outcome);
    let triage = standing.lines_for(outcome.kind);
    if !triage.is_empty() {
        let at = lines
            .iter()
            .rposition(String::is_empty)
            .unwrap_or(lines.len());
        lines.splice(at..at, std::iter::once(String::new()).chain(triage));
    }
    lines
}
