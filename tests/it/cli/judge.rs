//! `twoline judge`: what it writes, and that a bad file leaves nothing behind.

use std::io::{Read, Write};
use std::process::Stdio;

use super::{Bench, rows, twoline};

const GOOD: &str =
    "child_id,age_months,distance_right,distance_left\nA,79,20/20,20/25\nB,79,20/20,20/80\n";
const RULES: [&str; 2] = ["--rules", "joint-policy-2016"];

fn judge<'a>(extra: &[&'a str]) -> Vec<&'a str> {
    let mut args = vec!["judge", "in.csv"];
    args.extend(RULES);
    args.extend(extra);
    args
}

#[test]
fn every_input_column_comes_first_then_the_outcome() {
    let bench = Bench::new();
    bench.write("in.csv", GOOD);
    let ran = bench.run(&judge(&[]));
    assert_eq!((ran.code, ran.err.as_str()), (0, ""));
    assert_eq!(
        ran.out.lines().next(),
        Some(
            "child_id,age_months,distance_right,distance_left,outcome,urgency,act_within_days,amblyopia_risk,criteria,unknown,reasons,rule_set,edition"
        )
    );
    let rows = rows(&ran.out);
    assert_eq!(
        (rows[0]["outcome"].as_str(), rows[1]["outcome"].as_str()),
        ("pass", "refer")
    );
    assert_eq!(rows[1]["criteria"], "line.60+;between-eyes");
    assert_eq!(rows[1]["amblyopia_risk"], "interocular_difference");
    assert_eq!(rows[0]["rule_set"], "joint-policy-2016");
    assert!(
        rows[1]["reasons"].contains("20/80"),
        "{}",
        rows[1]["reasons"]
    );
}

#[test]
fn the_output_keeps_the_mark_and_line_ends_of_the_input() {
    let bench = Bench::new();
    bench.write("in.csv", format!("\u{FEFF}{}", GOOD.replace('\n', "\r\n")));
    let ran = bench.run(&judge(&[]));
    assert!(ran.out.starts_with("\u{FEFF}child_id,"));
    assert_eq!(ran.out.matches("\r\n").count(), 3);
    bench.write("in.csv", GOOD);
    assert!(!bench.run(&judge(&[])).out.contains('\r'));
}

#[test]
fn an_output_file_is_whole_and_private() {
    let bench = Bench::new();
    bench.write("in.csv", GOOD);
    let ran = bench.run(&judge(&["-o", "out.csv"]));
    assert_eq!((ran.code, ran.out.as_str()), (0, ""));
    assert_eq!(ran.err, "2 rows judged: pass 1, refer 1\n");
    assert_eq!(bench.names(), ["in.csv", "out.csv"]);
    assert_eq!(bench.read("out.csv"), bench.run(&judge(&[])).out);
    #[cfg(unix)]
    {
        use std::os::unix::fs::PermissionsExt;
        let mode = std::fs::metadata(bench.path("out.csv"))
            .expect("there")
            .permissions()
            .mode();
        assert_eq!(mode & 0o777, 0o600);
    }
}

#[test]
fn a_bad_row_writes_nothing_and_an_older_output_stays() {
    let bench = Bench::new();
    bench.write("in.csv", format!("{GOOD}C,79,20/0,20/25\nD,79,hello\n"));
    bench.write("out.csv", "older");
    let ran = bench.run(&judge(&["-o", "out.csv"]));
    assert_eq!((ran.code, ran.out.as_str()), (2, ""));
    let lines: Vec<&str> = ran.err.lines().collect();
    assert!(
        lines[0].starts_with("in.csv: row 4, column distance_right: found \"20/0\", expected a line between 20/10 and 20/2000"),
        "{}",
        ran.err
    );
    assert!(lines[1].starts_with("in.csv: row 5: found 3 cells, expected 4"));
    assert_eq!(lines[2], "error: 2 problems; nothing was written");
    assert_eq!(bench.read("out.csv"), "older");
    assert_eq!(bench.names(), ["in.csv", "out.csv"]);
    // Nor does standard output get the good rows before the bad one.
    let ran = bench.run(&judge(&[]));
    assert_eq!((ran.code, ran.out.as_str()), (2, ""));
}

