//! Bytes recognised as text. Only UTF-8 is read; what else it seems to be is said, never guessed.

use super::problem::{Place, Problem};
use super::quoting::line_breaks;

const CURE: &str = "open it in the spreadsheet and save it as \"CSV UTF-8\"";

/// Text without its byte order mark, and whether there was one.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Text<'a> {
    /// The text after the mark.
    pub text: &'a str,
    /// Whether the file began with a byte order mark.
    pub had_mark: bool,
}

/// Reads bytes as UTF-8, or says what they seem to be.
pub fn text<'a>(file: &str, bytes: &'a [u8]) -> Result<Text<'a>, Problem> {
    if let Some(what) = other_format(bytes) {
        return Err(Problem::of_file(file, what, "a CSV file in UTF-8").cure(CURE));
    }
    let (rest, had_mark) = match bytes.strip_prefix(b"\xEF\xBB\xBF") {
        Some(rest) => (rest, true),
        None => (bytes, false),
    };
    match std::str::from_utf8(rest) {
        Ok(text) => Ok(Text { text, had_mark }),
        Err(error) => Err(not_utf8(file, rest, error.valid_up_to())),
    }
}

fn other_format(bytes: &[u8]) -> Option<&'static str> {
    let starts = |magic: &[u8]| bytes.starts_with(magic);
    if starts(b"\xFF\xFE") || starts(b"\xFE\xFF") {
        return Some("UTF-16 text");
    }
    if starts(b"PK\x03\x04") {
        return Some("a spreadsheet or another zipped file");
    }
    if starts(b"\xD0\xCF\x11\xE0") {
        return Some("an old spreadsheet file");
    }
    if starts(b"%PDF") {
        return Some("a PDF file");
    }
    // UTF-16 without a mark: every second byte of plain text is zero.
    let head = &bytes[..bytes.len().min(512)];
    let zeros = |offset: usize| {
        head.iter()
            .skip(offset)
            .step_by(2)
            .filter(|b| **b == 0)
            .count()
    };
    let half = head.len() / 2;
    (half >= 4 && (zeros(0) > half * 3 / 4 || zeros(1) > half * 3 / 4))
        .then_some("UTF-16 text without a byte order mark")
}

/// Names the place of the first byte that is not UTF-8 and how its line would read otherwise.
fn not_utf8(file: &str, bytes: &[u8], at: usize) -> Problem {
    let before = &bytes[..at];
    let line = line_breaks(before) + 1;
    let start = before
        .iter()
        .rposition(|b| *b == b'\n')
        .map_or(0, |i| i + 1);
    let cell_start = bytes[start..at]
        .iter()
        .rposition(|b| *b == b',')
        .map_or(start, |i| start + i + 1);
    let column = bytes[start..at].split(|b| *b == b',').count();
    let cell_end = bytes[at..]
        .iter()
        .position(|b| matches!(b, b',' | b'\n' | b'\r'))
        .map_or(bytes.len(), |i| at + i);
    let cell = &bytes[cell_start..cell_end.min(cell_start + 200)];
    let what = if bytes[at] >= 0x80 && !bytes.contains(&0) {
        let (guess, _, _) = encoding_rs::WINDOWS_1252.decode(cell);
        format!("text that is not UTF-8; as Windows-1252 it would read \"{guess}\"")
    } else {
        "bytes that are not text".to_owned()
    };
    Problem::of_file(file, what, "UTF-8")
        .at(Place { row: line, line })
        .in_column(&format!("number {column}"))
        .cure(CURE)
}
