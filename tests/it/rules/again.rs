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

/// 48..60 completed months: the day before each birthday, the birthday, and a leap day (29 February
/// counts as 28 February in a common year).
#[test]
fn each_side_of_the_age_bounds() {
    use twoline::domain::age::AgeMonths;
    let refers = "distance_right=6/12 distance_left=6/12";
    for set in ["nsw-preschool", "new-zealand-4y"] {
        for (born, on, kind) in [
            ("2022-10-14", "2026-10-13", "incomplete"),
            ("2022-10-14", "2026-10-14", "refer"),
            ("2021-10-14", "2026-10-13", "refer"),
            ("2021-10-14", "2026-10-14", "incomplete"),
            ("2020-02-29", "2024-02-28", "incomplete"),
            ("2020-02-29", "2024-02-29", "refer"),
            ("2020-02-29", "2025-02-27", "refer"),
            ("2020-02-29", "2025-02-28", "incomplete"),
        ] {
            let age = AgeMonths::between(date(born), date(on)).unwrap().0;
            let outcome = child(age, refers).by_set(set);
            assert_eq!(word(&outcome), kind, "{set}: born {born}, on {on}");
        }
    }
}

/// The sources beside the tables above.
#[test]
fn where_the_bounds_come_from() {
    use twoline::domain::outcome::Basis;
    for (set, citation, basis) in [
        (
            "nsw-preschool",
            "IOVS 2018 meeting abstract",
            Basis::Primary,
        ),
        (
            "new-zealand-4y",
            "New Zealand vision screening at 4 years",
            Basis::Secondary,
        ),
    ] {
        let outcome = child(50, "distance_right=6/60 distance_left=6/60").by_set(set);
        for reason in &outcome.reasons {
            assert!(reason.source.citation.contains(citation), "{set}");
            assert_eq!(reason.source.basis, basis, "{set}/{}", reason.criterion);
        }
    }
}

/// The wrong distance moves the line before it is judged: 6/6 read at 1.5 m of a 3 m chart is 6/12.
#[test]
fn the_wrong_distance_counts() {
    let text = "chart_distance_m=3 used_distance_m=1.5 distance_right=6/6 distance_left=6/6";
    for set in ["nsw-preschool", "new-zealand-4y"] {
        assert_eq!(word(&child(50, text).by_set(set)), "refer", "{set}");
    }
}
