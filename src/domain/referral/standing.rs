//! How a referral stands, and what is to be done next.

use chrono::{Days, Months, NaiveDate};

use super::{Closing, ContactResult, FollowUp, LetterKind, Opened, Step, StepKind};
use crate::domain::outcome::{OutcomeKind, Urgency};

/// Where a referral has come to.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum State {
    /// Nobody has told the family yet.
    New,
    /// A letter went out or a call was made; nothing is known.
    Told,
    /// An appointment is made.
    Booked,
    /// Examined; glasses are to be looked after.
    Examined,
    /// Closed, and nothing is to be done.
    Closed(Closing),
}

impl State {
    /// Returns the state in words.
    pub fn title(self) -> &'static str {
        match self {
            State::New => "family not told",
            State::Told => "family told",
            State::Booked => "appointment made",
            State::Examined => "examined",
            State::Closed(closing) => closing.title(),
        }
    }

    /// Says whether an examination is still to be learned of.
    pub fn is_open(self) -> bool {
        matches!(self, State::New | State::Told | State::Booked)
    }
}

/// What is to be done next.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Next {
    /// What.
    pub kind: NextKind,
    /// By when.
    pub due: NaiveDate,
    /// Why then, in words.
    pub why: String,
}

/// The kinds of next action.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum NextKind {
    /// Speak with the family now.
    CallAtOnce,
    /// Print a letter.
    Print(LetterKind),
    /// Send what was printed.
    Send(LetterKind),
    /// Call the family; the number is the attempt it will be.
    Call(u32),
    /// Find another address or number.
    FindContact,
    /// Ask for the report of an examination.
    AskReport,
    /// Enter the report and close.
    CloseExamined,
    /// Enough attempts: decide whether to close as not reached.
    DecideUnreachable,
    /// Look whether the glasses are worn.
    LookAtGlasses,
    /// The outcome is a pass now: tell the family, and close.
    Withdraw,
    /// The outcome is open now: settle it before anything is sent.
    SettleOutcome,
}

impl NextKind {
    /// Returns the action in a few words.
    pub fn in_words(self, settings: &FollowUp) -> String {
        match self {
            NextKind::CallAtOnce => "call the family now".to_owned(),
            NextKind::Print(letter) => format!("print the {} letter", letter.title()),
            NextKind::Send(letter) => format!("send the {} letter", letter.title()),
            NextKind::Call(attempt) => format!("call, attempt {attempt} of {}", settings.attempts),
            NextKind::FindContact => "find another address or number".to_owned(),
            NextKind::AskReport => "ask whether the child was examined".to_owned(),
            NextKind::CloseExamined => "enter the report and close".to_owned(),
            NextKind::DecideUnreachable => {
                "decide: another try, or close as not reached".to_owned()
            }
            NextKind::Withdraw => "tell the family that it is withdrawn, and close it".to_owned(),
            NextKind::SettleOutcome => "settle the outcome before anything is sent".to_owned(),
            NextKind::LookAtGlasses => "look in class: are the glasses worn?".to_owned(),
        }
    }
}

/// How a referral stands on a day.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Standing {
    /// Where it has come to.
    pub state: State,
    /// What is to be done next; none when nothing is.
    pub next: Option<Next>,
    /// Documented attempts since it was opened, or opened again.
    pub attempts: u32,
    /// The newest step's date, or that of the opening.
    pub last: NaiveDate,
}

impl Standing {
    /// Returns the days by which the next action is overdue on a day; none when it is not.
    pub fn overdue(&self, today: NaiveDate) -> Option<i64> {
        self.next
            .as_ref()
            .map(|next| (today - next.due).num_days())
            .filter(|days| *days > 0)
    }
}

impl Standing {
    /// Takes account of an outcome that no longer refers: nothing of it goes out.
    pub fn no_longer_refers(&mut self, outcome: OutcomeKind) {
        if !self.state.is_open() {
            return;
        }
        let kind = match outcome {
            OutcomeKind::Pass | OutcomeKind::Exempt => NextKind::Withdraw,
            _ => NextKind::SettleOutcome,
        };
        self.next = next(
            kind,
            self.last,
            format!("the outcome is {} now", outcome.title()),
        )
        .into();
    }
}

