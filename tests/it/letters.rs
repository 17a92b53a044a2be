//! Letters: every kind in every language, a programme's own files, and what is wrong with them.

#![allow(clippy::unwrap_used, clippy::print_stdout)]

mod printed;

use chrono::NaiveDate;
use twoline::domain::codes::Correction;
use twoline::domain::form_code::FormCode;
use twoline::domain::referral::LetterKind;
use twoline::domain::screening_test::ScreeningTest;
use twoline::reports::letters::{
    Because, Found, FoundValue, FoundValues, Letter, Letters, Messages, Sender,
};

fn day(text: &str) -> NaiveDate {
    text.parse().unwrap()
}

fn sender() -> Sender {
    Sender {
        programme: "Quillmere Schools".into(),
        who: "J. Imani, school nurse".into(),
        phone: "555 0142".into(),
        help: "Quillmere Sight Fund, 555 0199".into(),
        ..Sender::default()
    }
}

fn letter(kind: LetterKind, language: &str) -> Letter {
    Letter {
        kind,
        language: language.into(),
        child: "Ada Okafor".into(),
        born: Some(day("2020-09-01")),
        class: "1B".into(),
        site: "Quillmere East".into(),
        written_on: day("2026-10-15"),
        tested_on: Some(day("2026-10-14")),
        at_once: false,
        found: vec![
            Found {
                test: ScreeningTest::Distance,
                values: FoundValues::Eyes([
                    FoundValue::Value("20/20".into()),
                    FoundValue::NotTestable,
                ]),
            },
            Found {
                test: ScreeningTest::Stereo,
                values: FoundValues::Together(FoundValue::NotDone),
            },
        ],
        because: Because::NotPassed,
        correction: Some(Correction::LeftAtHome),
        by: Some(day("2026-10-28")),
        wrote_on: Some(day("2026-10-15")),
        call: Some(("Ngozi Okafor".into(), day("2026-10-14"))),
        code: Some(FormCode::new(48_291_356)),
        doctor: "Dr. P. Lindqvist".into(),
        outcome: "refer, routine".into(),
        interpreter: true,
    }
}

/// Takes out the marks that keep names of another direction together, and two escapes.
fn plain(html: &str) -> String {
    html.replace(['\u{2068}', '\u{2069}'], "")
        .replace("&#x2f;", "/")
        .replace("&#x27;", "'")
}

fn own(file: &str, text: &str) -> Vec<(String, String)> {
    vec![(file.to_owned(), text.to_owned())]
}

#[test]
fn no_language_lacks_a_message_and_none_has_one_that_nobody_asks_for() {
    let letters = Letters::with(&[]).unwrap();
    let languages: Vec<&str> = letters.messages().all().map(|l| l.code.as_str()).collect();
    assert_eq!(languages, ["ar", "en", "es", "vi"]);
    let ids = Messages::ids();
    assert!(ids.len() > 90, "{}", ids.len());
    for (code, text) in [
        (
            "en",
            include_str!("../../src/reports/letters/messages/en.ftl"),
        ),
        (
            "es",
            include_str!("../../src/reports/letters/messages/es.ftl"),
        ),
        (
            "ar",
            include_str!("../../src/reports/letters/messages/ar.ftl"),
        ),
        (
            "vi",
            include_str!("../../src/reports/letters/messages/vi.ftl"),
        ),
    ] {
        let here: Vec<&str> = text
            .lines()
            .filter(|l| !l.starts_with('#'))
            .filter_map(|l| l.split_once(" = ").map(|(id, _)| id))
            .collect();
        assert_eq!(here, ids, "{code}");
        // A message names the same places in every language.
        for id in &ids {
            let places = |text: &str| {
                let line = text
                    .lines()
                    .find(|l| l.split_once(" = ").is_some_and(|(i, _)| i == *id))
                    .unwrap();
                let mut places: Vec<String> = line
                    .split("{ $")
                    .skip(1)
                    .filter_map(|p| p.split(' ').next().map(str::to_owned))
                    .collect();
                places.sort();
                places.dedup();
                places
            };
            let english = include_str!("../../src/reports/letters/messages/en.ftl");
            assert_eq!(places(text), places(english), "{code} {id}");
        }
    }
}

