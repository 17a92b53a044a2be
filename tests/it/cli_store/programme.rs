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
