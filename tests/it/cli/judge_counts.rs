//! Real readings judged by every shipped rule set that an outside count exists for.
//!
//! Source: CDC/NCHS NHANES 2001–2004 vision and demographics files, ages 12 to 19, public domain;
//! the counts are those of an independent script in exact fractions (`tests/data/README.md`).

use std::collections::BTreeMap;

use super::{Bench, rows};

const SAMPLE: &[u8] = include_bytes!("../../data/nhanes_2001_2004_ages_12_19.csv");
const EXPECTED: &str = include_str!("../../data/nhanes_2001_2004_expected.csv");

#[test]
fn counts_agree_with_the_independent_script() {
    let bench = Bench::new();
    bench.write("in.csv", SAMPLE);
    let mut checked = Vec::new();
    for expected in rows(EXPECTED) {
        let id = &expected["rule_set"];
        if twoline::rules::Library::shipped().rule_set(id).is_none() {
            continue;
        }
        let ran = bench.run(&["judge", "in.csv", "--rules", id]);
        assert_eq!((ran.code, ran.err.as_str()), (0, ""), "{id}");
        let judged = rows(&ran.out);
        assert_eq!(judged.len(), 4_658);
        let count = |outcome: &str| judged.iter().filter(|r| r["outcome"] == outcome).count();
        for outcome in ["pass", "refer", "incomplete"] {
            assert_eq!(
                count(outcome).to_string(),
                expected[outcome],
                "{id} {outcome}"
            );
        }
        let mut criteria: BTreeMap<&str, u32> = BTreeMap::new();
        for row in &judged {
            for criterion in row["criteria"].split(';').filter(|c| !c.is_empty()) {
                *criteria.entry(criterion).or_default() += 1;
            }
        }
        let listed: Vec<String> = criteria.iter().map(|(id, n)| format!("{id} {n}")).collect();
        assert_eq!(
            listed.join("; "),
            expected["criteria_that_referred"],
            "{id}"
        );
        checked.push(id.clone());
    }
    for id in ["joint-policy-2016", "instrument-2013", "instrument-2021"] {
        assert!(checked.iter().any(|c| c == id), "{id} was not checked");
    }
}
