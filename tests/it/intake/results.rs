//! Results files: every bad input by file, row, column, found, expected; and what good rows become.

use chrono::NaiveDate;
use twoline::domain::acuity::{Line, Notation};
use twoline::domain::age::AgeMonths;
use twoline::domain::codes::{Attempt, YesNo};
use twoline::domain::field::Field;
use twoline::intake::results::{Options, ResultRow, read_results};
use twoline::intake::{Place, Problem};

fn judge_options() -> Options {
    Options {
        takes_age: true,
        takes_repeats: true,
        ..Options::default()
    }
}

fn read(text: &str) -> Result<Vec<ResultRow>, Vec<Problem>> {
    read_results("results.csv", text.as_bytes(), judge_options(), None)
        .map_err(|p| p.kept().to_vec())
}

/// Expects one problem in row 2 and checks its four parts.
#[track_caller]
fn bad(text: &str, column: &str, found: &str, expected: &str) {
    let problems = read(text).expect_err("the row is bad");
    assert_eq!(problems.len(), 1, "{problems:?}");
    let problem = &problems[0];
    assert_eq!(&*problem.file, "results.csv");
    assert_eq!(problem.place, Some(Place { row: 2, line: 2 }));
    assert_eq!(problem.column.as_deref(), Some(column));
    assert_eq!(problem.found.as_str(), found);
    assert!(
        problem.expected.contains(expected),
        "expected: {}",
        problem.expected
    );
}

#[test]
fn acuities_that_are_none() {
    let row = |cell: &str| format!("child_id,distance_right\nA,{cell}\n");
    bad(
        &row("20/0"),
        "distance_right",
        "20/0",
        "a line between 20/10 and 20/2000",
    );
    bad(&row("40/20"), "distance_right", "40/20", "20/40");
    bad(
        &row("hello"),
        "distance_right",
        "hello",
        "an acuity such as 20/40",
    );
    bad(
        &row(">20/200"),
        "distance_right",
        ">20/200",
        "one of two readings",
    );
    bad(&row("0.5"), "distance_right", "0.5", "0.5d");
    bad(&row("40"), "distance_right", "40", "20/40 or 6/40");
}

#[test]
fn refraction_that_cannot_be() {
    let row = |cells: &str| format!("child_id,sphere_right,cylinder_right,axis_right\nA,{cells}\n");
    bad(
        &row("1.00,-0.50,"),
        "axis_right",
        "",
        "an axis from 1 to 180",
    );
    bad(&row("1.00,-0.50,0"), "axis_right", "0", "1 to 180");
    bad(&row("1.00,-0.50,181"), "axis_right", "181", "1 to 180");
    bad(&row("31.00,0,"), "sphere_right", "31.00", "±30.00");
    bad(&row("1.00,15.25,90"), "cylinder_right", "15.25", "±15.00");
    let rows = read(&row("-2.50,0,")).expect("an axis may be empty beside a cylinder of 0");
    assert_eq!(
        rows[0].readings.get(Field::SphereRight).as_deref(),
        Some("-2.50")
    );
}

#[test]
fn dates_that_cannot_be() {
    let row =
        |dob: &str| format!("child_id,dob,screened_on,distance_right\nA,{dob},2026-10-14,20/20\n");
    bad(
        &row("2019-02-29"),
        "dob",
        "2019-02-29",
        "February 2019 has 28 days",
    );
    bad(
        &row("2019-13-01"),
        "dob",
        "2019-13-01",
        "the month is 01 to 12",
    );
    bad(&row("31/12/2019"), "dob", "31/12/2019", "day, month, year");
    bad(
        &row("43830"),
        "dob",
        "43830",
        "spreadsheet's own day number",
    );
    bad(
        &row("2026-10-15"),
        "dob",
        "2026-10-15",
        "on or before the screening day, 2026-10-14",
    );
    assert_eq!(
        read(&row("2026-10-14")).expect("born today")[0].age,
        Some(AgeMonths(0))
    );
}

