//! Rosters read again.

use twoline::domain::codes::{AcuityMethod, Consent, YesNo};

use super::{DAY, child, desk_with_children, empty_desk, open};

#[test]
fn a_second_roster_is_an_update() {
    let (_folder, mut desk) = desk_with_children();
    let head = desk.head().expect("head");
    let mut again = vec![
        child("Q-1", "Sands", "Oliver", "2020-03-02", "1"),
        child("Q-2", "Okafor-Bell", "Ada", "2020-09-01", "1"),
        child("Q-7", "Uzun", "Elif", "2020-11-11", "1"),
    ];
    again[0].details.wears_glasses = Some(YesNo::No);
    again[1].details.wears_glasses = Some(YesNo::No);
    let plan = desk.plan_children(again, None).expect("a plan");
    let count = |p: &twoline::actions::RosterPlan| {
        (
            p.update.new.len(),
            p.update.changed.len(),
            p.update.unchanged.len(),
            p.update.gone.len(),
        )
    };
    assert_eq!(count(&plan), (1, 1, 1, 4));
    assert_eq!(desk.head().expect("head"), head, "a plan writes nothing");
    desk.add_roster(&plan).expect("written");
    let day = open(
        &mut desk,
        "2026-10-15",
        "us-school",
        AcuityMethod::Threshold,
    );
    let ids: Vec<String> = desk
        .day_children(&day)
        .expect("children")
        .into_iter()
        .map(|c| c.child_id)
        .collect();
    assert_eq!(
        ids,
        ["Q-2", "Q-1", "Q-7"],
        "by class and name; those gone are gone"
    );
    let plan = desk
        .plan_children(plan.roster.children, None)
        .expect("a plan");
    assert_eq!(count(&plan), (0, 0, 3, 0));
}

#[test]
fn a_roster_without_a_column_leaves_it_as_it_is_known() {
    let (_folder, mut desk) = empty_desk();
    let plan = |text: &str, desk: &twoline::actions::Desk| {
        desk.plan_roster("r.csv", text.as_bytes(), None, None)
            .expect("a plan")
    };
    let first = plan(
        "child_id,family_name,given_name,dob,grade,site,consent,wears_glasses\n\
         Q-9,Sands,Oliver,2020-03-02,1,QE,no,yes\n",
        &desk,
    );
    desk.add_roster(&first).expect("written");
    let without = plan(
        "child_id,family_name,given_name,dob,grade,site\nQ-9,Sands,Oliver,2020-03-02,1,QE\n",
        &desk,
    );
    let counts =
        |p: &twoline::actions::RosterPlan| (p.update.changed.len(), p.update.unchanged.len());
    assert_eq!(counts(&without), (0, 1));
    let blank = plan(
        "child_id,family_name,given_name,dob,grade,site,consent,wears_glasses\n\
         Q-9,Sands,Oliver,2020-03-02,1,QE,,\n",
        &desk,
    );
    assert_eq!(
        counts(&blank),
        (1, 0),
        "a blank cell of a column that is there says something"
    );
    desk.add_roster(&blank).expect("written");
    let day = open(&mut desk, DAY, "us-school", AcuityMethod::Threshold);
    let child = desk.day_child(&day, "Q-9").expect("a child");
    assert_eq!(child.wears_glasses, None);
    assert_eq!(
        child.consent,
        Some(Consent::No),
        "a blank takes no refusal back"
    );
}
