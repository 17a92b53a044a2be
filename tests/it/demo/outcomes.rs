//! What the rules say to the sample files and to the day of Quillmere.

use std::collections::BTreeMap;

use chrono::NaiveDate;
use twoline::demo::{DEFAULT_SEED, SAMPLE_DAY, generate, sample_results};
use twoline::domain::age::{AgeMonths, Grade};
use twoline::domain::codes::{Attempt, Consent, YesNo};
use twoline::domain::field::Field;
use twoline::domain::outcome::{Outcome, OutcomeKind, Urgency};
use twoline::domain::readings::{ReadingContext, Readings};
use twoline::rules::{Case, Library, judge_protocol, judge_rule_set};

fn date(text: &str) -> NaiveDate {
    text.parse().expect("a date")
}

/// Judges every row of the sample results as `judge` does: from the file alone.
fn judged(judge: impl Fn(&Case<'_>) -> Outcome) -> BTreeMap<String, Outcome> {
    let text = sample_results();
    let mut reader = csv::Reader::from_reader(text.as_bytes());
    let header = reader.headers().expect("a header").clone();
    let mut out = BTreeMap::new();
    for row in reader.records() {
        let row = row.expect("a row");
        let mut readings = Readings::default();
        for (name, cell) in header.iter().zip(&row) {
            if let Some(field) = Field::from_word(name) {
                readings
                    .set(field, cell, ReadingContext::default())
                    .expect("a value of its field");
            }
        }
        let day = date(SAMPLE_DAY);
        let case = Case {
            age: row[1]
                .parse()
                .ok()
                .and_then(|born| AgeMonths::between(born, day)),
            grade: Grade::parse(&row[2]),
            on: Some(day),
            ..Case::new(&readings)
        };
        out.insert(row[0].to_owned(), judge(&case));
    }
    out
}

/// Every outcome and every urgency occurs in the sample under `us-school`, so that a newcomer sees
/// each of them once.
#[test]
fn the_sample_shows_every_outcome() {
    let library = Library::shipped();
    let protocol = library.protocol("us-school").expect("shipped");
    let outcomes = judged(|case| judge_protocol(library, protocol, case));
    for kind in OutcomeKind::ALL {
        assert!(
            outcomes.values().any(|o| o.kind == *kind),
            "{}",
            kind.word()
        );
    }
    for urgency in Urgency::ALL {
        assert!(
            outcomes.values().any(|o| o.urgency == Some(*urgency)),
            "{}",
            urgency.word()
        );
    }
    let of = |id: &str| &outcomes[id];
    assert_eq!(of("Q10001").kind, OutcomeKind::Pass);
    assert_eq!(of("Q10002").kind, OutcomeKind::Rescreen);
    assert_eq!(of("Q10002").due_on, Some(date("2026-10-28")));
    assert_eq!(of("Q10004").kind, OutcomeKind::Incomplete);
    assert_eq!(of("Q10004").due_on, Some(date("2026-10-28")));
    assert_eq!(of("Q10005").kind, OutcomeKind::Refer);
    assert_eq!(of("Q10005").urgency, Some(Urgency::Emergency));
    assert_eq!(of("Q10005").act_by, Some(date("2026-10-14")));
}

/// The local sample loads beside the shipped rules and judges by its own band and comparator:
/// 20/40 passes at 73 months and 20/50 does not, where 20/40 fails the shipped 2016 policy.
#[test]
fn the_local_rule_set_judges_by_its_own_numbers() {
    let path = format!(
        "{}/sample_data/local_rules.toml",
        env!("CARGO_MANIFEST_DIR")
    );
    let text = std::fs::read_to_string(path).expect("the sample is there");
    let library = Library::shipped()
        .with_local([("local_rules.toml".to_owned(), text)])
        .unwrap_or_else(|why| panic!("{why}"));
    let local = library.rule_set("quillmere-school").expect("loaded");
    assert!(local.local.is_some(), "it carries who approved it");
    let policy = library.rule_set("joint-policy-2016").expect("shipped");
    for (months, line, here, there) in [
        (59, "20/50", OutcomeKind::Pass, OutcomeKind::Refer),
        (59, "20/63", OutcomeKind::Refer, OutcomeKind::Refer),
        (60, "20/40", OutcomeKind::Pass, OutcomeKind::Refer),
        (60, "20/50", OutcomeKind::Refer, OutcomeKind::Refer),
        (83, "20/40", OutcomeKind::Pass, OutcomeKind::Refer),
        (84, "20/40", OutcomeKind::Refer, OutcomeKind::Refer),
        (84, "20/32", OutcomeKind::Pass, OutcomeKind::Pass),
        (
            35,
            "20/20",
            OutcomeKind::Incomplete,
            OutcomeKind::Incomplete,
        ),
    ] {
        let mut readings = Readings::default();
        for field in [Field::DistanceRight, Field::DistanceLeft] {
            readings
                .set(field, line, ReadingContext::default())
                .expect("a line");
        }
        let case = Case {
            age: Some(AgeMonths(months)),
            ..Case::new(&readings)
        };
        assert_eq!(
            judge_rule_set(local, &case).kind,
            here,
            "{months} months, {line}"
        );
        assert_eq!(
            judge_rule_set(policy, &case).kind,
            there,
            "{months} months, {line}"
        );
    }
}

/// The day of Quillmere has what the demonstration promises, whatever the seed.
#[test]
fn the_day_shows_what_it_promises() {
    let library = Library::shipped();
    let day = date("2026-10-14");
    for seed in [DEFAULT_SEED, 1, 2] {
        let district = generate(seed, day);
        let protocol = library.protocol(district.protocol).expect("shipped");
        let mut kinds: BTreeMap<&str, usize> = BTreeMap::new();
        let mut risks = Vec::new();
        let mut emergencies = 0;
        for visit in &district.visits {
            let child = district
                .children
                .iter()
                .find(|c| c.child_id == visit.child_id);
            let child = child.expect("on the roster");
            let case = Case {
                age: child.dob.and_then(|born| AgeMonths::between(born, day)),
                grade: child.grade,
                on: Some(day),
                attempt: visit.attempt,
                consent: child.details.consent,
                under_care: child.details.under_care == Some(YesNo::Yes),
                ..Case::new(&visit.readings)
            };
            let outcome = judge_protocol(library, protocol, &case);
            *kinds.entry(outcome.kind.word()).or_default() += 1;
            emergencies += usize::from(outcome.urgency == Some(Urgency::Emergency));
            risks.extend(outcome.risks);
            if child.details.consent == Some(Consent::No) && visit.attempt == Attempt::First {
                assert_ne!(
                    outcome.kind,
                    OutcomeKind::Pass,
                    "seed {seed}: {}",
                    child.child_id
                );
            }
        }
        for kind in OutcomeKind::ALL {
            assert!(
                kinds.get(kind.word()).is_some_and(|n| *n > 0),
                "seed {seed}: {kinds:?}"
            );
        }
        let passes = kinds["pass"] * 100 / district.visits.len();
        assert!((60..90).contains(&passes), "seed {seed}: {passes}% pass");
        assert_eq!(emergencies, 1, "seed {seed}");
        for risk in ["anisometropic", "interocular_difference", "strabismic"] {
            assert!(
                risks.iter().any(|r| r.word() == risk),
                "seed {seed}: {risk}"
            );
        }
    }
}
