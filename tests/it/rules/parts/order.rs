//! The order of a protocol, line by line.

use crate::rules::support::{Child, child, date, word};
use twoline::domain::codes::Consent;
use twoline::domain::outcome::DecidedBy;
use twoline::rules::explain;

fn school(child: &Child) -> (&'static str, DecidedBy) {
    let outcome = child.by_protocol("us-school");
    (word(&outcome), outcome.decided_by)
}

#[test]
fn the_first_line_that_applies_decides() {
    use DecidedBy::{
        Criterion, DirectReferral, Exempt, Missing, NotTestable, Nothing, ReferAtOnce, UrgentSign,
    };
    let everything =
        "distance_right=20/200 distance_left=20/20 signs=white_pupil history=family_strabismus";
    assert_eq!(school(&child(50, everything)), ("refer", UrgentSign));
    let mut exempt = child(50, "signs=none history=family_strabismus");
    exempt.consent = Some(Consent::No);
    assert_eq!(school(&exempt), ("exempt", Exempt));
    assert_eq!(school(&child(50, "status=opted_out")), ("exempt", Exempt));
    assert_eq!(school(&child(50, "status=under_care")), ("exempt", Exempt));
    assert_eq!(
        school(&child(50, "history=examined_12_months;family_strabismus")),
        ("exempt", Exempt)
    );
    // If readings were taken they are judged.
    exempt.readings = crate::rules::support::readings("distance_right=20/50 distance_left=20/50");
    assert_eq!(school(&exempt), ("rescreen", Criterion));
    assert_eq!(
        school(&child(
            50,
            "distance_right=20/20 distance_left=20/20 history=family_strabismus"
        )),
        ("refer", DirectReferral)
    );
    assert_eq!(
        school(&child(71, "history=preterm_under_32_weeks")),
        ("refer", DirectReferral)
    );
    assert_eq!(
        school(&child(36, "history=parent_concern")),
        ("refer", DirectReferral)
    );
    assert_eq!(
        school(&child(50, "distance_right=20/100 distance_left=20/100")),
        ("refer", ReferAtOnce)
    );
    assert_eq!(
        school(&child(50, "distance_right=20/80 distance_left=20/80")),
        ("rescreen", Criterion)
    );
    assert_eq!(
        school(&child(50, "distance_right=CF distance_left=20/80")),
        ("refer", ReferAtOnce)
    );
    assert_eq!(
        school(&child(80, "distance_right=20/16 distance_left=20/32")),
        ("refer", ReferAtOnce)
    );
    assert_eq!(
        school(&child(
            80,
            "distance_right=20/20 distance_left=20/20 cover=constant"
        )),
        ("refer", ReferAtOnce)
    );
    assert_eq!(
        school(&child(
            80,
            "distance_right=20/20 distance_left=20/20 cover=intermittent"
        )),
        ("rescreen", Criterion)
    );
    assert_eq!(
        school(&child(80, "distance_right=NT distance_left=20/20")),
        ("rescreen", NotTestable)
    );
    assert_eq!(
        school(&child(80, "distance_right=20/20")),
        ("incomplete", Missing)
    );
    assert_eq!(school(&child(80, "status=absent")), ("incomplete", Missing));
    assert_eq!(
        school(&child(80, "distance_right=20/20 distance_left=20/20")),
        ("pass", Nothing)
    );
}

#[test]
fn history_is_shown_and_not_acted_on_from_72_months_or_under_care() {
    let old = child(
        72,
        "distance_right=20/20 distance_left=20/20 history=family_strabismus",
    )
    .by_protocol("us-school");
    assert_eq!(word(&old), "pass");
    assert!(
        old.protocol_notes
            .iter()
            .any(|n| n.contains("strabismus (shown, not acted on")),
        "{:?}",
        old.protocol_notes
    );
    let mut cared = child(
        50,
        "distance_right=20/20 distance_left=20/20 history=family_strabismus",
    );
    cared.under_care = true;
    let cared = cared.by_protocol("us-school");
    assert_eq!(word(&cared), "pass");
    assert!(cared.criteria.is_empty());
}

