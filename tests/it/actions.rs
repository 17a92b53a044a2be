//! Tests of `actions`: a desk on a store of its own, as a nurse would use it.

mod board;
mod calendar;
mod door;
mod late;
mod later_visits;
mod rosters;
mod stations;
mod united;
mod worklist;

use chrono::NaiveDate;
use twoline::actions::{
    Desk, DeskOptions, Kdf, NewChild, NewDay, NewStore, QueueState, Secret, SignRequest, Signed,
    UrgentAnswer, init, new_visit_id,
};
use twoline::domain::acuity::Notation;
use twoline::domain::age::Grade;
use twoline::domain::codes::{AcuityMethod, Attempt, Consent, YesNo};
use twoline::domain::field::Field;
use twoline::domain::outcome::{OutcomeKind, RiskKind, Urgency};
use twoline::domain::readings::{ReadingContext, Readings};
use twoline::domain::roster::{RosterChild, RosterDetails};

pub fn date(text: &str) -> NaiveDate {
    text.parse().expect("a date of this test")
}

pub fn child(id: &str, family: &str, given: &str, dob: &str, grade: &str) -> RosterChild {
    RosterChild {
        child_id: id.into(),
        family_name: family.into(),
        given_name: given.into(),
        dob: Some(date(dob)),
        grade: Grade::parse(grade),
        site: "QE".into(),
        details: RosterDetails {
            class: "1B".into(),
            ..RosterDetails::default()
        },
    }
}

/// A desk on 14 October 2026 with one site, one term, one screener and no children.
pub fn empty_desk() -> (tempfile::TempDir, Desk) {
    let folder = tempfile::tempdir().expect("a folder");
    let new = NewStore {
        programme: "Quillmere".into(),
        station: "east".into(),
        notation: Notation::Feet,
        secret: Secret::None,
        kdf: Kdf::test(),
    };
    let options = DeskOptions {
        today: Some(date("2026-10-14")),
        ..DeskOptions::default()
    };
    let (mut desk, _) = init(&folder.path().join("store"), new, &options).expect("a store");
    desk.add_screener("JI", "J. Imani").expect("a screener");
    desk.add_site("QE", "Quillmere East").expect("a site");
    desk.add_term(
        "2026-autumn",
        "Autumn 2026",
        date("2026-08-01"),
        date("2026-12-31"),
    )
    .expect("a term");
    (folder, desk)
}

/// The five children of the acceptance table, and a few more.
pub fn desk_with_children() -> (tempfile::TempDir, Desk) {
    let (folder, mut desk) = empty_desk();
    let with = |mut child: RosterChild, glasses: Option<YesNo>, consent: Option<Consent>| {
        child.details.wears_glasses = glasses;
        child.details.consent = consent;
        child
    };
    let no = Some(YesNo::No);
    let children = vec![
        with(child("Q-1", "Sands", "Oliver", "2020-03-02", "1"), no, None),
        with(child("Q-2", "Okafor", "Ada", "2020-09-01", "1"), no, None),
        with(child("Q-3", "Petit", "Léa", "2022-04-10", "PK"), no, None),
        with(
            child("Q-4", "Quiroga", "Inés", "2018-05-20", "3"),
            Some(YesNo::Yes),
            None,
        ),
        with(
            child("Q-5", "Idris", "Noor", "2021-01-08", "KG"),
            None,
            Some(Consent::No),
        ),
        with(child("Q-6", "Tran", "Bảo", "2020-05-05", "1"), no, None),
    ];
    let plan = desk.plan_children(children, None).expect("a plan");
    desk.add_roster(&plan).expect("a roster");
    (folder, desk)
}

pub fn open(
    desk: &mut Desk,
    on: &str,
    protocol: &str,
    method: AcuityMethod,
) -> twoline::actions::DayInfo {
    desk.open_day(NewDay {
        site: "QE".into(),
        date: date(on),
        protocol: protocol.into(),
        method,
    })
    .expect("a day")
}

pub fn readings(values: &[(Field, &str)]) -> Readings {
    let mut readings = Readings::default();
    for (field, text) in values {
        readings
            .set(*field, text, ReadingContext::default())
            .expect("a value of this test");
    }
    readings
}

pub fn sign(
    desk: &mut Desk,
    day: &twoline::actions::DayInfo,
    id: &str,
    values: &[(Field, &str)],
) -> Signed {
    let child = desk.day_child(day, id).expect("a child");
    desk.sign(SignRequest {
        day: day.id,
        child_id: id.into(),
        attempt: child.attempt,
        visit: new_visit_id(),
        readings: readings(values),
        remarks: Vec::new(),
    })
    .expect("signed")
}

