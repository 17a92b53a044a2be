//! Citations and ages written out a second time: a rule file that differs fails.

use std::sync::Arc;

use super::support::local_form;
use twoline::domain::age::{AgeMonths, Grade};
use twoline::domain::outcome::{Basis, Source};
use twoline::rules::{Applies, Criterion, Kind, Library};

/// Every source of every shipped file with its basis, and the thresholds it stands for: written down
/// apart from the files.
const CITATIONS: &str = include_str!("../../data/citations.csv");

fn ages(applies: &Applies) -> String {
    match applies {
        Applies::Ages { from: 0, to: None } | Applies::Everyone | Applies::Grades(_) => {
            String::new()
        }
        Applies::Ages {
            from: 0,
            to: Some(to),
        } => format!(":..{to}"),
        Applies::Ages { from, to: None } => format!(":{from}.."),
        Applies::Ages { from, to: Some(to) } => format!(":{from}..{to}"),
    }
}

/// Every number of a file: the name of its place, and the source that stands for it.
type Numbers = Vec<(String, Arc<Source>)>;

fn of_criteria(criteria: &[Criterion]) -> Numbers {
    criteria
        .iter()
        .map(|c| (c.id.to_string(), Arc::clone(&c.source)))
        .collect()
}

/// Every shipped file: its id, the sources it declares, and its numbers with their sources.
fn files() -> Vec<(String, Vec<Arc<Source>>, Numbers)> {
    let library = Library::shipped();
    let mut out = Vec::new();
    for set in library.rule_sets() {
        let mut numbers = of_criteria(&set.criteria);
        if set.kind == Kind::Acuity {
            numbers.push(("credit".to_owned(), Arc::clone(&set.credit_source)));
        }
        out.push((set.id.to_string(), set.sources.clone(), numbers));
    }
    for grading in library.gradings() {
        let mut numbers: Numbers = grading
            .entries
            .iter()
            .map(|e| (e.id.to_string(), Arc::clone(&e.source)))
            .collect();
        for taken in &grading.taken {
            numbers.push((taken.word.replace(' ', "_"), Arc::clone(&taken.source)));
        }
        for window in &grading.windows {
            let name = format!("window{}", ages(&window.applies));
            numbers.push((name, Arc::clone(&window.source)));
        }
        out.push((grading.id.to_string(), grading.sources.clone(), numbers));
    }
    for protocol in library.protocols() {
        let mut numbers = of_criteria(&protocol.at_once.criteria);
        for policy in &protocol.not_testable {
            let name = format!("not_testable{}", ages(&policy.applies));
            numbers.push((name, Arc::clone(&policy.source)));
        }
        numbers.push(("settings".to_owned(), Arc::clone(&protocol.settings_source)));
        if protocol.first_fail_source != protocol.settings_source {
            numbers.push((
                "rescreen".to_owned(),
                Arc::clone(&protocol.first_fail_source),
            ));
        }
        out.push((protocol.id.to_string(), protocol.sources.clone(), numbers));
    }
    out
}

/// Rule sets with age bands: the ages that the source covers.
const COVERED: &[(&str, u32, Option<u32>)] = &[
    ("expert-panel-2015", 36, Some(72)),
    ("joint-policy-2016", 36, None),
    ("joint-policy-2003", 36, None),
    ("arizona-school", 36, None),
    ("texas-school", 0, None),
    ("england-school-entry", 48, Some(72)),
    ("ireland-school-entry", 48, Some(72)),
    ("iapb-school-6-9", 60, None),
    ("iapb-school-6-12", 60, None),
    ("nsw-preschool", 48, Some(60)),
    ("new-zealand-4y", 48, Some(60)),
    ("instrument-2013", 12, None),
    ("instrument-2021", 12, None),
    ("direct-referral", 36, Some(72)),
    ("plus-lens-2.00", 60, None),
    ("plus-lens-2.50", 60, None),
];