/// Returns how a referral stands, from its steps in the order they were done.
///
/// `glasses_from` is the date of the examination that prescribed glasses, if one did.
pub fn standing(
    opened: &Opened,
    steps: &[Step],
    glasses_from: Option<NaiveDate>,
    settings: &FollowUp,
) -> Standing {
    // What came before it was opened again is history.
    let begin = steps
        .iter()
        .rposition(|s| s.kind == StepKind::Reopened)
        .map_or(0, |at| at + 1);
    let opened_on = match begin {
        0 => opened.on,
        at => steps[at - 1].on,
    };
    let now = &steps[begin..];
    let last = now.iter().map(|s| s.on).max().unwrap_or(opened_on);
    let attempts = now.iter().filter(|s| s.is_attempt()).count() as u32;
    let closed = now
        .iter()
        .rev()
        .find(|s| s.kind == StepKind::Closed)
        .and_then(|s| s.closing);
    let (state, next) = match closed {
        Some(Closing::Examined) => {
            let next = glasses_from.and_then(|from| wear(from, now, settings));
            match next {
                Some(next) => (State::Examined, Some(next)),
                None => (State::Closed(Closing::Examined), None),
            }
        }
        Some(closing) => (State::Closed(closing), None),
        None => open(opened, opened_on, now, attempts, settings),
    };
    Standing {
        state,
        next,
        attempts,
        last,
    }
}

/// Wear is looked at after some weeks and after some months; a look counts from the day before which
/// the next one would not be due.
fn wear(from: NaiveDate, steps: &[Step], settings: &FollowUp) -> Option<Next> {
    let looks: Vec<NaiveDate> = steps
        .iter()
        .filter(|s| matches!(s.kind, StepKind::WearChecked | StepKind::GlassesSeen))
        .map(|s| s.on)
        .collect();
    let first = after(from, settings.wear_days);
    let second = from
        .checked_add_months(Months::new(settings.wear_months))
        .unwrap_or(from);
    let (due, why) = if looks.is_empty() {
        (
            first,
            format!("{} days after the examination", settings.wear_days),
        )
    } else if looks.iter().all(|on| *on < second) && second > first {
        (
            second,
            format!("{} months after the examination", settings.wear_months),
        )
    } else {
        return None;
    };
    Some(Next {
        kind: NextKind::LookAtGlasses,
        due,
        why,
    })
}

/// What is to be done about an open referral: the first of these that applies.
fn open(
    opened: &Opened,
    opened_on: NaiveDate,
    steps: &[Step],
    attempts: u32,
    settings: &FollowUp,
) -> (State, Option<Next>) {
    let newest = |kind: StepKind| steps.iter().rposition(|s| s.kind == kind);
    let state = if newest(StepKind::Appointment) > newest(StepKind::NoShow) {
        State::Booked
    } else if attempts > 0 {
        State::Told
    } else {
        State::New
    };
    let next = known(opened, opened_on, steps)
        .or_else(|| letter(opened, opened_on, steps, state, settings))
        .or_else(|| again(opened, opened_on, steps, attempts, settings));
    (state, next)
}

fn next(kind: NextKind, due: NaiveDate, why: impl Into<String>) -> Next {
    Next {
        kind,
        due,
        why: why.into(),
    }
}

/// An examination that is known ends the waiting; an urgent finding is told at once.
fn known(opened: &Opened, opened_on: NaiveDate, steps: &[Step]) -> Option<Next> {
    if steps.iter().any(|s| s.kind == StepKind::ReportReceived) {
        return Some(next(
            NextKind::CloseExamined,
            opened_on,
            "a report was received",
        ));
    }
    let spoken = steps
        .iter()
        .any(|s| s.kind == StepKind::Call && s.result == Some(ContactResult::Reached));
    if opened.urgency == Urgency::Routine || spoken {
        return None;
    }
    Some(next(
        NextKind::CallAtOnce,
        opened.act_by.unwrap_or(opened_on),
        format!(
            "{}; nobody has spoken with the family",
            opened.urgency.title()
        ),
    ))
}

