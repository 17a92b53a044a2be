//! Acuity criteria: each eye against a line, and the difference between the eyes.

use crate::domain::acuity::{Acuity, Line, LineCredit, LogMar, Notation, Step, StepRange};
use crate::domain::outcome::{Answer, ChartChange, Margin, Open};
use crate::domain::readings::{AcuityResult, Eye, Eyes};
use crate::rules::{Compare, Criterion, RuleSet, Test};

use super::set::eye_words;
use super::{Answered, Facts, deciding_eye, either_eye};

/// Judges each eye against the line of a criterion.
pub(super) fn each_eye(
    set: &RuleSet,
    criterion: &Criterion,
    facts: &Facts<'_>,
    eyes: Eyes<Option<AcuityResult>>,
) -> Answered {
    let letters = facts.letters;
    let Some(limit) = Limit::of(criterion, letters) else {
        return Answered::new(Answer::Unknown, "not an acuity threshold");
    };
    let near = criterion.measure == crate::rules::Measure::NearEachEye;
    let shift = if near { 0 } else { facts.shift };
    let by_letter = limit.by_letter;
    let ranges = eyes.both().map(|value| {
        let acuity = value?.acuity()?;
        if by_letter {
            acuity.letter_score(letters, shift)
        } else {
            acuity.steps(set.credit, letters, shift)
        }
    });
    let answers = ranges.map(|range| against(range, limit.value));
    let answer = either_eye(answers);
    let of = if near { "near, " } else { "" };
    let mut out = Answered::new(answer, format!("{of}{}", both_in_words(eyes)));
    out.by_eye = Some(answers);
    out.eye = deciding_eye(answers);
    if answer == Answer::Unknown {
        let unanswered = eyes.both().into_iter().zip(answers);
        out.open = why_open(
            unanswered
                .filter(|(_, a)| *a == Answer::Unknown)
                .map(|(v, _)| v),
        );
    }
    out.margin = margin(ranges, answers, limit.printed(), by_letter, letters);
    for (eye, value) in Eye::BOTH.into_iter().zip(eyes.both()) {
        remarks(
            set.credit,
            facts,
            shift,
            by_letter,
            eye,
            value,
            &mut out.remarks,
        );
    }
    if shift == 0 {
        out.chart_change = limit.change(near, ranges, answers, facts.notation);
    }
    if answer == Answer::Refer {
        // By letter a line's name stands for its letter score as well.
        let needed = needed_line(limit.best_named(), facts.notation, shift);
        let failing: Vec<Eye> = failing(answers);
        out.would_change = match failing.as_slice() {
            [eye] if answers.contains(&Answer::Pass) => {
                format!("{} {needed} or better would pass", eye.title())
            }
            [eye] => format!("{} {needed} or better would not refer", eye.title()),
            _ => format!("both eyes {needed} or better would pass"),
        };
    } else if answer == Answer::Unknown {
        out.would_change = format!(
            "each eye {} or better would pass",
            needed_line(limit.line, facts.notation, shift)
        );
    }
    out
}

/// The worst value that still passes an acuity threshold.
struct Limit {
    line: Line,
    /// Whether the threshold's own line passes.
    own_line_passes: bool,
    /// Letters missed of the line, where the threshold speaks of them.
    missed: i32,
    by_letter: bool,
    /// In steps, or in thousandths of logMAR times the letters of a line.
    value: i32,
    /// One step in that unit.
    step: i32,
}

impl Limit {
    fn of(criterion: &Criterion, letters: u8) -> Option<Limit> {
        let (line, missed, own_line_passes) = match criterion.test {
            Test::WorseThanLine(line) => (line, 0, true),
            Test::LineOrWorse(line) => (line, 0, false),
            Test::LettersOrWorse { line, missed } => (line, i32::from(missed), false),
            _ => return None,
        };
        let by_letter = criterion.compare == Compare::Letter;
        let at = if by_letter {
            line.logmar().0 * i32::from(letters) + missed * 100
        } else {
            line.step().0
        };
        Some(Limit {
            line,
            own_line_passes,
            missed,
            by_letter,
            value: at - i32::from(!own_line_passes),
            step: if by_letter {
                i32::from(letters) * 100
            } else {
                1
            },
        })
    }

