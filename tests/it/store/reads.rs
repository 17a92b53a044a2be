//! Typed reads.

use twoline::domain::codes::{Attempt, Consent, Status, YesNo};
use twoline::domain::field::Field;
use twoline::domain::outcome::OutcomeKind;
use twoline::store::{new_id, row};

use super::support::*;

#[test]
fn a_day_screen_in_one_read() {
    let (_temp, mut store) = fresh();
    let visit_id = fill(&mut store);
    let read = store.read();
    assert_eq!(read.days().unwrap()[0].site, "QE");
    assert_eq!(read.day(&day()).unwrap().unwrap().term, "2026-autumn");
    let queue = read.day_children(&day(), date("2026-09-01")).unwrap();
    let names: Vec<_> = queue.iter().map(|c| c.child.family_name.as_str()).collect();
    assert_eq!(names, ["Okafor", "Trần"], "by class and folded name");
    assert_eq!(queue[0].visits.len(), 1);
    assert_eq!(queue[0].visits[0].visit_id, visit_id);
    assert_eq!(queue[0].visits[0].status, Some(Status::Present));
    assert_eq!(queue[0].visits[0].kind, Some(OutcomeKind::Rescreen));
    assert_eq!(queue[0].visits[0].due_on, Some(date("2026-10-28")));
    assert!(queue[1].visits.is_empty());
    assert_eq!(queue[1].child.search, "tran bao");
    assert_eq!(queue[1].child.consent, Some(Consent::Yes));
    assert_eq!(queue[1].child.under_care, Some(YesNo::No));
    assert_eq!(queue[1].child.guardian_phone.as_deref(), Some("555-0101"));
    let counts = read.day_counts(&day()).unwrap();
    assert_eq!(counts.len(), 1);
    assert_eq!((counts[0].attempt, counts[0].count), (Attempt::First, 1));
}

#[test]
fn an_earlier_visit_of_the_term_stands_beside_the_child() {
    let (_temp, mut store) = fresh();
    let visit_id = fill(&mut store);
    let mut later = day();
    later.screened_on = date("2026-10-28");
    let queue = store
        .read()
        .day_children(&later, date("2026-09-01"))
        .unwrap();
    assert_eq!(queue[0].earlier[0].visit_id, visit_id);
    assert!(queue[0].visits.is_empty());
    let queue = store
        .read()
        .day_children(&later, date("2026-10-15"))
        .unwrap();
    assert!(queue[0].earlier.is_empty());
}

#[test]
fn a_child_seen_at_another_site_is_in_that_days_queue() {
    let (_temp, mut store) = fresh();
    fill(&mut store);
    let mut guest = visit("Q-2");
    guest.site = "QW".to_owned();
    store.append(&author(), |tx| tx.add(&guest)).unwrap();
    let mut west = day();
    west.site = "QW".to_owned();
    let queue = store
        .read()
        .day_children(&west, date("2026-09-01"))
        .unwrap();
    assert_eq!(queue.len(), 1);
    assert_eq!(queue[0].child.child_id, "Q-2");
}

#[test]
fn the_day_report_has_readings_and_the_signed_outcome() {
    let (_temp, mut store) = fresh();
    fill(&mut store);
    let rows = store.read().day_report(&day()).unwrap();
    assert_eq!(rows.len(), 2);
    let values: Vec<_> = rows[0]
        .readings
        .iter()
        .map(|r| (r.field, r.value.as_str()))
        .collect();
    assert_eq!(
        values,
        [
            (Field::Status, "present"),
            (Field::DistanceRight, "20/20"),
            (Field::DistanceLeft, "20/32"),
        ]
    );
    let outcome = rows[0].outcome.as_ref().unwrap();
    assert_eq!(outcome.reasons, "two steps between the eyes");
    assert_eq!(outcome.age_months, Some(73));
    assert!(rows[1].visit.is_none() && rows[1].outcome.is_none());
}

