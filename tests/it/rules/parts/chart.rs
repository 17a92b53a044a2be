//! Line credit, intervals, distance, scope: each part of a chart rule on its own.

use super::kind;
use crate::rules::support::{child, word};
use twoline::domain::acuity::{Line, Notation, Step};
use twoline::domain::outcome::Outcome;
use twoline::rules::{Library, judge_rule_set};

fn right(set: &str, age: u32, value: &str) -> &'static str {
    kind(
        set,
        age,
        &format!("distance_right={value} distance_left=20/20"),
    )
}

// Line credit. Basis: expert panel 2015 primary; joint policies 2003 and 2016 memory.

#[test]
fn line_credit_is_the_rule_sets() {
    // Of five letters the panel's 3 of 4 allows one miss, a majority allows two.
    assert_eq!(right("expert-panel-2015", 50, "20/40-1"), "pass");
    assert_eq!(right("expert-panel-2015", 50, "20/40-2"), "refer");
    assert_eq!(right("joint-policy-2003", 50, "20/40-1"), "refer"); // three steps to 20/20: the two-line rule
    assert_eq!(
        kind(
            "joint-policy-2003",
            50,
            "distance_right=20/40-1 distance_left=20/32"
        ),
        "pass"
    );
    assert_eq!(
        kind(
            "joint-policy-2003",
            50,
            "distance_right=20/40-2 distance_left=20/32"
        ),
        "refer"
    );
    assert_eq!(
        kind(
            "joint-policy-2016",
            50,
            "distance_right=20/40-2 distance_left=20/32"
        ),
        "pass"
    );
    assert_eq!(
        kind(
            "joint-policy-2016",
            50,
            "distance_right=20/40-3 distance_left=20/32"
        ),
        "refer"
    );
    // "+" never moves a line.
    assert_eq!(
        kind(
            "joint-policy-2016",
            50,
            "distance_right=20/50+2 distance_left=20/40"
        ),
        "refer"
    );
}

#[test]
fn letters_per_line_count() {
    // Of four letters 3 of 4 allows one miss; of three none.
    assert_eq!(
        kind(
            "expert-panel-2015",
            50,
            "letters_per_line=4 distance_right=20/40-1 distance_left=20/40"
        ),
        "pass"
    );
    assert_eq!(
        kind(
            "expert-panel-2015",
            50,
            "letters_per_line=3 distance_right=20/40-1 distance_left=20/40"
        ),
        "refer"
    );
    // Half of four is no majority.
    assert_eq!(
        kind(
            "joint-policy-2016",
            50,
            "letters_per_line=4 distance_right=20/40-2 distance_left=20/40"
        ),
        "refer"
    );
}

#[test]
fn by_letter_compares_thousandths() {
    // England (primary): worse than 0.200 refers; a letter of five is 0.02.
    let set = "england-school-entry";
    assert_eq!(
        kind(set, 55, "distance_right=0.200l distance_left=0.100l"),
        "pass"
    );
    assert_eq!(
        kind(set, 55, "distance_right=0.220l distance_left=0.100l"),
        "refer"
    );
    assert_eq!(
        kind(set, 55, "distance_right=0.201l distance_left=0.100l"),
        "refer"
    );
    assert_eq!(
        kind(set, 55, "distance_right=20/32-1 distance_left=20/20"),
        "refer"
    );
    assert_eq!(
        kind(set, 55, "distance_right=20/40+5 distance_left=20/20"),
        "pass"
    );
    // 6/9 is 0.176; worse than it may be 0.180 or 0.300, against 0.200 unknown.
    assert_eq!(
        kind(set, 55, "distance_right=<6/9 distance_left=6/6"),
        "incomplete"
    );
    assert_eq!(
        kind(set, 55, "distance_right=<20/32 distance_left=6/6"),
        "refer"
    );
}

// Intervals.

