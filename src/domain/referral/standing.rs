//! How a referral stands, and what is to be done next.

use chrono::{Days, Months, NaiveDate};

use super::{Closing, ContactResult, FollowUp, LetterKind, Opened, Step, StepKind};
use crate::domain::outcome::Urgency;

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
            NextKind::AskReport => "ask how the appointment went".to_owned(),
            NextKind::CloseExamined => "enter the report and close".to_owned(),
            NextKind::DecideUnreachable => {
                "decide: another try, or close as not reached".to_owned()
            }
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

fn open(
    opened: &Opened,
    opened_on: NaiveDate,
    steps: &[Step],
    attempts: u32,
    settings: &FollowUp,
) -> (State, Option<Next>) {
    let next = |kind, due, why: String| Some(Next { kind, due, why });
    let newest = |kind: StepKind| steps.iter().rposition(|s| s.kind == kind);
    let spoken = steps
        .iter()
        .any(|s| s.kind == StepKind::Call && s.result == Some(ContactResult::Reached));
    let state = if newest(StepKind::Appointment) > newest(StepKind::NoShow) {
        State::Booked
    } else if attempts > 0 {
        State::Told
    } else {
        State::New
    };
    // An examination that is known and not closed comes first: it ends the waiting.
    if newest(StepKind::ReportReceived).is_some() {
        return (
            state,
            next(
                NextKind::CloseExamined,
                opened_on,
                "a report was received".into(),
            ),
        );
    }
    if opened.urgency != Urgency::Routine && !spoken {
        return (
            state,
            next(
                NextKind::CallAtOnce,
                opened.act_by.unwrap_or(opened_on).min(after(opened_on, 1)),
                format!(
                    "{}; nobody has spoken with the family",
                    opened.urgency.title()
                ),
            ),
        );
    }
    let stale = newest(StepKind::LetterOutOfDate);
    let printed = newest(StepKind::LetterPrinted);
    let sent = newest(StepKind::LetterSent);
    let kind = if opened.urgency == Urgency::Routine {
        LetterKind::Referral
    } else {
        LetterKind::Urgent
    };
    if let Some(at) = stale.filter(|at| printed.is_none_or(|p| p < *at)) {
        return (
            state,
            next(
                NextKind::Print(kind),
                steps[at].on,
                "the letter is out of date".into(),
            ),
        );
    }
    if let Some(at) = printed.filter(|at| sent.is_none_or(|s| s < *at)) {
        let letter = steps[at].letter.unwrap_or(kind);
        return (
            state,
            next(
                NextKind::Send(letter),
                steps[at].on,
                "printed, not sent".into(),
            ),
        );
    }
    if let Some(at) = newest(StepKind::Appointment)
        && state == State::Booked
    {
        let on = steps[at].due_on.unwrap_or(steps[at].on);
        return (
            state,
            next(
                NextKind::AskReport,
                after(on, settings.report_days),
                format!("{} days after the appointment", settings.report_days),
            ),
        );
    }
    let Some(sent) = sent else {
        let due = after(opened_on, settings.notice_days);
        return (
            state,
            next(
                NextKind::Print(kind),
                opened.act_by.map_or(due, |by| by.min(due)),
                format!("the family is told within {} days", settings.notice_days),
            ),
        );
    };
    if newest(StepKind::LetterReturned).is_some_and(|at| at > sent)
        || steps
            .iter()
            .rposition(|s| s.result == Some(ContactResult::WrongNumber))
            .is_some_and(|at| steps[at + 1..].iter().all(|s| !s.is_attempt()))
    {
        let on = steps.last().map_or(opened_on, |s| s.on);
        return (
            state,
            next(
                NextKind::FindContact,
                on,
                "a letter came back or a number is wrong".into(),
            ),
        );
    }
    if attempts >= settings.attempts {
        let on = steps
            .iter()
            .filter(|s| s.is_attempt())
            .map(|s| s.on)
            .max()
            .unwrap_or(opened_on);
        return (
            state,
            next(
                NextKind::DecideUnreachable,
                after(on, settings.call_again_days),
                format!("{attempts} documented attempts without an examination"),
            ),
        );
    }
    let again = steps
        .iter()
        .rev()
        .find_map(|s| (s.is_attempt() || s.kind == StepKind::NoShow).then_some(s));
    let letters = steps
        .iter()
        .filter(|s| s.kind == StepKind::LetterSent)
        .count();
    match again {
        Some(step) if step.kind == StepKind::LetterSent && letters == 1 => (
            state,
            next(
                NextKind::Print(LetterKind::Second),
                after(step.on, settings.second_letter_days),
                format!(
                    "{} days after the first letter",
                    settings.second_letter_days
                ),
            ),
        ),
        Some(step) => (
            state,
            next(
                NextKind::Call(attempts + 1),
                step.due_on
                    .filter(|_| step.result == Some(ContactResult::CallAgain))
                    .unwrap_or_else(|| after(step.on, settings.call_again_days)),
                match step.kind {
                    StepKind::NoShow => "did not come to the appointment".to_owned(),
                    _ => format!("{} days after the last attempt", settings.call_again_days),
                },
            ),
        ),
        None => (state, None),
    }
}