#[test]
fn an_emergency_stays_until_somebody_was_told() {
    let (_temp, mut store) = fresh();
    fill(&mut store);
    let open = store.read().urgent_open().unwrap();
    assert_eq!(open.len(), 1);
    assert_eq!(open[0].child.as_ref().unwrap().given_name, "Bảo");
    let told = row::UrgentAction {
        id: new_id(),
        step: "told".to_owned(),
        told: "school nurse".to_owned(),
        ..open[0].raised.clone()
    };
    store.append(&author(), |tx| tx.add(&told)).unwrap();
    assert!(store.read().urgent_open().unwrap().is_empty());
    store
        .append(&author(), |tx| {
            tx.supersede::<row::UrgentAction>(&[told.id], None, "entered too soon")
        })
        .unwrap();
    assert_eq!(store.read().urgent_open().unwrap().len(), 1);
}

#[test]
fn referred_due_and_counted() {
    let (_temp, mut store) = fresh();
    fill(&mut store);
    let read = store.read();
    assert!(read.referred().unwrap().is_empty());
    assert_eq!(read.due().unwrap()[0].0.child_id, "Q-1");
    let counts = |store: &twoline::store::Store, site| {
        store
            .read()
            .term_counts("2026-autumn", date("2026-09-01"), date("2026-12-20"), site)
            .unwrap()
    };
    let now = counts(&store, None);
    assert_eq!(
        (now.enrolled, now.visited, now.rescreen, now.referred),
        (2, 1, 1, 0)
    );

    let mut second = visit("Q-1");
    second.attempt = Attempt::Rescreen;
    second.screened_on = date("2026-10-28");
    let refer = outcome(second.visit_id, OutcomeKind::Refer);
    store
        .append(&author(), |tx| {
            tx.add(&second)?;
            tx.add(&refer)
        })
        .unwrap();
    assert!(store.read().due().unwrap().is_empty());
    assert_eq!(
        store.read().referred().unwrap()[0].1.visit_id,
        second.visit_id
    );
    let now = counts(&store, Some("QE"));
    assert_eq!(
        (now.enrolled, now.visited, now.rescreen, now.referred),
        (2, 1, 0, 1)
    );
    assert_eq!(counts(&store, Some("QW")).visited, 0);
}

#[test]
fn the_roster_comes_back_as_it_was_given() {
    let (_temp, mut store) = fresh();
    fill(&mut store);
    let roster = store.read().roster(Some("2026-autumn")).unwrap();
    assert_eq!(roster.len(), 2);
    let ada = &roster[0];
    assert_eq!((ada.child_id.as_str(), ada.site.as_str()), ("Q-1", "QE"));
    assert_eq!(ada.details.guardian_name, "Guardian 1");
    assert_eq!(ada.details.guardian2_name, "Guardian 2");
    assert_eq!(ada.details.guardian2_phone, "555-0102");
    assert_eq!(ada.details.last_exam_on, Some(date("2025-01-31")));
    assert_eq!(ada.details.class, "1B");
    assert!(store.read().roster(Some("2027-spring")).unwrap().is_empty());

    // Gone from the roster: the enrolment says since when.
    let mut left = enrolment("Q-1", "1B");
    left.left_on = Some(date("2026-10-01"));
    store
        .append(&author(), |tx| tx.put(left, "gone from the roster"))
        .unwrap();
    assert_eq!(store.read().roster(None).unwrap().len(), 1);
    assert_eq!(
        store.read().find_index().unwrap().len(),
        2,
        "still to be found"
    );
}

#[test]
fn the_latest_enrolment_is_the_present_one() {
    let (_temp, mut store) = fresh();
    fill(&mut store);
    let mut next = enrolment("Q-1", "2B");
    next.term = "2027-spring".to_owned();
    next.from_on = date("2027-01-10");
    store.append(&author(), |tx| tx.put(next, "")).unwrap();
    assert_eq!(
        store.read().child("Q-1").unwrap().unwrap().class.as_deref(),
        Some("2B")
    );
    // Correcting last term does not bring it back.
    store
        .append(&author(), |tx| tx.put(enrolment("Q-1", "1C"), "typo"))
        .unwrap();
    assert_eq!(
        store.read().child("Q-1").unwrap().unwrap().class.as_deref(),
        Some("2B")
    );
    store.verify(None, |_, _| {}).unwrap();
}

