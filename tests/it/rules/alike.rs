//! Worse stays worse, and how a reading is written never matters. Proptest prints the seed.

use proptest::prelude::*;
use twoline::domain::acuity::{Acuity, Line, Notation, Step};
use twoline::domain::age::AgeMonths;
use twoline::domain::field::Field;
use twoline::domain::outcome::{Answer, Outcome, OutcomeKind};
use twoline::domain::readings::{AcuityResult, ReadingContext, Readings};
use twoline::domain::refraction::{Axis, Diopters, Power, Refraction};
use twoline::rules::{Case, Library, explain, judge_protocol, judge_rule_set};

use super::support::{child, word};

#[allow(clippy::unnecessary_wraps)] // as the readings hold it
fn read(step: i32, notation: Notation) -> Option<AcuityResult> {
    Some(AcuityResult::Read(Acuity::Read {
        line: Line::at(Step(step), notation),
        letters: 0,
    }))
}

fn chart(right: i32, left: i32, notation: Notation) -> Readings {
    let mut out = Readings::default();
    out.distance.right = read(right, notation);
    out.distance.left = read(left, notation);
    out.near = out.distance;
    out
}

fn judged(set: &str, age: u32, readings: &Readings) -> Outcome {
    let mut case = Case::new(readings);
    case.age = Some(AgeMonths(age));
    case.grade = twoline::domain::age::Grade::parse("01");
    judge_rule_set(Library::shipped().rule_set(set).unwrap(), &case)
}

fn eye(of: (i32, i32, u8)) -> Refraction {
    Refraction {
        sphere: Diopters(of.0 * 250),
        cylinder: Diopters(of.1 * 250),
        axis: Axis::new(i64::from(of.2)).unwrap(),
    }
}

fn measured(right: Refraction, left: Refraction) -> Readings {
    let mut out = Readings::default();
    for (eye, of) in [
        (&mut out.instrument.right, right),
        (&mut out.instrument.left, left),
    ] {
        eye.sphere = Some(Power::Value(of.sphere));
        eye.cylinder = Some(Power::Value(of.cylinder));
        eye.axis = Some(of.axis);
    }
    out
}

const CHART_SETS: [&str; 13] = [
    "expert-panel-2015",
    "joint-policy-2016",
    "joint-policy-2003",
    "arizona-school",
    "missouri-school",
    "washington-school",
    "texas-school",
    "england-school-entry",
    "ireland-school-entry",
    "iapb-school-6-9",
    "iapb-school-6-12",
    "nsw-preschool",
    "new-zealand-4y",
];

fn power() -> impl Strategy<Value = (i32, i32, u8)> {
    (-30i32..30, -14i32..14, 1u8..=180)
}

/// Applies "right eye 20/40 and left eye 20/32 or better would pass" to readings.
fn applied(words: &str, readings: &Readings) -> Readings {
    let mut out = readings.clone();
    let text = ["would pass", "would not pass", "would not refer"]
        .iter()
        .find_map(|end| words.strip_suffix(end))
        .unwrap_or_else(|| panic!("{words}"));
    for part in text.trim().split(" and ") {
        let part = part.trim().trim_end_matches(" or better");
        let (eye, line) = part.rsplit_once(' ').unwrap();
        let fields: &[Field] = match eye {
            "right eye" => &[Field::DistanceRight],
            "left eye" => &[Field::DistanceLeft],
            "both eyes" => &[Field::DistanceRight, Field::DistanceLeft],
            other => panic!("{other}"),
        };
        for field in fields {
            out.set(*field, line, ReadingContext::default()).unwrap();
        }
    }
    out
}

