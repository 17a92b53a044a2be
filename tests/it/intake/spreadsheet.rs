//! Reports that a spreadsheet shows and does not run, by column type, and that we read back.
//!
//! Vectors: OWASP ASVS 5.0, 1.2.10, and the pages named in the file, row by row.

use proptest::prelude::*;
use twoline::domain::formula::{unguarded, would_run};
use twoline::reports::csv::{Form, Kind, Table};

fn written(kind: Kind, form: Form, text: &str) -> String {
    let mut table = Table::new(Vec::new(), form, [("x", kind)]).expect("memory");
    table.cell(text).expect("memory");
    table.end_row().expect("memory");
    String::from_utf8(table.finish().expect("memory")).expect("text")
}

fn read_back(bytes: &str) -> String {
    let mut reader = csv::Reader::from_reader(bytes.as_bytes());
    let record = reader.records().next().expect("a row").expect("text");
    record[0].to_owned()
}

#[test]
fn the_vectors_by_column_type() {
    let mut reader =
        csv::Reader::from_reader(include_bytes!("../../data/csv_injection_vectors.csv").as_slice());
    let mut guarded = 0;
    for record in reader.records() {
        let record = record.expect("text");
        let (payload, role) = (&record[0], &record[1]);
        let text = read_back(&written(Kind::Text, Form::SPREADSHEET, payload));
        // Numbers survive in number columns; only in text columns are the same characters guarded.
        let is_trigger = !matches!(
            role,
            "baseline" | "MUST SURVIVE: name" | "defusedcsv also triggers"
        );
        if is_trigger {
            assert_eq!(text, format!("'{payload}"), "{role}");
            guarded += 1;
        } else {
            assert_eq!(text, payload, "{role}");
        }
        for kind in [Kind::Number, Kind::Code, Kind::Date] {
            assert_eq!(
                read_back(&written(kind, Form::SPREADSHEET, payload)),
                payload,
                "{role}"
            );
        }
        assert_eq!(
            read_back(&written(Kind::Text, Form::EXACT, payload)),
            payload
        );
    }
    assert_eq!(guarded, 13);
}

#[test]
fn full_width_forms_and_leading_spaces() {
    for text in [
        "\u{FF1D}1",
        "\u{FF0B}1",
        "\u{FF0D}1",
        "\u{FF20}x",
        "  =1",
        "\u{A0}=1",
        "\n=1",
    ] {
        assert_eq!(
            read_back(&written(Kind::Text, Form::SPREADSHEET, text)),
            format!("'{text}")
        );
    }
}

#[test]
fn the_mark_comes_first_and_exact_has_none() {
    assert_eq!(
        written(Kind::Number, Form::SPREADSHEET, "-2.50"),
        "\u{FEFF}x\r\n-2.50\r\n"
    );
    assert_eq!(written(Kind::Text, Form::exact(true), "=1"), "x\r\n=1\r\n");
}

#[test]
fn a_column_handed_through_keeps_numbers_and_guards_the_rest() {
    for (text, expected) in [
        ("-2.50", "-2.50"),
        ("+1", "+1"),
        ("=1+1", "'=1+1"),
        ("-1+1", "'-1+1"),
        ("-", "'-"),
    ] {
        assert_eq!(
            read_back(&written(Kind::HandedThrough, Form::SPREADSHEET, text)),
            expected
        );
    }
}

proptest! {
    #[test]
    fn what_a_report_writes_our_readers_read_back(text in "['=+\\-@ \u{FF1D}\tA0]{0,6}") {
        let cell = read_back(&written(Kind::Text, Form::SPREADSHEET, &text));
        prop_assert_eq!(unguarded(&cell), text.as_str());
        // With the apostrophe there, nothing is left at the front for a spreadsheet to run.
        prop_assert!(!would_run(&cell) || cell.starts_with('\''));
    }
}
