//! The commented start of a local rule set.

use std::fmt::Write;

use crate::domain::outcome::Then;
use crate::rules::{Applies, Criterion, RuleSet};

/// Writes the start of a local rule set: one that overrides single criteria of `base`, or one that
/// stands on its own and begins as a copy of it. Only the approval is left blank.
pub fn start(base: &RuleSet, id: &str, overrides: bool) -> String {
    let mut out = String::new();
    head(&mut out, base, id, overrides);
    if overrides {
        override_part(&mut out, base);
    } else {
        copy_part(&mut out, base);
    }
    out
}

fn head(out: &mut String, base: &RuleSet, id: &str, overrides: bool) {
    let what = if overrides {
        format!(
            "A local rule set that overrides single criteria of {}.",
            base.id
        )
    } else {
        format!(
            "A local rule set. It begins as a copy of {}: put your own guidance in its place.",
            base.id
        )
    };
    let _ = write!(
        out,
        "# {what}
# Check it with: twoline rules check {id}.toml
# Then put it into the folder `rules` of the store, or name it with --rule-file.

# Small letters, digits, `-` and `.`; it appears in every file, so keep it once it was used.
id = {}
title = {}
# The edition of your own file: count it up with every change.
edition = \"1\"
",
        quoted(id),
        quoted(&format!("{}, local", base.title)),
    );
    if overrides {
        let _ = writeln!(out, "based_on = {}", quoted(&base.id));
    } else {
        let _ = writeln!(
            out,
            "# acuity, refraction or signs.\nkind = {}",
            quoted(base.kind.word())
        );
    }
    out.push_str(
        "
# The licensed professional who approved this file, and the date. The screens show both wherever
# this set speaks. Until they are filled in the file is not taken.
approved_by = \"\"
approved_on = \"\"  # such as 2026-08-01
",
    );
}

fn override_part(out: &mut String, base: &RuleSet) {
    let _ = write!(
        out,
        "
# Criteria of {} that do not hold here, by id.
# remove = [\"…\"]

# Where your own thresholds come from. basis is primary (you read it there), secondary (say in
# quoted_in where), memory or practice.
# [[source]]
# key = \"board\"
# citation = \"…\"
# basis = \"practice\"

# The same id replaces, a new id adds; everything else stays as {} has it. What it has:
",
        base.id, base.id
    );
    for criterion in &base.criteria {
        out.push('\n');
        for line in criterion_lines(criterion, "board") {
            let _ = writeln!(out, "# {line}");
        }
    }
}

fn copy_part(out: &mut String, base: &RuleSet) {
    let ages = base
        .span
        .filter(|ages| !base.by_grade && *ages != (0, None));
    if let Some((from, to)) = ages {
        let to = to.map_or_else(String::new, |to| to.to_string());
        let _ = write!(
            out,
            "
# The ages it speaks of, in completed months: 36..48 is 36 or more and fewer than 48.
ages = \"{from}..{to}\"
"
        );
    }
    if base.kind == crate::rules::Kind::Acuity {
        let credit = match base.credit {
            crate::domain::acuity::LineCredit::Majority => "majority".to_owned(),
            crate::domain::acuity::LineCredit::Ratio { correct, of } => {
                format!("{correct} of {of}")
            }
        };
        let known = base.sources.contains(&base.credit_source);
        if known {
            let _ = write!(
                out,
                "
# When a line counts as read: \"majority\" or \"3 of 4\".
line_credit = {}
line_credit_source = {}
",
                quoted(&credit),
                quoted(&base.credit_source.key)
            );
        }
    }
    out.push_str(
        "
# Where the numbers come from. basis is primary (you read it there), secondary (say in quoted_in
# where), memory or practice.
",
    );
    for source in &base.sources {
        let _ = write!(
            out,
            "[[source]]\nkey = {}\ncitation = {}\nbasis = {}\n",
            quoted(&source.key),
            quoted(&source.citation),
            quoted(source.basis.word())
        );
        if !source.quoted_in.is_empty() {
            let _ = writeln!(out, "quoted_in = {}", quoted(&source.quoted_in));
        }
        match source.locator.strip_prefix("doi ") {
            Some(doi) => _ = writeln!(out, "doi = {}", quoted(doi)),
            None if source.locator.is_empty() => {}
            None => _ = writeln!(out, "url = {}", quoted(&source.locator)),
        }
        out.push('\n');
    }
    out.push_str("# One [[criterion]] for each threshold, in the words of the guidance.\n");
    for criterion in &base.criteria {
        for line in criterion_lines(criterion, &criterion.source.key) {
            let _ = writeln!(out, "{line}");
        }
        out.push('\n');
    }
}