#[test]
fn files_that_are_bad_as_a_whole() {
    for (bytes, found) in [
        (b"".to_vec(), "found an empty file"),
        (b"child_id,distance_right\n".to_vec(), "found a header only"),
        (
            b"distance_right\n\"20/20\n".to_vec(),
            "row 2, column distance_right: found a quote that is never closed",
        ),
        (
            b"child_id,distance_right\nJos\xE9,20/20\n".to_vec(),
            "row 2, column number 1: found text that is not UTF-8",
        ),
        (
            b"child_id,distance_rigth\nA,20/20\n".to_vec(),
            "did you mean distance_right?",
        ),
        (
            [b"distance_right\n".to_vec(), vec![b'x'; 5_000_000]].concat(),
            "row 2, column distance_right: found a cell of more than 64 KB",
        ),
    ] {
        let bench = Bench::new();
        bench.write("in.csv", bytes);
        for extra in [
            &["-o", "out.csv"][..],
            &["-o", "out.csv", "--keep-going"],
            &[],
        ] {
            let ran = bench.run(&judge(extra));
            assert_eq!((ran.code, ran.out.as_str()), (2, ""), "{found}");
            assert!(
                ran.err.starts_with("in.csv: ") && ran.err.contains(found),
                "{}",
                ran.err
            );
            assert_eq!(bench.names(), ["in.csv"]);
        }
    }
}

#[test]
fn control_characters_never_reach_the_terminal() {
    let bench = Bench::new();
    bench.write(
        "in.csv",
        "child_id,sig\u{1b}]0;x\u{7}ns,distance_right\nA\u{1b}[2J,none,hello\u{9b}\n",
    );
    let ran = bench.run(&judge(&["--pass-through"]));
    assert_eq!(ran.code, 2);
    bench.write(
        "in.csv",
        "child_id,distance_right\nA\u{1b}[2J,hello\u{9b}1m\n",
    );
    let both = ran.err
        + &bench.run(&judge(&[])).err
        + &bench.run(&["judge", "in.csv", "--rules", "\u{1b}[2J"]).err;
    assert!(both.contains("row 2, column child_id"));
    assert!(
        !both.contains(|c: char| c.is_control() && c != '\n'),
        "{both:?}"
    );
}

#[test]
fn keep_going_writes_the_good_rows_and_the_bad_ones_apart() {
    let bench = Bench::new();
    bench.write("in.csv", format!("{GOOD}C,79,20/0,40/20\n"));
    let ran = bench.run(&judge(&["-o", "out.csv", "--keep-going"]));
    assert_eq!(ran.code, 2);
    assert!(
        ran.err
            .contains("1 row was refused, see out.csv.refused.csv"),
        "{}",
        ran.err
    );
    assert_eq!(rows(&bench.read("out.csv")).len(), 2);
    let refused = rows(&bench.read("out.csv.refused.csv"));
    let said: Vec<_> = refused
        .iter()
        .map(|r| (&*r["line"], &*r["column"], &*r["found"], &*r["child_id"]))
        .collect();
    assert_eq!(
        said,
        [
            ("4", "distance_right", "20/0", "C"),
            ("4", "distance_left", "40/20", "C")
        ]
    );
    assert!(refused[0]["expected"].contains("20/2000"));
    // A good file leaves no refused rows of an earlier run behind.
    bench.write("in.csv", GOOD);
    assert_eq!(
        bench.run(&judge(&["-o", "out.csv", "--keep-going"])).code,
        0
    );
    assert_eq!(bench.names(), ["in.csv", "out.csv"]);
    let ran = bench.run(&judge(&["--keep-going"]));
    assert_eq!(ran.code, 2, "needs -o");
}

#[test]
fn unknown_columns_are_handed_through_on_request() {
    let bench = Bench::new();
    bench.write("in.csv", "Class,distance_rigth,age_months,distance_right,distance_left,sum\n=1+1,x,79,20/20,20/20,-2.50\n");
    assert_eq!(bench.run(&judge(&[])).code, 2);
    let ran = bench.run(&judge(&["--pass-through"]));
    assert_eq!(ran.code, 0);
    assert_eq!(
        ran.err,
        "note: column distance_rigth is handed through unread; is distance_right meant?\n"
    );
    let rows = rows(&ran.out);
    assert_eq!((&*rows[0]["Class"], &*rows[0]["sum"]), ("'=1+1", "-2.50"));
    // What was judged once is not judged again under the same columns.
    bench.write("in.csv", &ran.out);
    let ran = bench.run(&judge(&["--pass-through"]));
    assert_eq!(ran.code, 2);
    assert!(
        ran.err
            .contains("column outcome: found a column that judge writes")
    );
}

