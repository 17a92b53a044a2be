//! The lines of a protocol in their order; the first that applies decides.

use chrono::NaiveDate;

use crate::domain::age::{days_after, months_after};
use crate::domain::codes::{Attempt, Consent, Correction, History, Status};
use crate::domain::outcome::{Answer, DecidedBy, OutcomeKind, Urgency};
use crate::domain::readings::{AcuityResult, NotTestable};
use crate::domain::school_calendar::SchoolCalendar;
use crate::rules::evaluate::{Spoken, refers, screened_again};
use crate::rules::{Applies, Case, Exemption, FirstFail, Kind, Measure, Protocol};

use super::gather::Gathered;

/// What a protocol comes to.
pub(super) struct Decision {
    pub kind: OutcomeKind,
    pub by: DecidedBy,
    pub due_on: Option<NaiveDate>,
    pub qualifiers: Vec<String>,
    pub notes: Vec<String>,
    /// Whether criteria that ask for a second screening decided.
    pub again: bool,
}

impl Decision {
    fn new(kind: OutcomeKind, by: DecidedBy) -> Decision {
        Decision {
            kind,
            by,
            due_on: None,
            qualifiers: Vec::new(),
            notes: Vec::new(),
            again: false,
        }
    }

    fn because(mut self, qualifier: impl Into<String>) -> Decision {
        self.qualifiers.push(qualifier.into());
        self
    }

    fn due(mut self, on: Option<NaiveDate>) -> Decision {
        self.due_on = on;
        self
    }

    fn note(mut self, note: impl Into<String>) -> Decision {
        self.notes.push(note.into());
        self
    }
}

/// Decides by the first line that applies.
pub(super) fn decide(protocol: &Protocol, case: &Case<'_>, gathered: &Gathered<'_>) -> Decision {
    let mut decision = urgent(gathered)
        .or_else(|| exempt(protocol, case, gathered))
        .or_else(|| direct_referral(gathered))
        .or_else(|| refer_at_once(protocol, gathered))
        .or_else(|| glasses(protocol, case, gathered))
        .or_else(|| criterion(protocol, case, gathered))
        .or_else(|| not_testable(protocol, case, gathered))
        .or_else(|| missing(case, gathered, false))
        .or_else(|| again(case, gathered))
        .or_else(|| missing(case, gathered, true))
        .or_else(|| not_repeated(gathered))
        .unwrap_or_else(|| Decision::new(OutcomeKind::Pass, DecidedBy::Nothing));
    if !gathered.history_shown.is_empty() {
        decision.notes.push(format!(
            "history: {} (shown, not acted on at this age)",
            gathered.history_shown.join(", ")
        ));
    }
    if let Some(note) = one_eye_guarded(case) {
        decision.notes.push(note);
    }
    if case.consent == Some(Consent::No) && decision.by != DecidedBy::Exempt {
        decision
            .notes
            .push("no consent: what was recorded is judged all the same".to_owned());
    }
    decision
}

/// 1. An emergency or prompt sign, also for a child who is exempt.
fn urgent(gathered: &Gathered<'_>) -> Option<Decision> {
    gathered
        .referring()
        .any(|s| s.reason.urgency < Urgency::Routine)
        .then(|| Decision::new(OutcomeKind::Refer, DecidedBy::UrgentSign))
}

/// 2. Exempt, and nothing was tested.
fn exempt(protocol: &Protocol, case: &Case<'_>, gathered: &Gathered<'_>) -> Option<Decision> {
    if case.readings.anything_tested() {
        return None;
    }
    let holds = |why: &Exemption| match why {
        Exemption::OptedOut => case.readings.status == Some(Status::OptedOut),
        Exemption::NoConsent => match case.consent {
            Some(Consent::No) => true,
            Some(Consent::Yes) => false,
            _ => protocol.consent_opt_in,
        },
        Exemption::UnderCare => gathered.under_care,
        Exemption::ExaminedRecently => {
            case.examined_recently || case.readings.has_history(History::Examined12Months)
        }
    };
    let why = protocol.exempt.iter().find(|why| holds(why))?;
    Some(Decision::new(OutcomeKind::Exempt, DecidedBy::Exempt).because(why.title()))
}