#[test]
fn a_rescreen_that_fails_is_referred_and_a_preschool_refers_at_once() {
    let mut it = child(80, "distance_right=20/40 distance_left=20/40");
    assert_eq!(word(&it.by_protocol("us-school")), "rescreen");
    it.rescreen = true;
    let outcome = it.by_protocol("us-school");
    assert_eq!((word(&outcome), outcome.due_on), ("refer", None));
    assert_eq!(
        word(&child(50, "distance_right=20/50 distance_left=20/40").by_protocol("us-preschool")),
        "refer"
    );
}

#[test]
fn glasses_that_are_not_there() {
    let base = "distance_right=20/63 distance_left=20/63";
    let of = |correction: &str, visits: u32, extra: &str| {
        let mut it = child(100, &format!("{base} correction_worn={correction} {extra}"));
        it.glasses_visits = visits;
        it.by_protocol("us-school")
    };
    for correction in ["no", "left_at_home"] {
        for visits in [0, 1] {
            let outcome = of(correction, visits, "signs=none");
            assert_eq!(
                (word(&outcome), outcome.decided_by),
                ("incomplete", DecidedBy::GlassesNotWorn)
            );
            assert_eq!(outcome.due_on, Some(date("2026-10-28")));
            assert!(
                outcome
                    .unknown
                    .contains(&"joint-policy-2016/line.60+".to_owned())
            );
        }
        let third = of(correction, 2, "signs=none");
        assert_eq!(
            (word(&third), third.decided_by),
            ("refer", DecidedBy::GlassesNeverAvailable)
        );
        // Signs still count.
        assert_eq!(word(&of(correction, 0, "signs=known_squint")), "rescreen");
        assert_eq!(word(&of(correction, 0, "signs=white_pupil")), "refer");
    }
    assert_eq!(word(&of("broken_or_lost", 0, "")), "refer");
    assert_eq!(word(&of("yes", 0, "")), "rescreen");
}

#[test]
fn not_testable_by_age_and_try() {
    // Joint policy 2016 (secondary): age 3 within 6 months, 4 and over within 1 month, then refer.
    let nt = "distance_right=NT:shy distance_left=NT:shy";
    let due = |age: u32, protocol: &str| child(age, nt).by_protocol(protocol).due_on;
    assert_eq!(due(47, "us-school"), Some(date("2027-04-14")));
    assert_eq!(due(48, "us-school"), Some(date("2026-11-14")));
    assert_eq!(due(60, "us-preschool"), Some(date("2027-04-14")));
    let mut again = child(47, nt);
    again.rescreen = true;
    assert_eq!(school(&again), ("refer", DecidedBy::NotTestable));
    let mut again = child(47, nt);
    again.earlier_not_testable = true;
    assert_eq!(school(&again), ("refer", DecidedBy::NotTestable));
    // One eye refers and the other is not testable.
    let one = child(50, "distance_right=20/63 distance_left=NT").by_protocol("us-preschool");
    assert_eq!(
        (word(&one), one.decided_by),
        ("refer", DecidedBy::Criterion)
    );
    let guarded = child(
        50,
        "distance_right=NT:objects_to_cover_left distance_left=20/20",
    )
    .by_protocol("us-school");
    assert!(
        guarded
            .protocol_notes
            .iter()
            .any(|n| n.contains("sign of unequal sight")),
        "{:?}",
        guarded.protocol_notes
    );
}

#[test]
fn an_instrument_for_both_eyes_may_stand_in() {
    let nt = "testable=no";
    let both =
        "sphere_right=+1.00 cylinder_right=-0.50 axis_right=90 sphere_left=+1.25 cylinder_left=0";
    let outcome = child(47, &format!("{nt} {both} signs=none")).by_protocol("us-school");
    assert_eq!(
        (word(&outcome), outcome.decided_by),
        ("pass", DecidedBy::NotTestable)
    );
    assert_eq!(outcome.to_string(), "pass (instrument; chart not testable)");
    assert_eq!(outcome.due_on, Some(date("2027-04-14")));
    let half = child(
        47,
        &format!("{nt} sphere_right=+1.00 cylinder_right=0 instrument_left=no_reading"),
    )
    .by_protocol("us-school");
    assert_eq!(word(&half), "rescreen");
    let fails = child(
        47,
        &format!("{nt} sphere_right=+6.00 cylinder_right=0 sphere_left=+1.00 cylinder_left=0"),
    )
    .by_protocol("us-preschool");
    assert_eq!(word(&fails), "refer");
    // Below 36 months the instrument is the test.
    assert_eq!(word(&child(30, both).by_protocol("us-school")), "pass");
    assert_eq!(
        word(&child(30, "sphere_right=+1.00 cylinder_right=0").by_protocol("us-school")),
        "incomplete"
    );
}

