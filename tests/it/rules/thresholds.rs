//! Every threshold of the shipped sets just below, at and above it, and each side of each age bound.
//!
//! The numbers are written out again from the published guidance, with source and basis beside
//! them; none is taken from the rule files under test.

use super::support::{child, word};
use twoline::domain::outcome::Basis;
use twoline::rules::{Library, Measure};

/// Chart sets: ages from and to, the line that passes, the next one that refers, source, basis.
type Line = (
    &'static str,
    u32,
    Option<u32>,
    &'static str,
    &'static str,
    &'static str,
    &'static str,
);
const LINES: &[Line] = &[
    (
        "expert-panel-2015",
        36,
        Some(48),
        "20/50",
        "20/63",
        "10.1097/OPX.0000000000000429",
        "primary",
    ),
    (
        "expert-panel-2015",
        48,
        Some(72),
        "20/40",
        "20/50",
        "10.1097/OPX.0000000000000429",
        "primary",
    ),
    (
        "joint-policy-2016",
        36,
        Some(48),
        "20/50",
        "20/63",
        "Pediatrics 2016;137(1):e20153597",
        "secondary",
    ),
    (
        "joint-policy-2016",
        48,
        Some(60),
        "20/40",
        "20/50",
        "Pediatrics 2016;137(1):e20153597",
        "secondary",
    ),
    (
        "joint-policy-2016",
        60,
        None,
        "20/32",
        "20/40",
        "Pediatrics 2016;137(1):e20153597",
        "memory",
    ),
    (
        "joint-policy-2003",
        36,
        Some(72),
        "20/40",
        "20/50",
        "Pediatrics 2003;111:902–907",
        "memory",
    ),
    (
        "joint-policy-2003",
        72,
        None,
        "20/30",
        "20/40",
        "Pediatrics 2003;111:902–907",
        "memory",
    ),
    (
        "arizona-school",
        36,
        Some(48),
        "20/50",
        "20/63",
        "R9-13, Table 13.4",
        "primary",
    ),
    (
        "arizona-school",
        48,
        Some(60),
        "20/40",
        "20/50",
        "R9-13, Table 13.4",
        "primary",
    ),
    (
        "arizona-school",
        60,
        None,
        "20/32",
        "20/40",
        "R9-13, Table 13.4",
        "primary",
    ),
    (
        "texas-school",
        0,
        Some(60),
        "20/40",
        "20/50",
        "25 Texas Administrative Code §37.23",
        "primary",
    ),
    (
        "texas-school",
        60,
        None,
        "20/30",
        "20/40",
        "25 Texas Administrative Code §37.23",
        "primary",
    ),
    (
        "england-school-entry",
        48,
        Some(72),
        "0.200l",
        "0.201l",
        "5 October 2023",
        "primary",
    ),
    (
        "ireland-school-entry",
        48,
        Some(72),
        "0.200l",
        "0.201l",
        "Ireland and Northern Ireland",
        "secondary",
    ),
    (
        "iapb-school-6-9",
        60,
        None,
        "6/9",
        "6/12",
        "IAPB School Eye Health Guidelines",
        "primary",
    ),
    (
        "iapb-school-6-12",
        60,
        None,
        "6/12",
        "6/15",
        "IAPB School Eye Health Guidelines",
        "primary",
    ),
];

fn with_near(line: &str) -> String {
    format!("distance_right={line} distance_left={line} near_right={line} near_left={line}")
}

#[test]
fn chart_lines_at_each_bound() {
    for (set, from, to, passes, refers, citation, basis) in LINES {
        let ages = [
            Some(*from),
            to.map(|to| to - 1),
            to.is_none().then_some(from + 120),
        ];
        for age in ages.into_iter().flatten() {
            let pass = child(age, &with_near(passes)).by_set(set);
            assert_eq!(word(&pass), "pass", "{set} at {age}: {passes}");
            let refer = child(age, &with_near(refers)).by_set(set);
            assert_eq!(word(&refer), "refer", "{set} at {age}: {refers}");
            let line = refer
                .reasons
                .iter()
                .find(|r| r.criterion.starts_with("line."))
                .unwrap();
            let source = format!("{} {}", line.source.citation, line.source.locator);
            assert!(source.contains(citation), "{set}: {source}");
            assert_eq!(
                line.source.basis,
                Basis::from_word(basis).unwrap(),
                "{set} at {age}"
            );
            // Each eye alone refers.
            let one = format!(
                "distance_right={passes} distance_left={refers} near_right={passes} near_left={passes}"
            );
            assert_eq!(word(&child(age, &one).by_set(set)), "refer");
        }
        // A month to either side belongs to another band, or to none.
        for outside in [from.checked_sub(1), *to].into_iter().flatten() {
            let other = LINES
                .iter()
                .find(|l| l.0 == *set && l.1 <= outside && l.2.is_none_or(|to| outside < to));
            let found = child(outside, &with_near(refers)).by_set(set);
            match other {
                None => {
                    assert_eq!(word(&found), "incomplete", "{set} at {outside}");
                    assert_eq!(found.unknown, ["age"], "{set} at {outside}");
                }
                Some(band) => {
                    let found = child(outside, &with_near(band.3)).by_set(set);
                    assert_eq!(word(&found), "pass", "{set} at {outside}");
                }
            }
        }
    }
}