/// 3. A direct-referral group, not under care; the rule set holds the ages.
fn direct_referral(gathered: &Gathered<'_>) -> Option<Decision> {
    gathered
        .referring()
        .any(|s| s.measure == Measure::History)
        .then(|| Decision::new(OutcomeKind::Refer, DecidedBy::DirectReferral))
}

/// 4. What never waits for a rescreen.
fn refer_at_once(protocol: &Protocol, gathered: &Gathered<'_>) -> Option<Decision> {
    gathered
        .referring()
        .any(|s| {
            refers(&s.reason)
                && (s.reason.rule_set == protocol.id
                    || protocol.refer_at_once.contains(&s.reason.full_id()))
        })
        .then(|| Decision::new(OutcomeKind::Refer, DecidedBy::ReferAtOnce))
}

/// 5. Glasses owned and not worn: the chart is not judged. Signs still count.
fn glasses(protocol: &Protocol, case: &Case<'_>, gathered: &Gathered<'_>) -> Option<Decision> {
    if !gathered.chart_asked {
        return None;
    }
    let sign = |s: &Spoken<'_>| s.set.kind == Kind::Signs && s.measure != Measure::PlusLens;
    // Where broken glasses do not refer they are glasses that are not worn.
    let correction = match case.readings.correction {
        Some(Correction::BrokenOrLost) if !protocol.broken_glasses_refer => {
            Some(Correction::NotWorn)
        }
        correction => correction,
    };
    match correction {
        Some(Correction::BrokenOrLost) => Some(
            Decision::new(OutcomeKind::Refer, DecidedBy::GlassesNeverAvailable)
                .because("glasses broken or lost"),
        ),
        Some(Correction::NotWorn | Correction::LeftAtHome)
            if case.earlier.glasses_visits >= protocol.glasses_visits =>
        {
            Some(
                Decision::new(OutcomeKind::Refer, DecidedBy::GlassesNeverAvailable)
                    .because("glasses never available"),
            )
        }
        Some(Correction::NotWorn | Correction::LeftAtHome) if !gathered.referring().any(sign) => {
            let back = case
                .on
                .map(|on| days_after(on, protocol.glasses_return_days));
            Some(
                Decision::new(OutcomeKind::Incomplete, DecidedBy::GlassesNotWorn)
                    .because("glasses not worn, the chart is not judged")
                    .due(back)
                    .note(format!(
                        "comes back with glasses within {} days; this visit does not use up the first attempt",
                        protocol.glasses_return_days
                    )),
            )
        }
        _ => None,
    }
}

/// 6. Any other criterion.
fn criterion(protocol: &Protocol, case: &Case<'_>, gathered: &Gathered<'_>) -> Option<Decision> {
    gathered.referring().find(|s| refers(&s.reason))?;
    Some(match (case.attempt, protocol.first_fail) {
        (Attempt::First, FirstFail::WithinDays(days)) => {
            Decision::new(OutcomeKind::Rescreen, DecidedBy::Criterion)
                .due(case.on.map(|on| days_after(on, days)))
                .note(format!(
                    "a first fail is rescreened within {days} days, then referred"
                ))
        }
        (Attempt::First, FirstFail::WithinSchoolDays(days)) => working_days(case, days),
        (Attempt::First, FirstFail::Refer) => {
            Decision::new(OutcomeKind::Refer, DecidedBy::Criterion)
                .note("a fail is referred at once")
        }
        (Attempt::Rescreen, _) => Decision::new(OutcomeKind::Refer, DecidedBy::Criterion)
            .note("a rescreen that fails is referred"),
    })
}

/// Counts the rescreen in days on which school is held.
fn working_days(case: &Case<'_>, days: u32) -> Decision {
    let plain = SchoolCalendar::default();
    let calendar = case.calendar.unwrap_or(&plain);
    let counted = match case.calendar {
        Some(calendar) => calendar.name(),
        None => "Monday to Friday: no school calendar with holidays is known".to_owned(),
    };
    Decision::new(OutcomeKind::Rescreen, DecidedBy::Criterion)
        .due(case.on.and_then(|on| calendar.days_after(on, days)))
        .note(format!(
            "a first fail is rescreened within {days} working days, {counted}; then referred"
        ))
}

