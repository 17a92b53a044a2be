//! Examination reports: every bad cell by file, row, column, found, expected; and what good rows become.

#![allow(clippy::panic)]

use twoline::domain::acuity::Notation;
use twoline::domain::exam::ExamField;
use twoline::intake::Problem;
use twoline::intake::exams::{ExamRow, read_exams};

fn read(text: &str) -> Result<Vec<ExamRow>, Vec<Problem>> {
    read_exams("reports.csv", text.as_bytes(), Some(Notation::Feet)).map_err(|p| p.kept().to_vec())
}

/// Expects one problem and checks its text whole up to the cure.
#[track_caller]
fn bad(text: &str, says: &str) {
    let problems = read(text).expect_err("the file is bad");
    assert_eq!(problems.len(), 1, "{problems:?}");
    let said = problems[0].to_string();
    assert!(said.contains(says), "{said}");
}

#[test]
fn a_row_is_read_by_its_header_in_any_order() {
    let rows = read(
        "axis_left,examined_on,best_left,cylinder_left,examiner_phone,code,sphere_left,findings\r\n\
         180,2026-12-02,40,-2.50,'+1 555 0100,482 913 5694,-1.00,H53.022;h52.12\r\n",
    )
    .expect("good");
    let [row] = &rows[..] else { panic!("{rows:?}") };
    assert_eq!(
        (row.code.as_str(), row.child_id.as_str()),
        ("482 913 5694", "")
    );
    let said = |field| row.report.get(field);
    assert_eq!(said(ExamField::AxisLeft).as_deref(), Some("180"));
    assert_eq!(said(ExamField::CylinderLeft).as_deref(), Some("-2.50"));
    assert_eq!(said(ExamField::BestLeft).as_deref(), Some("20/40"));
    assert_eq!(
        said(ExamField::ExaminerPhone).as_deref(),
        Some("+1 555 0100")
    );
    assert_eq!(said(ExamField::Findings).as_deref(), Some("H53.022;H52.12"));
    assert_eq!(said(ExamField::BestRight), None);
}

#[test]
fn what_a_header_lacks_or_has_too_much_is_named() {
    bad(
        "examined_on\n2026-12-02\n",
        "column code: found no such column, expected a column code or child_id",
    );
    bad(
        "code,examined_on,best_lft\n1,2026-12-02,40\n",
        "did you mean best_left?",
    );
    bad(
        "code,best_left\n1,40\n",
        "a column examined_on in the header",
    );
    bad("code,examined_on\n", "a header only");
    bad("", "an empty file");
    bad(
        "code;examined_on\n1;2026-12-02\n",
        "columns separated by semicolons",
    );
    bad("code,examined_on\n\"1,2026-12-02\n", "never closed");
}

#[test]
fn each_bad_cell_is_named_with_row_and_column() {
    let row = |column: &str, cell: &str| {
        format!("code,examined_on,{column}\n4829135694,2026-12-02,{cell}\n")
    };
    bad(
        &row("sphere_left", "99"),
        "reports.csv: row 2, column sphere_left: found \"99\", expected",
    );
    bad(&row("cylinder_right", "-16"), "column cylinder_right");
    bad(&row("axis_right", "181"), "column axis_right");
    bad(&row("glasses_axis_left", "0"), "column glasses_axis_left");
    bad(&row("best_right", "20/0"), "column best_right");
    bad(&row("amblyopia_left", "presnt"), "did you mean present?");
    bad(
        &row("findings", "lazy eye"),
        "ICD-10-CM codes separated by ;",
    );
    bad(&row("treatment", "glasses;patch"), "column treatment");
    bad(
        &row("return_on", "12/24/2026"),
        "seems to be month, day, year",
    );
    bad(&row("stereo_seconds", "0"), "1 to 5000");
    bad(&row("examiner", "\u{1b}[31mred"), "control characters");
    bad(
        &row("fundus_left", "nor\u{200b}mal"),
        "invisible characters",
    );
    bad(
        "code,child_id,examined_on\n,,2026-12-02\n",
        "row 2, column code: found nothing, expected the code on the form, or the child's id",
    );
    bad(
        "code,examined_on\n4829135694\n",
        "row 2: found 1 cell, expected 2",
    );
    // Every bad cell of every row, not only the first.
    let problems =
        read("code,examined_on,sphere_left,best_left\n1,soon,99,40\n2,2026-12-02,+1.00,20/0\n")
            .expect_err("bad");
    let places: Vec<(u64, &str)> = problems
        .iter()
        .map(|p| {
            (
                p.place.expect("a row").row,
                p.column.as_deref().expect("a column"),
            )
        })
        .collect();
    assert_eq!(
        places,
        [(2, "examined_on"), (2, "sphere_left"), (3, "best_left")]
    );
}
