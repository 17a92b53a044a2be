//! What `rules check` finds, what `rules new` writes, and sets that are based on others.

use twoline::domain::age::AgeMonths;
use twoline::domain::field::Field;
use twoline::domain::outcome::{Outcome, OutcomeKind};
use twoline::domain::readings::{ReadingContext, Readings};
use twoline::rules::{Case, Library, RuleErrors, RuleSet, check, explain, judge_rule_set, show};

const APPROVED: &str = "approved_by = \"Dr. R. Quill\"\napproved_on = 2026-08-01\n";
const BOARD: &str =
    "[[source]]\nkey = \"board\"\ncitation = \"Quillmere school board\"\nbasis = \"practice\"\n";

fn file(head: &str, criteria: &str) -> String {
    format!(
        "id = \"local\"\ntitle = \"Quillmere\"\nedition = \"1\"\n{head}{APPROVED}{BOARD}{criteria}"
    )
}

fn line(id: &str, ages: &str, refer: &str) -> String {
    format!(
        "[[criterion]]\nid = \"{id}\"\n{ages}measure = \"distance acuity, each eye\"\nrefer = \"{refer}\"\nsource = \"board\"\n"
    )
}

fn errors(text: &str) -> Vec<String> {
    let files = [("local.toml".to_owned(), text.to_owned())];
    match check::check(Library::shipped(), &files) {
        Ok(_) => Vec::new(),
        Err(RuleErrors(list)) => list.into_iter().map(|e| e.what).collect(),
    }
}

fn loaded(text: &str) -> Library {
    Library::shipped()
        .with_local([("local.toml".to_owned(), text.to_owned())])
        .unwrap_or_else(|e| panic!("\n{e}"))
}

fn judged(set: &RuleSet, age: u32, right: &str, left: &str) -> Outcome {
    let mut readings = Readings::default();
    for (field, text) in [(Field::DistanceRight, right), (Field::DistanceLeft, left)] {
        readings
            .set(field, text, ReadingContext::default())
            .expect("a value");
    }
    let mut case = Case::new(&readings);
    case.age = Some(AgeMonths(age));
    judge_rule_set(set, &case)
}

/// A threshold stricter in the same band leaves nothing to the other; an earlier urgency, another
/// band or another axis does.
#[test]
fn shadowed_thresholds_can_never_speak() {
    let acuity = "kind = \"acuity\"\n";
    let two = |b: &str| {
        file(
            acuity,
            &(line("line.36+", "ages = \"36..\"\n", "worse than 20/40") + b),
        )
    };
    let what = errors(&two(&line(
        "far.36+",
        "ages = \"36..\"\n",
        "worse than 20/50",
    )));
    assert_eq!(
        what,
        ["`far.36+` can never speak: `line.36+` refers every child it would"]
    );
    let what = errors(&two(&line(
        "far.48-59",
        "ages = \"48..60\"\n",
        "20/50 or worse",
    )));
    // 20/50 or worse is worse than 20/40 on a chart by lines.
    assert_eq!(what.len(), 1, "{what:?}");
    assert_eq!(
        errors(&two(&line(
            "far.48-59",
            "ages = \"48..60\"\n",
            "20/40 or worse"
        ))),
        [""; 0]
    );
    let sooner =
        line("far.36+", "ages = \"36..\"\n", "worse than 20/80") + "urgency = \"prompt\"\n";
    assert_eq!(errors(&two(&sooner)), [""; 0]);
    let wider = line("far.24+", "ages = \"24..\"\n", "worse than 20/80");
    assert_eq!(errors(&two(&wider)), [""; 0]);
    let equal = line("same.36+", "ages = \"36..\"\n", "worse than 20/40");
    assert_eq!(
        errors(&two(&equal)),
        ["`same.36+` can never speak: `line.36+` refers every child it would"]
    );
}

