//! Condition groups and clinic bands at each bound.
//!
//! Groups: VIP Study Group, Ophthalmology 2004;111:637–650, as printed in IOVS 2011;52:9658
//! (primary). Bands: South Australia, New South Wales, Queensland (primary).

use super::support::{local_form, readings};
use twoline::domain::age::AgeMonths;
use twoline::rules::Library;
use twoline::rules::grading::{Clinical, Graded, Level, Place, Waiting, order, severity, triage};

fn group(age: u32, text: &str) -> Option<u32> {
    let readings = readings(text);
    let grading = Library::shipped().grading("preschool-groups").unwrap();
    let facts = Clinical::of_examination(Some(AgeMonths(age)), &readings);
    match severity(grading, &facts).first()?.level {
        Level::Group(group) => Some(group),
        other => panic!("{other:?}"),
    }
}

fn both(sphere: &str, cylinder: &str) -> String {
    format!(
        "sphere_right={sphere} cylinder_right={cylinder} axis_right=180 sphere_left={sphere} cylinder_left={cylinder} axis_left=180"
    )
}

#[test]
fn refraction_groups_at_each_bound() {
    for (sphere, cylinder, expected) in [
        ("+3.25", "0", None),
        ("+3.26", "0", Some(3)),
        ("+4.99", "0", Some(3)),
        ("+5.00", "0", Some(1)),
        ("0", "-1.50", None),
        ("0", "-1.51", Some(2)),
        ("0", "-2.49", Some(2)),
        ("0", "-2.50", Some(1)),
        ("-2.00", "0", None),
        ("-2.01", "0", Some(3)),
        ("-3.99", "0", Some(3)),
        ("-4.00", "0", Some(2)),
        ("-5.99", "0", Some(2)),
        ("-6.00", "0", Some(1)),
    ] {
        assert_eq!(
            group(50, &both(sphere, cylinder)),
            expected,
            "{sphere} {cylinder}"
        );
    }
    // Hyperopia with a difference of spherical equivalents of 0.50 D or more is group 2.
    for (left, expected) in [("+3.51", Some(3)), ("+3.50", Some(2))] {
        let text =
            format!("sphere_right=+4.00 cylinder_right=0 sphere_left={left} cylinder_left=0");
        assert_eq!(group(50, &text), expected, "{left}");
    }
}

#[test]
fn anisometropia_groups_at_each_bound() {
    for (right, left, expected) in [
        ("+1.00", "0", None),
        ("+1.01", "0", Some(2)),
        ("+2.00", "0", Some(2)),
        ("+2.01", "0", Some(1)),
    ] {
        let text =
            format!("sphere_right={right} cylinder_right=0 sphere_left={left} cylinder_left=0");
        assert_eq!(group(50, &text), expected, "{right} {left}");
    }
}

/// The entries that speak, of the rows that start so.
fn entries(age: u32, text: &str, row: &str) -> Vec<String> {
    let readings = readings(text);
    let grading = Library::shipped().grading("preschool-groups").unwrap();
    let facts = Clinical::of_examination(Some(AgeMonths(age)), &readings);
    severity(grading, &facts)
        .spoke
        .iter()
        .filter(|s| s.entry.starts_with(row))
        .map(|s| s.entry.to_string())
        .collect()
}

