//! What a screener may type as an acuity, and what is refused with which hint.

use proptest::prelude::*;
use twoline::domain::acuity::{
    Acuity, AcuityContext, ChartLetters, Line, Notation, Step, Understood, parse_acuity,
};
use twoline::domain::readings::{AcuityResult, NotTestable};

const PLAIN: AcuityContext = AcuityContext {
    bare: None,
    near: false,
    letters: ChartLetters(5),
    critical_line: None,
};

fn read(text: &str, context: &AcuityContext) -> String {
    parse_acuity(text, context)
        .unwrap_or_else(|why| panic!("{text:?}: {why}"))
        .value
        .to_string()
}

fn refused(text: &str, context: &AcuityContext) -> String {
    match parse_acuity(text, context) {
        Err(expected) => expected,
        Ok(understood) => panic!("{text:?} was taken as {understood:?}"),
    }
}

fn feet() -> AcuityContext {
    AcuityContext {
        bare: Some(Notation::Feet),
        ..PLAIN
    }
}

fn metres() -> AcuityContext {
    AcuityContext {
        bare: Some(Notation::Metres),
        ..PLAIN
    }
}

fn near() -> AcuityContext {
    AcuityContext {
        near: true,
        ..PLAIN
    }
}

fn on_critical_line(pass: &str) -> AcuityContext {
    let pass = parse_acuity(pass, &PLAIN).expect(pass).value.acuity();
    AcuityContext {
        critical_line: pass.and_then(Acuity::line),
        ..feet()
    }
}

/// Every notation, with spaces, case and the signs that keyboards and word processors make.
#[test]
fn every_notation() {
    for (text, canonical) in [
        ("20/40", "20/40"),
        (" 20 / 40 ", "20/40"),
        ("20\u{2044}40", "20/40"),
        ("20/12.5", "20/12.5"),
        ("6/12", "6/12"),
        ("6/9.5", "6/9.5"),
        ("6/9", "6/9"),
        ("0.5d", "0.5d"),
        ("0.5 D", "0.5d"),
        (".5d", "0.5d"),
        ("0.30l", "0.30l"),
        ("0.3L", "0.30l"),
        ("0.125l", "0.125l"),
        ("-0.10l", "-0.10l"),
        ("\u{2212}0.1l", "-0.10l"),
        ("20/40-2", "20/40-2"),
        ("20/40 \u{2212} 2", "20/40-2"),
        ("20/40\u{2013}2", "20/40-2"),
        ("20/40+2", "20/40+2"),
        ("6/12-1", "6/12-1"),
        ("0.30l-1", "0.30l-1"),
        (">=20/32", ">=20/32"),
        ("> = 20/32", ">=20/32"),
        ("\u{2265}20/32", ">=20/32"),
        ("<20/50", "<20/50"),
        ("< 6/15", "<6/15"),
        (">=0.20l", ">=0.20l"),
        ("cf", "CF"),
        ("HM", "HM"),
        ("lp", "LP"),
        ("NLP", "NLP"),
        ("nt", "NT"),
        ("NT:shy", "NT:shy"),
        ("nt: objects_to_cover_left", "NT:objects_to_cover_left"),
    ] {
        assert_eq!(read(text, &PLAIN), canonical, "{text:?}");
        assert_eq!(
            read(canonical, &PLAIN),
            canonical,
            "{canonical:?} reads back"
        );
    }
}

/// `NT` has a reason where one was given, and an unknown reason is refused with the list.
#[test]
fn not_testable_reasons() {
    let value = |text: &str| parse_acuity(text, &PLAIN).map(|u| u.value);
    assert_eq!(
        value("NT"),
        Ok(AcuityResult::NotTestable(NotTestable::Other))
    );
    assert_eq!(
        value("NT:shy"),
        Ok(AcuityResult::NotTestable(NotTestable::Shy))
    );
    assert!(refused("NT:bored", &PLAIN).contains("does_not_understand"));
}

