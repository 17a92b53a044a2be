//! The rule sets and protocols that can be named, as plain text.

mod print;

use std::path::{Path, PathBuf};

use crate::domain::text::{nearest, shown};
use crate::rules::show::{self, RuleSheet};
use crate::rules::{Library, RuleErrors};

/// An id that no rule set or protocol has.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("no {what} {found}")]
pub struct UnknownRule {
    what: &'static str,
    found: String,
    near: Option<String>,
}

impl UnknownRule {
    fn new<'i>(what: &'static str, id: &str, known: impl Iterator<Item = &'i str>) -> Self {
        UnknownRule {
            what,
            found: format!("\"{}\"", shown(id, 60)),
            near: nearest(id, known).map(str::to_owned),
        }
    }

    /// Makes the error for a rule set.
    pub fn rule_set(library: &Library, id: &str) -> UnknownRule {
        if library.protocol(id).is_some() {
            return UnknownRule {
                what: "rule set",
                found: format!("\"{id}\", which is a protocol"),
                near: None,
            };
        }
        UnknownRule::new("rule set", id, library.rule_sets().map(|s| &*s.id))
    }

    /// Makes the error for a protocol.
    pub fn protocol(library: &Library, id: &str) -> UnknownRule {
        if library.rule_set(id).is_some() {
            return UnknownRule {
                what: "protocol",
                found: format!("\"{id}\", which is a rule set"),
                near: None,
            };
        }
        UnknownRule::new("protocol", id, library.protocols().map(|p| &*p.id))
    }

    /// Returns what to do.
    pub fn hint(&self) -> String {
        match &self.near {
            Some(near) => format!("did you mean {near}? twoline rules list shows all of them"),
            None => "twoline rules list shows all of them".into(),
        }
    }
}

/// Why local rule files were not taken.
#[derive(Debug, thiserror::Error)]
pub enum RuleFileError {
    /// The file cannot be read.
    #[error("cannot read {path}: {error}")]
    Unreadable {
        /// The file.
        path: String,
        /// What the system said.
        error: std::io::Error,
    },
    /// The files are wrong.
    #[error("{0}")]
    Wrong(RuleErrors),
}

/// Returns the shipped library with local files beside it.
pub fn library_with(files: &[PathBuf]) -> Result<Library, RuleFileError> {
    Library::shipped()
        .with_local(texts_of(files)?)
        .map_err(RuleFileError::Wrong)
}

fn texts_of(files: &[PathBuf]) -> Result<Vec<(String, String)>, RuleFileError> {
    let mut texts = Vec::new();
    for path in files {
        // A pipe would be waited for without end.
        let is_file = std::fs::metadata(path).is_ok_and(|m| m.is_file());
        let text = if is_file {
            std::fs::read_to_string(path)
        } else {
            Err(std::io::Error::other("it is not an ordinary file"))
        };
        let text = text.map_err(|error| unreadable(path, error))?;
        texts.push((file_name(path), text));
    }
    Ok(texts)
}

fn unreadable(path: &Path, error: std::io::Error) -> RuleFileError {
    RuleFileError::Unreadable {
        path: shown(&path.to_string_lossy(), 200),
        error,
    }
}

/// Checks a local rule file, or every `*.toml` file of a folder; returns a line for each.
///
/// # Errors
/// Everything that is wrong, each with its place.
pub fn check(path: &Path) -> Result<Vec<String>, RuleFileError> {
    let mut files = vec![path.to_owned()];
    if path.is_dir() {
        let entries = std::fs::read_dir(path).map_err(|error| unreadable(path, error))?;
        files = entries
            .flatten()
            .map(|entry| entry.path())
            .filter(|file| file.extension().is_some_and(|e| e == "toml"))
            .collect();
        files.sort();
    }
    let checked = crate::rules::check::check(Library::shipped(), &texts_of(&files)?);
    let lines = checked.map_err(RuleFileError::Wrong)?.lines;
    Ok(if lines.is_empty() {
        vec!["no rule file is there".to_owned()]
    } else {
        safe(&lines)
    })
}

/// The set that a start without a base is a copy of.
const COPIED: &str = "joint-policy-2016";

/// Returns the commented start of a local rule set: one that overrides criteria of `base`, or one
/// on its own.
pub fn start(library: &Library, base: Option<&str>, id: &str) -> Result<String, UnknownRule> {
    let name = base.unwrap_or(COPIED);
    let set = library
        .rule_set(name)
        .ok_or_else(|| UnknownRule::rule_set(library, name))?;
    Ok(crate::rules::check::start(set, id, base.is_some()))
}

