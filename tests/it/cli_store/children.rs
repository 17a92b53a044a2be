//! Five children screened on 14 October 2026, recorded and signed from the command line.
//!
//! Protocol rules (rescreen interval, glasses at home, not testable): practice, as the protocol
//! files say. Lines: Pediatrics 2016;137(1):e20153597. Urgency of a white pupil: Queensland Health
//! referral guideline, paediatric squint.

use super::Bench;

#[test]
fn the_children_of_a_school_day() {
    let bench = Bench::on_a_day("us-school", "threshold");
    let out = bench.ok(&[
        "record",
        "Q-1",
        "correction_worn=none",
        "distance_right=20/20",
        "distance_left=20/25",
        "plus_lens=blurred",
        "signs=none",
        "--sign",
    ]);
    assert!(
        out.lines().any(|l| l == "PASS" || l.starts_with("PASS (")),
        "{out}"
    );
    assert!(out.contains("one step between the eyes"), "{out}");

    // Bare numbers are denominators in a store of feet.
    let out = bench.ok(&[
        "record",
        "Q-2",
        "correction_worn=none",
        "distance_right=20",
        "distance_left=32",
        "signs=none",
        "--sign",
    ]);
    assert!(
        out.lines()
            .any(|l| l.starts_with("RESCREEN by 28 Oct 2026")),
        "{out}"
    );
    assert!(
        out.contains("amblyopia risk: interocular difference"),
        "{out}"
    );

    let out = bench.ok(&[
        "record",
        "Q-4",
        "correction_worn=left_at_home",
        "distance_right=20/80",
        "distance_left=20/63",
        "signs=none",
        "--sign",
    ]);
    assert!(
        out.lines()
            .any(|l| l.starts_with("INCOMPLETE, return by 28 Oct 2026")),
        "{out}"
    );

    let out = bench.ok(&["record", "Q-5", "signs=white_pupil:left", "--sign"]);
    assert!(
        out.lines()
            .any(|l| l.starts_with("REFER, emergency, act by 14 Oct 2026")),
        "{out}"
    );

    let rows = bench.report(&[]);
    let of = |id: &str| {
        rows.iter()
            .find(|row| row["child_id"] == id)
            .expect("a row")
    };
    let cells = |id: &str| {
        let row = of(id);
        [
            "age_months",
            "outcome",
            "urgency",
            "act_by",
            "rescreen_by",
            "amblyopia_risk",
            "criteria",
        ]
        .map(|column| row[column].clone())
    };
    assert_eq!(cells("Q-1"), ["79", "pass", "", "", "", "", ""]);
    assert_eq!(
        cells("Q-2"),
        [
            "73",
            "rescreen",
            "routine",
            "",
            "2026-10-28",
            "interocular_difference",
            "joint-policy-2016/between-eyes"
        ]
    );
    assert_eq!(of("Q-4")["outcome"], "incomplete");
    assert_eq!(of("Q-4")["rescreen_by"], "2026-10-28");
    assert_eq!(of("Q-5")["outcome"], "refer");
    assert_eq!(of("Q-5")["urgency"], "emergency");
    assert_eq!(of("Q-5")["act_by"], "2026-10-14");
    assert_eq!(of("Q-3")["outcome"], "", "not signed on this day");
    assert_eq!(of("Q-1")["screener"], "J. Imani");
    assert_eq!(of("Q-1")["station"], "east");
}

