//! CSV that a spreadsheet shows and does not run.
//!
//! RFC 4180 with a byte order mark, so that spreadsheets read UTF-8. A text column gets an
//! apostrophe before what a spreadsheet would run; a number, a code and a date never do. It goes by
//! the type of the column, so that `-2.50` stays a number and `-2.50 -1.00 x 180` in a note does not
//! become a formula. Our own readers take the apostrophe off again.

use std::io::{self, Write};

use csv::{Terminator, Writer, WriterBuilder};

use crate::domain::formula::would_run;

/// What a column holds.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Kind {
    /// Words that a person wrote: guarded.
    Text,
    /// A number, with or without a comparator.
    Number,
    /// A word of a code list, an id that the program made, a list of either.
    Code,
    /// An ISO date or instant.
    Date,
    /// A column of an input file that is handed through unread: guarded like text, except where the
    /// whole cell is a plain number, which no spreadsheet runs.
    HandedThrough,
}

/// How a table is written.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Form {
    /// Whether a byte order mark comes first.
    pub mark: bool,
    /// Whether text is guarded.
    pub guard: bool,
    /// Whether lines end with CR LF.
    pub crlf: bool,
}

impl Form {
    /// For spreadsheets: mark, guard, CR LF.
    pub const SPREADSHEET: Form = Form {
        mark: true,
        guard: true,
        crlf: true,
    };
    /// For other programs: the text as it is.
    pub const EXACT: Form = Form {
        mark: false,
        guard: false,
        crlf: true,
    };

    /// Returns the form for `--exact`, or the one for spreadsheets.
    pub fn exact(exact: bool) -> Form {
        if exact {
            Form::EXACT
        } else {
            Form::SPREADSHEET
        }
    }
}

/// Writes a table whose columns have types.
pub struct Table<W: Write> {
    writer: Writer<W>,
    kinds: Vec<Kind>,
    guard: bool,
    at: usize,
    guarded: String,
}

impl<W: Write> Table<W> {
    /// Writes the mark and the header.
    pub fn new<'h>(
        mut out: W,
        form: Form,
        columns: impl IntoIterator<Item = (&'h str, Kind)>,
    ) -> io::Result<Table<W>> {
        if form.mark {
            out.write_all(b"\xEF\xBB\xBF")?;
        }
        let terminator = if form.crlf {
            Terminator::CRLF
        } else {
            Terminator::Any(b'\n')
        };
        let mut table = Table {
            writer: WriterBuilder::new()
                .terminator(terminator)
                .flexible(true)
                .buffer_capacity(64 * 1024)
                .from_writer(out),
            kinds: Vec::new(),
            guard: form.guard,
            at: 0,
            guarded: String::new(),
        };
        for (header, kind) in columns {
            // A header of a file handed through is text like its cells.
            table.kinds.push(Kind::Text);
            table.cell(header)?;
            if let Some(last) = table.kinds.last_mut() {
                *last = kind;
            }
        }
        table.end_row()?;
        Ok(table)
    }

    /// Writes the next cell of the row.
    pub fn cell(&mut self, text: &str) -> io::Result<()> {
        let kind = self.kinds.get(self.at).copied().unwrap_or(Kind::Text);
        self.at += 1;
        let risky = self.guard
            && match kind {
                Kind::Text => would_run(text),
                Kind::HandedThrough => would_run(text) && !is_plain_number(text),
                Kind::Number | Kind::Code | Kind::Date => false,
            };
        if risky {
            self.guarded.clear();
            self.guarded.push('\'');
            self.guarded.push_str(text);
            self.writer.write_field(&self.guarded)
        } else {
            self.writer.write_field(text)
        }
        .map_err(into_io)
    }

    /// Ends the row; missing cells are left empty.
    pub fn end_row(&mut self) -> io::Result<()> {
        while self.at < self.kinds.len() {
            self.cell("")?;
        }
        self.at = 0;
        self.writer.write_record(None::<&[u8]>).map_err(into_io)
    }

    /// Writes what is buffered and returns what was written to.
    pub fn finish(self) -> io::Result<W> {
        self.writer.into_inner().map_err(|error| {
            let error = error.into_error();
            io::Error::new(error.kind(), error)
        })
    }
}

/// Keeps the kind of an I/O error, by which a broken pipe is told.
fn into_io(error: csv::Error) -> io::Error {
    match error.into_kind() {
        csv::ErrorKind::Io(error) => error,
        other => io::Error::other(format!("{other:?}")),
    }
}

fn is_plain_number(text: &str) -> bool {
    let digits = text.strip_prefix(['+', '-']).unwrap_or(text);
    let (whole, part) = digits.split_once('.').unwrap_or((digits, "0"));
    [whole, part]
        .iter()
        .all(|d| !d.is_empty() && d.bytes().all(|b| b.is_ascii_digit()))
}