/// Two notations that mean opposite things to different people are refused with both readings.
#[test]
fn ambiguous_comparators_name_two_readings() {
    for (text, better, worse) in [
        (">20/200", ">=20/200", "<20/200"),
        ("<=20/40", ">=20/40", "<20/40"),
        ("\u{2264} 6/12", ">=6/12", "<6/12"),
    ] {
        let why = refused(text, &PLAIN);
        assert!(why.contains("one of two readings"), "{why}");
        assert!(why.contains(better) && why.contains(worse), "{why}");
    }
}

/// A bare number means what the store's notation says, and is refused where nothing says it.
#[test]
fn bare_numbers_by_context() {
    assert_eq!(read("40", &feet()), "20/40");
    assert_eq!(read("40-2", &feet()), "20/40-2");
    assert_eq!(read(">=32", &feet()), ">=20/32");
    assert_eq!(read("12", &metres()), "6/12");
    assert_eq!(read("9.5", &metres()), "6/9.5");
    assert!(refused("40", &PLAIN).contains("20/40"));
    // 0.5 is a decimal acuity to one reader and a logMAR value to another.
    for context in [PLAIN, feet(), metres()] {
        let why = refused("0.5", &context);
        assert!(why.contains("0.5d (decimal, 20/40)"), "{why}");
        assert!(why.contains("0.50l (logMAR, 20/63)"), "{why}");
    }
    assert!(refused("-0.1", &feet()).contains("-0.10l"));
}

/// What is no acuity is refused with what was expected.
#[test]
fn refused_with_a_hint() {
    for (text, hint) in [
        ("", "20/40"),
        ("hello", "HM (hand movement)"),
        ("20/0", "between 20/10 and 20/2000"),
        ("6/0", "between 6/3 and 6/600"),
        ("40/20", "20/40"),
        ("20/", "number under the line"),
        ("/40", "over 20 or over 6"),
        ("20/4", "between 20/10"),
        ("20/99999", "CF, HM, LP or NLP"),
        ("20/40/20", "number under the line"),
        ("20/abc", "number under the line"),
        ("3/60", "over 20 or over 6"),
        ("20,40", "20/40"),
        ("CFF", "CF (counts fingers)"),
        ("x", "20/40"),
        (">=CF", "20/40"),
        (">=NT", "20/40"),
        ("0d", "between 2d and 0.01d"),
        ("3.0l", "between -0.30l and 2.00l"),
        ("=20/40", "over 20 or over 6"),
        ("\u{0662}\u{0660}/\u{0664}\u{0660}", "over 20 or over 6"),
    ] {
        let why = refused(text, &PLAIN);
        assert!(why.contains(hint), "{text:?}: {why}");
    }
}

/// Letters: no more than the line has, none on `>=` or `<`.
#[test]
fn letters_stay_on_their_line() {
    let four = AcuityContext {
        letters: ChartLetters(4),
        ..PLAIN
    };
    assert_eq!(read("20/40-5", &PLAIN), "20/40-5");
    assert_eq!(read("20/40-4", &four), "20/40-4");
    for (text, context) in [
        ("20/40-6", PLAIN),
        ("20/40+6", PLAIN),
        ("20/40-5", four),
        ("20/40-0", PLAIN),
        ("20/40--1", PLAIN),
        ("20/40-1-1", PLAIN),
        ("20/40-1.5", PLAIN),
        ("20/40-", PLAIN),
    ] {
        assert!(refused(text, &context).contains("letters"), "{text}");
    }
    for text in [">=20/32-1", "<20/50+1"] {
        assert!(refused(text, &PLAIN).contains("without letters"), "{text}");
    }
}

/// Near fields take Jaeger, N and M values as written; distance fields say where they belong.
#[test]
fn near_values() {
    for text in ["J3", "N8", "M1.25", "20/40", "6/12", "NT"] {
        assert_eq!(read(text, &near()), text);
    }
    assert_eq!(read("j3", &near()), "J3");
    assert!(refused("J3", &PLAIN).contains("near"));
    for text in ["J", "J0", "N-1", "JJ3"] {
        parse_acuity(text, &near()).expect_err(text);
    }
}