#[test]
fn what_cannot_be_written_to() {
    let bench = Bench::new();
    bench.write("in.csv", GOOD);
    for (out, code, said) in [
        (
            "in.csv",
            2,
            "found the file that is read, expected another file to write",
        ),
        (".", 2, "found a folder, expected a file to write"),
        ("/dev/null", 2, "found not a plain file"),
        ("no/such/out.csv", 1, "cannot write no/such/out.csv"),
    ] {
        let ran = bench.run(&judge(&["-o", out]));
        assert_eq!(ran.code, code, "{}", ran.err);
        assert!(ran.err.contains(said), "{}", ran.err);
    }
    assert_eq!(bench.read("in.csv"), GOOD);
    let ran = bench.run(&["judge", "gone.csv", "--rules", "joint-policy-2016"]);
    assert_eq!(ran.code, 2);
    assert!(
        ran.err
            .contains("gone.csv: found no such file, expected a CSV file")
    );
}

#[test]
fn ids_are_checked_and_suggested() {
    let bench = Bench::new();
    bench.write("in.csv", GOOD);
    let ran = bench.run(&["judge", "in.csv", "--rules", "joint-policy-2O16"]);
    assert_eq!(ran.code, 2);
    assert_eq!(
        ran.err,
        "error: no rule set \"joint-policy-2O16\"\nhint: did you mean joint-policy-2016? twoline rules list shows all of them\n"
    );
    let ran = bench.run(&["judge", "in.csv", "--protocol", "joint-policy-2016"]);
    assert_eq!(
        (ran.code, ran.err.contains("which is a rule set")),
        (2, true)
    );
    assert_eq!(bench.run(&["judge", "in.csv"]).code, 2);
}

#[cfg(unix)]
#[test]
fn an_interrupt_leaves_nothing_behind() {
    use std::os::unix::process::ExitStatusExt;
    let bench = Bench::new();
    let mut many = GOOD.to_owned();
    for i in 0..400_000 {
        many.push('C');
        many.push_str(&i.to_string());
        many.push_str(",79,20/20,20/25\n");
    }
    bench.write("in.csv", many);
    let mut child = bench
        .command(&judge(&["-o", "out.csv"]))
        .stderr(Stdio::piped())
        .spawn()
        .expect("the program runs");
    // The file aside shows that the work has begun.
    while bench.names().len() < 2 {
        assert!(child.try_wait().expect("runs").is_none(), "ended too soon");
        std::thread::yield_now();
    }
    let pid = rustix::process::Pid::from_child(&child);
    rustix::process::kill_process(pid, rustix::process::Signal::INT).expect("sent");
    let output = child.wait_with_output().expect("ends");
    assert_eq!(output.status.signal(), None);
    assert_eq!(output.status.code(), Some(130));
    assert_eq!(
        String::from_utf8_lossy(&output.stderr),
        "error: stopped; nothing was written\n"
    );
    assert_eq!(bench.names(), ["in.csv"]);
}

#[test]
fn standard_input_is_read_and_a_broken_pipe_is_no_error() {
    let mut many = GOOD.to_owned();
    for i in 0..20_000 {
        many.push('C');
        many.push_str(&i.to_string());
        many.push_str(",79,20/20,20/25\n");
    }
    let mut child = twoline()
        .args(["judge", "-", "--rules", "joint-policy-2016"])
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the program runs");
    child
        .stdin
        .take()
        .expect("piped")
        .write_all(many.as_bytes())
        .expect("read to the end");
    let mut first = [0; 64];
    child
        .stdout
        .take()
        .expect("piped")
        .read_exact(&mut first)
        .expect("a line");
    // The pipe is closed here, long before all rows are written.
    let output = child.wait_with_output().expect("ends");
    assert_eq!(output.status.code(), Some(0));
    assert_eq!(String::from_utf8_lossy(&output.stderr), "");
}
