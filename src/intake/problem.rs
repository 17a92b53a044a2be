//! What is wrong with a file, and where.

use std::fmt;

use crate::domain::text::shown;

/// How many problems of one file are kept; the rest is counted.
pub const KEPT: usize = 50;

/// How much of a cell a message shows.
const SHOWN: usize = 60;

/// Where in a file: the row as a spreadsheet counts it, and the line as a text editor does.
///
/// They differ only below a cell that holds a line break. Both start at 1, the header included.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Place {
    /// The row.
    pub row: u64,
    /// The line on which the row starts.
    pub line: u64,
}

impl fmt::Display for Place {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if self.row == self.line {
            write!(f, "row {}", self.row)
        } else {
            write!(f, "row {} (line {})", self.row, self.line)
        }
    }
}

/// What was found: the text of a cell, or a description.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Found {
    /// The text of a cell or header, shortened and safe to print.
    Text(Box<str>),
    /// Something that has no text of its own ("a quote that is never closed").
    What(Box<str>),
}

impl Found {
    /// Returns the text or the description.
    pub fn as_str(&self) -> &str {
        match self {
            Found::Text(text) | Found::What(text) => text,
        }
    }
}

impl fmt::Display for Found {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Found::Text(text) if text.is_empty() => f.write_str("nothing"),
            Found::Text(text) => write!(f, "\"{text}\""),
            Found::What(what) => f.write_str(what),
        }
    }
}

/// One thing that is wrong with a file. Its text is one line and safe to print.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Problem {
    /// The file's name.
    pub file: Box<str>,
    /// The row and line, unless the whole file is meant.
    pub place: Option<Place>,
    /// The column by its header, or by its number where there is none.
    pub column: Option<Box<str>>,
    /// What was there.
    pub found: Found,
    /// What would have been taken.
    pub expected: Box<str>,
    /// How to go on, where that is not plain from what was expected.
    pub cure: Option<Box<str>>,
}

impl Problem {
    /// Makes a problem of a whole file.
    pub fn of_file(file: &str, what: impl Into<String>, expected: impl Into<String>) -> Problem {
        Problem {
            file: safe(file, 200),
            place: None,
            column: None,
            found: Found::What(safe(&what.into(), 200)),
            expected: safe(&expected.into(), 1_500),
            cure: None,
        }
    }

    /// Makes a problem of one cell from its text.
    pub fn of_cell(
        file: &str,
        place: Place,
        column: &str,
        text: &str,
        expected: impl Into<String>,
    ) -> Problem {
        Problem {
            place: Some(place),
            column: Some(safe(column, SHOWN)),
            found: Found::Text(safe(text.trim_end_matches(['\r', '\n']), SHOWN)),
            ..Problem::of_file(file, "", expected)
        }
    }

    /// Returns the problem with a place.
    #[must_use]
    pub fn at(mut self, place: Place) -> Problem {
        self.place = Some(place);
        self
    }

    /// Returns the problem with a column.
    #[must_use]
    pub fn in_column(mut self, column: &str) -> Problem {
        self.column = Some(safe(column, SHOWN));
        self
    }

    /// Returns the problem with a way to go on.
    #[must_use]
    pub fn cure(mut self, cure: impl Into<String>) -> Problem {
        self.cure = Some(safe(&cure.into(), 400));
        self
    }
}

fn safe(text: &str, limit: usize) -> Box<str> {
    shown(text, limit).into()
}

impl fmt::Display for Problem {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}: ", self.file)?;
        match (&self.place, &self.column) {
            (Some(place), Some(column)) => write!(f, "{place}, column {column}: ")?,
            (Some(place), None) => write!(f, "{place}: ")?,
            (None, Some(column)) => write!(f, "column {column}: ")?,
            (None, None) => {}
        }
        write!(f, "found {}, expected {}", self.found, self.expected)?;
        self.cure
            .as_ref()
            .map_or(Ok(()), |cure| write!(f, " ({cure})"))
    }
}

/// Everything that is wrong with a file: the first [`KEPT`] problems and a count of all.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Problems {
    kept: Vec<Problem>,
    total: u64,
}

impl Problems {
    /// Adds one.
    pub fn push(&mut self, problem: Problem) {
        self.total += 1;
        if self.kept.len() < KEPT {
            self.kept.push(problem);
        }
    }

    /// Says whether nothing is wrong.
    pub fn is_empty(&self) -> bool {
        self.total == 0
    }

    /// Returns how many there are, kept or not.
    pub fn total(&self) -> u64 {
        self.total
    }

    /// Returns those that were kept, in the order of the file.
    pub fn kept(&self) -> &[Problem] {
        &self.kept
    }

    /// Returns the value if nothing is wrong, else the problems.
    pub fn or<T>(self, value: T) -> Result<T, Problems> {
        if self.is_empty() {
            Ok(value)
        } else {
            Err(self)
        }
    }
}

impl From<Problem> for Problems {
    fn from(problem: Problem) -> Self {
        Problems {
            kept: vec![problem],
            total: 1,
        }
    }
}

impl fmt::Display for Problems {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (i, problem) in self.kept.iter().enumerate() {
            if i > 0 {
                writeln!(f)?;
            }
            write!(f, "{problem}")?;
        }
        match self.total - self.kept.len() as u64 {
            0 => Ok(()),
            1 => write!(f, "\nand 1 more problem"),
            more => write!(f, "\nand {more} more problems"),
        }
    }
}

impl std::error::Error for Problems {}
