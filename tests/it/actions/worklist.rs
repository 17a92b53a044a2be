//! The worklist of referrals: who goes first, by which band, and why.

#![allow(clippy::panic)]

use twoline::actions::{Desk, DeskOptions, Secret, Standing, known, whole_reason};
use twoline::domain::age::AgeMonths;
use twoline::domain::codes::AcuityMethod;
use twoline::domain::field::Field;
use twoline::domain::outcome::{OutcomeKind, Urgency};
use twoline::rules::grading::Level;
use twoline::store::Put;

use super::{DAY, date, desk_with_children, open, readings, sign};

const LEFT_FAR_OFF: [(Field, &str); 4] = [
    (Field::CorrectionWorn, "none"),
    (Field::DistanceRight, "6/6"),
    (Field::DistanceLeft, "6/60"),
    (Field::Signs, "none"),
];

fn days_later(folder: &tempfile::TempDir, desk: Desk, today: &str) -> Desk {
    drop(desk);
    let options = DeskOptions {
        today: Some(date(today)),
        ..DeskOptions::default()
    };
    Desk::open(&folder.path().join("store"), &Secret::None, &options).expect("the same store")
}

/// Ages and bands: South Australia, reduced acuity (service bands, primary): 6/36 or worse within 30
/// days, 6/12 or worse but better than 6/36 within 90. Emergencies first: common practice.
#[test]
fn emergencies_then_the_date_to_act_by_then_days_waited() {
    let (folder, mut desk) = desk_with_children();
    assert_eq!(
        desk.set("triage", "south-australia-acuity").expect("set"),
        Put::New
    );
    let first = open(
        &mut desk,
        "2026-10-01",
        "us-preschool",
        AcuityMethod::Threshold,
    );
    let with = |left: &'static str, signs: &'static str| {
        [
            (Field::CorrectionWorn, "none"),
            (Field::DistanceRight, "6/6"),
            (Field::DistanceLeft, left),
            (Field::Signs, signs),
        ]
    };
    // 4 years: 6/15 refers at this age; band within 90 days of 1 October: 30 December.
    sign(&mut desk, &first, "Q-3", &with("6/15", "none"));
    let second = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    // 6/60 refers at once; band within 30 days of 14 October: 13 November.
    sign(&mut desk, &second, "Q-2", &LEFT_FAR_OFF);
    sign(&mut desk, &second, "Q-6", &with("6/6", "white_pupil:left"));
    sign(&mut desk, &second, "Q-1", &with("6/6", "none"));
    let desk = days_later(&folder, desk, "2026-11-15");

    let list = desk.worklist().expect("a list");
    let ids: Vec<&str> = list.referred.iter().map(|r| &*r.child_id).collect();
    assert_eq!(ids, ["Q-6", "Q-2", "Q-3"]);
    assert_eq!(list.overdue(), 2, "the emergency and 13 November");
    let [emergency, far, near] = &list.referred[..] else {
        panic!("{list:?}");
    };
    assert_eq!(emergency.urgency, Some(Urgency::Emergency));
    assert_eq!(emergency.place.reasons[0], "an emergency goes first");
    assert_eq!(far.act_by, Some(date("2026-11-13")));
    assert_eq!((far.days_waited, far.late(list.today)), (32, Some(2)));
    assert_eq!(far.standing.act_within_days(), Some(30));
    assert!(
        far.act_by_from
            .starts_with("South Australia, acuity, within 30 days"),
        "{far:?}"
    );
    assert!(
        far.band_source().contains("on presenting acuity"),
        "{}",
        far.band_source()
    );
    assert_eq!(near.act_by, Some(date("2026-12-30")));
    assert_eq!(near.days_waited, 45);
    assert!(near.order_reason().contains("waiting 45 days"));
    assert!(
        near.order_reason().contains("under 7 years"),
        "{}",
        near.order_reason()
    );
}

/// With no triage set there is no band, and the list says how to choose one.
#[test]
fn no_band_is_invented() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    sign(&mut desk, &day, "Q-2", &LEFT_FAR_OFF);
    let list = desk.worklist().expect("a list");
    assert!(
        list.bands.contains("twoline setting set triage"),
        "{}",
        list.bands
    );
    let [only] = &list.referred[..] else {
        panic!("{list:?}");
    };
    assert_eq!((only.act_by, only.band()), (None, String::new()));
    assert!(only.place.reasons[0] == "no date to act by", "{only:?}");
    assert!(desk.set("triage", "nowhere").is_err());
    assert!(
        desk.set("triage", "preschool-groups").is_err(),
        "no triage set"
    );
    assert!(desk.set("tirage", "none").is_err());
}

