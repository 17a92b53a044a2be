//! An outcome in words: for the foot of a screen, a cell of a file, the whole-reason view.

use crate::domain::outcome::{Answer, Outcome};

/// One row of the whole-reason view.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct ReasonLine {
    /// What was asked, in words.
    pub criterion: String,
    /// The reading.
    pub reading: String,
    /// What it answered.
    pub answer: Answer,
    /// The distance to the threshold in words.
    pub margin: String,
    /// The threshold as printed.
    pub threshold: String,
    /// Source and basis.
    pub source: String,
    /// Note and remarks.
    pub note: String,
}

/// Appends the reasons as one cell of text: what refers first, then what is unknown, then what passes.
pub fn reasons_text(_outcome: &Outcome, _out: &mut String) {}

/// Returns one sentence for the foot of a narrow screen.
pub fn short(_outcome: &Outcome) -> String {
    String::new()
}

/// Returns the outcome with its date: `RESCREEN by 28 Oct 2026`.
pub fn headline(_outcome: &Outcome) -> String {
    String::new()
}

/// Returns a row per criterion for the whole-reason view.
pub fn table(_outcome: &Outcome) -> Vec<ReasonLine> {
    Vec::new()
}

/// Returns the whole reason as plain lines, with the cautions.
pub fn whole(_outcome: &Outcome) -> Vec<String> {
    Vec::new()
}
