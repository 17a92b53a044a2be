//! Rosters: bad input by file, row, column, found, expected; what is known; who is alike.

use chrono::NaiveDate;
use twoline::domain::codes::{Consent, YesNo};
use twoline::domain::roster::RosterChild;
use twoline::intake::Place;
use twoline::intake::roster::{AlikeKind, Roster, RosterUpdate, read_roster};

const HEADER: &str = "child_id,family_name,given_name,dob,grade,site";

fn today() -> NaiveDate {
    NaiveDate::from_ymd_opt(2026, 10, 14).expect("a date")
}

fn read(text: &str) -> Roster {
    read_roster("roster.csv", text.as_bytes(), today()).expect("a good roster")
}

fn said(text: &str) -> Vec<String> {
    let problems = read_roster("roster.csv", text.as_bytes(), today()).expect_err("bad");
    problems.kept().iter().map(ToString::to_string).collect()
}

fn rows(lines: &[&str]) -> String {
    format!("{HEADER}\n{}\n", lines.join("\n"))
}

#[test]
fn a_whole_roster_in_any_order_of_columns() {
    let text = "\u{FEFF}site,notes,grade,dob,given_name,family_name,child_id,consent,wears_glasses,history,guardian_phone\r\n\
                N1,\"sits in front,\r\nwears a patch\",K,2020-12-31,Zoë,O'Neil,0007,YES,no,family_strabismus,'+44 20 7946 0000\r\n";
    let roster = read(text);
    let child = &roster.children[0];
    assert_eq!(child.child_id, "0007");
    assert_eq!((&*child.family_name, &*child.given_name), ("O'Neil", "Zoë"));
    assert_eq!(child.grade.map(|g| g.to_string()).as_deref(), Some("KG"));
    assert_eq!(child.details.consent, Some(Consent::Yes));
    assert_eq!(child.details.wears_glasses, Some(YesNo::No));
    assert_eq!(child.details.history, "family_strabismus");
    assert_eq!(child.details.notes, "sits in front,\r\nwears a patch");
    // The apostrophe is one that our own reports put there.
    assert_eq!(child.details.guardian_phone, "+44 20 7946 0000");
}

#[test]
fn missing_and_unknown_columns() {
    assert_eq!(
        said("child_id,family_name,given_name,birthdate,grade,site\nA,B,C,2020-01-01,1,N1\n"),
        [
            "roster.csv: row 1, column number 4: found \"birthdate\", expected one of the columns child_id, family_name, given_name, dob, grade, site, class, teacher, sex, language, ethnicity, insurance, special_education, state_id, guardian_name, guardian_phone, guardian_email, guardian_address, guardian2_name, guardian2_phone, guardian2_email, consent, wears_glasses, last_exam_on, under_care, known_condition, doctor_name, doctor_phone, history, notes",
            "roster.csv: row 1, column dob: found no such column, expected a column dob in the header",
        ]
    );
}

#[test]
fn each_bad_cell_is_named() {
    let text = rows(&[
        "A1,Berg,Ana,2018-02-30,1,N1",
        "A2,Berg,Bo,2026-10-15,1,N1",
        "A3,Berg,Cy,2018-01-01,Year 2,N1",
        "A1,Berg,Di,2018-01-01,1,N1",
        ",Berg,Ed,2018-01-01,1,",
        "A6,,,2018-01-01,1,N1",
        "A7,=1+1,Fa,2018-01-01,1,N1",
        "A8,Berg,\u{1b}[2JGo,2018-01-01,1,N1",
    ]);
    assert_eq!(
        said(&text),
        [
            "roster.csv: row 2, column dob: found \"2018-02-30\", expected a date that exists: February 2018 has 28 days",
            "roster.csv: row 3, column dob: found \"2026-10-15\", expected a birth date on or before 2026-10-14",
            "roster.csv: row 4, column grade: found \"Year 2\", expected a grade: PK, TK, KG or K, 1 to 12",
            "roster.csv: row 5, column child_id: found \"A1\", expected each child id once (it is also in row 2)",
            "roster.csv: row 6, column child_id: found nothing, expected a child id",
            "roster.csv: row 6, column site: found nothing, expected a site",
            "roster.csv: row 7, column family_name: found nothing, expected a name",
            "roster.csv: row 8, column family_name: found \"=1+1\", expected text that a spreadsheet does not run: it may not begin with = + - @",
            "roster.csv: row 9, column given_name: found \"\u{FFFD}[2JGo\", expected text without control characters (U+001B)",
        ]
    );
}

#[test]
fn dates_in_another_order_are_said_once_with_the_order_seen() {
    let text = rows(&[
        "A1,Berg,Ana,03/04/2018,1,N1",
        "A2,Berg,Bo,12/31/2018,1,N1",
        "A3,Berg,Cy,05/06/2018,1,N1",
    ]);
    assert_eq!(
        said(&text),
        [
            "roster.csv: row 3, column dob: found \"12/31/2018\", expected a date as YYYY-MM-DD, such as 2019-03-31; this one seems to be month, day, year (3 cells of this column; format the column as YYYY-MM-DD and save again)",
        ]
    );
}

