//! What is said of a child, word for word: each sentence was read against the rule file it names.

use std::fmt::Write;

use super::support::child;
use twoline::domain::age::AgeMonths;
use twoline::rules::grading::{Clinical, severity, triage};
use twoline::rules::{Library, explain, show};

/// Rule set or protocol, completed months, readings. Sources and basis stand in the sentences.
const CHILDREN: &[(&str, u32, &str)] = &[
    // A chart: at the limit, past it, with a letter missed, off the chart, at another distance.
    (
        "joint-policy-2016",
        72,
        "distance_right=20/32 distance_left=20/32",
    ),
    (
        "joint-policy-2016",
        72,
        "distance_right=20/40 distance_left=20/32-2",
    ),
    (
        "joint-policy-2016",
        40,
        "distance_right=20/50-3 distance_left=20/50",
    ),
    (
        "joint-policy-2016",
        72,
        "distance_right=20/20 distance_left=20/32",
    ),
    (
        "joint-policy-2016",
        72,
        "distance_right=20/16 distance_left=20/32",
    ),
    (
        "joint-policy-2016",
        72,
        "distance_right=20/20 distance_left=CF",
    ),
    (
        "joint-policy-2016",
        72,
        "distance_right=>=20/32 distance_left=20/20",
    ),
    (
        "joint-policy-2016",
        72,
        "distance_right=20/20 chart_distance_ft=10 used_distance_ft=5 distance_left=20/63",
    ),
    (
        "england-school-entry",
        60,
        "distance_right=6/9.5-1 distance_left=6/9",
    ),
    (
        "england-school-entry",
        60,
        "distance_right=0.200l distance_left=0.180l",
    ),
    (
        "nsw-preschool",
        50,
        "distance_right=6/9-2 distance_left=6/9-1",
    ),
    ("nsw-preschool", 50, "distance_right=6/18 distance_left=6/9"),
    ("new-zealand-4y", 50, "distance_right=6/9 distance_left=6/6"),
    (
        "arizona-school",
        72,
        "distance_right=20/20 distance_left=20/25 near_right=20/40 near_left=20/32",
    ),
    // An instrument: at the limit, past it, one eye, both, oblique, through glasses, half done.
    (
        "instrument-2021",
        60,
        "sphere_right=+4.00 cylinder_right=0 sphere_left=+3.50 cylinder_left=0",
    ),
    (
        "instrument-2021",
        60,
        "sphere_right=+4.25 cylinder_right=0 sphere_left=+4.50 cylinder_left=0",
    ),
    (
        "instrument-2021",
        60,
        "sphere_right=+1.00 cylinder_right=-0.50 axis_right=180 sphere_left=-2.25 cylinder_left=0",
    ),
    (
        "instrument-2021",
        60,
        "sphere_right=0 cylinder_right=-1.50 axis_right=90 sphere_left=0 cylinder_left=-1.50 axis_left=180",
    ),
    (
        "instrument-2021",
        60,
        "sphere_right=>7.50 cylinder_right=0 sphere_left=+1.00",
    ),
    (
        "instrument-2021",
        60,
        "instrument_worn=yes sphere_right=+5.00 cylinder_right=0 sphere_left=0 cylinder_left=0",
    ),
    (
        "instrument-2003",
        60,
        "sphere_right=0 cylinder_right=-1.25 axis_right=45 sphere_left=0 cylinder_left=-1.25 axis_left=100",
    ),
    (
        "instrument-2003",
        60,
        "sphere_right=0 cylinder_right=-1.75 axis_right=90 sphere_left=+0.75 cylinder_left=0 opacity_mm_left=1.5 reflex_distance_mm_right=1 reflex_distance_mm_left=4",
    ),
    (
        "instrument-2021",
        60,
        "cover=none deviation_pd=9 opacity_mm_right=0.5 opacity_mm_left=1",
    ),
    ("instrument-2021", 60, "cover=intermittent deviation_pd=6"),
    ("cover-test", 60, "cover=phoria"),
    // Counted tests.
    ("stereo-random-dot-e", 60, "stereo_correct=3 stereo_shown=6"),
    ("stereo-random-dot-e", 60, "stereo_correct=5 stereo_shown=6"),
    ("color-plates", 100, "plates_missed=2 plates_shown=9"),
    ("plus-lens-2.50", 72, "correction_worn=none plus_lens=read"),
    ("plus-lens-2.50", 72, "correction_worn=yes plus_lens=read"),
    // Signs, and a protocol's own lines.
    ("urgent-signs", 60, "signs=white_pupil:right;nystagmus"),
    ("urgent-signs", 60, "signs=new_squint;lost_red_reflex"),
    (
        "red-reflex",
        60,
        "red_reflex_right=dull red_reflex_left=normal",
    ),
    (
        "us-school",
        60,
        "signs=none history=none distance_right=NT:shy distance_left=20/20",
    ),
    (
        "us-school",
        60,
        "signs=none history=none testable=no not_testable_reason=fatigue sphere_right=0 cylinder_right=0 sphere_left=0 cylinder_left=0",
    ),
    (
        "us-school",
        60,
        "signs=none history=none correction_worn=left_at_home distance_right=20/63 distance_left=20/20",
    ),
    (
        "us-school",
        60,
        "signs=none history=family_amblyopia distance_right=20/20 distance_left=20/20",
    ),
    (
        "us-school",
        80,
        "signs=none history=family_amblyopia distance_right=20/20 distance_left=20/20 correction_worn=none plus_lens=blurred",
    ),
    ("us-school", 80, "distance_right=20/20"),
    (
        "us-preschool",
        200,
        "distance_right=20/20 distance_left=20/20 signs=none",
    ),
];

