//! Fields of a visit as text: in, out, and what must hold between them.

use proptest::prelude::*;
use twoline::domain::acuity::{Line, Notation, Step};
use twoline::domain::codes::{History, SignKind};
use twoline::domain::field::Field;
use twoline::domain::readings::{ReadingContext, Readings};
use twoline::domain::text::shown;

const PLAIN: ReadingContext = ReadingContext {
    bare: None,
    critical_line: None,
};

fn with(values: &[(Field, &str)]) -> Readings {
    let mut readings = Readings::default();
    for (field, text) in values {
        if let Err(why) = readings.set(*field, text, PLAIN) {
            panic!("{why}");
        }
    }
    readings
}

/// Texts that each field takes, canonical ones first, and texts that it refuses.
fn samples(field: Field) -> (&'static [&'static str], &'static [&'static str]) {
    match field {
        Field::Status => (
            &["present", "absent", "opted_out", "left_early"],
            &["here", "Present"],
        ),
        Field::AcuityMethod => (&["threshold", "critical_line"], &["line"]),
        Field::CorrectionWorn => (
            &[
                "none",
                "yes",
                "contact_lenses",
                "no",
                "left_at_home",
                "broken_or_lost",
            ],
            &["glasses"],
        ),
        Field::LettersPerLine => (&["5", "4", "1", "10"], &["0", "11", "4.5", "-1"]),
        Field::ChartDistanceM | Field::UsedDistanceM => {
            (&["3", "1.5", "6"], &["0", "-3", "3m", "999"])
        }
        Field::ChartDistanceFt | Field::UsedDistanceFt => {
            (&["10", "5", "20"], &["0", "ten", "1e1"])
        }
        Field::DistanceRight | Field::DistanceLeft | Field::DistanceBoth => (
            &[
                "20/40", "20/32-1", ">=20/32", "<20/50", "CF", "NT", "NT:shy", "6/9", "0.5d",
                "0.30l",
            ],
            &["20/0", "40/20", "hello", ">20/200", "<=20/40", "40", "J3"],
        ),
        Field::NearRight | Field::NearLeft | Field::NearBoth => {
            (&["J3", "N8", "M1.25", "20/40", "6/12"], &["near", "J"])
        }
        Field::NearDistanceCm => (&["40", "33.5"], &["0", "-1", "40cm"]),
        Field::PlusLens => (&["read", "blurred"], &["pass"]),
        Field::StereoCorrect | Field::StereoShown | Field::PlatesMissed | Field::PlatesShown => {
            (&["0", "6", "99"], &["-1", "100", "1.5", "six"])
        }
        Field::Cover => (&["none", "phoria", "intermittent", "constant"], &["tropia"]),
        Field::DeviationPd => (&["0", "8", "12.5"], &["-8", "201", "8pd"]),
        Field::DeviatingEye => (&["right", "left", "alternating"], &["both", "OD"]),
        Field::DeviationDirection => (&["in", "out", "up", "down"], &["inward"]),
        Field::Note => (
            &["shy; tried after recess", "=not run", "王さんは眼鏡"],
            &["two\nlines", "a bell\u{7}"],
        ),
        Field::RedReflexRight | Field::RedReflexLeft => (
            &["normal", "absent", "white", "dull", "dark_spot", "unequal"],
            &["red"],
        ),
        Field::SphereRight | Field::SphereLeft => (
            &["-2.50", "+1.25", "0.00", "+30.00", ">7.50", "<-7.50"],
            &["30.25", "-31", "plus 1", "1,25"],
        ),
        Field::CylinderRight | Field::CylinderLeft => {
            (&["-0.50", "0.00", "+15.00", ">7.50"], &["15.25", "x"])
        }
        Field::AxisRight | Field::AxisLeft => (&["1", "90", "180"], &["0", "181", "90.5", "-1"]),
        Field::InstrumentWorn | Field::Testable => (&["yes", "no"], &["y", "true"]),
        Field::InstrumentRight | Field::InstrumentLeft => (&["ok", "no_reading"], &["fail"]),
        Field::PupilMmRight
        | Field::PupilMmLeft
        | Field::OpacityMmRight
        | Field::OpacityMmLeft
        | Field::ReflexDistanceMmRight
        | Field::ReflexDistanceMmLeft => (&["4", "1.5", "0", "-1"], &["1.234", "31", "wide"]),
        Field::Signs => (
            &[
                "none",
                "white_pupil:left",
                "new_squint;nystagmus:both",
                "known_squint",
            ],
            &["white pupil", "white_pupil:middle", "none;nystagmus", ";"],
        ),
        Field::History => (
            &["none", "headaches", "down_syndrome;preterm_under_32_weeks"],
            &["nothing", "headache"],
        ),
        Field::NotTestableReason => (&["shy", "other"], &["bored"]),
    }
}

