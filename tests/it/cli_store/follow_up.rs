//! From refer to treated, from the command line: letter, call, report, wear of glasses.
//!
//! Intervals are the defaults of the settings (Colorado's 10 days for a parent notice: secondary;
//! second letter after four weeks, three attempts, six weeks for wear: common practice; six months:
//! IAPB school guidelines, secondary).

use twoline::actions::{Desk, DeskOptions, Secret, UrgentAnswer};

use super::Bench;

/// A day on which Okafor, Ada was referred: her third line between the eyes refers at once.
pub(super) fn referred() -> Bench {
    let bench = Bench::on_a_day("us-school", "threshold");
    let out = bench.ok(&[
        "record",
        "Q-2",
        "correction_worn=none",
        "distance_right=20/20",
        "distance_left=20/100",
        "signs=none",
        "--sign",
    ]);
    assert!(out.contains("REFER"), "{out}");
    bench
}

impl Bench {
    pub(super) fn on(&self, date: &str, args: &[&str]) -> String {
        let mut command = std::process::Command::new(env!("CARGO_BIN_EXE_twoline"));
        let out = command
            .current_dir(self.folder.path())
            .env_remove("TWOLINE_PASSPHRASE_FILE")
            .env("TWOLINE_STORE", self.path("store"))
            .args(args)
            .args(["--today", date])
            .output()
            .expect("the program runs");
        assert!(
            out.status.success(),
            "{args:?}\n{}",
            String::from_utf8_lossy(&out.stderr)
        );
        String::from_utf8_lossy(&out.stdout).into_owned()
    }
}

pub(super) fn code_in(text: &str) -> String {
    let at = text.find("code ").expect("a code") + 5;
    text[at..]
        .lines()
        .next()
        .unwrap()
        .chars()
        .filter(char::is_ascii_digit)
        .collect()
}

#[test]
fn a_child_is_carried_from_refer_to_treated() {
    let bench = referred();
    let list = bench.ok(&["refer", "list"]);
    assert!(list.contains("1 referrals, 0 overdue"), "{list}");
    assert!(list.contains("print the referral letter"), "{list}");

    let code = code_in(&bench.ok(&["refer", "show", "Q-2"]));
    assert_eq!(code.len(), 10);
    let out = bench.ok(&["letters", "-o", "due.html"]);
    assert!(out.contains("exam report form"), "{out}");
    assert!(out.contains("missing:"), "{out}");
    let html = bench.read("due.html");
    assert_eq!(html.matches("<article").count(), 2);
    assert!(html.contains("Quillmere East"));
    // Printed once, it is not due again; it waits to be sent.
    assert!(bench.ok(&["letters"]).contains("no letter is due"));
    assert!(
        bench
            .ok(&["refer", "list"])
            .contains("send the referral letter")
    );

    bench.ok(&[
        "step",
        &code,
        "letter_sent",
        "--letter",
        "referral",
        "--by",
        "post",
    ]);
    let out = bench.on("2026-11-12", &["letters"]);
    assert!(out.contains("second notice"), "{out}");
    let out = bench.on(
        "2026-11-15",
        &[
            "step",
            &code,
            "call",
            "--result",
            "no_answer",
            "--by",
            "telephone",
        ],
    );
    assert!(out.contains("call, no answer (by telephone)"), "{out}");
    bench.on(
        "2026-11-20",
        &["step", &code, "appointment", "--due", "2026-12-02"],
    );
    let out = bench.on("2026-11-21", &["refer", "list"]);
    assert!(out.contains("ask whether the child was examined"), "{out}");

    let out = bench.on(
        "2026-12-09",
        &[
            "exam",
            "add",
            &code,
            "examined_on=2026-12-02",
            "best_right=20",
            "best_left=20/50",
            "sphere_right=+1.00",
            "cylinder_right=0",
            "sphere_left=+4.50",
            "cylinder_left=0",
            "amblyopia_left=present",
            "findings=H53.022",
            "treatment=glasses",
        ],
    );
    assert!(out.contains("closed: examined, examiner's form"), "{out}");
    assert!(out.contains("confirmed: amblyopia, left eye"), "{out}");
    assert!(out.contains("treatment started: glasses"), "{out}");
    assert!(
        out.contains("look in class: are the glasses worn?"),
        "{out}"
    );
    bench.on(
        "2027-01-15",
        &["step", &code, "glasses_seen", "--worn", "yes"],
    );
    let out = bench.on(
        "2027-06-03",
        &["step", &code, "wear_checked", "--worn", "yes"],
    );
    assert!(!out.contains("next:"), "{out}");
    assert!(
        bench
            .on("2027-06-04", &["refer", "list"])
            .contains("0 referrals")
    );
    assert!(
        bench
            .on("2027-06-04", &["refer", "list", "--all"])
            .contains("examined")
    );
    bench.ok(&["verify"]);
}

