//! Broken rule files: where, what, what was expected.

use twoline::rules::Library;

const SOUND: &str = r#"id = "quillmere"
title = "Quillmere"
edition = "1"
kind = "acuity"
approved_by = "Dr. R. Quill"
approved_on = "2026-08-01"

[[source]]
key = "board"
citation = "Quillmere school board"
basis = "practice"

[[criterion]]
id = "line.36-47"
ages = "36..48"
measure = "distance acuity, each eye"
refer = "worse than 20/50"
source = "board"

[[criterion]]
id = "line.48+"
ages = "48.."
measure = "distance acuity, each eye"
refer = "worse than 20/40"
source = "board"
"#;

fn errors(text: &str) -> String {
    match Library::shipped().with_local([("local.toml".to_owned(), text.to_owned())]) {
        Ok(_) => "no error".to_owned(),
        Err(errors) => errors.to_string(),
    }
}

#[test]
fn the_sound_file_is_sound() {
    assert_eq!(errors(SOUND), "no error");
}

#[test]
fn each_fault_is_named_where_it_stands() {
    let cases: &[(&str, &str, &[&str])] = &[
        (
            "measure = \"distance acuity, each eye\"\nrefer = \"worse than 20/50\"",
            "measure = \"distance acuty\"\nrefer = \"worse than 20/50\"",
            &[
                "local.toml:16:11",
                "unknown measure `distance acuty`",
                "one of distance acuity, each eye",
            ],
        ),
        (
            "refer = \"worse than 20/50\"",
            "refer = \"more than 4.00 D\"",
            &[
                "local.toml:17:9",
                "`more than 4.00 D` is not a threshold for distance acuity",
                "an acuity line",
            ],
        ),
        (
            "refer = \"worse than 20/50\"",
            "refer = \"worse than 20/55\"",
            &["local.toml:17:9"],
        ),
        (
            "title = ",
            "tittle = ",
            &[
                "local.toml:2:1",
                "unknown key `tittle`",
                "did you mean `title`?",
                "`title` is missing",
            ],
        ),
        (
            "id = \"line.48+\"\nages = \"48..\"",
            "id = \"line.50+\"\nages = \"50..\"",
            &[
                "local.toml:22:8",
                "a hole in the age bands of line: nothing for 48 to 49 months",
                "a band that starts at 48",
            ],
        ),
        (
            "id = \"line.48+\"\nages = \"48..\"",
            "id = \"line.40+\"\nages = \"40..\"",
            &[
                "local.toml:22:8",
                "age bands of line overlap from 40 months",
                "a band that starts at 48",
            ],
        ),
        (
            "ages = \"48..\"",
            "ages = \"49..\"",
            &["the id says 48+, the ages say 49+", "line.49+"],
        ),
        (
            "ages = \"48..\"",
            "ages = \"48-60\"",
            &["local.toml:22:8", "not an age band", "36..48"],
        ),
        (
            "source = \"board\"\n\n",
            "\n\n",
            &["local.toml:13:1", "`source` is missing"],
        ),
        (
            "source = \"board\"\n\n",
            "source = \"bord\"\n\n",
            &["local.toml:18:10", "no source `bord`", "one of board"],
        ),
        (
            "approved_on = \"2026-08-01\"",
            "approved_on = \"2026-02-30\"",
            &["local.toml:6:15", "not a date that can be"],
        ),
        (
            "approved_on = \"2026-08-01\"",
            "approved_on = 2026-02-30",
            &["local.toml:6:"],
        ),
        (
            "approved_on = \"2026-08-01\"\n",
            "",
            &["`approved_on` is missing", "licensed professional"],
        ),
        (
            "approved_by = \"Dr. R. Quill\"\n",
            "",
            &["`approved_by` is missing"],
        ),
        (
            "id = \"quillmere\"",
            "id = \"joint-policy-2016\"",
            &["local.toml:1:6", "the id `joint-policy-2016` is taken"],
        ),
        (
            "basis = \"practice\"",
            "basis = \"hearsay\"",
            &[
                "local.toml:11:9",
                "unknown basis `hearsay`",
                "primary, secondary, memory, practice",
            ],
        ),
        (
            "basis = \"practice\"",
            "basis = \"secondary\"",
            &["`quoted_in` is missing"],
        ),
        (
            "kind = \"acuity\"",
            "kind = \"acuties\"",
            &["local.toml:4:8", "unknown kind `acuties`"],
        ),
        (
            "id = \"line.48+\"",
            "id = \"line.36-47\"",
            &["stands twice"],
        ),
        (
            "edition = \"1\"",
            "edition = 1",
            &["local.toml:3:11", "a text in quotes"],
        ),
        (
            "kind = \"acuity\"",
            "kind = \"acuity",
            &["local.toml:4:", "not valid TOML"],
        ),
    ];
    for (from, to, wanted) in cases {
        assert!(SOUND.contains(from), "{from}");
        let found = errors(&SOUND.replacen(from, to, 1));
        for part in *wanted {
            assert!(found.contains(part), "{to}\nwanted {part}\nfound\n{found}");
        }
    }
}

#[test]
fn all_faults_of_a_file_come_at_once_with_line_and_caret() {
    let text = SOUND
        .replacen(
            "refer = \"worse than 20/50\"",
            "refer = \"more than 8 D\"",
            1,
        )
        .replacen("basis = \"practice\"", "basis = \"practise\"", 1)
        .replacen("ages = \"48..\"", "ages = \"50..\"", 1);
    insta::assert_snapshot!(errors(&text));
}

#[test]
fn a_protocol_that_names_what_is_not_there_is_refused() {
    let found = errors(
        "id = \"q\"\ntitle = \"Q\"\nedition = \"1\"\nkind = \"protocol\"\napproved_by = \"Dr. Q\"\n\
         approved_on = \"2026-08-01\"\nrule_sets = [\"joint-policy-1999\"]\n\
         required = [\"distance acuity, each eye\"]\nrefer_at_once = [\"red-reflex/blue\"]\n",
    );
    assert!(found.contains("local.toml:7:14"), "{found}");
    assert!(found.contains("no rule set `joint-policy-1999`"), "{found}");
    assert!(found.contains("no criterion `red-reflex/blue`"), "{found}");
}

#[test]
fn control_characters_do_not_reach_the_terminal() {
    let found = errors(&SOUND.replacen(
        "title = \"Quillmere\"",
        "titel\u{202e}x = \"\\u001b[2J\"",
        1,
    ));
    assert!(
        !found.chars().any(|c| c.is_control() && c != '\n'),
        "{found:?}"
    );
    assert!(!found.contains('\u{202e}'));
}

#[test]
fn text_that_is_no_rule_file_at_all_is_refused() {
    for text in [
        "",
        "\u{feff}",
        "[[[[",
        "kind = \"protocol\"",
        "kind = \"acuity\"\n",
        "a,b\n1,2\n",
        "x = \"\0\"",
    ] {
        assert_ne!(errors(text), "no error", "{text:?}");
    }
}