#[test]
fn citations_are_those_of_the_guidance() {
    let mut reader = csv::Reader::from_reader(CITATIONS.as_bytes());
    let written: Vec<csv::StringRecord> = reader.records().map(Result::unwrap).collect();
    let mut found: Vec<Vec<String>> = Vec::new();
    for (id, sources, numbers) in files() {
        for source in &sources {
            let speaks_for: Vec<&str> = numbers
                .iter()
                .filter(|(_, by)| **by == **source)
                .map(|(place, _)| place.as_str())
                .collect();
            found.push(vec![
                id.clone(),
                source.key.clone(),
                source.basis.word().to_owned(),
                source.citation.clone(),
                source.locator.clone(),
                source.quoted_in.clone(),
                speaks_for.join(" "),
            ]);
        }
    }
    let sorted = |row: &[String]| {
        let mut row = row.to_vec();
        let mut places: Vec<String> = row[6].split_whitespace().map(str::to_owned).collect();
        places.sort();
        row[6] = places.join(" ");
        row
    };
    let mut found: Vec<Vec<String>> = found.iter().map(|r| sorted(r)).collect();
    let mut written: Vec<Vec<String>> = written
        .iter()
        .map(|r| sorted(&r.iter().map(str::to_owned).collect::<Vec<_>>()))
        .collect();
    found.sort();
    written.sort();
    for (file, test) in found.iter().zip(&written) {
        assert_eq!(
            file, test,
            "left the rule file, right tests/data/citations.csv"
        );
    }
    assert_eq!(found.len(), written.len());
}

/// Each number has a citation, and what was read elsewhere says where; only practice needs no file.
#[test]
fn every_number_has_a_source_and_a_basis() {
    for (id, sources, numbers) in files() {
        assert!(!numbers.is_empty(), "{id}");
        for (place, source) in numbers {
            assert!(!source.citation.trim().is_empty(), "{id}/{place}");
            assert_eq!(
                source.basis == Basis::Secondary,
                !source.quoted_in.is_empty(),
                "{id}/{place}"
            );
            let declared = sources.iter().any(|s| **s == *source);
            assert!(
                declared || (source.basis == Basis::Practice && place == "credit"),
                "{id}/{place}"
            );
        }
    }
}

/// Of every kind of file: taking away any one source or basis is refused, with its place.
#[test]
fn no_file_loads_without_a_source_or_a_basis() {
    let library = Library::shipped();
    let texts = library
        .rule_sets()
        .map(|s| s.text.to_string())
        .chain(library.gradings().map(|g| g.text.to_string()))
        .chain(library.protocols().map(|p| p.text.to_string()));
    for text in texts.map(|t| local_form(&t)) {
        let load = |text: String| library.with_local([("local.toml".to_owned(), text)]);
        load(text.clone()).unwrap_or_else(|e| panic!("{e}"));
        let lines: Vec<&str> = text.lines().collect();
        for (at, line) in lines.iter().enumerate() {
            let Some(key) = ["source", "basis", "line_credit_source"]
                .into_iter()
                .find(|key| line.starts_with(&format!("{key} =")))
            else {
                continue;
            };
            let mut without = lines.clone();
            without.remove(at);
            let faults = load(without.join("\n")).err().map(|e| e.to_string());
            assert!(
                faults.is_some_and(|f| f.contains(&format!("`{key}` is missing"))),
                "line {} of\n{text}",
                at + 1
            );
        }
    }
}

/// No band has a hole or an overlap inside the ages its source covers, and none reaches beyond.
#[test]
fn bands_cover_the_ages_of_their_source() {
    for set in Library::shipped().rule_sets() {
        let listed = COVERED.iter().find(|c| c.0 == &*set.id);
        assert_eq!(
            listed.map(|c| (c.1, c.2)),
            set.span,
            "{}: the ages it speaks of",
            set.id
        );
        let Some((_, from, to)) = listed else {
            continue;
        };
        let mut findings: Vec<&str> = Vec::new();
        for criterion in set
            .criteria
            .iter()
            .filter(|c| matches!(c.applies, Applies::Ages { .. }))
        {
            let finding = criterion.id.rsplit_once('.').unwrap().0;
            if !findings.contains(&finding) && finding != "between-eyes" {
                findings.push(finding);
            }
        }
        for finding in findings {
            for age in 0..240 {
                let speaking = set
                    .criteria
                    .iter()
                    .filter(|c| {
                        c.id.rsplit_once('.').is_some_and(|(f, _)| f == finding)
                            && c.applies.holds_age(AgeMonths(age))
                    })
                    .count();
                let covered = *from <= age && to.is_none_or(|to| age < to);
                assert_eq!(
                    speaking,
                    usize::from(covered),
                    "{}/{finding} at {age}",
                    set.id
                );
            }
        }
    }
}

