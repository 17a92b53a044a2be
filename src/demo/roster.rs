//! The children of Quillmere.

use chrono::{Datelike, Days, NaiveDate};

use super::Site;
use super::names::{Name, adult_given, another_given, name};
use super::random::Random;
use crate::domain::age::Grade;
use crate::domain::codes::{Consent, YesNo};
use crate::domain::roster::{RosterChild, RosterDetails};

/// The three sites; the first is screened today.
pub const SITES: [Site; 3] = [
    Site {
        code: "QE",
        name: "Quillmere East Elementary",
    },
    Site {
        code: "TL",
        name: "Tansy Lane Elementary",
    },
    Site {
        code: "LH",
        name: "Lantern House Preschool",
    },
];

/// One class: site, grade as the roster writes it, class, teacher, children, youngest age in
/// completed years on 1 September.
type Class = (
    &'static str,
    &'static str,
    &'static str,
    &'static str,
    usize,
    i32,
);

const CLASSES: [Class; 21] = [
    ("QE", "KG", "KA", "Ms. Halloran", 17, 5),
    ("QE", "KG", "KB", "Mr. Pym", 18, 5),
    ("QE", "01", "1A", "Ms. Okafor", 18, 6),
    ("QE", "01", "1B", "Mrs. Lind", 17, 6),
    ("QE", "02", "2A", "Mr. Baptiste", 18, 7),
    ("QE", "02", "2B", "Ms. Greer", 17, 7),
    ("QE", "03", "3A", "Ms. Vasile", 18, 8),
    ("QE", "03", "3B", "Mr. Tolland", 17, 8),
    ("QE", "04", "4A", "Mrs. Achterberg", 18, 9),
    ("QE", "04", "4B", "Ms. Duong", 17, 9),
    ("QE", "05", "5A", "Mr. Whitcombe", 18, 10),
    ("QE", "05", "5B", "Ms. Salcedo", 17, 10),
    ("TL", "KG", "K", "Ms. Prewitt", 16, 5),
    ("TL", "01", "1", "Mr. Oyelaran", 16, 6),
    ("TL", "02", "2", "Mrs. Stannard", 16, 7),
    ("TL", "03", "3", "Ms. Kirigan", 16, 8),
    ("TL", "04", "4", "Mr. Delf", 16, 9),
    ("TL", "05", "5", "Ms. Marchetti", 15, 10),
    ("LH", "PK", "Owls", "Ms. Fairley", 15, 4),
    ("LH", "PK", "Hedgehogs", "Mr. Nakano", 15, 3),
    ("LH", "PK", "Otters", "Ms. Brandvold", 15, 3),
];

/// Returns everybody, in the order of the classes and by family name inside each.
pub fn children(random: &mut Random, day: NaiveDate) -> Vec<RosterChild> {
    let mut out = Vec::new();
    let mut number = 10_400;
    for class in &CLASSES {
        let mut members: Vec<(Name, RosterChild)> = (0..class.4)
            .map(|_| {
                let name = name(random);
                let child = child(random, &name, class, day);
                (name, child)
            })
            .collect();
        curiosities(random, class.2, &mut members);
        members.sort_by(|(_, a), (_, b)| {
            (&a.family_name, &a.given_name).cmp(&(&b.family_name, &b.given_name))
        });
        for (_, mut child) in members {
            number += 1 + random.below(3);
            child.child_id = format!("Q{number}");
            out.push(child);
        }
    }
    out
}