#[test]
fn on_a_critical_line_day_the_difference_is_not_tested() {
    let bench = Bench::on_a_day("us-school", "critical_line");
    let out = bench.ok(&[
        "record",
        "Q-2",
        "correction_worn=none",
        "distance_right=32",
        "distance_left=32",
        "signs=none",
        "--sign",
    ]);
    assert!(
        out.lines().any(|l| l.starts_with("PASS (critical line")),
        "{out}"
    );
    let row = bench
        .report(&[])
        .into_iter()
        .find(|r| r["child_id"] == "Q-2")
        .expect("a row");
    assert_eq!(row["outcome"], "pass");
    assert_eq!(
        (&*row["distance_right"], &*row["distance_left"]),
        (">=20/32", ">=20/32")
    );
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
    let bench = Bench::on_a_day("us-preschool", "threshold");
    bench.ok(&[
        "record",
        "Q-3",
        "distance_right=NT:shy",
        "signs=none",
        "--sign",
    ]);
    let out = bench.ok(&[
        "record",
        "Q-3",
        "distance_right=NT:shy",
        "distance_left=NT",
        "instrument_right=no_reading",
        "sphere_left=+1.25",
        "cylinder_left=−0.50",
        "axis_left=180",
        "signs=none",
        "--sign",
    ]);
    assert!(
        out.lines()
            .any(|l| l.starts_with("RESCREEN by 14 Apr 2027")),
        "{out}"
    );
    let out = bench.ok(&["child", "show", "Q-3"]);
    assert!(
        out.contains("try 1:") && out.contains("judged:"),
        "both tries stay visible: {out}"
    );
}

#[test]
fn a_draft_is_kept_until_it_is_signed() {
    let bench = Bench::on_a_day("us-school", "threshold");
    let head = bench.head();
    let out = bench.ok(&["record", "Q-1", "distance_right=20/20", "signs=none"]);
    assert!(
        out.contains("draft kept, not signed") && out.contains("as it stands: INCOMPLETE"),
        "{out}"
    );
    let out = bench.ok(&[
        "record",
        "Q-1",
        "distance_left=20/80",
        "correction_worn=none",
    ]);
    assert!(
        out.contains("20/20") && out.contains("20/80"),
        "both are kept: {out}"
    );
    assert_eq!(bench.head(), head, "a draft is in no ledger");
    // A value typed again replaces the draft's.
    let out = bench.ok(&["record", "Q-1", "distance_left=20/25", "--sign"]);
    assert!(
        out.lines().any(|l| l == "PASS" || l.starts_with("PASS (")),
        "{out}"
    );
    assert_ne!(bench.head(), head);
    // Signed is signed; the draft is gone.
    let said = bench.refused(&["record", "Q-1", "distance_left=20/20"]);
    assert!(
        said.contains("signed already") && said.contains("twoline correct"),
        "{said}"
    );
    let said = bench.refused(&["record", "Q-1", "--sign"]);
    assert!(said.contains("nothing to sign"), "{said}");
}

#[test]
fn a_correction_keeps_what_stood_before() {
    let bench = Bench::on_a_day("us-school", "threshold");
    let out = bench.ok(&[
        "record",
        "Q-2",
        "correction_worn=none",
        "distance_right=20/20",
        "distance_left=20/32",
        "signs=none",
        "--sign",
    ]);
    let visit = out
        .lines()
        .find_map(|l| l.strip_prefix("visit "))
        .expect("its id")
        .to_owned();
    let out = bench.ok(&[
        "correct",
        "Q-2",
        "distance_left=20/25",
        "--reason",
        "mistyped",
    ]);
    assert!(
        out.lines().any(|l| l == "PASS" || l.starts_with("PASS (")),
        "{out}"
    );
    let head = bench.head();
    let out = bench.ok(&[
        "correct",
        &visit,
        "distance_left=20/25",
        "--reason",
        "again",
    ]);
    assert!(out.contains("no entry was made"), "{out}");
    assert_eq!(bench.head(), head);
    let out = bench.ok(&["child", "show", "Q-2"]);
    assert!(
        out.contains(
            "by J. Imani: distance acuity, left eye from 20/32 to 20/25, because: mistyped"
        ),
        "{out}"
    );
    for (args, word) in [
        (
            vec!["correct", "Q-2", "distance_left=20/20", "--reason", " "],
            "reason",
        ),
        (
            vec!["correct", "Q-1", "distance_left=20/20", "--reason", "x"],
            "no signed visit",
        ),
        (
            vec!["correct", "Q-99", "distance_left=20/20", "--reason", "x"],
            "neither a visit nor a child",
        ),
    ] {
        assert!(bench.refused(&args).contains(word), "{args:?}");
    }
    assert_eq!(bench.head(), head);
}
