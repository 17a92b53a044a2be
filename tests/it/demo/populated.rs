//! Quillmere in a store.

use std::collections::BTreeMap;

use chrono::NaiveDate;
use twoline::actions::{DayInfo, Desk, QueueState};
use twoline::demo::{DEFAULT_SEED, generate, populate};

/// Returns a populated desk and its newest day.
fn populated(dir: &std::path::Path, seed: u64, day: NaiveDate) -> (Desk, DayInfo) {
    let desk = populate(&dir.join("store"), seed, day).unwrap_or_else(|why| panic!("{why:?}"));
    let info = desk.days().expect("days").swap_remove(0);
    (desk, info)
}

/// Everybody on the roster of the school is in the queue, and who came has been signed.
#[test]
fn the_queue_is_the_district() {
    let day = NaiveDate::from_ymd_opt(2026, 10, 14).expect("a date");
    let district = generate(DEFAULT_SEED, day);
    let dir = tempfile::tempdir().expect("a folder");
    let (desk, info) = populated(dir.path(), DEFAULT_SEED, day);
    assert!(desk.is_demo());
    assert_eq!((info.site.as_str(), info.date), ("QE", day));
    let queue = desk.day_children(&info).expect("the queue");
    assert_eq!(queue.len(), 210);
    let mut states: BTreeMap<&str, usize> = BTreeMap::new();
    for child in &queue {
        *states.entry(child.state.title()).or_default() += 1;
    }
    let to_come = queue
        .iter()
        .filter(|c| c.state == QueueState::ToCome)
        .count();
    assert_eq!(to_come, 210 - district.visits.len(), "{states:?}");
    for state in [QueueState::Absent, QueueState::LeftEarly] {
        assert!(states.contains_key(state.title()), "{states:?}");
    }
    // What was signed is what the generator told.
    for visit in &district.visits {
        let stored = desk
            .visit(&info, &visit.child_id)
            .expect("read")
            .expect("signed");
        assert_eq!(stored.readings, visit.readings, "{}", visit.child_id);
    }
    assert_eq!(desk.days().expect("days").len(), 2);
    assert_eq!(desk.screeners().expect("screeners").len(), 2);
    let index = desk.search_index().expect("the index");
    assert_eq!(index.len(), district.children.len());
}

/// A district of any day of the year fits into its term.
#[test]
fn any_day_of_the_year() {
    for text in ["2027-01-15", "2026-08-05", "2026-08-01", "2028-07-31"] {
        let dir = tempfile::tempdir().expect("a folder");
        let (desk, day) = populated(dir.path(), 1, text.parse().expect("a date"));
        assert_eq!(
            desk.day_children(&day).expect("the queue").len(),
            210,
            "{text}"
        );
    }
}

/// The demo of today has two stations with a morning behind them: the board has a pace, and both are
/// compared.
#[test]
fn the_morning_has_two_stations_and_a_pace() {
    use twoline::actions::board::watch::Watch;
    use twoline::clock;
    let dir = tempfile::tempdir().expect("a folder");
    let now = clock::now();
    let today = now.date().expect("a date");
    let (mut desk, day) = populated(dir.path(), DEFAULT_SEED, today);
    let board = desk.board_at(&day, now).expect("a board");
    let names: Vec<&str> = board.stations.iter().map(|s| s.name.as_str()).collect();
    assert_eq!(names, ["east", "west"]);
    for station in &board.stations {
        let Watch::Compared(compared) = &station.watch else {
            panic!("{station:?}");
        };
        assert!(compared.share.of >= 40, "{compared:?}");
    }
    // Two hours after midnight the morning is not yet today's: nothing is said then.
    if let Some(pace) = board.pace.whole {
        assert!((20.0..80.0).contains(&pace.an_hour()), "{pace:?}");
    }
    assert_eq!(desk.station(), "east");
    assert_eq!(desk.urgent_open().expect("read").len(), 1);
    assert!(desk.clock_warning().expect("read").is_none());
    desk.as_if(None).expect("the demo may");
}
