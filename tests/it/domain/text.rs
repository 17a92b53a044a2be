//! Text made safe to show, and folded to search.

use proptest::prelude::*;
use twoline::domain::text::{folded, is_unsafe, nearest, shown};

/// Names are found by what an ordinary keyboard has.
#[test]
fn folded_names() {
    for (name, plain) in [
        ("Nguyễn", "nguyen"),
        ("Đặng", "dang"),
        ("Łukasz", "lukasz"),
        ("García", "garcia"),
        ("Ñandú", "nandu"),
        ("Søren", "soren"),
        ("Weiß", "weiss"),
        ("STRAẞE", "strasse"),
        ("Æsa", "aesa"),
        ("Þóra", "thora"),
        ("Işık", "isik"),
        ("İnci", "inci"),
        ("Ħamrun", "hamrun"),
        ("O\u{2019}Dea", "o'dea"),
        ("Čapek-Dvořák", "capek-dvorak"),
    ] {
        assert_eq!(folded(name), plain, "{name}");
    }
}

/// Composed and decomposed forms, and both cases, fold to the same text in every script.
#[test]
fn one_name_one_folded_form() {
    for (a, b) in [
        ("é", "e\u{301}"),
        ("ΠΑΠΑΣ", "Παπας"),
        ("ΕΛΕΝΗ", "Ελένη"),
        ("ФЁДОР", "Федор"),
        (
            "김민준",
            "\u{1100}\u{1175}\u{11B7}\u{1106}\u{1175}\u{11AB}\u{110C}\u{116E}\u{11AB}",
        ),
        ("ａｂｃ", "ABC"),
        ("مُحَمَّد", "محمد"),
    ] {
        assert_eq!(folded(a), folded(b), "{a} and {b}");
    }
    assert_ne!(folded("王"), folded("张"));
}

/// Nothing that moves a cursor, breaks a line or reorders text is left, and the length is bounded.
#[test]
fn shown_is_safe() {
    assert_eq!(shown("Nguyễn 王小明", 40), "Nguyễn 王小明");
    assert_eq!(shown("\u{1b}[2Jx", 40), "\u{FFFD}[2Jx");
    assert_eq!(
        shown("a\r\n\tb\0\u{7f}\u{9b}", 40),
        "a\u{FFFD}\u{FFFD}\u{FFFD}b\u{FFFD}\u{FFFD}\u{FFFD}"
    );
    assert_eq!(shown("abc", 3), "abc");
    assert_eq!(shown("abcd", 3), "abc…");
    assert_eq!(shown("", 0), "");
    for c in [
        '\u{202E}',
        '\u{2066}',
        '\u{200F}',
        '\u{061C}',
        '\u{2028}',
        '\u{2029}',
        '\u{FEFF}',
        '\u{E0041}',
    ] {
        assert!(is_unsafe(c), "{c:?}");
    }
    // Joiners are part of how Persian and Indian names are written.
    for c in ['\u{200C}', '\u{200D}', 'é', '王', '\u{301}'] {
        assert!(!is_unsafe(c), "{c:?}");
    }
}

/// A near miss is named, a far one is not.
#[test]
fn nearest_word() {
    let known = ["white_pupil", "new_squint", "nystagmus"];
    assert_eq!(nearest("white_pupl", known), Some("white_pupil"));
    assert_eq!(nearest("nystagmos", known), Some("nystagmus"));
    assert_eq!(nearest("broken arm", known), None);
}

proptest! {
    #![proptest_config(super::random(1_000))]

    #[test]
    fn any_text_is_shown_safely(text in any::<String>(), limit in 0_usize..60) {
        let out = shown(&text, limit);
        prop_assert!(!out.chars().any(is_unsafe));
        prop_assert!(out.chars().count() <= limit + 1);
    }

    #[test]
    fn folding_twice_changes_nothing(text in any::<String>()) {
        let once = folded(&text);
        prop_assert_eq!(folded(&once), once.clone());
        prop_assert!(!once.chars().any(is_unsafe));
    }
}