/// Puts in the families that every district has: twins, namesakes, names longer than any column,
/// birth dates that nobody wrote down.
fn curiosities(random: &mut Random, class: &str, members: &mut [(Name, RosterChild)]) {
    if class == "1A"
        && let [(name, first), (_, second), ..] = members
    {
        second.given_name = another_given(name, random);
        second.family_name.clone_from(&first.family_name);
        second.dob = first.dob;
        second.details = RosterDetails {
            wears_glasses: second.details.wears_glasses,
            under_care: None,
            last_exam_on: None,
            ..first.details.clone()
        };
    }
    let Some((_, last)) = members.last_mut() else {
        return;
    };
    let renamed: Option<(&str, &str, &str)> = match class {
        "1B" | "2A" => Some(("Noah", "Marlow", "M")),
        "KA" => Some((
            "Maximiliana Theodora Augustina",
            "Featherstonehaugh-Montgomery de la Fuente Villanueva",
            "F",
        )),
        "3A" => Some((
            "Wilhelmina-Josephine",
            "Papadimitrakopoulou-Konstantinidou",
            "F",
        )),
        "KB" | "2B" | "4B" | "Otters" => {
            last.dob = None;
            None
        }
        _ => None,
    };
    if let Some((given, family, sex)) = renamed {
        last.given_name = given.into();
        last.family_name = family.into();
        last.details.sex = sex.into();
        last.details.language = "English".into();
        last.details.guardian_name = format!("{} {family}", adult_given("English", random));
    }
}

fn child(random: &mut Random, name: &Name, class: &Class, day: NaiveDate) -> RosterChild {
    let (site, grade, class_name, teacher, _, years) = *class;
    let guardian = format!("{} {}", adult_given(name.language, random), name.family);
    let reachable = !random.percent(7);
    let phone = format!("555-01{:02}", random.below(100));
    let glasses_share = match years {
        ..=4 => 3,
        5 => 6,
        6..=7 => 9,
        _ => 16,
    };
    let glasses = random.percent(glasses_share);
    let under_care = glasses && random.percent(25);
    let examined = (glasses && random.percent(50)).then(|| 40 + random.below(800) as u64);
    RosterChild {
        child_id: String::new(),
        family_name: name.family.clone(),
        given_name: name.given.clone(),
        dob: Some(birth_date(random, years, day)),
        grade: Grade::parse(grade),
        site: site.into(),
        details: RosterDetails {
            class: class_name.into(),
            teacher: teacher.into(),
            sex: name.sex.into(),
            language: name.language.into(),
            special_education: random.percent(8).then_some(YesNo::Yes),
            guardian_name: guardian,
            guardian_phone: if reachable { phone } else { String::new() },
            guardian_email: if random.percent(70) {
                format!("family.{}@example.invalid", 10_000 + random.below(90_000))
            } else {
                String::new()
            },
            guardian_address: if random.percent(80) {
                let number = 1 + random.below(180);
                format!("{number} {}, Quillmere", random.word(&STREETS))
            } else {
                String::new()
            },
            consent: Some(match random.below(100) {
                0..3 => Consent::No,
                3..12 => Consent::Unknown,
                _ => Consent::Yes,
            }),
            wears_glasses: match random.below(100) {
                0..6 => None,
                _ => Some(if glasses { YesNo::Yes } else { YesNo::No }),
            },
            last_exam_on: examined.and_then(|days| day.checked_sub_days(Days::new(days))),
            under_care: under_care.then_some(YesNo::Yes),
            history: history(random).into(),
            ..RosterDetails::default()
        },
    }
}

/// A birth date of a child who was so many years old, and no more, on 1 September before the day
/// (the date by which schools sort children into grades).
fn birth_date(random: &mut Random, years: i32, day: NaiveDate) -> NaiveDate {
    let school_year = day.year() - i32::from(day.month() < 9);
    let youngest = NaiveDate::from_ymd_opt(school_year - years, 9, 1).unwrap_or(day);
    let days = random.below(365) as u64;
    youngest
        .checked_sub_days(Days::new(days))
        .unwrap_or(youngest)
}

fn history(random: &mut Random) -> &'static str {
    match random.below(100) {
        0..2 => "family_amblyopia",
        2..4 => "parent_refractive_error",
        4..6 => "headaches",
        6 => "teacher_concern;squinting",
        7 => "preterm_under_32_weeks",
        8..20 => "none",
        _ => "",
    }
}

const STREETS: [&str; 8] = [
    "Tansy Lane",
    "Mill Row",
    "Old Quarry Road",
    "Sorrel Street",
    "Bellwether Close",
    "Upper Ferry Street",
    "Larkspur Court",
    "Cooper's Yard",
];
