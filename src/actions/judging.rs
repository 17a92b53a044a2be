//! From a child at the bench to an outcome: pure, called on every key.

use std::borrow::Cow;

use crate::actions::rescreen::carried_over;
use crate::actions::views::{DayChild, DayInfo};
use crate::domain::age::AgeMonths;
use crate::domain::codes::{Attempt, Correction, History, Status};
use crate::domain::outcome::Outcome;
use crate::domain::readings::Readings;
use crate::domain::screening_test::ScreeningTest;
use crate::rules::{
    Applies, Case, Criterion, Earlier, Library, Measure, PassLine, Protocol, judge_protocol,
    judge_protocol_alternatives, pass_line,
};

/// Returns what the readings come to for this child on this day.
///
/// A protocol that the library does not hold (a local file was removed) gives nothing.
pub fn preview(
    library: &Library,
    day: &DayInfo,
    child: &DayChild,
    readings: &Readings,
) -> Option<Outcome> {
    preview_alternatives(library, day, child, std::slice::from_ref(readings))
}

/// Returns what readings come to of which nobody has settled which they are.
pub(super) fn preview_alternatives(
    library: &Library,
    day: &DayInfo,
    child: &DayChild,
    alternatives: &[Readings],
) -> Option<Outcome> {
    let protocol = library.protocol(&day.protocol)?;
    let mut words: Vec<String> = Vec::new();
    let mut whole: Vec<Cow<'_, Readings>> = Vec::new();
    for readings in alternatives {
        let (readings, carried) = known(child, readings);
        words.extend(carried.filter(|said| !words.contains(said)));
        whole.push(readings);
    }
    let mut outcome = match &whole[..] {
        [] => return None,
        [only] => judge_protocol(library, protocol, &case(day, child, only)),
        [first, ..] => {
            let case = Case {
                under_care: whole.iter().all(|r| case(day, child, r).under_care),
                ..case(day, child, first)
            };
            let all: Vec<Readings> = whole.iter().map(|r| r.as_ref().clone()).collect();
            judge_protocol_alternatives(library, protocol, &case, &all)
        }
    };
    outcome.protocol_notes.extend(words);
    Some(outcome)
}

/// Returns the readings that are judged: with what the roster knows, and on a rescreen with the
/// tests that passed before, in words.
pub fn known<'a>(child: &DayChild, readings: &'a Readings) -> (Cow<'a, Readings>, Option<String>) {
    let readings = if lacks_what_the_roster_knows(child, readings) {
        Cow::Owned(with_roster(child, readings))
    } else {
        Cow::Borrowed(readings)
    };
    if child.attempt != Attempt::Rescreen {
        return (readings, None);
    }
    match carried_over(child, &readings) {
        Some((carried, words)) => (Cow::Owned(carried), Some(words)),
        None => (readings, None),
    }
}

/// Returns the readings with what the roster knows, where the day says nothing of it.
pub(super) fn completed(child: &DayChild, readings: Readings) -> Readings {
    if lacks_what_the_roster_knows(child, &readings) {
        with_roster(child, &readings)
    } else {
        readings
    }
}

/// Says whether the roster answers something that nobody recorded on the day.
fn lacks_what_the_roster_knows(child: &DayChild, readings: &Readings) -> bool {
    (readings.history.is_none() && !child.history.is_empty())
        || (readings.correction.is_none() && correction_from_roster(child).is_some())
}

/// Returns the readings with history and glasses as the roster knows them, where the day says
/// nothing of them.
fn with_roster(child: &DayChild, readings: &Readings) -> Readings {
    let mut readings = readings.clone();
    if readings.history.is_none() && !child.history.is_empty() {
        readings.history = Some(child.history.clone());
    }
    readings.correction = readings
        .correction
        .or_else(|| correction_from_roster(child));
    readings
}

