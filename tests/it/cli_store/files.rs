//! Rosters and results: planned, shown, written whole or not at all.

use std::process::Stdio;

use super::{Bench, ROSTER};

const RESULTS: &str = "\
child_id,screened_on,correction_worn,distance_right,distance_left,signs
Q-1,2026-10-14,none,20/20,20/25,none
Q-2,2026-10-14,none,20/20,20/32,none
";

#[test]
fn a_second_roster_is_an_update() {
    let bench = Bench::with_children();
    let head = bench.head();
    let out = bench.ok(&["roster", "add", "roster.csv", "--yes"]);
    assert!(
        out.contains("0 new, 0 changed, 5 unchanged, 0 gone"),
        "{out}"
    );
    assert_eq!(bench.head(), head, "nothing new, no entry");

    let changed = ROSTER.replace(",1,QE,1B,yes,no\nQ-2", ",1,QE,1C,yes,no\nQ-2");
    let changed = changed.replace("Q-4,Moss,Tobin,2018-05-20,3,QE,3A,yes,yes\n", "");
    let second =
        format!("{changed}Q-6,Tansley,Rue,2020-03-02,1,QE,1B,yes,no\nQ-7,Vane,Ilo,,1,QE,1B,,\n");
    bench.write("second.csv", &second);
    let shown = bench.ok(&["roster", "add", "second.csv", "--dry-run"]);
    assert!(
        shown.contains("2 new, 1 changed, 3 unchanged, 1 gone"),
        "{shown}"
    );
    assert!(shown.contains("class from \"1B\" to \"1C\""), "{shown}");
    assert!(shown.contains("Q-4 Moss, Tobin"), "who is gone: {shown}");
    assert!(
        shown.contains("birth date unknown (1):\n  Q-7 Vane, Ilo"),
        "{shown}"
    );
    assert!(
        shown.contains("perhaps twins: Q-1 Tansley, Marigold and Q-6 Tansley, Rue"),
        "{shown}"
    );
    let said = bench.refused(&["roster", "add", "second.csv"]);
    assert!(
        said.contains("no terminal") && said.contains("--yes"),
        "{said}"
    );
    assert_eq!(bench.head(), head, "shown, not written");

    bench.ok(&["roster", "add", "second.csv", "--yes"]);
    assert_ne!(bench.head(), head);
    let found = bench.ok(&["child", "find", "tansley"]);
    assert_eq!(found.lines().count(), 2, "{found}");
    assert!(
        found.contains("born 2020-03-02") && found.contains("1C"),
        "{found}"
    );
    assert_eq!(bench.run(&["child", "find", "zzzz"]).code, 1);
}

#[test]
fn a_bad_roster_changes_nothing_and_says_where() {
    let bench = Bench::with_children();
    let head = bench.head();
    let row = "Q-8,Ash,Bo,2020-01-01,1,QE,1B,yes,no\n";
    for (name, text, words) in [
        (
            "unknown column",
            ROSTER.replace("wears_glasses", "shoe_size"),
            vec!["shoe_size"],
        ),
        (
            "duplicate",
            format!("{ROSTER}{row}{row}"),
            vec!["row 8", "child_id", "Q-8"],
        ),
        (
            "date",
            format!("{ROSTER}{}", row.replace("2020-01-01", "2020-02-30")),
            vec!["row 7", "dob", "2020-02-30"],
        ),
        (
            "born later",
            format!("{ROSTER}{}", row.replace("2020-01-01", "2027-01-01")),
            vec!["row 7", "dob"],
        ),
        (
            "site",
            format!("{ROSTER}{}", row.replace("QE", "QX")),
            vec!["row 7", "site", "QX"],
        ),
        (
            "escape",
            format!("{ROSTER}{}", row.replace("Ash", "A\u{1b}[31msh")),
            vec!["row 7", "family_name"],
        ),
        ("empty", String::new(), vec!["bad.csv"]),
    ] {
        bench.write("bad.csv", &text);
        let said = bench.refused(&["roster", "add", "bad.csv", "--yes"]);
        assert!(
            said.contains("bad.csv") && said.contains("nothing was written"),
            "{name}: {said}"
        );
        for word in words {
            assert!(said.contains(word), "{name}: {word}: {said}");
        }
        assert!(
            !said.contains('\u{1b}'),
            "{name}: no control character reaches a terminal"
        );
    }
    assert!(
        bench
            .refused(&["roster", "add", "missing.csv"])
            .contains("missing.csv")
    );
    assert_eq!(bench.head(), head);
}

