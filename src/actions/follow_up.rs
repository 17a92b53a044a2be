//! Referrals: what each is, what was done, what is next.

mod exam;
mod exam_file;
mod letters;
mod lost;
mod steps;
mod view;

use std::collections::HashSet;

use chrono::NaiveDate;
use sha2::{Digest, Sha256};
use uuid::Uuid;

use super::desk::Desk;
use super::error::{ActionError, Result};
use crate::domain::age::{AgeMonths, Grade};
use crate::domain::codes::YesNo;
use crate::domain::exam::{Confirmed, ExamReport};
use crate::domain::form_code::{FormCode, FormCodeError};
use crate::domain::outcome::{OutcomeKind, Urgency};
use crate::domain::readings::ReadingContext;
use crate::domain::referral::{FollowUp, LetterKind, Opened, Standing, State, Step};
use crate::store::new_id;
use crate::store::read::{ReferralRecord, VisitNow};
use crate::store::row::{Referral, StepEntry};

pub use exam::ExamKept;
pub use exam_file::{ExamPlan, PlannedExam};
pub use letters::{LetterChoice, Printed, PrintedLetter};
pub use lost::Lost;
pub(super) use steps::out_of_date;

/// A referral with everything that was done about it.
#[derive(Debug, Clone, PartialEq)]
pub struct ReferralView {
    /// Its id.
    pub id: Uuid,
    /// What is told over the telephone.
    pub code: FormCode,
    /// Codes that stations printed before their parts were put together: they mean it too.
    pub other_codes: Vec<FormCode>,
    /// The district's own id.
    pub child_id: String,
    /// Family name.
    pub family_name: String,
    /// Given name.
    pub given_name: String,
    /// Birth date, if known.
    pub dob: Option<NaiveDate>,
    /// Completed months today.
    pub age: Option<AgeMonths>,
    /// Grade.
    pub grade: Option<Grade>,
    /// Class, empty if unknown.
    pub class: String,
    /// Site code.
    pub site: String,
    /// Code of the site where the outcome referred; empty where it was opened by hand.
    pub referred_at: String,
    /// The last examination that the roster knows.
    pub last_exam_on: Option<NaiveDate>,
    /// When and how urgently it was opened.
    pub opened: Opened,
    /// Why, in words.
    pub why: String,
    /// What the outcome says now, where it no longer says refer.
    pub outcome_now: Option<OutcomeKind>,
    /// How it stands today.
    pub standing: Standing,
    /// Everything that was done, in order.
    pub steps: Vec<StepView>,
    /// Examination reports, in order.
    pub reports: Vec<ExamReport>,
    /// Who is responsible, empty if nobody is named.
    pub responsible: String,
    /// Whether the family agreed that the referral is shared.
    pub consent_to_share: Option<YesNo>,
    /// Whether an interpreter is needed.
    pub interpreter: Option<YesNo>,
    /// Language of the family, as on the roster.
    pub language: String,
    /// What is known of an earlier examination.
    pub prior_exam: String,
    /// Whether anybody can be reached: a guardian with a telephone.
    pub reachable: bool,
}

/// One step, for people.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct StepView {
    /// The step.
    pub step: Step,
    /// Who entered it.
    pub screener: String,
    /// When.
    pub entered_on: NaiveDate,
}

/// What may be said of a referral beside its outcome; what is none stays as it was.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct ReferralDetails {
    /// Who is responsible.
    pub responsible: Option<String>,
    /// Whether the family agreed that the referral is shared.
    pub consent_to_share: Option<YesNo>,
    /// Whether an interpreter is needed.
    pub interpreter: Option<YesNo>,
    /// Language of the family.
    pub language: Option<String>,
    /// An earlier examination.
    pub prior_exam: Option<String>,
}