/// Table in IOVS 2011;52:9658 (primary): more than 2 and 1 D hyperopic, 3 and 1.5 D astigmatic, 6
/// and 3 D myopic. Group 1 lies within group 2, so that both rows speak.
#[test]
fn anisometropia_of_each_kind_at_each_bound() {
    type Readings = fn(&str) -> String;
    let cases: [(&str, Readings, [&str; 6]); 3] = [
        (
            "anisometropia.hyperopic",
            |d| format!("sphere_right=+{d} cylinder_right=0 sphere_left=0 cylinder_left=0"),
            ["0.99", "1.00", "1.01", "1.99", "2.00", "2.01"],
        ),
        (
            "anisometropia.astigmatic",
            |d| {
                format!(
                    "sphere_right=0 cylinder_right=-{d} axis_right=90 sphere_left=0 cylinder_left=0"
                )
            },
            ["1.49", "1.50", "1.51", "2.99", "3.00", "3.01"],
        ),
        (
            "anisometropia.myopic",
            |d| format!("sphere_right=-{d} cylinder_right=0 sphere_left=0 cylinder_left=0"),
            ["2.99", "3.00", "3.01", "5.99", "6.00", "6.01"],
        ),
    ];
    for (row, text, bounds) in cases {
        let (one, two) = (format!("{row}.1"), format!("{row}.2"));
        let expected: [&[&String]; 6] = [&[], &[], &[&two], &[&two], &[&two], &[&one, &two]];
        for (difference, expected) in bounds.into_iter().zip(expected) {
            let text = text(difference);
            let swapped = text
                .replace("_right", "_x")
                .replace("_left", "_right")
                .replace("_x", "_left");
            for text in [text, swapped] {
                let found = entries(50, &text, row);
                assert_eq!(found.iter().collect::<Vec<_>>(), expected, "{text}");
            }
        }
    }
}

/// Same table: worse eye worse than 20/50 at 3 years (20/40 at 4 and 5) and the other worse than 20/40
/// (20/30); with a risk factor in both eyes group 1, with none at all group 3.
#[test]
fn both_eyes_rows_at_each_bound() {
    let hyperopia =
        "cover=none sphere_right=+3.50 cylinder_right=0 sphere_left=+3.50 cylinder_left=0";
    let one_eye =
        "cover=none sphere_right=+3.50 cylinder_right=0 sphere_left=+3.00 cylinder_left=0";
    let none = "cover=none sphere_right=0 cylinder_right=0 sphere_left=0 cylinder_left=0";
    for (age, worse, better, speaks) in [
        (36, "20/63", "20/50", true),
        (47, "20/63", "20/50", true),
        (47, "20/63", "20/63", true),
        // At the limit of the worse eye, and of the better one.
        (47, "20/50", "20/50", false),
        (47, "20/63", "20/40", false),
        (47, "20/40", "20/40", false),
        // A month later the next band holds.
        (48, "20/50", "20/40", true),
        (71, "20/50", "20/40", true),
        (71, "20/50", "20/50", true),
        (71, "20/40", "20/40", false),
        (71, "20/50", "20/30", false),
        (71, "20/50", "20/32", false),
    ] {
        let band = if age < 48 { "36-47" } else { "48-71" };
        for (right, left) in [(worse, better), (better, worse)] {
            let acuity = format!("distance_right={right} distance_left={left}");
            for (factors, row, holds) in [
                (hyperopia, "amblyopia-both-eyes", speaks),
                (one_eye, "amblyopia-both-eyes", false),
                (none, "amblyopia-both-eyes", false),
                (none, "reduced-both-eyes", speaks),
                (hyperopia, "reduced-both-eyes", false),
            ] {
                let expected: Vec<String> =
                    holds.then(|| format!("{row}.{band}")).into_iter().collect();
                let found = entries(age, &format!("{factors} {acuity}"), row);
                assert_eq!(found, expected, "{age}: {right} {left}, {factors}");
            }
        }
    }
}

