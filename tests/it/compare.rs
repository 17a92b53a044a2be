//! Comparing rule sets: symmetric, the same answers as the evaluator, moved thresholds included.

#![allow(clippy::panic)]

mod command;
mod intervals;

use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::{Rng, SeedableRng};
use twoline::actions::compare::{self, Comparison, Side, Subject, Verdict};
use twoline::domain::age::{AgeMonths, Grade};
use twoline::domain::codes::{AcuityMethod, Attempt};
use twoline::domain::field::Field;
use twoline::domain::outcome::OutcomeKind;
use twoline::domain::readings::{ReadingContext, Readings};
use twoline::rules::{Library, RuleSet, judge_rule_set};

const SEED: u64 = 20_261_201;

pub struct Random(ChaCha8Rng);

impl Random {
    pub fn new(seed: u64) -> Random {
        Random(ChaCha8Rng::seed_from_u64(seed))
    }

    pub fn below(&mut self, n: u32) -> u32 {
        self.0.next_u32() % n
    }

    fn of<'a>(&mut self, words: &[&'a str]) -> &'a str {
        words[self.below(words.len() as u32) as usize]
    }
}

const ACUITY: [&str; 22] = [
    "20/16", "20/20", "20/25", "20/30", "20/32", "20/40", "20/50", "20/60", "20/63", "20/80",
    "20/200", "20/40-1", "20/32-2", "20/50-3", "20/25+2", "6/9", ">=20/32", ">=20/40", "<20/40",
    "<20/50", "CF", "NT:shy",
];
const DIOPTRES: [&str; 14] = [
    "0", "+0.25", "-0.50", "+1.00", "-1.25", "+1.50", "+2.00", "-2.25", "+3.75", "+4.00", "+4.25",
    "-3.00", "-3.25", "+5.50",
];

/// A child with random readings; some contradict each other, which judging has to bear.
pub fn subject(random: &mut Random, critical: bool) -> Subject {
    let mut readings = Readings::default();
    let mut set = |field: Field, text: &str| {
        readings
            .set(field, text, ReadingContext::default())
            .unwrap_or_else(|e| panic!("{e}"));
    };
    if random.below(5) == 0 {
        set(Field::LettersPerLine, random.of(&["4", "6"]));
    }
    let mut some = |random: &mut Random, of: u32, fields: &[Field], words: &[&str]| {
        for field in fields {
            if random.below(10) < of {
                set(*field, random.of(words));
            }
        }
    };
    some(
        random,
        9,
        &[Field::DistanceRight, Field::DistanceLeft],
        &ACUITY,
    );
    some(random, 4, &[Field::NearRight, Field::NearLeft], &ACUITY);
    let spheres = [Field::SphereRight, Field::SphereLeft];
    some(random, 8, &spheres, &DIOPTRES);
    let cylinders = [Field::CylinderRight, Field::CylinderLeft];
    some(
        random,
        8,
        &cylinders,
        &["0", "-0.75", "-1.25", "-1.50", "-1.75", "-3.25"],
    );
    let axes = [Field::AxisRight, Field::AxisLeft];
    some(random, 8, &axes, &["180", "90", "80", "45", "101", "135"]);
    some(random, 2, &[Field::InstrumentWorn], &["yes", "no"]);
    some(
        random,
        5,
        &[Field::Cover],
        &["none", "phoria", "intermittent", "constant"],
    );
    some(
        random,
        3,
        &[Field::DeviationPd],
        &["0", "4", "8", "10", "12.5"],
    );
    let opacity = [Field::OpacityMmRight, Field::OpacityMmLeft];
    some(random, 3, &opacity, &["0", "1", "1.5"]);
    let lids = [Field::ReflexDistanceMmRight, Field::ReflexDistanceMmLeft];
    some(random, 3, &lids, &["0.5", "1", "3"]);
    some(random, 4, &[Field::StereoCorrect], &["2", "3", "4", "6"]);
    some(random, 4, &[Field::StereoShown], &["6", "5"]);
    some(random, 3, &[Field::PlatesMissed], &["0", "1"]);
    let reflexes = [Field::RedReflexRight, Field::RedReflexLeft];
    some(random, 4, &reflexes, &["normal", "absent", "white", "dull"]);
    some(
        random,
        6,
        &[Field::Signs],
        &["none", "new_squint", "nystagmus", "white_pupil:left"],
    );
    some(
        random,
        5,
        &[Field::History],
        &["none", "down_syndrome", "under_care"],
    );
    some(
        random,
        5,
        &[Field::CorrectionWorn],
        &["none", "yes", "left_at_home"],
    );
    some(random, 4, &[Field::PlusLens], &["read", "blurred"]);
    Subject {
        child_id: String::new(),
        name: String::new(),
        site: format!("Site {}", random.below(3)),
        age: (random.below(20) > 0).then(|| AgeMonths(20 + random.below(200))),
        grade: Grade::parse(random.of(&["PK", "KG", "01", "05", "12", "none"])),
        on: chrono::NaiveDate::from_ymd_opt(2026, 10, 14),
        attempt: Attempt::First,
        method: (critical && random.below(2) == 0).then_some(AcuityMethod::CriticalLine),
        consent: None,
        under_care: random.below(12) == 0,
        readings,
    }
}