#[test]
fn results_twice_are_unchanged_and_others_need_a_reason() {
    let bench = Bench::on_a_day("us-school", "threshold");
    bench.write("results.csv", RESULTS);
    let out = bench.ok(&["results", "add", "results.csv", "--dry-run"]);
    assert!(out.contains("2 new, 0 unchanged, 0 different"), "{out}");
    bench.ok(&["results", "add", "results.csv", "--yes"]);
    let head = bench.head();
    let out = bench.ok(&["results", "add", "results.csv"]);
    assert!(
        out.contains("0 new, 2 unchanged, 0 different"),
        "no question, nothing to write: {out}"
    );

    bench.write("other.csv", RESULTS.replace("20/32", "20/50"));
    let ran = bench.run(&["results", "add", "other.csv", "--yes"]);
    assert_eq!(ran.code, 2, "{}", ran.err);
    assert!(
        ran.out
            .contains("row 3: Q-2 Okafor, Ada: distance_left signed \"20/32\", file \"20/50\""),
        "{}",
        ran.out
    );
    assert!(
        ran.err.contains("1 visit is signed with other values") && ran.err.contains("--correct"),
        "{}",
        ran.err
    );
    assert_eq!(bench.head(), head);

    bench.ok(&[
        "results",
        "add",
        "other.csv",
        "--yes",
        "--correct",
        "copied wrongly",
    ]);
    assert_ne!(bench.head(), head);
    let out = bench.ok(&["child", "show", "Q-2"]);
    assert!(
        out.contains("from 20/32 to 20/50, because: copied wrongly"),
        "{out}"
    );
    let out = bench.ok(&["results", "add", "other.csv", "--yes"]);
    assert!(out.contains("0 new, 2 unchanged, 0 different"), "{out}");
}