#[test]
fn what_cannot_be_is_refused_and_nothing_is_written() {
    let bench = referred();
    let code = code_in(&bench.ok(&["refer", "show", "Q-2"]));
    let head = bench.head();
    // A mistyped code names the near ones; the child is not guessed.
    let mut wrong = code.clone().into_bytes();
    wrong[3] = if wrong[3] == b'9' { b'0' } else { wrong[3] + 1 };
    let wrong = String::from_utf8(wrong).unwrap();
    let err = bench.refused(&["exam", "add", &wrong, "examined_on=2026-10-14"]);
    assert!(err.contains("a digit is wrong"), "{err}");
    assert!(err.contains("Okafor, Ada"), "{err}");
    let err = bench.refused(&["exam", "add", "0000000000", "examined_on=2026-10-14"]);
    assert!(
        err.contains("is not a form code") || err.contains("no referral"),
        "{err}"
    );
    // Examined before referred; every wrong field is named, not only the first.
    let err = bench.refused(&[
        "exam",
        "add",
        &code,
        "examined_on=2026-10-13",
        "cylinder_left=-1.00",
    ]);
    assert!(err.contains("examined_on"), "{err}");
    assert!(err.contains("axis_left"), "{err}");
    let err = bench.refused(&[
        "exam",
        "add",
        &code,
        "examined_on=2026-10-14",
        "sphere_left=99",
    ]);
    assert!(err.contains("sphere_left"), "{err}");
    let err = bench.refused(&["exam", "add", &code, "examinedon=2026-10-14"]);
    assert!(err.contains("did you mean examined_on?"), "{err}");
    let err = bench.refused(&["step", &code, "closed"]);
    assert!(err.contains("why it is closed"), "{err}");
    let err = bench.refused(&[
        "step",
        &code,
        "call",
        "--result",
        "reached",
        "--on",
        "2026-10-20",
    ]);
    assert!(err.contains("after today"), "{err}");
    let err = bench.refused(&["refer", "open", "Q-2", "--reason", "again"]);
    assert!(err.contains("open referral already"), "{err}");
    let err = bench.refused(&["refer", "open", "Q-99", "--reason", "again"]);
    assert!(err.contains("no child"), "{err}");
    assert_eq!(bench.head(), head);

    // A closed referral takes no report; twice the same is said.
    let exam = [
        "exam",
        "add",
        &code,
        "examined_on=2026-10-14",
        "no_abnormality=yes",
    ];
    let out = bench.ok(&exam);
    assert!(out.contains("nothing was confirmed"), "{out}");
    let err = bench.refused(&exam);
    assert!(err.contains("is in already"), "{err}");
    let err = bench.refused(&["step", &code, "call", "--result", "reached"]);
    assert!(err.contains("closed: examined"), "{err}");
    assert!(err.contains("reopened"), "{err}");
    bench.ok(&["step", &code, "reopened"]);
    bench.ok(&["step", &code, "call", "--result", "reached"]);
}

#[test]
fn a_referral_by_hand_needs_its_reason_and_a_broken_template_shows_its_line() {
    let bench = Bench::on_a_day("us-school", "threshold");
    let out = bench.ok(&["refer", "open", "Q-1", "--reason", "teacher's concern"]);
    assert!(out.contains("teacher's concern"), "{out}");
    let out = bench.ok(&[
        "refer",
        "set",
        "Q-1",
        "--responsible",
        "J. Imani",
        "--consent",
        "yes",
        "--interpreter",
        "no",
        "--language",
        "Español",
    ]);
    assert!(out.contains("responsible: J. Imani"), "{out}");
    let folder = bench.path("store").join("letters");
    std::fs::create_dir_all(&folder).unwrap();
    std::fs::write(folder.join("referral.html"), "<p>{{ chid }}</p>\n").unwrap();
    let err = bench.refused(&["letters", "-o", "x.html"]);
    assert!(err.contains("referral.html:1:"), "{err}");
    assert!(err.contains("did you mean child?"), "{err}");
    assert!(!bench.path("x.html").exists());
    std::fs::remove_file(folder.join("referral.html")).unwrap();
    bench.ok(&["letters", "-o", "x.html"]);
    let html = bench.read("x.html");
    assert!(html.contains("draft: have a speaker check"));
    assert!(html.contains("Ojo derecho"));
    bench.ok(&[
        "setting",
        "set",
        "letters_approved",
        "es by A. Solano on 2026-09-01",
    ]);
    bench.ok(&["letters", "-o", "y.html", "--child", "Q-1"]);
    assert!(!bench.read("y.html").contains("draft: have"));
}

