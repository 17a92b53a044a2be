//! How fast children are seen. Every number here is practice; the range is that of a Poisson process.

use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::{Rng, SeedableRng};
use twoline::stats::pace::{BREAK_MS, CONFIDENCE, ENOUGH, Pace, Paces};

const MINUTE: i64 = 60_000;

/// Instants at these minutes.
fn at(minutes: impl IntoIterator<Item = i64>) -> Vec<i64> {
    minutes.into_iter().map(|m| m * MINUTE).collect()
}

#[test]
fn nothing_is_said_before_enough_children() {
    let few = at((0..ENOUGH as i64).map(|i| 2 * i));
    let paces = Paces::of(&few, 20 * MINUTE);
    assert_eq!((paces.whole, paces.recent), (None, None));
    assert_eq!(paces.time_for(10), None);
    assert_eq!(Paces::of(&[], 0), Paces::default());
    // All at one instant have no pace.
    assert_eq!(Paces::of(&[5; 40], 5).whole, None);
}

#[test]
fn a_child_every_two_minutes_is_thirty_an_hour() {
    let instants = at((0..41).map(|i| 2 * i));
    let paces = Paces::of(&instants, 80 * MINUTE);
    let whole = paces.whole.expect("a pace");
    assert!((whole.an_hour() - 30.0).abs() < 1e-9, "{whole:?}");
    let recent = paces.recent.expect("a pace");
    assert_eq!(recent.gaps, 15, "half an hour");
    let (soon, late) = paces.time_for(30).expect("a range");
    let hour = 60.0 * MINUTE as f64;
    assert!(soon < hour && hour < late, "{soon} {late}");
    assert!(soon > hour / 2.0 && late < hour * 2.0, "{soon} {late}");
    assert_eq!(paces.time_for(0), None);
}

#[test]
fn breaks_are_left_out_and_a_present_one_is_named() {
    // Half an hour of work, an hour of lunch, half an hour of work; in any order.
    let mut instants = at((0..16).map(|i| 2 * i).chain((0..16).map(|i| 90 + 2 * i)));
    instants.reverse();
    let paces = Paces::of(&instants, 120 * MINUTE);
    assert!((paces.whole.expect("a pace").an_hour() - 30.0).abs() < 1e-9);
    assert_eq!(paces.paused_since, None);
    let later = Paces::of(&instants, 120 * MINUTE + BREAK_MS + 1);
    assert_eq!(later.paused_since, Some(120 * MINUTE));
    assert_eq!(later.whole, paces.whole, "a break does not slow the pace");
    // A wait that is no break yet does.
    let waiting = Paces::of(&instants, 120 * MINUTE + BREAK_MS);
    assert!(waiting.whole.expect("a pace").an_hour() < 30.0);
}

#[test]
fn a_day_that_slows_down_is_seen_in_the_recent_pace_and_in_the_range() {
    let instants = at((0..60).chain((0..12).map(|i| 62 + 3 * i)));
    let now = instants[instants.len() - 1];
    let paces = Paces::of(&instants, now);
    let (whole, recent) = (paces.whole.expect("one"), paces.recent.expect("one"));
    assert!(recent.an_hour() < whole.an_hour());
    let range = paces.time_for(30).expect("a range");
    assert!(range.1 >= recent.time_for(30).expect("a range").1);
    assert!(range.0 <= whole.time_for(30).expect("a range").0);
}

#[test]
fn the_range_holds_the_end_as_often_as_it_says() {
    let mut random = ChaCha8Rng::seed_from_u64(20_261_014);
    let mut gap = || -((1.0 - (random.next_u64() >> 11) as f64 / (1u64 << 53) as f64).ln());
    let days = 4_000;
    let mut held = 0;
    for _ in 0..days {
        let worked: f64 = (0..20).map(|_| gap()).sum::<f64>() * 1e6;
        let pace = Pace {
            gaps: 20,
            working_ms: worked as i64,
        };
        let rest: f64 = (0..30).map(|_| gap()).sum::<f64>() * 1e6;
        let (soon, late) = pace.time_for(30).expect("a range");
        held += u32::from(soon <= rest && rest <= late);
    }
    let share = f64::from(held) / f64::from(days);
    assert!((share - CONFIDENCE).abs() < 0.03, "{share}");
}
