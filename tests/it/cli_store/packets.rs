//! Two laptops and a stick, through the real program.

use std::fmt::Write as _;

use super::{Bench, Ran};

const EAST: &str = "nine green kettles sing";
const JOIN: &str = "three paper boats drift";

#[test]
#[allow(clippy::too_many_lines)]
fn two_laptops_share_a_day_under_passphrases() {
    let bench = Bench::empty();
    bench.write("pass", format!("{EAST}\n"));
    bench.write("join", format!("{JOIN}\n"));
    bench.write("roster.csv", super::ROSTER);
    let at = |store: &str, args: &[&str]| {
        let mut command = bench.command(args);
        command
            .env("TWOLINE_STORE", bench.path(store))
            .args(["--passphrase-file", "pass"]);
        Ran::from(command.output().expect("the program runs"))
    };
    let ok = |store: &str, args: &[&str]| {
        let ran = at(store, args);
        assert_eq!(ran.code, 0, "{args:?}\n{}{}", ran.out, ran.err);
        ran.out
    };
    ok(
        "east",
        &["init", "--programme", "Quillmere", "--station", "east"],
    );
    ok(
        "east",
        &["screener", "add", "--name", "J. Imani", "--initials", "JI"],
    );
    ok("east", &["site", "add", "QE", "--name", "Quillmere East"]);
    ok(
        "east",
        &[
            "term",
            "add",
            "2026-autumn",
            "--from",
            "2026-08-01",
            "--to",
            "2026-12-31",
        ],
    );
    ok("east", &["roster", "add", "roster.csv", "--yes"]);
    ok(
        "east",
        &["day", "open", "--site", "QE", "--protocol", "us-school"],
    );

    let ran = at("east", &["packet", "write", "start", "--for-join"]);
    assert_eq!(ran.code, 2, "no terminal to ask on: {}", ran.err);
    let joins = ["--packet-passphrase-file", "join"];
    let mut write = vec!["packet", "write", "start", "--for-join"];
    write.extend(joins);
    ok("east", &write);
    let out = ok("east", &["packet", "show", "start"]);
    assert!(
        out.contains("written by east; for joining, with its passphrase"),
        "{out}"
    );
    let ran = at(
        "west",
        &[
            "init",
            "--join",
            "start",
            "--station",
            "west",
            "--packet-passphrase-file",
            "pass",
        ],
    );
    assert_eq!(ran.code, 1, "{}", ran.err);
    assert!(ran.err.contains("does not open this packet"), "{}", ran.err);
    assert!(!bench.path("west").exists());
    let mut join = vec!["init", "--join", "start", "--station", "west"];
    join.extend(joins);
    let out = ok("west", &join);
    assert!(
        out.contains("made the store of Quillmere, station west"),
        "{out}"
    );
    assert!(out.contains("recovery key"), "{out}");

    // The chart at one table, signs at the other, and one child at both with another line.
    let chart = [
        "correction_worn=none",
        "distance_right=20/20",
        "distance_left=20/20",
    ];
    let record = |store: &str, child: &str, values: &[&str]| {
        let mut args = vec!["record", child];
        args.extend(values);
        args.extend(["--sign", "--screener", "JI"]);
        ok(store, &args);
    };
    record("east", "Q-1", &chart);
    record("west", "Q-1", &["correction_worn=none", "signs=none"]);
    record("east", "Q-2", &chart);
    record(
        "west",
        "Q-2",
        &["correction_worn=none", "distance_left=20/63"],
    );
    ok(
        "east",
        &["site", "add", "QE", "--name", "Quillmere East, hall"],
    );
    ok(
        "west",
        &["site", "add", "QE", "--name", "Quillmere East, gym"],
    );
    ok("west", &["packet", "write", "west.packet"]);
    let out = ok("east", &["packet", "read", "west.packet"]);
    assert!(out.contains("2 new visits from west"), "{out}");
    assert!(out.contains("1 value in conflict; settle"), "{out}");
    assert!(
        out.contains("1 other fact said differently by two stations"),
        "{out}"
    );
    ok("east", &["site", "add", "QE", "--name", "Quillmere East"]);
    let differs = "Okafor, Ada (Q-2), 2026-10-14: distance acuity, left eye is 20/20 or 20/63";
    assert!(out.contains(differs), "{out}");
    assert!(ok("east", &["packet", "conflicts"]).contains(differs));
    let out = ok("east", &["packet", "read", "west.packet"]);
    assert!(out.contains("nothing new"), "{out}");
    let ran = at("west", &["packet", "write", "west.packet"]);
    assert_eq!(ran.code, 2);
    assert!(ran.err.contains("--replace"), "{}", ran.err);

    let out = ok("east", &["child", "show", "Q-1"]);
    assert!(
        out.contains("signed as INCOMPLETE") && out.contains("now PASS"),
        "{out}"
    );
    let out = ok("east", &["child", "show", "Q-2"]);
    assert!(
        out.contains("in conflict: distance acuity, left eye is 20/20 or 20/63"),
        "{out}"
    );
    ok(
        "east",
        &[
            "correct",
            "Q-2",
            "distance_left=20/63",
            "--reason",
            "asked both",
            "--screener",
            "JI",
        ],
    );
    let out = ok("east", &["child", "show", "Q-2"]);
    assert!(
        !out.contains("in conflict") && out.contains("REFER"),
        "{out}"
    );

    assert!(ok("east", &["packet", "conflicts"]).contains("no value is in conflict"));
    ok("east", &["packet", "write", "east.packet"]);
    let out = ok("west", &["packet", "read", "east.packet"]);
    assert!(!out.contains("conflict"), "{out}");
    let report = |store: &str| ok(store, &["report", "day", "--exact"]);
    assert_eq!(report("east"), report("west"));
    assert_eq!(ok("east", &["verify"]), ok("west", &["verify"]));

    bench.write("no.packet", "child_id,name\n");
    let ran = at("east", &["packet", "read", "no.packet"]);
    assert_eq!(ran.code, 2);
    assert!(ran.err.contains("is not a packet"), "{}", ran.err);

    // A lost laptop comes back from its backup and catches up.
    ok("east", &["backup", "copy"]);
    let out = ok("again", &["restore", "copy"]);
    assert!(out.contains("new chain"), "{out}");
    ok("again", &["packet", "read", "west.packet"]);
    ok("again", &["verify"]);
    let ran = at("again", &["restore", "copy"]);
    assert_eq!(ran.code, 2, "{}", ran.err);
}