#[test]
fn a_child_who_passes_with_glasses_under_care_is_not_referred_by_an_instrument() {
    let text = "correction_worn=yes distance_right=20/25 distance_left=20/25 sphere_right=+6.00 cylinder_right=0 sphere_left=+1.00 cylinder_left=0";
    let mut it = child(60, text);
    assert_eq!(word(&it.by_protocol("us-preschool")), "refer");
    it.under_care = true;
    assert_eq!(word(&it.by_protocol("us-preschool")), "pass");
}

#[test]
fn critical_line_values_are_bounds() {
    let of = |right: &str, left: &str| {
        child(
            80,
            &format!(
                "acuity_method=critical_line distance_right={right} distance_left={left} signs=none"
            ),
        )
        .by_protocol("us-school")
    };
    let pass = of(">=20/32", ">=20/32");
    assert_eq!(
        pass.to_string(),
        "pass (critical line; difference between the eyes not tested)"
    );
    assert_eq!(of("20/30", "20/32").to_string(), pass.to_string());
    // One eye passed and the other failed the line: at least one step, at most unknown.
    let fail = of("20/40", "20/32");
    assert_eq!(word(&fail), "rescreen");
    assert_eq!(fail.criteria, ["joint-policy-2016/line.60+"]);
    assert!(
        fail.unknown
            .contains(&"joint-policy-2016/between-eyes".to_owned())
    );
    assert!(
        child(
            50,
            "acuity_method=critical_line distance_right=20/40 distance_left=20/40"
        )
        .by_protocol("us-preschool")
        .to_string()
        .ends_with("(critical line)")
    );
}

#[test]
fn an_unknown_age_is_incomplete_and_signs_still_act() {
    let mut it = child(0, "distance_right=20/20 distance_left=20/20 signs=none");
    it.age = None;
    let outcome = it.by_protocol("us-school");
    assert_eq!(word(&outcome), "incomplete");
    assert!(outcome.unknown.contains(&"age".to_owned()));
    it.readings = crate::rules::support::readings("signs=eye_injury");
    assert_eq!(word(&it.by_protocol("us-school")), "refer");
}

#[test]
fn a_reason_carries_everything() {
    let outcome = child(80, "distance_right=20/20 distance_left=20/40").by_protocol("us-school");
    let line = outcome
        .reasons
        .iter()
        .find(|r| &*r.criterion == "line.60+")
        .unwrap();
    assert_eq!(line.reading, "right eye 20/20, left eye 20/40");
    assert_eq!(&*line.threshold, "worse than 20/32");
    assert_eq!(explain::margin_words(line), "1 line short");
    assert!(line.source.citation.contains("2016;137(1):e20153597"));
    assert_eq!(line.would_change, "left eye 20/32 or better would pass");
    let whole = explain::whole(&outcome).join("\n");
    for part in [
        "REFER, routine",
        "1 line short",
        "1 step over",
        "from memory: check against the source",
        "A pass does not rule out disease",
        "us-school",
    ] {
        assert!(whole.contains(part), "{part}\n{whole}");
    }
}

#[test]
fn what_decided_comes_first_and_margins_are_those_of_the_eye_that_refers() {
    let outcome = child(
        50,
        "distance_right=20/20 distance_left=20/50 history=family_amblyopia signs=none",
    )
    .by_protocol("us-school");
    assert!(
        explain::short(&outcome).starts_with("Parent or sibling with amblyopia"),
        "{}",
        explain::short(&outcome)
    );
    let mut cell = String::new();
    explain::reasons_text(&outcome, &mut cell);
    assert!(!cell.contains("direct referral: none seen"), "{cell}");
    // One eye off the chart has no margin in lines; the passing eye's is not shown instead.
    let off = child(80, "distance_right=20/20 distance_left=CF").by_protocol("us-school");
    let line = off.reasons.iter().find(|r| &*r.criterion == "line.60+");
    assert_eq!(line.map(explain::margin_words).as_deref(), Some(""));
    let none = child(50, "testable=no").by_protocol("us-school");
    assert!(
        none.reasons[0].reading.contains("not testable"),
        "{:?}",
        none.reasons[0]
    );
}