#[test]
fn words_that_are_not_on_a_list() {
    let text = format!("{HEADER},consent,history\nA1,Berg,Ana,2018-01-01,1,N1,maybe,squint\n");
    let said = said(&text);
    assert!(said[0].contains("column consent: found \"maybe\", expected one of yes, no, unknown"));
    assert!(
        said[1].contains("column history: found \"squint\""),
        "{said:?}"
    );
}

#[test]
fn a_blank_birth_date_is_listed_and_blank_rows_are_skipped() {
    let roster = read(&rows(&[
        "A1,Berg,Ana,,1,N1",
        ",,,,,",
        "A2,Berg,Bo,2018-01-01,,N1",
    ]));
    assert_eq!(roster.children.len(), 2);
    assert_eq!(roster.without_dob, [0]);
    assert_eq!(roster.without_grade, [1]);
    assert_eq!(roster.places[1], Place { row: 4, line: 4 });
    assert_eq!(
        said(&format!("{HEADER}\n")),
        ["roster.csv: found a header only, expected a row for each child"]
    );
}

fn kinds(lines: &[&str]) -> Vec<(AlikeKind, usize, usize)> {
    let found = read(&rows(lines)).alike;
    found.iter().map(|a| (a.kind, a.first, a.second)).collect()
}

#[test]
fn twins_duplicates_and_same_names_are_told_apart() {
    use AlikeKind::{ProbableDuplicate, SameName, Twins};
    assert_eq!(
        kinds(&["1,Berg,Ana,2018-01-01,1,N1", "2,BERG,Ola,2018-01-01,1,N1"]),
        [(Twins, 0, 1)]
    );
    assert_eq!(
        kinds(&["1,Berg,Zoë,2018-01-01,1,N1", "2,zoe,berg,2018-01-01,1,N2"]),
        [(ProbableDuplicate, 0, 1)]
    );
    assert_eq!(
        kinds(&[
            "1,Lindqvist,Katarina,2018-01-01,1,N1",
            "2,Lindqvist,Katarinna,2018-01-01,1,N2"
        ]),
        [(ProbableDuplicate, 0, 1)]
    );
    assert_eq!(
        kinds(&["1,Berg,Ana,2018-01-01,1,N1", "2,Berg,Ana,2017-01-01,2,N1"]),
        [(SameName, 0, 1)]
    );
    assert_eq!(
        kinds(&[
            "1,Berg,Ana,2018-01-01,1,N1",
            "2,Olsen,Mia,2018-01-01,1,N1",
            "3,Berg,Bo,2018-01-01,1,N2"
        ]),
        []
    );
}

#[test]
fn a_second_reading_is_compared_with_what_is_known() {
    let known = read(&rows(&[
        "1,Berg,Ana,2018-01-01,1,N1",
        "2,Berg,Bo,2017-01-01,2,N1",
        "3,Olsen,Mia,2016-01-01,3,N1",
    ]));
    let new = read(&rows(&[
        "4,Dahl,Ida,2018-05-05,1,N1",
        "2,Berg,Bo,2017-01-02,3,N1",
        "1,Berg,Ana,2018-01-01,1,N1",
    ]));
    let update = RosterUpdate::compare(&known.children, &new.children);
    assert_eq!(update.new, [0]);
    assert_eq!(update.unchanged, [2]);
    assert_eq!(update.gone, [2]);
    assert_eq!((update.changed[0].new, update.changed[0].known), (1, 1));
    assert_eq!(
        update.changed[0].fields,
        [
            ("dob", "2017-01-01".to_owned(), "2017-01-02".to_owned()),
            ("grade", "02".to_owned(), "03".to_owned()),
        ]
    );
    let none: &[RosterChild] = &[];
    assert_eq!(RosterUpdate::compare(none, &new.children).new.len(), 3);
}

#[test]
fn many_children_of_one_birth_date_and_name_are_still_read() {
    // No time is asserted; comparing every pair of these would not end within any patience.
    let mut lines = String::from(HEADER);
    for i in 0..60_000 {
        lines.push('\n');
        lines.push_str(&i.to_string());
        lines.push_str(",Berg,Ana,2018-01-01,1,N1");
    }
    let roster = read(&lines);
    assert_eq!(roster.children.len(), 60_000);
    assert_eq!(roster.alike.len(), 59_999);
}

#[test]
fn an_id_with_something_invisible_in_it_is_no_second_child() {
    for hidden in ['\u{200B}', '\u{FEFF}', '\u{202E}', '\u{AD}', '\u{E0041}'] {
        let second = format!("A{hidden}1,Berg,Ana,2018-02-03,1,N1");
        let said = said(&rows(&["A1,Berg,Ana,2018-02-03,1,N1", &second]));
        assert_eq!(said.len(), 1, "{said:?}");
        assert!(
            said[0].contains("row 3, column child_id") && said[0].contains("invisible"),
            "{said:?}"
        );
    }
}