/// Returns the lines of a criterion as a file has them.
fn criterion_lines(criterion: &Criterion, source: &str) -> Vec<String> {
    use crate::rules::RiskRule;
    let mut out = vec![
        "[[criterion]]".to_owned(),
        format!("id = {}", quoted(&criterion.id)),
    ];
    match &criterion.applies {
        Applies::Everyone => {}
        Applies::Ages { from, to } => {
            let to = to.map_or_else(String::new, |to| to.to_string());
            out.push(format!("ages = \"{from}..{to}\""));
        }
        Applies::Grades(list) => out.push(format!("grades = {}", list_of(list.iter()))),
    }
    out.push(format!("measure = {}", quoted(criterion.measure.word())));
    out.push(format!("refer = {}", quoted(&criterion.threshold)));
    if criterion.compare == crate::rules::Compare::Letter {
        out.push("compare = \"letter\"".to_owned());
    }
    if let Some(metric) = criterion.metric {
        out.push(format!("metric = {}", quoted(metric.word())));
    }
    if let Some(beyond) = criterion.axis_beyond {
        out.push(format!("axis_beyond = {beyond}"));
    }
    for (key, findings) in [
        ("seen", &criterion.seen),
        ("with", &criterion.with),
        ("without", &criterion.without),
    ] {
        if !findings.is_empty() {
            out.push(format!(
                "{key} = {}",
                list_of(findings.iter().copied().map(finding))
            ));
        }
    }
    out.push(format!("source = {}", quoted(source)));
    let risk = match criterion.risk {
        RiskRule::None => None,
        RiskRule::Kind(kind) => Some(kind.word()),
        RiskRule::ByEyes => Some("isoametropic or one eye anisometropic"),
        RiskRule::OneEyeAlone => Some("one eye anisometropic"),
    };
    if let Some(risk) = risk {
        out.push(format!("amblyopia_risk = {}", quoted(risk)));
    }
    out.push(format!("urgency = {}", quoted(criterion.urgency.word())));
    if let Some(days) = criterion.act_within_days {
        out.push(format!("act_within_days = {days}"));
    }
    out.push(format!("required = {}", criterion.required));
    if criterion.informs {
        out.push("informs = true".to_owned());
    }
    match criterion.then {
        Then::Refer | Then::Inform => {}
        Then::Rescreen => out.push("then = \"rescreen\"".to_owned()),
        Then::Recheck(months) => {
            out.push("then = \"recheck\"".to_owned());
            out.push(format!("after_months = {months}"));
        }
    }
    if criterion.high_priority {
        out.push("priority = \"high\"".to_owned());
    }
    if !criterion.note.is_empty() {
        out.push(format!("note = {}", quoted(&criterion.note)));
    }
    out
}

fn finding(finding: crate::rules::Finding) -> String {
    use crate::rules::Finding;
    match finding {
        Finding::Sign(kind) => kind.word().to_owned(),
        Finding::Reflex(reflex) => format!("red reflex {}", reflex.word()),
        Finding::History(what) => what.word().to_owned(),
        Finding::UnderCare => "under_care".to_owned(),
    }
}

fn list_of(items: impl Iterator<Item = impl ToString>) -> String {
    let items: Vec<String> = items.map(|i| quoted(&i.to_string())).collect();
    format!("[{}]", items.join(", "))
}

/// Writes a text as TOML takes it.
fn quoted(text: &str) -> String {
    toml::Value::String(text.to_owned()).to_string()
}
