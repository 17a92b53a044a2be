//! A referral: the steps done about it, how it stands, and what is to be done next.
//!
//! Everything here follows from the steps that were entered and the programme's settings; nothing is
//! stored twice. The intervals are settings whose defaults name their source.

mod standing;

use chrono::{NaiveDate, NaiveTime};

use super::codes::{YesNo, code_list};
use super::exam::Evidence;
use super::outcome::Urgency;

pub use standing::{Next, NextKind, Standing, State, standing};

code_list! {
    /// What was done about a referral.
    StepKind {
        LetterPrinted = "letter_printed", "letter printed";
        LetterSent = "letter_sent", "letter sent";
        LetterReturned = "letter_returned", "letter came back";
        LetterOutOfDate = "letter_out_of_date", "letter out of date";
        Call = "call", "call";
        Message = "message", "message";
        Appointment = "appointment", "appointment made";
        NoShow = "no_show", "did not come to the appointment";
        ReportReceived = "report_received", "report received";
        GlassesSeen = "glasses_seen", "glasses seen";
        WearChecked = "wear_checked", "wear of glasses checked";
        Assigned = "assigned", "handed to";
        Note = "note", "note";
        Closed = "closed", "closed";
        Reopened = "reopened", "opened again";
    }
}

code_list! {
    /// By which way a family or a clinic was reached.
    Channel {
        ChildsBag = "childs_bag", "in the child's bag";
        Post = "post", "by post";
        Telephone = "telephone", "by telephone";
        Text = "text", "by text message";
        Email = "email", "by email";
        InPerson = "in_person", "in person";
    }
}

code_list! {
    /// How a call or a message ended.
    ContactResult {
        Reached = "reached", "reached";
        NoAnswer = "no_answer", "no answer";
        MessageLeft = "message_left", "message left";
        WrongNumber = "wrong_number", "wrong number";
        CallAgain = "call_again", "asked to call again";
    }
}

code_list! {
    /// Why a referral was closed.
    Closing {
        Examined = "examined", "examined";
        Declined = "declined", "declined";
        Moved = "moved", "moved away";
        Unreachable = "unreachable", "not reached";
        UnderCare = "already_under_care", "already under care";
        Mistake = "opened_by_mistake", "opened by mistake";
    }
}

code_list! {
    /// Every kind of letter.
    LetterKind {
        Referral = "referral", "referral";
        Urgent = "urgent", "urgent referral";
        Rescreen = "rescreen", "rescreen notice";
        GlassesAtHome = "glasses_at_home", "glasses left at home";
        Second = "second_notice", "second notice";
        Passed = "passed", "passed";
        Color = "color", "color information";
        ToDoctor = "to_doctor", "result to the child's doctor";
        ExamForm = "exam_form", "exam report form";
    }
}

impl LetterKind {
    /// Says whether it goes to somebody other than the family.
    pub fn is_for_a_third_party(self) -> bool {
        self == LetterKind::ToDoctor
    }
}

impl LetterKind {
    /// Says whether the letter tells a family that the child is referred; a notice of another kind
    /// does not.
    pub fn tells_of_referral(self) -> bool {
        matches!(
            self,
            LetterKind::Referral | LetterKind::Urgent | LetterKind::Second
        )
    }
}

/// One thing that was done.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Step {
    /// What.
    pub kind: StepKind,
    /// Civil date on which it was done.
    pub on: NaiveDate,
    /// Time of day, where it was said.
    pub at: Option<NaiveTime>,
    /// By which way.
    pub channel: Option<Channel>,
    /// In which language, as on the roster.
    pub language: String,
    /// How a call or message ended.
    pub result: Option<ContactResult>,
    /// Which letter.
    pub letter: Option<LetterKind>,
    /// Date of an appointment, or the day on which to look again.
    pub due_on: Option<NaiveDate>,
    /// Whether glasses were worn when somebody looked.
    pub worn: Option<YesNo>,
    /// How an examination is known.
    pub evidence: Option<Evidence>,
    /// Why it was closed.
    pub closing: Option<Closing>,
    /// Who, outside the programme (the guardian, a clinic), or to whom it was handed.
    pub whom: String,
    /// In words.
    pub note: String,
}

impl Step {
    /// Makes a step with only what every step has.
    pub fn new(kind: StepKind, on: NaiveDate) -> Step {
        Step {
            kind,
            on,
            at: None,
            channel: None,
            language: String::new(),
            result: None,
            letter: None,
            due_on: None,
            worn: None,
            evidence: None,
            closing: None,
            whom: String::new(),
            note: String::new(),
        }
    }

    /// Says whether it is a letter of that step, printed or sent or come back, about the referral; a
    /// report form goes with its letter, a notice of another kind is none.
    pub fn is_letter(&self, kind: StepKind) -> bool {
        self.kind == kind && self.letter.is_none_or(LetterKind::tells_of_referral)
    }

    /// Says whether it counts as a documented attempt to reach the family: a letter about the referral
    /// that went out, a call or a message, whatever came of it.
    pub fn is_attempt(&self) -> bool {
        matches!(self.kind, StepKind::Call | StepKind::Message)
            || self.is_letter(StepKind::LetterSent)
    }

