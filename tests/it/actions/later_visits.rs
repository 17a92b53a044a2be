//! What an earlier visit means for a later one.

use twoline::actions::{QueueState, UrgentAnswer};
use twoline::domain::codes::{AcuityMethod, Attempt};
use twoline::domain::field::Field;
use twoline::domain::outcome::OutcomeKind;

use super::{DAY, date, desk_with_children, open, sign};

const TWO_STEPS: [(Field, &str); 3] = [
    (Field::DistanceRight, "20/20"),
    (Field::DistanceLeft, "20/32"),
    (Field::Signs, "none"),
];

// Practice (the program's own rule): a date that passes without a visit is "rescreen overdue" and
// stands first.
#[test]
fn a_child_who_was_absent_on_the_rescreen_day_is_still_due() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    sign(&mut desk, &day, "Q-2", &TWO_STEPS);
    let second = open(
        &mut desk,
        "2026-10-28",
        "us-school",
        AcuityMethod::Threshold,
    );
    let absent = sign(&mut desk, &second, "Q-2", &[(Field::Status, "absent")]);
    assert_eq!(absent.child.state, QueueState::Absent);

    let third = open(
        &mut desk,
        "2026-11-04",
        "us-school",
        AcuityMethod::Threshold,
    );
    let first = desk.day_children(&third).expect("children").remove(0);
    assert_eq!(
        (first.child_id.as_str(), first.attempt, first.due_on),
        ("Q-2", Attempt::Rescreen, Some(date("2026-10-28")))
    );
    let due = desk.worklist().expect("read").back;
    assert!(
        due.iter()
            .any(|back| back.due_on == Some(date("2026-10-28")) && back.child_id == "Q-2"),
        "{due:?}"
    );
    let signed = sign(&mut desk, &third, "Q-2", &TWO_STEPS);
    assert_eq!(signed.outcome.kind, OutcomeKind::Refer);
}

// Practice: "chart due by the policy" after an instrument stood in for it (us-school, under 48
// months 6 months, else 1 month).
#[test]
fn a_chart_that_an_instrument_stood_in_for_is_due_again() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let signed = sign(
        &mut desk,
        &day,
        "Q-3",
        &[
            (Field::DistanceRight, "NT:shy"),
            (Field::DistanceLeft, "NT:shy"),
            (Field::SphereRight, "+0.50"),
            (Field::CylinderRight, "0"),
            (Field::SphereLeft, "+0.50"),
            (Field::CylinderLeft, "0"),
            (Field::Signs, "none"),
        ],
    );
    assert_eq!(signed.outcome.kind, OutcomeKind::Pass);
    let due = signed.outcome.due_on.expect("the chart is due again");
    let later = open(
        &mut desk,
        "2026-11-20",
        "us-school",
        AcuityMethod::Threshold,
    );
    let child = desk.day_child(&later, "Q-3").expect("a child");
    assert_eq!(child.due_on, Some(due));
}

// Practice: not testable is per test and eye, and one eye that refers while the other cannot be
// tested refers.
#[test]
fn a_second_try_of_one_eye_keeps_what_the_other_eye_read() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-preschool", AcuityMethod::Threshold);
    let first = [
        (Field::DistanceRight, "20/32"),
        (Field::DistanceLeft, "NT:shy"),
        (Field::Signs, "none"),
    ];
    sign(&mut desk, &day, "Q-3", &first);
    let signed = sign(&mut desk, &day, "Q-3", &[(Field::DistanceLeft, "20/32")]);
    assert_eq!(
        signed.outcome.kind,
        OutcomeKind::Pass,
        "{}",
        signed.outcome.reasons
    );

    let first = [
        (Field::DistanceRight, "20/63"),
        (Field::DistanceLeft, "NT:shy"),
        (Field::Signs, "none"),
    ];
    sign(&mut desk, &day, "Q-5", &first);
    let nothing = [
        (Field::DistanceRight, "NT:shy"),
        (Field::DistanceLeft, "NT:shy"),
    ];
    let signed = sign(&mut desk, &day, "Q-5", &nothing);
    assert_eq!(
        signed.outcome.kind,
        OutcomeKind::Refer,
        "{}",
        signed.outcome.reasons
    );
}

#[test]
fn a_correction_does_not_raise_an_answered_emergency_again() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let signed = sign(
        &mut desk,
        &day,
        "Q-5",
        &[
            (Field::Signs, "white_pupil:left"),
            (Field::DistanceRight, "20/20"),
        ],
    );
    desk.urgent_answer(&UrgentAnswer {
        visit: signed.visit,
        told: "on-call eye doctor".into(),
        told_at: "10:42".into(),
        told_by: "J. Imani".into(),
    })
    .expect("answered");
    let change = |field, text: &str| [(field, text.to_owned())];
    desk.correct(
        signed.visit,
        &change(Field::DistanceRight, "20/25"),
        "typed the wrong row",
    )
    .expect("corrected");
    assert!(desk.urgent_open().expect("read").is_empty());

    // Another sign is another emergency.
    desk.correct(
        signed.visit,
        &change(Field::Signs, "white_pupil:left;eye_injury:right"),
        "seen later",
    )
    .expect("corrected");
    assert_eq!(desk.urgent_open().expect("read").len(), 1);
}