fn after(date: NaiveDate, days: u32) -> NaiveDate {
    date.checked_add_days(Days::new(days.into()))
        .unwrap_or(date)
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;
    use crate::domain::exam::Evidence;

    // The intervals are the defaults of `FollowUp`, which name their source.
    const SETTINGS: FollowUp = FollowUp {
        notice_days: 10,
        second_letter_days: 28,
        call_again_days: 7,
        attempts: 3,
        report_days: 14,
        wear_days: 42,
        wear_months: 6,
    };

    fn day(text: &str) -> NaiveDate {
        text.parse().unwrap()
    }

    fn routine() -> Opened {
        Opened {
            on: day("2026-10-14"),
            urgency: Urgency::Routine,
            act_by: None,
        }
    }

    fn step(kind: StepKind, on: &str) -> Step {
        Step::new(kind, day(on))
    }

    fn letter(kind: StepKind, which: LetterKind, on: &str) -> Step {
        Step {
            letter: Some(which),
            ..step(kind, on)
        }
    }

    fn call(on: &str, result: ContactResult) -> Step {
        Step {
            result: Some(result),
            ..step(StepKind::Call, on)
        }
    }

    fn next(opened: &Opened, steps: &[Step]) -> (State, NextKind, NaiveDate) {
        let stands = standing(opened, steps, None, &SETTINGS);
        let next = stands.next.unwrap();
        (stands.state, next.kind, next.due)
    }

    #[test]
    fn a_routine_referral_goes_from_letter_to_letter_to_calls_to_a_decision() {
        let mut steps = Vec::new();
        assert_eq!(
            next(&routine(), &steps),
            (
                State::New,
                NextKind::Print(LetterKind::Referral),
                day("2026-10-24")
            )
        );
        steps.push(letter(
            StepKind::LetterPrinted,
            LetterKind::Referral,
            "2026-10-15",
        ));
        assert_eq!(
            next(&routine(), &steps),
            (
                State::New,
                NextKind::Send(LetterKind::Referral),
                day("2026-10-15")
            )
        );
        steps.push(letter(
            StepKind::LetterSent,
            LetterKind::Referral,
            "2026-10-16",
        ));
        assert_eq!(
            next(&routine(), &steps),
            (
                State::Told,
                NextKind::Print(LetterKind::Second),
                day("2026-11-13")
            )
        );
        steps.push(letter(
            StepKind::LetterPrinted,
            LetterKind::Second,
            "2026-11-13",
        ));
        steps.push(letter(
            StepKind::LetterSent,
            LetterKind::Second,
            "2026-11-13",
        ));
        assert_eq!(
            next(&routine(), &steps),
            (State::Told, NextKind::Call(3), day("2026-11-20"))
        );
        steps.push(call("2026-11-20", ContactResult::NoAnswer));
        let stands = standing(&routine(), &steps, None, &SETTINGS);
        assert_eq!(stands.attempts, 3);
        assert_eq!(
            stands.next.as_ref().unwrap().kind,
            NextKind::DecideUnreachable
        );
        assert_eq!(stands.overdue(day("2026-11-30")), Some(3));
        assert_eq!(stands.overdue(day("2026-11-27")), None);
    }

    #[test]
    fn an_urgent_one_is_called_at_once_until_somebody_was_reached() {
        let opened = Opened {
            urgency: Urgency::Prompt,
            act_by: Some(day("2026-10-28")),
            ..routine()
        };
        assert_eq!(
            next(&opened, &[]),
            (State::New, NextKind::CallAtOnce, day("2026-10-15"))
        );
        let tried = [call("2026-10-14", ContactResult::NoAnswer)];
        assert_eq!(next(&opened, &tried).1, NextKind::CallAtOnce);
        let reached = [call("2026-10-14", ContactResult::Reached)];
        assert_eq!(
            next(&opened, &reached),
            (
                State::Told,
                NextKind::Print(LetterKind::Urgent),
                day("2026-10-24")
            )
        );
    }

    #[test]
    fn an_appointment_waits_a_no_show_calls_again_and_a_returned_letter_asks_for_an_address() {
        let mut steps = vec![
            letter(StepKind::LetterPrinted, LetterKind::Referral, "2026-10-15"),
            letter(StepKind::LetterSent, LetterKind::Referral, "2026-10-15"),
            Step {
                due_on: Some(day("2026-11-02")),
                ..step(StepKind::Appointment, "2026-10-20")
            },
        ];
        assert_eq!(
            next(&routine(), &steps),
            (State::Booked, NextKind::AskReport, day("2026-11-16"))
        );
        steps.push(step(StepKind::NoShow, "2026-11-02"));
        assert_eq!(
            next(&routine(), &steps),
            (State::Told, NextKind::Call(2), day("2026-11-09"))
        );
        steps.push(step(StepKind::LetterReturned, "2026-11-03"));
        assert_eq!(next(&routine(), &steps).1, NextKind::FindContact);
    }

    #[test]
    fn a_wrong_number_asks_for_another_and_a_later_call_settles_it() {
        let mut steps = vec![
            letter(StepKind::LetterSent, LetterKind::Referral, "2026-10-15"),
            call("2026-10-20", ContactResult::WrongNumber),
        ];
        assert_eq!(next(&routine(), &steps).1, NextKind::FindContact);
        steps.push(Step {
            due_on: Some(day("2026-10-29")),
            ..call("2026-10-22", ContactResult::CallAgain)
        });
        assert_eq!(next(&routine(), &steps).1, NextKind::DecideUnreachable);
        steps.remove(0);
        steps.insert(
            0,
            letter(StepKind::LetterSent, LetterKind::Referral, "2026-10-15"),
        );
        let more = FollowUp {
            attempts: 5,
            ..SETTINGS
        };
        let next = standing(&routine(), &steps, None, &more).next.unwrap();
        assert_eq!(
            (next.kind, next.due),
            (NextKind::Call(4), day("2026-10-29"))
        );
    }

    #[test]
    fn a_letter_out_of_date_is_printed_again_the_same_day() {
        let mut steps = vec![
            letter(StepKind::LetterPrinted, LetterKind::Referral, "2026-10-15"),
            letter(StepKind::LetterSent, LetterKind::Referral, "2026-10-15"),
            step(StepKind::LetterOutOfDate, "2026-10-17"),
        ];
        assert_eq!(
            next(&routine(), &steps),
            (
                State::Told,
                NextKind::Print(LetterKind::Referral),
                day("2026-10-17")
            )
        );
        steps.push(letter(
            StepKind::LetterPrinted,
            LetterKind::Referral,
            "2026-10-17",
        ));
        assert_eq!(
            next(&routine(), &steps).1,
            NextKind::Send(LetterKind::Referral)
        );
    }

    #[test]
    fn after_an_examination_with_glasses_wear_is_looked_at_twice() {
        let closed = Step {
            closing: Some(Closing::Examined),
            evidence: Some(Evidence::Form),
            ..step(StepKind::Closed, "2026-11-05")
        };
        let examined = Some(day("2026-11-02"));
        let mut steps = vec![closed];
        let stands = standing(&routine(), &steps, examined, &SETTINGS);
        assert_eq!(stands.state, State::Examined);
        assert!(!stands.state.is_open());
        assert_eq!(stands.next.unwrap().due, day("2026-12-14"));
        steps.push(step(StepKind::GlassesSeen, "2026-12-15"));
        let next = standing(&routine(), &steps, examined, &SETTINGS)
            .next
            .unwrap();
        assert_eq!(next.due, day("2027-05-02"));
        steps.push(step(StepKind::WearChecked, "2027-05-03"));
        let stands = standing(&routine(), &steps, examined, &SETTINGS);
        assert_eq!(
            (stands.state, stands.next),
            (State::Closed(Closing::Examined), None)
        );
        // Without glasses there is nothing to look at.
        assert_eq!(
            standing(&routine(), &steps[..1], None, &SETTINGS).next,
            None
        );
    }

    #[test]
    fn opened_again_it_begins_anew() {
        let steps = [
            letter(StepKind::LetterSent, LetterKind::Referral, "2026-10-15"),
            Step {
                closing: Some(Closing::Unreachable),
                ..step(StepKind::Closed, "2026-12-01")
            },
            step(StepKind::Reopened, "2027-02-01"),
        ];
        let stands = standing(&routine(), &steps, None, &SETTINGS);
        assert_eq!((stands.state, stands.attempts), (State::New, 0));
        assert_eq!(stands.next.unwrap().due, day("2027-02-11"));
    }
}
