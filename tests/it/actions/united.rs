//! What stations recorded apart is acted on together: lists, letters, running lines, the board.

#![allow(clippy::panic)]

use twoline::actions::{Desk, Door, LetterChoice, QueueState, Secret, SignRequest, new_visit_id};
use twoline::actions::{NewDay, VisitView};
use twoline::domain::codes::{AcuityMethod, Attempt};
use twoline::domain::exam::Evidence;
use twoline::domain::field::Field;
use twoline::domain::outcome::{DecidedBy, OutcomeKind, Urgency};
use twoline::domain::readings::{ReadingContext, Readings};
use twoline::domain::referral::{Closing, LetterKind, Step, StepKind};

use super::stations::{CHART, SIGNS, Stations, options};

/// A chart that refers at once under `us-school` (practice: worse than 20/80).
const FAR_OFF: &[(Field, &str)] = &[
    (Field::CorrectionWorn, "none"),
    (Field::DistanceRight, "20/20"),
    (Field::DistanceLeft, "20/200"),
    (Field::Signs, "none"),
];

fn whole(left: &'static str, signs: &'static str) -> [(Field, &'static str); 4] {
    [
        (Field::CorrectionWorn, "none"),
        (Field::DistanceRight, "20/20"),
        (Field::DistanceLeft, left),
        (Field::Signs, signs),
    ]
}

fn two() -> Stations {
    Stations::new(&["east", "west"])
}

fn east_reads_west(s: &mut Stations) {
    let packet = s.packet(1);
    s.read(0, &packet);
}

fn notes(visit: &VisitView) -> Vec<String> {
    visit.outcome.clone().expect("signed").notes
}

#[test]
fn what_is_in_conflict_and_may_refer_stands_on_the_worklist() {
    let mut s = two();
    assert!(s.sign(0, "Q-1", &whole("20/20", "nystagmus")));
    assert!(s.sign(1, "Q-1", &whole("20/20", "none")));
    east_reads_west(&mut s);
    let now = s.child(0, "Q-1").together.expect("two signatures").now;
    assert_eq!(now.decided_by, DecidedBy::Conflict);
    assert!(now.urgency.is_some());
    let list = s.desks[0].worklist().expect("read").referred;
    assert_eq!(list.len(), 1);
    assert_eq!(list[0].act_by, now.act_by);
    assert_eq!(list[0].urgency, now.urgency);
    assert!(
        list[0].why.starts_with("in conflict: settle it (signs)"),
        "{}",
        list[0].why
    );
    // No letter tells a family what is not settled.
    let letters = s.desks[0].letters(&LetterChoice::default());
    assert!(letters.expect("letters").letters.is_empty());
    let visit = s.visit(0, "Q-1");
    s.desks[0]
        .settle(visit.id, Field::Signs, "none", "looked again")
        .expect("settled");
    assert!(s.desks[0].worklist().expect("read").referred.is_empty());
}

#[test]
fn the_follow_up_and_its_letters_know_what_any_station_referred() {
    let mut s = two();
    assert!(s.sign(1, "Q-2", CHART));
    assert!(s.sign(0, "Q-1", FAR_OFF));
    let stereo = [(Field::StereoCorrect, "6"), (Field::StereoShown, "6")];
    assert!(s.sign(1, "Q-1", &stereo));
    east_reads_west(&mut s);
    let together = s.child(0, "Q-1").together.expect("two signatures");
    assert_eq!(
        together.signed,
        Some(OutcomeKind::Incomplete),
        "signed last"
    );
    let list = s.desks[0].referral_list().expect("read");
    assert_eq!(list.len(), 1);
    assert!(list[0].why.contains("20/200"), "{}", list[0].why);
    assert_eq!(list[0].outcome_now, None);
    assert_eq!(list[0].opened.act_by, together.now.act_by);
    assert_eq!(Some(list[0].opened.urgency), together.now.urgency);
    assert_eq!(s.desks[0].referrals_of("Q-1").expect("read").len(), 1);
    s.desks[0].find_referral("Q-1").expect("by the child");
    let worklist = s.desks[0].worklist().expect("read").referred;
    assert!(worklist[0].why.contains("20/200"), "{}", worklist[0].why);
    let choice = LetterChoice {
        child: Some("Q-1".into()),
        ..LetterChoice::default()
    };
    let letters = s.desks[0].letters(&choice).expect("letters").letters;
    assert!(
        letters
            .iter()
            .any(|l| matches!(l.kind, LetterKind::Referral | LetterKind::Urgent)),
        "{letters:?}"
    );
}

/// The notice of a rescreen goes out although the other station signed last.
#[test]
fn a_rescreen_of_one_station_has_its_notice() {
    let mut s = two();
    assert!(s.sign(1, "Q-2", CHART));
    assert!(s.sign(0, "Q-1", &whole("20/32", "none")));
    let stereo = [(Field::StereoCorrect, "6"), (Field::StereoShown, "6")];
    assert!(s.sign(1, "Q-1", &stereo));
    east_reads_west(&mut s);
    let together = s.child(0, "Q-1").together.expect("two signatures");
    assert_eq!(together.signed, Some(OutcomeKind::Incomplete));
    assert_eq!(together.now.kind, OutcomeKind::Rescreen);
    let letters = s.desks[0]
        .letters(&LetterChoice::default())
        .expect("letters")
        .letters;
    assert!(
        letters
            .iter()
            .any(|l| l.kind == LetterKind::Rescreen && l.child_id == "Q-1"),
        "{letters:?}"
    );
}

const LOCAL_SIGNS: &str = r#"
id = "quillmere-signs"
title = "Quillmere, signs"
edition = "2026"
kind = "signs"
approved_by = "Dr. R. Quill, school physician"
approved_on = 2026-08-01

[[source]]
key = "board"
citation = "Quillmere school board, decision 12"
basis = "practice"

[[criterion]]
id = "new_squint.lost_reflex"
measure = "signs"
refer = "present"
seen = ["new_squint"]
with = ["red reflex absent"]
urgency = "emergency"
act_within_days = 0
source = "board"
"#;

const LOCAL_DAY: &str = r#"
id = "quillmere-day"
title = "Quillmere school"
edition = "2026"
kind = "protocol"
rule_sets = ["joint-policy-2016", "quillmere-signs"]
required = ["distance acuity, each eye"]
approved_by = "Dr. R. Quill, school physician"
approved_on = "2026-08-01"
"#;

/// Both stations on a day of a local protocol in which neither sign is an emergency by itself.
fn on_a_local_day() -> Stations {
    let mut s = two();
    for (name, desk) in ["east", "west"]
        .into_iter()
        .zip(std::mem::take(&mut s.desks))
    {
        drop(desk);
        let dir = s.folder.path().join(name);
        let rules = dir.join("rules");
        std::fs::create_dir_all(&rules).expect("a folder");
        std::fs::write(rules.join("signs.toml"), LOCAL_SIGNS).expect("written");
        std::fs::write(rules.join("day.toml"), LOCAL_DAY).expect("written");
        let mut desk = Desk::open(&dir, &Secret::None, &options()).expect("the same store");
        assert_eq!(desk.rules_refused(), None);
        desk.open_day(NewDay {
            site: "QE".into(),
            date: "2026-10-14".parse().expect("a date"),
            protocol: "quillmere-day".into(),
            method: AcuityMethod::Threshold,
        })
        .expect("a day");
        s.desks.push(desk);
    }
    s
}

fn sign_locally(s: &mut Stations, at: usize, child: &str, values: &[(Field, &str)]) {
    let mut readings = Readings::default();
    for (field, text) in values {
        readings
            .set(*field, text, ReadingContext::default())
            .expect("a value");
    }
    let day = s.desks[at].days().expect("days");
    let day = day.iter().find(|d| d.protocol == "quillmere-day");
    s.desks[at]
        .sign(SignRequest {
            day: day.expect("the day").id,
            child_id: child.into(),
            attempt: Attempt::First,
            visit: new_visit_id(),
            readings,
            remarks: Vec::new(),
        })
        .expect("signed");
}

/// An absent reflex at one table and a new squint at the other (NICE NG127, secondary) are an
/// emergency that neither table saw.
#[test]
fn an_emergency_that_only_the_united_readings_make_has_one_running_line() {
    let mut s = on_a_local_day();
    let reflex = [
        (Field::DistanceRight, "20/20"),
        (Field::DistanceLeft, "20/20"),
        (Field::RedReflexRight, "normal"),
        (Field::RedReflexLeft, "absent"),
    ];
    sign_locally(&mut s, 0, "Q-1", &reflex);
    sign_locally(&mut s, 1, "Q-1", &[(Field::Signs, "new_squint:left")]);
    for desk in &s.desks {
        assert!(desk.urgent_open().expect("read").is_empty());
    }
    let (from_east, from_west) = (s.packet(0), s.packet(1));
    let (_, raised) = s.desks[0].read_packet(&from_west, |_, _| {}).expect("read");
    assert_eq!(raised.len(), 1);
    assert_eq!(raised[0].child_id, "Q-1");
    assert!(raised[0].what.contains("new squint"), "{}", raised[0].what);
    s.read(1, &from_east);
    for at in [0, 1] {
        assert_eq!(s.desks[at].urgent_open().expect("read").len(), 1);
    }
    // The same packet again raises nothing, and both stations mean one line.
    let head = s.desks[0].head().expect("a head");
    s.read(0, &from_west);
    assert_eq!(s.desks[0].head().expect("a head"), head);
    s.even_out();
    for at in [0, 1] {
        let open = s.desks[at].urgent_open().expect("read");
        assert_eq!(open.len(), 1, "{open:?}");
        assert_eq!(s.desks[at].in_conflict().expect("read"), [""; 0]);
    }
    let open = s.desks[1].urgent_open().expect("read").remove(0);
    s.desks[1]
        .urgent_answer(&twoline::actions::UrgentAnswer {
            visit: open.visit,
            told: "the mother".into(),
            told_at: "10:40".into(),
            told_by: "J. Imani".into(),
        })
        .expect("told");
    s.even_out();
    for at in [0, 1] {
        assert!(s.desks[at].urgent_open().expect("read").is_empty());
        s.desks[at].verify(None, |_, _| {}).expect("whole");
    }
}

/// Seven fields that differ are 128 combinations: more than are judged.
#[test]
fn beyond_the_bound_the_soonest_urgency_of_any_value_stands() {
    let mut s = two();
    let lines = |line: &'static str| {
        [
            Field::DistanceRight,
            Field::DistanceLeft,
            Field::DistanceBoth,
            Field::NearRight,
            Field::NearLeft,
            Field::NearBoth,
        ]
        .map(|field| (field, line))
    };
    let with = |line, signs, more: &[(Field, &'static str)]| {
        let mut values = lines(line).to_vec();
        values.push((Field::CorrectionWorn, "none"));
        values.push((Field::Signs, signs));
        values.extend(more);
        values
    };
    assert!(s.sign(0, "Q-1", &with("20/20", "none", &[])));
    assert!(s.sign(1, "Q-1", &with("20/25", "white_pupil:left", &[])));
    // What refers is settled for this child, and seven other values differ.
    let reflex = [
        (Field::RedReflexRight, "absent"),
        (Field::RedReflexLeft, "normal"),
    ];
    assert!(s.sign(0, "Q-2", &with("20/20", "none", &reflex)));
    assert!(s.sign(1, "Q-2", &with("20/25", "nystagmus", &reflex)));
    east_reads_west(&mut s);
    let together = s.child(0, "Q-1").together.expect("two signatures");
    assert_eq!(together.unsettled.len(), 7);
    assert_eq!(together.now.kind, OutcomeKind::Incomplete);
    assert_eq!(together.now.decided_by, DecidedBy::Conflict);
    assert_eq!(together.now.urgency, Some(Urgency::Emergency));
    assert!(together.now.act_by.is_some());
    assert!(together.now.unknown.contains(&"conflict".to_owned()));
    let together = s.child(0, "Q-2").together.expect("two signatures");
    assert_eq!(together.unsettled.len(), 7);
    assert_eq!(together.now.kind, OutcomeKind::Refer);
    assert!(together.now.unknown.contains(&"conflict".to_owned()));
}

#[test]
fn a_code_that_either_station_printed_means_the_referral_of_both() {
    let mut s = two();
    assert!(s.sign(0, "Q-1", FAR_OFF));
    assert!(s.sign(1, "Q-1", FAR_OFF));
    let codes = [0, 1].map(|at| s.desks[at].referral_list().expect("read")[0].code);
    assert_ne!(codes[0], codes[1]);
    s.even_out();
    for at in [0, 1] {
        for code in &codes {
            let found = s.desks[at].find_referral(&code.digits()).expect("found");
            assert_eq!(found.child_id, "Q-1");
            let file = format!("code,examined_on\n{},2026-10-14\n", code.digits());
            s.desks[at]
                .plan_exams("exams.csv", file.as_bytes())
                .expect("the code is known");
        }
    }
}

#[test]
fn at_the_door_a_pass_that_is_no_pass_any_more_was_not_seen() {
    let mut s = two();
    assert!(s.sign(1, "Q-1", &whole("20/63", "none")));
    let packet = s.packet(1);
    assert!(s.sign(0, "Q-1", CHART));
    let visit = s.visit(0, "Q-1");
    s.read(0, &packet);
    let change = [(Field::CorrectionWorn, "none".to_owned())];
    let _ = s.desks[0].correct(visit.id, &change, "asked again");
    let last = s.child(0, "Q-1").together.expect("values differ");
    assert_eq!(last.now.kind, OutcomeKind::Incomplete);
    let later = s.desks[0]
        .open_day(NewDay {
            site: "QE".into(),
            date: "2026-10-15".parse().expect("a date"),
            protocol: "us-school".into(),
            method: AcuityMethod::Threshold,
        })
        .expect("a day");
    let doors = s.desks[0].at_the_door(&later).expect("read");
    let door = doors.iter().find(|d| d.child.child_id == "Q-1");
    assert_ne!(door.expect("listed").door, Door::SeenThisTerm, "{last:?}");
}

#[test]
fn a_test_that_failed_at_the_other_station_is_not_carried_over_as_passed() {
    let mut s = two();
    assert!(s.sign(1, "Q-2", CHART));
    assert!(s.sign(
        0,
        "Q-1",
        &[(Field::PlusLens, "read"), (Field::Signs, "none")]
    ));
    assert!(s.sign(1, "Q-1", CHART));
    east_reads_west(&mut s);
    let together = s.child(0, "Q-1").together.expect("two signatures");
    assert_eq!(together.now.kind, OutcomeKind::Rescreen);
    let later = s.desks[0]
        .open_day(NewDay {
            site: "QE".into(),
            date: "2026-10-28".parse().expect("a date"),
            protocol: "us-school".into(),
            method: AcuityMethod::Threshold,
        })
        .expect("a day");
    let child = s.desks[0].day_child(&later, "Q-1").expect("a child");
    assert_eq!(child.attempt, Attempt::Rescreen);
    let before = child.before.expect("a rescreen");
    assert!(
        before.failed.iter().any(|id| id.starts_with("plus-lens")),
        "{before:?}"
    );
    assert_eq!(before.passed.get(Field::PlusLens), None);
    assert_eq!(
        before.passed.get(Field::DistanceLeft).as_deref(),
        Some("20/20")
    );
}

#[test]
fn what_was_noted_while_entering_stays_with_the_visit() {
    let mut s = two();
    let sign = |s: &mut Stations, values: &[(Field, &str)], remark: &str| {
        let mut readings = Readings::default();
        for (field, text) in values {
            readings
                .set(*field, text, ReadingContext::default())
                .expect("a value");
        }
        let request = SignRequest {
            day: s.day(0).id,
            child_id: "Q-1".into(),
            attempt: Attempt::First,
            visit: new_visit_id(),
            readings,
            remarks: vec![remark.to_owned()],
        };
        s.desks[0].sign(request).expect("signed");
    };
    sign(&mut s, CHART, "eyes swapped: distance acuity");
    sign(&mut s, SIGNS, "eyes swapped: red reflex");
    let visit = s.visit(0, "Q-1");
    assert!(
        notes(&visit).contains(&"eyes swapped: red reflex".to_owned()),
        "{:?}",
        notes(&visit)
    );
    let change = [(Field::DistanceLeft, "20/25".to_owned())];
    for value in ["20/25", "20/20"] {
        let change = [(Field::DistanceLeft, value.to_owned())];
        s.desks[0]
            .correct(visit.id, &change, "mistyped")
            .expect("corrected");
    }
    s.desks[0]
        .correct(visit.id, &change, "mistyped")
        .expect("corrected");
    let notes = notes(&s.visit(0, "Q-1"));
    for remark in ["eyes swapped: distance acuity", "eyes swapped: red reflex"] {
        assert_eq!(
            notes.iter().filter(|n| *n == remark).count(),
            1,
            "{notes:?}"
        );
    }
    let distinct: std::collections::BTreeSet<&String> = notes.iter().collect();
    assert_eq!(distinct.len(), notes.len(), "{notes:?}");
}

#[test]
fn a_correction_of_a_united_visit_leaves_every_station_on_the_board() {
    let mut s = two();
    assert!(s.sign(0, "Q-1", &whole("20/20", "none")));
    assert!(s.sign(1, "Q-1", &whole("20/63", "none")));
    east_reads_west(&mut s);
    let seen = |s: &Stations| -> Vec<(String, usize, u64)> {
        let board = s.desks[0].board(&s.day(0)).expect("a board");
        let rows = board.stations.into_iter();
        rows.map(|row| (row.name, row.seen, row.hits)).collect()
    };
    let before = seen(&s);
    assert_eq!(before.len(), 2);
    let visit = s.visit(0, "Q-1");
    s.desks[0]
        .settle(visit.id, Field::DistanceLeft, "20/20", "asked both")
        .expect("settled");
    assert_eq!(seen(&s), before);
    s.desks[0]
        .retract(visit.id, "another child")
        .expect("taken back");
    assert_eq!(s.child(0, "Q-1").state, QueueState::ToCome);
    assert!(seen(&s).iter().all(|(_, seen, _)| *seen == 0));
}

#[test]
fn a_closed_referral_leaves_the_worklist_and_an_open_one_says_what_is_next() {
    let mut s = two();
    assert!(s.sign(0, "Q-1", FAR_OFF));
    assert!(s.sign(0, "Q-2", FAR_OFF));
    let list = s.desks[0].worklist().expect("read").referred;
    assert_eq!(list.len(), 2);
    assert!(!list[0].next.is_empty());
    let closed = s.desks[0].find_referral("Q-1").expect("found");
    let step = Step {
        closing: Some(Closing::Examined),
        evidence: Some(Evidence::ALL[0]),
        ..Step::new(StepKind::Closed, "2026-10-14".parse().expect("a date"))
    };
    s.desks[0].add_step(closed.id, step).expect("closed");
    let list = s.desks[0].worklist().expect("read").referred;
    assert_eq!(list.len(), 1);
    assert_eq!(list[0].child_id, "Q-2");
}
