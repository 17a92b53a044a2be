//! The sample files for a newcomer: a roster of about forty children and their results.

use chrono::NaiveDate;

use super::random::Random;
use super::roster::children;
use super::sheet::{roster_csv, row};
use super::visits::{Story, told};
use super::{DEFAULT_SEED, DemoVisit};
use crate::domain::age::Grade;
use crate::domain::codes::{Attempt, Consent, YesNo};
use crate::domain::field::Field;
use crate::domain::readings::{ReadingContext, Readings};
use crate::domain::roster::{RosterChild, RosterDetails};

/// The screening day of the sample files.
pub const SAMPLE_DAY: &str = "2026-10-14";

/// How many children the sample files hold.
const SIZE: usize = 40;

/// Five children whose outcomes are known: id, given and family name, birth date, grade, class,
/// wears glasses, consent, readings.
type Known = (
    [&'static str; 6],
    YesNo,
    Consent,
    &'static [(Field, &'static str)],
);

const KNOWN: [Known; 5] = [
    (
        ["Q10001", "Marigold", "Tansley", "2020-03-02", "01", "1A"],
        YesNo::No,
        Consent::Yes,
        &[
            (Field::Status, "present"),
            (Field::AcuityMethod, "threshold"),
            (Field::CorrectionWorn, "none"),
            (Field::DistanceRight, "20/20"),
            (Field::DistanceLeft, "20/25"),
            (Field::PlusLens, "blurred"),
            (Field::Signs, "none"),
        ],
    ),
    (
        ["Q10002", "Linh", "Đỗ", "2020-09-01", "01", "1B"],
        YesNo::No,
        Consent::Yes,
        &[
            (Field::Status, "present"),
            (Field::AcuityMethod, "threshold"),
            (Field::CorrectionWorn, "none"),
            (Field::DistanceRight, "20/20"),
            (Field::DistanceLeft, "20/32"),
            (Field::Signs, "none"),
        ],
    ),
    (
        [
            "Q10003",
            "Emeka",
            "Brightwater",
            "2022-04-10",
            "PK",
            "Guests",
        ],
        YesNo::No,
        Consent::Yes,
        &[
            (Field::Status, "present"),
            (Field::CorrectionWorn, "none"),
            (Field::DistanceRight, "NT:shy"),
            (Field::DistanceLeft, "NT:shy"),
            (Field::SphereLeft, "+1.25"),
            (Field::CylinderLeft, "-0.50"),
            (Field::AxisLeft, "180"),
            (Field::InstrumentRight, "no_reading"),
            (Field::InstrumentLeft, "ok"),
            (Field::InstrumentWorn, "no"),
            (Field::Signs, "none"),
        ],
    ),
    (
        ["Q10004", "Rosalind", "Ferro", "2018-05-20", "03", "3A"],
        YesNo::Yes,
        Consent::Yes,
        &[
            (Field::Status, "present"),
            (Field::AcuityMethod, "threshold"),
            (Field::CorrectionWorn, "left_at_home"),
            (Field::DistanceRight, "20/80"),
            (Field::DistanceLeft, "20/63"),
            (Field::Signs, "none"),
        ],
    ),
    (
        ["Q10005", "Tobias", "Eastlake", "2021-01-08", "KG", "KA"],
        YesNo::No,
        Consent::No,
        &[
            (Field::Status, "opted_out"),
            (Field::Signs, "white_pupil:left"),
        ],
    ),
];

/// The children of the sample files with their visits, in the order of the files.
fn sample() -> Vec<(RosterChild, DemoVisit)> {
    let Ok(day) = SAMPLE_DAY.parse::<NaiveDate>() else {
        return Vec::new();
    };
    let mut random = Random::new(DEFAULT_SEED);
    let children = children(&mut random, day);
    let today = told(&mut random, &children, day).today;
    let mut seen: Vec<Story> = Vec::new();
    // What makes a child worth showing: a story not seen yet or a missing birth date, then twins
    // and namesakes, then anybody.
    let mut ranked: Vec<(u8, usize, &RosterChild, &DemoVisit)> = Vec::new();
    for (place, (story, visit)) in today.iter().enumerate() {
        let Some(child) = children.iter().find(|c| c.child_id == visit.child_id) else {
            continue;
        };
        let new = !seen.contains(story);
        seen.push(*story);
        let rank = if new || child.dob.is_none() {
            0
        } else if children.iter().any(|other| alike(child, other)) {
            1
        } else {
            2
        };
        if visit.attempt == Attempt::First {
            ranked.push((rank, place, child, visit));
        }
    }
    ranked.sort_by_key(|(rank, place, ..)| (*rank, *place));
    ranked.truncate(SIZE - KNOWN.len());
    ranked.sort_by_key(|(_, place, ..)| *place);
    let chosen = ranked
        .into_iter()
        .map(|(_, _, child, visit)| (child.clone(), visit.clone()));
    KNOWN.iter().map(known).chain(chosen).collect()
}

/// Says whether two children are twins or namesakes.
fn alike(a: &RosterChild, b: &RosterChild) -> bool {
    a.child_id != b.child_id
        && a.family_name == b.family_name
        && (a.given_name == b.given_name
            || (a.dob == b.dob && a.details.guardian_name == b.details.guardian_name))
}

/// Returns `sample_data/roster.csv`.
pub fn sample_roster() -> String {
    let sample = sample();
    roster_csv(sample.iter().map(|(child, _)| child))
}

/// Returns `sample_data/results.csv`: the columns that any of the visits fills.
pub fn sample_results() -> String {
    let sample = sample();
    let fields: Vec<Field> = Field::ALL
        .iter()
        .copied()
        .filter(|field| sample.iter().any(|(_, v)| v.readings.get(*field).is_some()))
        .collect();
    let fixed = ["child_id", "dob", "grade", "screened_on", "attempt"];
    let words = fields.iter().map(|field| field.word());
    let mut out = row(fixed.into_iter().chain(words));
    for (child, visit) in &sample {
        let known = [
            child.child_id.clone(),
            child.dob.map_or(String::new(), |v| v.to_string()),
            child.grade.map_or(String::new(), |g| g.to_string()),
            SAMPLE_DAY.to_owned(),
            visit.attempt.word().to_owned(),
        ];
        let values = fields
            .iter()
            .map(|field| visit.readings.get(*field).unwrap_or_default());
        out += &row(known.into_iter().chain(values));
    }
    out
}

fn known((texts, glasses, consent, values): &Known) -> (RosterChild, DemoVisit) {
    let [child_id, given_name, family_name, dob, grade, class] = *texts;
    let mut readings = Readings::default();
    for (field, text) in *values {
        // The texts are fixed and a test reads them all back.
        let _ = readings.set(*field, text, ReadingContext::default());
    }
    let child = RosterChild {
        child_id: child_id.into(),
        family_name: family_name.into(),
        given_name: given_name.into(),
        dob: dob.parse().ok(),
        grade: Grade::parse(grade),
        site: super::roster::SITES[0].code.into(),
        details: RosterDetails {
            class: class.into(),
            guardian_name: format!("Guardian of {given_name}"),
            guardian_phone: format!("555-01{}", &child_id[4..]),
            consent: Some(*consent),
            wears_glasses: Some(*glasses),
            ..RosterDetails::default()
        },
    };
    let visit = DemoVisit {
        child_id: child_id.into(),
        attempt: Attempt::First,
        readings,
        station: "east",
        screener: "ND",
    };
    (child, visit)
}