/// Every field takes its texts, gives them back unchanged, is wiped by a blank, and keeps its old
/// value when a text is refused.
#[test]
fn every_field_in_and_out() {
    for field in Field::ALL.iter().copied() {
        let (taken, refused) = samples(field);
        for text in taken {
            let mut readings = with(&[(field, text)]);
            assert_eq!(
                readings.get(field).as_deref(),
                Some(*text),
                "{}",
                field.word()
            );
            assert_eq!(readings.recorded(), [(field, (*text).to_owned())]);
            for bad in refused {
                let why = readings
                    .set(field, bad, PLAIN)
                    .expect_err(&format!("{}={bad}", field.word()));
                assert_eq!((why.field, why.found), (field, shown(bad, 40)));
                assert!(!why.expected.is_empty());
                assert_eq!(
                    readings.get(field).as_deref(),
                    Some(*text),
                    "kept after {bad}"
                );
            }
            readings
                .set(field, "  ", PLAIN)
                .expect("a blank is unknown");
            assert_eq!(readings, Readings::default(), "{}", field.word());
        }
    }
}

/// What people may write beside the canonical form.
#[test]
fn other_ways_to_write_a_value() {
    for (field, text, canonical) in [
        (Field::SphereRight, "-2.5", "-2.50"),
        (Field::SphereRight, "\u{2212}2.5", "-2.50"),
        (Field::SphereRight, "1.25", "+1.25"),
        (Field::CylinderLeft, "DS", "0.00"),
        (Field::AxisRight, "090", "90"),
        (Field::DistanceRight, " 20 / 40 ", "20/40"),
        (
            Field::Signs,
            "nystagmus ; new_squint;nystagmus",
            "new_squint;nystagmus",
        ),
    ] {
        assert_eq!(
            with(&[(field, text)]).get(field).as_deref(),
            Some(canonical)
        );
    }
}

/// An unknown word names the nearest known one.
#[test]
fn a_near_miss_is_named() {
    let hint = |field, text| {
        Readings::default()
            .set(field, text, PLAIN)
            .expect_err(text)
            .expected
    };
    assert!(hint(Field::CorrectionWorn, "left_at_hom").contains("did you mean left_at_home?"));
    assert!(hint(Field::Signs, "white_pupl:left").contains("did you mean white_pupil?"));
    assert!(hint(Field::Signs, "white_pupil:middle").contains("white_pupil:both"));
    assert!(hint(Field::History, "headache").contains("did you mean headaches?"));
}

/// Nobody looked is not the same as nothing seen.
#[test]
fn none_is_a_word_somebody_chose() {
    assert_eq!(Readings::default().signs, None);
    assert_eq!(with(&[(Field::Signs, "none")]).signs, Some(Vec::new()));
    let seen = with(&[
        (Field::Signs, "white_pupil:left"),
        (Field::History, "under_care"),
    ]);
    assert!(seen.has_sign(SignKind::WhitePupil) && !seen.has_sign(SignKind::Nystagmus));
    assert!(seen.has_history(History::UnderCare));
    assert!(!seen.anything_tested(), "signs and history are not tests");
}

/// A critical-line day changes a bare distance acuity of that day only; near stays as written.
#[test]
fn critical_line_context() {
    let context = ReadingContext {
        bare: Some(Notation::Feet),
        critical_line: Some(Line::at(Step(2), Notation::Feet)),
    };
    let mut readings = Readings::default();
    readings
        .set(Field::DistanceRight, "32", context)
        .expect("a line");
    assert_eq!(readings.get(Field::DistanceRight).as_deref(), Some("20/32"));
    readings
        .set(Field::AcuityMethod, "critical_line", context)
        .expect("a method");
    readings
        .set(Field::DistanceRight, "32", context)
        .expect("a line");
    readings
        .set(Field::DistanceLeft, "50", context)
        .expect("a line");
    readings
        .set(Field::NearRight, "32", context)
        .expect("a line");
    assert_eq!(
        readings.get(Field::DistanceRight).as_deref(),
        Some(">=20/32")
    );
    assert_eq!(readings.get(Field::DistanceLeft).as_deref(), Some("<20/32"));
    assert_eq!(readings.get(Field::NearRight).as_deref(), Some("20/32"));
}