    /// Returns what is missing or odd in it, in words.
    ///
    /// A closing names its reason, and an examination its evidence; an appointment has its date.
    pub fn missing(&self) -> Option<&'static str> {
        match self.kind {
            StepKind::Closed if self.closing.is_none() => Some(
                "why it is closed (--closing): examined, declined, moved, unreachable, \
                 already_under_care, opened_by_mistake",
            ),
            StepKind::Closed
                if self.closing == Some(Closing::Examined) && self.evidence.is_none() =>
            {
                Some("how the examination is known: form, parents_word, seen_by_nurse")
            }
            StepKind::Appointment if self.due_on.is_none() => Some("the date of the appointment"),
            StepKind::Call | StepKind::Message if self.result.is_none() => {
                Some("how it ended: reached, no_answer, message_left, wrong_number, call_again")
            }
            StepKind::LetterPrinted | StepKind::LetterSent if self.letter.is_none() => Some(
                "which letter (--letter): referral, urgent, second_notice, exam_form, rescreen, ...",
            ),
            StepKind::WearChecked | StepKind::GlassesSeen if self.worn.is_none() => {
                Some("whether the glasses were worn: yes or no")
            }
            StepKind::Assigned if self.whom.is_empty() => Some("to whom it is handed"),
            StepKind::Note if self.note.is_empty() => Some("the note"),
            _ => None,
        }
    }

    /// Returns the step in words, without its date: `call, no answer (telephone, Spanish)`.
    pub fn in_words(&self) -> String {
        let mut words = match (self.kind, self.letter, self.closing) {
            (StepKind::LetterPrinted, Some(LetterKind::ExamForm), _) => {
                "exam report form printed".to_owned()
            }
            (StepKind::LetterPrinted, Some(letter), _) => {
                format!("{} letter printed", letter.title())
            }
            (StepKind::LetterSent, Some(letter), _) => format!("{} letter sent", letter.title()),
            (StepKind::Closed, _, Some(closing)) => format!("closed: {}", closing.title()),
            (kind, ..) => kind.title().to_owned(),
        };
        let mut add = |text: &str| {
            words.push_str(", ");
            words.push_str(text);
        };
        if let Some(result) = self.result {
            add(result.title());
        }
        if let Some(evidence) = self.evidence {
            add(evidence.title());
        }
        match self.worn {
            Some(YesNo::Yes) => add("worn"),
            Some(YesNo::No) => add("not worn"),
            None => {}
        }
        if !self.whom.is_empty() {
            add(&self.whom);
        }
        if let Some(due) = self.due_on {
            add(&super::age::spoken(due));
        }
        let how: Vec<&str> = self
            .channel
            .map(Channel::title)
            .into_iter()
            .chain((!self.language.is_empty()).then_some(self.language.as_str()))
            .collect();
        if !how.is_empty() {
            words.push_str(" (");
            words.push_str(&how.join(", "));
            words.push(')');
        }
        if !self.note.is_empty() {
            words.push_str(": ");
            words.push_str(&self.note);
        }
        words
    }
}

/// What a programme does about referrals, in days; each is a setting.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct FollowUp {
    /// The family is told within so many days (10: Colorado's rule for parent notices; basis:
    /// secondary).
    pub notice_days: u32,
    /// A second letter goes out so many days after the first (28: four weeks, common practice).
    pub second_letter_days: u32,
    /// Days between attempts after that (7: common practice).
    pub call_again_days: u32,
    /// Documented attempts before a referral may be closed as not reached (3: common practice).
    pub attempts: u32,
    /// The report is asked for so many days after an appointment (14: common practice).
    pub report_days: u32,
    /// Wear of glasses is looked at after so many days (42; the source says "some weeks": common
    /// practice), and again after six months.
    pub wear_days: u32,
    /// Months after which wear is looked at again (6: IAPB school guidelines; basis: secondary).
    pub wear_months: u32,
}

impl Default for FollowUp {
    fn default() -> FollowUp {
        FollowUp {
            notice_days: 10,
            second_letter_days: 28,
            call_again_days: 7,
            attempts: 3,
            report_days: 14,
            wear_days: 42,
            wear_months: 6,
        }
    }
}

/// What a referral is opened with.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Opened {
    /// Civil date.
    pub on: NaiveDate,
    /// How soon.
    pub urgency: Urgency,
    /// Act by this date, where a source prints a number.
    pub act_by: Option<NaiveDate>,
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    fn day(text: &str) -> NaiveDate {
        text.parse().unwrap()
    }

    #[test]
    fn a_closing_needs_its_reason_and_an_examination_its_evidence() {
        let mut step = Step::new(StepKind::Closed, day("2026-11-02"));
        assert!(step.missing().unwrap().contains("why"));
        step.closing = Some(Closing::Examined);
        assert!(step.missing().unwrap().contains("known"));
        step.evidence = Some(Evidence::ParentsWord);
        assert_eq!(step.missing(), None);
        assert_eq!(step.in_words(), "closed: examined, parent's word");
    }

    #[test]
    fn a_step_reads_as_a_sentence() {
        let mut call = Step::new(StepKind::Call, day("2026-11-10"));
        call.channel = Some(Channel::Telephone);
        call.language = "Spanish".into();
        call.result = Some(ContactResult::NoAnswer);
        assert_eq!(call.in_words(), "call, no answer (by telephone, Spanish)");
    }
}
