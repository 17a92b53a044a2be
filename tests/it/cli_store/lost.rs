//! Lost children: referred in an earlier term or at another site, and never examined.

use super::follow_up::referred;
use super::{Bench, ROSTER};

/// A day of the next term.
const SPRING: &str = "2027-02-01";

/// Okafor, Ada was referred in autumn; now it is spring.
fn next_term() -> Bench {
    let bench = referred();
    bench.ok(&[
        "term",
        "add",
        "2027-spring",
        "--from",
        "2027-01-07",
        "--to",
        "2027-06-12",
    ]);
    bench
}

fn lost(bench: &Bench, date: &str) -> String {
    bench.on(date, &["refer", "list", "--lost"])
}

#[test]
fn a_child_referred_in_an_earlier_term_is_back_on_the_list() {
    let bench = next_term();
    // In its own term, to the last day, it is not lost.
    assert!(lost(&bench, "2026-12-31").contains("no lost child"));
    let shown = bench.on("2026-12-31", &["child", "show", "Q-2"]);
    assert!(!shown.contains("lost"), "{shown}");

    let why = "referred 14 Oct 2026 in an earlier term (2026-autumn); no examination is known";
    let list = lost(&bench, SPRING);
    assert!(list.contains("1 lost child"), "{list}");
    assert!(list.contains("Okafor, Ada") && list.contains(why), "{list}");
    let shown = bench.on(SPRING, &["child", "show", "Q-2"]);
    let line = shown
        .lines()
        .find(|l| l.trim_start().starts_with("lost"))
        .expect("a line");
    assert!(line.contains(why) && line.contains("; code "), "{line}");
    let shown = bench.on(SPRING, &["child", "show", "Q-1"]);
    assert!(!shown.contains("lost"), "{shown}");

    // Closed for a reason it is not lost, and opened again it is.
    bench.on(SPRING, &["step", "Q-2", "closed", "--closing", "declined"]);
    assert!(lost(&bench, SPRING).contains("no lost child"));
    bench.on(SPRING, &["step", "Q-2", "reopened"]);
    assert!(lost(&bench, SPRING).contains("1 lost child"));
    // A letter or a call does not find it; an examination does.
    bench.on(
        SPRING,
        &[
            "step",
            "Q-2",
            "call",
            "--result",
            "reached",
            "--by",
            "telephone",
        ],
    );
    assert!(lost(&bench, SPRING).contains("1 lost child"));
    bench.on(
        SPRING,
        &[
            "exam",
            "add",
            "Q-2",
            "examined_on=2027-01-20",
            "no_abnormality=yes",
        ],
    );
    assert!(lost(&bench, SPRING).contains("no lost child"));
}

#[test]
fn a_child_that_went_to_another_site_is_on_the_list_with_both() {
    let bench = referred();
    bench.ok(&["refer", "open", "Q-1", "--reason", "teacher's concern"]);
    bench.ok(&["site", "add", "QW", "--name", "Quillmere West"]);
    bench.write(
        "moved.csv",
        ROSTER.replace("2020-09-01,1,QE,1B", "2020-09-01,1,QW,1A"),
    );
    bench.ok(&["roster", "add", "moved.csv", "--yes"]);
    let list = lost(&bench, super::TODAY);
    assert!(list.contains("1 lost child"), "{list}");
    assert!(
        list.contains("referred at QE, now at QW; no examination is known"),
        "{list}"
    );
    for (site, found) in [("QE", true), ("QW", true), ("QX", false)] {
        let out = bench.ok(&["refer", "list", "--lost", "--site", site]);
        assert_eq!(out.contains("Okafor"), found, "{site}: {out}");
    }
    let shown = bench.ok(&["child", "show", "Q-2"]);
    assert!(shown.contains("referred at QE, now at QW"), "{shown}");
}

#[test]
fn an_examination_on_the_roster_counts_when_it_came_after_the_referral() {
    let bench = next_term();
    let roster = |examined: &str| {
        ROSTER
            .lines()
            .enumerate()
            .map(|(n, line)| match n {
                0 => format!("{line},last_exam_on\n"),
                2 => format!("{line},{examined}\n"),
                _ => format!("{line},\n"),
            })
            .collect::<String>()
    };
    bench.write("roster.csv", roster("2026-05-02"));
    bench.on(SPRING, &["roster", "add", "roster.csv", "--yes"]);
    assert!(lost(&bench, SPRING).contains("1 lost child"));
    bench.write("roster.csv", roster("2026-11-30"));
    bench.on(SPRING, &["roster", "add", "roster.csv", "--yes"]);
    assert!(lost(&bench, SPRING).contains("no lost child"));
}

#[test]
fn a_referral_by_hand_is_lost_with_its_term_too() {
    let bench = next_term();
    bench.ok(&["refer", "open", "Q-1", "--reason", "teacher's concern"]);
    let list = lost(&bench, SPRING);
    assert!(list.contains("2 lost children"), "{list}");
    let shown = bench.on(SPRING, &["child", "show", "Q-1"]);
    assert!(
        shown.contains("in an earlier term (2026-autumn)"),
        "{shown}"
    );
}