#[test]
fn a_difference_that_passing_eyes_cannot_have_never_speaks() {
    let between = |n: u32| {
        format!(
            "[[criterion]]\nid = \"between-eyes\"\nmeasure = \"distance acuity, between the eyes\"\nrefer = \"{n} lines or more\"\nsource = \"board\"\n"
        )
    };
    let with = |pass: &str, n: u32| {
        file(
            "kind = \"acuity\"\n",
            &(line("line", "", &format!("worse than {pass}")) + &between(n)),
        )
    };
    // The finest line that can be recorded is 20/10, three steps better than 20/20.
    assert_eq!(errors(&with("20/20", 3)), [""; 0]);
    assert_eq!(
        errors(&with("20/20", 4)),
        ["`between-eyes` can never speak: two eyes that pass `line` differ by 3 lines at most"]
    );
    let three = between(3).replace("\"between-eyes\"", "\"between-eyes.more\"");
    let what = errors(&file(
        "kind = \"acuity\"\n",
        &(line("line", "", "worse than 20/40") + &between(2) + &three),
    ));
    assert_eq!(
        what,
        ["`between-eyes.more` can never speak: `between-eyes` refers every child it would"]
    );
}

#[test]
fn impossible_bands_axes_and_findings_never_speak() {
    let astigmatism = |refer: &str, more: &str| {
        format!(
            "[[criterion]]\nid = \"astigmatism\"\nmeasure = \"astigmatism\"\nmetric = \"cylinder magnitude\"\nrefer = \"{refer}\"\nsource = \"board\"\n{more}"
        )
    };
    let refraction = |c: &str| errors(&file("kind = \"refraction\"\n", c));
    assert_eq!(refraction(&astigmatism("more than 1.50 D", "")), [""; 0]);
    assert_eq!(
        refraction(&astigmatism("more than 15.00 D", "")),
        ["`astigmatism` can never speak: no instrument gives astigmatism of more than 15 D"]
    );
    assert_eq!(refraction(&astigmatism("15.00 D or more", "")), [""; 0]);
    assert_eq!(
        refraction(&astigmatism("more than 1.00 D", "axis_beyond = 44\n")),
        [""; 0]
    );
    assert_eq!(
        refraction(&astigmatism("more than 1.00 D", "axis_beyond = 45\n")).len(),
        1
    );
    let ages = errors(&file(
        "kind = \"acuity\"\nages = \"36..72\"\n",
        &(line("line.36-71", "ages = \"36..72\"\n", "worse than 20/40")
            + &line("line.72+", "ages = \"72..\"\n", "worse than 20/32")),
    ));
    assert_eq!(
        ages,
        ["`line.72+` can never speak: the set speaks of 36–71 months only"]
    );
    let grades = errors(&file(
        "kind = \"acuity\"\n",
        &line("line", "grades = []\n", "worse than 20/40"),
    ));
    assert!(
        grades.iter().any(|e| e.contains("no grade is named")),
        "{grades:?}"
    );
    let sign = "[[criterion]]\nid = \"nystagmus\"\nmeasure = \"signs\"\nseen = [\"nystagmus\"]\nwithout = [\"nystagmus\"]\nrefer = \"present\"\nsource = \"board\"\n";
    let what = errors(&file("kind = \"signs\"\n", sign));
    assert_eq!(
        what,
        ["`nystagmus` can never speak: what must be seen also sets it aside"]
    );
}

/// Nothing shipped holds a threshold that can never speak, so that the check has no false alarm
/// where guidance is known to be sound. Each is read as if it were local and approved.
#[test]
fn no_shipped_threshold_is_called_dead() {
    for set in Library::shipped().rule_sets() {
        let text = format!("{APPROVED}{}", set.text);
        let what = errors(&text);
        let dead: Vec<&String> = what
            .iter()
            .filter(|w| w.contains("can never speak"))
            .collect();
        assert!(dead.is_empty(), "{}: {dead:?}", set.id);
    }
}

/// Every shipped file is sound when it is checked as a programme's own: under its own id, approved.
#[test]
fn every_shipped_file_is_sound_as_a_local_one() {
    let library = Library::shipped();
    let files: Vec<(&str, &str)> = (library.rule_sets().map(|s| (&*s.id, &*s.text)))
        .chain(library.protocols().map(|p| (&*p.id, &*p.text)))
        .chain(library.gradings().map(|g| (&*g.id, &*g.text)))
        .collect();
    assert!(files.len() >= 32, "{}", files.len());
    for (id, text) in files {
        let own = text.replacen(&format!("id = \"{id}\""), "id = \"quillmere\"", 1);
        assert_ne!(own, text, "{id}");
        assert_eq!(errors(&format!("{APPROVED}{own}")), [""; 0], "{id}");
        // Without its approval the same file is refused.
        assert_eq!(errors(&own).len(), 2, "{id}");
    }
}

