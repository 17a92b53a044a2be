//! The places a threshold can be moved to, from strict to lenient.

use std::sync::Arc;

use crate::domain::acuity::{Line, LogMar, Step};
use crate::domain::readings::Hundredths;
use crate::domain::refraction::Diopters;
use crate::rules::{Compare, Criterion, Test};

/// A criterion at each place of its ladder, and the place where it stands in the file.
pub(super) struct Ladder {
    pub rungs: Vec<Criterion>,
    pub at: usize,
}

/// Coarsest line a threshold is moved to: 20/400.
const COARSEST: i32 = 13;
/// A quarter of a dioptre, in which refraction is written.
const QUARTER: i32 = 250;

/// Returns the places of a threshold; none for one that is no quantity.
pub(super) fn of(criterion: &Criterion) -> Option<Ladder> {
    let tests: Vec<Test> = match criterion.test {
        Test::WorseThanLine(line) => lines(line, criterion.compare)
            .into_iter()
            .map(Test::WorseThanLine)
            .collect(),
        Test::LineOrWorse(line) => lines(line, criterion.compare)
            .into_iter()
            .map(Test::LineOrWorse)
            .collect(),
        Test::LettersOrWorse { line, missed } => lines(line, criterion.compare)
            .into_iter()
            .map(|line| Test::LettersOrWorse { line, missed })
            .collect(),
        Test::LinesOrMore(n) => with((1..=6).collect(), n)
            .into_iter()
            .map(Test::LinesOrMore)
            .collect(),
        Test::MoreThanDiopters(v) => grid(v, QUARTER, 40)
            .into_iter()
            .map(Test::MoreThanDiopters)
            .collect(),
        Test::DioptersOrMore(v) => grid(v, QUARTER, 40)
            .into_iter()
            .map(Test::DioptersOrMore)
            .collect(),
        Test::MoreThanPrism(v) => grid(v, 100, 40)
            .into_iter()
            .map(Test::MoreThanPrism)
            .collect(),
        Test::MoreThanMillimetres(v) => grid(v, 50, 10)
            .into_iter()
            .map(Test::MoreThanMillimetres)
            .collect(),
        Test::MillimetresOrLess(v) => grid(v, 50, 10)
            .into_iter()
            .rev()
            .map(Test::MillimetresOrLess)
            .collect(),
        Test::FewerThan { of, .. } => (1..=of)
            .rev()
            .map(|need| Test::FewerThan { need, of })
            .collect(),
        _ => return None,
    };
    let at = tests.iter().position(|t| *t == criterion.test)?;
    let rungs = tests
        .into_iter()
        .map(|test| Criterion {
            threshold: if test == criterion.test {
                Arc::clone(&criterion.threshold)
            } else {
                words(&test).into()
            },
            test,
            ..criterion.clone()
        })
        .collect();
    Some(Ladder { rungs, at })
}

/// Returns the standard lines in the notation of one line, and that line itself in its place.
fn lines(own: Line, compare: Compare) -> Vec<Line> {
    let mut all: Vec<Line> = (Step::FINEST.0..=COARSEST.max(own.step().0))
        .map(|step| Line::at(Step(step), own.notation()))
        .filter(|line| match compare {
            // Two names of one step are one threshold.
            Compare::Line => line.step() != own.step(),
            Compare::Letter => line.logmar() != own.logmar(),
        })
        .chain([own])
        .collect();
    all.sort_by_key(|line| (line.logmar(), line.step()));
    all
}

fn grid(own: i32, step: i32, steps: i32) -> Vec<i32> {
    with((0..=steps).map(|i| i * step).collect(), own)
}

fn with(mut all: Vec<i32>, own: i32) -> Vec<i32> {
    all.push(own);
    all.sort_unstable();
    all.dedup();
    all
}

/// Writes a threshold as the rule files do.
pub(super) fn words(test: &Test) -> String {
    let line = |line: Line| match line.notation() {
        crate::domain::acuity::Notation::LogMar => format!("logMAR {}", LogMar(line.logmar().0)),
        _ => line.to_string(),
    };
    let diopters = |v: i32| Diopters(v).unsigned().trim().to_owned();
    match *test {
        Test::WorseThanLine(l) => format!("worse than {}", line(l)),
        Test::LineOrWorse(l) => format!("{} or worse", line(l)),
        Test::LettersOrWorse { line: l, missed } => format!("{}-{missed} or worse", line(l)),
        Test::LinesOrMore(n) => format!("{n} lines or more"),
        Test::MoreThanDiopters(v) => format!("more than {} D", diopters(v)),
        Test::DioptersOrMore(v) => format!("{} D or more", diopters(v)),
        Test::MoreThanPrism(v) => format!("more than {} prism dioptres", Hundredths(v)),
        Test::MoreThanMillimetres(v) => format!("more than {} mm", Hundredths(v)),
        Test::MillimetresOrLess(v) => format!("{} mm or less", Hundredths(v)),
        Test::FewerThan { need, of } => format!("fewer than {need} of {of}"),
        Test::AnyManifest => "any manifest".to_owned(),
        Test::Constant => "constant".to_owned(),
        Test::Present => "present".to_owned(),
        Test::ReadThroughLens => "line read through the lens".to_owned(),
        Test::AnyMissed => "any plate missed".to_owned(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::rules::{Library, threshold};

    #[test]
    fn every_place_of_every_ladder_reads_back_as_itself() {
        let mut seen = 0;
        for set in Library::shipped().rule_sets() {
            for criterion in &set.criteria {
                let Some(ladder) = of(criterion) else {
                    continue;
                };
                assert_eq!(ladder.rungs[ladder.at], *criterion);
                assert!(ladder.rungs.len() < 255, "a place fits a byte");
                for rung in &ladder.rungs {
                    seen += 1;
                    assert_eq!(
                        threshold::parse(rung.measure, &words(&rung.test)),
                        Ok(rung.test.clone()),
                        "{} {}",
                        set.id,
                        words(&rung.test)
                    );
                }
            }
        }
        assert!(seen > 500, "{seen}");
    }
}
