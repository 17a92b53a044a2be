//! Citations and ages written out a second time: a rule file that differs fails.

use twoline::rules::{Applies, Library};

/// Every rule set and table: a part of the citation of each of its sources, in order of the file.
const CITED: &[(&str, &[&str])] = &[
    ("expert-panel-2015", &["Optom Vis Sci 2015;92:6–16"]),
    (
        "joint-policy-2016",
        &[
            "Pediatrics 2016;137(1):e20153597",
            "Pediatrics 2016;137(1):e20153597",
        ],
    ),
    ("joint-policy-2003", &["Pediatrics 2003;111:902–907"]),
    ("arizona-school", &["R9-13, Table 13.4 (2024-07-07)"]),
    (
        "missouri-school",
        &["Missouri school vision screening guideline"],
    ),
    ("washington-school", &["246-760-071"]),
    (
        "texas-school",
        &["§37.23, text before the changes that followed October 2025"],
    ),
    ("england-school-entry", &["Disparities, 5 October 2023"]),
    ("ireland-school-entry", &["Ireland and Northern Ireland"]),
    ("iapb-school-6-9", &["IAPB School Eye Health Guidelines"]),
    ("iapb-school-6-12", &["IAPB School Eye Health Guidelines"]),
    ("nsw-preschool", &["IOVS 2018 meeting abstract"]),
    (
        "new-zealand-4y",
        &["New Zealand vision screening at 4 years"],
    ),
    (
        "instrument-2003",
        &["J AAPOS 2003;7:314–316", "J AAPOS 2003;7:314–316"],
    ),
    ("instrument-2021", &["J AAPOS 2022;26:1.e1–1.e6"]),
    (
        "preschool-groups",
        &["Ophthalmology 2004;111:637–650", "common practice"],
    ),
];

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
    let library = Library::shipped();
    for (id, parts) in CITED {
        let sources = library
            .rule_set(id)
            .map(|s| &s.sources)
            .or_else(|| library.grading(id).map(|g| &g.sources))
            .unwrap_or_else(|| panic!("{id} is missing"));
        assert_eq!(sources.len(), parts.len(), "{id}");
        for (source, part) in sources.iter().zip(*parts) {
            assert!(source.citation.contains(part), "{id}: {}", source.citation);
        }
    }
}

/// No band has a hole or an overlap inside the ages its source covers, and none reaches beyond.
#[test]
fn bands_cover_the_ages_of_their_source() {
    use twoline::domain::age::AgeMonths;
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

#[test]
fn every_table_entry_names_a_source() {
    for grading in Library::shipped().gradings() {
        for entry in &grading.entries {
            assert!(
                !entry.source.citation.is_empty(),
                "{}/{}",
                grading.id,
                entry.id
            );
        }
        for window in &grading.windows {
            assert!(!window.source.citation.is_empty(), "{}", grading.id);
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
