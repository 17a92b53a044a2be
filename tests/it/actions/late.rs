//! What is entered after the day is marked late; a correction later does not make the visit so.

use chrono::Local;
use twoline::actions::{Desk, DeskOptions, Secret};
use twoline::domain::codes::AcuityMethod;
use twoline::domain::field::Field;

use super::{date, desk_with_children, open, sign};

const PASSES: [(Field, &str); 4] = [
    (Field::CorrectionWorn, "none"),
    (Field::DistanceRight, "20/20"),
    (Field::DistanceLeft, "20/20"),
    (Field::Signs, "none"),
];

/// The same store at the real date, or so many days off it.
fn at(folder: &tempfile::TempDir, desk: Desk, days: i64) -> (Desk, String) {
    drop(desk);
    let today = Local::now().date_naive() + chrono::Duration::days(days);
    let options = DeskOptions {
        today: Some(today),
        ..DeskOptions::default()
    };
    let mut desk =
        Desk::open(&folder.path().join("store"), &Secret::None, &options).expect("the same store");
    // The term of the roster goes on to whenever these tests are run.
    desk.add_term(
        "2026-autumn",
        "Autumn 2026",
        date("2026-08-01"),
        date("2099-12-31"),
    )
    .expect("a term");
    (desk, today.to_string())
}

fn late(desk: &Desk, id: &str) -> bool {
    let history = desk.history(id).expect("read").expect("there");
    history.visits[0].late
}

fn column(desk: &Desk, day: &twoline::actions::DayInfo, id: &str) -> String {
    let report = desk.day_report(day, true).expect("a report").bytes;
    let mut rows = csv::Reader::from_reader(&report[..]);
    let at = rows
        .headers()
        .expect("a header")
        .iter()
        .position(|h| h == "entered_late")
        .expect("the column");
    let row = rows.records().flatten().find(|r| &r[0] == id);
    row.expect("the child")[at].to_owned()
}

#[test]
fn entered_on_the_day_corrected_and_moved_on_a_later_day() {
    let (folder, desk) = desk_with_children();
    let (mut desk, today) = at(&folder, desk, 0);
    let day = open(&mut desk, &today, "us-school", AcuityMethod::Threshold);
    let signed = sign(&mut desk, &day, "Q-1", &PASSES);
    assert!(!late(&desk, "Q-1"));
    assert_eq!(column(&desk, &day, "Q-1"), "");

    let (mut desk, _) = at(&folder, desk, 1);
    let fixed = desk
        .correct(
            signed.visit,
            &[(Field::DistanceLeft, "20/25".into())],
            "misread",
        )
        .expect("corrected");
    assert!(!late(&desk, "Q-1"), "the visit was entered on its day");
    assert_eq!(column(&desk, &day, "Q-1"), "");
    desk.move_visit(fixed.visit, "Q-6", "wrong child")
        .expect("moved");
    assert!(!late(&desk, "Q-6"), "only moved");

    // Entered a day after: late, and it stays so when it is corrected.
    let signed = sign(&mut desk, &day, "Q-2", &PASSES);
    assert!(late(&desk, "Q-2"));
    assert_eq!(column(&desk, &day, "Q-2"), "yes");
    desk.correct(
        signed.visit,
        &[(Field::DistanceLeft, "20/25".into())],
        "misread",
    )
    .expect("corrected");
    assert!(late(&desk, "Q-2"));
}