#[test]
fn strabismus_and_amblyopia_groups() {
    let plain = "sphere_right=0 cylinder_right=0 sphere_left=0 cylinder_left=0";
    assert_eq!(group(50, "cover=constant"), Some(1));
    assert_eq!(group(50, "cover=intermittent"), Some(2));
    assert_eq!(group(50, &format!("cover=phoria {plain}")), None);
    let squint = "cover=intermittent deviating_eye=left";
    for (right, left, expected) in [
        ("20/20", "20/50", Some(2)), // four steps, better than 20/64
        ("20/20", "20/63", Some(1)),
        ("20/32", "20/63", Some(1)), // three steps
        ("20/40", "20/63", Some(2)), // two steps with a factor
    ] {
        let text = format!("{squint} {plain} distance_right={right} distance_left={left}");
        assert_eq!(group(50, &text), expected, "{right} {left}");
    }
    // No factor found: group 3; 20/16 with 20/25 is excepted.
    let none = format!("cover=none {plain}");
    for (age, right, left, expected) in [
        (47, "20/50", "20/50", None),
        (47, "20/50", "20/63", Some(3)),
        (48, "20/40", "20/40", None),
        (48, "20/40", "20/50", Some(3)),
        (50, "20/20", "20/32", Some(3)),
        (50, "20/16", "20/25", None),
        (50, "20/20", "20/25", None),
    ] {
        let text = format!("{none} distance_right={right} distance_left={left}");
        assert_eq!(group(age, &text), expected, "{age}: {right} {left}");
    }
}

#[test]
fn outside_its_ages_it_says_so() {
    let readings = readings("cover=constant");
    let grading = Library::shipped().grading("preschool-groups").unwrap();
    for age in [None, Some(35), Some(72)] {
        let facts = Clinical::of_screening(age.map(AgeMonths), &readings);
        let graded = severity(grading, &facts);
        assert!(
            graded.first().is_none() && graded.outside.is_some(),
            "{age:?}"
        );
    }
    assert_eq!(group(36, "cover=constant"), Some(1));
    assert_eq!(group(71, "cover=constant"), Some(1));
}

/// What is unknown is no "none": it is listed where it could be more serious.
#[test]
fn what_is_unknown_is_listed() {
    let readings = readings("distance_right=20/20 distance_left=20/100 cover=none");
    let grading = Library::shipped().grading("preschool-groups").unwrap();
    let graded = severity(
        grading,
        &Clinical::of_screening(Some(AgeMonths(50)), &readings),
    );
    assert!(graded.first().is_none());
    assert!(graded.could_be.iter().any(|s| s.level == Level::Group(1)));
}

fn band(set: &str, age: u32, text: &str, onset: Option<u32>) -> Graded {
    let readings = readings(text);
    let mut facts = Clinical::of_screening(Some(AgeMonths(age)), &readings);
    facts.onset_months = onset;
    triage(Library::shipped().grading(set).unwrap(), &facts)
}

fn level(graded: &Graded) -> Option<Level> {
    graded.first().map(|s| s.level)
}

#[test]
fn south_australia_by_the_worse_eye() {
    for (worse, expected) in [
        ("6/7.5", None),
        ("6/9.5", Some(Level::Within(365))),
        ("6/12", Some(Level::Within(90))),
        ("6/30", Some(Level::Within(90))),
        ("6/36", Some(Level::Within(30))),
        ("6/38", Some(Level::Within(30))),
        ("CF", Some(Level::Within(30))),
    ] {
        for (right, left) in [("6/6", worse), (worse, "6/6")] {
            let text = format!("distance_right={right} distance_left={left} signs=none");
            let graded = band("south-australia-acuity", 96, &text, None);
            assert_eq!(level(&graded), expected, "{right} {left}");
        }
    }
    let text = "distance_right=6/6 distance_left=6/36 signs=none";
    let graded = band("south-australia-acuity", 96, text, None);
    let remarks = &graded.first().unwrap().remarks;
    assert!(
        remarks
            .iter()
            .any(|r| r.starts_with("on presenting acuity")),
        "{remarks:?}"
    );
    let graded = band(
        "south-australia-acuity",
        50,
        "signs=sudden_vision_loss",
        None,
    );
    assert_eq!(level(&graded), Some(Level::AtOnce));
    // 3 to 5 years at 6/12 or better: a repeat in 6 months is shown beside the band.
    for (age, line, repeat) in [
        (35, "6/12", false),
        (36, "6/12", true),
        (71, "6/12", true),
        (72, "6/12", false),
        (50, "6/15", false),
    ] {
        let text = format!("distance_right=6/6 distance_left={line} signs=none");
        let graded = band("south-australia-acuity", age, &text, None);
        let said = graded
            .spoke
            .iter()
            .any(|s| s.level == Level::RepeatAfter(6));
        assert_eq!(said, repeat, "{age} {line}");
    }
}

