//! How fast thresholds move on 100,000 children: `cargo bench --bench compare [N]`.
//!
//! A step of the screen moves one threshold, judges every child again and counts. Baseline in the
//! same run: the same children judged row by row by the evaluator. Before anything is timed, each
//! shipped rule set on columns is compared with the evaluator on all of them.
#![allow(missing_docs, clippy::unwrap_used, clippy::print_stdout)]

use std::hint::black_box;
use std::time::{Duration, Instant};

use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::{Rng, SeedableRng};
use twoline::actions::compare::{Comparison, Side, Subject, Verdict};
use twoline::domain::age::{AgeMonths, Grade};
use twoline::domain::codes::Attempt;
use twoline::domain::field::Field;
use twoline::domain::outcome::OutcomeKind;
use twoline::domain::readings::{ReadingContext, Readings};
use twoline::rules::{Library, RuleSet, judge_rule_set};

const SEED: u64 = 20_261_201;
const STEPS: u32 = 40;

fn main() {
    let children = std::env::args()
        .skip(1)
        .find_map(|a| a.parse().ok())
        .unwrap_or(100_000);
    let mut random = ChaCha8Rng::seed_from_u64(SEED);
    let subjects: Vec<Subject> = (0..children).map(|_| subject(&mut random)).collect();
    let library = Library::shipped();
    println!("{children} random children, seed {SEED}");
    let mut sets = 0;
    for set in library.rule_sets() {
        let comparison = Comparison::new(set, set, &subjects);
        for (fast, subject) in comparison.verdicts(Side::A).zip(&subjects) {
            let slow = match judge_rule_set(set, &subject.case()).kind {
                OutcomeKind::Refer => Verdict::Refer,
                OutcomeKind::Rescreen => Verdict::Rescreen,
                OutcomeKind::Incomplete => Verdict::Incomplete,
                _ => Verdict::Pass,
            };
            assert_eq!(fast, slow, "{} {subject:?}", set.id);
        }
        sets += 1;
    }
    println!("{sets} shipped rule sets: columns and evaluator agree on every child");
    for (a, b) in [
        ("joint-policy-2016", "joint-policy-2003"),
        ("expert-panel-2015", "iapb-school-6-9"),
        ("instrument-2013", "instrument-2021"),
    ] {
        let (a, b) = (library.rule_set(a).unwrap(), library.rule_set(b).unwrap());
        measure(a, b, &subjects);
    }
}

fn measure(a: &RuleSet, b: &RuleSet, subjects: &[Subject]) {
    let start = Instant::now();
    let mut comparison = Comparison::new(a, b, subjects);
    let built = start.elapsed();
    let thresholds = comparison.movable(Side::B).len();
    let mut times: Vec<Duration> = Vec::new();
    for threshold in 0..thresholds {
        let mut by = 1;
        for _ in 0..STEPS {
            let start = Instant::now();
            let moved = comparison.step(Side::B, threshold, by);
            black_box(comparison.tally());
            if moved {
                times.push(start.elapsed());
            } else {
                by = -by;
            }
        }
        comparison.reset(Side::B);
    }
    times.sort_unstable();
    let start = Instant::now();
    for subject in subjects {
        black_box(judge_rule_set(b, &subject.case()).kind);
    }
    let rows = start.elapsed();
    let ms = |d: Duration| d.as_secs_f64() * 1e3;
    println!(
        "{} and {}: built in {:.0} ms; a step {:.2} ms in the middle, {:.2} ms at worst ({} steps); \
         row by row {:.0} ms",
        a.id,
        b.id,
        ms(built),
        ms(times[times.len() / 2]),
        ms(times[times.len() - 1]),
        times.len(),
        ms(rows)
    );
}

fn subject(random: &mut ChaCha8Rng) -> Subject {
    let mut readings = Readings::default();
    let mut some = |share: u32, fields: &[Field], words: &[&str]| {
        for field in fields {
            if random.next_u32() % 10 < share {
                let word = words[random.next_u32() as usize % words.len()];
                readings
                    .set(*field, word, ReadingContext::default())
                    .unwrap();
            }
        }
    };
    let lines = [
        "20/16", "20/20", "20/25", "20/30", "20/32", "20/40", "20/50", "20/63", "20/200",
        "20/40-1", "20/32-3", ">=20/32", "<20/40", "CF", "NT:shy", "6/9",
    ];
    let powers = [
        "0", "+0.75", "-1.25", "+2.25", "-3.25", "+4.25", "+1.50", "-0.50",
    ];
    some(9, &[Field::DistanceRight, Field::DistanceLeft], &lines);
    some(3, &[Field::NearRight, Field::NearLeft], &lines);
    some(9, &[Field::SphereRight, Field::SphereLeft], &powers);
    let cylinders = ["0", "-0.75", "-1.50", "-1.75", "-3.25"];
    some(9, &[Field::CylinderRight, Field::CylinderLeft], &cylinders);
    some(
        9,
        &[Field::AxisRight, Field::AxisLeft],
        &["180", "90", "45", "101"],
    );
    some(
        5,
        &[Field::Cover],
        &["none", "phoria", "intermittent", "constant"],
    );
    some(3, &[Field::DeviationPd], &["0", "4", "8", "12"]);
    some(4, &[Field::StereoCorrect], &["2", "3", "4", "6"]);
    some(4, &[Field::StereoShown], &["6", "5"]);
    some(
        4,
        &[Field::RedReflexRight, Field::RedReflexLeft],
        &["normal", "absent", "dull"],
    );
    some(6, &[Field::Signs], &["none", "new_squint", "nystagmus"]);
    some(
        5,
        &[Field::History],
        &["none", "down_syndrome", "under_care"],
    );
    some(5, &[Field::CorrectionWorn], &["none", "yes"]);
    some(4, &[Field::PlusLens], &["read", "blurred"]);
    Subject {
        child_id: String::new(),
        name: String::new(),
        site: format!("Site {}", random.next_u32() % 12),
        age: (!random.next_u32().is_multiple_of(20))
            .then(|| AgeMonths(20 + random.next_u32() % 200)),
        grade: Grade::parse(["PK", "KG", "01", "05", "12"][random.next_u32() as usize % 5]),
        on: chrono::NaiveDate::from_ymd_opt(2026, 10, 14),
        attempt: Attempt::First,
        method: None,
        consent: None,
        under_care: random.next_u32().is_multiple_of(12),
        readings,
    }
}