/// By grade: passing line, next line. Missouri school guideline; WAC 246-760-071 (both primary).
#[test]
fn chart_lines_by_grade() {
    for (set, grade, passes, refers) in [
        ("missouri-school", "PK", "20/40", "20/50"),
        ("missouri-school", "KG", "20/40", "20/50"),
        ("missouri-school", "01", "20/30", "20/40"),
        ("missouri-school", "12", "20/30", "20/40"),
        ("washington-school", "KG", "20/40", "20/50"),
        ("washington-school", "01", "20/32", "20/40"),
        ("washington-school", "12", "20/32", "20/40"),
    ] {
        let mut it = child(80, &with_near(passes));
        it.grade = Some(grade);
        assert_eq!(word(&it.by_set(set)), "pass", "{set} {grade}");
        it.readings = super::support::readings(&with_near(refers));
        let outcome = it.by_set(set);
        assert_eq!(word(&outcome), "refer", "{set} {grade}");
        assert_eq!(
            outcome.criteria.len(),
            2,
            "distance and near: {:?}",
            outcome.criteria
        );
        assert_eq!(outcome.reasons[0].source.basis, Basis::Primary);
    }
}

/// Two lines between the eyes. Joint policy 2016 secondary, 2003 memory, Texas primary (under 60
/// months only). The 2003 policy's own examples: 20/25 with 20/40, 20/20 with 20/30.
#[test]
fn two_lines_between_the_eyes() {
    for (set, age, right, left, refers) in [
        ("joint-policy-2016", 36, "20/25", "20/32", false),
        ("joint-policy-2016", 36, "20/25", "20/40", true),
        ("joint-policy-2016", 60, "20/16", "20/25", true),
        ("joint-policy-2016", 60, "20/20", "20/30", true),
        ("joint-policy-2003", 72, "20/20", "20/25", false),
        ("joint-policy-2003", 72, "20/20", "20/30", true),
        ("joint-policy-2003", 60, "20/25", "20/40", true),
        ("texas-school", 59, "20/20", "20/32", true),
        ("texas-school", 60, "20/20", "20/30", false),
        ("expert-panel-2015", 60, "20/10", "20/40", false),
    ] {
        let outcome =
            child(age, &format!("distance_right={right} distance_left={left}")).by_set(set);
        assert_eq!(
            outcome
                .criteria
                .iter()
                .any(|c| c.starts_with("between-eyes")),
            refers,
            "{set} at {age}: {right} {left}"
        );
    }
}