#[test]
fn an_urgent_letter_is_never_in_a_batch() {
    let bench = Bench::on_a_day("us-school", "threshold");
    bench.ok(&["record", "Q-4", "signs=white_pupil:left", "--sign"]);
    let out = bench.ok(&["letters", "-o", "batch.html"]);
    assert!(out.contains("no letter is due"), "{out}");
    assert!(out.contains("printed alone"), "{out}");
    assert!(!bench.path("batch.html").exists());
    assert!(bench.ok(&["refer", "list"]).contains("call the family now"));
    bench.ok(&["letters", "-o", "one.html", "--child", "Q-4"]);
    let html = bench.read("one.html");
    assert!(html.contains("We have not reached you by telephone."));
    assert!(html.contains("Go to an emergency department"), "{html}");
    assert!(
        !html.contains("Call an eye doctor who sees children"),
        "{html}"
    );
    bench.ok(&[
        "step", "Q-4", "call", "--result", "reached", "--whom", "R. Moss",
    ]);
    bench.ok(&["letters", "-o", "two.html", "--child", "Q-4"]);
    assert!(bench.read("two.html").contains("R. Moss"));
}

#[test]
fn a_corrected_outcome_makes_its_letter_out_of_date() {
    let bench = referred();
    bench.ok(&["letters", "-o", "due.html"]);
    bench.ok(&[
        "step",
        "Q-2",
        "letter_sent",
        "--letter",
        "referral",
        "--by",
        "post",
    ]);
    // Another value with the same outcome leaves the letter as it is.
    bench.ok(&["correct", "Q-2", "note=shy at first", "--reason", "seen"]);
    assert!(!bench.ok(&["refer", "show", "Q-2"]).contains("out of date"));
    bench.ok(&[
        "correct",
        "Q-2",
        "distance_left=20/25",
        "--reason",
        "typed the wrong row",
    ]);
    let out = bench.ok(&["refer", "show", "Q-2"]);
    assert!(
        out.contains("letter out of date: was refer, routine, now pass"),
        "{out}"
    );
    assert!(
        out.contains("the outcome has been corrected since: now pass"),
        "{out}"
    );
    // A child who passes now gets no referral letter; the family is told.
    assert!(
        out.contains("next: tell the family that it is withdrawn"),
        "{out}"
    );
    assert!(bench.ok(&["letters"]).contains("no letter is due"));
    bench.ok(&["step", "Q-2", "closed", "--closing", "opened_by_mistake"]);
    bench.ok(&["verify"]);
}

#[test]
fn a_call_that_reached_somebody_ends_the_running_line_and_a_told_emergency_is_a_call() {
    let bench = Bench::on_a_day("us-school", "threshold");
    bench.ok(&["record", "Q-4", "signs=white_pupil:left", "--sign"]);
    bench.ok(&[
        "step", "Q-4", "call", "--result", "reached", "--whom", "R. Moss",
    ]);
    let out = bench.ok(&["refer", "show", "Q-4"]);
    assert_eq!(out.matches("R. Moss").count(), 1, "{out}");
    let mut desk = Desk::open(
        &bench.path("store"),
        &Secret::None,
        &DeskOptions {
            screener: Some("JI".into()),
            ..DeskOptions::default()
        },
    )
    .unwrap();
    assert!(desk.urgent_open().unwrap().is_empty());
    // The other way: F9's answer stands among the steps.
    drop(desk);
    bench.ok(&["record", "Q-1", "signs=white_pupil:right", "--sign"]);
    desk = Desk::open(
        &bench.path("store"),
        &Secret::None,
        &DeskOptions {
            screener: Some("JI".into()),
            ..DeskOptions::default()
        },
    )
    .unwrap();
    let open = desk.urgent_open().unwrap();
    desk.urgent_answer(&UrgentAnswer {
        visit: open[0].visit,
        told: "N. Tansley".into(),
        told_at: "10:42".into(),
        told_by: "J. Imani".into(),
    })
    .unwrap();
    drop(desk);
    let out = bench.ok(&["refer", "show", "Q-1"]);
    assert!(out.contains("call, reached, N. Tansley"), "{out}");
    assert!(!out.contains("nobody has spoken"), "{out}");
}

