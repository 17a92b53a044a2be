//! Many examination reports from one file: whole or not at all, and nothing twice.

use super::Bench;
use super::follow_up::{code_in, referred};

/// The day of the reports, after that of the referrals.
const LATER: &str = "2026-12-09";

/// Two referred children, Q-2 by the outcome and Q-1 by hand, with the code of the first.
fn two_referred() -> (Bench, String) {
    let bench = referred();
    let code = code_in(&bench.ok(&["refer", "show", "Q-2"]));
    bench.ok(&["refer", "open", "Q-1", "--reason", "teacher's concern"]);
    (bench, code)
}

impl Bench {
    /// Runs on the later day what must be refused, and returns what it said.
    fn refused_later(&self, args: &[&str]) -> String {
        let out = std::process::Command::new(env!("CARGO_BIN_EXE_twoline"))
            .current_dir(self.folder.path())
            .env_remove("TWOLINE_PASSPHRASE_FILE")
            .env("TWOLINE_STORE", self.path("store"))
            .stdin(std::process::Stdio::null())
            .args(args)
            .args(["--today", LATER])
            .output()
            .expect("the program runs");
        let err = String::from_utf8_lossy(&out.stderr).into_owned();
        assert_eq!(out.status.code(), Some(2), "{args:?}\n{err}");
        err
    }

    /// Expects a file of these rows to be refused, and returns what was said.
    fn bad_reports(&self, text: &str) -> String {
        self.write("reports.csv", text);
        self.refused_later(&["exam", "read", "reports.csv", "--yes"])
    }
}

fn good(code: &str) -> String {
    format!(
        "treatment,best_left,code,child_id,examined_on,sphere_left,cylinder_left,axis_left,\
         amblyopia_left,no_abnormality,glasses_sphere_left,examiner\n\
         glasses;patching,20/50,{code},,2026-12-02,+4.50,-1.00,180,present,,+3.50,\"Alder, P.\"\n\
         none,,,Q-1,2026-12-03,,,,none,yes,,\n"
    )
}

#[test]
fn reports_of_many_children_are_read_shown_and_closed() {
    let (bench, code) = two_referred();
    let head = bench.head();
    bench.write("reports.csv", good(&code));
    let out = bench.on(LATER, &["exam", "read", "reports.csv", "--dry-run"]);
    assert!(out.contains("2 new, 0 unchanged"), "{out}");
    assert!(out.contains("row 2: Q-2 Okafor, Ada"), "{out}");
    assert!(out.contains("confirmed: amblyopia, left eye"), "{out}");
    assert!(
        out.contains("of the 2 new: 1 confirmed, 1 not, 0 do not say"),
        "{out}"
    );
    assert!(out.contains("Confirmed: the examiner reported"), "{out}");
    assert!(out.contains("nothing was written"), "{out}");
    // Without a terminal there is nobody to ask.
    let err = bench.refused_later(&["exam", "read", "reports.csv"]);
    assert!(err.contains("--yes writes without asking"), "{err}");
    assert_eq!(bench.head(), head);

    let out = bench.on(LATER, &["exam", "read", "reports.csv", "--yes"]);
    assert!(out.contains("saved; store head"), "{out}");
    let out = bench.on(LATER, &["refer", "show", &code]);
    assert!(out.contains("closed: examined, examiner's form"), "{out}");
    assert!(out.contains("examiner: Alder, P."), "{out}");
    assert!(out.contains("glasses, sphere, left eye: +3.50"), "{out}");
    let out = bench.on(LATER, &["refer", "show", "Q-1"]);
    assert!(out.contains("closed: examined"), "{out}");
    assert!(out.contains("nothing was confirmed"), "{out}");

    // The same file again, and a report twice in a file, change nothing.
    let head = bench.head();
    let out = bench.on(LATER, &["exam", "read", "reports.csv", "--yes"]);
    assert!(out.contains("0 new, 2 unchanged"), "{out}");
    assert!(out.contains("nothing was written"), "{out}");
    assert_eq!(bench.head(), head);
    bench.ok(&["verify"]);
}