/// What contradicts itself, each alone, with the field that is named; and what does not.
#[test]
fn contradictions() {
    use Field as F;
    let bad: [(&[(Field, &str)], Field); 13] = [
        (&[(F::CylinderRight, "-0.50")], F::AxisRight),
        (&[(F::CylinderLeft, ">7.50")], F::AxisLeft),
        (&[(F::AxisLeft, "90")], F::CylinderLeft),
        (&[(F::ChartDistanceM, "3")], F::UsedDistanceM),
        (&[(F::ChartDistanceFt, "10")], F::UsedDistanceFt),
        (&[(F::UsedDistanceFt, "10")], F::ChartDistanceFt),
        (
            &[(F::Testable, "no"), (F::DistanceLeft, "20/40")],
            F::DistanceLeft,
        ),
        (
            &[(F::Testable, "no"), (F::DistanceBoth, "<20/40")],
            F::DistanceBoth,
        ),
        (
            &[(F::StereoCorrect, "5"), (F::StereoShown, "4")],
            F::StereoCorrect,
        ),
        (
            &[(F::PlatesMissed, "3"), (F::PlatesShown, "2")],
            F::PlatesMissed,
        ),
        (
            &[
                (F::InstrumentRight, "no_reading"),
                (F::SphereRight, "+1.00"),
            ],
            F::InstrumentRight,
        ),
        (
            &[(F::InstrumentLeft, "no_reading"), (F::CylinderLeft, "0")],
            F::InstrumentLeft,
        ),
        (
            &[(F::DistanceRight, "20/40-5"), (F::LettersPerLine, "4")],
            F::DistanceRight,
        ),
    ];
    for (values, field) in bad {
        let found: Vec<Field> = with(values)
            .contradictions()
            .iter()
            .map(|e| e.field)
            .collect();
        assert_eq!(found, [field], "{values:?}");
    }
    let good: [&[(Field, &str)]; 7] = [
        &[],
        &[(F::SphereRight, "-4.00")],
        &[(F::CylinderRight, "0")],
        &[(F::CylinderRight, "DS"), (F::AxisRight, "180")],
        &[(F::ChartDistanceFt, "10"), (F::UsedDistanceFt, "5")],
        &[
            (F::Testable, "no"),
            (F::DistanceRight, "NT:shy"),
            (F::NearRight, "J3"),
        ],
        &[(F::InstrumentRight, "no_reading"), (F::SphereLeft, "+1.25")],
    ];
    for values in good {
        assert_eq!(with(values).contradictions(), [], "{values:?}");
    }
}

/// One distance, one unit: the second unit is refused, the empty column of the other is not.
#[test]
fn distances_have_one_unit() {
    let mut readings = with(&[(Field::ChartDistanceFt, "10"), (Field::UsedDistanceFt, "5")]);
    readings
        .set(Field::ChartDistanceM, "", PLAIN)
        .expect("a blank");
    assert_eq!(readings.get(Field::ChartDistanceFt).as_deref(), Some("10"));
    readings
        .set(Field::ChartDistanceM, "3", PLAIN)
        .expect_err("two units");
    assert_eq!(readings.distances().expect("both").shift(), 301);
}

/// Errors show what was found without letting it reach the terminal.
#[test]
fn errors_are_safe_to_print() {
    let why = Readings::default()
        .set(Field::Cover, "\u{1b}[31mconstant", PLAIN)
        .expect_err("an escape sequence");
    assert!(!why.to_string().contains('\u{1b}'));
    assert!(why.to_string().contains("expected one of none, phoria"));
}

proptest! {
    #![proptest_config(super::random(1_000))]

    /// Any text in any field is taken or refused, never a panic; what is taken reads back.
    #[test]
    fn any_text_in_any_field(
        texts in prop::collection::vec(
            (prop::sample::select(Field::ALL.to_vec()), "\\PC{0,20}|[0-9/<>=+\\-.a-zDL:;_]{0,14}|(?s).{0,8}"),
            1..12,
        )
    ) {
        let mut readings = Readings::default();
        for (field, text) in &texts {
            let before = readings.clone();
            if readings.set(*field, text, PLAIN).is_err() {
                prop_assert_eq!(&readings, &before);
            }
        }
        readings.contradictions();
    }

    /// A whole set of readings goes out as text and comes back the same.
    #[test]
    fn all_fields_round_trip(choices in prop::collection::vec(prop::option::of(0_usize..10), Field::ALL.len())) {
        let mut first = Readings::default();
        for (field, choice) in Field::ALL.iter().zip(choices) {
            let (taken, _) = samples(*field);
            if let Some(choice) = choice {
                // Feet beside metres and letters beyond a short line are refused: not this test.
                let _ = first.set(*field, taken[choice % taken.len()], PLAIN);
            }
        }
        let mut again = Readings::default();
        for (field, text) in first.recorded() {
            if let Err(why) = again.set(field, &text, PLAIN) {
                return Err(TestCaseError::fail(why.to_string()));
            }
        }
        prop_assert_eq!(again, first);
    }
}