impl ReferralView {
    /// Returns what is missing before the referral leaves, in words.
    pub fn missing(&self) -> Vec<&'static str> {
        let mut missing = Vec::new();
        let mut ask = |absent: bool, what: &'static str| {
            if absent {
                missing.push(what);
            }
        };
        ask(self.dob.is_none(), "birth date");
        ask(self.language.is_empty(), "language of the family");
        ask(
            self.interpreter.is_none(),
            "whether an interpreter is needed",
        );
        ask(
            self.consent_to_share.is_none(),
            "whether the family agrees to sharing it",
        );
        ask(
            self.consent_to_share == Some(YesNo::No),
            "the family does not agree to sharing it",
        );
        ask(!self.reachable, "a guardian's telephone");
        ask(self.responsible.is_empty(), "who is responsible");
        ask(
            self.prior_exam.is_empty(),
            "whether there was an earlier examination",
        );
        missing
    }

    /// Says whether a code means this referral.
    pub fn has_code(&self, code: FormCode) -> bool {
        self.code == code || self.other_codes.contains(&code)
    }

    /// Returns the newest report, which counts.
    pub fn report(&self) -> Option<&ExamReport> {
        self.reports.last()
    }

    /// Says whether the examination confirmed a finding, by its definition.
    pub fn confirmed(&self, group: Option<u32>) -> Confirmed {
        self.report()
            .map_or(Confirmed::NotKnown, |r| r.confirmed(group))
    }

    /// Returns the place in the worklist: emergencies, then the day something is due, then the date
    /// to act by, then the days since the last step, then the younger.
    fn place(&self) -> impl Ord + use<> {
        (
            self.standing.next.is_none(),
            self.opened.urgency != Urgency::Emergency || !self.standing.state.is_open(),
            self.standing.next.as_ref().map(|n| n.due),
            self.opened.act_by.is_none(),
            self.opened.act_by,
            self.standing.last,
            self.age.is_none(),
            self.age,
            self.child_id.clone(),
        )
    }
}

/// Returns the code of a referral: eight digits of the hash of its id.
pub(super) fn code_of(id: Uuid) -> FormCode {
    let hash = Sha256::new()
        .chain_update(b"twoline-form\0")
        .chain_update(id.as_bytes())
        .finalize();
    let mut first = [0; 8];
    first.copy_from_slice(&hash[..8]);
    FormCode::new(u64::from_be_bytes(first))
}

impl Desk {
    /// Returns what the programme does about referrals: its settings, else the defaults.
    pub fn follow_up(&self) -> Result<FollowUp> {
        let mut settings = FollowUp::default();
        for (name, value) in [
            ("notice_days", &mut settings.notice_days),
            ("second_letter_days", &mut settings.second_letter_days),
            ("call_again_days", &mut settings.call_again_days),
            ("contact_attempts", &mut settings.attempts),
            ("report_days", &mut settings.report_days),
            ("wear_days", &mut settings.wear_days),
            ("wear_months", &mut settings.wear_months),
        ] {
            // A setting is checked when it is made.
            if let Some(days) = self.read().setting(name)?.and_then(|t| t.parse().ok()) {
                *value = days;
            }
        }
        Ok(settings)
    }

    /// Returns every referral, what is due first; the closed ones come last.
    pub fn referral_list(&self) -> Result<Vec<ReferralView>> {
        let settings = self.follow_up()?;
        let screeners = self.screener_names()?;
        let mut list = Vec::new();
        for record in self.referral_records()? {
            list.push(self.viewed(record, &settings, &screeners)?);
        }
        list.sort_by_cached_key(ReferralView::place);
        Ok(list)
    }

    /// Returns the referrals of one child, what is due first; the closed ones come last.
    pub fn referrals_of(&self, child_id: &str) -> Result<Vec<ReferralView>> {
        let settings = self.follow_up()?;
        let screeners = self.screener_names()?;
        let mut list = Vec::new();
        for record in self.read().referrals_of(child_id)? {
            let record = self.record_now(record)?;
            if is_referral(&record) {
                list.push(self.viewed(record, &settings, &screeners)?);
            }
        }
        list.sort_by_cached_key(ReferralView::place);
        Ok(list)
    }

