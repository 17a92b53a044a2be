//! Intervals of a proportion, against a table made with scipy 1.17.1 (checked with statsmodels
//! 0.15.0); each row names it.

use proptest::prelude::*;
use twoline::actions::compare::share;
use twoline::stats::intervals::{Interval, clopper_pearson, wilson};

fn near(found: Interval, low: f64, high: f64, what: &str) {
    assert!(
        (found.low - low).abs() < 1e-9 && (found.high - high).abs() < 1e-9,
        "{what}: {found:?}, expected {low} to {high}"
    );
}

#[test]
fn intervals_agree_with_the_table() {
    let text = include_str!("../../data/proportion_intervals.csv");
    let mut rows = 0;
    for row in super::super::cli::rows(text) {
        let number = |name: &str| -> f64 { row[name].parse().expect("a number") };
        let (k, n) = (number("k") as u64, number("n") as u64);
        let confidence = number("confidence");
        let what = format!("{k}/{n} at {confidence} ({})", row["source"]);
        let found = wilson(k, n, confidence).expect("an interval");
        near(found, number("wilson_lo"), number("wilson_hi"), &what);
        let found = clopper_pearson(k, n, confidence).expect("an interval");
        let (low, high) = (number("clopper_pearson_lo"), number("clopper_pearson_hi"));
        near(found, low, high, &what);
        rows += 1;
    }
    assert!(rows >= 20, "{rows}");
}

#[test]
fn what_has_no_answer_gets_none() {
    for (k, n, confidence) in [
        (0, 0, 0.95),
        (2, 1, 0.95),
        (1, 2, 1.0),
        (1, 2, 0.0),
        (1, 2, f64::NAN),
    ] {
        assert_eq!(wilson(k, n, confidence), None);
        assert_eq!(clopper_pearson(k, n, confidence), None);
    }
    assert_eq!(share(0, 0), "0/0");
    // 12 of 347: the row of the table above, rounded.
    assert_eq!(share(12, 347), "12/347 3.5% (2.0–5.9)");
}

proptest! {
    /// Both hold the proportion, and turn over with it.
    #[test]
    fn intervals_hold_the_share(n in 1u64..5_000, part in 0.0f64..=1.0) {
        let k = ((n as f64) * part) as u64;
        let p = k as f64 / n as f64;
        for of in [wilson, clopper_pearson] {
            let here = of(k, n, 0.95).expect("an interval");
            let there = of(n - k, n, 0.95).expect("an interval");
            prop_assert!(0.0 <= here.low && here.low <= p && p <= here.high && here.high <= 1.0);
            prop_assert!((here.low - (1.0 - there.high)).abs() < 1e-9);
        }
    }
}
