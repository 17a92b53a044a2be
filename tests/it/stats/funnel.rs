//! Prediction limits: a table made with scipy 1.17.1 by the interpolation of Spiegelhalter (Stat Med
//! 2005;24:1185–1202, appendix A.1.1; the formula was written from memory), sums worked out by hand,
//! and how often chance alone passes a limit.

use proptest::prelude::*;
use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::{Rng, SeedableRng};
use twoline::stats::funnel::{Prediction, Side};

#[test]
fn limits_agree_with_the_table() {
    let text = include_str!("../../data/funnel_limits.csv");
    let mut rows = 0;
    for row in super::super::cli::rows(text) {
        let number = |name: &str| -> f64 { row[name].parse().expect("a number") };
        let (n, prob) = (number("n") as u64, number("prob"));
        let what = format!("{} of {n} at {prob} ({})", row["target"], row["source"]);
        let found = Prediction::known(n, number("target")).expect("a prediction");
        let near = |a: f64, b: f64, of: &str| {
            assert!((a - b).abs() < 1e-9, "{what}, {of}: {a}, expected {b}");
        };
        let limit = found.limit(prob).expect("a limit");
        near(limit, number("limit_clamped_0_1"), "limit");
        let r = number("r_p") as u64;
        near(found.at_most(r), number("F_r"), "F(r)");
        if r > 0 {
            near(found.at_most(r - 1), number("F_r_minus_1"), "F(r-1)");
        }
        rows += 1;
    }
    assert!(rows >= 100, "{rows}");
}

#[test]
fn small_cases_can_be_worked_out_by_hand() {
    // Two coins: 1/4, 1/2, 1/4.
    let coins = Prediction::known(2, 0.5).expect("a prediction");
    assert!((coins.at_most(0) - 0.25).abs() < 1e-12);
    assert!((coins.at_most(1) - 0.75).abs() < 1e-12);
    // One in two and one in four: none 3/8, one 1/2, both 1/8.
    let one = |p| Prediction::known(1, p).expect("a prediction");
    let both = one(0.5).plus(&one(0.25));
    assert!((both.at_most(0) - 0.375).abs() < 1e-12);
    assert!((both.at_least(2) - 0.125).abs() < 1e-12);
    assert!((both.mean() - 0.75).abs() < 1e-12);
    assert_eq!(both.children(), 2);
    // Jeffreys' prior alone: of two, none, one or both have 3/8, 1/4, 3/8.
    let prior = Prediction::from_others(2, 0, 0).expect("a prediction");
    assert!((prior.at_most(0) - 0.375).abs() < 1e-9);
    assert!((prior.at_least(2) - 0.375).abs() < 1e-9);
    // Nobody, and what has no answer.
    assert_eq!(Prediction::nobody().limit(0.975), None);
    assert_eq!(Prediction::nobody().within(0.95), (0, 0));
    assert_eq!(Prediction::known(10, 1.5), None);
    assert_eq!(Prediction::known(10, f64::NAN), None);
    assert_eq!(Prediction::from_others(10, 3, 2), None);
    assert_eq!(coins.limit(0.0), None);
}

#[test]
fn certainty_leaves_one_number() {
    for (p, count) in [(0.0, 0), (1.0, 30)] {
        let found = Prediction::known(30, p).expect("a prediction");
        assert_eq!(found.within(0.95), (count, count));
        assert_eq!(found.side(count, 0.95), Side::Within);
    }
    let none = Prediction::known(30, 0.0).expect("a prediction");
    assert_eq!(none.side(1, 0.998), Side::Above);
}

#[test]
fn the_share_of_many_others_is_as_good_as_known() {
    let known = Prediction::known(60, 0.15).expect("a prediction");
    let many = Prediction::from_others(60, 1_500_000, 10_000_000).expect("a prediction");
    let few = Prediction::from_others(60, 9, 60).expect("a prediction");
    for p in [0.001, 0.025, 0.975, 0.999] {
        let (a, b) = (known.limit(p).expect("one"), many.limit(p).expect("one"));
        assert!((a - b).abs() < 1e-4, "{a} {b}");
    }
    let (low, high) = known.within(0.95);
    let (wider_low, wider_high) = few.within(0.95);
    assert!(
        wider_low < low && wider_high > high,
        "a comparison with few is wider"
    );
}

