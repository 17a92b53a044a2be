//! A screening day from an empty folder to a backup, under a passphrase.

use super::{Bench, ROSTER, Ran};

const PASSPHRASE: &str = "nine green kettles sing";

#[cfg(unix)]
fn mode(path: &std::path::Path) -> u32 {
    use std::os::unix::fs::PermissionsExt;
    std::fs::metadata(path).expect("there").permissions().mode() & 0o777
}

#[test]
#[allow(clippy::too_many_lines)]
fn from_an_empty_folder_to_a_backup() {
    let bench = Bench::empty();
    let with = |file: &str, args: &[&str]| {
        let mut command = bench.command(args);
        command.args(["--passphrase-file", file]);
        Ran::from(command.output().expect("the program runs"))
    };
    let ok = |args: &[&str]| {
        let ran = with("pass", args);
        assert_eq!(ran.code, 0, "{args:?}\n{}{}", ran.out, ran.err);
        ran.out
    };
    bench.write("pass", format!("{PASSPHRASE}\n"));
    bench.write("short", "too short\n");
    bench.write("wrong", "nine green kettles sink\n");
    bench.write("roster.csv", ROSTER);

    assert!(
        bench.refused(&["verify"]).contains("no store"),
        "nothing is there yet"
    );
    let make = ["init", "--programme", "Quillmere", "--station", "east"];
    assert!(
        bench.refused(&make).contains("--passphrase-file"),
        "no terminal, no file"
    );
    let ran = with("short", &make);
    assert_eq!(ran.code, 2);
    assert!(ran.err.contains("15 or more"), "{}", ran.err);
    assert!(!bench.path("store").exists());
    let out = ok(&make);
    let groups = out
        .lines()
        .last()
        .expect("the recovery key")
        .trim()
        .split('-')
        .count();
    assert_eq!(groups, 7, "{out}");
    assert_eq!(with("pass", &make).code, 2, "a store is never overwritten");

    ok(&["site", "add", "QE", "--name", "Quillmere East"]);
    ok(&[
        "term",
        "add",
        "2026-autumn",
        "--title",
        "Autumn 2026",
        "--from",
        "2026-08-01",
        "--to",
        "2026-12-31",
    ]);
    ok(&["screener", "add", "--name", "J. Imani", "--initials", "JI"]);
    ok(&[
        "chart",
        "add",
        "wall",
        "--lines",
        "20/200,20/100,20/50,20/40,20/32,20/25,20/20",
        "--distance-ft",
        "10",
        "--crowded",
    ]);
    ok(&["roster", "add", "roster.csv", "--yes"]);
    let out = ok(&["day", "open", "--site", "QE", "--protocol", "us-school"]);
    assert!(
        out.contains("Quillmere East (QE), 2026-10-14, us-school") && out.contains("5 children"),
        "{out}"
    );
    ok(&[
        "record",
        "Q-2",
        "correction_worn=none",
        "distance_right=20/20",
        "distance_left=20/32",
        "signs=none",
        "--sign",
    ]);
    ok(&[
        "correct",
        "Q-2",
        "distance_left=20/25",
        "--reason",
        "mistyped",
    ]);
    ok(&["report", "day", "-o", "day.csv"]);
    let out = ok(&["verify"]);
    let head = out
        .lines()
        .find_map(|l| l.strip_prefix("store head "))
        .expect("a head");

    let text = bench.read("day.csv");
    assert!(text.starts_with('\u{feff}'));
    let rows: Vec<std::collections::HashMap<String, String>> =
        csv::Reader::from_reader(text.trim_start_matches('\u{feff}').as_bytes())
            .deserialize()
            .map(|row| row.expect("CSV"))
            .collect();
    assert_eq!(rows.len(), 5);
    for row in &rows {
        assert_eq!(row["store_head"], head);
        assert_eq!(row["site"], "QE");
    }
    let header = text.lines().next().expect("a header");
    assert!(header.ends_with("store_head,store_entries"), "{header}");
    assert!(
        bench
            .read("day.csv.about.txt")
            .contains("joint-policy-2016")
    );

    let out = ok(&["backup", "copy"]);
    assert!(out.contains(&head[..16]), "{out}");
    let ran = with("pass", &["backup", "copy"]);
    assert_eq!(ran.code, 2, "a backup never overwrites: {}", ran.err);
    let out = ok(&["verify", "--store", "copy", "--head", head]);
    assert!(out.contains(head), "{out}");

    let ran = with("wrong", &["verify"]);
    assert_eq!((ran.code, ran.out.as_str()), (1, ""), "{}", ran.err);
    assert!(
        ran.err.contains("does not open") && ran.err.contains("hint: "),
        "{}",
        ran.err
    );
    assert!(bench.refused(&["verify"]).contains("--passphrase-file"));
    assert_eq!(with("missing", &["verify"]).code, 2);
    let ran = with("pass", &["demo", "--fresh", "--no-screens"]);
    assert_eq!(
        ran.code, 2,
        "a protected store is never taken for the demo: {}",
        ran.err
    );
    assert!(bench.path("store/store.key").exists());

    #[cfg(unix)]
    {
        for folder in ["store", "copy"] {
            assert_eq!(mode(&bench.path(folder)), 0o700, "{folder}");
            for entry in std::fs::read_dir(bench.path(folder)).expect("a folder") {
                let path = entry.expect("an entry").path();
                assert_eq!(mode(&path), 0o600, "{}", path.display());
            }
        }
        for file in ["day.csv", "day.csv.about.txt"] {
            assert_eq!(mode(&bench.path(file)), 0o600, "{file}");
        }
    }
}
