//! Quillmere from its seed.

use std::collections::{BTreeMap, BTreeSet};

use chrono::NaiveDate;
use twoline::demo::{DEFAULT_SEED, District, generate};
use twoline::domain::age::AgeMonths;
use twoline::domain::codes::{Attempt, Consent, Correction, SignKind, Status, YesNo};
use twoline::domain::field::Field;
use twoline::domain::readings::{Eyes, ReadingContext, Readings};
use twoline::domain::roster::RosterChild;
use twoline::domain::text::is_unsafe;

fn day() -> NaiveDate {
    NaiveDate::from_ymd_opt(2026, 10, 14).expect("a date")
}

fn quillmere() -> District {
    generate(DEFAULT_SEED, day())
}

/// Checks every seed of a few: nothing below depends on a lucky one.
fn seeds() -> impl Iterator<Item = (u64, District)> {
    [DEFAULT_SEED, 0, 1, 7, 42, u64::MAX]
        .into_iter()
        .map(|seed| (seed, generate(seed, day())))
}

#[test]
fn a_seed_is_a_district() {
    assert_eq!(quillmere(), quillmere());
    assert_ne!(
        quillmere().children,
        generate(DEFAULT_SEED + 1, day()).children
    );
}

#[test]
fn three_sites_and_about_350_children() {
    for (seed, district) in seeds() {
        assert_eq!(district.sites.len(), 3);
        assert!(
            (330..=370).contains(&district.children.len()),
            "seed {seed}"
        );
        let mut sizes: BTreeMap<&str, usize> = BTreeMap::new();
        for child in &district.children {
            *sizes.entry(&child.site).or_default() += 1;
        }
        let codes: BTreeSet<&str> = district.sites.iter().map(|s| s.code).collect();
        assert_eq!(sizes.keys().copied().collect::<BTreeSet<_>>(), codes);
        assert_eq!(sizes[district.sites[0].code], 210, "seed {seed}");
    }
}

#[test]
fn ids_are_unique_and_no_acuity() {
    for (seed, district) in seeds() {
        let ids: BTreeSet<&str> = district
            .children
            .iter()
            .map(|c| c.child_id.as_str())
            .collect();
        assert_eq!(ids.len(), district.children.len(), "seed {seed}");
        for id in ids {
            let mut readings = Readings::default();
            readings
                .set(Field::DistanceRight, id, ReadingContext::default())
                .expect_err("an id is no acuity");
        }
    }
}

/// Children are as old as their grade on 1 September, and nobody is born after the day.
#[test]
fn ages_fit_the_grades() {
    let first_of_september = NaiveDate::from_ymd_opt(2026, 9, 1).expect("a date");
    for (seed, district) in seeds() {
        for child in &district.children {
            let Some(born) = child.dob else { continue };
            let years = AgeMonths::between(born, first_of_september)
                .expect("born")
                .0
                / 12;
            let grade = child.grade.expect("a grade").to_string();
            let expected = match grade.as_str() {
                "PK" => 3..=4,
                "KG" => 5..=5,
                n => {
                    let years = 5 + n.parse::<u32>().expect("a number");
                    years..=years
                }
            };
            assert!(expected.contains(&years), "seed {seed}: {child:?}");
        }
        let unknown = district.children.iter().filter(|c| c.dob.is_none()).count();
        assert!(
            (3..=8).contains(&unknown),
            "seed {seed}: {unknown} without birth date"
        );
    }
}

/// Any day of the year gives a district in which everybody is born.
#[test]
fn any_day() {
    for text in [
        "2026-01-15",
        "2026-08-31",
        "2026-09-01",
        "2028-02-29",
        "1990-12-31",
    ] {
        let day: NaiveDate = text.parse().expect("a date");
        let district = generate(3, day);
        for child in district.children.iter().filter_map(|c| c.dob) {
            let age = AgeMonths::between(child, day).expect("born before the day");
            assert!((36..=144).contains(&age.0), "{text}: {child}");
        }
    }
}

#[test]
fn families_that_every_district_has() {
    for (seed, district) in seeds() {
        let children = &district.children;
        let pairs = |alike: &dyn Fn(&RosterChild, &RosterChild) -> bool| {
            let mut count = 0;
            for (i, a) in children.iter().enumerate() {
                count += children[i + 1..].iter().filter(|b| alike(a, b)).count();
            }
            count
        };
        let twins = pairs(&|a, b| {
            a.family_name == b.family_name
                && a.dob.is_some()
                && a.dob == b.dob
                && a.given_name != b.given_name
                && a.details.guardian_name == b.details.guardian_name
                && a.details.guardian_phone == b.details.guardian_phone
        });
        assert!(twins >= 1, "seed {seed}: twins");
        let namesakes = pairs(&|a, b| {
            (&a.family_name, &a.given_name) == (&b.family_name, &b.given_name) && a.dob != b.dob
        });
        assert!(namesakes >= 1, "seed {seed}: two children with one name");
        assert!(
            children.iter().any(|c| c.family_name.chars().count() > 40),
            "a very long name"
        );
        let count =
            |what: &dyn Fn(&RosterChild) -> bool| children.iter().filter(|c| what(c)).count();
        assert!(
            count(&|c| c.details.consent == Some(Consent::No)) >= 3,
            "seed {seed}"
        );
        assert!(
            count(&|c| c.details.consent == Some(Consent::Unknown)) >= 10,
            "seed {seed}"
        );
        assert!(
            count(&|c| c.details.wears_glasses == Some(YesNo::Yes)) >= 15,
            "seed {seed}"
        );
        assert!(
            count(&|c| c.details.under_care == Some(YesNo::Yes)) >= 1,
            "seed {seed}"
        );
        assert!(
            count(&|c| c.details.guardian_phone.is_empty()) >= 5,
            "seed {seed}"
        );
    }
}

