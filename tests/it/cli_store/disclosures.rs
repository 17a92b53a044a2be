//! The disclosure log (34 CFR 99.32): each child of each file that leaves, and nothing of what stays.

use std::collections::HashMap;

use super::Bench;
use super::follow_up::referred;

impl Bench {
    /// The disclosure log by column.
    fn disclosed(&self, args: &[&str]) -> Vec<HashMap<String, String>> {
        let mut all = vec!["report", "disclosures"];
        all.extend(args);
        let out = self.ok(&all);
        csv::Reader::from_reader(out.trim_start_matches('\u{feff}').as_bytes())
            .deserialize()
            .map(|row| row.expect("CSV"))
            .collect()
    }
}

#[test]
fn a_file_that_leaves_is_entered_for_each_child_in_it() {
    let bench = referred();
    // For the programme itself: nothing is entered, and the text beside the file says so.
    bench.ok(&["report", "day", "-o", "own.csv"]);
    assert!(
        bench
            .read("own.csv.about.txt")
            .contains("For the programme's own use")
    );
    assert!(bench.disclosed(&[]).is_empty());
    let head = bench.head();

    let leaves = ["--recipient", "Alder Clinic", "--purpose", "examination"];
    let with = |args: &[&'static str]| [args, &leaves].concat();
    bench.ok(&with(&["report", "referrals", "-o", "to_alder.csv"]));
    let about = bench.read("to_alder.csv.about.txt");
    assert!(
        about.contains("For Alder Clinic. Purpose: examination."),
        "{about}"
    );
    assert!(!about.contains("own use"), "{about}");
    assert_ne!(bench.head(), head);
    let log = bench.disclosed(&[]);
    let [one] = &log[..] else { panic!("{log:?}") };
    for (column, value) in [
        ("disclosed_on", "2026-10-14"),
        ("child_id", "Q-2"),
        ("family_name", "Okafor"),
        ("recipient", "Alder Clinic"),
        ("purpose", "examination"),
        ("file", "to_alder.csv"),
        ("disclosed_by", "J. Imani"),
    ] {
        assert_eq!(one[column], value, "{column}");
    }
    assert!(one["what"].starts_with("Referrals, "), "{one:?}");

    // The day report holds every child of the day; standard output leaves as well.
    let out = bench.run(&with(&["report", "day"]));
    assert_eq!(out.code, 0, "{}", out.err);
    assert!(
        out.err.contains("5 children entered in the disclosure log"),
        "{}",
        out.err
    );
    let in_report = bench.report(&[]).len();
    assert_eq!(bench.disclosed(&[]).len(), 1 + in_report);
    let of_child = bench.disclosed(&["--child", "Q-2"]);
    assert_eq!(of_child.len(), 2);
    assert_eq!(of_child[1]["file"], "");
    let text = bench.ok(&[
        "report",
        "disclosures",
        "--child",
        "Q-2",
        "--format",
        "text",
    ]);
    assert!(text.contains("Disclosures of Q-2"), "{text}");
    assert!(
        text.contains("to Alder Clinic, for examination; file to_alder.csv; by J. Imani"),
        "{text}"
    );
    // Lists for the door and class lists name the opted out too.
    let door = with(&["report", "children", "-o", "list.html", "--format", "html"]);
    let sheet = with(&["report", "sheet", "-o", "list.html", "--format", "html"]);
    for (args, what) in [(door, "At the door, "), (sheet, "Class lists, ")] {
        bench.ok(&args);
        let log = bench.disclosed(&["--child", "Q-5"]);
        assert!(
            log.iter().any(|row| row["what"].starts_with(what)),
            "{log:?}"
        );
        assert!(bench.read("list.html").contains("Idris"));
    }
    let before = bench.disclosed(&[]).len();
    let text = bench.ok(&with(&["report", "referrals", "--format", "text"]));
    assert!(text.contains("Okafor"), "{text}");
    assert_eq!(bench.disclosed(&[]).len(), before + 1);
    bench.ok(&["verify"]);
}

#[test]
fn what_is_half_said_or_cannot_be_written_enters_nothing() {
    let bench = referred();
    let head = bench.head();
    let day = ["report", "day", "-o", "day.csv"];
    let with = |more: &[&'static str]| [&day, more].concat();
    let err = bench.refused(&with(&["--recipient", "Alder Clinic"]));
    assert!(err.contains("--purpose"), "{err}");
    let err = bench.refused(&with(&["--purpose", "examination"]));
    assert!(err.contains("--recipient"), "{err}");
    let err = bench.refused(&with(&["--recipient", " ", "--purpose", "x"]));
    assert!(err.contains("the recipient is a line"), "{err}");
    let err = bench.refused(&with(&["--recipient", "A", "--purpose", "x\u{1b}[2J"]));
    assert!(err.contains("the purpose is a line"), "{err}");
    assert!(!bench.path("day.csv").exists());
    // A folder that is not there: no file leaves, and no entry says that one did.
    let ran = bench.run(&[
        "report",
        "day",
        "-o",
        "nowhere/day.csv",
        "--recipient",
        "A",
        "--purpose",
        "x",
    ]);
    assert_eq!(ran.code, 1, "{}", ran.err);
    let err = bench.refused(&["report", "disclosures", "--child", "Q-99"]);
    assert!(err.contains("no child has the id"), "{err}");
    assert!(bench.disclosed(&[]).is_empty());
    assert_eq!(bench.head(), head);
}

#[test]
fn a_letter_to_the_doctor_says_who_gets_it_and_a_letter_home_does_not() {
    let bench = referred();
    bench.ok(&["letters", "-o", "home.html"]);
    assert!(bench.disclosed(&[]).is_empty());
    let head = bench.head();
    let letter = ["letters", "--kind", "to_doctor", "--child", "Q-2"];
    let with = |more: &[&'static str]| [&letter, more].concat();
    // Without -o it is only listed.
    bench.ok(&letter);
    let err = bench.refused(&with(&["--recipient", "Dr A. Hale", "--purpose", "care"]));
    assert!(err.contains("without -o"), "{err}");
    // There is no terminal to ask on.
    let err = bench.refused(&with(&["-o", "doctor.html"]));
    assert!(err.contains("leaves the programme"), "{err}");
    assert!(err.contains("--recipient and --purpose"), "{err}");
    assert!(!bench.path("doctor.html").exists());
    assert_eq!(bench.head(), head);
    bench.ok(&with(&[
        "-o",
        "doctor.html",
        "--recipient",
        "Dr A. Hale",
        "--purpose",
        "care of the child",
    ]));
    assert!(bench.path("doctor.html").exists());
    let log = bench.disclosed(&["--child", "Q-2"]);
    let [one] = &log[..] else { panic!("{log:?}") };
    assert_eq!(one["recipient"], "Dr A. Hale");
    assert_eq!(one["what"], "letter: result to the child's doctor");
    assert_eq!(one["file"], "doctor.html");
}
