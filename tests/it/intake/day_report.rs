//! The day report: its columns, exact numbers, guarded text, and the text beside it.

use twoline::domain::age::{AgeMonths, Grade};
use twoline::domain::codes::Attempt;
use twoline::domain::field::Field;
use twoline::domain::outcome::{Basis, OutcomeKind, RiskKind, Source};
use twoline::domain::readings::{ReadingContext, Readings};
use twoline::reports::csv::Form;
use twoline::reports::day::{About, DayReportRow, RuleSetUsed, StoreState, about, write};

fn state() -> StoreState {
    StoreState {
        head: "ab".repeat(32),
        entries: 42,
    }
}

fn row() -> DayReportRow {
    let mut readings = Readings::default();
    for (field, text) in [
        (Field::CorrectionWorn, "none"),
        (Field::DistanceRight, "20/20"),
        (Field::DistanceLeft, "<20/32"),
        (Field::SphereRight, "-2.50"),
        (Field::Signs, "none"),
    ] {
        readings
            .set(field, text, ReadingContext::default())
            .expect("a value");
    }
    DayReportRow {
        child_id: "Q-0007".into(),
        family_name: "@Berg".into(),
        given_name: "Zoë, Ana".into(),
        age: Some(AgeMonths(73)),
        grade: Grade::parse("1"),
        attempt: Some(Attempt::First),
        readings,
        outcome: Some(OutcomeKind::Rescreen),
        risks: vec![RiskKind::InterocularDifference, RiskKind::Anisometropic],
        criteria: vec!["set/a".into(), "set/b".into()],
        reasons: "-2.50 D is more than the limit".into(),
        outcome_now: Some(OutcomeKind::Refer),
        in_conflict: vec![Field::NearRight, Field::Signs],
        ..DayReportRow::default()
    }
}

fn cells(form: Form) -> Vec<(String, String)> {
    let bytes = write(Vec::new(), form, [row()], &state()).expect("memory");
    let text = String::from_utf8(bytes).expect("text");
    let text = text.trim_start_matches('\u{FEFF}');
    let mut reader = csv::Reader::from_reader(text.as_bytes());
    let headers = reader.headers().expect("a header").clone();
    let record = reader
        .records()
        .next()
        .expect("a row")
        .expect("as long as the header");
    headers
        .iter()
        .zip(record.iter())
        .map(|(h, c)| (h.to_owned(), c.to_owned()))
        .collect()
}

#[test]
fn numbers_are_exact_and_text_is_guarded() {
    let cells = cells(Form::SPREADSHEET);
    let of = |name: &str| &*cells.iter().find(|(h, _)| h == name).expect(name).1;
    assert_eq!(of("sphere_right"), "-2.50");
    assert_eq!(of("family_name"), "'@Berg");
    assert_eq!(of("given_name"), "Zoë, Ana");
    assert_eq!(of("reasons"), "'-2.50 D is more than the limit");
    assert_eq!(of("distance_left"), "<20/32");
    assert_eq!(
        (of("age_months"), of("grade"), of("attempt")),
        ("73", "01", "first")
    );
    assert_eq!(of("amblyopia_risk"), "interocular_difference;anisometropic");
    assert_eq!(of("criteria"), "set/a;set/b");
    assert_eq!(
        (of("outcome"), of("urgency"), of("dob")),
        ("rescreen", "", "")
    );
    assert_eq!(
        (of("outcome_now"), of("in_conflict")),
        ("refer", "near_right;signs")
    );
    let tail: Vec<&str> = cells
        .iter()
        .rev()
        .take(2)
        .map(|(h, _)| h.as_str())
        .collect();
    assert_eq!(tail, ["store_entries", "store_head"]);
    assert_eq!((of("store_entries"), of("store_head").len()), ("42", 64));
}

#[test]
fn every_reading_has_its_column_and_exact_leaves_text_alone() {
    let cells = cells(Form::EXACT);
    for field in Field::ALL {
        assert!(
            cells.iter().any(|(h, _)| h == field.word()),
            "{}",
            field.word()
        );
    }
    assert!(cells.contains(&("family_name".into(), "@Berg".into())));
}

#[test]
fn the_text_beside_it_names_rule_sets_sources_and_cautions() {
    let sets = [RuleSetUsed {
        id: "x".into(),
        title: "Chart acuity".into(),
        edition: "2016".into(),
        content_hash: "cd".repeat(32),
        sources: vec![Source {
            key: "k".into(),
            citation: "A journal 2016;1:1".into(),
            locator: "10.1000/1".into(),
            basis: Basis::Secondary,
            quoted_in: "another paper".into(),
            approval: String::new(),
        }],
    }];
    let text = about(&About {
        title: "Day report, Quillmere North, 14 Oct 2026",
        state: Some(&state()),
        rule_sets: &sets,
        cautions: &["A screening is not an eye examination."],
        guarded: true,
    });
    assert_eq!(
        text,
        format!(
            "Day report, Quillmere North, 14 Oct 2026\n\nCautions\n- A screening is not an eye examination.\n\nRule sets used\n- Chart acuity (x, edition 2016)\n  content {}\n  source: A journal 2016;1:1 10.1000/1 (as quoted in another paper)\n\nStore head {}, 42 entries\nAn apostrophe before = + - @ in a text column keeps a spreadsheet from running it; --exact leaves it out.\n",
            "cd".repeat(32),
            "ab".repeat(32)
        )
    );
}
