//! Small answers that nothing else asks for: mutation testing found each of them untested. The sets are
//! local and invented, so that their numbers are of no source.

use super::support::{child, readings};
use twoline::domain::age::{AgeMonths, Grade};
use twoline::domain::outcome::{Answer, Outcome, Reason};
use twoline::rules::{Case, Library, check, explain, judge_rule_set, pass_line_of_set, show};

const HEAD: &str = "id = \"local\"\ntitle = \"Quillmere\"\nedition = \"1\"\napproved_by = \"Dr. R. Quill\"\n\
     approved_on = 2026-08-01\n[[source]]\nkey = \"board\"\ncitation = \"Quillmere school board\"\n\
     basis = \"practice\"\n";

fn local(kind: &str, rest: &str) -> Library {
    let text = format!("kind = \"{kind}\"\n{HEAD}{rest}");
    Library::shipped()
        .with_local([("local.toml".to_owned(), text)])
        .unwrap_or_else(|e| panic!("\n{e}"))
}

fn criterion(id: &str, measure: &str, refer: &str, more: &str) -> String {
    format!(
        "[[criterion]]\nid = \"{id}\"\nmeasure = \"{measure}\"\nrefer = \"{refer}\"\nsource = \"board\"\n{more}\n"
    )
}

fn judged(library: &Library, text: &str) -> Outcome {
    let readings = readings(text);
    let mut case = Case::new(&readings);
    case.age = Some(AgeMonths(72));
    judge_rule_set(library.rule_set("local").unwrap(), &case)
}

fn reason<'o>(outcome: &'o Outcome, id: &str) -> &'o Reason {
    let found = outcome.reasons.iter().find(|r| &*r.criterion == id);
    found.unwrap_or_else(|| panic!("{id} in {outcome:#?}"))
}

/// `or more` refers at the number itself, and its words and margins count from it.
#[test]
fn dioptres_or_more() {
    let library = local(
        "refraction",
        &(criterion(
            "hyperopia",
            "hyperopia",
            "4.00 D or more",
            "metric = \"most-plus meridian\"",
        ) + &criterion(
            "anisometropia",
            "anisometropia",
            "1.50 D or more",
            "metric = \"spherical equivalent\"",
        )),
    );
    let eyes = |right: &str, left: &str| {
        format!("sphere_right={right} cylinder_right=0 sphere_left={left} cylinder_left=0")
    };
    let outcome = judged(&library, &eyes("+4.00", "+3.99"));
    let hyperopia = reason(&outcome, "hyperopia");
    assert_eq!(hyperopia.answer, Answer::Refer);
    assert_eq!(explain::margin_words(hyperopia), "at the limit");
    assert_eq!(
        hyperopia.would_change,
        "hyperopia of less than 4.00 D in the right eye would not refer"
    );
    let outcome = judged(&library, &eyes("+3.99", "+2.50"));
    let hyperopia = reason(&outcome, "hyperopia");
    assert_eq!(hyperopia.answer, Answer::Pass);
    assert_eq!(explain::margin_words(hyperopia), "0.01 D to spare");
    assert_eq!(
        hyperopia.would_change,
        "hyperopia of 4.00 D or more in the right eye would not pass"
    );
    let difference = reason(&outcome, "anisometropia");
    assert_eq!(difference.answer, Answer::Pass);
    assert_eq!(explain::margin_words(difference), "0.01 D to spare");
    let outcome = judged(&library, &eyes("+3.00", "+1.50"));
    let difference = reason(&outcome, "anisometropia");
    assert_eq!(difference.answer, Answer::Refer);
    assert_eq!(explain::margin_words(difference), "at the limit");
    assert_eq!(
        difference.would_change,
        "a difference of less than 1.50 D would not refer"
    );
}

/// The largest difference along any meridian, where a set compares that.
#[test]
fn along_any_meridian() {
    let library = local(
        "refraction",
        &criterion(
            "anisometropia",
            "anisometropia",
            "more than 1.25 D",
            "metric = \"meridional\"",
        ),
    );
    let crossed = "sphere_right=0 cylinder_right=-1.50 axis_right=90 sphere_left=0 cylinder_left=-1.50 axis_left=180";
    let outcome = judged(&library, crossed);
    let difference = reason(&outcome, "anisometropia");
    assert_eq!(
        difference.reading,
        "anisometropia 1.50 D along one meridian"
    );
    assert_eq!(explain::margin_words(difference), "0.25 D over");
    // With a cylinder the axis is needed; without one it is not.
    let outcome = judged(
        &library,
        "sphere_right=0 cylinder_right=-1.50 sphere_left=0 cylinder_left=0",
    );
    assert_eq!(reason(&outcome, "anisometropia").answer, Answer::Unknown);
    assert_eq!(
        reason(&outcome, "anisometropia").reading,
        "anisometropia not known"
    );
    let outcome = judged(
        &library,
        "sphere_right=1.00 cylinder_right=0 sphere_left=0 cylinder_left=0",
    );
    assert_eq!(
        explain::margin_words(reason(&outcome, "anisometropia")),
        "0.25 D to spare"
    );
}

/// Plates that refer, where a programme has them do so.
#[test]
fn plates_that_refer() {
    let library = local(
        "signs",
        &criterion("plates", "color plates", "any plate missed", ""),
    );
    let missed = judged(&library, "plates_missed=1 plates_shown=9");
    assert_eq!(reason(&missed, "plates").answer, Answer::Refer);
    assert_eq!(reason(&missed, "plates").would_change, "");
    let none = judged(&library, "plates_missed=0");
    assert_eq!(reason(&none, "plates").reading, "0 plates missed");
    assert_eq!(
        reason(&none, "plates").would_change,
        "any plate missed would not pass"
    );
}