fn case<'a>(day: &'a DayInfo, child: &'a DayChild, readings: &'a Readings) -> Case<'a> {
    Case {
        age: child.age,
        grade: child.grade,
        on: Some(day.date),
        attempt: child.attempt,
        method: Some(day.method),
        calendar: day.calendar.as_ref(),
        consent: child.consent,
        under_care: child.under_care
            || readings.status == Some(Status::UnderCare)
            || readings.has_history(History::UnderCare),
        examined_recently: child.examined_recently,
        earlier: Earlier {
            glasses_visits: child.glasses_visits,
            not_testable: child.not_testable_before,
        },
        chart: (!day.chart.is_empty()).then_some(&day.chart),
        failed_before: child.before.as_ref().map_or(&[], |b| &b.failed),
        ..Case::new(readings)
    }
}

/// Returns the worst line that still passes for this child, if the protocol has one.
pub fn pass_line_for(library: &Library, day: &DayInfo, child: &DayChild) -> Option<PassLine> {
    pass_line(
        library,
        library.protocol(&day.protocol)?,
        child.age,
        child.grade,
    )
}

/// The tests of a bench: those that the protocol and this age need, and those that are judged when
/// done.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct BenchTests {
    /// Needed for an outcome.
    pub needed: Vec<ScreeningTest>,
    /// Offered.
    pub offered: Vec<ScreeningTest>,
}

/// Returns the tests that the protocol asks for and offers at this age.
pub fn bench_tests(library: &Library, day: &DayInfo, child: &DayChild) -> BenchTests {
    let Some(protocol) = library.protocol(&day.protocol) else {
        return BenchTests::default();
    };
    let by_instrument = protocol
        .instrument_below_months
        .zip(child.age)
        .is_some_and(|(below, AgeMonths(age))| age < below);
    let mut tests = BenchTests::default();
    for test in ScreeningTest::ALL {
        let needed = match test {
            // Below this age the instrument stands in the chart's place.
            ScreeningTest::Instrument if by_instrument => true,
            ScreeningTest::Distance | ScreeningTest::Near if by_instrument => false,
            _ => measures().any(|m| m.test() == Some(*test) && asked(library, protocol, child, m)),
        };
        let offered = || {
            always(library, protocol)
                .chain(when_done(library, protocol))
                .any(|c| c.measure.test() == Some(*test) && holds(&c.applies, child))
        };
        let fits = match test {
            ScreeningTest::PlusLens => child.wears_glasses != Some(true) && !by_instrument,
            // Offered where the chart is not testable; else one key away.
            ScreeningTest::Instrument | ScreeningTest::Distance => false,
            _ => true,
        };
        if needed {
            tests.needed.push(*test);
        } else if fits && offered() {
            tests.offered.push(*test);
        }
    }
    tests
}

fn measures() -> impl Iterator<Item = Measure> {
    Measure::ALL.iter().copied()
}

/// Says whether an outcome of this age needs a measure.
fn asked(library: &Library, protocol: &Protocol, child: &DayChild, measure: Measure) -> bool {
    protocol.requires(measure, child.age)
        || always(library, protocol)
            .filter(|c| c.measure == measure && c.required && holds(&c.applies, child))
            // The plus lens is offered; color plates inform and refer nobody.
            .any(|c| !c.informs && measure != Measure::PlusLens)
}

fn when_done<'a>(
    library: &'a Library,
    protocol: &'a Protocol,
) -> impl Iterator<Item = &'a Criterion> {
    protocol
        .when_done
        .iter()
        .filter_map(|id| library.rule_set(id))
        .flat_map(|set| set.criteria.iter())
}

fn always<'a>(library: &'a Library, protocol: &'a Protocol) -> impl Iterator<Item = &'a Criterion> {
    protocol
        .rule_sets
        .iter()
        .filter_map(|id| library.rule_set(id))
        .flat_map(|set| set.criteria.iter())
}

fn holds(applies: &Applies, child: &DayChild) -> bool {
    match applies {
        Applies::Everyone => true,
        Applies::Ages { .. } => child.age.is_some_and(|age| applies.holds_age(age)),
        Applies::Grades(grades) => child.grade.is_some_and(|g| grades.contains(&g)),
    }
}

/// Returns the correction that the roster implies before anybody asked, if it says so.
pub fn correction_from_roster(child: &DayChild) -> Option<Correction> {
    (child.wears_glasses == Some(false)).then_some(Correction::None)
}