#[test]
fn a_letter_says_nothing_that_the_visit_does_not() {
    let bench = referred();
    let head = bench.head();
    let err = bench.refused(&[
        "letters", "--child", "Q-2", "--kind", "passed", "-o", "p.html",
    ]);
    assert!(
        err.contains("came to refer, routine: no passed letter"),
        "{err}"
    );
    let err = bench.refused(&[
        "letters", "--child", "Q-2", "--kind", "color", "-o", "p.html",
    ]);
    assert!(err.contains("no color plate was missed"), "{err}");
    assert!(!bench.path("p.html").exists());
    assert_eq!(bench.head(), head);
    // The form is printed when it is asked for, although the letter is due.
    let out = bench.ok(&["letters", "--child", "Q-2", "--kind", "exam_form"]);
    assert!(out.contains("exam report form"), "{out}");
    assert!(!out.contains("no letter is due"), "{out}");
    bench.ok(&[
        "record",
        "Q-1",
        "correction_worn=none",
        "distance_right=20/20",
        "distance_left=20/20",
        "signs=none",
        "--sign",
    ]);
    bench.ok(&[
        "letters", "--child", "Q-1", "--kind", "passed", "-o", "p.html",
    ]);
    assert!(bench.read("p.html").contains("passed."));
    // A referral by hand has no screening behind it.
    bench.ok(&["refer", "open", "Q-3", "--reason", "parent's concern"]);
    bench.ok(&["letters", "--child", "Q-3", "-o", "hand.html"]);
    let html = bench.read("hand.html");
    assert!(!html.contains("we tested the eyesight"), "{html}");
    assert!(!html.contains("What we tested"), "{html}");
}

#[test]
fn letters_are_written_over_nothing_and_never_into_a_store() {
    let bench = referred();
    let head = bench.head();
    let store = bench.path("store").join("store.db");
    let err = bench.refused(&["letters", "-o", store.to_str().unwrap()]);
    assert!(err.contains("there already"), "{err}");
    let inside = bench.path("store").join("new.html");
    let err = bench.refused(&["letters", "-o", inside.to_str().unwrap()]);
    assert!(err.contains("inside the folder of a store"), "{err}");
    let key = bench.path("store").join("store.key");
    let err = bench.refused(&["report", "referrals", "-o", key.to_str().unwrap()]);
    assert!(err.contains("inside the folder of a store"), "{err}");
    bench.write("due.html", "a letter");
    let err = bench.refused(&["letters", "-o", "due.html"]);
    assert!(err.contains("not written over"), "{err}");
    assert_eq!(bench.read("due.html"), "a letter");
    assert_eq!(bench.head(), head);
}

#[test]
fn text_of_a_referral_is_one_line_without_controls() {
    let bench = referred();
    let head = bench.head();
    for text in [
        "a\u{1b}[31m",
        "two\nlines",
        "\u{202e}turned",
        &"x".repeat(501),
    ] {
        for args in [
            vec!["step", "Q-2", "note", "--note", text],
            vec!["step", "Q-2", "call", "--result", "reached", "--whom", text],
            vec!["refer", "set", "Q-2", "--responsible", text],
            vec!["refer", "open", "Q-1", "--reason", text],
        ] {
            bench.refused(&args);
        }
    }
    let err = bench.refused(&["step", "Q-2", "appointment", "--due", "2026-10-01"]);
    assert!(err.contains("before the day"), "{err}");
    assert_eq!(bench.head(), head);
}

#[test]
fn a_template_that_never_ends_is_stopped() {
    let bench = referred();
    let folder = bench.path("store").join("letters");
    std::fs::create_dir_all(&folder).unwrap();
    let file = folder.join("referral.html");
    let ever = "{% for a in range(9999) %}{% for b in range(9999) %}x{% endfor %}{% endfor %}";
    std::fs::write(&file, ever).unwrap();
    let err = bench.refused(&["letters"]);
    assert!(err.contains("referral.html:1:"), "{err}");
    std::fs::write(&file, "x".repeat(200_000)).unwrap();
    let err = bench.refused(&["letters"]);
    assert!(err.contains("at most 96 KB"), "{err}");
}