/// Instrument sets: band, then limits in hundredths of a dioptre for anisometropia, hyperopia,
/// astigmatism, myopia. 2003: J AAPOS 2003;7:314–316, secondary. 2013: J AAPOS 2013;17:4–8, primary
/// (myopia secondary). 2021: J AAPOS 2022;26:1.e1–1.e6, memory.
type Limits = (
    &'static str,
    u32,
    Option<u32>,
    &'static str,
    [i32; 4],
    [&'static str; 4],
);
const LIMITS: &[Limits] = &[
    (
        "instrument-2003",
        0,
        None,
        "",
        [150, 350, 150, 300],
        ["secondary"; 4],
    ),
    (
        "instrument-2013",
        12,
        Some(31),
        ".12-30",
        [250, 450, 200, 350],
        ["primary", "primary", "primary", "secondary"],
    ),
    (
        "instrument-2013",
        31,
        Some(49),
        ".31-48",
        [200, 400, 200, 300],
        ["primary", "primary", "primary", "secondary"],
    ),
    (
        "instrument-2013",
        49,
        None,
        ".49+",
        [150, 350, 150, 150],
        ["primary", "primary", "primary", "secondary"],
    ),
    (
        "instrument-2021",
        12,
        Some(48),
        ".12-47",
        [125, 400, 300, 300],
        ["memory"; 4],
    ),
    (
        "instrument-2021",
        48,
        None,
        ".48+",
        [125, 400, 175, 200],
        ["memory"; 4],
    ),
];

/// Writes hundredths as a signed power.
fn power(hundredths: i32) -> String {
    format!(
        "{}{}.{:02}",
        if hundredths < 0 { "-" } else { "+" },
        hundredths.abs() / 100,
        hundredths.abs() % 100
    )
}

/// Both eyes alike, save for the sphere of the left eye.
fn instrument(sphere: i32, cylinder: i32, left_sphere: i32) -> String {
    format!(
        "sphere_right={} cylinder_right={} axis_right=180 sphere_left={} cylinder_left={} axis_left=180 cover=none \
         opacity_mm_right=0 opacity_mm_left=0 reflex_distance_mm_right=4 reflex_distance_mm_left=4",
        power(sphere),
        power(cylinder),
        power(left_sphere),
        power(cylinder)
    )
}

#[test]
fn refraction_limits_at_each_bound() {
    for (set, from, to, band, limits, bases) in LIMITS {
        let ages = [
            Some(*from),
            to.map(|to| to - 1),
            to.is_none().then_some(from + 120),
        ];
        for age in ages.into_iter().flatten() {
            let [anisometropia, hyperopia, astigmatism, myopia] = *limits;
            for (i, name) in ["anisometropia", "hyperopia", "astigmatism", "myopia"]
                .iter()
                .enumerate()
            {
                for (over, refers) in [(-25, false), (-1, false), (0, false), (1, true), (25, true)]
                {
                    let text = match i {
                        0 => instrument(0, 0, anisometropia + over),
                        1 => instrument(hyperopia + over, 0, hyperopia + over),
                        2 => instrument(0, -(astigmatism + over), 0),
                        _ => instrument(-(myopia + over), 0, -(myopia + over)),
                    };
                    let outcome = child(age, &text).by_set(set);
                    let id = format!("{name}{band}");
                    let reason = outcome
                        .reasons
                        .iter()
                        .find(|r| *r.criterion == *id)
                        .unwrap_or_else(|| panic!("{set} at {age} has no {id}"));
                    assert_eq!(
                        outcome.criteria.contains(&id),
                        refers,
                        "{set} at {age}: {id} {over:+}"
                    );
                    assert_eq!(
                        reason.source.basis,
                        Basis::from_word(bases[i]).unwrap(),
                        "{set} {id}"
                    );
                }
            }
        }
        for outside in [from.checked_sub(1), *to].into_iter().flatten() {
            let other = LIMITS
                .iter()
                .any(|l| l.0 == *set && l.1 <= outside && l.2.is_none_or(|to| outside < to));
            let outcome = child(outside, &instrument(0, 0, 0)).by_set(set);
            assert_eq!(
                word(&outcome),
                if other { "pass" } else { "incomplete" },
                "{set} at {outside}"
            );
            assert!(
                outcome
                    .reasons
                    .iter()
                    .all(|r| !r.criterion.ends_with(band) || band.is_empty()),
                "{set} at {outside}"
            );
        }
    }
}

/// Opacity over 1 mm (2003, 2013 secondary; 2021 memory), margin reflex distance 1 mm or less
/// (2003, comparator from memory), more than 8 prism dioptres (2013, 2021 memory).
#[test]
fn millimetres_and_prism_dioptres() {
    for (set, age, band) in [
        ("instrument-2003", 60, ""),
        ("instrument-2013", 60, ".49+"),
        ("instrument-2021", 60, ".48+"),
    ] {
        for (mm, refers) in [("0.99", false), ("1", false), ("1.01", true)] {
            let outcome =
                child(age, &format!("opacity_mm_right={mm} opacity_mm_left=0")).by_set(set);
            assert_eq!(
                outcome.criteria.contains(&format!("media-opacity{band}")),
                refers,
                "{set} {mm}"
            );
        }
        for (pd, refers) in [("7.99", false), ("8", false), ("8.01", true)] {
            let outcome = child(age, &format!("cover=intermittent deviation_pd={pd}")).by_set(set);
            let any_manifest = set == "instrument-2003";
            assert_eq!(
                outcome.criteria.contains(&format!("strabismus{band}")),
                refers || any_manifest,
                "{set} {pd}"
            );
        }
    }
    for (mm, refers) in [("0.99", true), ("1", true), ("1.01", false)] {
        let outcome = child(
            60,
            &format!("reflex_distance_mm_right={mm} reflex_distance_mm_left=4"),
        )
        .by_set("instrument-2003");
        assert_eq!(
            outcome.criteria.contains(&"ptosis".to_owned()),
            refers,
            "{mm}"
        );
    }
}

/// Plus lens from 60 months: +2.50 Minnesota module 7a, +2.00 IAPB (both primary).
#[test]
fn plus_lens_from_sixty_months() {
    for (set, citation) in [("plus-lens-2.50", "Minnesota"), ("plus-lens-2.00", "IAPB")] {
        let read = child(60, "correction_worn=none plus_lens=read").by_set(set);
        assert_eq!(word(&read), "refer");
        assert!(read.reasons[0].source.citation.contains(citation));
        assert_eq!(read.reasons[0].source.basis, Basis::Primary);
        assert_eq!(
            word(&child(60, "correction_worn=none plus_lens=blurred").by_set(set)),
            "pass"
        );
        assert_eq!(
            child(59, "correction_worn=none plus_lens=read")
                .by_set(set)
                .unknown,
            ["age"]
        );
    }
}

/// Red reflex: Pediatrics 2002;109:980 (primary). Cover test: joint policy 2003 (memory).
#[test]
fn reflex_and_cover() {
    for reflex in ["absent", "white", "dull", "dark_spot", "unequal"] {
        let outcome = child(
            60,
            &format!("red_reflex_right=normal red_reflex_left={reflex}"),
        )
        .by_set("red-reflex");
        assert_eq!(outcome.criteria, [reflex]);
        assert_eq!(outcome.reasons[0].source.basis, Basis::Primary);
    }
    assert_eq!(
        word(&child(60, "red_reflex_right=normal red_reflex_left=normal").by_set("red-reflex")),
        "pass"
    );
    assert_eq!(
        word(&child(60, "red_reflex_right=normal").by_set("red-reflex")),
        "incomplete"
    );
    for (cover, refers) in [
        ("none", "pass"),
        ("phoria", "pass"),
        ("intermittent", "refer"),
        ("constant", "refer"),
    ] {
        let outcome = child(60, &format!("cover={cover}")).by_set("cover-test");
        assert_eq!(word(&outcome), refers);
        assert_eq!(outcome.reasons[0].source.basis, Basis::Memory);
    }
}

/// Straight to an examination at 36 to 71 months: expert panel 2015 (primary), Down syndrome practice.
#[test]
fn direct_referral_groups() {
    let groups = [
        ("visible_abnormality", Basis::Primary),
        ("neurodevelopmental", Basis::Primary),
        ("systemic_condition", Basis::Primary),
        ("down_syndrome", Basis::Practice),
        ("family_strabismus", Basis::Primary),
        ("family_amblyopia", Basis::Primary),
        ("preterm_under_32_weeks", Basis::Primary),
        ("parent_concern", Basis::Primary),
    ];
    for (history, basis) in groups {
        for age in [36, 71] {
            let outcome = child(age, &format!("history={history}")).by_set("direct-referral");
            assert_eq!(outcome.criteria, [history], "{age}");
            let reason = outcome
                .reasons
                .iter()
                .find(|r| &*r.criterion == history)
                .unwrap();
            assert_eq!(reason.source.basis, basis);
        }
        for age in [35, 72] {
            assert_eq!(
                child(age, &format!("history={history}"))
                    .by_set("direct-referral")
                    .unknown,
                ["age"]
            );
        }
    }
    // Symptoms, a parent's refractive error and a teacher's concern are shown and do not refer.
    for history in [
        "parent_refractive_error",
        "teacher_concern",
        "blurred_vision",
        "squinting",
        "headaches",
        "tired_by_close_work",
        "none",
    ] {
        assert_eq!(
            word(&child(50, &format!("history={history}")).by_set("direct-referral")),
            "pass",
            "{history}"
        );
    }
}

/// Every acuity and refraction criterion that is shipped stands in a table above.
#[test]
fn no_shipped_threshold_is_untested() {
    for set in Library::shipped().rule_sets() {
        for criterion in &set.criteria {
            let tested = match criterion.measure {
                Measure::DistanceEachEye | Measure::NearEachEye => {
                    // Second screenings have their own table in `again.rs`.
                    LINES.iter().any(|l| l.0 == &*set.id)
                        || set.by_grade
                        || ["nsw-preschool", "new-zealand-4y"].contains(&&*set.id)
                }
                Measure::Anisometropia
                | Measure::Hyperopia
                | Measure::Astigmatism
                | Measure::Myopia => LIMITS.iter().any(|l| l.0 == &*set.id),
                _ => true,
            };
            assert!(tested, "{}/{}", set.id, criterion.id);
        }
    }
}
