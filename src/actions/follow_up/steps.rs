//! One thing that was done about a referral.

use chrono::NaiveDate;
use uuid::Uuid;

use super::super::desk::Desk;
use super::super::error::{ActionError, Result};
use super::{ReferralView, closed_words};
use crate::clock::{self, Moment};
use crate::domain::outcome::Urgency;
use crate::domain::referral::{ContactResult, LetterKind, Step, StepKind};
use crate::domain::text::one_line;
use crate::store::read::VisitNow;
use crate::store::row::{Outcome, StepEntry, UrgentAction};
use crate::store::{Tx, new_id};

/// Longest text of a step or a referral, in characters, as of a note.
const LONGEST: usize = 500;

/// Notes that a step ended the running line of an emergency: it stands among the steps already.
const BY_STEP: &str = "told by a step of the referral";

impl Desk {
    /// Enters a step of a referral.
    ///
    /// # Errors
    /// Bad input where something of the step is missing, its day cannot be, or the referral is closed.
    pub fn add_step(&mut self, referral: Uuid, step: Step) -> Result<ReferralView> {
        let now = self.referral(referral)?;
        self.check_step(&now, &step)?;
        let answered = self.answered_by(referral, &step)?;
        let row = self.step_row(referral, &now.child_id, step);
        let author = self.author();
        self.store.append(&author, |tx| {
            tx.add(&row)?;
            answered.iter().try_for_each(|told| tx.add(told))
        })?;
        self.referral(referral)
    }

    /// Returns what ends the running line of an emergency when the family was reached.
    fn answered_by(&self, referral: Uuid, step: &Step) -> Result<Vec<UrgentAction>> {
        if step.kind != StepKind::Call || step.result != Some(ContactResult::Reached) {
            return Ok(Vec::new());
        }
        let at = clock::now();
        let open = self.read().urgent_open()?.into_iter().map(|u| u.raised);
        Ok(open
            .filter(|raised| raised.visit_id == Some(referral))
            .map(|raised| UrgentAction {
                id: new_id(),
                step: "told".to_owned(),
                told: if step.whom.is_empty() {
                    "the family".to_owned()
                } else {
                    step.whom.clone()
                },
                at_ms: at.utc_ms,
                at_offset_minutes: i64::from(at.offset_minutes),
                screener_id: self.screener.as_ref().map(|s| s.screener_id),
                note: BY_STEP.to_owned(),
                ..raised
            })
            .collect())
    }

    /// Returns the steps with whoever was told of an emergency of the visit: somebody was spoken with.
    pub(super) fn with_told(
        &self,
        visit: Option<&VisitNow>,
        mut steps: Vec<StepEntry>,
    ) -> Result<Vec<StepEntry>> {
        let Some(visit) = visit else {
            return Ok(steps);
        };
        for told in self.read().told_of(visit.visit_id)? {
            if told.note == BY_STEP {
                continue;
            }
            let at = Moment {
                utc_ms: told.at_ms,
                offset_minutes: told.at_offset_minutes as i32,
            };
            let on = at.date().unwrap_or(visit.screened_on);
            let step = Step {
                result: Some(ContactResult::Reached),
                whom: told.told,
                note: format!("emergency: {}", told.note),
                ..Step::new(StepKind::Call, on.max(visit.screened_on))
            };
            let row = step_entry(visit.visit_id, &visit.child_id, step, told.screener_id, on);
            steps.insert(0, row);
        }
        Ok(steps)
    }

