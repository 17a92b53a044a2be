//! RFC 4180 checked before anything is parsed.
//!
//! A lenient parser takes an unclosed last quote and `"20"/20` without a word, and a child's reading
//! is then something nobody wrote. Source: RFC 4180, section 2, rules 5 to 7.

/// The longest field that is read, in bytes.
pub const LONGEST_FIELD: usize = 64 * 1024;

/// What breaks RFC 4180.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Break {
    /// A quote is opened and the file ends inside it.
    NeverClosed,
    /// A quote stands inside a field that does not begin with one.
    QuoteInside,
    /// Text follows the closing quote of a field.
    AfterQuote,
    /// A carriage return without a line feed, outside quotes.
    BareReturn,
    /// A field longer than [`LONGEST_FIELD`].
    TooLong,
}

/// Where and how a text breaks RFC 4180.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Fault {
    /// What it is.
    pub kind: Break,
    /// Byte offset: of the opening quote, of the field that is too long, else of the character.
    pub at: usize,
    /// The row, counted as a spreadsheet does, from 1.
    pub row: u64,
    /// The line, from 1.
    pub line: u64,
    /// The number of the field in its row, from 1.
    pub field: usize,
}

/// Checks a whole text.
pub fn check(text: &str) -> Result<(), Fault> {
    let bytes = text.as_bytes();
    let (mut at, mut row, mut field) = (0, 1, 1);
    let fault = |kind, at: usize, row, field| Fault {
        kind,
        at,
        row,
        line: line_breaks(&bytes[..at]) + 1,
        field,
    };
    while at < bytes.len() {
        let start = at;
        if bytes[at] == b'"' {
            at = closing_quote(bytes, start)
                .ok_or_else(|| fault(Break::NeverClosed, start, row, field))?
                + 1;
            if !matches!(bytes.get(at), None | Some(b',' | b'\n' | b'\r')) {
                return Err(fault(Break::AfterQuote, at, row, field));
            }
        } else {
            at = bytes[start..]
                .iter()
                .position(|b| matches!(b, b',' | b'\n' | b'\r' | b'"'))
                .map_or(bytes.len(), |i| start + i);
            if bytes.get(at) == Some(&b'"') {
                return Err(fault(Break::QuoteInside, at, row, field));
            }
        }
        if at - start > LONGEST_FIELD {
            return Err(fault(Break::TooLong, start, row, field));
        }
        match bytes.get(at) {
            Some(b',') => field += 1,
            Some(b'\r') if bytes.get(at + 1) != Some(&b'\n') => {
                return Err(fault(Break::BareReturn, at, row, field));
            }
            Some(end) => {
                at += usize::from(*end == b'\r');
                (row, field) = (row + 1, 1);
            }
            None => {}
        }
        at += 1;
    }
    Ok(())
}

/// Counts line feeds.
#[allow(clippy::naive_bytecount)] // The compiler makes it fast enough without one more crate.
pub(super) fn line_breaks(bytes: &[u8]) -> u64 {
    bytes.iter().filter(|b| **b == b'\n').count() as u64
}

/// Returns the offset of the quote that closes the one at `open`.
fn closing_quote(bytes: &[u8], open: usize) -> Option<usize> {
    let mut at = open + 1;
    loop {
        at += bytes[at..].iter().position(|b| *b == b'"')?;
        if bytes.get(at + 1) != Some(&b'"') {
            return Some(at);
        }
        at += 2;
    }
}