// The results file: a row that does not say which visit it is means the one that is due, so that a
// second fail is not rescreened once more.
#[test]
fn a_results_row_without_an_attempt_is_the_visit_that_is_due() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    sign(&mut desk, &day, "Q-2", &TWO_STEPS);
    let later = open(
        &mut desk,
        "2026-10-28",
        "us-school",
        AcuityMethod::Threshold,
    );
    let file = "child_id,distance_right,distance_left,signs\nQ-2,20/20,20/32,none\n";
    let plan = desk
        .plan_results("results.csv", file.as_bytes(), &later)
        .expect("a plan");
    assert_eq!(plan.new[0].child.attempt, Attempt::Rescreen);
    desk.add_results(&plan, None).expect("written");
    let visit = desk.visit(&later, "Q-2").expect("read").expect("a visit");
    assert_eq!(visit.outcome.expect("signed").kind, OutcomeKind::Refer);

    let twice = "child_id,attempt,distance_right,distance_left\n\
                 Q-2,,20/20,20/20\nQ-2,rescreen,20/20,20/20\n";
    let day = open(
        &mut desk,
        "2026-10-21",
        "us-school",
        AcuityMethod::Threshold,
    );
    let refused = desk
        .plan_results("results.csv", twice.as_bytes(), &day)
        .expect_err("the same visit twice");
    assert!(refused.to_string().contains("once"), "{refused}");
}

/// logic of a rescreen (common practice): at least each failed test is repeated.
#[test]
fn a_rescreen_that_does_not_repeat_the_failed_test_is_no_pass() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let first = sign(
        &mut desk,
        &day,
        "Q-1",
        &[
            (Field::DistanceRight, "20/20"),
            (Field::DistanceLeft, "20/20"),
            (Field::PlusLens, "read"),
            (Field::Signs, "none"),
        ],
    );
    assert_eq!(first.outcome.kind, OutcomeKind::Rescreen);
    let later = open(
        &mut desk,
        "2026-10-28",
        "us-school",
        AcuityMethod::Threshold,
    );
    let chart_only = [
        (Field::DistanceRight, "20/20"),
        (Field::DistanceLeft, "20/20"),
        (Field::Signs, "none"),
    ];
    let signed = sign(&mut desk, &later, "Q-1", &chart_only);
    assert_eq!(signed.outcome.kind, OutcomeKind::Incomplete);
    assert!(
        signed
            .outcome
            .unknown
            .contains(&"plus-lens-2.50/plus-lens".to_owned()),
        "{:?}",
        signed.outcome.unknown
    );
}

/// Tests passed before carry over, marked so.
#[test]
fn tests_passed_before_carry_over_marked_so() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    sign(
        &mut desk,
        &day,
        "Q-1",
        &[
            (Field::DistanceRight, "20/20"),
            (Field::DistanceLeft, "20/20"),
            (Field::PlusLens, "read"),
            (Field::Signs, "none"),
        ],
    );
    let later = open(
        &mut desk,
        "2026-10-28",
        "us-school",
        AcuityMethod::Threshold,
    );
    let repeated = [(Field::PlusLens, "blurred"), (Field::Signs, "none")];
    let signed = sign(&mut desk, &later, "Q-1", &repeated);
    assert_eq!(
        signed.outcome.kind,
        OutcomeKind::Pass,
        "{}",
        signed.outcome.reasons
    );
    assert!(
        signed
            .outcome
            .reasons
            .contains("carried over from 14 Oct 2026: distance acuity"),
        "{}",
        signed.outcome.reasons
    );
    // What carried over is not recorded a second time.
    let visit = desk.visit(&later, "Q-1").expect("read").expect("a visit");
    assert_eq!(visit.readings.get(Field::DistanceRight), None);
}

/// What was not answered before does not carry over: a chart that failed is done again by both eyes.
#[test]
fn a_failed_chart_does_not_carry_over() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let values = [
        (Field::DistanceRight, "20/20"),
        (Field::DistanceLeft, "20/32"),
        (Field::Signs, "none"),
    ];
    sign(&mut desk, &day, "Q-2", &values);
    let later = open(
        &mut desk,
        "2026-10-28",
        "us-school",
        AcuityMethod::Threshold,
    );
    let one_eye = [(Field::DistanceLeft, "20/25"), (Field::Signs, "none")];
    let signed = sign(&mut desk, &later, "Q-2", &one_eye);
    assert_eq!(signed.outcome.kind, OutcomeKind::Incomplete);
}

// Practice: on a rescreen only what failed is repeated. A comparison of rule sets counts the child
// with what passed before.
#[test]
fn a_comparison_counts_what_a_rescreen_takes_over() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let first = [
        TWO_STEPS[0],
        TWO_STEPS[1],
        TWO_STEPS[2],
        (Field::SphereRight, "+0.50"),
        (Field::CylinderRight, "0"),
        (Field::SphereLeft, "+0.50"),
        (Field::CylinderLeft, "0"),
    ];
    let signed = sign(&mut desk, &day, "Q-2", &first);
    assert_eq!(signed.outcome.kind, OutcomeKind::Rescreen);
    let later = open(
        &mut desk,
        "2026-10-28",
        "us-school",
        AcuityMethod::Threshold,
    );
    let repeated = [
        (Field::DistanceRight, "20/20"),
        (Field::DistanceLeft, "20/20"),
        (Field::Signs, "none"),
    ];
    sign(&mut desk, &later, "Q-2", &repeated);
    let (_, subjects) = desk.subjects_of_term(None).expect("children");
    let readings = &subjects
        .iter()
        .find(|s| s.child_id == "Q-2")
        .expect("a child")
        .readings;
    assert_eq!(readings.get(Field::DistanceLeft).as_deref(), Some("20/20"));
    assert_eq!(readings.get(Field::SphereLeft).as_deref(), Some("+0.50"));
}
