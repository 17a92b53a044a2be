//! The station watch on a store.

#![allow(clippy::panic)]

use twoline::actions::Desk;
use twoline::actions::board::Side;
use twoline::actions::board::watch::{Level, Watch, With};
use twoline::domain::codes::AcuityMethod;
use twoline::domain::field::Field;

use super::{child, empty_desk, open, sign};

/// A desk with 50 first graders, 25 of whom passed on an earlier day.
fn with_an_earlier_day() -> (tempfile::TempDir, Desk) {
    let (folder, mut desk) = empty_desk();
    let children = (0..50)
        .map(|i| {
            let mut child = child(
                &format!("Q-{i}"),
                &format!("Family{i}"),
                "Ada",
                "2020-03-02",
                "1",
            );
            child.details.wears_glasses = Some(twoline::domain::codes::YesNo::No);
            child
        })
        .collect();
    let plan = desk.plan_children(children, None).expect("a plan");
    desk.add_roster(&plan).expect("a roster");
    let earlier = open(
        &mut desk,
        "2026-10-12",
        "us-school",
        AcuityMethod::Threshold,
    );
    for i in 0..25 {
        sign(&mut desk, &earlier, &format!("Q-{i}"), &PASSES);
    }
    (folder, desk)
}

const PASSES: [(Field, &str); 3] = [
    (Field::CorrectionWorn, "none"),
    (Field::DistanceRight, "20/20"),
    (Field::DistanceLeft, "20/20"),
];

const FAILS: [(Field, &str); 3] = [
    (Field::CorrectionWorn, "none"),
    (Field::DistanceRight, "20/80"),
    (Field::DistanceLeft, "20/80"),
];

#[test]
fn one_station_is_compared_with_earlier_days_of_the_protocol() {
    let (_folder, mut desk) = with_an_earlier_day();
    let today = open(
        &mut desk,
        "2026-10-14",
        "us-school",
        AcuityMethod::Threshold,
    );
    for i in 25..44 {
        sign(&mut desk, &today, &format!("Q-{i}"), &FAILS);
    }
    let board = desk.board(&today).expect("a board");
    assert_eq!(board.stations[0].watch, Watch::TooFew, "19 children");
    sign(&mut desk, &today, "Q-44", &FAILS);
    let board = desk.board(&today).expect("a board");
    let Watch::Compared(compared) = &board.stations[0].watch else {
        panic!("{:?}", board.stations);
    };
    assert_eq!(compared.with, With::Earlier);
    assert_eq!((compared.share.hits, compared.share.of), (20, 20));
    assert_eq!(compared.passed, Some((Level::Strong, Side::Above)));
    assert_eq!((board.stations[0].seen, board.whole.seen()), (20, 20));
    // A value taken back is no reading, and a corrected one no second child.
    let visit = desk.visit(&today, "Q-44").expect("read").expect("a visit");
    let change = [
        (Field::DistanceRight, "20/20".to_owned()),
        (Field::DistanceLeft, "20/20".to_owned()),
    ];
    desk.correct(visit.id, &change, "typed the wrong row")
        .expect("corrected");
    let board = desk.board(&today).expect("a board");
    assert_eq!((board.stations[0].hits, board.stations[0].judged), (19, 20));
}

#[test]
fn the_first_day_of_a_protocol_at_one_station_has_nothing_to_compare_with() {
    let (_folder, mut desk) = with_an_earlier_day();
    let first = open(
        &mut desk,
        "2026-10-14",
        "uk-school-entry",
        AcuityMethod::Threshold,
    );
    for i in 25..45 {
        sign(&mut desk, &first, &format!("Q-{i}"), &FAILS);
    }
    let board = desk.board(&first).expect("a board");
    assert_eq!(board.stations[0].judged, 20);
    assert_eq!(board.stations[0].watch, Watch::Alone);
}

#[test]
fn a_store_that_is_protected_has_no_invented_stations() {
    use twoline::actions::{DeskOptions, Kdf, NewStore, Secret, init};
    let folder = tempfile::tempdir().expect("a folder");
    let new = NewStore {
        programme: "Quillmere".into(),
        station: "east".into(),
        notation: twoline::domain::acuity::Notation::Feet,
        secret: Secret::Passphrase("nine green kettles sing".to_owned().into()),
        kdf: Kdf::test(),
    };
    let (mut desk, _) =
        init(&folder.path().join("store"), new, &DeskOptions::default()).expect("a store");
    let there = Some(("west", twoline::clock::now()));
    assert!(desk.as_if(there).is_err());
}