/// A second screening leaves room for a referral, not the other way round; high priority is said
/// beside a referral that a stricter threshold already makes.
#[test]
fn a_second_screening_is_shadowed_by_a_referral_only() {
    let two = |first: &str, second: &str| {
        errors(&file(
            "kind = \"acuity\"\n",
            &(line("line", "", "worse than 20/40")
                + first
                + &line("line.far", "", "worse than 20/50")
                + second),
        ))
    };
    let dead = "`line.far` can never speak: `line` refers every child it would";
    let recheck = "then = \"recheck\"\nafter_months = 12\n";
    assert_eq!(two("", recheck), [dead]);
    assert_eq!(two("", "then = \"rescreen\"\n"), [dead]);
    assert_eq!(two(recheck, ""), [""; 0]);
    assert_eq!(two(recheck, "then = \"rescreen\"\n"), [""; 0]);
    assert_eq!(two("", "priority = \"high\"\n"), [""; 0]);
    assert_eq!(two("priority = \"high\"\n", ""), [dead]);
    let letters = |first: &str, second: &str| {
        let by_letter = "compare = \"letter\"\n";
        errors(&file(
            "kind = \"acuity\"\n",
            &(line("line", "", first) + by_letter + &line("line.far", "", second) + by_letter),
        ))
    };
    assert_eq!(letters("worse than 20/40", "20/40-2 or worse"), [dead]);
    assert_eq!(letters("20/40-1 or worse", "20/40-2 or worse"), [dead]);
    assert_eq!(
        letters("20/40-2 or worse", "worse than 20/40"),
        ["`line` can never speak: `line.far` refers every child it would"]
    );
}

/// The same id replaces, a new id adds, `remove` leaves out, and both sources stay.
#[test]
fn a_set_overrides_single_criteria_of_another() {
    let text = file(
        "based_on = \"joint-policy-2016\"\nremove = [\"between-eyes\"]\n",
        &line("line.60+", "ages = \"60..\"\n", "worse than 20/25"),
    );
    assert_eq!(errors(&text), [""; 0]);
    let library = loaded(&text);
    let (set, base) = (
        library.rule_set("local").expect("loaded"),
        library.rule_set("joint-policy-2016").expect("shipped"),
    );
    assert_eq!(set.kind, base.kind);
    assert_eq!(set.credit, base.credit);
    assert_eq!(set.span, base.span);
    assert_eq!(set.criteria.len(), base.criteria.len() - 1);
    // Under 60 months the base speaks, from 60 the override, and two lines no longer refer.
    assert_eq!(judged(set, 50, "20/40", "20/40").kind, OutcomeKind::Pass);
    assert_eq!(judged(set, 50, "20/50", "20/40").kind, OutcomeKind::Refer);
    assert_eq!(judged(base, 70, "20/32", "20/32").kind, OutcomeKind::Pass);
    assert_eq!(judged(set, 70, "20/32", "20/32").kind, OutcomeKind::Refer);
    assert_eq!(judged(base, 70, "20/25", "20/16").kind, OutcomeKind::Refer);
    assert_eq!(judged(set, 70, "20/25", "20/16").kind, OutcomeKind::Pass);
    // Both sources, the hash of both texts, and the approval wherever it speaks.
    let keys: Vec<&str> = set.sources.iter().map(|s| s.citation.as_str()).collect();
    assert!(keys.contains(&"Quillmere school board"));
    assert!(base.sources.iter().all(|s| keys.contains(&&*s.citation)));
    assert!(set.text.contains(&*base.text) && set.text.starts_with(&text));
    assert_ne!(set.content_hash, base.content_hash);
    let words = "local, approved by Dr. R. Quill on 2026-08-01, based on joint-policy-2016";
    assert_eq!(show::sheet(set).approval, words);
    assert!(show::list_line(set).contains(words));
    for outcome in [
        judged(set, 70, "20/32", "20/32"),
        judged(set, 50, "20/50", "20/50"),
    ] {
        let mut text = String::new();
        explain::reasons_text(&outcome, &mut text);
        assert!(text.contains(words), "{text}");
    }
    // The shipped set itself says nothing of the kind.
    let mut shipped = String::new();
    explain::reasons_text(&judged(base, 70, "20/50", "20/50"), &mut shipped);
    assert!(!shipped.contains("local"), "{shipped}");
}

