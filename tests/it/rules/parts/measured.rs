//! Refraction, alignment and risk kinds on their own.

use crate::rules::support::{child, word};
use twoline::domain::outcome::{Answer, Outcome, RiskKind};

#[test]
fn half_known_refraction_refers_where_it_can() {
    let outcome = child(60, "sphere_right=-4.00 sphere_left=0").by_set("instrument-2021");
    assert_eq!(outcome.criteria, ["myopia.48+"]);
    assert!(outcome.unknown.contains(&"astigmatism.48+".to_owned()));
    assert!(outcome.unknown.contains(&"anisometropia.48+".to_owned()));
    assert!(outcome.unknown.contains(&"hyperopia.48+".to_owned()));
    // Out of range: more than 7.50 is past every limit.
    let outcome = child(
        60,
        "sphere_right=>7.50 cylinder_right=0 sphere_left=+1.00 cylinder_left=DS",
    )
    .by_set("instrument-2021");
    assert_eq!(outcome.criteria, ["anisometropia.48+", "hyperopia.48+"]);
    assert_eq!(outcome.risks, [RiskKind::Anisometropic]);
}

#[test]
fn through_glasses_an_instrument_says_nothing() {
    let outcome = child(
        60,
        "instrument_worn=yes sphere_right=-6.00 cylinder_right=0 sphere_left=0 cylinder_left=0",
    )
    .by_set("instrument-2021");
    assert_eq!(word(&outcome), "incomplete");
    assert!(outcome.criteria.is_empty());
}

#[test]
fn oblique_astigmatism_is_judged_by_its_axis() {
    // 2003 (secondary): more than 1.00 D with the axis more than 10° from 90 and 180.
    let at = |cylinder: &str, axis: &str| {
        child(60, &format!("sphere_right=0 cylinder_right={cylinder} axis_right={axis} sphere_left=0 cylinder_left=0"))
            .by_set("instrument-2003")
            .criteria
    };
    assert_eq!(at("-1.25", "11"), ["astigmatism.oblique"]);
    assert_eq!(at("-1.25", "10"), Vec::<String>::new());
    assert_eq!(at("-1.25", "170"), Vec::<String>::new());
    assert_eq!(at("-1.25", "79"), ["astigmatism.oblique"]);
    assert_eq!(at("-1.25", "80"), Vec::<String>::new());
    assert_eq!(at("-1.00", "45"), Vec::<String>::new());
    assert_eq!(at("-1.50", "45"), ["astigmatism.oblique"]);
    // Cylinders of 0 and 1.75 differ by more than 1.50: anisometropia by cylinder (memory).
    assert_eq!(
        at("-1.75", "45"),
        ["anisometropia", "astigmatism", "astigmatism.oblique"]
    );
}

#[test]
fn strabismus_by_cover_and_by_size() {
    let any = |text: &str| answer(&child(60, text).by_set("instrument-2003"), "strabismus");
    let sized = |text: &str| answer(&child(60, text).by_set("instrument-2021"), "strabismus.48+");
    use Answer::{Pass, Refer, Unknown};
    for (text, by_any, by_size) in [
        ("cover=constant", Refer, Refer),
        ("cover=constant deviation_pd=2", Refer, Refer),
        ("cover=intermittent", Refer, Unknown),
        ("cover=intermittent deviation_pd=8", Refer, Pass),
        ("cover=intermittent deviation_pd=8.01", Refer, Refer),
        ("cover=phoria", Pass, Pass),
        ("cover=phoria deviation_pd=4", Refer, Unknown),
        ("cover=none", Pass, Pass),
        ("deviation_pd=8", Refer, Pass),
        ("deviation_pd=9", Refer, Refer),
        ("correction_worn=none", Unknown, Unknown),
    ] {
        assert_eq!((any(text), sized(text)), (by_any, by_size), "{text}");
    }
}

fn answer(outcome: &Outcome, id: &str) -> Answer {
    outcome
        .reasons
        .iter()
        .find(|r| &*r.criterion == id)
        .unwrap_or_else(|| panic!("{id} was not asked"))
        .answer
}

// Risk kinds, logic of each eye.

#[test]
fn risk_kinds() {
    let of = |set: &str, text: &str| child(60, text).by_set(set).risks;
    use RiskKind::{Anisometropic, Deprivation, InterocularDifference, Isoametropic, Strabismic};
    let eyes = |right: &str, left: &str| {
        format!("sphere_right={right} cylinder_right=0 sphere_left={left} cylinder_left=0")
    };
    assert_eq!(
        of("instrument-2021", &eyes("+4.50", "+4.50")),
        [Isoametropic]
    );
    assert_eq!(
        of("instrument-2021", &eyes("+4.50", "+3.75")),
        [Anisometropic]
    );
    assert_eq!(of("instrument-2021", &eyes("-5.00", "-5.00")), []);
    assert_eq!(of("instrument-2021", &eyes("+1.50", "0")), [Anisometropic]);
    assert_eq!(of("instrument-2021", "opacity_mm_right=1.5"), [Deprivation]);
    assert_eq!(
        of("instrument-2003", "reflex_distance_mm_left=1"),
        [Deprivation]
    );
    assert_eq!(of("instrument-2003", "cover=constant"), [Strabismic]);
    assert_eq!(of("cover-test", "cover=intermittent"), [Strabismic]);
    assert_eq!(of("urgent-signs", "signs=lost_red_reflex"), [Deprivation]);
    assert_eq!(of("urgent-signs", "signs=white_pupil"), [Deprivation]);
    assert_eq!(of("urgent-signs", "signs=new_squint"), [Strabismic]);
    assert_eq!(
        of(
            "urgent-signs",
            "signs=none red_reflex_right=dark_spot red_reflex_left=normal"
        ),
        []
    );
    assert_eq!(
        of(
            "red-reflex",
            "red_reflex_right=white red_reflex_left=normal"
        ),
        [Deprivation]
    );
    assert_eq!(
        of("red-reflex", "red_reflex_right=dull red_reflex_left=normal"),
        []
    );
    assert_eq!(
        of(
            "joint-policy-2016",
            "distance_right=20/50 distance_left=20/50"
        ),
        []
    );
    assert_eq!(
        of(
            "joint-policy-2016",
            "distance_right=20/50 distance_left=20/32"
        ),
        [InterocularDifference]
    );
}
