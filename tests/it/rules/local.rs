//! Rules are data: a local set with a new band and another comparator judges as it says.

use super::support::{child, readings};
use twoline::domain::age::AgeMonths;
use twoline::domain::outcome::{OutcomeKind, Urgency};
use twoline::rules::{Case, Library, judge_protocol, judge_rule_set, pass_line, show};

const SET: &str = r#"
id = "quillmere-toddlers"
title = "Quillmere, 30 to 41 months"
edition = "2026"
kind = "acuity"
line_credit = "3 of 4"
line_credit_source = "board"
approved_by = "Dr. R. Quill, school physician"
approved_on = 2026-08-01

[[source]]
key = "board"
citation = "Quillmere school board, decision 12"
basis = "practice"

[[criterion]]
id = "line.30-35"
ages = "30..36"
measure = "distance acuity, each eye"
refer = "20/80 or worse"
source = "board"

[[criterion]]
id = "line.36-41"
ages = "36..42"
measure = "distance acuity, each eye"
refer = "20/50 or worse"
source = "board"
urgency = "prompt"
act_within_days = 7
"#;

const PROTOCOL: &str = r#"
id = "quillmere-day"
title = "Quillmere nursery"
edition = "2026"
kind = "protocol"
rule_sets = ["quillmere-toddlers", "urgent-signs"]
required = ["distance acuity, each eye"]
approved_by = "Dr. R. Quill, school physician"
approved_on = "2026-08-01"
"#;

fn library() -> Library {
    Library::shipped()
        .with_local([
            // The protocol comes first: order of files does not matter.
            ("day.toml".to_owned(), PROTOCOL.to_owned()),
            ("toddlers.toml".to_owned(), SET.to_owned()),
        ])
        .unwrap_or_else(|e| panic!("\n{e}"))
}

fn kind(age: u32, text: &str) -> OutcomeKind {
    let readings = readings(text);
    let mut case = Case::new(&readings);
    case.age = Some(AgeMonths(age));
    judge_rule_set(library().rule_set("quillmere-toddlers").unwrap(), &case).kind
}

#[test]
fn a_new_band_and_comparator_judge() {
    use OutcomeKind::{Incomplete, Pass, Refer};
    // "20/50 or worse" refers the line itself, unlike "worse than 20/50".
    assert_eq!(kind(36, "distance_right=20/50 distance_left=20/40"), Refer);
    assert_eq!(kind(36, "distance_right=20/40 distance_left=20/40"), Pass);
    assert_eq!(kind(35, "distance_right=20/63 distance_left=20/50"), Pass);
    assert_eq!(kind(35, "distance_right=20/80 distance_left=20/50"), Refer);
    assert_eq!(
        kind(29, "distance_right=20/80 distance_left=20/50"),
        Incomplete
    );
    assert_eq!(
        kind(42, "distance_right=20/80 distance_left=20/50"),
        Incomplete
    );
    // Worse than 20/40 is at best 20/50, which refers here; 20/40 or better passes.
    assert_eq!(kind(36, "distance_right=<20/40 distance_left=20/40"), Refer);
    assert_eq!(
        kind(36, "distance_right=>=20/40 distance_left=>=20/40"),
        Pass
    );
    assert_eq!(
        kind(36, "distance_right=>=20/50 distance_left=20/40"),
        Incomplete
    );
}

#[test]
fn a_local_protocol_uses_it_and_its_urgency() {
    let library = library();
    let protocol = library.protocol("quillmere-day").unwrap();
    let child = child(40, "distance_right=20/50 distance_left=20/25 signs=none");
    let outcome = judge_protocol(&library, protocol, &child.case());
    assert_eq!(outcome.kind, OutcomeKind::Refer);
    assert_eq!(outcome.urgency, Some(Urgency::Prompt));
    assert_eq!(
        outcome.act_by.map(|d| d.to_string()).as_deref(),
        Some("2026-10-21")
    );
    let line = pass_line(&library, protocol, Some(AgeMonths(40)), None).unwrap();
    assert_eq!(line.line.to_string(), "20/40");
    assert_eq!(line.words, "passes at 3 years");
}

#[test]
fn it_says_that_it_is_local() {
    let library = library();
    let set = library.rule_set("quillmere-toddlers").unwrap();
    assert_eq!(
        show::sheet(set).approval,
        "local, approved by Dr. R. Quill, school physician on 2026-08-01"
    );
    assert!(show::list_line(set).contains("local, approved by"));
    assert_eq!(&*set.text, SET);
}

#[test]
fn meridional_power_can_be_chosen() {
    let text = r#"
id = "meridional"
title = "Anisometropia along a meridian"
edition = "1"
kind = "refraction"
approved_by = "Dr. R. Quill"
approved_on = "2026-08-01"
[[source]]
key = "board"
citation = "Quillmere school board"
basis = "practice"
[[criterion]]
id = "anisometropia"
measure = "anisometropia"
refer = "more than 1.25 D"
metric = "meridional"
source = "board"
"#;
    let library = Library::shipped()
        .with_local([("m.toml".to_owned(), text.to_owned())])
        .unwrap_or_else(|e| panic!("\n{e}"));
    // Equal spherical equivalents, cylinders of 1.50 D at right angles: 1.50 D along one meridian.
    let readings = readings(
        "sphere_right=+0.75 cylinder_right=-1.50 axis_right=90 sphere_left=+0.75 cylinder_left=-1.50 axis_left=180",
    );
    let mut case = Case::new(&readings);
    case.age = Some(AgeMonths(60));
    let local = judge_rule_set(library.rule_set("meridional").unwrap(), &case);
    assert_eq!(local.kind, OutcomeKind::Refer);
    // By spherical equivalent it only makes a note.
    let shipped = judge_rule_set(library.rule_set("instrument-2021").unwrap(), &case);
    assert_eq!(shipped.kind, OutcomeKind::Pass);
    let remarks: Vec<&String> = shipped.reasons.iter().flat_map(|r| &r.remarks).collect();
    assert!(
        remarks
            .iter()
            .any(|r| r.starts_with("1.50 D between the eyes in one meridian")),
        "{remarks:?}"
    );
}