/// Demo stations need no passphrase: "not protected" is said instead.
#[test]
fn unprotected_stations_join_without_a_passphrase() {
    let bench = Bench::on_a_day("us-school", "threshold");
    let out = bench.ok(&["packet", "write", "p"]);
    assert!(out.contains("demo: not protected"), "{out}");
    let west = |args: &[&str]| {
        let mut command = bench.command(args);
        command.env("TWOLINE_STORE", bench.path("west"));
        let ran = Ran::from(command.output().expect("the program runs"));
        assert_eq!(ran.code, 0, "{args:?}\n{}{}", ran.out, ran.err);
        ran.out
    };
    let out = west(&["init", "--join", "p", "--station", "west"]);
    assert!(out.contains("demo: not protected"), "{out}");
    west(&[
        "record",
        "Q-2",
        "correction_worn=none",
        "distance_right=20/20",
        "distance_left=20/20",
        "signs=none",
        "--sign",
    ]);
    west(&["packet", "write", "w"]);
    let out = bench.ok(&["packet", "read", "w"]);
    assert!(out.contains("1 new visit from west"), "{out}");
    assert_eq!(bench.ok(&["report", "day"]), west(&["report", "day"]));
    let out = bench.ok(&["child", "same"]);
    assert!(out.contains("nobody seems"), "{out}");
}

/// A reading process is killed at random moments: all of the packet is there, or none of it.
#[test]
#[allow(clippy::print_stdout)]
fn a_killed_reading_took_all_or_nothing() {
    let number = |name: &str, otherwise: u64| {
        let set = std::env::var(name).ok().and_then(|n| n.parse().ok());
        set.unwrap_or(otherwise)
    };
    let (kills, mut seed) = (number("TWOLINE_KILLS", 5), number("TWOLINE_SEED", 11));
    println!("seed: TWOLINE_SEED={seed}, {kills} kills");
    let bench = Bench::with_children();
    bench.ok(&["packet", "write", "start"]);
    let mut roster = super::ROSTER.to_owned();
    for i in 0..1500 {
        let _ = writeln!(roster, "R-{i:05},Okafor{i},Ada,2020-09-01,1,QE,1B,yes,no");
    }
    bench.write("roster.csv", roster);
    bench.ok(&["roster", "add", "roster.csv", "--yes"]);
    bench.ok(&["packet", "write", "large"]);
    let west = |args: &[&str]| {
        let mut command = bench.command(args);
        command.env("TWOLINE_STORE", bench.path("west"));
        command
    };
    let run = |args: &[&str]| {
        let ran = Ran::from(west(args).output().expect("the program runs"));
        assert_eq!(ran.code, 0, "{}{}", ran.out, ran.err);
        ran.out
    };
    run(&["init", "--join", "start", "--station", "west"]);
    let before = run(&["verify"]);
    let copy = |from: &str, to: &str| {
        let _ = std::fs::remove_dir_all(bench.path(to));
        std::fs::create_dir(bench.path(to)).expect("a folder");
        for name in ["store.db", "store.key"] {
            std::fs::copy(bench.path(from).join(name), bench.path(to).join(name)).expect("copied");
        }
    };
    copy("west", "kept");
    run(&["packet", "read", "large"]);
    let after = run(&["verify"]);
    assert_ne!(before, after);
    for _ in 0..kills {
        copy("kept", "west");
        let mut child = west(&["packet", "read", "large"])
            .stdout(std::process::Stdio::null())
            .stderr(std::process::Stdio::null())
            .spawn()
            .expect("the program");
        seed = seed.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1);
        std::thread::sleep(std::time::Duration::from_millis((seed >> 33) % 1200));
        child.kill().expect("killed");
        child.wait().expect("gone");
        let now = run(&["verify"]);
        assert!(now == before || now == after, "{now}");
        run(&["packet", "read", "large"]);
        assert_eq!(run(&["verify"]), after);
        let left = std::fs::read_dir(bench.path("west")).expect("a folder");
        let left: Vec<_> = left.map(|e| e.expect("a name").file_name()).collect();
        assert!(
            !left.iter().any(|n| n.to_string_lossy().contains("partial")),
            "{left:?}"
        );
    }
}
