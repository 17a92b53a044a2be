//! `twoline step`: what was done about a referral.

use chrono::{NaiveDate, NaiveTime};
use clap::Args;

use super::output::print_clean;
use super::values::code;
use super::{Failure, Global, open, refer};
use crate::domain::codes::YesNo;
use crate::domain::exam::Evidence;
use crate::domain::referral::{
    Channel, Closing, ContactResult, LetterKind, Step as Done, StepKind,
};

/// Enter what was done about a referral
///
/// KIND is `letter_printed`, `letter_sent`, `letter_returned`, call, message, appointment, `no_show`,
/// `report_received`, `glasses_seen`, `wear_checked`, assigned, note, closed or reopened.
#[derive(Debug, Args)]
pub(super) struct Step {
    /// Code of the referral, or the child's id
    code: String,
    /// What was done
    #[arg(value_parser = |s: &str| code(s, StepKind::from_word, StepKind::words))]
    kind: StepKind,
    /// When; today without it
    #[arg(long, value_name = "YYYY-MM-DD")]
    on: Option<NaiveDate>,
    /// Time of day
    #[arg(long, value_name = "HH:MM", value_parser = |s: &str| NaiveTime::parse_from_str(s, "%H:%M").map_err(|_| "expected a time such as 14:05".to_owned()))]
    at: Option<NaiveTime>,
    /// By which way: `childs_bag`, post, telephone, text, email, `in_person`
    #[arg(long, value_parser = |s: &str| code(s, Channel::from_word, Channel::words))]
    by: Option<Channel>,
    /// In which language
    #[arg(long, value_name = "LANGUAGE")]
    language: Option<String>,
    /// How a call or message ended: reached, `no_answer`, `message_left`, `wrong_number`, `call_again`
    #[arg(long, value_parser = |s: &str| code(s, ContactResult::from_word, ContactResult::words))]
    result: Option<ContactResult>,
    /// Which letter
    #[arg(long, value_parser = |s: &str| code(s, LetterKind::from_word, LetterKind::words))]
    letter: Option<LetterKind>,
    /// Date of an appointment, or the day to call again
    #[arg(long, value_name = "YYYY-MM-DD")]
    due: Option<NaiveDate>,
    /// Whether the glasses were worn: yes, no
    #[arg(long, value_parser = |s: &str| code(s, YesNo::from_word, YesNo::words))]
    worn: Option<YesNo>,
    /// How an examination is known: form, `parents_word`, `seen_by_nurse`
    #[arg(long, value_parser = |s: &str| code(s, Evidence::from_word, Evidence::words))]
    evidence: Option<Evidence>,
    /// Why it is closed: examined, declined, moved, unreachable, `already_under_care`,
    /// `opened_by_mistake`
    #[arg(long, value_parser = |s: &str| code(s, Closing::from_word, Closing::words))]
    closing: Option<Closing>,
    /// With whom, or to whom it is handed
    #[arg(long, value_name = "NAME")]
    whom: Option<String>,
    /// In words
    #[arg(long, value_name = "TEXT")]
    note: Option<String>,
}

impl Step {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        let mut desk = open::to_sign(global)?;
        let id = desk.find_referral(&self.code)?.id;
        let referral = desk.add_step(
            id,
            Done {
                at: self.at,
                channel: self.by,
                language: self.language.clone().unwrap_or_default(),
                result: self.result,
                letter: self.letter,
                due_on: self.due,
                worn: self.worn,
                evidence: self.evidence,
                closing: self.closing,
                whom: self.whom.clone().unwrap_or_default(),
                note: self.note.clone().unwrap_or_default(),
                ..Done::new(self.kind, self.on.unwrap_or_else(|| desk.today()))
            },
        )?;
        print_clean(&refer::whole(&desk, &referral)?)
    }
}