    /// Returns the threshold's own line, whether it passes or refers.
    fn printed(&self) -> i32 {
        self.value + i32::from(!self.own_line_passes)
    }

    /// Returns the worst whole step that passes.
    fn worst_pass(&self) -> i32 {
        self.value.div_euclid(self.step)
    }

    /// Returns the line that is named as passing.
    fn best_named(&self) -> Line {
        if self.own_line_passes || self.missed > 0 {
            self.line
        } else {
            Line::at(Step(limit_step(self.line)), self.line.notation())
        }
    }

    /// Returns what would have to be read to turn the answer: the worst line that passes in each
    /// failing eye, or the best that does not in the eye that is nearer to it.
    fn change(
        &self,
        near: bool,
        ranges: [Option<StepRange>; 2],
        answers: [Answer; 2],
        notation: Notation,
    ) -> Option<ChartChange> {
        let mut change = ChartChange {
            near,
            ..ChartChange::default()
        };
        match either_eye(answers) {
            Answer::Refer => {
                // By letter the threshold's own line may pass where its nearest step would not.
                let own =
                    self.by_letter && self.own_line_passes && self.line.notation() == notation;
                let line = if own {
                    self.line
                } else {
                    needed_at(self.line, Step(self.worst_pass()), notation)
                };
                change.right = (answers[0] == Answer::Refer).then_some(line);
                change.left = (answers[1] == Answer::Refer).then_some(line);
            }
            Answer::Pass => {
                let away = |range: Option<StepRange>| {
                    Some((self.value - range?.worst?).div_euclid(self.step) + 1)
                };
                let (right, left) = (away(ranges[0])?, away(ranges[1])?);
                let step = Step(self.worst_pass() + 1);
                let line = if self.own_line_passes {
                    Line::at(step, notation)
                } else {
                    needed_at(self.line, step, notation)
                };
                change.steps = right.min(left);
                change.right = (right < left).then_some(line);
                change.left = (right >= left).then_some(line);
            }
            Answer::Unknown => return None,
        }
        Some(change)
    }
}

/// Names a step to be read: the threshold's own name where it is the threshold's own line.
fn needed_at(line: Line, step: Step, notation: Notation) -> Line {
    if line.step() == step && line.notation() == notation {
        line
    } else {
        Line::at(step, notation)
    }
}

fn limit_step(line: Line) -> i32 {
    line.step().0 - 1
}

/// Names the line to be read: the threshold's own name where no other notation or distance matters.
fn needed_line(line: Line, notation: Notation, shift: i32) -> String {
    if shift != 0 {
        let at = Line::at(LogMar(line.logmar().0 - shift).nearest_step(), notation);
        return format!("{at} on this chart");
    }
    if line.notation() == notation {
        line.to_string()
    } else {
        Line::at(line.step(), notation).to_string()
    }
}

/// Says why acuities decide nothing.
fn why_open(values: impl Iterator<Item = Option<AcuityResult>>) -> Open {
    let values: Vec<Option<AcuityResult>> = values.collect();
    if values
        .iter()
        .any(|v| matches!(v, Some(AcuityResult::NotTestable(_))))
    {
        Open::NotTestable
    } else if values.contains(&None) {
        Open::NotDone
    } else {
        Open::NotDecided
    }
}

fn failing(answers: [Answer; 2]) -> Vec<Eye> {
    Eye::BOTH
        .into_iter()
        .zip(answers)
        .filter(|(_, a)| *a == Answer::Refer)
        .map(|(eye, _)| eye)
        .collect()
}

