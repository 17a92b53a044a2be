//! How serious and how soon: condition groups and clinic bands as data, judged by three-valued logic.

mod condition;
mod facts;

mod order;

use std::sync::Arc;

use crate::domain::acuity::LineCredit;
use crate::domain::outcome::Source;
use crate::rules::explain::source_words;
use crate::rules::{Applies, Approval};

pub(super) use condition::{Condition, EXPECTED as CONDITION_EXPECTED, Terms};
pub use facts::{Clinical, Correctedness};

pub use order::{Place, Waiting, order};

/// What a grading answers.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum GradingKind {
    /// Condition groups by how serious they are.
    Severity,
    /// Bands of a clinic by how soon a child is seen.
    Triage,
}

/// One group or band; the smaller goes first.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Level {
    /// Telephone at once.
    AtOnce,
    /// Within so many calendar days.
    Within(u32),
    /// A condition group.
    Group(u32),
    /// Not seen: the test is repeated after so many months.
    RepeatAfter(u32),
}

impl Level {
    /// Returns the days to act within; nothing for a group or a repeat.
    pub fn act_within_days(self) -> Option<u32> {
        match self {
            Level::AtOnce => Some(0),
            Level::Within(days) => Some(days),
            Level::Group(_) | Level::RepeatAfter(_) => None,
        }
    }

    /// Returns the group or band in words.
    pub fn in_words(self) -> String {
        match self {
            Level::AtOnce => "at once: call".to_owned(),
            Level::Within(days) => format!("within {days} days"),
            Level::Group(group) => format!("group {group}"),
            Level::RepeatAfter(months) => format!("repeat in {months} months, not a referral"),
        }
    }
}

/// One entry of the table: all of its conditions and none of its exceptions.
#[derive(Debug, Clone, PartialEq)]
pub struct Entry {
    /// Its id.
    pub id: Arc<str>,
    /// The row it stands in ("amblyopia, one eye").
    pub finding: Arc<str>,
    /// The column it stands in.
    pub level: Level,
    /// Whom it is for.
    pub applies: Applies,
    pub(super) all: Vec<Condition>,
    pub(super) except: Vec<Condition>,
    /// Where it comes from.
    pub source: Arc<Source>,
    /// What should be known about it.
    pub note: Arc<str>,
}

impl Entry {
    /// Returns its conditions as printed.
    pub fn conditions(&self) -> String {
        let join = |list: &[Condition]| {
            list.iter()
                .map(|c| &*c.text)
                .collect::<Vec<_>>()
                .join(", and ")
        };
        if self.except.is_empty() {
            join(&self.all)
        } else {
            format!("{}, except {}", join(&self.all), join(&self.except))
        }
    }
}

/// How an age stands to the time in which treatment helps; for order inside a band only.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Window {
    /// Whom it is for.
    pub applies: Applies,
    /// The smaller goes first.
    pub rank: u32,
    /// In words.
    pub words: Arc<str>,
    /// Where it comes from.
    pub source: Arc<Source>,
}

/// A word that the source prints without a number, and what the file takes it as.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Taken {
    /// The word: "unequal acuity", "new squint".
    pub word: Arc<str>,
    /// The condition it stands for.
    pub stands_for: Arc<str>,
    /// Where that comes from.
    pub source: Arc<Source>,
}

impl Taken {
    /// Returns it as one sentence.
    pub fn in_words(&self) -> String {
        format!(
            "{} is taken as {} ({})",
            self.word,
            self.stands_for,
            source_words(&self.source)
        )
    }
}

/// A published table of groups or bands.
#[derive(Debug, Clone, PartialEq)]
pub struct Grading {
    /// Its id, which appears in files.
    pub id: Arc<str>,
    /// What it is, for people.
    pub title: String,
    /// Its name in one sentence.
    pub short_title: Arc<str>,
    /// Edition.
    pub edition: Arc<str>,
    /// Severity or triage.
    pub kind: GradingKind,
    /// Country or state.
    pub region: String,
    /// `current`, or what came after it.
    pub status: String,
    /// What should be known about it.
    pub note: String,
    /// The ages it speaks of.
    pub applies: Applies,
    /// Titles of the groups or bands, where they have one.
    pub titles: Vec<(Level, Arc<str>)>,
    /// Its entries in the order of the file.
    pub entries: Vec<Entry>,
    /// What words without a number are taken as.
    pub taken: Vec<Taken>,
    /// Treatment window, for order inside a band.
    pub windows: Vec<Window>,
    /// Every source it names.
    pub sources: Vec<Arc<Source>>,
    /// Who approved it, for a local table.
    pub local: Option<Approval>,
    /// The file's text.
    pub text: Arc<str>,
    /// SHA-256 of the text, in hex.
    pub content_hash: Arc<str>,
}