#[test]
#[allow(clippy::too_many_lines)]
fn what_is_refused_leaves_the_head_as_it_was() {
    let bench = Bench::on_a_day("us-school", "threshold");
    let head = bench.head();
    bench.write(
        "axis.csv",
        "child_id,sphere_right,cylinder_right\nQ-1,+1.00,-0.50\n",
    );
    bench.write("nobody.csv", RESULTS.replace("Q-2", "Q-99"));
    bench.write("later.csv", RESULTS.replace("10-14", "10-15"));
    for (args, word) in [
        (vec!["record", "Q-99", "signs=none", "--sign"], "Q-99"),
        (
            vec!["record", "Q-1", "distance_rigth=20/20"],
            "did you mean distance_right?",
        ),
        (
            vec!["record", "Q-1", "distance_right"],
            "expected FIELD=VALUE",
        ),
        (
            vec!["record", "Q-1", "signs=none", "signs=none"],
            "given twice",
        ),
        (
            vec!["record", "Q-1", "distance_right=hello", "--sign"],
            "distance_right",
        ),
        (
            vec!["record", "Q-1", "distance_right=20/0", "--sign"],
            "distance_right",
        ),
        (
            vec!["record", "Q-1", "distance_right=>20/200", "--sign"],
            "distance_right",
        ),
        (
            vec![
                "record",
                "Q-1",
                "sphere_right=+1.00",
                "cylinder_right=-0.50",
                "--sign",
            ],
            "axis_right",
        ),
        (
            vec!["record", "Q-1", "axis_right=181", "--sign"],
            "axis_right",
        ),
        (
            vec!["record", "Q-1", "distance_right=\u{1b}[31m20", "--sign"],
            "distance_right",
        ),
        (
            vec![
                "record",
                "Q-1",
                "signs=none",
                "--date",
                "2026-10-15",
                "--sign",
            ],
            "twoline day open",
        ),
        (vec!["results", "add", "axis.csv", "--yes"], "axis_right"),
        (vec!["results", "add", "nobody.csv", "--yes"], "Q-99"),
        (vec!["results", "add", "later.csv", "--yes"], "screened_on"),
        (
            vec!["day", "open", "--site", "QX", "--protocol", "us-school"],
            "QX",
        ),
        (
            vec!["day", "open", "--site", "QE", "--protocol", "no-such"],
            "no-such",
        ),
        (
            vec![
                "day",
                "open",
                "--site",
                "QE",
                "--protocol",
                "us-school",
                "--date",
                "2030-01-01",
            ],
            "term",
        ),
        (
            vec![
                "day",
                "open",
                "--site",
                "QE",
                "--protocol",
                "us-school",
                "--method",
                "critical_line",
            ],
            "open already",
        ),
        (
            vec![
                "term",
                "add",
                "x",
                "--from",
                "2026-09-01",
                "--to",
                "2026-09-02",
            ],
            "overlaps",
        ),
        (
            vec![
                "term",
                "add",
                "x",
                "--from",
                "2027-09-02",
                "--to",
                "2027-09-01",
            ],
            "ends",
        ),
        (
            vec!["screener", "add", "--name", "J. Imani", "--initials", "JI"],
            "already",
        ),
        (
            vec![
                "chart",
                "add",
                "wall",
                "--lines",
                "20/40,oops",
                "--distance-m",
                "3",
            ],
            "oops",
        ),
        (
            vec![
                "chart",
                "add",
                "wall",
                "--lines",
                "20/40",
                "--distance-m",
                "far",
            ],
            "chart_distance_m",
        ),
        (vec!["site", "add", "QX", "--name", "Q\u{1b}[2J"], "site"),
        (vec!["child", "show", "Q-99"], "Q-99"),
        (
            vec![
                "record",
                "Q-1",
                "signs=none",
                "--sign",
                "--screener",
                "Nobody",
            ],
            "Nobody",
        ),
        (
            vec![
                "init",
                "--programme",
                "P",
                "--station",
                "s",
                "--join",
                "packet",
            ],
            "cannot be used with",
        ),
        (vec!["verify", "--head", "xyz"], "not a head"),
    ] {
        let said = bench.refused(&args);
        assert!(said.contains(word), "{args:?}: {said}");
        assert!(
            !said.contains('\u{1b}'),
            "{args:?}: no control character reaches a terminal"
        );
    }
    assert_eq!(bench.head(), head);
    let said = bench.refused(&["record", "Q-1", "--sign"]);
    assert!(
        said.contains("nothing to sign"),
        "no refused value was kept as a draft: {said}"
    );
}

#[test]
fn nothing_is_signed_without_a_name() {
    let bench = Bench::on_a_day("us-school", "threshold");
    bench.ok(&["screener", "add", "--name", "N. Dell", "--initials", "ND"]);
    bench.write("results.csv", RESULTS);
    let head = bench.head();
    for args in [
        vec!["record", "Q-1", "signs=none", "--sign"],
        vec!["results", "add", "results.csv", "--yes"],
        vec!["correct", "Q-1", "signs=none", "--reason", "x"],
    ] {
        let said = bench.refused(&args);
        assert!(
            said.contains("who records") && said.contains("J. Imani, N. Dell"),
            "{said}"
        );
    }
    assert_eq!(bench.head(), head);
    bench.ok(&["results", "add", "results.csv", "--yes", "--screener", "ND"]);
    let rows = bench.report(&[]);
    let signed: Vec<&str> = rows
        .iter()
        .filter(|r| !r["outcome"].is_empty())
        .map(|r| &*r["screener"])
        .collect();
    assert_eq!(signed, ["N. Dell", "N. Dell"]);
}

