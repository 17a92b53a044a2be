//! All criteria of one rule set that are for one child.

use std::sync::Arc;

use crate::domain::acuity::{Line, Step};
use crate::domain::age::{AgeMonths, Grade};
use crate::domain::outcome::{Answer, Open, Reason, RiskKind, Urgency};
use crate::domain::readings::Eye;
use crate::rules::{Applies, Criterion, Measure, RiskRule, RuleSet, Test};

use super::{Answered, Facts, acuity, others, refraction};

/// Whether a rule set speaks of a child.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(in crate::rules) enum Scope {
    /// It does.
    Speaks,
    /// It does for every age, and the age is unknown.
    SpeaksAgeUnknown,
    /// The age is unknown or outside its bands.
    Age,
    /// The grade is unknown or not among its grades.
    Grade,
}

impl Scope {
    pub fn speaks(self) -> bool {
        matches!(self, Scope::Speaks | Scope::SpeaksAgeUnknown)
    }

    /// Returns what the outcome lists as unknown.
    pub fn unknown_word(self) -> Option<&'static str> {
        match self {
            Scope::Speaks => None,
            Scope::SpeaksAgeUnknown | Scope::Age => Some("age"),
            Scope::Grade => Some("grade"),
        }
    }
}

/// Says whether a rule set speaks of a child of this age and grade.
pub(in crate::rules) fn scope(
    set: &RuleSet,
    age: Option<AgeMonths>,
    grade: Option<Grade>,
) -> Scope {
    if set.by_grade {
        let known = grade.is_some_and(|grade| {
            set.criteria
                .iter()
                .any(|c| matches!(&c.applies, Applies::Grades(list) if list.contains(&grade)))
        });
        return if known { Scope::Speaks } else { Scope::Grade };
    }
    match (set.span, age) {
        (None, Some(_)) => Scope::Speaks,
        (None, None) => Scope::SpeaksAgeUnknown,
        (Some((from, to)), Some(age)) if from <= age.0 && to.is_none_or(|to| age.0 < to) => {
            Scope::Speaks
        }
        _ => Scope::Age,
    }
}

/// Says whether a criterion is for a child of this age and grade.
pub(in crate::rules) fn is_for(
    criterion: &Criterion,
    age: Option<AgeMonths>,
    grade: Option<Grade>,
) -> bool {
    match &criterion.applies {
        Applies::Everyone => true,
        Applies::Ages { .. } => age.is_some_and(|age| criterion.applies.holds_age(age)),
        Applies::Grades(list) => grade.is_some_and(|grade| list.contains(&grade)),
    }
}

/// Returns the worst line of the distance chart that still passes.
pub(in crate::rules) fn pass_line(
    set: &RuleSet,
    age: Option<AgeMonths>,
    grade: Option<Grade>,
) -> Option<Line> {
    if !scope(set, age, grade).speaks() {
        return None;
    }
    set.criteria
        .iter()
        .filter(|c| c.measure == Measure::DistanceEachEye && is_for(c, age, grade))
        .filter_map(|c| match c.test {
            Test::WorseThanLine(line) => Some(line),
            Test::LineOrWorse(line) => Some(Line::at(Step(line.step().0 - 1), line.notation())),
            _ => None,
        })
        .min_by_key(|line| line.logmar())
}

/// A criterion's answer as a reason, with what a protocol needs beside it.
pub(in crate::rules) struct Spoken<'s> {
    pub measure: Measure,
    pub set: &'s RuleSet,
    pub reason: Reason,
    pub not_applicable: Option<&'static str>,
    /// What a criterion saw that the protocol leaves out, in words; empty when it saw nothing.
    pub left_out: Option<String>,
}