/// Three-valued: holds, does not, cannot be said.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Truth {
    Yes,
    No,
    Unknown,
}

/// One entry that spoke, with why.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Spoke {
    /// Its id.
    pub entry: Arc<str>,
    /// The row.
    pub finding: Arc<str>,
    /// The group or band.
    pub level: Level,
    /// The conditions as printed.
    pub threshold: String,
    /// What was found, in words.
    pub reading: String,
    /// Where it comes from.
    pub source: Arc<Source>,
    /// The entry's note.
    pub note: Arc<str>,
    /// "on presenting acuity", "onset unknown: taken as the soonest it could be".
    pub remarks: Vec<String>,
}

/// What a grading says of a child.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Graded {
    /// The entries that spoke, the most serious or soonest first; empty when none did.
    pub spoke: Vec<Spoke>,
    /// Entries of a more serious group or a sooner band that cannot be ruled out.
    pub could_be: Vec<Spoke>,
    /// Why nothing could be asked: the age is unknown or outside the table.
    pub outside: Option<String>,
}

impl Graded {
    /// Returns the group or band that stands.
    pub fn first(&self) -> Option<&Spoke> {
        self.spoke.first()
    }
}

/// Returns the condition group of a child, with its reasons, by a severity table.
pub fn severity(grading: &Grading, facts: &Clinical<'_>) -> Graded {
    grade(grading, facts)
}

/// Returns the clinic band of a child, with its reasons, by a triage table. The worse eye decides;
/// an unknown onset takes the soonest band it could be, and says so.
pub fn triage(grading: &Grading, facts: &Clinical<'_>) -> Graded {
    grade(grading, facts)
}

fn grade(grading: &Grading, facts: &Clinical<'_>) -> Graded {
    let mut out = Graded::default();
    if grading.applies != Applies::Everyone
        && !facts.age.is_some_and(|age| grading.applies.holds_age(age))
    {
        out.outside = Some(match facts.age {
            None => "the age is not known".to_owned(),
            Some(age) => format!(
                "{} months is outside this table ({})",
                age.0, grading.applies
            ),
        });
        return out;
    }
    for entry in &grading.entries {
        let (truth, onset_assumed) = holds(entry, facts);
        if truth == Truth::No {
            continue;
        }
        let spoke = spoke(entry, facts, onset_assumed && truth == Truth::Yes);
        if truth == Truth::Yes {
            out.spoke.push(spoke);
        } else {
            out.could_be.push(spoke);
        }
    }
    out.spoke.sort_by_key(|s| s.level);
    out.could_be.sort_by_key(|s| s.level);
    if let Some(level) = out.first().map(|s| s.level) {
        out.could_be.retain(|s| s.level < level);
    }
    out
}

fn holds(entry: &Entry, facts: &Clinical<'_>) -> (Truth, bool) {
    let mut unknown = false;
    let mut onset = false;
    match (&entry.applies, facts.age) {
        (Applies::Everyone, _) => {}
        (applies, Some(age)) if !applies.holds_age(age) => return (Truth::No, false),
        (_, Some(_)) => {}
        (_, None) => unknown = true,
    }
    for condition in &entry.all {
        match condition.ask(facts) {
            Truth::No => return (Truth::No, false),
            Truth::Unknown if condition.is_onset() => onset = true,
            Truth::Unknown => unknown = true,
            Truth::Yes => {}
        }
    }
    for condition in &entry.except {
        match condition.ask(facts) {
            Truth::Yes => return (Truth::No, false),
            Truth::Unknown => unknown = true,
            Truth::No => {}
        }
    }
    (if unknown { Truth::Unknown } else { Truth::Yes }, onset)
}

fn spoke(entry: &Entry, facts: &Clinical<'_>, onset_assumed: bool) -> Spoke {
    let mut remarks = Vec::new();
    if onset_assumed {
        remarks.push("onset unknown: taken as the soonest it could be".to_owned());
    }
    if entry.all.iter().any(Condition::means_corrected)
        && facts.corrected != Correctedness::BestCorrected
    {
        remarks.push("on presenting acuity; the band means best-corrected".to_owned());
    }
    remarks.extend(entry.all.iter().filter_map(|c| c.remark(facts)));
    let mut reading: Vec<String> = Vec::new();
    for words in entry.all.iter().map(|c| c.reading(facts)) {
        if !words.is_empty() && !reading.contains(&words) {
            reading.push(words);
        }
    }
    Spoke {
        entry: Arc::clone(&entry.id),
        finding: Arc::clone(&entry.finding),
        level: entry.level,
        threshold: entry.conditions(),
        reading: reading.join("; "),
        source: Arc::clone(&entry.source),
        note: Arc::clone(&entry.note),
        remarks,
    }
}

/// Lines are compared by line; a line counts when more than half of it was read (common practice).
const CREDIT: LineCredit = LineCredit::Majority;