#[test]
fn every_kind_prints_in_every_language() {
    let letters = Letters::with(&[]).unwrap();
    for language in ["en", "es", "ar", "vi"] {
        for kind in LetterKind::ALL {
            let html = letters
                .print(&[letter(*kind, language)], &sender())
                .unwrap();
            let text = plain(&html);
            assert!(text.contains("Ada Okafor"), "{language} {kind:?}");
            assert!(text.contains("1B"), "{language} {kind:?}");
            assert_eq!(html.matches("<article").count(), 1);
            assert!(
                !text.contains("{ $") && !text.contains("{{"),
                "{language} {kind:?}"
            );
            assert_eq!(
                text.contains("draft: have a speaker check"),
                language != "en",
                "{language} {kind:?}"
            );
            let right_to_left = language == "ar";
            assert_eq!(html.contains(r#"lang="ar" dir="rtl""#), right_to_left);
            // "A screening, not an examination" is on everything a family reads.
            if *kind != LetterKind::ExamForm {
                let said = letters
                    .messages()
                    .language(language)
                    .unwrap()
                    .text("not-an-exam", &[])
                    .unwrap();
                assert!(text.contains(&said), "{language} {kind:?}");
            }
        }
    }
}

#[test]
fn a_referral_letter_says_what_a_family_needs() {
    let letters = Letters::with(&[]).unwrap();
    let html = plain(
        &letters
            .print(&[letter(LetterKind::Referral, "en")], &sender())
            .unwrap(),
    );
    for words in [
        "On 14 October 2026 we tested the eyesight of Ada Okafor at Quillmere East.",
        "Ada Okafor owns glasses and did not wear them during the test.",
        "20/20",
        "could not be tested",
        "not tested",
        "Call an eye doctor who sees children.",
        "Please go by 28 October 2026.",
        "Help with the cost: Quillmere Sight Fund, 555 0199",
        "My child has already been examined.",
        "We decline an examination.",
        "Questions? J. Imani, school nurse, 555 0142",
        "You can ask for an interpreter.",
    ] {
        assert!(html.contains(words), "{words}\n{html}");
    }
    assert!(html.contains(&FormCode::new(48_291_356).to_string()));
    assert!(html.contains("<svg"));
    // Right comes first.
    assert!(html.find("Right eye") < html.find("Left eye"));
}

#[test]
fn what_is_not_known_is_left_out_and_an_approved_translation_is_no_draft() {
    let letters = Letters::with(&[]).unwrap();
    let bare = Letter {
        born: None,
        by: None,
        wrote_on: None,
        call: None,
        code: None,
        correction: None,
        ..letter(LetterKind::Second, "es")
    };
    let approved = Sender {
        phone: String::new(),
        help: String::new(),
        approved: [("es".to_owned(), "A. Solano, 2026-09-01".to_owned())].into(),
        ..sender()
    };
    let html = plain(&letters.print(&[bare], &approved).unwrap());
    assert!(!html.contains("draft: have"));
    assert!(html.contains("No anotamos si llevaba lentes."));
    assert!(!html.contains("Ayuda con el costo"));
    assert!(!html.contains("<svg"));
}

#[test]
fn names_cannot_become_markup_and_letters_stand_on_pages_of_their_own() {
    let letters = Letters::with(&[]).unwrap();
    let mut odd = letter(LetterKind::Passed, "en");
    odd.child = "<b>Bobby & \"Tables\"</b>".into();
    let html = letters
        .print(&[odd, letter(LetterKind::Passed, "ar")], &sender())
        .unwrap();
    assert!(!html.contains("<b>Bobby"));
    assert!(html.contains("&lt;b&gt;Bobby &amp;"));
    assert_eq!(html.matches("<article").count(), 2);
    assert!(html.contains("break-after: page"));
}

#[test]
fn a_programme_changes_words_and_templates_by_files_of_the_same_name() {
    let mine = [
        (
            "en.ftl".to_owned(),
            "result-passed = All well, { $child }.\n".to_owned(),
        ),
        (
            "color.html".to_owned(),
            "<p>{{ t(\"result-color\", child=child) }}!</p>".to_owned(),
        ),
    ];
    let letters = Letters::with(&mine).unwrap();
    let passed = plain(
        &letters
            .print(&[letter(LetterKind::Passed, "en")], &sender())
            .unwrap(),
    );
    assert!(passed.contains("All well, Ada Okafor."));
    let color = plain(
        &letters
            .print(&[letter(LetterKind::Color, "en")], &sender())
            .unwrap(),
    );
    assert!(color.contains("named in words.!"), "{color}");
}

#[test]
fn a_fifth_language_is_one_file_and_names_what_it_lacks() {
    let english = include_str!("../../src/reports/letters/messages/en.ftl");
    let german = english
        .replace("language-name = English", "language-name = Deutsch")
        .replace(
            "result-passed = { $child } passed.",
            "result-passed = { $child } hat bestanden.",
        );
    let letters = Letters::with(&own("de.ftl", &german)).unwrap();
    let html = plain(
        &letters
            .print(&[letter(LetterKind::Passed, "de")], &sender())
            .unwrap(),
    );
    assert!(html.contains("Ada Okafor hat bestanden."));
    assert!(html.contains("draft: have a speaker check"));
    assert_eq!(letters.messages().spoken("Deutsch").unwrap().code, "de");
    let short = german
        .replace("month-5 = May\n", "")
        .replace("title-color", "title-colour");
    let error = Letters::with(&own("de.ftl", &short))
        .unwrap_err()
        .to_string();
    assert!(error.contains("de.ftl"), "{error}");
    assert!(error.contains("lacks 2 of"), "{error}");
    assert!(error.contains("month-5, title-color"), "{error}");
}

#[test]
fn rosters_name_languages_in_several_ways() {
    let letters = Letters::with(&[]).unwrap();
    let code = |text: &str| letters.messages().spoken(text).map(|l| l.code.clone());
    for (text, expected) in [
        ("es", "es"),
        ("es-MX", "es"),
        ("Spanish", "es"),
        ("Español", "es"),
        ("ARABIC", "ar"),
        ("العربية", "ar"),
        ("vi", "vi"),
        ("Tiếng Việt", "vi"),
        ("English", "en"),
    ] {
        assert_eq!(code(text).as_deref(), Some(expected), "{text}");
    }
    assert_eq!(code("Hmong"), None);
    assert_eq!(code(""), None);
}

#[test]
fn an_unknown_field_is_shown_with_line_and_caret() {
    let letters = Letters::with(&own(
        "passed.html",
        "<h1>{{ title }}</h1>\n<p>Dear {{ chld }},</p>\n",
    ))
    .unwrap();
    let error = letters
        .print(&[letter(LetterKind::Passed, "en")], &sender())
        .unwrap_err()
        .to_string();
    assert_eq!(
        error,
        "passed.html:2:12: no field is called chld; did you mean child?\n  <p>Dear {{ chld }},</p>\n             ^^^^"
    );
}

#[test]
fn what_cannot_be_read_is_shown_with_its_line() {
    let error = Letters::with(&own("passed.html", "<p>\n{% if %}</p>")).unwrap_err();
    assert_eq!(
        (error.file.as_str(), error.line),
        ("passed.html", 2),
        "{error}"
    );
    let error = Letters::with(&own("en.ftl", "result-passed = ok\n= nothing\n")).unwrap_err();
    assert_eq!((error.file.as_str(), error.line), ("en.ftl", 2), "{error}");
    let letters = Letters::with(&own("en.ftl", "result-passed = Well, { $chlid }.\n")).unwrap();
    let error = letters
        .print(&[letter(LetterKind::Passed, "en")], &sender())
        .unwrap_err()
        .to_string();
    assert!(error.contains("result-passed"), "{error}");
    let error = letters
        .print(&[letter(LetterKind::Passed, "xx")], &sender())
        .unwrap_err()
        .to_string();
    assert!(error.contains("there are ar, en, es, vi"), "{error}");
}