/// New South Wales and Queensland, strabismus (primary): under 1 year constant within 30 days;
/// Queensland asks for the onset, and an unknown one takes the soonest band it could be.
#[test]
fn where_two_sources_conflict_the_sooner_stands_and_both_are_shown() {
    let (_folder, mut desk) = desk_with_children();
    desk.set("triage", "south-australia-acuity,nsw-strabismus")
        .expect("set");
    let library = desk.library();
    let values = readings(&[
        (Field::DistanceRight, "6/6"),
        (Field::DistanceLeft, "6/12"),
        (Field::Cover, "constant"),
        (Field::Signs, "none"),
    ]);
    let standing = Standing::of(&library, &desk.triage_sets(), Some(AgeMonths(100)), &values);
    assert_eq!(
        standing
            .bands
            .iter()
            .map(twoline::actions::Said::level)
            .collect::<Vec<_>>(),
        [Some(Level::Within(90)), Some(Level::Within(30))]
    );
    assert_eq!(standing.act_within_days(), Some(30));
    let lines = standing.lines_for(OutcomeKind::Refer).join("\n");
    for said in [
        "New South Wales, strabismus says within 30 days; South Australia, acuity says within 90 days: the sooner is taken",
        "onset unknown: taken as the soonest it could be",
        "on presenting acuity; the band means best-corrected",
        "Preschool condition groups): none, 100 months is outside this table",
    ] {
        assert!(lines.contains(said), "not said: {said}\n{lines}");
    }
    assert!(standing.lines_for(OutcomeKind::Pass).is_empty());
}

/// Preschool study, Ophthalmology 2004;111:637 (primary): constant strabismus is group 1.
#[test]
fn the_whole_reason_and_the_history_show_the_group() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-preschool", AcuityMethod::Threshold);
    sign(
        &mut desk,
        &day,
        "Q-3",
        &[
            (Field::DistanceRight, "20/25"),
            (Field::DistanceLeft, "20/63"),
            (Field::Cover, "constant"),
            (Field::Signs, "none"),
        ],
    );
    let history = desk.history("Q-3").expect("read").expect("there");
    let visit = &history.visits[0];
    assert_eq!(visit.standing.group(), Some(1));
    let child = desk.day_child(&day, "Q-3").expect("a child");
    let (whole, _) = known(&child, &visit.readings);
    let outcome = twoline::actions::preview(&desk.library(), &day, &child, &whole).expect("judged");
    let lines = whole_reason(&outcome, &visit.standing);
    let at = |text: &str| {
        lines
            .iter()
            .position(|l| l.contains(text))
            .unwrap_or_else(|| panic!("{text}\n{lines:#?}"))
    };
    assert!(
        at("condition group (Preschool condition groups): group 1, strabismus")
            < at("A screening is not an eye examination")
    );
    assert!(at("no clinic bands: the programme has chosen no triage set") > 0);
    // Only acuity known: nothing is claimed, and what it could be is said.
    let acuity = readings(&[
        (Field::DistanceRight, "20/25"),
        (Field::DistanceLeft, "20/63"),
    ]);
    let standing = Standing::of(&desk.library(), &[], Some(AgeMonths(54)), &acuity);
    assert_eq!(standing.group(), None);
    let lines = standing.lines().join("\n");
    assert!(lines.contains("not known"), "{lines}");
    assert!(lines.contains("not enough was measured"), "{lines}");
}

#[test]
fn the_report_has_every_reason_in_columns() {
    let (_folder, mut desk) = desk_with_children();
    desk.set("triage", "south-australia-acuity").expect("set");
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    sign(&mut desk, &day, "Q-2", &LEFT_FAR_OFF);
    let report = desk.referrals_report(true, true).expect("a report");
    let text = String::from_utf8(report.bytes).expect("text");
    let mut rows = csv::Reader::from_reader(text.as_bytes());
    let header = rows.headers().expect("a header").clone();
    let row = rows.records().next().expect("a row").expect("whole");
    let cell = |name: &str| {
        let at = header
            .iter()
            .position(|h| h == name)
            .unwrap_or_else(|| panic!("{name}"));
        row[at].to_owned()
    };
    assert_eq!(cell("band"), "within 30 days");
    assert_eq!(cell("act_within_days"), "30");
    assert_eq!(cell("days_waited"), "0");
    assert_eq!(cell("severity_group"), "");
    assert!(cell("band_source").starts_with("South Australia, acuity: "));
    assert!(cell("order_reason").starts_with("act by 13 Nov 2026; waiting 0 days; "));
    assert!(report.about.contains("preschool-groups"));
    assert!(
        report
            .about
            .contains("A screening is not an eye examination")
    );
    let plain = desk.referrals_report(false, false).expect("a report");
    let plain = String::from_utf8(plain.bytes).expect("text");
    assert!(plain.contains("1. Okafor, Ada (Q-2)"), "{plain}");
    assert!(plain.contains("Order: emergencies"), "{plain}");
}
