//! Files that are not what they should be: named for what they seem to be, with a way to go on.

use twoline::intake::results::{Options, read_results};
use twoline::intake::{Found, InputFile, Place, Problem, Problems};

fn only(bytes: &[u8]) -> Problem {
    let problems: Problems =
        read_results("results.csv", bytes, Options::default(), None).expect_err("the file is bad");
    assert_eq!(problems.total(), 1, "{problems}");
    problems.kept()[0].clone()
}

#[track_caller]
fn says(bytes: &[u8], expected: &str) {
    assert_eq!(only(bytes).to_string(), expected);
}

#[test]
fn an_empty_file() {
    says(
        b"",
        "results.csv: found an empty file, expected a header row, then rows",
    );
    says(
        b"\xEF\xBB\xBF\r\n",
        "results.csv: found a file without a header, expected a header row, then rows",
    );
}

#[test]
fn a_header_only() {
    says(
        b"child_id,distance_right\n\n",
        "results.csv: found a header only, expected a row for each child and visit",
    );
}

#[test]
fn other_encodings_are_recognised() {
    let utf16: Vec<u8> = "\u{FEFF}child_id,signs\n"
        .encode_utf16()
        .flat_map(u16::to_le_bytes)
        .collect();
    says(
        &utf16,
        "results.csv: found UTF-16 text, expected a CSV file in UTF-8 (open it in the spreadsheet and save it as \"CSV UTF-8\")",
    );
    assert_eq!(
        only(&utf16[2..]).found,
        Found::What("UTF-16 text without a byte order mark".into())
    );
    says(
        b"child_id,distance_right\nA1,20/20\nJos\xE9,20/20\n",
        "results.csv: row 3, column number 1: found text that is not UTF-8; as Windows-1252 it would read \"Jos\u{e9}\", expected UTF-8 (open it in the spreadsheet and save it as \"CSV UTF-8\")",
    );
    assert!(
        only(b"PK\x03\x04rest")
            .to_string()
            .contains("a spreadsheet")
    );
}

#[test]
fn other_separators_are_recognised() {
    let problem = only(b"child_id;distance_right\nA;20/20\n");
    assert_eq!(
        problem.found,
        Found::What("columns separated by semicolons".into())
    );
    assert_eq!(problem.cure.as_deref(), Some("save it as CSV with commas"));
}

#[test]
fn a_quote_never_closed_names_where_it_was_opened() {
    let problem = only(b"child_id,distance_right\nA,20/20\nB,\"20/20\nC,20/20\n");
    assert_eq!(problem.place, Some(Place { row: 3, line: 3 }));
    assert_eq!(problem.column.as_deref(), Some("distance_right"));
    assert_eq!(
        problem.found,
        Found::What("a quote that is never closed".into())
    );
}

#[test]
fn quotes_in_the_wrong_place() {
    // The csv crate alone reads this as 20/20.
    assert_eq!(
        only(b"child_id,distance_right\nA,\"20\"/20\n").found,
        Found::What("text after the closing quote of a cell".into())
    );
    assert_eq!(
        only(b"child_id,distance_right\nA,20\"/20\n").found,
        Found::What("a quote inside a cell that does not begin with one".into())
    );
    assert_eq!(
        only(b"child_id,distance_right\rA,20/20\r").found,
        Found::What("a carriage return without a line feed".into())
    );
}

#[test]
fn a_field_of_five_megabytes_is_refused_and_not_shown() {
    let mut bytes = b"child_id,distance_right\nA,20/20\nB,\"".to_vec();
    bytes.extend(std::iter::repeat_n(b'x', 5_000_000));
    bytes.extend(b"\"\n");
    let problem = only(&bytes);
    assert_eq!(problem.place, Some(Place { row: 3, line: 3 }));
    assert_eq!(problem.column.as_deref(), Some("distance_right"));
    assert_eq!(&*problem.expected, "cells of at most 64 KB");
    assert!(problem.to_string().len() < 400);
}

#[test]
fn rows_and_lines_differ_below_a_cell_with_a_line_break() {
    let bytes = b"child_id,remark,distance_right\r\nA,\"two\r\nlines\",20/20\r\n\r\nB,,hello\r\n";
    let options = Options {
        pass_through: true,
        ..Options::default()
    };
    let problems = read_results("r.csv", bytes, options, None).expect_err("hello");
    assert_eq!(problems.kept()[0].place, Some(Place { row: 4, line: 5 }));
    assert!(
        problems
            .to_string()
            .starts_with("r.csv: row 4 (line 5), column distance_right: found \"hello\"")
    );
}

#[test]
fn many_problems_are_counted_and_the_first_are_shown() {
    let mut bytes = b"child_id,distance_right\n".to_vec();
    for i in 0..200 {
        bytes.extend(format!("C{i},hello\n").bytes());
    }
    let problems = read_results("r.csv", &bytes, Options::default(), None).expect_err("all bad");
    assert_eq!((problems.total(), problems.kept().len()), (200, 50));
    assert!(problems.to_string().ends_with("\nand 150 more problems"));
}

#[test]
fn a_file_that_is_not_there() {
    let folder = tempfile::tempdir().expect("a folder");
    let missing = InputFile::read(&folder.path().join("no\u{1b}[31m.csv")).expect_err("missing");
    assert!(missing.to_string().contains("no such file"));
    assert!(!missing.to_string().contains('\u{1b}'));
    let problem = InputFile::read(folder.path()).expect_err("a folder");
    assert!(problem.to_string().contains("found a folder"), "{problem}");
}