fn against(range: Option<StepRange>, limit: i32) -> Answer {
    match range {
        Some(StepRange {
            best: Some(best), ..
        }) if best > limit => Answer::Refer,
        Some(StepRange {
            worst: Some(worst), ..
        }) if worst <= limit => Answer::Pass,
        _ => Answer::Unknown,
    }
}

/// Returns the smaller margin of the eyes that decided, where it can be measured.
fn margin(
    ranges: [Option<StepRange>; 2],
    answers: [Answer; 2],
    limit: i32,
    by_letter: bool,
    letters: u8,
) -> Margin {
    let all = either_eye(answers);
    let decided: Vec<StepRange> = ranges
        .into_iter()
        .zip(answers)
        .filter(|(_, answer)| *answer == all)
        .filter_map(|(range, _)| range)
        .collect();
    let scale = if by_letter {
        i32::from(letters.max(1)) * 100
    } else {
        1
    };
    let off_chart = |range: &StepRange| {
        let in_steps = StepRange {
            best: range.best.map(|best| best / scale),
            worst: range.worst,
        };
        !in_steps.is_on_the_chart()
    };
    if all == Answer::Unknown || decided.iter().any(off_chart) {
        return Margin::None;
    }

    let smallest = decided
        .into_iter()
        .filter_map(|range| range.worst.or(range.best).map(|at| limit - at))
        .min();
    match smallest {
        None => Margin::None,
        Some(units) if by_letter => Margin::LogMar(units / i32::from(letters.max(1))),
        Some(steps) => Margin::Steps(steps),
    }
}

fn remarks(
    credit: LineCredit,
    facts: &Facts<'_>,
    shift: i32,
    by_letter: bool,
    eye: Eye,
    value: Option<AcuityResult>,
    out: &mut Vec<String>,
) {
    let acuity = match value {
        Some(AcuityResult::Read(acuity)) => acuity,
        // Why an eye is not testable stands in the reading itself.
        Some(AcuityResult::NotTestable(_)) | None => return,
    };
    if let Acuity::AsWritten(text) = acuity {
        out.push(format!("{}: {text} has no agreed equivalent", eye.title()));
    }
    if let Acuity::Read { line, letters } = acuity
        && letters < 0
        && !by_letter
    {
        let missed = u32::from(letters.unsigned_abs());
        let counts = if credit.grants(missed, u32::from(facts.letters)) {
            "the line counts as read"
        } else {
            "the line does not count, the next larger one does"
        };
        out.push(format!(
            "{}: {missed} of {} letters of {line} missed, {counts}",
            eye.title(),
            facts.letters
        ));
    }
    if let Some(line) = acuity.line() {
        if shift != 0 {
            let at = Line::at(
                LogMar(line.logmar().0 + shift).nearest_step(),
                line.notation(),
            );
            out.push(format!(
                "{}: {line} at the distance used stands for {at}",
                eye.title()
            ));
        } else if !by_letter && line.logmar() != line.step().logmar() {
            let at = Line::at(line.step(), line.notation());
            out.push(format!(
                "{}: {line} is compared as {at}, the nearest step",
                eye.title()
            ));
        }
    }
}