/// What asks for a second screening by itself, where nothing unknown could refer instead.
fn again(case: &Case<'_>, gathered: &Gathered<'_>) -> Option<Decision> {
    let (words, due) = screened_again(gathered.referring().map(|s| &s.reason), case.on)?;
    let mut decision = Decision::new(OutcomeKind::Rescreen, DecidedBy::Criterion).due(due);
    decision.again = true;
    decision.qualifiers.extend(words);
    Some(decision)
}

/// 7. Not testable: an instrument for both eyes may stand in, else a second visit, else refer.
fn not_testable(protocol: &Protocol, case: &Case<'_>, gathered: &Gathered<'_>) -> Option<Decision> {
    if !gathered.chart_asked || !case.readings.any_eye_not_testable() {
        return None;
    }
    let policy = protocol
        .not_testable
        .iter()
        .filter(|p| match (&p.applies, case.age) {
            (Applies::Ages { .. }, None) => true,
            (applies, Some(age)) => applies.holds_age(age),
            (_, None) => true,
        })
        .min_by_key(|p| p.rescreen_months.unwrap_or(u32::MAX));
    let due = case
        .on
        .zip(policy.and_then(|p| p.rescreen_months))
        .map(|(on, months)| months_after(on, months));
    if gathered.instrument_passes {
        return Some(
            Decision::new(OutcomeKind::Pass, DecidedBy::NotTestable)
                .because("instrument; chart not testable")
                .due(due)
                .note("the chart is due again"),
        );
    }
    if case.attempt == Attempt::Rescreen || case.earlier.not_testable {
        return Some(
            Decision::new(OutcomeKind::Refer, DecidedBy::NotTestable)
                .because("not testable a second time"),
        );
    }
    let mut decision = Decision::new(OutcomeKind::Rescreen, DecidedBy::NotTestable)
        .because("not testable")
        .due(due);
    if let Some(policy) = policy {
        let when = match policy.rescreen_months {
            Some(1) => "within 1 month".to_owned(),
            Some(months) => format!("within {months} months"),
            None => "when the service says".to_owned(),
        };
        decision = decision.note(format!(
            "a child who could not be tested is tried again {when}, then referred ({}, {})",
            policy.source.citation,
            policy.source.basis.title()
        ));
    } else {
        decision = decision
            .note("when a child who could not be tested comes back is for the service to say");
    }
    if case
        .readings
        .instrument
        .both()
        .iter()
        .any(|eye| eye.sphere.is_some())
    {
        decision = decision.note("half an instrument result does not pass");
    }
    Some(decision)
}

/// 8. A required test is unknown.
fn missing(case: &Case<'_>, gathered: &Gathered<'_>, again: bool) -> Option<Decision> {
    let unknown = gathered.spoken.iter().any(|s| {
        s.reason.required
            && s.reason.answer == Answer::Unknown
            && s.reason.then.is_again() == again
            && s.not_applicable.is_none()
    });
    (unknown || !gathered.outside.is_empty()).then(|| {
        let decision = Decision::new(OutcomeKind::Incomplete, DecidedBy::Missing);
        match case.readings.status {
            Some(status) if status != Status::Present => decision.because(status.title()),
            _ => decision,
        }
    })
}

/// 8. A test that failed before was not repeated: a rescreen repeats at least each failed test.
fn not_repeated(gathered: &Gathered<'_>) -> Option<Decision> {
    (!gathered.not_repeated.is_empty())
        .then(|| Decision::new(OutcomeKind::Incomplete, DecidedBy::Missing))
        .map(|decision| decision.because("a failed test was not repeated"))
}

/// Objecting to the covering of one eye only hints at unequal sight.
fn one_eye_guarded(case: &Case<'_>) -> Option<String> {
    let readings = case.readings;
    let said = |what: NotTestable| {
        readings.not_testable_reason == Some(what)
            || readings
                .distance
                .both()
                .contains(&Some(AcuityResult::NotTestable(what)))
    };
    let eye = match (
        said(NotTestable::ObjectsToCoverRight),
        said(NotTestable::ObjectsToCoverLeft),
    ) {
        (true, false) => "right",
        (false, true) => "left",
        _ => return None,
    };
    Some(format!(
        "objects to covering the {eye} eye only: itself a sign of unequal sight"
    ))
}