const DAY: &str = "2026-10-14";

#[test]
fn a_passing_child_with_one_step_between_the_eyes() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let signed = sign(
        &mut desk,
        &day,
        "Q-1",
        &[
            (Field::CorrectionWorn, "none"),
            (Field::DistanceRight, "20/20"),
            (Field::DistanceLeft, "20/25"),
            (Field::PlusLens, "blurred"),
            (Field::Signs, "none"),
        ],
    );
    assert_eq!(signed.child.age.map(|a| a.0), Some(79));
    assert_eq!(
        signed.outcome.kind,
        OutcomeKind::Pass,
        "{}",
        signed.outcome.reasons
    );
    assert!(
        signed.outcome.reasons.contains("one step"),
        "{}",
        signed.outcome.reasons
    );
    assert_eq!(signed.child.state, QueueState::Signed(OutcomeKind::Pass));
}

#[test]
fn two_steps_between_the_eyes_are_rescreened_within_fourteen_days() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let signed = sign(
        &mut desk,
        &day,
        "Q-2",
        &[
            (Field::DistanceRight, "20/20"),
            (Field::DistanceLeft, "20/32"),
            (Field::Signs, "none"),
        ],
    );
    assert_eq!(signed.child.age.map(|a| a.0), Some(73));
    assert_eq!(signed.outcome.kind, OutcomeKind::Rescreen);
    assert_eq!(signed.outcome.due_on, Some(date("2026-10-28")));
    assert_eq!(signed.outcome.risks, [RiskKind::InterocularDifference]);
    assert_eq!(signed.outcome.criteria, ["joint-policy-2016/between-eyes"]);

    // The rescreen two weeks later starts as one, due first; the same readings then refer.
    let later = open(
        &mut desk,
        "2026-10-28",
        "us-school",
        AcuityMethod::Threshold,
    );
    let first = desk.day_children(&later).expect("children").remove(0);
    assert_eq!(
        (first.child_id.as_str(), first.attempt),
        ("Q-2", Attempt::Rescreen)
    );
    let signed = sign(
        &mut desk,
        &later,
        "Q-2",
        &[
            (Field::DistanceRight, "20/20"),
            (Field::DistanceLeft, "20/32"),
            (Field::Signs, "none"),
        ],
    );
    assert_eq!(signed.outcome.kind, OutcomeKind::Refer);
    assert_eq!(signed.outcome.urgency, Some(Urgency::Routine));
}

#[test]
fn on_a_critical_line_day_both_eyes_pass_and_the_difference_is_not_tested() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::CriticalLine);
    let signed = sign(
        &mut desk,
        &day,
        "Q-2",
        &[
            (Field::DistanceRight, "20/32"),
            (Field::DistanceLeft, "20/32"),
            (Field::Signs, "none"),
        ],
    );
    assert_eq!(signed.outcome.kind, OutcomeKind::Pass);
    let said = signed.outcome.qualifiers.join("; ");
    assert!(
        said.contains("critical line") && said.contains("not tested"),
        "{said}"
    );
    assert!(
        signed
            .outcome
            .unknown
            .iter()
            .any(|u| u == "joint-policy-2016/between-eyes")
    );
    let visit = desk.visit(&day, "Q-2").expect("read").expect("a visit");
    assert_eq!(
        visit.readings.get(Field::DistanceRight).as_deref(),
        Some(">=20/32")
    );
}

#[test]
fn not_testable_is_never_a_pass_and_comes_back_in_six_months() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-preschool", AcuityMethod::Threshold);
    let first_try = [(Field::DistanceRight, "NT:shy")];
    sign(&mut desk, &day, "Q-3", &first_try);
    let signed = sign(
        &mut desk,
        &day,
        "Q-3",
        &[
            (Field::DistanceRight, "NT:shy"),
            (Field::DistanceLeft, "NT"),
            (Field::InstrumentRight, "no_reading"),
            (Field::SphereLeft, "+1.25"),
            (Field::CylinderLeft, "-0.50"),
            (Field::AxisLeft, "180"),
        ],
    );
    assert_eq!(
        signed.outcome.kind,
        OutcomeKind::Rescreen,
        "{}",
        signed.outcome.reasons
    );
    assert_eq!(signed.outcome.due_on, Some(date("2027-04-14")));
    assert_eq!(signed.child.state, QueueState::NotTestable);
    let visit = desk.visit(&day, "Q-3").expect("read").expect("a visit");
    assert_eq!(visit.earlier_tries.len(), 1, "both tries stay visible");
}