/// On a critical-line day the bare pass line is "or better" and a larger line "worse than it"; the
/// field says so. What was written with a comparator or letters, or read beyond, stays as it is.
#[test]
fn critical_line_days() {
    let day = on_critical_line("20/32");
    for (text, canonical) in [
        ("20/32", ">=20/32"),
        ("32", ">=20/32"),
        ("20/30", ">=20/30"),
        ("20/40", "<20/32"),
        ("20/200", "<20/32"),
        ("20/20", "20/20"),
        ("20/32-1", "20/32-1"),
        ("20/40-1", "20/40-1"),
        (">=20/32", ">=20/32"),
        ("<20/32", "<20/32"),
        ("CF", "CF"),
        ("NT:shy", "NT:shy"),
    ] {
        assert_eq!(read(text, &day), canonical, "{text}");
        assert_eq!(read(canonical, &day), canonical, "{canonical} reads back");
    }
    let echo = |text: &str| {
        parse_acuity(text, &day)
            .expect(text)
            .echo
            .unwrap_or_default()
    };
    assert_eq!(echo("20/32"), "critical line passed: 20/32 or better");
    assert_eq!(echo("20/40"), "critical line not passed: worse than 20/32");
}

/// A denominator that no chart has is taken at its nearest step, and echoed; chart lines are not.
#[test]
fn odd_denominators_are_echoed() {
    let echo = |text: &str| {
        let Understood { value, echo } = parse_acuity(text, &PLAIN).expect(text);
        (
            value.acuity().and_then(Acuity::line).expect(text).step().0,
            echo,
        )
    };
    assert_eq!(
        echo("20/35"),
        (2, Some("no chart has 20/35: taken as 20/32".into()))
    );
    assert_eq!(
        echo("6/13"),
        (3, Some("no chart has 6/13: taken as 6/12".into()))
    );
    assert_eq!(
        echo("0.15l"),
        (
            2,
            Some("0.150l lies between lines: compared as 20/32".replace("0.150", "0.15"))
        )
    );
    for text in [
        "20/30", "20/250", "20/320", "6/9", "6/9.6", "6/18.9", "6/75", "6/380", "0.08d", "0.30l",
    ] {
        assert_eq!(echo(text).1, None, "{text} is printed on charts");
    }
}

/// Words for what was understood, before it is accepted.
#[test]
fn understood_in_words() {
    for (text, words) in [
        (">=20/32", "20/32 or better"),
        ("<20/50", "worse than 20/50"),
        ("20/40-2", "20/40, 2 missed"),
        ("20/40+1", "20/40, 1 of the next line"),
        ("CF", "counts fingers"),
        ("NT:shy", "not testable (shy)"),
    ] {
        let value = parse_acuity(text, &PLAIN).expect(text).value;
        assert_eq!(value.in_words(), words);
    }
}

fn any_context() -> impl Strategy<Value = AcuityContext> {
    (
        prop::option::of(prop::sample::select(vec![Notation::Feet, Notation::Metres])),
        any::<bool>(),
        0_u8..=12,
        prop::option::of(-3_i32..=20),
    )
        .prop_map(|(bare, near, letters, pass)| AcuityContext {
            bare,
            near,
            letters: ChartLetters(letters),
            critical_line: pass.map(|step| Line::at(Step(step), Notation::Feet)),
        })
}

proptest! {
    #![proptest_config(super::random(2_000))]

    /// Any text at all is taken or refused, never a panic.
    #[test]
    fn any_text_is_taken_or_refused(text in "\\PC{0,40}|[0-9/<>=+\\-. dlJNMCFHT:−≥≤]{0,16}|(?s).{0,12}", context in any_context()) {
        match parse_acuity(&text, &context) {
            Ok(understood) => {
                prop_assert!(!understood.value.in_words().is_empty());
            }
            Err(expected) => prop_assert!(!expected.is_empty()),
        }
    }

    /// What is shown reads back to the same value in the same context.
    #[test]
    fn canonical_text_reads_back(text in "(>=|<)?(20/|6/)?[0-9]{1,3}(\\.[0-9])?[dl]?([+-][1-5])?", context in any_context()) {
        if let Ok(first) = parse_acuity(&text, &context) {
            let shown = first.value.to_string();
            let again = parse_acuity(&shown, &context);
            prop_assert_eq!(again.map(|u| u.value), Ok(first.value), "{} shown as {}", text, shown);
        }
    }
}