pub fn subjects(count: usize, critical: bool) -> Vec<Subject> {
    let mut random = Random::new(SEED);
    (0..count).map(|_| subject(&mut random, critical)).collect()
}

/// Says what the evaluator answers, in the words of a comparison.
fn verdict(kind: OutcomeKind) -> Option<Verdict> {
    match kind {
        OutcomeKind::Pass => Some(Verdict::Pass),
        OutcomeKind::Rescreen => Some(Verdict::Rescreen),
        OutcomeKind::Incomplete => Some(Verdict::Incomplete),
        OutcomeKind::Refer => Some(Verdict::Refer),
        OutcomeKind::Exempt => None,
    }
}

fn agrees(comparison: &Comparison, side: Side, set: &RuleSet, subjects: &[Subject]) {
    for (i, (fast, subject)) in comparison.verdicts(side).zip(subjects).enumerate() {
        let slow = judge_rule_set(set, &subject.case());
        assert_eq!(
            Some(fast),
            verdict(slow.kind),
            "random seed {SEED}, child {i}, {}: {:?} {subject:?}",
            set.id,
            slow.criteria
        );
    }
}

fn quantity_sets() -> impl Iterator<Item = &'static RuleSet> {
    Library::shipped().rule_sets()
}

/// The columns answer what the evaluator answers, for each shipped set. The same is asked of 100,000
/// random children in `benches/compare.rs`, where the program is built to be fast.
#[test]
fn columns_answer_what_the_evaluator_answers() {
    let subjects = subjects(3_000, true);
    let sets: Vec<&RuleSet> = quantity_sets().collect();
    assert!(sets.len() >= 20);
    for pair in sets.chunks(2) {
        let (a, b) = (pair[0], pair[pair.len() - 1]);
        let comparison = Comparison::new(a, b, &subjects);
        agrees(&comparison, Side::A, a, &subjects);
        if pair.len() == 2 {
            agrees(&comparison, Side::B, b, &subjects);
        }
    }
}

/// A moved threshold answers what a rule set with that threshold answers, at every place of every
/// ladder. Critical-line days are left out: what was shown on them was the line of that day, which
/// does not move.
#[test]
fn a_moved_threshold_answers_like_a_set_that_has_it() {
    let subjects = subjects(60, false);
    let mut steps = 0;
    for set in quantity_sets() {
        let mut comparison = Comparison::new(set, set, &subjects);
        for threshold in 0..comparison.movable(Side::B).len() {
            while comparison.step(Side::B, threshold, -1) {}
            loop {
                let moved = comparison.set(Side::B).clone();
                agrees(&comparison, Side::B, &moved, &subjects);
                steps += 1;
                if !comparison.step(Side::B, threshold, 1) {
                    break;
                }
            }
            comparison.reset(Side::B);
            assert_eq!(comparison.set(Side::B).criteria, set.criteria);
            assert_eq!(comparison.flips(), []);
        }
    }
    assert!(steps > 500, "{steps}");
}

/// What one set refers alone is what the other does not, whichever comes first.
#[test]
fn a_comparison_is_the_same_from_either_side() {
    let subjects = subjects(400, true);
    let sets: Vec<&RuleSet> = quantity_sets().collect();
    let mut parted = 0;
    for a in &sets {
        for b in sets.iter().filter(|b| b.kind == a.kind) {
            let (ab, ba) = (
                Comparison::new(a, b, &subjects),
                Comparison::new(b, a, &subjects),
            );
            let (x, y) = (ab.tally(), ba.tally());
            for (mine, theirs) in [(Side::A, Side::B), (Side::B, Side::A)] {
                assert_eq!(x.all.only(mine), y.all.only(theirs));
                assert_eq!(x.all.only_unanswered(mine), y.all.only_unanswered(theirs));
                for verdict in [
                    Verdict::Pass,
                    Verdict::Incomplete,
                    Verdict::Rescreen,
                    Verdict::Refer,
                ] {
                    assert_eq!(x.all.of(mine, verdict), y.all.of(theirs, verdict));
                }
            }
            assert_eq!(x.all.more(), -y.all.more());
            assert_eq!(x.meridional, [y.meridional[1], y.meridional[0]]);
            let turned: Vec<_> = ba.flips().iter().map(|f| (f.place, f.b, f.a)).collect();
            let flips: Vec<_> = ab.flips().iter().map(|f| (f.place, f.a, f.b)).collect();
            assert_eq!(flips, turned);
            parted += flips.len();
            let only = x.all.only(Side::A) + x.all.only(Side::B);
            assert_eq!(only, flips.len() as u64);
            // Every child is in one age band and at one site.
            for groups in [&x.by_age, &x.by_site] {
                let n: u64 = groups.iter().map(|(_, c)| c.children()).sum();
                assert_eq!(n, 400);
            }
        }
    }
    assert!(parted > 2_000, "{parted}");
}

