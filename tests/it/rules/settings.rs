//! What a protocol file may say, judged as it says. How the parts go together is common practice.

use super::support::{child, date};
use twoline::domain::codes::Consent;
use twoline::domain::outcome::{Outcome, OutcomeKind, Urgency};
use twoline::domain::school_calendar::SchoolCalendar;
use twoline::rules::{Library, judge_protocol, show};

const HEAD: &str = r#"
id = "quillmere-day"
title = "Quillmere"
edition = "2026"
kind = "protocol"
required = ["distance acuity, each eye"]
approved_by = "Dr. R. Quill"
approved_on = "2026-08-01"
"#;

fn library(rest: &str) -> Library {
    let text = format!("{HEAD}{rest}");
    Library::shipped()
        .with_local([("day.toml".to_owned(), text)])
        .unwrap_or_else(|e| panic!("\n{e}"))
}

fn judged(rest: &str, age: u32, readings: &str) -> Outcome {
    let library = library(rest);
    let it = child(age, readings);
    judge_protocol(
        &library,
        library.protocol("quillmere-day").unwrap(),
        &it.case(),
    )
}

/// 30 working days: Colorado, as quoted elsewhere (secondary). 14 October 2026 is a Wednesday.
#[test]
fn working_days_are_counted_on_the_school_calendar() {
    let library = library("rule_sets = [\"joint-policy-2016\"]\nrescreen_working_days = 30\n");
    let protocol = library.protocol("quillmere-day").unwrap();
    let it = child(72, "distance_right=20/40 distance_left=20/40");
    let mut case = it.case();
    let plain = judge_protocol(&library, protocol, &case);
    assert_eq!(plain.kind, OutcomeKind::Rescreen);
    assert_eq!(plain.due_on, Some(date("2026-11-25")));
    assert!(
        plain
            .protocol_notes
            .iter()
            .any(|n| n.contains("no school calendar"))
    );
    let calendar = SchoolCalendar::default().with_holiday(date("2026-10-26"), date("2026-10-30"));
    case.calendar = Some(&calendar);
    let outcome = judge_protocol(&library, protocol, &case);
    assert_eq!(outcome.due_on, Some(date("2026-12-02")));
    assert!(
        show::protocol_lines(protocol)
            .iter()
            .any(|l| l.contains("rescreen within 30 working days"))
    );
}

/// The sooner of NICE NG12 (2 weeks, secondary) and New South Wales (emergency, primary) is acted
/// on by default; a protocol may leave one out, which is shown and not acted on.
#[test]
fn the_reflex_setting() {
    let sets = "rule_sets = [\"joint-policy-2016\", \"urgent-signs\"]\n";
    let readings = "distance_right=20/20 distance_left=20/20 signs=lost_red_reflex";
    let by_default = judged(sets, 72, readings);
    assert_eq!(by_default.urgency, Some(Urgency::Emergency));
    let left_out = judged(
        &format!("{sets}leave_out = [\"urgent-signs/lost_red_reflex.nsw\"]\n"),
        72,
        readings,
    );
    assert_eq!(left_out.kind, OutcomeKind::Refer);
    assert_eq!(left_out.urgency, Some(Urgency::Prompt));
    assert_eq!(left_out.act_within_days, Some(14));
    assert_eq!(left_out.criteria, ["urgent-signs/lost_red_reflex"]);
    assert!(
        left_out
            .protocol_notes
            .iter()
            .any(|n| n.contains("New South Wales") && n.contains("not acted on")),
        "{:?}",
        left_out.protocol_notes
    );
}

#[test]
fn required_tests_by_age() {
    let rest = "rule_sets = [\"arizona-school\"]\nwhen_done = [\"red-reflex\"]\n\
                [[required_at]]\nages = \"60..\"\ntests = [\"near acuity, each eye\", \"red reflex\"]\n";
    let far = "distance_right=20/20 distance_left=20/20";
    assert_eq!(judged(rest, 59, far).kind, OutcomeKind::Pass);
    assert_eq!(judged(rest, 60, far).kind, OutcomeKind::Incomplete);
    let near = format!("{far} near_right=20/20 near_left=20/20");
    assert_eq!(judged(rest, 60, &near).kind, OutcomeKind::Incomplete);
    let all = format!("{near} red_reflex_right=normal red_reflex_left=normal");
    assert_eq!(judged(rest, 60, &all).kind, OutcomeKind::Pass);
}

#[test]
fn who_is_exempt_and_what_broken_glasses_mean() {
    let sets = "rule_sets = [\"joint-policy-2016\"]\n";
    let library = library(&format!("{sets}exempt = [\"opted_out\"]\n"));
    let mut it = child(72, "");
    it.consent = Some(Consent::No);
    let protocol = library.protocol("quillmere-day").unwrap();
    assert_eq!(
        judge_protocol(&library, protocol, &it.case()).kind,
        OutcomeKind::Incomplete
    );
    let broken = "correction_worn=broken_or_lost distance_right=20/20 distance_left=20/20";
    assert_eq!(judged(sets, 72, broken).kind, OutcomeKind::Refer);
    assert_eq!(
        judged(&format!("{sets}broken_glasses = \"return\"\n"), 72, broken).kind,
        OutcomeKind::Incomplete
    );
}

/// A recheck inside a protocol: whatever refers goes first, whatever is missing as well.
#[test]
fn a_recheck_inside_a_protocol() {
    let sets = "rule_sets = [\"nsw-preschool\", \"urgent-signs\"]\n";
    for (readings, kind) in [
        (
            "distance_right=6/9-1 distance_left=6/9 signs=none",
            OutcomeKind::Rescreen,
        ),
        (
            "distance_right=6/9-2 distance_left=6/9 signs=none",
            OutcomeKind::Refer,
        ),
        ("distance_right=6/9-1 signs=none", OutcomeKind::Incomplete),
        (
            "distance_right=6/9-1 distance_left=6/9 signs=white_pupil",
            OutcomeKind::Refer,
        ),
    ] {
        let outcome = judged(sets, 50, readings);
        assert_eq!(outcome.kind, kind, "{readings}: {outcome:#?}");
        if kind == OutcomeKind::Rescreen {
            assert_eq!(outcome.due_on, Some(date("2027-10-14")));
            assert_eq!(outcome.criteria, ["nsw-preschool/line.recheck.48-59"]);
        }
    }
}