#[test]
fn squints_by_their_onset() {
    for (set, months, expected) in [
        ("nsw-strabismus", 3, Level::Within(30)),
        ("nsw-strabismus", 4, Level::Within(365)),
        ("queensland-strabismus", 2, Level::Within(30)),
        ("queensland-strabismus", 3, Level::Within(90)),
    ] {
        let text = "cover=intermittent signs=none distance_right=6/6 distance_left=6/6";
        let graded = band(set, 100, text, Some(months));
        assert_eq!(level(&graded), Some(expected), "{set} {months}");
    }
    // Unknown: the soonest it could be, said so.
    let graded = band(
        "queensland-strabismus",
        100,
        "cover=constant signs=none",
        None,
    );
    assert_eq!(level(&graded), Some(Level::Within(30)));
    assert!(graded.first().unwrap().remarks[0].starts_with("onset unknown"));
    for (age, expected) in [(11, Some(Level::Within(30))), (12, None)] {
        let text = "cover=constant signs=none distance_right=6/6 distance_left=6/6";
        assert_eq!(
            level(&band("nsw-strabismus", age, text, Some(9))),
            expected,
            "{age}"
        );
    }
    for (age, expected) in [(95, Level::Within(90)), (96, Level::Within(365))] {
        let text = "cover=intermittent signs=none distance_right=6/6 distance_left=6/12";
        let graded = band("nsw-strabismus", age, text, Some(9));
        assert!(graded.spoke.iter().any(|s| s.level == expected), "{age}");
    }
    let none = band("queensland-strabismus", 60, "cover=none signs=none", None);
    assert_eq!(level(&none), None);
}

/// Words that a source prints without a number stand in the file with their own basis, and are said
/// where an answer hangs on them: unequal acuity is two lines or more, a new squint one noticed within
/// 3 months (both practice).
#[test]
fn what_a_word_is_taken_as_is_data() {
    let unequal = "unequal acuity is taken as 2 lines or more between the eyes (common practice)";
    let text = "cover=intermittent signs=none distance_right=6/6 distance_left=6/9.5";
    let graded = band("nsw-strabismus", 60, text, Some(9));
    assert_eq!(level(&graded), Some(Level::Within(90)));
    assert_eq!(graded.first().unwrap().remarks, [unequal]);
    let text = "cover=intermittent signs=none distance_right=6/6 distance_left=6/7.5";
    assert_eq!(level(&band("nsw-strabismus", 60, text, Some(9))), None);

    let new = "new squint is taken as onset 3 months or less (common practice)";
    let text = "signs=new_squint distance_right=6/6 distance_left=6/6";
    let graded = band("nsw-strabismus", 100, text, None);
    assert_eq!(level(&graded), Some(Level::Within(30)));
    assert_eq!(graded.first().unwrap().remarks, [new]);
    // Within 3 months may still be more than Queensland's 2: taken as the soonest, said so.
    let graded = band("queensland-strabismus", 100, text, None);
    let first = graded.first().unwrap();
    assert_eq!(first.level, Level::Within(30));
    assert!(first.remarks[0].starts_with("onset unknown"));

    // Another number in the file is another answer, and without one nothing is assumed.
    let shipped = &Library::shipped().grading("nsw-strabismus").unwrap().text;
    let other = local_form(shipped)
        .replace(
            "\"2 lines or more between the eyes\"",
            "\"3 lines or more between the eyes\"",
        )
        .replace(
            "word = \"new squint\"\nas = \"onset 3 months or less\"",
            "word = \"new squint\"\nas = \"onset 4 months or less\"",
        );
    assert_ne!(other, local_form(shipped));
    let library = Library::shipped()
        .with_local([("local.toml".to_owned(), other)])
        .unwrap();
    let grading = library.grading("local-nsw-strabismus").unwrap();
    let by = |text: &str, onset| {
        let readings = readings(text);
        let mut facts = Clinical::of_screening(Some(AgeMonths(60)), &readings);
        facts.onset_months = onset;
        let graded = triage(grading, &facts);
        graded
            .first()
            .map(|s| (s.entry.to_string(), s.remarks.first().cloned()))
    };
    let two_lines = "cover=intermittent signs=none distance_right=6/6 distance_left=6/9.5";
    assert_eq!(by(two_lines, Some(9)), None);
    let said = by(
        "signs=new_squint distance_right=6/6 distance_left=6/6",
        None,
    )
    .unwrap();
    assert_eq!(said.0, "onset.3-months");
    assert!(said.1.unwrap().starts_with("onset unknown"));

    let faulty = local_form(shipped).replace("as = \"2 lines", "as = \"two lines");
    let refused = Library::shipped()
        .with_local([("local.toml".to_owned(), faulty)])
        .err()
        .unwrap()
        .to_string();
    assert!(
        refused.contains("`two lines or more between the eyes` is not a condition"),
        "{refused}"
    );
}

