//! Second screenings and high priority: New South Wales preschool (IOVS 2018 meeting abstract,
//! primary) and New Zealand at 4 years (secondary), just below, at and just above each bound.

use super::support::{child, date, word};
use twoline::rules::explain;

/// Right and left eye at 48 months, outcome, criteria. A letter of five is 0.02, of four 0.025.
const NEW_SOUTH_WALES: &[(&str, &str, &str, &[&str])] = &[
    ("6/9", "6/9", "pass", &[]),
    ("6/6", "6/9", "pass", &[]),
    ("0.176l", "0.176l", "pass", &[]),
    ("0.177l", "6/6", "rescreen", &["line.recheck.48-59"]),
    ("6/9-1", "6/9", "rescreen", &["line.recheck.48-59"]),
    ("0.215l", "6/6", "rescreen", &["line.recheck.48-59"]),
    // Exactly 6/9-2 lies in neither printed band: treated as refer.
    ("6/9-2", "6/9", "refer", &["line.48-59"]),
    ("0.216l", "6/9", "refer", &["line.48-59"]),
    ("6/9-1", "6/9-2", "refer", &["line.48-59"]),
    ("0.476l", "6/9", "refer", &["line.48-59"]),
    (
        "6/18",
        "6/9",
        "refer",
        &["line.48-59", "line.high-priority.48-59"],
    ),
    (
        "CF",
        "6/9",
        "refer",
        &["line.48-59", "line.high-priority.48-59"],
    ),
    // Worse than 6/9 may be a recheck or a referral: it is not said which.
    ("<6/9", "6/9", "incomplete", &[]),
    (">=6/9", ">=6/9", "pass", &[]),
    (">=6/12", "6/9", "incomplete", &[]),
    ("6/9", "", "incomplete", &[]),
];

#[test]
fn new_south_wales_at_each_bound() {
    for (right, left, kind, criteria) in NEW_SOUTH_WALES {
        for (right, left) in [(right, left), (left, right)] {
            let it = child(48, &format!("distance_right={right} distance_left={left}"));
            let outcome = it.by_set("nsw-preschool");
            assert_eq!(word(&outcome), *kind, "{right} {left}: {outcome:#?}");
            assert_eq!(outcome.criteria, *criteria, "{right} {left}");
        }
    }
}

#[test]
fn a_recheck_has_its_own_date_and_words() {
    let it = child(59, "distance_right=6/9-1 distance_left=6/6");
    let outcome = it.by_set("nsw-preschool");
    assert_eq!(outcome.due_on, Some(date("2027-10-14")));
    assert_eq!(
        explain::headline(&outcome),
        "RESCREEN by 14 Oct 2027 (recheck at 12 months)"
    );
    assert!(
        explain::short(&outcome).contains("rechecks when worse than 6/9"),
        "{}",
        explain::short(&outcome)
    );
}

#[test]
fn high_priority_shows_as_such() {
    let outcome = child(50, "distance_right=6/18 distance_left=6/6").by_set("nsw-preschool");
    assert_eq!(outcome.to_string(), "refer (high priority)");
    let mut text = String::new();
    explain::reasons_text(&outcome, &mut text);
    assert!(text.contains("high priority"), "{text}");
    let outcome = child(50, "distance_right=6/12 distance_left=6/6").by_set("nsw-preschool");
    assert_eq!(outcome.to_string(), "refer");
}

/// Two of three letters: of three, one missed keeps the line.
#[test]
fn new_zealand_at_each_bound() {
    for (right, left, kind) in [
        ("6/6", "6/6", "pass"),
        ("6/9", "6/9", "rescreen"),
        // Neither printed band: treated as rescreen.
        ("6/6", "6/9", "rescreen"),
        ("6/7.5", "6/6", "rescreen"),
        ("6/9", "6/12", "refer"),
        ("<6/9", "6/6", "refer"),
        ("<6/6", "6/6", "incomplete"),
        (">=6/9", ">=6/9", "incomplete"),
        (">=6/6", ">=6/6", "pass"),
        ("HM", "6/6", "refer"),
    ] {
        let it = child(
            48,
            &format!("letters_per_line=3 distance_right={right} distance_left={left}"),
        );
        assert_eq!(word(&it.by_set("new-zealand-4y")), kind, "{right} {left}");
    }
    for (text, kind) in [("6/9-1", "rescreen"), ("6/9-2", "refer"), ("6/6-1", "pass")] {
        let it = child(
            48,
            &format!("letters_per_line=3 distance_right={text} distance_left=6/6"),
        );
        assert_eq!(word(&it.by_set("new-zealand-4y")), kind, "{text}");
    }
}
