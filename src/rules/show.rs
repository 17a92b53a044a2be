//! Rule sets and protocols as tables and lines, for `rules list`, `rules show` and the Rules place.

use crate::rules::{Protocol, RuleSet};

/// A rule set as a table: bands across, findings down.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct RuleSheet {
    /// Id.
    pub id: String,
    /// Title.
    pub title: String,
    /// Edition, region and status in words.
    pub edition: String,
    /// Names of the bands, in order.
    pub columns: Vec<String>,
    /// A finding in words, and its threshold in each band (empty where there is none).
    pub rows: Vec<(String, Vec<String>)>,
    /// When a line counts as read; empty where lines are not read.
    pub line_credit: String,
    /// Sources with their basis in words.
    pub sources: Vec<String>,
    /// Notes.
    pub notes: Vec<String>,
    /// "local, approved by … on …"; empty for what is shipped.
    pub approval: String,
}

/// Returns the line of a rule set in the list: id, title, basis.
pub fn list_line(_set: &RuleSet) -> String {
    String::new()
}

/// Returns a rule set as a table.
pub fn sheet(_set: &RuleSet) -> RuleSheet {
    RuleSheet {
        id: String::new(),
        title: String::new(),
        edition: String::new(),
        columns: Vec::new(),
        rows: Vec::new(),
        line_credit: String::new(),
        sources: Vec::new(),
        notes: Vec::new(),
        approval: String::new(),
    }
}

/// Returns a protocol as plain lines.
pub fn protocol_lines(_protocol: &Protocol) -> Vec<String> {
    Vec::new()
}
