//! Real adolescents against counts made outside the project.
//!
//! Source: CDC/NCHS NHANES 2001–2004 vision and demographics files, public domain; expected counts
//! from an independent script with exact fractions.

use std::collections::BTreeMap;

use twoline::domain::age::AgeMonths;
use twoline::domain::field::Field;
use twoline::domain::readings::{ReadingContext, Readings};
use twoline::rules::{Case, Library, judge_rule_set};

const ROWS: &str = include_str!("../../data/nhanes_2001_2004_ages_12_19.csv");
const EXPECTED: &str = include_str!("../../data/nhanes_2001_2004_expected.csv");

fn people() -> Vec<(AgeMonths, Readings)> {
    let mut reader = csv::Reader::from_reader(ROWS.as_bytes());
    let headers = reader.headers().unwrap().clone();
    reader
        .records()
        .map(|record| {
            let record = record.unwrap();
            let mut readings = Readings::default();
            let mut age = 0;
            for (name, value) in headers.iter().zip(&record) {
                if name == "age_months" {
                    age = value.parse().unwrap();
                } else if let Some(field) = Field::from_word(name) {
                    readings
                        .set(field, value, ReadingContext::default())
                        .unwrap_or_else(|e| panic!("{}: {e}", &record[0]));
                }
            }
            (AgeMonths(age), readings)
        })
        .collect()
}

#[test]
fn counts_are_those_of_the_independent_script() {
    let people = people();
    assert_eq!(people.len(), 4_658);
    let mut expected = csv::Reader::from_reader(EXPECTED.as_bytes());
    let mut wrong = Vec::new();
    let mut sets = 0;
    for row in expected.records() {
        let row = row.unwrap();
        let set = Library::shipped().rule_set(&row[0]).unwrap();
        let mut kinds: BTreeMap<&str, usize> = BTreeMap::new();
        let mut criteria: BTreeMap<String, usize> = BTreeMap::new();
        for (age, readings) in &people {
            let mut case = Case::new(readings);
            case.age = Some(*age);
            let outcome = judge_rule_set(set, &case);
            *kinds.entry(outcome.kind.word()).or_default() += 1;
            for id in outcome.criteria {
                *criteria.entry(id).or_default() += 1;
            }
        }
        let found = format!(
            "{},{},{},{},{}",
            &row[0],
            kinds.get("pass").unwrap_or(&0),
            kinds.get("refer").unwrap_or(&0),
            kinds.get("incomplete").unwrap_or(&0),
            criteria
                .iter()
                .map(|(id, n)| format!("{id} {n}"))
                .collect::<Vec<_>>()
                .join("; ")
        );
        let wanted = row.iter().collect::<Vec<_>>().join(",");
        if found != wanted {
            wrong.push(format!("found  {found}\nwanted {wanted}"));
        }
        sets += 1;
    }
    assert_eq!(sets, 8);
    assert!(wrong.is_empty(), "\n{}", wrong.join("\n"));
}
