//! Sentences that a nurse reads in one breath.

use super::support::child;
use twoline::rules::explain;

#[test]
fn the_foot_of_the_screen_names_the_source_shortly() {
    let outcome = child(73, "distance_right=20/20 distance_left=20/32").by_protocol("us-school");
    assert_eq!(
        explain::short(&outcome),
        "Two steps between the eyes (20/20 and 20/32); refers when 2 lines or more. \
         Joint policy 2016, two-line rule (as quoted elsewhere). \
         Amblyopia risk: interocular difference. Left eye 20/25 would pass."
    );
    let mut whole = String::new();
    explain::reasons_text(&outcome, &mut whole);
    assert!(
        whole.contains("Pediatrics 2016;137(1):e20153597"),
        "{whole}"
    );
    // Three lines of an 80-column screen, frame and headline taken off.
    assert!(explain::short(&outcome).chars().count() < 3 * 76);
}

#[test]
fn not_testable_is_said_once_for_each_eye() {
    let outcome = child(60, "distance_right=NT:shy distance_left=20/20").by_protocol("us-school");
    let line = outcome
        .reasons
        .iter()
        .find(|r| r.criterion.starts_with("line"))
        .unwrap();
    assert_eq!(line.reading, "right eye not testable (shy), left eye 20/20");
    assert!(line.remarks.is_empty(), "{:?}", line.remarks);
}

#[test]
fn today_is_said_as_today() {
    let outcome = child(60, "signs=white_pupil:left").by_protocol("us-school");
    let mut text = String::new();
    explain::reasons_text(&outcome, &mut text);
    assert!(
        text.contains("act today") && !text.contains("within 0"),
        "{text}"
    );
}

/// Whether what is unknown could change the outcome is said of each.
#[test]
fn each_unknown_says_whether_it_could_change_the_outcome() {
    let said = |readings: &str, criterion: &str| {
        let outcome = child(73, readings).by_protocol("us-school");
        explain::table(&outcome)
            .into_iter()
            .find(|row| row.criterion == criterion)
            .unwrap_or_else(|| panic!("{criterion}"))
            .note
    };
    // A pass with an open difference between the eyes might not be one.
    let note = said(
        "distance_right=>=20/32 distance_left=>=20/32",
        "between the eyes",
    );
    assert!(note.contains("could change the outcome"), "{note}");
    // A first fail waits for the rescreen, unless three lines between the eyes refer at once.
    let note = said(
        "distance_right=20/40 distance_left=>=20/32",
        "between the eyes",
    );
    assert!(note.contains("could change the outcome"), "{note}");
}