#[test]
fn the_same_report_twice_in_a_file_counts_once() {
    let (bench, code) = two_referred();
    bench.write(
        "reports.csv",
        format!(
            "code,child_id,examined_on,no_abnormality\n\
             {code},,2026-12-02,yes\n,Q-2,2026-12-02,yes\n"
        ),
    );
    let out = bench.on(LATER, &["exam", "read", "reports.csv", "--yes"]);
    assert!(out.contains("1 new, 1 unchanged"), "{out}");
    let out = bench.on(LATER, &["refer", "show", &code]);
    assert_eq!(
        out.matches("report received, examiner's form").count(),
        1,
        "{out}"
    );
}

#[test]
fn one_bad_row_keeps_the_whole_file_out_and_every_bad_row_is_named() {
    let (bench, code) = two_referred();
    let head = bench.head();
    let mut wrong = code.clone().into_bytes();
    wrong[3] = if wrong[3] == b'9' { b'0' } else { wrong[3] + 1 };
    let wrong = String::from_utf8(wrong).unwrap();
    let err = bench.bad_reports(&format!(
        "code,examined_on,cylinder_left,axis_left\n\
         {code},2026-12-02,,\n\
         {wrong},2026-12-02,,\n\
         0000000098,2026-12-02,,\n\
         4.82914E+09,2026-12-02,,\n\
         {code},2026-10-01,-1.00,\n"
    ));
    let line = |n: usize| {
        let start = format!("reports.csv: row {n}, column ");
        let at = err.find(&start).unwrap_or_else(|| panic!("{start}\n{err}"));
        err[at..].lines().next().unwrap_or_default().to_owned()
    };
    assert!(line(3).contains("two are swapped"), "{err}");
    assert!(line(3).contains("Okafor, Ada (Q-2)"), "{err}");
    assert!(line(4).contains("a referral of this store"), "{err}");
    assert!(line(5).contains("format the column as text"), "{err}");
    assert!(
        line(6).contains("another report of Okafor, Ada (Q-2) stands in row 2"),
        "{err}"
    );
    assert!(err.contains("nothing was written"), "{err}");

    let err = bench.bad_reports(&format!(
        "code,examined_on,cylinder_left,axis_left,glasses_axis_right\n{code},2026-10-01,-1.00,,90\n"
    ));
    assert!(
        err.contains(
            "column examined_on: found \"2026-10-01\", expected a date on or after the referral"
        ),
        "{err}"
    );
    assert!(err.contains("column axis_left"), "{err}");
    assert!(
        err.contains("column glasses_cylinder_right: found nothing"),
        "{err}"
    );
    let err = bench.bad_reports(&format!("code,examined_on\n{code},2026-12-10\n"));
    assert!(err.contains("not after today"), "{err}");
    let err = bench.bad_reports(&format!("code,examined_on\n{code},\n"));
    assert!(err.contains("the date of the examination"), "{err}");
    let err = bench.bad_reports("child_id,examined_on\nQ-3,2026-12-02\n");
    assert!(err.contains("a child with a referral"), "{err}");
    let err = bench.bad_reports(&format!(
        "code,child_id,examined_on\n{code},Q-1,2026-12-02\n"
    ));
    assert!(err.contains("one of the two cells is wrong"), "{err}");
    assert_eq!(bench.head(), head);

    // A referral that is closed takes another report only when it is open again.
    bench.ok(&["step", "Q-1", "closed", "--closing", "declined"]);
    let head = bench.head();
    let err = bench.bad_reports(&format!(
        "child_id,code,examined_on\nQ-1,,2026-12-02\n,{code},2026-12-02\n"
    ));
    assert!(
        err.contains("an open referral; that of Tansley, Marigold (Q-1) is closed: declined"),
        "{err}"
    );
    assert!(err.contains("reopened"), "{err}");
    assert_eq!(bench.head(), head);
    assert!(
        bench
            .on(LATER, &["refer", "show", &code])
            .contains("family not told")
    );
}

#[test]
fn a_code_that_lost_its_leading_zero_is_recognised() {
    // 0123456778 is a code by ISO/IEC 7064 MOD 97-10 (from memory); a spreadsheet writes nine digits.
    let code = twoline::domain::form_code::FormCode::new(1_234_567).digits();
    assert!(code.starts_with('0'));
    let (bench, _) = two_referred();
    let err = bench.bad_reports(&format!("code,examined_on\n{},2026-12-02\n", &code[1..]));
    assert!(err.contains(&format!("is {code} meant?")), "{err}");
}
