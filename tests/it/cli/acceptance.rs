//! Five children screened on 14 October 2026, by `judge --protocol`.
//!
//! Protocol rules (rescreen interval, glasses at home, not testable): practice, as the protocol
//! files say. Lines: Pediatrics 2016;137(1):e20153597. Urgency of a white pupil: Queensland Health
//! referral guideline, paediatric squint.

use std::collections::HashMap;

use super::{Bench, rows};

fn judged(protocol: &str, header: &str, row: &str) -> HashMap<String, String> {
    let bench = Bench::new();
    bench.write("in.csv", format!("dob,screened_on,{header}\n{row}\n"));
    let ran = bench.run(&["judge", "in.csv", "--protocol", protocol]);
    assert_eq!((ran.code, ran.err.as_str()), (0, ""));
    rows(&ran.out).remove(0)
}

const SCHOOL: &str = "grade,correction_worn,distance_right,distance_left,plus_lens,signs";

#[test]
fn a_local_rule_set_with_a_band_and_a_comparator_of_its_own() {
    // The numbers are those of the invented district in the sample file, not guidance.
    let bench = Bench::new();
    bench.write(
        "local.toml",
        include_str!("../../../sample_data/local_rules.toml"),
    );
    bench.write(
        "in.csv",
        "age_months,distance_right,distance_left\n83,20/40,20/40\n83,20/50,20/50\n84,20/40,20/40\n59,20/50,20/50\n",
    );
    let ran = bench.run(&[
        "judge",
        "in.csv",
        "--rules",
        "quillmere-school",
        "--rule-file",
        "local.toml",
    ]);
    assert_eq!((ran.code, ran.err.as_str()), (0, ""));
    let judged = rows(&ran.out);
    let said: Vec<_> = judged
        .iter()
        .map(|r| (&*r["outcome"], &*r["criteria"]))
        .collect();
    assert_eq!(
        said,
        [
            ("pass", ""),
            ("refer", "line.60-83"),
            ("refer", "line.84+"),
            ("pass", "")
        ]
    );
}

#[test]
fn a_pass_with_one_step_between_the_eyes() {
    let row = judged(
        "us-school",
        SCHOOL,
        "2020-03-02,2026-10-14,1,none,20/20,20/25,blurred,none",
    );
    assert_eq!(row["outcome"], "pass");
    assert_eq!(
        (&*row["criteria"], &*row["urgency"], &*row["amblyopia_risk"]),
        ("", "", "")
    );
    assert!(
        row["reasons"].contains("one step between the eyes"),
        "{}",
        row["reasons"]
    );
}

#[test]
fn two_steps_within_the_passing_range_are_rescreened() {
    let row = judged(
        "us-school",
        SCHOOL,
        "2020-09-01,2026-10-14,,none,20/20,20/32,,none",
    );
    assert_eq!(row["outcome"], "rescreen");
    assert_eq!(row["criteria"], "joint-policy-2016/between-eyes");
    assert_eq!(row["amblyopia_risk"], "interocular_difference");
    assert!(
        row["reasons"].contains("by 28 Oct 2026"),
        "{}",
        row["reasons"]
    );
}

#[test]
fn the_same_child_on_a_critical_line_day_passes_with_the_difference_unknown() {
    let row = judged(
        "us-school",
        "acuity_method,distance_right,distance_left,signs",
        "2020-09-01,2026-10-14,critical_line,20/32,20/32,none",
    );
    assert_eq!(row["outcome"], "pass");
    assert!(
        row["unknown"]
            .split(';')
            .any(|id| id == "joint-policy-2016/between-eyes"),
        "{}",
        row["unknown"]
    );
}

#[test]
fn not_testable_with_half_an_instrument_result_does_not_pass() {
    let row = judged(
        "us-preschool",
        "distance_right,distance_left,instrument_right,instrument_left,sphere_left,cylinder_left,axis_left,signs",
        "2022-04-10,2026-10-14,NT:shy,NT,no_reading,ok,+1.25,−0.50,180,none",
    );
    assert_eq!(row["outcome"], "rescreen");
    assert!(row["reasons"].contains("14 Apr 2027"), "{}", row["reasons"]);
}

#[test]
fn glasses_left_at_home_are_not_a_fail() {
    let row = judged(
        "us-school",
        SCHOOL,
        "2018-05-20,2026-10-14,,left_at_home,20/80,20/63,,none",
    );
    assert_eq!(row["outcome"], "incomplete");
    assert!(
        row["reasons"].contains("by 28 Oct 2026"),
        "{}",
        row["reasons"]
    );
}

#[test]
fn a_white_pupil_refers_whatever_the_consent() {
    let row = judged(
        "us-school",
        "status,signs",
        "2021-01-08,2026-10-14,opted_out,white_pupil:left",
    );
    assert_eq!(
        (&*row["outcome"], &*row["urgency"], &*row["act_within_days"]),
        ("refer", "emergency", "0")
    );
}