/// What one eye alone could turn is said so, unless the other one is open.
#[test]
fn one_eye_while_the_other_is_open() {
    for (left, expected) in [
        ("20/20", "right eye 20/32 or better would pass"),
        ("", "right eye 20/32 or better would not refer"),
        ("20/63", "both eyes 20/32 or better would pass"),
    ] {
        let text = format!("distance_right=20/63 distance_left={left}");
        let outcome = child(72, &text).by_set("arizona-school");
        assert_eq!(
            reason(&outcome, "line.60+").would_change,
            expected,
            "{left}"
        );
    }
    // Nothing was looked for, or what would go with it was not.
    let outcome = child(72, "").by_set("red-reflex");
    assert_eq!(reason(&outcome, "white").reading, "not looked for");
    // A list nobody filled in is one open point, not one for each thing that could be on it.
    for (set, list) in [("direct-referral", "history"), ("urgent-signs", "signs")] {
        let outcome = child(50, "").by_set(set);
        let open: Vec<&str> = outcome.reasons.iter().map(|r| &*r.criterion).collect();
        assert!(open.contains(&list) && open.len() < 3, "{open:?}");
        assert_eq!(reason(&outcome, list).reading, "not looked for");
    }
    let outcome = child(72, "signs=new_squint").by_set("urgent-signs");
    assert_eq!(
        reason(&outcome, "new_squint.lost_reflex").reading,
        "what would go with it was not looked for"
    );
}

#[test]
fn pass_lines_say_whom_they_are_for() {
    let library = Library::shipped();
    let words = |id: &str, age, grade| {
        let set = library.rule_set(id).unwrap();
        pass_line_of_set(set, age, grade).map(|p| format!("{} {}", p.line, p.words))
    };
    let first = Grade::parse("01");
    assert_eq!(
        words("missouri-school", Some(AgeMonths(80)), first).as_deref(),
        Some("20/30 passes in grade 01")
    );
    assert_eq!(words("missouri-school", Some(AgeMonths(80)), None), None);
    assert_eq!(
        words("arizona-school", Some(AgeMonths(80)), first).as_deref(),
        Some("20/32 passes at 6 years")
    );
}

/// A publication named twice on the same basis is cited once with it, on two bases once with both.
#[test]
fn a_publication_is_cited_once() {
    let library = local(
        "acuity",
        &("[[source]]\nkey = \"again\"\ncitation = \"Quillmere school board\"\nbasis = \"practice\"\n\
           [[source]]\nkey = \"recalled\"\ncitation = \"Quillmere school board\"\nbasis = \"memory\"\n"
            .to_owned()
            + &criterion("line", "distance acuity, each eye", "worse than 20/40", "")),
    );
    let sources = show::sheet(library.rule_set("local").unwrap()).sources;
    assert_eq!(sources.len(), 1, "{sources:?}");
    assert_eq!(
        sources[0].matches("common practice").count(),
        1,
        "{sources:?}"
    );
    assert!(sources[0].contains("; in part from memory"), "{sources:?}");
}

/// What never speaks, at the bound of what a reading can be: 30 D of sphere and 15 D of cylinder.
#[test]
fn thresholds_at_the_edge_of_what_an_instrument_gives() {
    let dead = |measure: &str, metric: &str, refer: &str| {
        let text = format!(
            "kind = \"refraction\"\n{HEAD}{}",
            criterion("it", measure, refer, &format!("metric = \"{metric}\""))
        );
        let files = [("local.toml".to_owned(), text)];
        match check::check(Library::shipped(), &files) {
            Ok(_) => false,
            Err(faults) => {
                assert!(
                    faults.to_string().contains("no instrument gives"),
                    "{faults}"
                );
                true
            }
        }
    };
    for (measure, metric, most) in [
        ("hyperopia", "most-plus meridian", 45),
        ("myopia", "most-minus meridian", 45),
        ("astigmatism", "cylinder magnitude", 15),
        ("anisometropia", "spherical equivalent", 90),
    ] {
        assert!(
            dead(measure, metric, &format!("more than {most}.00 D")),
            "{measure}"
        );
        assert!(
            !dead(measure, metric, &format!("{most}.00 D or more")),
            "{measure}"
        );
        assert!(
            !dead(measure, metric, &format!("more than {}.99 D", most - 1)),
            "{measure}"
        );
    }
}

/// By letter "worse than" a line refers less than the line "or worse".
#[test]
fn by_letter_the_line_itself_makes_the_difference() {
    let found = |first: &str, second: &str| {
        let letter = "compare = \"letter\"";
        let measure = "distance acuity, each eye";
        let text = format!(
            "kind = \"acuity\"\n{HEAD}{}{}",
            criterion("line", measure, first, letter),
            criterion("line.far", measure, second, letter)
        );
        let files = [("local.toml".to_owned(), text)];
        check::check(Library::shipped(), &files)
            .err()
            .map(|faults| faults.0.into_iter().map(|f| f.what).collect::<Vec<_>>())
    };
    let dead = |id: &str, by: &str| {
        Some(vec![format!(
            "`{id}` can never speak: `{by}` refers every child it would"
        )])
    };
    assert_eq!(
        found("worse than 20/32", "20/32 or worse"),
        dead("line", "line.far")
    );
    assert_eq!(
        found("20/32 or worse", "worse than 20/32"),
        dead("line.far", "line")
    );
    assert_eq!(
        found("20/40 or worse", "worse than 20/32"),
        dead("line", "line.far")
    );
}
