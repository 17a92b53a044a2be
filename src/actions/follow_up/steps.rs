//! One thing that was done about a referral.

use chrono::NaiveDate;
use uuid::Uuid;

use super::super::desk::Desk;
use super::super::error::{ActionError, Result};
use super::{ReferralView, closed_words};
use crate::domain::outcome::Urgency;
use crate::domain::referral::{LetterKind, Step, StepKind};
use crate::store::row::{Outcome, StepEntry};
use crate::store::{Tx, new_id};

impl Desk {
    /// Enters a step of a referral.
    ///
    /// # Errors
    /// Bad input where something of the step is missing, its day cannot be, or the referral is closed.
    pub fn add_step(&mut self, referral: Uuid, step: Step) -> Result<ReferralView> {
        let now = self.referral(referral)?;
        self.check_step(&now, &step)?;
        let row = self.step_row(referral, &now.child_id, step);
        let author = self.author();
        self.store.append(&author, |tx| tx.add(&row))?;
        self.referral(referral)
    }

    pub(super) fn check_step(&self, now: &ReferralView, step: &Step) -> Result<()> {
        if let Some(missing) = step.missing() {
            return Err(ActionError::bad(format!(
                "{}: enter {missing}",
                step.kind.title()
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
