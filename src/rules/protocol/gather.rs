//! Everything the rule sets of a protocol say of one case.

use std::sync::Arc;

use crate::domain::codes::{Correction, InstrumentResult};
use crate::domain::outcome::{Answer, Then};
use crate::domain::readings::Readings;
use crate::rules::evaluate::{self, Facts, Spoken, scope, speak};
use crate::rules::threshold::split_band;
use crate::rules::{Case, Finding, Kind, Library, Measure, Protocol, RuleSet};

/// What was asked and answered.
#[allow(clippy::struct_excessive_bools)] // each is one fact that a line of the protocol asks
pub(super) struct Gathered<'l> {
    pub spoken: Vec<Spoken<'l>>,
    /// `age` or `grade`, where a required test has no criterion for this child.
    pub outside: Vec<&'static str>,
    /// Rule sets that judge the chart.
    pub chart_sets: Vec<Arc<str>>,
    /// Whether the chart is asked of this child at all.
    pub chart_asked: bool,
    /// Whether an instrument result for both eyes is in place and within every required limit.
    pub instrument_passes: bool,
    pub under_care: bool,
    /// Glasses are owned and not worn.
    pub glasses_not_worn: bool,
    pub critical_line: bool,
    /// Entries of the history that are shown and not acted on.
    pub history_shown: Vec<String>,
    /// Criteria that referred before and have no answer today.
    pub not_repeated: Vec<String>,
}

impl<'l> Gathered<'l> {
    pub fn new(library: &'l Library, protocol: &'l Protocol, case: &Case<'_>) -> Gathered<'l> {
        let sets = |ids: &[Arc<str>]| -> Vec<&'l RuleSet> {
            ids.iter().filter_map(|id| library.rule_set(id)).collect()
        };
        let always = sets(&protocol.rule_sets);
        let line = always
            .iter()
            .find_map(|set| evaluate::pass_line(set, case.age, case.grade));
        let mut facts = Facts::new(case, line);
        let mut gathered = Gathered {
            spoken: Vec::new(),
            outside: Vec::new(),
            chart_sets: Vec::new(),
            chart_asked: false,
            instrument_passes: false,
            under_care: facts.under_care,
            glasses_not_worn: matches!(
                case.readings.correction,
                Some(Correction::NotWorn | Correction::LeftAtHome)
            ),
            critical_line: facts.critical_line,
            history_shown: Vec::new(),
            not_repeated: Vec::new(),
        };
        let young = protocol
            .instrument_below_months
            .is_some_and(|below| case.age.is_some_and(|age| age.0 < below));
        // The chart first: the plus lens asks whether it was passed.
        let (charts, others): (Vec<_>, Vec<_>) =
            always.into_iter().partition(|set| set.kind == Kind::Acuity);
        for set in charts {
            gathered.chart_sets.push(Arc::clone(&set.id));
            let scope = scope(set, case.age, case.grade);
            if scope.speaks() {
                gathered.chart_asked = true;
                gathered.ask(set, &facts, protocol);
            }
            if let Some(word) = scope.unknown_word().filter(|_| !young) {
                gathered.outside.push(word);
            }
        }
        facts.distance_passed = gathered.distance_passed();
        for set in others {
            if scope(set, case.age, case.grade).speaks() {
                gathered.ask(set, &facts, protocol);
            } else if set.criteria.iter().all(|c| c.measure == Measure::History) {
                gathered.show_history(case, set);
            }
        }
        for set in sets(&protocol.when_done) {
            // What is required at this age is asked for whether or not it was done.
            let required = set
                .criteria
                .iter()
                .any(|c| protocol.requires(c.measure, case.age));
            if (required || was_done(set, case.readings))
                && scope(set, case.age, case.grade).speaks()
            {
                gathered.ask(set, &facts, protocol);
            }
        }
        gathered.instrument(library, protocol, &facts, young);
        gathered.at_once(protocol, &facts);
        gathered.not_repeated = gathered.unanswered(case.failed_before);
        gathered
    }

    /// Returns the criteria that referred before and have no answer today. The band is left aside: a
    /// birthday between two visits moves a child to another one.
    fn unanswered(&self, failed_before: &[String]) -> Vec<String> {
        let answered = |id: &str| {
            let Some((set, criterion)) = id.split_once('/') else {
                return true;
            };
            let finding = split_band(criterion).0;
            self.spoken.iter().any(|s| {
                *s.reason.rule_set == *set
                    && split_band(&s.reason.criterion).0 == finding
                    && (s.reason.answer != Answer::Unknown || s.not_applicable.is_some())
            })
        };
        failed_before
            .iter()
            .filter(|id| !answered(id))
            .cloned()
            .collect()
    }

    /// Asks a rule set and marks which of its answers the protocol requires.
    fn ask(&mut self, set: &'l RuleSet, facts: &Facts<'_>, protocol: &Protocol) {
        for mut spoken in speak(set, facts) {
            spoken.reason.required = protocol.requires(spoken.measure, facts.case.age)
                && spoken.reason.then != Then::Inform
                && (spoken.reason.required || !spoken.reason.high_priority);
            if !protocol.leave_out.is_empty()
                && protocol.leave_out.contains(&spoken.reason.full_id())
            {
                set_aside(&mut spoken);
            }
            self.spoken.push(spoken);
        }
    }

    /// Says whether each eye passed the distance chart; nothing where no chart was judged.
    fn distance_passed(&self) -> Option<bool> {
        let mut lines = self
            .spoken
            .iter()
            .filter(|s| s.measure == Measure::DistanceEachEye)
            .peekable();
        lines.peek()?;
        Some(lines.all(|s| s.reason.answer == Answer::Pass))
    }

