//! One rule set on many children, as columns of bytes.

use std::sync::Arc;

use crate::domain::outcome::{Answer, Then};
use crate::rules::evaluate::{Facts, answer, is_for, meridional, pass_line, scope, speak};
use crate::rules::{Case, Criterion, Metric, RuleSet};

use super::ladder::{self, Ladder};
use super::{Subject, Verdict};

/// A threshold that can be moved.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Movable {
    /// The criterion's id.
    pub id: Arc<str>,
    /// The threshold where it stands now.
    pub threshold: Arc<str>,
    /// The threshold as the file has it.
    pub original: Arc<str>,
}

/// The two places at which a child's answer turns: it refers before the first and passes from the
/// second on.
type Turns = [u8; 2];

/// A criterion that is not for a child passes at every place.
const NEVER: Turns = [0, 0];
/// No spherical equivalents, or no whole refraction.
const NO_DIFFERENCE: i32 = i32::MIN;

#[derive(Debug, Clone)]
struct Column {
    /// Its place among the criteria of the set.
    criterion: usize,
    rungs: Vec<Criterion>,
    at: u8,
    original: u8,
    /// What a child is whose answer is unknown, and one who is past the threshold.
    open: u8,
    past: u8,
    turns: Vec<Turns>,
    /// Largest difference along a meridian, where the criterion compares spherical equivalents.
    along: Option<Vec<i32>>,
}

/// A rule set, what it says of each child, and how its thresholds stand.
#[derive(Debug, Clone)]
pub(super) struct Judged {
    set: RuleSet,
    columns: Vec<Column>,
    /// What everything that cannot be moved says of each child.
    fixed: Vec<u8>,
    states: Vec<u8>,
}

/// What a child is, so that the larger of two answers stands: a second screening counts for more
/// than an unknown that could only ask for one, and for less than an unknown that could refer.
const PASS: u8 = 0;
const OPEN_AGAIN: u8 = 1;
const AGAIN: u8 = 2;
const OPEN: u8 = 3;
const REFER: u8 = 4;

/// What a criterion makes of a child past its threshold.
fn past(then: Then) -> u8 {
    if then.is_again() { AGAIN } else { REFER }
}

/// What a required criterion makes of a child it cannot answer for.
fn open(then: Then) -> u8 {
    if then.is_again() { OPEN_AGAIN } else { OPEN }
}

fn verdict(state: u8) -> Verdict {
    match state {
        PASS => Verdict::Pass,
        AGAIN => Verdict::Rescreen,
        OPEN_AGAIN | OPEN => Verdict::Incomplete,
        _ => Verdict::Refer,
    }
}

impl Judged {
    pub fn new(set: &RuleSet, subjects: &[Subject]) -> Judged {
        let mut columns: Vec<Column> = set
            .criteria
            .iter()
            .enumerate()
            .filter_map(|(i, c)| Some((i, c, ladder::of(c)?)))
            .map(|(i, criterion, Ladder { rungs, at })| Column {
                criterion: i,
                rungs,
                at: at as u8,
                original: at as u8,
                open: if criterion.required {
                    open(criterion.then)
                } else {
                    PASS
                },
                past: past(criterion.then),
                turns: Vec::with_capacity(subjects.len()),
                along: (criterion.metric == Some(Metric::SphericalEquivalent))
                    .then(|| Vec::with_capacity(subjects.len())),
            })
            .collect();
        let mut fixed = Vec::with_capacity(subjects.len());
        for subject in subjects {
            let case = subject.case();
            // What was read on a critical-line day was read against the line of that day.
            let facts = Facts::new(&case, pass_line(set, case.age, case.grade));
            fixed.push(unmoved(set, &case, &facts, &columns));
            let speaks = scope(set, case.age, case.grade).speaks();
            for column in &mut columns {
                let asked = speaks && is_for(&set.criteria[column.criterion], case.age, case.grade);
                column.turns.push(if asked {
                    turns(set, &column.rungs, &facts)
                } else {
                    NEVER
                });
                if let Some(along) = &mut column.along {
                    let difference = if asked {
                        meridional(&subject.readings)
                    } else {
                        None
                    };
                    along.push(difference.unwrap_or(NO_DIFFERENCE));
                }
            }
        }
        let mut judged = Judged {
            set: set.clone(),
            columns,
            states: Vec::new(),
            fixed,
        };
        judged.judge();
        judged
    }