/// A child whose band was taken out is unknown to the set, not passed by what is left.
#[test]
fn a_band_that_was_taken_out_never_passes() {
    let base = Library::shipped()
        .rule_set("joint-policy-2016")
        .expect("shipped");
    let youngest = base
        .criteria
        .iter()
        .find(|c| c.id.starts_with("line.") && c.applies.holds_age(AgeMonths(36)))
        .expect("the youngest band");
    let text = file(
        &format!(
            "based_on = \"joint-policy-2016\"\nremove = [\"{}\"]\n",
            youngest.id
        ),
        "",
    );
    let library = loaded(&text);
    let outcome = judged(
        library.rule_set("local").expect("loaded"),
        40,
        "20/20",
        "20/20",
    );
    assert_eq!(outcome.kind, OutcomeKind::Incomplete);
    assert_eq!(outcome.unknown, ["age"]);
}

#[test]
fn a_base_or_a_criterion_that_is_not_there_is_an_error() {
    let what = errors(&file(
        "based_on = \"joint-policy-2061\"\n",
        &line("line", "", "worse than 20/40"),
    ));
    assert!(
        what.iter().any(|w| w == "no rule set `joint-policy-2061`"),
        "{what:?}"
    );
    let what = errors(&file(
        "based_on = \"joint-policy-2016\"\nremove = [\"line.60\"]\n",
        "",
    ));
    assert_eq!(what, ["joint-policy-2016 has no criterion `line.60`"]);
    let what = errors(&file(
        "kind = \"acuity\"\nremove = [\"line\"]\n",
        &line("line", "", "worse than 20/40"),
    ));
    assert_eq!(what, ["`remove` without `based_on`"]);
    let overlap = file(
        "based_on = \"joint-policy-2016\"\n",
        &line("line.66+", "ages = \"66..\"\n", "worse than 20/25"),
    );
    assert!(
        errors(&overlap).iter().any(|w| w.contains("overlap")),
        "{:?}",
        errors(&overlap)
    );
    let all: Vec<String> = Library::shipped()
        .rule_set("joint-policy-2016")
        .expect("shipped")
        .criteria
        .iter()
        .map(|c| format!("\"{}\"", c.id))
        .collect();
    let none = file(
        &format!(
            "based_on = \"joint-policy-2016\"\nremove = [{}]\n",
            all.join(", ")
        ),
        "",
    );
    assert_eq!(errors(&none), ["a rule set without a criterion"]);
}

/// A start of every shipped set, copied and overridden, is sound but for the approval; once that is
/// filled in a copy judges like its original.
#[test]
fn a_start_is_sound_but_for_the_approval() {
    for base in Library::shipped().rule_sets() {
        for overrides in [false, true] {
            let text = check::start(base, "quillmere", overrides);
            let what = errors(&text);
            assert_eq!(
                what,
                [
                    "`approved_by` is empty",
                    "`approved_on` is not a date that can be"
                ],
                "{} {overrides}\n{text}",
                base.id
            );
            let text = text
                .replace("approved_by = \"\"", "approved_by = \"Dr. R. Quill\"")
                .replace("approved_on = \"\"", "approved_on = \"2026-08-01\"");
            assert_eq!(errors(&text), [""; 0], "{} {overrides}\n{text}", base.id);
            let library = loaded(&text);
            let set = library.rule_set("quillmere").expect("loaded");
            assert_eq!(
                (set.span, set.credit),
                (base.span, base.credit),
                "{}",
                base.id
            );
            for (own, theirs) in set.criteria.iter().zip(&base.criteria) {
                let mut plain = own.clone();
                plain.source = theirs.source.clone();
                assert_eq!(plain, *theirs, "{}", base.id);
                assert_eq!(own.source.citation, theirs.source.citation);
            }
            assert_eq!(set.criteria.len(), base.criteria.len());
        }
    }
}