/// Judges the difference between the eyes in steps of 0.1 logMAR.
pub(super) fn between_eyes(set: &RuleSet, criterion: &Criterion, facts: &Facts<'_>) -> Answered {
    let Test::LinesOrMore(limit) = criterion.test else {
        return Answered::new(Answer::Unknown, "not a difference in lines");
    };
    let eyes = facts.distance;
    let ranges = eyes.both().map(|value| {
        value?
            .acuity()?
            .steps(set.credit, facts.letters, facts.shift)
    });
    let [Some(right), Some(left)] = ranges else {
        let why = why_open(eyes.both().into_iter());
        return Answered::open(why, both_in_words(eyes));
    };
    let (least, most) = right.difference(left);
    let off_chart = !right.is_on_the_chart() || !left.is_on_the_chart();
    let answer = if least >= limit {
        Answer::Refer
    } else if most.is_some_and(|most| most < limit) {
        Answer::Pass
    } else {
        Answer::Unknown
    };
    let exact = most == Some(least) && !off_chart;
    let reading = if exact {
        format!("{} between the eyes ({})", steps(least), pair(eyes))
    } else if off_chart && answer == Answer::Refer {
        format!("one eye off the chart ({})", pair(eyes))
    } else if answer == Answer::Refer {
        format!("{} or more between the eyes ({})", steps(least), pair(eyes))
    } else {
        format!("difference not known ({})", pair(eyes))
    };
    let mut out = Answered::new(answer, reading);
    if exact {
        out.margin = Margin::Steps(limit - least);
    }
    if answer == Answer::Refer && exact {
        out.remarks.push(format!("{} of 0.1 logMAR", steps(least)));
        if neighbours(facts, right, left) {
            out.remarks
                .push("neighbouring lines on this chart".to_owned());
        }
        out.eye = Some(if right.worst > left.worst {
            Eye::Right
        } else {
            Eye::Left
        });
    }
    if answer == Answer::Refer
        && let (Some(eye), Some(best)) = (worse_eye(right, left), better_step(right, left))
    {
        out.eye = Some(eye);
        let line = Line::at(
            LogMar((best + limit - 1) * 100 - facts.shift).nearest_step(),
            facts.notation,
        );
        out.would_change = format!("{} {line} would pass", eye.title());
        if facts.shift == 0 {
            out.chart_change = Some(one_eye(eye, line, 0));
        }
    }
    // The eyes read alike or nearly so: how far the worse one is from the limit.
    if answer == Answer::Pass
        && exact
        && facts.shift == 0
        && let Some(best) = better_step(right, left)
    {
        let eye = worse_eye(right, left).unwrap_or(Eye::Left);
        let line = Line::at(Step(best + limit), facts.notation);
        out.chart_change = Some(one_eye(eye, line, limit - least));
    }
    out
}

fn one_eye(eye: Eye, line: Line, steps: i32) -> ChartChange {
    ChartChange {
        near: false,
        right: (eye == Eye::Right).then_some(line),
        left: (eye == Eye::Left).then_some(line),
        steps,
    }
}

fn worse_eye(right: StepRange, left: StepRange) -> Option<Eye> {
    let (r, l) = (right.best.or(right.worst)?, left.best.or(left.worst)?);
    Some(if r > l { Eye::Right } else { Eye::Left })
}

fn better_step(right: StepRange, left: StepRange) -> Option<i32> {
    [right, left].into_iter().filter_map(|r| r.worst).min()
}

/// Says whether the chart in use has no line between the two.
fn neighbours(facts: &Facts<'_>, right: StepRange, left: StepRange) -> bool {
    let (Some(chart), Some(a), Some(b)) = (facts.case.chart, right.worst, left.worst) else {
        return false;
    };
    let (low, high) = (a.min(b), a.max(b));
    !chart.is_empty()
        && !chart
            .iter()
            .any(|line| (low + 1..high).contains(&line.step().0))
}

pub(super) fn steps(n: i32) -> String {
    const WORDS: [&str; 10] = [
        "no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine",
    ];
    let plural = if n == 1 { "" } else { "s" };
    match usize::try_from(n).ok().and_then(|i| WORDS.get(i)) {
        Some(word) => format!("{word} step{plural}"),
        None => format!("{n} steps"),
    }
}

fn pair(eyes: Eyes<Option<AcuityResult>>) -> String {
    let [right, left] = eyes.both().map(in_words);
    format!("{right} and {left}")
}

fn in_words(value: Option<AcuityResult>) -> String {
    value.map_or_else(|| "not done".to_owned(), AcuityResult::in_words)
}

fn both_in_words(eyes: Eyes<Option<AcuityResult>>) -> String {
    let [right, left] = eyes.both().map(in_words);
    format!(
        "{}, {}",
        eye_words(Eye::Right, &right),
        eye_words(Eye::Left, &left)
    )
}