/// Names come in several scripts, and none of the texts is unsafe to show.
#[test]
fn several_scripts() {
    for (seed, district) in seeds() {
        let all: String = district
            .children
            .iter()
            .map(|c| c.given_name.as_str())
            .collect();
        for (script, range) in [
            ("Latin with accents", 'À'..='ɏ'),
            ("Vietnamese", 'Ạ'..='ỹ'),
            ("Greek", 'Ͱ'..='Ͽ'),
            ("Cyrillic", 'Ѐ'..='ӿ'),
            ("Arabic", '\u{600}'..='\u{6FF}'),
            ("Devanagari", '\u{900}'..='\u{97F}'),
            ("Chinese", '一'..='鿿'),
            ("Korean", '가'..='힣'),
        ] {
            assert!(
                all.chars().any(|c| range.contains(&c)),
                "seed {seed}: {script}"
            );
        }
        assert!(!all.chars().any(is_unsafe), "seed {seed}");
    }
}

/// Nobody can be reached: telephone numbers and addresses are those kept free for fiction.
#[test]
fn nobody_can_be_reached() {
    for (seed, district) in seeds() {
        for child in &district.children {
            let d = &child.details;
            assert!(
                d.guardian_phone.is_empty() || d.guardian_phone.starts_with("555-01"),
                "seed {seed}"
            );
            assert!(d.guardian_email.is_empty() || d.guardian_email.ends_with("@example.invalid"));
        }
    }
}

/// About six in ten of the school have come, with every state that a day brings.
#[test]
fn part_way_through_the_day() {
    for (seed, district) in seeds() {
        let site = district.sites[0].code;
        let known = |id: &str| district.children.iter().find(|c| c.child_id == id);
        let share = district.visits.len() * 100 / 210;
        assert!((55..=65).contains(&share), "seed {seed}: {share}%");
        let mut once = BTreeSet::new();
        for visit in district.visits.iter().chain(&district.earlier_visits) {
            let child = known(&visit.child_id).expect("on the roster");
            assert_eq!(child.site, site);
            assert!(
                once.insert((&visit.child_id, visit.attempt)),
                "seed {seed}: once each"
            );
            assert!(
                district
                    .screeners
                    .iter()
                    .any(|s| s.initials == visit.screener)
            );
        }
        let count = |what: &dyn Fn(&Readings) -> bool| {
            district.visits.iter().filter(|v| what(&v.readings)).count()
        };
        assert!(
            count(&|r| r.status == Some(Status::Absent)) >= 1,
            "seed {seed}: absent"
        );
        assert!(
            count(&|r| r.status == Some(Status::LeftEarly)) >= 1,
            "seed {seed}: left early"
        );
        assert_eq!(
            count(&|r| r.has_sign(SignKind::WhitePupil)),
            1,
            "seed {seed}: urgent sign"
        );
        assert!(
            count(&|r| r.correction == Some(Correction::LeftAtHome)) >= 1,
            "seed {seed}"
        );
        assert!(
            count(&Readings::chart_not_testable) >= 3,
            "seed {seed}: not testable"
        );
        assert!(
            count(&|r| r.instrument != Eyes::default()) >= 2,
            "seed {seed}: instrument"
        );
    }
}

/// Whoever opted out or is under care was not tested.
#[test]
fn the_roster_is_respected() {
    for (seed, district) in seeds() {
        for visit in &district.visits {
            let child = district
                .children
                .iter()
                .find(|c| c.child_id == visit.child_id);
            let details = &child.expect("on the roster").details;
            if details.consent == Some(Consent::No) || details.under_care == Some(YesNo::Yes) {
                assert!(!visit.readings.anything_tested(), "seed {seed}: {visit:?}");
            }
            if details.wears_glasses == Some(YesNo::No) {
                let owns_none = [None, Some(Correction::None)];
                assert!(
                    owns_none.contains(&visit.readings.correction),
                    "seed {seed}: {visit:?}"
                );
            }
        }
    }
}

/// Two children of the earlier day have a rescreen due today; one has had it.
#[test]
fn one_rescreen_is_still_due() {
    for (seed, district) in seeds() {
        assert_eq!(day() - district.earlier_day, chrono::TimeDelta::days(14));
        assert_eq!(district.earlier_visits.len(), 6, "seed {seed}");
        let rescreened: Vec<&str> = district
            .visits
            .iter()
            .filter(|v| v.attempt == Attempt::Rescreen)
            .map(|v| v.child_id.as_str())
            .collect();
        assert_eq!(rescreened.len(), 1, "seed {seed}");
        assert!(
            district
                .earlier_visits
                .iter()
                .any(|v| v.child_id == rescreened[0])
        );
    }
}

/// Readings contradict nothing and read back from their text.
#[test]
fn readings_are_sound() {
    for (seed, district) in seeds() {
        for visit in district.visits.iter().chain(&district.earlier_visits) {
            assert_eq!(
                visit.readings.contradictions(),
                [],
                "seed {seed}: {visit:?}"
            );
            let mut again = Readings::default();
            for (field, text) in visit.readings.recorded() {
                again
                    .set(field, &text, ReadingContext::default())
                    .expect("reads back");
            }
            assert_eq!(again, visit.readings, "seed {seed}");
        }
    }
}