#[test]
fn ages_that_disagree_and_days_that_are_missing() {
    let text = "dob,screened_on,age_months,distance_right\n2020-03-02,2026-10-14,78,20/20\n";
    bad(text, "age_months", "78", "79 months");
    let agreeing = text.replace(",78,", ",79,");
    assert_eq!(read(&agreeing).expect("agrees")[0].age, Some(AgeMonths(79)));
    bad(
        "dob,screened_on,distance_right\n2020-03-02,,20/20\n",
        "screened_on",
        "",
        "the screening day",
    );
    bad(
        "age_months,distance_right\n6y,20/20\n",
        "age_months",
        "6y",
        "completed months",
    );
    let problems = read("dob,distance_right\n2020-03-02,20/20\n").expect_err("no day at all");
    assert_eq!(problems[0].column.as_deref(), Some("screened_on"));
    assert_eq!(
        problems[0].cure.as_deref(),
        Some("or give the screening day with --date")
    );
    let day = NaiveDate::from_ymd_opt(2026, 10, 14);
    let options = Options {
        day,
        ..judge_options()
    };
    let rows = read_results(
        "r.csv",
        b"dob,distance_right\n2020-03-02,20/20\n",
        options,
        None,
    )
    .expect("the day is given");
    assert_eq!(
        (rows[0].age, rows[0].screened_on),
        (Some(AgeMonths(79)), day)
    );
}

#[test]
fn columns_unknown_missing_and_twice() {
    let problems = read("child_id,distence_right\nA,20/20\n").expect_err("unknown column");
    assert_eq!(problems.len(), 1);
    assert_eq!(problems[0].place, Some(Place { row: 1, line: 1 }));
    assert_eq!(problems[0].column.as_deref(), Some("number 2"));
    assert_eq!(problems[0].found.as_str(), "distence_right");
    assert_eq!(
        &*problems[0].expected,
        "a known column (did you mean distance_right?)"
    );
    let problems = read("signs,signs\nnone,none\n").expect_err("twice");
    assert_eq!(&*problems[0].expected, "each column once");
    let problems = read("child_id,grade\nA,1\n").expect_err("no reading");
    assert_eq!(problems[0].found.as_str(), "no column with a reading");
    assert_eq!(problems[0].cure, None);
    // Unknown columns are left alone here, so that the misspelt one is named beside.
    let options = Options {
        pass_through: true,
        ..Options::default()
    };
    let misspelt = b"child_id,distence_right\nA,20/20\n";
    let text = read_results("r.csv", misspelt, options, None)
        .expect_err("no reading")
        .to_string();
    for part in [
        "no column with a reading",
        "is distence_right meant as distance_right?",
    ] {
        assert!(text.contains(part), "{text}");
    }
    let options = Options {
        needs_child: true,
        ..Options::default()
    };
    let problems = read_results(
        "r.csv",
        b"childid,age_months,signs\nA,79,none\n",
        options,
        None,
    )
    .expect_err("missing");
    let columns: Vec<_> = problems
        .kept()
        .iter()
        .map(|p| p.column.as_deref())
        .collect();
    assert_eq!(columns, [Some("number 1"), Some("child_id")]);
    assert_eq!(
        problems.kept()[1].cure.as_deref(),
        Some("is childid meant?")
    );
}

#[test]
fn rows_of_another_length() {
    let problems = read("child_id,distance_right\nA\nB,20/20,20/20\n").expect_err("ragged");
    let said: Vec<String> = problems.iter().map(ToString::to_string).collect();
    assert_eq!(
        said,
        [
            "results.csv: row 2: found 1 cell, expected 2, as in the header (cells are missing at the end, or a line break cut the row)",
            "results.csv: row 3: found 3 cells, expected 2, as in the header (a comma inside a cell needs quotes around the cell)",
        ]
    );
}