    /// Puts the columns together again.
    fn judge(&mut self) {
        self.states.clear();
        self.states.extend_from_slice(&self.fixed);
        for column in &self.columns {
            let at = column.at;
            let (open, past) = (column.open, column.past);
            for (state, [refers, passes]) in self.states.iter_mut().zip(&column.turns) {
                let says = if at < *refers {
                    past
                } else if at < *passes {
                    open
                } else {
                    PASS
                };
                *state = (*state).max(says);
            }
        }
    }

    pub fn set(&self) -> &RuleSet {
        &self.set
    }

    pub fn verdicts(&self) -> impl Iterator<Item = Verdict> {
        self.states.iter().map(|state| verdict(*state))
    }

    pub fn movable(&self) -> Vec<Movable> {
        self.columns
            .iter()
            .map(|c| Movable {
                id: Arc::clone(&c.rungs[usize::from(c.at)].id),
                threshold: Arc::clone(&c.rungs[usize::from(c.at)].threshold),
                original: Arc::clone(&c.rungs[usize::from(c.original)].threshold),
            })
            .collect()
    }

    pub fn step(&mut self, threshold: usize, by: isize) -> bool {
        let Some(column) = self.columns.get_mut(threshold) else {
            return false;
        };
        let last = column.rungs.len() - 1;
        let to = usize::from(column.at).saturating_add_signed(by).min(last) as u8;
        let moved = to != column.at;
        column.at = to;
        if moved {
            self.set.criteria[column.criterion] = column.rungs[usize::from(to)].clone();
            self.judge();
        }
        moved
    }

    pub fn reset(&mut self) {
        for column in &mut self.columns {
            column.at = column.original;
            self.set.criteria[column.criterion] = column.rungs[usize::from(column.at)].clone();
        }
        self.judge();
    }

    /// Counts the children who differ along a meridian by more than the limit that their spherical
    /// equivalents keep to; none where the set compares no spherical equivalents.
    pub fn meridional(&self) -> Option<u64> {
        let mut noted: Option<Vec<bool>> = None;
        for column in &self.columns {
            let Some(along) = &column.along else {
                continue;
            };
            let rung = &column.rungs[usize::from(column.at)];
            let noted = noted.get_or_insert_with(|| vec![false; along.len()]);
            let limit = crate::rules::evaluate::largest_passing(rung).unwrap_or(i32::MAX);
            for (i, (along, [_, passes])) in along.iter().zip(&column.turns).enumerate() {
                noted[i] |= column.at >= *passes && *along != NO_DIFFERENCE && *along > limit;
            }
        }
        noted.map(|noted| noted.iter().filter(|n| **n).count() as u64)
    }
}

/// Says what everything that cannot be moved makes of a child.
fn unmoved(set: &RuleSet, case: &Case<'_>, facts: &Facts<'_>, columns: &[Column]) -> u8 {
    let scope = scope(set, case.age, case.grade);
    let mut state = if scope.unknown_word().is_some() {
        OPEN
    } else {
        PASS
    };
    // With every criterion on a ladder there is nothing left to ask.
    if !scope.speaks() || columns.len() == set.criteria.len() {
        return state;
    }
    for spoken in speak(set, facts) {
        let reason = &spoken.reason;
        let on_a_ladder = columns
            .iter()
            .any(|c| set.criteria[c.criterion].id == reason.criterion);
        if on_a_ladder {
            continue;
        }
        state = state.max(match reason.answer {
            Answer::Refer => past(reason.then),
            Answer::Unknown if reason.required => open(reason.then),
            _ => PASS,
        });
    }
    state
}

/// Finds where a child's answer turns, by asking at places of the ladder.
fn turns(set: &RuleSet, rungs: &[Criterion], facts: &Facts<'_>) -> Turns {
    let says = |at: usize| answer(set, &rungs[at], facts).answer;
    let first = |from: usize, before: Answer| {
        let (mut low, mut high) = (from, rungs.len());
        while low < high {
            let middle = usize::midpoint(low, high);
            let earlier = match before {
                Answer::Refer => says(middle) == Answer::Refer,
                _ => says(middle) != Answer::Pass,
            };
            if earlier {
                low = middle + 1;
            } else {
                high = middle;
            }
        }
        low
    };
    let refers = first(0, Answer::Refer);
    let passes = if refers == rungs.len() || says(refers) == Answer::Pass {
        refers
    } else {
        first(refers, Answer::Unknown)
    };
    [refers as u8, passes as u8]
}