/// By grade: each grade of the set stands once with each finding.
#[test]
fn grades_stand_once_with_each_finding() {
    for (id, first) in [("missouri-school", "PK"), ("washington-school", "KG")] {
        let set = Library::shipped().rule_set(id).unwrap();
        assert!(set.by_grade);
        for finding in ["line", "near"] {
            for grade in [
                "PK", "KG", "01", "02", "03", "04", "05", "06", "07", "08", "09", "10", "11", "12",
            ] {
                let covered = first == "PK" || grade != "PK";
                let grade_of = Grade::parse(grade).unwrap();
                let speaking = set
                    .criteria
                    .iter()
                    .filter(|c| c.id.starts_with(finding))
                    .filter(
                        |c| matches!(&c.applies, Applies::Grades(list) if list.contains(&grade_of)),
                    )
                    .count();
                assert_eq!(speaking, usize::from(covered), "{id}/{finding}, {grade}");
            }
        }
    }
}

/// Tables of groups and bands: what is printed by age leaves no month of its row out, and neither do
/// the treatment windows and the policies for a child who could not be tested.
#[test]
fn tables_and_policies_have_no_hole() {
    // Row, ages from, up to but not including, as the guidance prints them.
    let rows: &[(&str, &str, &[&str], u32, u32)] = &[
        (
            "preschool-groups",
            "amblyopia, both eyes",
            &["amblyopia-both-eyes"],
            36,
            72,
        ),
        (
            "preschool-groups",
            "reduced acuity, both eyes",
            &["reduced-both-eyes"],
            36,
            72,
        ),
        (
            "preschool-groups",
            "reduced acuity, one eye",
            &["reduced-one-eye"],
            36,
            72,
        ),
        ("nsw-strabismus", "under 1 year", &["constant"], 0, 12),
        (
            "nsw-strabismus",
            "under 8 years, 8 years and over",
            &["unequal", "older"],
            0,
            1200,
        ),
        // 3 to 5 years.
        ("south-australia-acuity", "repeat", &["repeat"], 36, 72),
    ];
    let once = |bands: &[&Applies], from: u32, to: u32, what: &str| {
        for age in 0..1200 {
            let holding = bands.iter().filter(|b| b.holds_age(AgeMonths(age))).count();
            assert_eq!(
                holding,
                usize::from((from..to).contains(&age)),
                "{what} at {age} months"
            );
        }
    };
    let library = Library::shipped();
    for (id, row, starts, from, to) in rows {
        let grading = library.grading(id).unwrap();
        let bands: Vec<&Applies> = grading
            .entries
            .iter()
            .filter(|e| starts.iter().any(|s| e.id.split('.').next() == Some(s)))
            .map(|e| &e.applies)
            .collect();
        once(&bands, *from, *to, &format!("{id}, {row}"));
    }
    for grading in library.gradings() {
        for entry in grading
            .entries
            .iter()
            .filter(|e| e.applies != Applies::Everyone)
        {
            let listed = rows.iter().any(|(id, _, starts, ..)| {
                *id == &*grading.id && starts.iter().any(|s| entry.id.split('.').next() == Some(s))
            });
            // Printed for these ages alone: cannot fix and follow, 3 months to 3 years.
            let alone = &*entry.id == "no-fixation";
            assert!(
                listed || alone,
                "{}/{} is not listed here",
                grading.id,
                entry.id
            );
        }
        if !grading.windows.is_empty() {
            let bands: Vec<&Applies> = grading.windows.iter().map(|w| &w.applies).collect();
            once(&bands, 0, 1200, &grading.id);
        }
    }
    for protocol in library.protocols() {
        let bands: Vec<&Applies> = protocol.not_testable.iter().map(|p| &p.applies).collect();
        if !bands.is_empty() {
            once(&bands, 0, 1200, &protocol.id);
        }
    }
}

/// Where guidance leaves something open the file says so.
#[test]
fn what_is_open_stands_in_a_note() {
    let library = Library::shipped();
    for (id, part) in [
        (
            "nsw-preschool",
            "Exactly 6/9−2 lies in neither printed band: treated as refer",
        ),
        ("new-zealand-4y", "lies in neither printed band"),
        (
            "texas-school",
            "before the changes that followed October 2025",
        ),
    ] {
        let note = &library.rule_set(id).unwrap().note;
        assert!(note.contains(part), "{id}: {note}");
    }
}
