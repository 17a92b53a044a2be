//! Settings, school calendars and the reports that go with them.

use super::Bench;

#[test]
fn a_school_calendar_is_listed_changed_and_refused_with_a_reason() {
    let bench = Bench::with_children();
    let none = bench.ok(&["site", "calendar"]);
    assert!(none.contains("no school calendar"), "{none}");
    let added = bench.ok(&[
        "site",
        "calendar",
        "QE",
        "--held",
        "mon-fri",
        "--holiday",
        "2026-11-26..2026-11-27",
        "--holiday",
        "2026-12-25",
    ]);
    assert!(added.starts_with("added school calendar"), "{added}");
    let listed = bench.ok(&["site", "calendar", "QE"]);
    assert!(
        listed.contains("Quillmere East (QE): school is held mon,tue,wed,thu,fri"),
        "{listed}"
    );
    assert!(
        listed.contains("  no school from 2026-11-26 to 2026-11-27"),
        "{listed}"
    );
    let dropped = bench.ok(&["site", "calendar", "QE", "--drop", "2026-12-25"]);
    assert!(
        dropped.starts_with("changed") && !dropped.contains("12-25"),
        "{dropped}"
    );
    for wrong in [
        ["--held", "mon-friday"],
        ["--holiday", "2026-11-27..2026-11-26"],
        ["--holiday", "26 Nov"],
    ] {
        let ran = bench.run(&["site", "calendar", "QE", wrong[0], wrong[1]]);
        assert_eq!(ran.code, 2, "{wrong:?}");
        assert!(ran.err.contains("expected"), "{}", ran.err);
    }
    assert_eq!(
        bench.run(&["site", "calendar", "XX", "--held", "mon"]).code,
        2
    );
    assert!(bench.ok(&["verify"]).contains("sound") || bench.run(&["verify"]).code == 0);
}

#[test]
fn settings_name_the_triage_sets_and_the_worklist_follows() {
    let bench = Bench::on_a_day("us-school", "threshold");
    bench.ok(&[
        "record",
        "Q-2",
        "correction_worn=none",
        "distance_right=20",
        "distance_left=200",
        "signs=none",
        "--sign",
    ]);
    let plain = bench.ok(&["report", "referrals", "--format", "text"]);
    assert!(plain.contains("no clinic bands"), "{plain}");
    let wrong = bench.run(&["setting", "set", "triage", "south-australia"]);
    assert_eq!(wrong.code, 2);
    assert!(
        wrong.err.contains("south-australia-acuity"),
        "{}",
        wrong.err
    );
    bench.ok(&[
        "setting",
        "set",
        "triage",
        "south-australia-acuity,queensland-strabismus",
    ]);
    let listed = bench.ok(&["setting", "list"]);
    assert!(
        listed.contains("south-australia-acuity,queensland-strabismus"),
        "{listed}"
    );
    let plain = bench.ok(&["report", "referrals", "--format", "text"]);
    assert!(plain.contains("within 30 days"), "{plain}");
    let shown = bench.ok(&["child", "show", "Q-2"]);
    assert!(
        shown.contains("clinic band (South Australia, acuity): within 30 days"),
        "{shown}"
    );
    assert!(shown.contains("on presenting acuity"), "{shown}");
    bench.ok(&["report", "referrals", "-o", "referrals.csv"]);
    let csv = bench.read("referrals.csv");
    assert!(
        csv.contains("band,band_source,act_within_days,severity_group,order_reason"),
        "{csv}"
    );
    assert!(
        bench
            .read("referrals.csv.about.txt")
            .contains("south-australia-acuity")
    );
    bench.ok(&["setting", "set", "triage", "none"]);
    assert!(
        bench
            .ok(&["report", "referrals", "--format", "text"])
            .contains("no clinic bands")
    );
}

/// What asks no rule works beside a broken rule file and says so; what judges does not.
#[test]
fn a_broken_rule_file_stops_what_judges_and_nothing_else() {
    let bench = Bench::with_children();
    std::fs::create_dir_all(bench.path("store/rules")).expect("a folder");
    bench.write("store/rules/broken.toml", "id = ");
    assert_eq!(bench.run(&["child", "show", "Q-1"]).code, 2);
    for works in [
        &["verify"][..],
        &["child", "find", "okafor"],
        &["backup", "copy"],
    ] {
        let ran = bench.run(works);
        assert_eq!(ran.code, 0, "{works:?}: {}", ran.err);
        assert!(
            ran.err.contains("broken.toml") && ran.err.contains("left out"),
            "{}",
            ran.err
        );
    }
}

/// A pipe in the rules folder is refused, not waited for.
#[cfg(unix)]
#[test]
fn a_pipe_in_the_rules_folder_is_refused() {
    let bench = Bench::with_children();
    std::fs::create_dir_all(bench.path("store/rules")).expect("a folder");
    let made = std::process::Command::new("mkfifo")
        .arg(bench.path("store/rules/pipe.toml"))
        .status();
    assert!(made.is_ok_and(|s| s.success()));
    let ran = bench.run(&["child", "show", "Q-1"]);
    assert_eq!(ran.code, 2);
    assert!(ran.err.contains("not an ordinary file"), "{}", ran.err);
}

/// A birth year that makes a child older than 25 years is pointed out and taken.
#[test]
fn a_birth_year_long_ago_is_asked_about() {
    let bench = Bench::with_children();
    bench.write(
        "old.csv",
        "child_id,family_name,given_name,dob,grade,site\nQ-90,Moss,Tilda,1990-03-02,1,QE\n",
    );
    let ran = bench.run(&["roster", "add", "old.csv", "--dry-run"]);
    assert_eq!(ran.code, 0, "{}", ran.err);
    let said = format!("{}{}", ran.out, ran.err);
    assert!(said.contains("older than 25 years"), "{said}");
}
