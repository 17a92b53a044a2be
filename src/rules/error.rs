//! What is wrong in a rule file, shown where it stands.

use std::fmt;

use crate::domain::text::shown;

/// One thing wrong in a rule file.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct RuleError {
    /// File name.
    pub file: String,
    /// Line, from 1.
    pub line: usize,
    /// Column in characters, from 1.
    pub column: usize,
    /// The line's text, safe to print.
    pub text: String,
    /// How many characters are meant.
    pub width: usize,
    /// What is wrong.
    pub what: String,
    /// What was expected there.
    pub expected: String,
    /// How to mend it, empty when that is plain.
    pub cure: String,
}

impl RuleError {
    /// Points at a byte range of a file's text.
    pub fn at(
        file: &str,
        text: &str,
        span: std::ops::Range<usize>,
        what: impl Into<String>,
        expected: impl Into<String>,
        cure: impl Into<String>,
    ) -> RuleError {
        let mut start = span.start.min(text.len());
        while !text.is_char_boundary(start) {
            start -= 1;
        }
        let line_start = text[..start].rfind('\n').map_or(0, |i| i + 1);
        let line_end = text[start..].find('\n').map_or(text.len(), |i| start + i);
        let line_text = &text[line_start..line_end];
        let mut end = span.end.clamp(start, line_end);
        while !text.is_char_boundary(end) {
            end -= 1;
        }
        RuleError {
            file: shown(file, 200),
            line: text[..line_start].matches('\n').count() + 1,
            column: text[line_start..start].chars().count() + 1,
            text: shown(line_text.trim_end_matches('\r'), 160),
            width: text[start..end].chars().count().max(1),
            what: what.into(),
            expected: expected.into(),
            cure: cure.into(),
        }
    }
}

impl fmt::Display for RuleError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let number = self.line.to_string();
        let pad = " ".repeat(number.len());
        writeln!(f, "error: {}", self.what)?;
        writeln!(f, "{pad}--> {}:{}:{}", self.file, self.line, self.column)?;
        writeln!(f, "{pad} |")?;
        writeln!(f, "{number} | {}", self.text)?;
        let lead = " ".repeat(self.column.saturating_sub(1).min(160));
        let carets = "^".repeat(self.width.min(160));
        writeln!(f, "{pad} | {lead}{carets} expected {}", self.expected)?;
        if !self.cure.is_empty() {
            writeln!(f, "{pad} = {}", self.cure)?;
        }
        Ok(())
    }
}

/// Everything wrong in the rule files that were read.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct RuleErrors(pub Vec<RuleError>);

impl fmt::Display for RuleErrors {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (i, error) in self.0.iter().enumerate() {
            if i > 0 {
                writeln!(f)?;
            }
            write!(f, "{error}")?;
        }
        Ok(())
    }
}

impl std::error::Error for RuleErrors {}