    pub(super) fn check_step(&self, now: &ReferralView, step: &Step) -> Result<()> {
        for (what, text) in [
            ("whom", &step.whom),
            ("language", &step.language),
            ("note", &step.note),
        ] {
            words(what, text)?;
        }
        if let Some(missing) = step.missing() {
            return Err(ActionError::bad(format!(
                "{}: enter {missing}",
                step.kind.title()
            )));
        }
        if step.kind == StepKind::Appointment && step.due_on.is_some_and(|due| due < step.on) {
            return Err(ActionError::bad(format!(
                "the appointment is before the day on which it was made ({})",
                step.on
            )));
        }
        if step.on > self.today {
            return Err(ActionError::bad(format!(
                "{} is after today ({})",
                step.on, self.today
            )));
        }
        if step.on < now.opened.on {
            return Err(ActionError::bad(format!(
                "{} is before the referral was opened ({})",
                step.on, now.opened.on
            )));
        }
        let after_closing = matches!(
            step.kind,
            StepKind::Reopened | StepKind::GlassesSeen | StepKind::WearChecked | StepKind::Note
        );
        match closed_words(now.standing.state) {
            Some(words) if !after_closing => Err(ActionError::bad(format!(
                "the referral of {}, {} is {words}",
                now.family_name, now.given_name
            ))
            .hint(format!(
                "open it again first: twoline step {} reopened",
                now.code.digits()
            ))),
            None if step.kind == StepKind::Reopened => {
                Err(ActionError::bad("the referral is open"))
            }
            _ => Ok(()),
        }
    }

    pub(super) fn step_row(&self, referral: Uuid, child_id: &str, step: Step) -> StepEntry {
        let screener = self.screener.as_ref().map(|s| s.screener_id);
        step_entry(referral, child_id, step, screener, self.today)
    }
}

/// Reads a text that a person wrote about a referral.
pub(super) fn words(what: &str, text: &str) -> Result<String> {
    one_line(text, LONGEST)
        .map_err(|expected| ActionError::bad(format!("{what}: expected {expected}")))
}

fn step_entry(
    referral: Uuid,
    child_id: &str,
    step: Step,
    screener: Option<Uuid>,
    entered_on: NaiveDate,
) -> StepEntry {
    StepEntry {
        id: new_id(),
        step_id: new_id(),
        referral_id: referral,
        child_id: child_id.to_owned(),
        kind: step.kind,
        done_on: step.on,
        done_at: step.at,
        channel: step.channel,
        language: step.language,
        result: step.result,
        letter: step.letter,
        due_on: step.due_on,
        worn: step.worn,
        evidence: step.evidence,
        closing: step.closing,
        whom: step.whom,
        note: step.note,
        screener_id: screener,
        entered_on,
    }
}

/// Returns the step of an entry.
pub(super) fn step_of(entry: &StepEntry) -> Step {
    Step {
        kind: entry.kind,
        on: entry.done_on,
        at: entry.done_at,
        channel: entry.channel,
        language: entry.language.clone(),
        result: entry.result,
        letter: entry.letter,
        due_on: entry.due_on,
        worn: entry.worn,
        evidence: entry.evidence,
        closing: entry.closing,
        whom: entry.whom.clone(),
        note: entry.note.clone(),
    }
}

/// Adds the step "letter out of date" where an outcome that a letter told of is replaced by another
/// one, or taken back; it names both.
pub(in crate::actions) fn out_of_date(
    tx: &mut Tx<'_>,
    visit: Uuid,
    was: &[Outcome],
    now: Option<&Outcome>,
) -> crate::store::Result<()> {
    let told = |o: &Outcome| (o.kind, o.urgency, o.act_by, o.criteria.clone());
    let Some(old) = was.first() else {
        return Ok(());
    };
    if now.is_some_and(|new| told(new) == told(old)) {
        return Ok(());
    }
    let Some(record) = tx.read().referral(visit)? else {
        return Ok(());
    };
    let told_of = |s: &StepEntry| {
        matches!(s.kind, StepKind::LetterPrinted | StepKind::LetterSent)
            && s.letter.is_some_and(LetterKind::tells_of_referral)
    };
    let Some(letter) = record.steps.iter().rev().find(|s| told_of(s)) else {
        return Ok(());
    };
    let today = tx.author().at.date().unwrap_or(letter.done_on);
    let step = Step {
        note: format!(
            "was {}, now {}",
            outcome_words(old),
            now.map_or_else(|| "taken back".to_owned(), outcome_words)
        ),
        ..Step::new(StepKind::LetterOutOfDate, today)
    };
    let screener = tx.author().screener;
    let row = step_entry(visit, &letter.child_id, step, screener, today);
    tx.add(&row)
}

fn outcome_words(outcome: &Outcome) -> String {
    let words = [
        Some(outcome.kind.title()),
        outcome.urgency.map(Urgency::title),
    ];
    words.into_iter().flatten().collect::<Vec<_>>().join(", ")
}