    /// Returns a referral by its id.
    pub fn referral(&self, id: Uuid) -> Result<ReferralView> {
        let record = self.read().referral(id)?;
        let record = record
            .map(|record| self.record_now(record))
            .transpose()?
            .filter(is_referral)
            .ok_or_else(|| ActionError::bad("there is no such referral"))?;
        self.viewed(record, &self.follow_up()?, &self.screener_names()?)
    }

    /// Returns a referral by its code, or by the child's id where the child has one open referral.
    ///
    /// # Errors
    /// Bad input with the near codes, or with the child's referrals where there are several.
    pub fn find_referral(&self, text: &str) -> Result<ReferralView> {
        let list = self.referral_list()?;
        let pick = |mut found: Vec<ReferralView>, none: ActionError| match found.len() {
            0 => Err(none),
            1 => Ok(found.swap_remove(0)),
            _ => Err(
                ActionError::bad(format!("{} referrals fit {text:?}", found.len()))
                    .hint(found.iter().map(with_code).collect::<Vec<_>>().join("; ")),
            ),
        };
        match FormCode::parse(text) {
            Ok(code) => pick(
                list.into_iter().filter(|r| r.has_code(code)).collect(),
                ActionError::bad(format!("no referral of this store has the code {code}")).hint(
                    "was the form from another programme? find the child: twoline child find",
                ),
            ),
            Err(error @ FormCodeError::Check { .. }) => {
                let fit = near_words(&list, text);
                let error = ActionError::bad(error.to_string());
                Err(if fit.is_empty() {
                    error.hint("no referral has a code near it; read it out once more")
                } else {
                    error.hint(format!("near it: {}", fit.join("; ")))
                })
            }
            Err(error @ FormCodeError::Form { .. }) => {
                let mine: Vec<ReferralView> =
                    list.into_iter().filter(|r| r.child_id == text).collect();
                let open: Vec<ReferralView> = mine
                    .iter()
                    .filter(|r| r.standing.state.is_open())
                    .cloned()
                    .collect();
                let known = self.read().child(text)?.is_some();
                pick(
                    if open.is_empty() { mine } else { open },
                    if known {
                        ActionError::bad(format!("{text} has no referral"))
                            .hint("open one by hand: twoline refer open")
                    } else {
                        ActionError::bad(error.to_string())
                    },
                )
            }
        }
    }

    /// Opens a referral by hand, with the reason.
    pub fn refer(
        &mut self,
        child_id: &str,
        reason: &str,
        urgency: Urgency,
    ) -> Result<ReferralView> {
        let reason = steps::words("reason", reason)?;
        if reason.is_empty() {
            return Err(ActionError::bad(
                "a referral opened by hand needs its reason",
            ));
        }
        let child = self
            .read()
            .child(child_id)?
            .ok_or_else(|| ActionError::bad(format!("no child has the id {child_id:?}")))?;
        if let Some(open) = self
            .referral_list()?
            .iter()
            .find(|r| r.child_id == child.child_id && r.standing.state.is_open())
        {
            return Err(ActionError::bad(format!(
                "{}, {} has an open referral already, code {}",
                child.family_name, child.given_name, open.code
            ))
            .hint("add a step to it, or close it first"));
        }
        let id = new_id();
        let row = Referral {
            id: new_id(),
            referral_id: id,
            child_id: child.child_id,
            visit_id: None,
            opened_on: self.today,
            urgency,
            act_by: None,
            reason,
            responsible: String::new(),
            consent_to_share: None,
            interpreter: None,
            language: String::new(),
            prior_exam: String::new(),
        };
        let author = self.author();
        self.store.append(&author, |tx| tx.add(&row))?;
        self.referral(id)
    }