proptest! {
    #![proptest_config(ProptestConfig { failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn a_worse_line_never_turns_refer_into_pass(right in -3i32..15, left in -3i32..15, worse in 1i32..8, age in 0u32..120) {
        for set in CHART_SETS {
            let before = judged(set, age, &chart(right, left, Notation::Feet));
            let after = judged(set, age, &chart(right + worse, left, Notation::Feet));
            for reason in before.reasons.iter().filter(|r| !r.criterion.starts_with("between")) {
                let now = after.reasons.iter().find(|r| r.criterion == reason.criterion).unwrap();
                prop_assert!(reason.answer != Answer::Refer || now.answer == Answer::Refer, "{}/{}", set, reason.criterion);
            }
        }
    }

    #[test]
    fn a_larger_error_never_turns_refer_into_pass(right in power(), left in power(), more in 1i32..8, age in 12u32..120) {
        for set in ["instrument-2003", "instrument-2013", "instrument-2021"] {
            let before = judged(set, age, &measured(eye(right), eye(left)));
            let sign = if right.1 < 0 { -1 } else { 1 };
            for (finding, now) in [
                ("hyperopia", (right.0 + more, right.1, right.2)),
                ("myopia", (right.0 - more, right.1, right.2)),
                ("astigmatism", (right.0, right.1 + sign * more, right.2)),
            ] {
                let after = judged(set, age, &measured(eye(now), eye(left)));
                for reason in before.reasons.iter().filter(|r| r.criterion.starts_with(finding) && r.answer == Answer::Refer) {
                    let now = after.reasons.iter().find(|r| r.criterion == reason.criterion).unwrap();
                    prop_assert_eq!(now.answer, Answer::Refer, "{}/{}", set, reason.criterion);
                }
            }
        }
    }

    #[test]
    fn transposition_changes_nothing(right in power(), left in power(), age in 0u32..120) {
        let library = Library::shipped();
        let plain = measured(eye(right), eye(left));
        let other = measured(eye(right).transposed(), eye(left).transposed());
        for set in ["instrument-2003", "instrument-2013", "instrument-2021"] {
            let (a, b) = (judged(set, age, &plain), judged(set, age, &other));
            prop_assert_eq!((a.kind, a.criteria, a.unknown, a.risks), (b.kind, b.criteria, b.unknown, b.risks), "{}", set);
        }
        for protocol in library.protocols() {
            let judge = |readings: &Readings| {
                let mut case = Case::new(readings);
                case.age = Some(AgeMonths(age));
                judge_protocol(library, protocol, &case)
            };
            let (a, b) = (judge(&plain), judge(&other));
            prop_assert_eq!((a.kind, a.criteria, a.unknown), (b.kind, b.criteria, b.unknown), "{}", protocol.id);
        }
    }

    #[test]
    fn notation_changes_nothing(right in -3i32..15, left in -3i32..15, age in 0u32..120) {
        for set in CHART_SETS {
            let feet = judged(set, age, &chart(right, left, Notation::Feet));
            for notation in [Notation::Metres, Notation::LogMar, Notation::Decimal] {
                let other = judged(set, age, &chart(right, left, notation));
                prop_assert_eq!((feet.kind, &feet.criteria, &feet.unknown), (other.kind, &other.criteria, &other.unknown), "{} {:?}", set, notation);
            }
        }
    }

    /// What the explanation names as the smallest change does turn the outcome.
    #[test]
    fn the_named_change_turns_the_outcome(right in -1i32..12, left in -1i32..12, age in 36u32..110) {
        for set in ["expert-panel-2015", "joint-policy-2016", "joint-policy-2003", "texas-school", "england-school-entry", "iapb-school-6-9", "nsw-preschool", "new-zealand-4y"] {
            let readings = chart(right, left, Notation::Feet);
            let before = judged(set, age, &readings);
            let words = explain::would_change(&before);
            if words.is_empty() {
                prop_assert_eq!(before.kind, OutcomeKind::Incomplete, "{} {} {} {}", set, age, right, left);
                continue;
            }
            let after = judged(set, age, &applied(&words, &readings));
            prop_assert_ne!(before.kind, after.kind, "{} at {}: {} {}: {}", set, age, right, left, words);
            if words.ends_with("would pass") {
                prop_assert_eq!(after.kind, OutcomeKind::Pass, "{} at {}: {} {}: {}", set, age, right, left, words);
            }
        }
    }
}

/// Why the difference between the eyes is excepted: a worse better eye closes the gap.
#[test]
fn a_worse_eye_may_close_the_gap() {
    let gap = child(72, "distance_right=20/20 distance_left=20/32");
    assert_eq!(word(&gap.by_set("joint-policy-2016")), "refer");
    let none = child(72, "distance_right=20/32 distance_left=20/32");
    assert_eq!(word(&none.by_set("joint-policy-2016")), "pass");
}

/// Why anisometropia is excepted: a larger error of the other eye evens them out.
#[test]
fn a_larger_error_may_even_the_eyes() {
    let of = |right: &str| {
        let text =
            format!("sphere_right={right} cylinder_right=0 sphere_left=+2.00 cylinder_left=0");
        child(60, &text).by_set("instrument-2021")
    };
    assert_eq!(of("0").criteria, ["anisometropia.48+"]);
    assert_eq!(word(&of("+2.00")), "pass");
}

/// Both eyes and the gap in one sentence; a sign that was seen has no change of a reading.
#[test]
fn several_rules_are_one_sentence() {
    let both = child(72, "distance_right=20/20 distance_left=20/50").by_set("joint-policy-2016");
    assert_eq!(both.criteria.len(), 2);
    assert_eq!(explain::would_change(&both), "left eye 20/25 would pass");
    let pass = child(72, "distance_right=20/20 distance_left=20/25").by_set("joint-policy-2016");
    assert_eq!(
        explain::would_change(&pass),
        "left eye 20/32 would not pass"
    );
    let sign = child(72, "signs=white_pupil").by_set("urgent-signs");
    assert_eq!(explain::would_change(&sign), "");
}