#[test]
fn glasses_at_home_are_incomplete_and_do_not_use_up_the_first_attempt() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let values = [
        (Field::CorrectionWorn, "left_at_home"),
        (Field::DistanceRight, "20/80"),
        (Field::DistanceLeft, "20/63"),
        (Field::Signs, "none"),
    ];
    let signed = sign(&mut desk, &day, "Q-4", &values);
    assert_eq!(signed.outcome.kind, OutcomeKind::Incomplete);
    assert_eq!(signed.outcome.due_on, Some(date("2026-10-28")));
    assert!(signed.outcome.criteria.is_empty(), "not judged as a fail");
    assert_eq!(signed.child.state, QueueState::GlassesAtHome);

    let second = open(
        &mut desk,
        "2026-10-28",
        "us-school",
        AcuityMethod::Threshold,
    );
    let child = desk.day_child(&second, "Q-4").expect("a child");
    assert_eq!((child.attempt, child.glasses_visits), (Attempt::First, 1));
    sign(&mut desk, &second, "Q-4", &values);
    let third = open(
        &mut desk,
        "2026-11-11",
        "us-school",
        AcuityMethod::Threshold,
    );
    let signed = sign(&mut desk, &third, "Q-4", &values);
    assert_eq!(
        signed.outcome.kind,
        OutcomeKind::Refer,
        "after two visits without the glasses"
    );
}

#[test]
fn an_emergency_needs_no_consent_and_stays_until_somebody_was_told() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let signed = sign(
        &mut desk,
        &day,
        "Q-5",
        &[(Field::Signs, "white_pupil:left")],
    );
    assert_eq!(signed.outcome.kind, OutcomeKind::Refer);
    assert_eq!(signed.outcome.urgency, Some(Urgency::Emergency));
    assert_eq!(signed.outcome.act_by, Some(date(DAY)));
    let open_lines = desk.urgent_open().expect("read");
    assert_eq!(open_lines.len(), 1);
    assert_eq!(open_lines[0].what, "white pupil, left eye");

    let answer = |told: &str| UrgentAnswer {
        visit: signed.visit,
        told: told.into(),
        told_at: "10:42".into(),
        told_by: "J. Imani".into(),
    };
    assert!(
        desk.urgent_answer(&answer(" ")).is_err(),
        "somebody must have been told"
    );
    assert_eq!(desk.urgent_open().expect("read").len(), 1);
    desk.urgent_answer(&answer("on-call eye doctor"))
        .expect("answered");
    assert!(desk.urgent_open().expect("read").is_empty());
    assert!(desk.urgent_answer(&answer("again")).is_err());
}

#[test]
fn a_correction_keeps_what_stood_before_and_judges_again() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let values = [
        (Field::DistanceRight, "20/20"),
        (Field::DistanceLeft, "20/32"),
        (Field::Signs, "none"),
    ];
    let signed = sign(&mut desk, &day, "Q-2", &values);
    assert_eq!(signed.outcome.kind, OutcomeKind::Rescreen);
    let before = desk.head().expect("head");
    let change = [(Field::DistanceLeft, "20/25".to_owned())];
    assert!(
        desk.correct(signed.visit, &change, "  ").is_err(),
        "a reason is needed"
    );
    assert_eq!(desk.head().expect("head"), before);

    let corrected = desk
        .correct(signed.visit, &change, "typed the wrong row")
        .expect("corrected");
    assert_eq!(corrected.outcome.kind, OutcomeKind::Pass);
    let after = desk.head().expect("head");
    desk.correct(signed.visit, &change, "once more")
        .expect("no change");
    assert_eq!(
        desk.head().expect("head"),
        after,
        "the same values again are no entry"
    );

    let history = desk.history("Q-2").expect("read").expect("a child");
    let correction = &history.visits[0].corrections[0];
    assert_eq!(
        (
            correction.before.as_str(),
            correction.after.as_str(),
            correction.reason.as_str()
        ),
        ("20/32", "20/25", "typed the wrong row")
    );
    assert_eq!(correction.screener, "J. Imani");
}

