//! Signs, urgency, stereo, color and plus lens on their own.

use super::kind;
use crate::rules::support::{child, word};
use twoline::domain::outcome::Urgency;
use twoline::rules::explain;

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
