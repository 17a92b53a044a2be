//! Each part of the rules on its own.

use super::support::{Child, child, date, word};
use twoline::domain::acuity::{Line, Notation, Step};
use twoline::domain::codes::Consent;
use twoline::domain::outcome::{Answer, DecidedBy, Outcome, RiskKind, Urgency};
use twoline::rules::{Library, explain, judge_rule_set};

fn kind(set: &str, age: u32, text: &str) -> &'static str {
    word(&child(age, text).by_set(set))
}

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

// Refraction.

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

// Signs and urgency.

#[test]
fn signs_and_how_soon() {
    // The sources of each line are named in the rule file; "practice" where none was read.
    let rows: &[(&str, &str, Option<u32>)] = &[
        ("signs=white_pupil:right", "emergency", Some(0)),
        ("signs=new_squint;lost_red_reflex", "emergency", Some(0)),
        (
            "signs=new_squint red_reflex_right=absent red_reflex_left=normal",
            "emergency",
            Some(0),
        ),
        (
            "signs=new_squint;ataxia_vomiting_headache",
            "emergency",
            Some(0),
        ),
        ("signs=sudden_vision_loss", "emergency", Some(0)),
        ("signs=sudden_diplopia", "emergency", Some(0)),
        ("signs=eye_injury:left", "emergency", Some(0)),
        ("signs=chemical_injury", "emergency", Some(0)),
        ("signs=orbital_cellulitis", "emergency", Some(0)),
        ("signs=no_visual_response", "emergency", Some(0)),
        ("signs=new_squint;limited_abduction", "prompt", Some(3)),
        ("signs=new_squint;nystagmus", "prompt", Some(3)),
        ("signs=new_squint;face_turn", "prompt", Some(3)),
        // NICE says two weeks, New South Wales says emergency: the sooner acts.
        ("signs=lost_red_reflex", "emergency", Some(0)),
        (
            "signs=none red_reflex_right=dull red_reflex_left=normal",
            "emergency",
            Some(0),
        ),
        (
            "signs=none red_reflex_right=unequal red_reflex_left=unequal",
            "prompt",
            Some(14),
        ),
        ("signs=nystagmus", "prompt", None),
        ("signs=face_turn", "prompt", None),
        ("signs=new_squint", "routine", None),
        ("signs=known_squint", "routine", None),
        ("signs=head_tilt", "routine", None),
        ("signs=limited_abduction", "routine", None),
        ("signs=unequal_pupils", "routine", None),
    ];
    for (text, urgency, days) in rows {
        let outcome = child(80, text).by_set("urgent-signs");
        assert_eq!(word(&outcome), "refer", "{text}");
        assert_eq!(outcome.urgency.map(Urgency::word), Some(*urgency), "{text}");
        assert_eq!(outcome.act_within_days, *days, "{text}");
    }
    assert_eq!(
        word(&child(80, "signs=none").by_set("urgent-signs")),
        "pass"
    );
    assert_eq!(
        word(&child(80, "signs=ataxia_vomiting_headache").by_set("urgent-signs")),
        "pass"
    );
    // Nobody looked: not a pass, and one unknown, not twenty.
    let blank = child(80, "correction_worn=none").by_set("urgent-signs");
    assert_eq!(word(&blank), "incomplete");
    assert_eq!(blank.unknown, ["signs"]);
}

#[test]
fn conflicting_sources_are_both_shown() {
    let outcome = child(80, "signs=lost_red_reflex").by_set("urgent-signs");
    assert_eq!(outcome.criteria, ["lost_red_reflex.nsw", "lost_red_reflex"]);
    let mut text = String::new();
    explain::reasons_text(&outcome, &mut text);
    assert!(
        text.contains("New South Wales") && text.contains("NICE NG12"),
        "{text}"
    );
}

#[test]
fn signs_of_a_child_under_care() {
    let mut it = child(80, "signs=nystagmus");
    it.under_care = true;
    assert_eq!(word(&it.by_set("urgent-signs")), "pass");
    let mut it = child(80, "signs=white_pupil history=under_care");
    it.under_care = true;
    assert_eq!(word(&it.by_protocol("us-school")), "refer");
}

// Stereo, color, plus lens.

#[test]
fn stereo_counts() {
    let of = |correct: u8, shown: u8| {
        kind(
            "stereo-random-dot-e",
            60,
            &format!("stereo_shown={shown} stereo_correct={correct}"),
        )
    };
    assert_eq!(of(4, 6), "pass");
    assert_eq!(of(3, 6), "refer");
    assert_eq!(of(3, 4), "incomplete");
    assert_eq!(of(0, 3), "refer");
    assert_eq!(of(0, 2), "incomplete");
}

#[test]
fn color_plates_inform_and_do_not_refer() {
    let outcome = child(80, "plates_missed=2 plates_shown=15").by_set("color-plates");
    assert_eq!(word(&outcome), "pass");
    assert!(outcome.reasons[0].remarks[0].contains("not an eye referral"));
}

#[test]
fn the_plus_lens_is_for_those_without_glasses_who_passed() {
    let base = "distance_right=20/20 distance_left=20/20 signs=none plus_lens=read";
    let of = |extra: &str| child(60, &format!("{base} {extra}")).by_protocol("us-school");
    let fails = of("correction_worn=none");
    assert_eq!(word(&fails), "rescreen");
    assert_eq!(fails.criteria, ["plus-lens-2.50/plus-lens"]);
    for (extra, why) in [
        ("correction_worn=yes", "owns glasses"),
        ("", "is not answered"),
    ] {
        let outcome = of(extra);
        assert_eq!(word(&outcome), "pass", "{extra}");
        assert!(
            outcome.protocol_notes.iter().any(|n| n.contains(why)),
            "{:?}",
            outcome.protocol_notes
        );
        assert!(!outcome.unknown.iter().any(|u| u.contains("plus-lens")));
    }
    let failed = child(
        60,
        "distance_right=20/40 distance_left=20/40 correction_worn=none plus_lens=read",
    )
    .by_protocol("us-school");
    assert_eq!(failed.criteria, ["joint-policy-2016/line.60+"]);
    // Offered, not required: not done is listed.
    let undone = child(
        60,
        "distance_right=20/20 distance_left=20/20 signs=none history=none correction_worn=none",
    )
    .by_protocol("us-school");
    assert_eq!(word(&undone), "pass");
    assert_eq!(undone.unknown, ["plus-lens-2.50/plus-lens"]);
    let young = child(59, "distance_right=20/20 distance_left=20/20 signs=none history=none correction_worn=none plus_lens=read").by_protocol("us-school");
    assert_eq!(word(&young), "pass");
    assert!(young.unknown.is_empty(), "{:?}", young.unknown);
}

// The order of a protocol.

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
    exempt.readings = super::support::readings("distance_right=20/50 distance_left=20/50");
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
    it.readings = super::support::readings("signs=eye_injury");
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
        "2 steps over",
        "from memory: check against the source",
        "A pass does not rule out disease",
        "us-school",
    ] {
        assert!(whole.contains(part), "{part}\n{whole}");
    }
}