    /// Says more of a referral; what is none stays as it was.
    pub fn describe_referral(&mut self, id: Uuid, more: ReferralDetails) -> Result<ReferralView> {
        for (what, text) in [
            ("responsible", &more.responsible),
            ("language", &more.language),
            ("prior exam", &more.prior_exam),
        ] {
            steps::words(what, text.as_deref().unwrap_or_default())?;
        }
        let now = self.referral(id)?;
        let record = self.read().referral(id)?;
        let row = Referral {
            id: new_id(),
            referral_id: id,
            child_id: now.child_id,
            visit_id: record
                .as_ref()
                .and_then(|r| r.visit.as_ref().map(|v| v.visit_id)),
            opened_on: now.opened.on,
            urgency: now.opened.urgency,
            act_by: now.opened.act_by,
            reason: record
                .and_then(|r| r.row)
                .map(|r| r.reason)
                .unwrap_or_default(),
            responsible: more.responsible.unwrap_or(now.responsible),
            consent_to_share: more.consent_to_share.or(now.consent_to_share),
            interpreter: more.interpreter.or(now.interpreter),
            language: more.language.unwrap_or(now.language),
            prior_exam: more.prior_exam.unwrap_or(now.prior_exam),
        };
        let author = self.author();
        self.store
            .append(&author, |tx| tx.put(row, "more is known").map(|_| ()))?;
        self.referral(id)
    }

    /// Returns every referral as the store holds it, with what the readings of each visit say now.
    fn referral_records(&self) -> Result<Vec<ReferralRecord>> {
        let mut records = Vec::new();
        for record in self.read().referrals()? {
            records.push(self.record_now(record)?);
        }
        let known: HashSet<Uuid> = records.iter().map(|r| r.referral_id).collect();
        // What the last signature does not refer. A visit in conflict is on the worklist alone: no
        // letter goes out before it is settled.
        for (child, visit) in self.referred_now()? {
            if !known.contains(&visit.visit_id) {
                records.push(ReferralRecord {
                    referral_id: visit.visit_id,
                    child,
                    visit: Some(visit),
                    row: None,
                    steps: Vec::new(),
                    reports: Vec::new(),
                });
            }
        }
        records.retain(is_referral);
        Ok(records)
    }

    fn record_now(&self, mut record: ReferralRecord) -> Result<ReferralRecord> {
        record.visit = record.visit.map(|v| self.as_now(v)).transpose()?;
        Ok(record)
    }

    /// Returns the reasons of a visit's outcome in words: as signed last, or of what its readings say
    /// now where several signatures stand; of values that differ that they are to be settled.
    pub(super) fn why_now(&self, visit: &VisitNow) -> Result<String> {
        if let Some(together) = self.together(visit)? {
            return Ok(together.why());
        }
        let signed = self.read().outcomes(visit.visit_id)?;
        Ok(signed
            .first()
            .map(|o| o.reasons.clone())
            .unwrap_or_default())
    }
}

/// Returns the referrals whose code is one slip away from what was written, in words.
fn near_words(list: &[ReferralView], written: &str) -> Vec<String> {
    let near = FormCode::near(written);
    list.iter()
        .filter(|r| near.iter().any(|code| r.has_code(*code)))
        .map(with_code)
        .collect()
}

fn with_code(r: &ReferralView) -> String {
    format!(
        "{} {}, {} ({})",
        r.code, r.family_name, r.given_name, r.child_id
    )
}

/// Says whether a record is a referral, and not only a visit about which a notice went out.
fn is_referral(record: &ReferralRecord) -> bool {
    let notice = |s: &StepEntry| {
        matches!(
            s.letter,
            Some(
                LetterKind::Rescreen
                    | LetterKind::GlassesAtHome
                    | LetterKind::Passed
                    | LetterKind::Color
                    | LetterKind::ToDoctor
            )
        )
    };
    record.row.is_some()
        || !record.reports.is_empty()
        || record
            .visit
            .as_ref()
            .is_some_and(|v| v.kind == Some(OutcomeKind::Refer))
        || record.steps.iter().any(|s| !notice(s))
}

/// What a bare acuity in a report is the denominator of.
pub(super) fn context(desk: &Desk) -> ReadingContext {
    ReadingContext {
        bare: Some(desk.notation()),
        critical_line: None,
    }
}

/// Says in words what a closed referral is.
fn closed_words(state: State) -> Option<String> {
    match state {
        State::Closed(closing) => Some(format!("closed: {}", closing.title())),
        State::Examined => Some("closed: examined".to_owned()),
        _ => None,
    }
}