#[test]
fn damage_and_a_cut_tail_are_found_and_named() {
    let bench = Bench::with_children();
    let head = bench.head();
    bench.ok(&["verify", "--head", &head]);
    bench.ok(&["backup", "earlier"]);
    bench.ok(&["site", "add", "QW", "--name", "Quillmere West"]);
    let later = bench.head();
    assert_ne!(later, head);
    // Whoever puts an earlier copy in the place of the store has cut its tail off.
    bench.ok(&["verify", "--store", "earlier"]);
    let ran = bench.run(&["verify", "--store", "earlier", "--head", &later]);
    assert_eq!(ran.code, 1, "{}{}", ran.out, ran.err);
    let entry: Vec<u8>;
    {
        let key = twoline::store::key::unlock(&bench.path("store"), &twoline::store::Secret::None)
            .expect("the key");
        let conn = rusqlite::Connection::open(bench.path("store/store.db")).expect("open");
        conn.execute_batch(&format!(
            "PRAGMA key = \"x'{}'\"",
            twoline::store::ledger::hex(&key[..])
        ))
        .expect("keyed");
        let triggers: Vec<String> = conn
            .prepare("SELECT name FROM sqlite_schema WHERE type = 'trigger'")
            .expect("triggers")
            .query_map([], |r| r.get(0))
            .expect("triggers")
            .map(Result::unwrap)
            .collect();
        for name in triggers {
            conn.execute_batch(&format!("DROP TRIGGER \"{name}\""))
                .expect("dropped");
        }
        entry = conn
            .query_row("SELECT id FROM child WHERE child_id = 'Q-2'", [], |r| {
                r.get(0)
            })
            .expect("the entry");
        conn.execute(
            "UPDATE child SET given_name = 'Ida' WHERE child_id = 'Q-2'",
            [],
        )
        .expect("changed");
    }
    let ran = bench.run(&["verify"]);
    assert_eq!(ran.code, 1, "{}", ran.out);
    let id = uuid::Uuid::from_slice(&entry).expect("an id").to_string();
    assert!(
        ran.err.contains("child entry") && ran.err.contains(&id),
        "{}",
        ran.err
    );
    assert!(ran.err.contains("hint: "), "{}", ran.err);
}

#[test]
fn a_head_that_is_not_the_stores_fails() {
    let bench = Bench::with_children();
    let old = bench.head();
    let other = if old.starts_with('0') { "1" } else { "0" };
    let ran = bench.run(&["verify", "--head", &format!("{other}{}", &old[1..])]);
    assert_eq!(ran.code, 1, "{}{}", ran.out, ran.err);
    let count = bench
        .ok(&["verify"])
        .split_once('(')
        .and_then(|(_, rest)| rest.split(' ').next().map(str::to_owned))
        .expect("a count");
    bench.ok(&["verify", "--head", &format!("{}:{count}", &old[..16])]);
    assert_eq!(
        bench
            .run(&["verify", "--head", &format!("{}:999999", &old[..16])])
            .code,
        1
    );
}

#[test]
fn the_key_table_is_the_one_of_the_screens() {
    let out = Bench::empty().ok(&["keys"]);
    for [place, keys, command, _] in twoline::keys::rows() {
        assert!(out.lines().any(|l| l == place), "{place}\n{out}");
        assert!(
            out.contains(&keys) && out.contains(&format!("({command})")),
            "{out}"
        );
    }
    assert!(out.lines().all(|l| l.chars().count() <= 80), "{out}");
    let card = Bench::empty().ok(&["keys", "--format", "html"]);
    assert!(
        card.starts_with("<!DOCTYPE html>") && card.contains("@page"),
        "{card}"
    );
}

#[test]
fn a_reader_that_reads_no_more_is_no_error() {
    let bench = Bench::on_a_day("us-school", "threshold");
    let mut running = bench
        .command(&["report", "day"])
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("it runs");
    drop(running.stdout.take());
    let output = running.wait_with_output().expect("it ends");
    assert_eq!(output.status.code(), Some(0));
    assert_eq!(String::from_utf8_lossy(&output.stderr), "");
}