/// Asks every criterion of a set that is for this child.
pub(in crate::rules) fn speak<'s>(set: &'s RuleSet, facts: &Facts<'_>) -> Vec<Spoken<'s>> {
    let (age, grade) = (facts.case.age, facts.case.grade);
    let mut out = Vec::with_capacity(set.criteria.len().min(8));
    let mut not_looked: Option<Spoken<'s>> = None;
    for criterion in set.criteria.iter().filter(|c| is_for(c, age, grade)) {
        let answered = answer(set, criterion, facts);
        // A list nobody filled in is one unknown, not one for each thing that could be on it.
        let list = match criterion.measure {
            Measure::Signs if facts.readings.signs.is_none() => Some("signs"),
            Measure::History if facts.readings.history.is_none() => Some("history"),
            _ => None,
        };
        if let Some(list) = list.filter(|_| answered.answer == Answer::Unknown) {
            let mut spoken = to_spoken(set, criterion, answered);
            spoken.reason.criterion = Arc::from(list);
            "not looked for".clone_into(&mut spoken.reason.reading);
            spoken.reason.open = Open::NotLookedFor;
            spoken.reason.note = Arc::from("");
            spoken.reason.urgency = not_looked.as_ref().map_or(spoken.reason.urgency, |s| {
                s.reason.urgency.min(spoken.reason.urgency)
            });
            not_looked = Some(spoken);
            continue;
        }
        out.push(to_spoken(set, criterion, answered));
    }
    out.extend(not_looked);
    out
}

/// Asks one criterion.
pub(in crate::rules) fn answer(
    set: &RuleSet,
    criterion: &Criterion,
    facts: &Facts<'_>,
) -> Answered {
    match criterion.measure {
        Measure::DistanceEachEye => acuity::each_eye(set, criterion, facts, facts.distance),
        Measure::NearEachEye => acuity::each_eye(set, criterion, facts, facts.readings.near),
        Measure::DistanceBetweenEyes => acuity::between_eyes(set, criterion, facts),
        Measure::Anisometropia => refraction::anisometropia(criterion, facts),
        Measure::Hyperopia | Measure::Astigmatism | Measure::Myopia => {
            refraction::each_eye(criterion, facts)
        }
        Measure::Strabismus => others::strabismus(criterion, facts),
        Measure::MediaOpacity | Measure::Ptosis => others::millimetres(criterion, facts),
        Measure::Signs | Measure::History | Measure::RedReflex => others::present(criterion, facts),
        Measure::PlusLens => others::plus_lens(facts),
        Measure::Stereo => others::stereo(criterion, facts),
        Measure::ColorPlates => others::color_plates(criterion, facts),
    }
}

fn to_spoken<'s>(set: &'s RuleSet, criterion: &'s Criterion, answered: Answered) -> Spoken<'s> {
    let risk = match criterion.risk {
        RiskRule::None => None,
        RiskRule::Kind(kind) => Some(kind),
        RiskRule::ByEyes => by_eyes(answered.by_eye, Some(RiskKind::Isoametropic)),
        RiskRule::OneEyeAlone => by_eyes(answered.by_eye, None),
    };
    Spoken {
        measure: criterion.measure,
        set,
        not_applicable: answered.not_applicable,
        left_out: None,
        reason: Reason {
            rule_set: Arc::clone(&set.id),
            said_by: Arc::clone(&set.short_title),
            criterion: Arc::clone(&criterion.id),
            answer: answered.answer,
            open: answered.open,
            required: criterion.required,
            eye: answered.eye,
            reading: answered.reading,
            threshold: Arc::clone(&criterion.threshold),
            margin: answered.margin,
            source: Arc::clone(&criterion.source),
            note: Arc::clone(&criterion.note),
            remarks: answered.remarks,
            risk,
            urgency: if criterion.informs {
                Urgency::Routine
            } else {
                criterion.urgency
            },
            act_within_days: criterion.act_within_days,
            then: criterion.then,
            high_priority: criterion.high_priority,
            may_be_at_once: false,
            would_change: answered.would_change,
            chart_change: answered.chart_change,
        },
    }
}

/// Both eyes past the limit, or one alone while the other is known to be within it.
fn by_eyes(eyes: Option<[Answer; 2]>, both: Option<RiskKind>) -> Option<RiskKind> {
    match eyes? {
        [Answer::Refer, Answer::Refer] => both,
        [Answer::Refer, Answer::Pass] | [Answer::Pass, Answer::Refer] => {
            Some(RiskKind::Anisometropic)
        }
        _ => None,
    }
}

/// Names an eye in a reading.
pub(super) fn eye_words(eye: Eye, value: &str) -> String {
    format!("{} {value}", eye.title())
}