#[test]
fn what_is_said_of_a_child() {
    let mut out = String::new();
    for (by, age, readings) in CHILDREN {
        let child = child(*age, readings);
        let outcome = if Library::shipped().protocol(by).is_some() {
            child.by_protocol(by)
        } else {
            child.by_set(by)
        };
        let mut reasons = String::new();
        explain::reasons_text(&outcome, &mut reasons);
        writeln!(out, "{by}, {age} months: {readings}").unwrap();
        writeln!(out, "  {}", explain::headline(&outcome)).unwrap();
        writeln!(out, "  short    {}", explain::short(&outcome)).unwrap();
        writeln!(out, "  reasons  {reasons}").unwrap();
        for row in explain::table(&outcome)
            .iter()
            .filter(|r| !r.margin.is_empty() || !r.change.is_empty())
        {
            let parts = [&row.margin, &row.change, &row.note];
            let parts: Vec<&str> = parts
                .iter()
                .map(|p| p.as_str())
                .filter(|p| !p.is_empty())
                .collect();
            writeln!(
                out,
                "  {}: {}; {}",
                row.criterion,
                row.said,
                parts.join("; ")
            )
            .unwrap();
        }
        out.push('\n');
    }
    insta::assert_snapshot!(out);
}

#[test]
fn the_whole_reason() {
    let mut out = String::new();
    for (age, readings) in [
        (
            73,
            "signs=none distance_right=20/20 distance_left=20/32 correction_worn=none",
        ),
        (
            30,
            "signs=white_pupil:left sphere_right=+1.00 cylinder_right=0 sphere_left=+4.25 cylinder_left=-0.25 axis_left=90",
        ),
    ] {
        let outcome = child(age, readings).by_protocol("us-school");
        writeln!(out, "{readings}\n{}\n", explain::whole(&outcome).join("\n")).unwrap();
    }
    insta::assert_snapshot!(out);
}

#[test]
fn what_is_said_of_a_group_or_band() {
    let mut out = String::new();
    for (table, age, text) in [
        (
            "preschool-groups",
            50,
            "cover=intermittent deviation_pd=12 deviating_eye=left distance_right=20/20 distance_left=20/63 sphere_right=+1.00 cylinder_right=-1.75 axis_right=90 sphere_left=+4.00 cylinder_left=0",
        ),
        (
            "preschool-groups",
            50,
            "cover=none distance_right=20/20 distance_left=20/100",
        ),
        (
            "preschool-groups",
            50,
            "cover=none distance_right=20/50 distance_left=20/63 sphere_right=-0.50 cylinder_right=0 sphere_left=>7.50 cylinder_left=0",
        ),
        (
            "nsw-strabismus",
            60,
            "signs=new_squint distance_right=6/6 distance_left=6/12",
        ),
        (
            "queensland-strabismus",
            60,
            "signs=eye_injury cover=constant",
        ),
        (
            "south-australia-acuity",
            60,
            "signs=none distance_right=6/12 distance_left=6/6",
        ),
    ] {
        let readings = super::support::readings(text);
        let facts = Clinical::of_screening(Some(AgeMonths(age)), &readings);
        let grading = Library::shipped().grading(table).unwrap();
        let graded = if table == "preschool-groups" {
            severity(grading, &facts)
        } else {
            triage(grading, &facts)
        };
        writeln!(out, "{table}, {age} months: {text}").unwrap();
        for (word, list) in [("is", &graded.spoke), ("could be", &graded.could_be)] {
            for spoke in list {
                writeln!(
                    out,
                    "  {word} {} ({}): {}; {} {:?}",
                    spoke.level.in_words(),
                    spoke.entry,
                    spoke.threshold,
                    spoke.reading,
                    spoke.remarks
                )
                .unwrap();
            }
        }
        out.push('\n');
    }
    insta::assert_snapshot!(out);
}

#[test]
fn sheets_as_they_are_read_aloud() {
    let library = Library::shipped();
    let mut out = String::new();
    let mut add = |sheet: show::RuleSheet, line: String| {
        writeln!(out, "{line}\n{} · {}", sheet.title, sheet.edition).unwrap();
        writeln!(out, "columns: {}", sheet.columns.join(" | ")).unwrap();
        for (finding, cells) in &sheet.rows {
            writeln!(out, "{finding}: {}", cells.join(" | ")).unwrap();
        }
        for (name, lines) in [
            ("credit", &vec![sheet.line_credit]),
            ("source", &sheet.sources),
            ("note", &sheet.notes),
        ] {
            for line in lines.iter().filter(|l| !l.is_empty()) {
                writeln!(out, "{name}: {line}").unwrap();
            }
        }
        out.push('\n');
    };
    for id in [
        "joint-policy-2016",
        "missouri-school",
        "nsw-preschool",
        "instrument-2003",
        "red-reflex",
        "stereo-random-dot-e",
        "texas-school",
    ] {
        let set = library.rule_set(id).unwrap();
        add(show::sheet(set), show::list_line(set));
    }
    for grading in library.gradings() {
        add(show::grading_sheet(grading), show::grading_line(grading));
    }
    for protocol in library.protocols() {
        writeln!(out, "{}\n", show::protocol_lines(protocol).join("\n")).unwrap();
    }
    insta::assert_snapshot!(out);
}