    /// Keeps what the history says for a child outside the ages it is acted on.
    fn show_history(&mut self, case: &Case<'_>, set: &RuleSet) {
        for criterion in &set.criteria {
            for finding in &criterion.seen {
                if let Finding::History(what) = finding
                    && case.readings.has_history(*what)
                {
                    self.history_shown.push(what.title().to_owned());
                }
            }
        }
    }

    /// Asks the instrument's rule set: for the young it is the test, else it may stand in for a
    /// chart that could not be tested.
    fn instrument(
        &mut self,
        library: &'l Library,
        protocol: &'l Protocol,
        facts: &Facts<'_>,
        young: bool,
    ) {
        let Some(set) = protocol
            .instrument
            .as_ref()
            .and_then(|id| library.rule_set(id))
        else {
            return;
        };
        let case = facts.case;
        let asked = self.spoken.iter().any(|s| s.set.id == set.id);
        let stands_in = protocol.instrument_stands_in && case.readings.any_eye_not_testable();
        let wanted = young || (stands_in && was_done(set, case.readings));
        if !asked && wanted && scope(set, case.age, case.grade).speaks() {
            for mut spoken in speak(set, facts) {
                spoken.reason.required &= young;
                self.spoken.push(spoken);
            }
        }
        // With the chart passed in glasses and a doctor in charge, an instrument says nothing new.
        if facts.distance_passed == Some(true) && facts.under_care && wears_glasses(case.readings) {
            for spoken in self.spoken.iter_mut().filter(|s| s.set.id == set.id) {
                if spoken.reason.answer == Answer::Refer {
                    spoken.not_applicable = Some("the child passes with glasses and is under care");
                }
            }
        }
        let both = case
            .readings
            .instrument
            .both()
            .iter()
            .all(|eye| eye.sphere.is_some() && eye.result != Some(InstrumentResult::NoReading));
        self.instrument_passes = stands_in
            && both
            && self.spoken.iter().any(|s| s.set.id == set.id)
            && self
                .spoken
                .iter()
                .filter(|s| s.set.id == set.id && is_refraction(s.measure))
                .all(|s| s.reason.answer == Answer::Pass);
    }

    /// Asks the protocol's own thresholds that never wait; only those that refer are kept.
    fn at_once(&mut self, protocol: &'l Protocol, facts: &Facts<'_>) {
        for spoken in speak(&protocol.at_once, facts) {
            match spoken.reason.answer {
                Answer::Refer => self.spoken.push(spoken),
                // What is open here is what could make the same measure refer at once.
                Answer::Unknown => self.open_at_once(spoken.measure),
                Answer::Pass => {}
            }
        }
        for id in &protocol.refer_at_once {
            for spoken in self.spoken.iter_mut().filter(|s| s.reason.full_id() == *id) {
                spoken.reason.may_be_at_once = spoken.reason.answer == Answer::Unknown;
            }
        }
    }

    fn open_at_once(&mut self, measure: Measure) {
        for spoken in self.spoken.iter_mut().filter(|s| s.measure == measure) {
            spoken.reason.may_be_at_once = spoken.reason.answer == Answer::Unknown;
        }
    }

    /// Returns the referring answers that count.
    pub fn referring(&self) -> impl Iterator<Item = &Spoken<'l>> {
        self.spoken.iter().filter(|s| {
            s.reason.answer == Answer::Refer
                && s.not_applicable.is_none()
                && !(s.measure == Measure::History && self.under_care)
        })
    }
}

/// Keeps what a left-out criterion saw beside the outcome, without acting on it.
fn set_aside(spoken: &mut Spoken<'_>) {
    if spoken.reason.answer == Answer::Refer {
        let days = spoken
            .reason
            .act_within_days
            .map_or_else(String::new, |days| {
                format!(", {}", crate::rules::explain::act_words(days))
            });
        spoken.left_out = Some(format!(
            "{}: {}{days} by {} ({}); shown, not acted on: this protocol leaves it out",
            spoken.reason.reading,
            spoken.reason.urgency.title(),
            spoken.reason.source.citation,
            spoken.reason.source.basis.title()
        ));
    } else {
        spoken.left_out = Some(String::new());
    }
    spoken.not_applicable = Some("left out by this protocol");
}

fn is_refraction(measure: Measure) -> bool {
    matches!(
        measure,
        Measure::Anisometropia | Measure::Hyperopia | Measure::Astigmatism | Measure::Myopia
    )
}

fn wears_glasses(readings: &Readings) -> bool {
    matches!(
        readings.correction,
        Some(Correction::Worn | Correction::ContactLenses)
    )
}

/// Says whether a test of the set was done.
fn was_done(set: &RuleSet, readings: &Readings) -> bool {
    let eyes = readings.instrument.both();
    if set.kind == Kind::Refraction {
        return eyes.iter().any(|e| {
            e.sphere.is_some()
                || e.cylinder.is_some()
                || e.result.is_some()
                || e.opacity.is_some()
                || e.reflex_distance.is_some()
        });
    }
    set.criteria.iter().any(|c| match c.measure {
        Measure::DistanceEachEye | Measure::DistanceBetweenEyes => {
            readings.distance.both().iter().any(Option::is_some)
        }
        Measure::NearEachEye => readings.near.both().iter().any(Option::is_some),
        Measure::Strabismus => readings.cover.is_some() || readings.deviation_pd.is_some(),
        Measure::RedReflex => readings.red_reflex.both().iter().any(Option::is_some),
        Measure::PlusLens => readings.plus_lens.is_some(),
        Measure::Stereo => readings.stereo_correct.is_some(),
        Measure::ColorPlates => readings.plates_missed.is_some(),
        Measure::Signs => readings.signs.is_some(),
        Measure::History => readings.history.is_some(),
        _ => false,
    })
}
