//! The committed sample files are what the generator prints.

use std::collections::BTreeSet;
use std::fs;

use twoline::demo::{SAMPLE_DAY, sample_results, sample_roster};
use twoline::domain::field::Field;
use twoline::domain::readings::{ReadingContext, Readings};

fn path(name: &str) -> String {
    format!("{}/sample_data/{name}", env!("CARGO_MANIFEST_DIR"))
}

fn rows(text: &str) -> (csv::StringRecord, Vec<csv::StringRecord>) {
    let mut reader = csv::Reader::from_reader(text.as_bytes());
    let header = reader.headers().expect("a header").clone();
    let rows = reader.records().collect::<Result<_, _>>().expect("rows");
    (header, rows)
}

/// Set `TWOLINE_WRITE_SAMPLES=1` to write the files anew after the generator has changed.
#[test]
fn committed_files_are_what_the_generator_prints() {
    for (name, text) in [
        ("roster.csv", sample_roster()),
        ("results.csv", sample_results()),
    ] {
        if std::env::var_os("TWOLINE_WRITE_SAMPLES").is_some() {
            fs::write(path(name), &text).expect("the sample is written");
        }
        let committed = fs::read_to_string(path(name)).expect("the sample is there");
        assert_eq!(
            committed, text,
            "{name}: TWOLINE_WRITE_SAMPLES=1 writes it anew"
        );
    }
}

/// Forty children, the same in both files.
#[test]
fn the_same_children_in_both_files() {
    let ids = |text: &str| -> Vec<String> {
        let (header, rows) = rows(text);
        assert_eq!(&header[0], "child_id");
        rows.iter().map(|row| row[0].to_owned()).collect()
    };
    let roster = ids(&sample_roster());
    assert_eq!(roster, ids(&sample_results()));
    assert_eq!(roster.len(), 40);
    assert_eq!(roster.iter().collect::<BTreeSet<_>>().len(), 40);
}

/// Every value of the results reads as its field, and no row contradicts itself.
#[test]
fn results_read_as_their_fields() {
    let (header, rows) = rows(&sample_results());
    for row in &rows {
        let mut readings = Readings::default();
        for (name, cell) in header.iter().zip(row) {
            match name {
                "child_id" | "dob" | "grade" => {}
                "screened_on" => assert_eq!(cell, SAMPLE_DAY),
                "attempt" => assert_eq!(cell, "first"),
                name => {
                    let field = Field::from_word(name).expect(name);
                    readings
                        .set(field, cell, ReadingContext::default())
                        .unwrap_or_else(|why| panic!("{}: {why}", &row[0]));
                }
            }
        }
        assert_eq!(readings.contradictions(), [], "{}", &row[0]);
        assert_ne!(readings, Readings::default(), "{}", &row[0]);
    }
}

/// The five children whose outcomes are known have what was recorded of them.
#[test]
fn the_five_known_children() {
    let (header, rows) = rows(&sample_results());
    let cell = |id: &str, column: &str| {
        let row = rows.iter().find(|row| &row[0] == id).expect(id);
        let at = header.iter().position(|name| name == column).expect(column);
        row[at].to_owned()
    };
    for (id, column, expected) in [
        ("Q10001", "dob", "2020-03-02"),
        ("Q10001", "distance_left", "20/25"),
        ("Q10001", "plus_lens", "blurred"),
        ("Q10002", "distance_left", "20/32"),
        ("Q10003", "distance_right", "NT:shy"),
        ("Q10003", "instrument_right", "no_reading"),
        ("Q10003", "cylinder_left", "-0.50"),
        ("Q10003", "axis_left", "180"),
        ("Q10004", "correction_worn", "left_at_home"),
        ("Q10004", "distance_right", "20/80"),
        ("Q10005", "signs", "white_pupil:left"),
        ("Q10005", "status", "opted_out"),
        ("Q10005", "distance_right", ""),
    ] {
        assert_eq!(cell(id, column), expected, "{id} {column}");
    }
}

/// The roster shows what a real one has: a missing birth date, twins, namesakes, several scripts.
#[test]
fn the_roster_is_worth_trying() {
    let (header, rows) = rows(&sample_roster());
    let column = |name: &str| header.iter().position(|h| h == name).expect(name);
    let (family, given, dob) = (column("family_name"), column("given_name"), column("dob"));
    let without = rows.iter().filter(|row| row[dob].is_empty()).count();
    assert!((1..=4).contains(&without), "{without} without a birth date");
    let pairs = |alike: &dyn Fn(&csv::StringRecord, &csv::StringRecord) -> bool| {
        rows.iter()
            .enumerate()
            .any(|(i, a)| rows[i + 1..].iter().any(|b| alike(a, b)))
    };
    assert!(pairs(&|a, b| a[family] == b[family]
        && a[dob] == b[dob]
        && a[given] != b[given]));
    assert!(pairs(&|a, b| a[family] == b[family] && a[given] == b[given]));
    let names: String = rows.iter().map(|row| row[family].to_owned()).collect();
    for range in ['Ạ'..='ỹ', 'Ѐ'..='ӿ', '\u{900}'..='\u{97F}'] {
        assert!(names.chars().any(|c| range.contains(&c)), "{range:?}");
    }
}