fn plain(age: u32, text: &str) -> Subject {
    let mut readings = Readings::default();
    for part in text.split(' ') {
        let (field, value) = part.split_once('=').expect("field=value");
        let field = Field::from_word(field).expect("a field");
        readings
            .set(field, value, ReadingContext::default())
            .expect("a value");
    }
    Subject {
        age: Some(AgeMonths(age)),
        method: None,
        under_care: false,
        readings,
        ..subject(&mut Random::new(1), false)
    }
}

/// IAPB school standards 2018 refer worse than 6/9 (primary), the joint policy 2016 worse than
/// 20/32 and two lines between the eyes (memory; table as printed in A.A.C. R9-13): 20/20 and 20/32
/// part them, and moving the two-line rule to three joins them.
#[test]
fn two_lines_between_the_eyes_part_two_sets() {
    let library = Library::shipped();
    let a = library.rule_set("joint-policy-2016").expect("shipped");
    let b = library.rule_set("iapb-school-6-12").expect("shipped");
    let subjects = [
        plain(73, "distance_right=20/20 distance_left=20/32"),
        plain(73, "distance_right=20/20 distance_left=20/20"),
    ];
    let mut comparison = Comparison::new(a, b, &subjects);
    assert_eq!(comparison.tally().all.only(Side::A), 1);
    assert_eq!(comparison.tally().all.more(), -1);
    let between = comparison
        .movable(Side::A)
        .iter()
        .position(|m| m.threshold.starts_with("2 lines"))
        .expect("the two-line rule");
    assert!(comparison.step(Side::A, between, 1));
    assert_eq!(
        &*comparison.movable(Side::A)[between].threshold,
        "3 lines or more"
    );
    assert_eq!(comparison.tally().all.only(Side::A), 0);
}

/// New South Wales preschool 2018 (primary): worse than 6/9 and better than 6/9-2 is rechecked at 12
/// months, which is no referral; 6/9-2 refers. An eye that could still refer leaves it open.
#[test]
fn a_recheck_is_a_verdict_of_its_own_and_no_referral() {
    let library = Library::shipped();
    let a = library.rule_set("nsw-preschool").expect("shipped");
    let b = library.rule_set("joint-policy-2016").expect("shipped");
    let subjects = [
        plain(50, "distance_right=6/9-1 distance_left=6/9"),
        plain(50, "distance_right=6/9-2 distance_left=6/9"),
        plain(50, "distance_right=6/9 distance_left=6/9"),
        plain(50, "distance_right=6/9-1"),
    ];
    let comparison = Comparison::new(a, b, &subjects);
    let verdicts: Vec<Verdict> = comparison.verdicts(Side::A).collect();
    assert_eq!(
        verdicts,
        [
            Verdict::Rescreen,
            Verdict::Refer,
            Verdict::Pass,
            Verdict::Incomplete
        ]
    );
    agrees(&comparison, Side::A, a, &subjects);
    let all = comparison.tally().all;
    assert_eq!(
        (all.of(Side::A, Verdict::Rescreen), all.only(Side::A)),
        (1, 1)
    );
    let report = compare::report(&comparison, &subjects, "four children").join("\n");
    assert!(report.contains("screens again 1/4"), "{report}");
}

/// Equal spherical equivalents, cylinders of 1.50 D at right angles: 1.50 D along one meridian,
/// above the 1.25 D of the 2021 guideline, noted and not referred.
#[test]
fn the_meridional_note_is_counted_and_follows() {
    let library = Library::shipped();
    let set = library.rule_set("instrument-2021").expect("shipped");
    let text = "sphere_right=+0.75 cylinder_right=-1.50 axis_right=90 sphere_left=+0.75 cylinder_left=-1.50 axis_left=180";
    let subjects = [plain(60, text)];
    let mut comparison = Comparison::new(set, set, &subjects);
    assert_eq!(comparison.tally().meridional, [Some(1), Some(1)]);
    // 1.50 D is not above 1.50 D.
    for (at, threshold) in comparison.movable(Side::B).iter().enumerate() {
        if threshold.id.starts_with("anisometropia") {
            assert!(comparison.step(Side::B, at, 1));
        }
    }
    assert_eq!(comparison.tally().meridional, [Some(1), Some(0)]);
    let acuity = library.rule_set("joint-policy-2016").expect("shipped");
    let none = Comparison::new(acuity, acuity, &subjects);
    assert_eq!(none.tally().meridional, [None, None]);
}
