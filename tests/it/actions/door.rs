//! Who is eligible today, and class lists on paper that are read back.

#![allow(clippy::panic)]

use twoline::actions::{Desk, Door, SheetRequest};
use twoline::domain::codes::AcuityMethod;
use twoline::domain::field::Field;

use super::{DAY, desk_with_children, open, sign};

const TWO_STEPS: [(Field, &str); 4] = [
    (Field::CorrectionWorn, "none"),
    (Field::DistanceRight, "20/20"),
    (Field::DistanceLeft, "20/32"),
    (Field::Signs, "none"),
];

fn doors(desk: &Desk, day: &twoline::actions::DayInfo) -> Vec<(String, Door, String)> {
    let list = desk.at_the_door(day).expect("a list");
    list.into_iter()
        .map(|at| (at.child.child_id, at.door, at.remarks.join("; ")))
        .collect()
}

/// Consent, rescreen dates and what exempts: practice, as the protocol file says.
#[test]
fn each_child_stands_in_one_state_and_the_due_ones_first() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    sign(&mut desk, &day, "Q-2", &TWO_STEPS);
    let list = doors(&desk, &day);
    let of = |id: &str| {
        list.iter()
            .find(|(other, ..)| other == id)
            .expect("there")
            .1
    };
    assert_eq!(of("Q-2"), Door::SeenToday);
    assert_eq!(of("Q-5"), Door::OptedOut);
    assert_eq!(of("Q-1"), Door::ToScreen);
    assert!(
        list.iter()
            .all(|(.., remarks)| remarks.contains("contact details missing"))
    );

    let before = open(
        &mut desk,
        "2026-10-20",
        "us-school",
        AcuityMethod::Threshold,
    );
    let list = doors(&desk, &before);
    let (_, door, remarks) = list.iter().find(|(id, ..)| id == "Q-2").expect("there");
    assert_eq!(
        (*door, remarks.contains("due 28 Oct 2026")),
        (Door::DueLater, true)
    );

    let after = open(
        &mut desk,
        "2026-10-30",
        "us-school",
        AcuityMethod::Threshold,
    );
    let list = doors(&desk, &after);
    assert_eq!((&*list[0].0, list[0].1), ("Q-2", Door::RescreenDue));
    assert!(list[0].2.contains("2 days overdue"), "{}", list[0].2);
}

#[test]
fn the_door_list_prints_and_names_every_state() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let page = desk.door_report(&day, true, false).expect("a page").bytes;
    let page = String::from_utf8(page).expect("text");
    assert!(page.contains("<b>5</b> of 6 are screened today"), "{page}");
    assert!(page.contains("<h2>opted out: 1</h2>"), "{page}");
    let csv = desk.door_report(&day, false, true).expect("a table").bytes;
    let csv = String::from_utf8(csv).expect("text");
    assert!(
        csv.starts_with("today,status,due_on,overdue_days,child_id"),
        "{csv}"
    );
    assert_eq!(csv.lines().filter(|l| l.starts_with("yes,")).count(), 5);
}

#[test]
fn a_class_list_has_right_before_left_and_is_read_back() {
    let (_folder, mut desk) = desk_with_children();
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let request = |html| SheetRequest {
        class: Some("1B".into()),
        blank: 3,
        html,
        exact: true,
    };
    let page = desk.sheet(&day, &request(true)).expect("a page").bytes;
    let page = String::from_utf8(page).expect("text");
    let at = |text: &str| {
        page.find(text)
            .unwrap_or_else(|| panic!("not there: {text}\n{page}"))
    };
    assert!(at("distance, right eye") < at("distance, left eye"));
    for said in [
        "Quillmere East",
        "14 Oct 2026",
        "us-school",
        "<bdi>Okafor</bdi>, <bdi>Ada</bdi>",
        "20/32 passes at 6 years",
        "☐ referred<br>☐ not testable<br>☐ not attempted<br>☐ absent",
        "children who are not on the roster",
        "A screening is not an eye examination",
        "Not today: <bdi>Idris</bdi>, <bdi>Noor</bdi> (opted out)",
    ] {
        at(said);
    }
    assert!(
        desk.sheet(
            &day,
            &SheetRequest {
                class: Some("9Z".into()),
                ..request(true)
            }
        )
        .is_err()
    );

    let sheet = desk.sheet(&day, &request(false)).expect("a table").bytes;
    let mut rows = csv::Reader::from_reader(&sheet[..]);
    let header = rows.headers().expect("a header").clone();
    let column = |name: &str| header.iter().position(|h| h == name).expect("a column");
    let mut filled = csv::Writer::from_writer(Vec::new());
    filled.write_record(&header).expect("written");
    for row in rows.records() {
        let mut row: Vec<String> = row.expect("a row").iter().map(str::to_owned).collect();
        if row[0] == "Q-6" {
            for (name, value) in [
                ("correction_worn", "none"),
                ("distance_right", "20/20"),
                ("distance_left", "20/25"),
                ("signs", "none"),
            ] {
                row[column(name)] = value.to_owned();
            }
        }
        filled.write_record(&row).expect("written");
    }
    let filled = filled.into_inner().expect("whole");
    let plan = desk
        .plan_results("sheet.csv", &filled, &day)
        .expect("a plan");
    assert_eq!((plan.new.len(), plan.empty), (1, 4));
}