#[test]
fn a_visit_moves_to_the_child_it_belongs_to() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let values = [
        (Field::DistanceRight, "20/20"),
        (Field::DistanceLeft, "20/20"),
        (Field::Signs, "none"),
    ];
    let signed = sign(&mut desk, &day, "Q-2", &values);
    sign(&mut desk, &day, "Q-1", &values);
    assert!(
        desk.move_visit(signed.visit, "Q-1", "wrong child").is_err(),
        "Q-1 has a visit"
    );
    let (moved, from) = desk
        .move_visit(signed.visit, "Q-6", "wrong child")
        .expect("moved");
    assert_eq!(moved.child.child_id, "Q-6");
    assert_eq!(moved.outcome.kind, OutcomeKind::Pass);
    assert_eq!(
        (from.child_id.as_str(), from.state),
        ("Q-2", QueueState::ToCome)
    );
    sign(&mut desk, &day, "Q-2", &values);
}

#[test]
fn the_clock_of_an_emergency_goes_on_when_its_visit_moves() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let signed = sign(
        &mut desk,
        &day,
        "Q-5",
        &[(Field::Signs, "white_pupil:left")],
    );
    let since = desk.urgent_open().expect("read")[0].since;
    std::thread::sleep(std::time::Duration::from_millis(5));
    desk.move_visit(signed.visit, "Q-6", "wrong child")
        .expect("moved");
    let lines = desk.urgent_open().expect("read");
    assert_eq!(lines.len(), 1);
    assert_eq!((lines[0].child_id.as_str(), lines[0].since), ("Q-6", since));
}

#[test]
fn a_retry_of_the_same_signature_writes_nothing() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let request = SignRequest {
        day: day.id,
        child_id: "Q-1".into(),
        attempt: Attempt::First,
        visit: new_visit_id(),
        readings: readings(&[
            (Field::DistanceRight, "20/20"),
            (Field::DistanceLeft, "20/20"),
        ]),
        remarks: Vec::new(),
    };
    let first = desk.sign(request.clone()).expect("signed");
    assert_eq!(desk.sign(request.clone()).expect("the same"), first);
    let other = SignRequest {
        readings: readings(&[(Field::DistanceRight, "20/40")]),
        ..request
    };
    let refused = desk.sign(other).expect_err("signed already");
    assert!(refused.hint.is_some_and(|h| h.contains("correct")));
}

#[test]
fn each_not_passed_state_is_one_of_its_own() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let state = |desk: &mut Desk, id: &str, word: &str| {
        sign(desk, &day, id, &[(Field::Status, word)]).child.state
    };
    assert_eq!(state(&mut desk, "Q-1", "absent"), QueueState::Absent);
    assert_eq!(state(&mut desk, "Q-2", "opted_out"), QueueState::OptedOut);
    assert_eq!(state(&mut desk, "Q-6", "under_care"), QueueState::UnderCare);
    assert_eq!(
        state(&mut desk, "Q-4", "not_attempted"),
        QueueState::NotAttempted
    );
    assert_eq!(state(&mut desk, "Q-3", "left_early"), QueueState::LeftEarly);
}

#[test]
fn a_child_added_at_the_table_is_next() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let new = NewChild {
        family_name: "Vega".into(),
        given_name: "Luz".into(),
        dob: Some(date("2020-06-01")),
        class: "1B".into(),
        site: "QE".into(),
        ..NewChild::default()
    };
    let added = desk.add_child(&new, &day).expect("added");
    assert!(added.child_id.starts_with("P-"));
    assert!(
        desk.day_children(&day)
            .expect("children")
            .iter()
            .any(|c| c.child_id == added.child_id)
    );
    let unborn = NewChild {
        dob: Some(date("2026-10-15")),
        ..new
    };
    assert!(desk.add_child(&unborn, &day).is_err(), "born after the day");
    let index = desk.search_index().expect("index");
    assert_eq!(index.find("vega", 5)[0].child_id, added.child_id);
}

#[test]
fn a_second_try_with_the_same_result_is_kept_as_a_second_try() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-preschool", AcuityMethod::Threshold);
    let values = [
        (Field::DistanceRight, "NT:shy"),
        (Field::DistanceLeft, "NT:shy"),
    ];
    sign(&mut desk, &day, "Q-3", &values);
    sign(&mut desk, &day, "Q-3", &values);
    let visit = desk.visit(&day, "Q-3").expect("read").expect("a visit");
    assert_eq!(visit.earlier_tries.len(), 1);
    assert_eq!(
        desk.day_child(&day, "Q-3").expect("a child").state,
        QueueState::NotTestable
    );
}

#[test]
fn the_roster_answers_whether_a_child_owns_glasses() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let signed = sign(
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
    assert_eq!(signed.outcome.criteria, ["plus-lens-2.50/plus-lens"]);
}
