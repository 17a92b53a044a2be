//! A checked CSV file: a header, then rows with their place.

use csv::StringRecord;

use super::cells::{Kind, forbidden};
use super::encoding;
use super::problem::{Found, Place, Problem, Problems};
use super::quoting::{self, Break, Fault, LONGEST_FIELD, line_breaks};
use crate::domain::text::{nearest, shown};

/// A CSV file that is UTF-8 and obeys RFC 4180, with its header read.
pub struct Sheet<'a> {
    file: String,
    text: &'a str,
    had_mark: bool,
    headers: Vec<String>,
    written: Vec<String>,
    reader: csv::Reader<&'a [u8]>,
    counted: Counted,
}

/// How far rows and lines have been counted.
#[derive(Clone, Copy)]
struct Counted {
    byte: usize,
    place: Place,
}

impl<'a> Sheet<'a> {
    /// Checks the bytes and reads the header.
    pub fn open(file: &str, bytes: &'a [u8]) -> Result<Sheet<'a>, Problems> {
        if bytes.is_empty() {
            return Err(Problem::of_file(file, "an empty file", "a header row, then rows").into());
        }
        let text = encoding::text(file, bytes)?;
        let mut reader = csv::ReaderBuilder::new()
            .has_headers(false)
            .flexible(true)
            .from_reader(text.text.as_bytes());
        let mut header = StringRecord::new();
        let read = reader.read_record(&mut header).is_ok_and(|found| found);
        let headers: Vec<String> = header.iter().map(|h| h.trim().to_lowercase()).collect();
        quoting::check(text.text).map_err(|fault| broken(file, &headers, text.text, fault))?;
        if !read || headers.iter().all(String::is_empty) {
            return Err(Problem::of_file(
                file,
                "a file without a header",
                "a header row, then rows",
            )
            .into());
        }
        if let [only] = &headers[..]
            && let Some(mark) = [';', '\t'].into_iter().find(|m| only.contains(*m))
        {
            let name = if mark == ';' { "semicolons" } else { "tabs" };
            return Err(Problem::of_file(
                file,
                format!("columns separated by {name}"),
                "columns separated by commas",
            )
            .at(Place { row: 1, line: 1 })
            .cure("save it as CSV with commas")
            .into());
        }
        Ok(Sheet {
            file: file.to_owned(),
            text: text.text,
            had_mark: text.had_mark,
            headers,
            written: header.iter().map(str::to_owned).collect(),
            reader,
            counted: Counted {
                byte: 0,
                place: Place { row: 1, line: 1 },
            },
        })
    }

    /// Returns the file's name.
    pub fn file(&self) -> &str {
        &self.file
    }

    /// Returns the header names, trimmed and in lower case.
    pub fn headers(&self) -> &[String] {
        &self.headers
    }

    /// Returns the header names as they were written.
    pub fn written_headers(&self) -> &[String] {
        &self.written
    }

    /// Says whether the file began with a byte order mark.
    pub fn had_mark(&self) -> bool {
        self.had_mark
    }

    /// Says whether lines end with CR LF (judged by the first one).
    pub fn has_crlf(&self) -> bool {
        self.text
            .find('\n')
            .is_some_and(|at| self.text[..at].ends_with('\r'))
    }

    /// Reads the next row; blank lines are skipped. Nothing is returned after the last row.
    pub fn next(&mut self, record: &mut StringRecord) -> Result<Option<Place>, Problem> {
        match self.reader.read_record(record) {
            Ok(true) => {
                let at = record.position().map_or(0, csv::Position::byte);
                Ok(Some(self.place(at as usize)))
            }
            Ok(false) => Ok(None),
            Err(error) => Err(Problem::of_file(&self.file, error.to_string(), "CSV text")),
        }
    }

    /// Returns the place of the row that starts at or after `at`, past blank lines.
    ///
    /// The parser's own line count is off after CR LF and blank lines, so both are counted here.
    fn place(&mut self, at: usize) -> Place {
        let bytes = self.text.as_bytes();
        let breaks = bytes[at..]
            .iter()
            .take_while(|b| matches!(b, b'\r' | b'\n'))
            .count();
        let start = at + breaks;
        // The line feed of a CR LF that ended the row before belongs to that row.
        let ended = at > 0 && bytes[at - 1] == b'\r' && bytes[at] == b'\n';
        let blank = line_breaks(&bytes[at..start]) - u64::from(ended);
        let old = self.counted;
        self.counted = Counted {
            byte: start,
            place: Place {
                row: old.place.row + 1 + blank,
                line: old.place.line + line_breaks(&bytes[old.byte..start]),
            },
        };
        self.counted.place
    }

    /// Returns the problem of a row that has more or fewer cells than the header.
    pub fn ragged(&self, record: &StringRecord, place: Place) -> Option<Problem> {
        (record.len() != self.headers.len()).then(|| {
            let cure = if record.len() > self.headers.len() {
                "a comma inside a cell needs quotes around the cell"
            } else {
                "cells are missing at the end, or a line break cut the row"
            };
            Problem::of_file(
                &self.file,
                match record.len() {
                    1 => "1 cell".to_owned(),
                    many => format!("{many} cells"),
                },
                format!("{}, as in the header", self.headers.len()),
            )
            .at(place)
            .cure(cure)
        })
    }

    /// Finds the meaning of each column by its header.
    ///
    /// An unknown one is a problem, or nothing with `pass_through`; a repeated or empty one is
    /// always a problem.
    pub fn columns<C: Copy>(
        &self,
        known: &[(&'static str, C)],
        required: &[&str],
        pass_through: bool,
    ) -> Result<Vec<Option<C>>, Problems> {
        let mut problems = Problems::default();
        let place = Place { row: 1, line: 1 };
        let mut columns = Vec::with_capacity(self.headers.len());
        for (i, header) in self.headers.iter().enumerate() {
            let meaning = known.iter().find(|(word, _)| word == header).map(|k| k.1);
            columns.push(meaning);
            let number = format!("number {}", i + 1);
            if let Some(first) = self.headers[..i].iter().position(|h| h == header) {
                problems.push(
                    Problem::of_cell(&self.file, place, &number, header, "each column once")
                        .cure(format!("it is also column number {}", first + 1)),
                );
            } else if let Some(expected) = forbidden(Kind::Code, header) {
                problems.push(Problem::of_cell(
                    &self.file, place, &number, header, expected,
                ));
            } else if meaning.is_none() && !pass_through {
                let problem = Problem::of_cell(
                    &self.file,
                    place,
                    &number,
                    header,
                    match nearest(header, known.iter().map(|k| k.0)) {
                        Some(word) => format!("a known column (did you mean {word}?)"),
                        None => format!("one of the columns {}", words(known)),
                    },
                );
                problems.push(problem);
            }
        }
        for word in required {
            if !self.headers.iter().any(|h| h == word) {
                let near = nearest(
                    word,
                    self.headers
                        .iter()
                        .map(String::as_str)
                        .filter(|h| !known.iter().any(|k| k.0 == *h)),
                );
                let problem = Problem::of_file(
                    &self.file,
                    "no such column",
                    format!("a column {word} in the header"),
                )
                .at(place)
                .in_column(word);
                problems.push(match near {
                    Some(near) => problem.cure(format!("is {} meant?", shown(near, 40))),
                    None => problem,
                });
            }
        }
        problems.or(columns)
    }
}

fn words<C>(known: &[(&'static str, C)]) -> String {
    let words: Vec<&str> = known.iter().map(|k| k.0).collect();
    words.join(", ")
}

/// Puts a fault of the quoting into words.
fn broken(file: &str, headers: &[String], text: &str, fault: Fault) -> Problem {
    let (what, expected, cure) = match fault.kind {
        Break::NeverClosed => (
            "a quote that is never closed",
            "a closing quote before the end of the file",
            "a quote inside quotes is written twice",
        ),
        Break::QuoteInside => (
            "a quote inside a cell that does not begin with one",
            "quotes around the whole cell",
            "a quote inside quotes is written twice",
        ),
        Break::AfterQuote => (
            "text after the closing quote of a cell",
            "a comma or the end of the row",
            "a quote inside quotes is written twice",
        ),
        Break::BareReturn => (
            "a carriage return without a line feed",
            "rows that end with LF or CR LF",
            "save it again as CSV UTF-8",
        ),
        Break::TooLong => (
            "",
            "",
            "a quote may be missing, so that many rows are read as one cell",
        ),
    };
    let column = match headers.get(fault.field - 1) {
        Some(name) if fault.row > 1 && !name.is_empty() => name.clone(),
        _ => format!("number {}", fault.field),
    };
    let mut problem = Problem::of_file(file, what, expected);
    if fault.kind == Break::TooLong {
        problem.found = Found::What(
            format!(
                "a cell of more than {} KB, beginning \"{}\"",
                LONGEST_FIELD / 1024,
                shown(&text[fault.at..], 20)
            )
            .into(),
        );
        problem.expected = format!("cells of at most {} KB", LONGEST_FIELD / 1024).into();
    }
    problem
        .at(Place {
            row: fault.row,
            line: fault.line,
        })
        .in_column(&column)
        .cure(cure)
}
