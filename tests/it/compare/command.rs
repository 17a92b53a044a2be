//! `twoline rules compare` and `rules show --format`, through the real binary.

use super::super::cli::Bench;

const FILE: &str = "child_id,site,age_months,distance_right,distance_left\n\
    A1,Elm,73,20/20,20/32\n\
    A2,Elm,73,20/20,20/20\n\
    A3,Oak,50,20/50,20/50\n\
    A4,Oak,50,,20/20\n";

#[test]
fn a_results_file_is_compared_and_the_flips_are_written() {
    let bench = Bench::new();
    bench.write("r.csv", FILE);
    let ran = bench.run(&[
        "rules",
        "compare",
        "joint-policy-2016",
        "iapb-school-6-12",
        "--on",
        "r.csv",
        "-o",
        "f.csv",
    ]);
    assert_eq!(ran.code, 0, "{}", ran.err);
    for line in [
        "joint-policy-2016 and iapb-school-6-12 on 4 children of r.csv",
        "only joint-policy-2016 refers 2/4 50.0% (15.0–85.0); for 1 of them the other cannot say, which is no pass",
        "iapb-school-6-12 instead of joint-policy-2016: 2 fewer examinations for 4 children, 500.0 for each 1,000",
        "Children who flip: 2",
        "A1  6 y 1 m  joint-policy-2016 refer, iapb-school-6-12 pass  distance_right=20/20 distance_left=20/32",
    ] {
        assert!(ran.out.lines().any(|l| l == line), "{line}\n{}", ran.out);
    }
    assert!(
        ran.out.lines().any(|l| l.starts_with("Oak ")),
        "{}",
        ran.out
    );
    let flips = bench.read("f.csv");
    let flips = super::super::cli::rows(flips.trim_start_matches('\u{feff}'));
    let ids: Vec<&str> = flips.iter().map(|r| r["child_id"].as_str()).collect();
    assert_eq!(ids, ["A1", "A3"]);
    assert_eq!(flips[1]["iapb-school-6-12"], "incomplete");
}

#[test]
fn a_column_nobody_knows_and_a_set_nobody_knows_are_refused() {
    let bench = Bench::new();
    bench.write(
        "r.csv",
        "child_id,age_months,distance_rihgt,distance_left\nA1,73,20/20,20/20\n",
    );
    let ran = bench.run(&[
        "rules",
        "compare",
        "joint-policy-2016",
        "joint-policy-2003",
        "--on",
        "r.csv",
    ]);
    assert_eq!((ran.code, ran.out.as_str()), (2, ""));
    assert!(ran.err.contains("distance_rihgt"), "{}", ran.err);
    bench.write("r.csv", "child_id,age_months,distance_right\nA1,73,20/20\n");
    let ran = bench.run(&[
        "rules",
        "compare",
        "joint-policy-2061",
        "joint-policy-2003",
        "--on",
        "r.csv",
    ]);
    assert_eq!(ran.code, 2);
    assert!(
        ran.err.contains("did you mean joint-policy-2016?"),
        "{}",
        ran.err
    );
}

#[test]
fn a_child_counts_once_as_last_seen() {
    let bench = Bench::new();
    bench.write(
        "r.csv",
        "child_id,dob,screened_on,attempt,distance_right,distance_left\n\
         A1,2020-09-01,2026-10-28,rescreen,20/20,20/20\n\
         A1,2020-09-01,2026-10-14,first,20/80,20/20\n",
    );
    let ran = bench.run(&[
        "rules",
        "compare",
        "joint-policy-2016",
        "joint-policy-2003",
        "--on",
        "r.csv",
    ]);
    assert_eq!(ran.code, 0, "{}", ran.err);
    assert!(ran.out.contains("on 1 children"), "{}", ran.out);
    assert!(
        ran.out.contains("joint-policy-2016  refers 0/1"),
        "{}",
        ran.out
    );
}

#[test]
fn a_set_prints_as_a_page_of_its_own_and_as_a_table() {
    let bench = Bench::new();
    let page = bench.run(&["rules", "show", "joint-policy-2016", "--format", "html"]);
    assert_eq!(page.code, 0);
    for part in [
        "<!DOCTYPE html>",
        "@media print",
        "worse than 20/32",
        "10.1542/peds.2015-3597",
        "not an eye examination",
    ] {
        assert!(page.out.contains(part), "{part}");
    }
    for outside in ["<script", "<link", "src=", "@import", "url("] {
        assert!(!page.out.contains(outside), "{outside}");
    }
    let table = bench.run(&["rules", "show", "joint-policy-2016", "--format", "csv"]);
    let rows = super::super::cli::rows(table.out.trim_start_matches('\u{feff}'));
    let set = twoline::rules::Library::shipped()
        .rule_set("joint-policy-2016")
        .expect("shipped");
    assert_eq!(rows.len(), set.criteria.len());
    for (row, criterion) in rows.iter().zip(&set.criteria) {
        assert_eq!(row["refer"], *criterion.threshold);
        assert_eq!(row["criterion"], *criterion.id);
        assert!(!row["source"].is_empty() && !row["basis"].is_empty());
    }
    for form in ["html", "csv"] {
        let ran = bench.run(&["rules", "show", "us-school", "--format", form]);
        assert_eq!(ran.code, 0);
        assert!(ran.out.contains("joint-policy-2016"));
    }
}