/// How a rule set or protocol is shown.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum ShowAs {
    /// Lines for a terminal.
    Text,
    /// A page of its own that prints.
    Html,
    /// A table for a spreadsheet: one row for each threshold.
    Csv,
}

/// Returns a rule set or protocol in full, in the form asked for.
pub fn show_as(library: &Library, id: &str, form: ShowAs) -> Result<String, UnknownRule> {
    let mut lines = show(library, id)?;
    Ok(match (form, library.rule_set(id)) {
        (ShowAs::Text, _) => {
            lines.push(String::new());
            lines.join("\n")
        }
        (ShowAs::Html, Some(set)) => print::html(&show::sheet(set)),
        (ShowAs::Html, None) => print::lines_html(id, &lines),
        (ShowAs::Csv, Some(set)) => print::csv(set),
        (ShowAs::Csv, None) => print::lines_csv(&lines),
    })
}

fn file_name(path: &Path) -> String {
    path.file_name()
        .unwrap_or(path.as_os_str())
        .to_string_lossy()
        .into_owned()
}

/// Returns the list of rule sets and protocols, a line each.
pub fn list(library: &Library) -> Vec<String> {
    let mut lines = vec!["Rule sets".to_owned()];
    lines.extend(library.rule_sets().map(show::list_line));
    lines.extend(library.gradings().map(show::grading_line));
    lines.push(String::new());
    lines.push("Protocols".to_owned());
    let width = library
        .protocols()
        .map(|p| p.id.chars().count())
        .max()
        .unwrap_or(0);
    lines.extend(
        library
            .protocols()
            .map(|p| format!("{:width$}  {} ({})", &*p.id, &*p.title, &*p.edition)),
    );
    safe(&lines)
}

/// Returns a rule set or protocol in full.
pub fn show(library: &Library, id: &str) -> Result<Vec<String>, UnknownRule> {
    if let Some(set) = library.rule_set(id) {
        return Ok(safe(&sheet_lines(&show::sheet(set))));
    }
    if let Some(grading) = library.grading(id) {
        return Ok(safe(&sheet_lines(&show::grading_sheet(grading))));
    }
    if let Some(protocol) = library.protocol(id) {
        return Ok(safe(&show::protocol_lines(protocol)));
    }
    let ids = library
        .rule_sets()
        .map(|s| &*s.id)
        .chain(library.gradings().map(|g| &*g.id))
        .chain(library.protocols().map(|p| &*p.id));
    Err(UnknownRule::new("rule set or protocol", id, ids))
}

fn safe(lines: &[String]) -> Vec<String> {
    lines.iter().map(|line| shown(line, 10_000)).collect()
}

/// Puts a rule sheet into aligned lines.
fn sheet_lines(sheet: &RuleSheet) -> Vec<String> {
    let mut lines = vec![
        sheet.title.clone(),
        format!("{}  {}", sheet.id, sheet.edition),
    ];
    if !sheet.approval.is_empty() {
        lines.push(sheet.approval.clone());
    }
    lines.push(String::new());
    let mut table = vec![
        std::iter::once("measure".to_owned())
            .chain(sheet.columns.iter().cloned())
            .collect::<Vec<_>>(),
    ];
    for (finding, cells) in &sheet.rows {
        table.push(std::iter::once(finding).chain(cells).cloned().collect());
    }
    lines.extend(aligned(&table));
    if !sheet.line_credit.is_empty() {
        lines.push(String::new());
        lines.push(format!("Line credit: {}", sheet.line_credit));
    }
    for (title, items) in [("Sources", &sheet.sources), ("Notes", &sheet.notes)] {
        if !items.is_empty() {
            lines.push(String::new());
            lines.push(title.to_owned());
            lines.extend(items.iter().map(|item| format!("- {item}")));
        }
    }
    lines
}

/// Pads the cells of each column to one width, as a terminal shows it.
fn aligned(table: &[Vec<String>]) -> Vec<String> {
    use unicode_width::UnicodeWidthStr;
    let columns = table.iter().map(Vec::len).max().unwrap_or(0);
    let widths: Vec<usize> = (0..columns)
        .map(|i| {
            table
                .iter()
                .filter_map(|row| row.get(i))
                .map(|cell| cell.width())
                .max()
                .unwrap_or(0)
        })
        .collect();
    table
        .iter()
        .map(|row| {
            let mut line = String::new();
            for (cell, width) in row.iter().zip(&widths) {
                line.push_str(cell);
                line.push_str(&" ".repeat(width - cell.width() + 2));
            }
            line.trim_end().to_owned()
        })
        .collect()
}