#[test]
fn settings_mappings_and_rule_texts() {
    let (_temp, mut store) = fresh();
    fill(&mut store);
    let read = store.read();
    assert_eq!(read.setting("notation").unwrap().as_deref(), Some("feet"));
    assert_eq!(read.setting("no such").unwrap(), None);
    assert_eq!(
        read.column_mappings("roster").unwrap()[0].meaning,
        "family_name"
    );
    assert!(read.column_mappings("results").unwrap().is_empty());
    let text = read.rule_set_used(&"ab".repeat(32)).unwrap().unwrap().text;
    assert_eq!(text, "id = \"us-school\"\n");
    assert_eq!(read.programme().unwrap().unwrap().name, "Quillmere vision");
    assert_eq!(read.stations().unwrap()[0].station_id, store.station_id());
    let set = row::Setting {
        id: new_id(),
        name: "notation".to_owned(),
        value: "metres".to_owned(),
    };
    store.append(&author(), |tx| tx.put(set, "")).unwrap();
    assert_eq!(
        store.read().setting("notation").unwrap().as_deref(),
        Some("metres")
    );
    assert_eq!(
        store.read().newest_entry_ms().unwrap().map(|ms| ms > 0),
        Some(true)
    );
}

#[test]
fn every_table_is_filled_by_the_test_store() {
    let (_temp, mut store) = fresh();
    fill(&mut store);
    for (table, n) in store.read().entry_counts().unwrap() {
        assert!(n > 0, "{table}");
    }
}

#[test]
fn what_is_about_a_part_of_a_visit_is_about_the_visit_however_it_is_asked() {
    let (_temp, mut store) = fresh();
    let one = fill(&mut store);
    let two = visit("Q-1");
    let by_hand = new_id();
    let (first, second, third) = (
        follow_up(one, new_id()),
        follow_up(two.visit_id, new_id()),
        follow_up(by_hand, new_id()),
    );
    store
        .append(&author(), |tx| {
            tx.add(&two)?;
            tx.add(&reading(two.visit_id, Field::DistanceRight, "20/63"))?;
            tx.add(&outcome(two.visit_id, OutcomeKind::Refer))?;
            tx.add(&first.step)?;
            tx.add(&second.step)?;
            tx.add(&second.report)?;
            tx.add(&second.value)?;
            tx.add(&third.referral)
        })
        .unwrap();
    let of_child = |store: &twoline::store::Store| {
        let read = store.read();
        let mut all = read.referrals().unwrap();
        let mut mine = read.referrals_of("Q-1").unwrap();
        all.retain(|r| r.child.child_id == "Q-1");
        all.sort_by_key(|r| r.referral_id);
        mine.sort_by_key(|r| r.referral_id);
        assert_eq!(all, mine);
        for record in &mine {
            let same = read.referral(record.referral_id).unwrap();
            assert_eq!(same.as_ref(), Some(record));
        }
        mine
    };
    let mine = of_child(&store);
    assert!(mine.iter().any(|r| r.referral_id == by_hand));
    let of_visit = mine.iter().find(|r| r.referral_id == one).unwrap();
    assert_eq!((of_visit.steps.len(), of_visit.reports.len()), (2, 1));
    assert_eq!(of_visit.reports[0].values.len(), 1);
    let by_part = store.read().referral(two.visit_id).unwrap();
    assert_eq!(by_part.as_ref(), Some(of_visit));
    assert!(store.read().referrals_of("Q-2").unwrap().is_empty());

    // A part that was taken back keeps what was done about it.
    store
        .append(&author(), |tx| {
            tx.supersede::<row::Visit>(&[two.id], None, "entered twice")
        })
        .unwrap();
    let mine = of_child(&store);
    assert!(
        mine.iter()
            .any(|r| r.referral_id == two.visit_id && r.visit.is_none()),
        "{mine:?}"
    );
}