/// A letter to print or to send, an appointment to wait for.
fn letter(
    opened: &Opened,
    opened_on: NaiveDate,
    steps: &[Step],
    state: State,
    settings: &FollowUp,
) -> Option<Next> {
    let newest = |kind: StepKind| steps.iter().rposition(|s| s.is_letter(kind));
    let (printed, sent) = (
        newest(StepKind::LetterPrinted),
        newest(StepKind::LetterSent),
    );
    let kind = match opened.urgency {
        Urgency::Routine => LetterKind::Referral,
        _ => LetterKind::Urgent,
    };
    if let Some(at) = newest(StepKind::LetterOutOfDate).filter(|at| printed < Some(*at)) {
        return Some(next(
            NextKind::Print(kind),
            steps[at].on,
            "the letter is out of date",
        ));
    }
    if let Some(at) = printed.filter(|at| sent < Some(*at)) {
        let letter = steps[at].letter.unwrap_or(kind);
        return Some(next(
            NextKind::Send(letter),
            steps[at].on,
            "printed, not sent",
        ));
    }
    if let Some(at) = newest(StepKind::Appointment).filter(|_| state == State::Booked) {
        return Some(next(
            NextKind::AskReport,
            after(
                steps[at].due_on.unwrap_or(steps[at].on),
                settings.report_days,
            ),
            format!("{} days after the appointment", settings.report_days),
        ));
    }
    if sent.is_some() {
        return None;
    }
    let due = after(opened_on, settings.notice_days);
    Some(next(
        NextKind::Print(kind),
        opened.act_by.map_or(due, |by| by.min(due)),
        format!("the family is told within {} days", settings.notice_days),
    ))
}

/// A letter went out and nothing is known: another address, another letter, calls, a decision.
fn again(
    opened: &Opened,
    opened_on: NaiveDate,
    steps: &[Step],
    attempts: u32,
    settings: &FollowUp,
) -> Option<Next> {
    let last = steps
        .iter()
        .rev()
        .find(|s| s.is_attempt() || s.kind == StepKind::NoShow)?;
    let attempt = steps.iter().rposition(Step::is_attempt);
    let came_back = steps
        .iter()
        .rposition(|s| s.kind == StepKind::LetterReturned);
    if came_back > attempt || last.result == Some(ContactResult::WrongNumber) {
        return Some(next(
            NextKind::FindContact,
            steps.last().map_or(opened_on, |s| s.on),
            "a letter came back or a number is wrong",
        ));
    }
    if opened.urgency != Urgency::Routine {
        return Some(next(
            NextKind::AskReport,
            opened
                .act_by
                .unwrap_or_else(|| after(last.on, settings.call_again_days)),
            format!("{}: was the child seen?", opened.urgency.title()),
        ));
    }
    if attempts >= settings.attempts {
        return Some(next(
            NextKind::DecideUnreachable,
            after(last.on, settings.call_again_days),
            format!("{attempts} documented attempts without an examination"),
        ));
    }
    let letters = steps
        .iter()
        .filter(|s| s.is_letter(StepKind::LetterSent))
        .count();
    if last.kind == StepKind::LetterSent && letters == 1 {
        return Some(next(
            NextKind::Print(LetterKind::Second),
            after(last.on, settings.second_letter_days),
            format!(
                "{} days after the first letter",
                settings.second_letter_days
            ),
        ));
    }
    let asked = last
        .due_on
        .filter(|_| last.result == Some(ContactResult::CallAgain));
    Some(next(
        NextKind::Call(attempts + 1),
        asked.unwrap_or_else(|| after(last.on, settings.call_again_days)),
        match last.kind {
            StepKind::NoShow => "did not come to the appointment".to_owned(),
            _ => format!("{} days after the last attempt", settings.call_again_days),
        },
    ))
}

fn after(date: NaiveDate, days: u32) -> NaiveDate {
    date.checked_add_days(Days::new(days.into()))
        .unwrap_or(date)
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests;