#[test]
fn intervals_answer_only_where_all_of_them_agrees() {
    let set = "joint-policy-2016";
    assert_eq!(
        kind(set, 80, "distance_right=>=20/32 distance_left=>=20/32"),
        "pass"
    );
    assert_eq!(
        kind(set, 80, "distance_right=>=20/40 distance_left=20/20"),
        "incomplete"
    );
    assert_eq!(
        kind(set, 80, "distance_right=<20/32 distance_left=20/32"),
        "refer"
    );
    assert_eq!(
        kind(set, 80, "distance_right=<20/25 distance_left=20/32"),
        "incomplete"
    );
    for off in ["CF", "HM", "LP", "NLP"] {
        let outcome = child(80, &format!("distance_right={off} distance_left=20/20")).by_set(set);
        assert_eq!(outcome.criteria, ["line.60+", "between-eyes"], "{off}");
        // Both off: the lines refer, the difference is unknown.
        let outcome = child(80, &format!("distance_right={off} distance_left={off}")).by_set(set);
        assert_eq!(outcome.criteria, ["line.60+"], "{off}");
        assert_eq!(outcome.unknown, ["between-eyes"], "{off}");
        let outcome = child(80, &format!("distance_right={off} distance_left=<20/40")).by_set(set);
        assert_eq!(outcome.unknown, ["between-eyes"], "{off}");
    }
}

#[test]
fn one_eye_alone_is_never_a_pass() {
    let outcome = child(80, "distance_right=20/20").by_set("joint-policy-2016");
    assert_eq!(word(&outcome), "incomplete");
    assert_eq!(outcome.unknown, ["line.60+", "between-eyes"]);
    assert_eq!(
        kind("joint-policy-2016", 80, "distance_right=20/50"),
        "refer"
    );
    assert_eq!(
        kind("joint-policy-2016", 80, "distance_both=20/20"),
        "incomplete"
    );
}

#[test]
fn neighbouring_lines_are_named_where_the_chart_says_so() {
    let child = child(80, "distance_right=20/20 distance_left=20/32");
    let lines = [
        Line::at(Step(0), Notation::Feet),
        Line::at(Step(2), Notation::Feet),
    ];
    let mut case = child.case();
    case.chart = Some(&lines);
    let set = Library::shipped().rule_set("joint-policy-2016").unwrap();
    let remarks = |o: &Outcome| o.reasons[1].remarks.join("; ");
    assert!(remarks(&judge_rule_set(set, &case)).contains("neighbouring lines on this chart"));
    let full: Vec<Line> = (0..5).map(|s| Line::at(Step(s), Notation::Feet)).collect();
    case.chart = Some(&full);
    assert!(!remarks(&judge_rule_set(set, &case)).contains("neighbouring"));
}

#[test]
fn the_distance_used_shifts_the_line() {
    // A 10 ft chart at 5 ft adds 0.301: 20/20 stands for 20/40.
    let at = |used: &str| {
        kind(
            "iapb-school-6-9",
            80,
            &format!(
                "chart_distance_ft=10 used_distance_ft={used} distance_right=20/20 distance_left=20/20"
            ),
        )
    };
    assert_eq!(at("10"), "pass");
    assert_eq!(at("5"), "refer");
}

#[test]
fn near_values_without_an_equivalent_are_unknown() {
    let outcome = child(
        80,
        "distance_right=20/20 distance_left=20/20 near_right=J1 near_left=J1",
    )
    .by_set("arizona-school");
    assert_eq!(word(&outcome), "incomplete");
    assert_eq!(outcome.unknown, ["near.60+"]);
}

#[test]
fn an_unknown_age_or_grade_is_incomplete() {
    let mut it = child(
        0,
        "distance_right=20/20 distance_left=20/20 near_right=20/20 near_left=20/20",
    );
    it.age = None;
    assert_eq!(it.by_set("joint-policy-2016").unknown, ["age"]);
    assert_eq!(word(&it.by_set("joint-policy-2016")), "incomplete");
    assert_eq!(it.by_set("instrument-2003").unknown[0], "age");
    assert_eq!(it.by_set("missouri-school").unknown, ["grade"]);
    // By grade a child without a birth date can be judged.
    it.grade = Some("KG");
    assert_eq!(word(&it.by_set("missouri-school")), "pass");
    assert_eq!(it.by_set("joint-policy-2016").unknown, ["age"]);
    it.grade = Some("PK");
    assert_eq!(it.by_set("washington-school").unknown, ["grade"]);
    assert_eq!(
        child(35, "distance_right=20/20 distance_left=20/20")
            .by_set("joint-policy-2016")
            .unknown,
        ["age"]
    );
}