#[test]
fn what_must_hold_between_columns() {
    bad(
        "chart_distance_m,signs\n3,none\n",
        "used_distance_m",
        "",
        "the distance used",
    );
    bad(
        "testable,distance_left\nno,20/20\n",
        "distance_left",
        "20/20",
        "testable=no",
    );
    bad(
        "signs\nwhite_pupl:left\n",
        "signs",
        "white_pupl:left",
        "did you mean white_pupil?",
    );
    bad(
        "attempt,signs\nsecond,none\n",
        "attempt",
        "second",
        "one of first, rescreen",
    );
    bad("grade,signs\nYear 4,none\n", "grade", "Year 4", "a grade");
    let rows = read("grade,attempt,testable\nK,rescreen,no\n").expect("good");
    assert_eq!(rows[0].attempt, Some(Attempt::Rescreen));
    assert_eq!(rows[0].readings.testable, Some(YesNo::No));
}

#[test]
fn control_characters_and_formulas_do_not_get_in() {
    bad(
        "child_id,signs\nA\u{1b}[31m,none\n",
        "child_id",
        "A\u{FFFD}[31m",
        "control characters (U+001B)",
    );
    bad(
        "child_id,signs\nA\0,none\n",
        "child_id",
        "A\u{FFFD}",
        "control characters (U+0000)",
    );
    bad(
        "child_id,signs\n=1+1,none\n",
        "child_id",
        "=1+1",
        "does not run",
    );
    bad(
        "child_id,signs\nA,none\u{200B}\n",
        "signs",
        "none\u{FFFD}",
        "invisible characters (U+200B)",
    );
    let options = Options {
        pass_through: true,
        ..judge_options()
    };
    let problems = read_results("r.csv", b"signs,remark\nnone,a\x07b\n", options, None)
        .expect_err("a bell in a column handed through");
    assert_eq!(problems.kept()[0].column.as_deref(), Some("remark"));
    for (text, refused) in [
        (
            "signs,\"remark\"\nnone,\"two\r\nlines\tand a tab\"\n",
            false,
        ),
        ("signs,remark\nnone,\"hidden\rshown\"\n", true),
        ("signs,re\u{1b}[2Jmark\nnone,x\n", true),
    ] {
        let read = read_results("r.csv", text.as_bytes(), options, None);
        assert_eq!(read.is_err(), refused, "{text:?}");
    }
}

#[test]
fn the_same_child_day_and_visit_twice() {
    let text = b"child_id,screened_on,attempt,signs\nA,2026-10-14,first,none\nA,2026-10-14,rescreen,none\nA,2026-10-14,,none\n";
    let options = Options {
        needs_child: true,
        ..Options::default()
    };
    let problems = read_results("r.csv", text, options, None).expect_err("twice");
    assert_eq!(problems.total(), 1);
    let problem = &problems.kept()[0];
    assert_eq!(problem.place, Some(Place { row: 4, line: 4 }));
    assert_eq!(problem.cure.as_deref(), Some("the same stands in row 2"));
    let rows = read_results("r.csv", text, judge_options(), None).expect("allowed for judge");
    assert_eq!(rows.len(), 3);
}

#[test]
fn a_bare_pass_line_on_a_critical_line_day() {
    let pass = |_, _| Line::new(Notation::Feet, 32_000);
    let text = b"distance_right,distance_left,acuity_method\n20/32,20/40,critical_line\n20/32,20/40,threshold\n";
    let rows = read_results("r.csv", text, judge_options(), Some(&pass)).expect("good");
    let shown: Vec<_> = rows
        .iter()
        .flat_map(|r| [Field::DistanceRight, Field::DistanceLeft].map(|f| r.readings.get(f)))
        .map(Option::unwrap_or_default)
        .collect();
    assert_eq!(shown, [">=20/32", "<20/32", "20/32", "20/40"]);
}

#[test]
fn header_order_case_and_mark_do_not_matter() {
    let rows = read("\u{FEFF} Distance_Left ,CHILD_ID\r\n\"20/40-1\",A 1\r\n").expect("good");
    assert_eq!(rows[0].child_id, "A 1");
    assert_eq!(
        rows[0].readings.get(Field::DistanceLeft).as_deref(),
        Some("20/40-1")
    );
}