/// Inside a band: days waited, then the treatment window, then the group, each with its reason.
/// Before that: emergencies, then the date to act by (common practice).
#[test]
fn order_of_a_worklist() {
    let windows = &Library::shipped()
        .grading("queensland-strabismus")
        .unwrap()
        .windows;
    let date = |text: &str| text.parse().ok();
    let waiting = |band, days_waited, age, group| Waiting {
        emergency: false,
        act_by: None,
        band: Some(band),
        days_waited,
        age: Some(AgeMonths(age)),
        group,
    };
    let place = |band, days, age, group| order(windows, &waiting(band, days, age, group));
    let b = Level::Within(90);
    assert!(place(Level::Within(30), 0, 200, Some(3)) < place(b, 400, 40, Some(1)));
    assert!(place(b, 20, 200, Some(3)) < place(b, 19, 40, Some(1)));
    assert!(place(b, 20, 83, Some(3)) < place(b, 20, 84, Some(1)));
    assert!(place(b, 20, 155, Some(3)) < place(b, 20, 156, Some(1)));
    assert!(place(b, 20, 60, Some(1)) < place(b, 20, 60, Some(2)));
    assert_eq!(place(b, 20, 60, Some(1)).reasons.len(), 4);

    let by = |act_by: &str, waiting: Waiting| {
        order(
            windows,
            &Waiting {
                act_by: date(act_by),
                ..waiting
            },
        )
    };
    let one = waiting(b, 20, 60, Some(1));
    let emergency = order(
        windows,
        &Waiting {
            emergency: true,
            ..one
        },
    );
    assert!(emergency < by("2026-10-14", one));
    assert_eq!(emergency.reasons[0], "an emergency goes first");
    assert!(by("2026-10-14", one) < by("2026-10-15", waiting(b, 400, 60, Some(1))));
    // The same date: who waits longer, whatever the band.
    let longer = waiting(Level::Within(365), 21, 60, Some(3));
    assert!(by("2026-10-14", longer) < by("2026-10-14", one));
    // No date goes last, whatever the band.
    assert!(by("2099-01-01", one) < place(Level::AtOnce, 400, 40, Some(1)));
    let none = Waiting {
        band: None,
        age: None,
        group: None,
        ..one
    };
    assert!(one_place(windows, one) < one_place(windows, none));
    let reasons = order(&[], &none).reasons;
    assert_eq!(reasons[0], "no date to act by");
    assert!(reasons[2].starts_with("age unknown"), "{reasons:?}");
    assert!(
        reasons[3].starts_with("condition group unknown"),
        "{reasons:?}"
    );
}

fn one_place(windows: &[twoline::rules::grading::Window], waiting: Waiting) -> Place {
    order(windows, &waiting)
}