/// Two stations of 60 children with the same true share: how often each limit is passed by chance
/// alone. The comparison with the other station must not make it more often than it says.
#[test]
fn two_equal_stations_pass_a_limit_no_more_often_than_it_says() {
    let mut random = ChaCha8Rng::seed_from_u64(20_261_014);
    let mut draw = |n: u64, p: f64| -> u64 {
        let hit = |r: u64| (r >> 11) as f64 / (1u64 << 53) as f64 <= p;
        (0..n).filter(|_| hit(random.next_u64())).count() as u64
    };
    let days = 4_000;
    let (mut gentle, mut strong, mut plain) = (0, 0, 0);
    for _ in 0..days {
        let (mine, theirs) = (draw(60, 0.15), draw(60, 0.15));
        let found = Prediction::from_others(60, theirs, 60).expect("a prediction");
        gentle += u32::from(found.side(mine, 0.95) != Side::Within);
        strong += u32::from(found.side(mine, 0.998) != Side::Within);
        let as_known = Prediction::known(60, theirs as f64 / 60.0).expect("a prediction");
        plain += u32::from(as_known.side(mine, 0.95) != Side::Within);
    }
    let share = |count: u32| f64::from(count) / f64::from(days);
    assert!(share(gentle) < 0.06, "{}", share(gentle));
    assert!(share(strong) < 0.005, "{}", share(strong));
    // The other station's share taken as known would pass its limit far more often than it says.
    assert!(share(plain) > 0.10, "{}", share(plain));
}

proptest! {
    #[test]
    fn a_prediction_is_a_distribution(n in 0u64..400, p in 0.0f64..=1.0, hits in 0u64..50, more in 0u64..50) {
        let known = Prediction::known(n, p).expect("a prediction");
        let others = Prediction::from_others(n, hits, hits + more).expect("a prediction");
        let both = known.plus(&others);
        for found in [&known, &others, &both] {
            prop_assert!((found.at_most(found.children()) - 1.0).abs() < 1e-8);
            let k = found.children() / 2;
            prop_assert!((found.at_most(k) + found.at_least(k + 1) - 1.0).abs() < 1e-8);
            let (low, high) = found.within(0.95);
            prop_assert!(low <= high && high <= found.children());
        }
        prop_assert!((known.mean() - n as f64 * p).abs() < 1e-6);
        prop_assert!((both.mean() - known.mean() - others.mean()).abs() < 1e-6);
    }

    /// What refers turned into what passes gives the same limits from the other end.
    #[test]
    fn limits_are_symmetric(n in 1u64..300, p in 0.01f64..=0.99) {
        let here = Prediction::known(n, p).expect("a prediction");
        let there = Prediction::known(n, 1.0 - p).expect("a prediction");
        let (low, high) = here.within(0.95);
        prop_assert_eq!(there.within(0.95), (n - high, n - low));
    }

    #[test]
    fn limits_grow_with_probability_and_share(n in 1u64..300, p in 0.01f64..0.9) {
        let here = Prediction::known(n, p).expect("a prediction");
        let limits: Vec<f64> = [0.001, 0.025, 0.975, 0.999]
            .iter()
            .map(|at| here.limit(*at).expect("a limit"))
            .collect();
        prop_assert!(limits.windows(2).all(|w| w[0] <= w[1]), "{:?}", limits);
        let higher = Prediction::known(n, p + 0.1).expect("a prediction");
        prop_assert!(higher.limit(0.975).expect("one") >= limits[2]);
        let (gentle, strong) = (here.within(0.95), here.within(0.998));
        prop_assert!(strong.0 <= gentle.0 && gentle.1 <= strong.1);
    }

    /// Children of the same share, however they are put into groups, are one binomial.
    #[test]
    fn a_sum_of_equal_shares_is_one_binomial(a in 0u64..80, b in 0u64..80, p in 0.0f64..=1.0) {
        let of = |n| Prediction::known(n, p).expect("a prediction");
        let (sum, whole) = (of(a).plus(&of(b)), of(a + b));
        for k in 0..=a + b {
            prop_assert!((sum.at_most(k) - whole.at_most(k)).abs() < 1e-9);
        }
    }
}
