//! Why letters could not be made.

use crate::domain::text::nearest;

/// Why letters could not be made; nothing was written.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("{file}:{line}:{column}: {message}{}", picture(.text, *.column, *.width))]
pub struct LetterError {
    /// The file.
    pub file: String,
    /// Line, from 1.
    pub line: usize,
    /// Column, from 1.
    pub column: usize,
    /// How many columns it spans.
    pub width: usize,
    /// The line itself.
    pub text: String,
    /// What is wrong, and what would do.
    pub message: String,
}

fn picture(text: &str, column: usize, width: usize) -> String {
    if text.is_empty() {
        return String::new();
    }
    let shown = crate::domain::text::shown(text, 200);
    format!(
        "\n  {shown}\n  {}{}",
        " ".repeat(column.saturating_sub(1)),
        "^".repeat(width.max(1))
    )
}

impl LetterError {
    /// Makes an error of a whole file.
    pub(super) fn file(file: &str, message: impl Into<String>) -> LetterError {
        LetterError {
            file: file.to_owned(),
            line: 1,
            column: 1,
            width: 0,
            text: String::new(),
            message: message.into(),
        }
    }

    /// Makes an error at a place of a text, in bytes.
    pub(super) fn at(
        file: &str,
        source: &str,
        place: std::ops::Range<usize>,
        message: impl Into<String>,
    ) -> LetterError {
        let start = floor(source, place.start);
        let end = floor(source, place.end.max(start));
        let begin = source[..start].rfind('\n').map_or(0, |at| at + 1);
        let text = source[begin..].lines().next().unwrap_or("").to_owned();
        LetterError {
            file: file.to_owned(),
            line: source[..start].matches('\n').count() + 1,
            column: source[begin..start].chars().count() + 1,
            width: source[start..end]
                .lines()
                .next()
                .unwrap_or("")
                .chars()
                .count(),
            text,
            message: message.into(),
        }
    }

    /// Makes an error from what a template said; `known` are the fields it may use.
    pub(super) fn template(error: &minijinja::Error, known: &[&str]) -> LetterError {
        let file = error.name().unwrap_or("template").to_owned();
        let source = error.template_source().unwrap_or("");
        let place = error
            .range()
            .unwrap_or_else(|| line_of(source, error.line()));
        let written = source.get(place.clone()).unwrap_or("");
        let message = match error.kind() {
            minijinja::ErrorKind::UndefinedError => {
                let field = written
                    .split(|c: char| !c.is_alphanumeric() && c != '_')
                    .find(|w| !w.is_empty() && !known.contains(w))
                    .unwrap_or(written);
                match nearest(field, known.iter().copied()) {
                    Some(near) => format!("no field is called {field}; did you mean {near}?"),
                    None => format!("no field is called {field}; there are {}", known.join(", ")),
                }
            }
            kind => error
                .detail()
                .map_or_else(|| kind.to_string(), str::to_owned),
        };
        LetterError::at(&file, source, place, message)
    }
}

fn floor(source: &str, at: usize) -> usize {
    let mut at = at.min(source.len());
    while !source.is_char_boundary(at) {
        at -= 1;
    }
    at
}

fn line_of(source: &str, line: Option<usize>) -> std::ops::Range<usize> {
    let start = source
        .split_inclusive('\n')
        .take(line.unwrap_or(1).saturating_sub(1))
        .map(str::len)
        .sum::<usize>();
    start
        ..start
            + source[floor(source, start)..]
                .lines()
                .next()
                .map_or(0, str::len)
}
