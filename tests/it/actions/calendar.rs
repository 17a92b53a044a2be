//! Working days are counted on the school calendar of the site.

use twoline::actions::{CalendarChange, Desk, DeskOptions, Put, Secret};
use twoline::domain::codes::AcuityMethod;
use twoline::domain::field::Field;
use twoline::domain::school_calendar::SchoolCalendar;

use super::{DAY, date, desk_with_children, open, sign};

/// A protocol of an invented programme: 10 working days, common practice.
const PROTOCOL: &str = r#"id = "quillmere-days"
title = "Quillmere, working days"
edition = "2026"
kind = "protocol"
rule_sets = ["joint-policy-2016", "urgent-signs"]
required = ["distance acuity, each eye"]
rescreen_working_days = 10
approved_by = "Dr. R. Quill"
approved_on = "2026-08-01"
"#;

const TWO_STEPS: [(Field, &str); 4] = [
    (Field::CorrectionWorn, "none"),
    (Field::DistanceRight, "20/20"),
    (Field::DistanceLeft, "20/32"),
    (Field::Signs, "none"),
];

fn with_protocol() -> (tempfile::TempDir, Desk) {
    let (folder, desk) = desk_with_children();
    drop(desk);
    let rules = folder.path().join("store/rules");
    std::fs::create_dir_all(&rules).expect("a folder");
    std::fs::write(rules.join("days.toml"), PROTOCOL).expect("written");
    let options = DeskOptions {
        today: Some(date(DAY)),
        ..DeskOptions::default()
    };
    let desk = Desk::open(&folder.path().join("store"), &Secret::None, &options).expect("a desk");
    (folder, desk)
}

/// 14 October 2026 is a Wednesday; ten working days later is Wednesday 28 October, and with a week
/// without school Wednesday 4 November.
#[test]
fn a_rescreen_is_due_on_a_school_day_of_this_site() {
    let (_folder, mut desk) = with_protocol();
    let day = open(&mut desk, DAY, "quillmere-days", AcuityMethod::Threshold);
    let plain = sign(&mut desk, &day, "Q-2", &TWO_STEPS);
    assert_eq!(plain.outcome.due_on, Some(date("2026-10-28")));
    assert!(
        plain.outcome.reasons.contains("no school calendar"),
        "{}",
        plain.outcome.reasons
    );

    let holiday = SchoolCalendar::parse_holiday("2026-10-19..2026-10-23").expect("a holiday");
    let add = CalendarChange {
        add: vec![holiday],
        ..CalendarChange::default()
    };
    assert!(desk.change_calendar("XX", &add).is_err(), "no such site");
    assert_eq!(desk.change_calendar("QE", &add).expect("added"), Put::New);
    assert_eq!(
        desk.change_calendar("QE", &add).expect("again"),
        Put::Unchanged
    );
    let day = open(&mut desk, DAY, "quillmere-days", AcuityMethod::Threshold);
    let signed = sign(&mut desk, &day, "Q-1", &TWO_STEPS);
    assert_eq!(signed.outcome.due_on, Some(date("2026-11-04")));
    assert!(
        signed
            .outcome
            .reasons
            .contains("10 working days, school calendar of Quillmere East"),
        "{}",
        signed.outcome.reasons
    );
    // The outcome that was signed before stays as it was.
    let before = desk.history("Q-2").expect("read").expect("there");
    let signed = before.visits[0].outcome.as_ref().expect("signed");
    assert_eq!(signed.due_on, Some(date("2026-10-28")));
}

#[test]
fn a_calendar_of_all_sites_holds_where_a_site_has_none_of_its_own() {
    let (_folder, mut desk) = with_protocol();
    let held = |days: &str| CalendarChange {
        held: Some(SchoolCalendar::parse_days(days).expect("days")),
        ..CalendarChange::default()
    };
    desk.change_calendar("", &held("sun-thu")).expect("changed");
    let day = open(&mut desk, DAY, "quillmere-days", AcuityMethod::Threshold);
    let calendar = day.calendar.expect("a calendar");
    assert_eq!(calendar.days_held_text(), "mon,tue,wed,thu,sun");
    assert_eq!(
        calendar.name(),
        "school calendar",
        "it is not the site's own"
    );
    desk.change_calendar("QE", &held("mon-thu"))
        .expect("changed");
    let day = open(&mut desk, DAY, "quillmere-days", AcuityMethod::Threshold);
    let own = day.calendar.expect("a calendar");
    assert_eq!(own.days_held_text(), "mon,tue,wed,thu");
    assert_eq!(own.name(), "school calendar of Quillmere East");
    let drop = CalendarChange {
        drop: vec![(date("2026-12-25"), date("2026-12-25"))],
        ..CalendarChange::default()
    };
    assert!(desk.change_calendar("QE", &drop).is_err(), "not there");
}
