//! From the opening to an examination, by the defaults of `FollowUp`.

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
        (State::New, NextKind::CallAtOnce, day("2026-10-28"))
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

#[test]
fn a_notice_of_another_kind_does_not_tell_of_the_referral() {
    for kind in [
        LetterKind::Rescreen,
        LetterKind::ToDoctor,
        LetterKind::ExamForm,
        LetterKind::Passed,
    ] {
        let steps = [
            letter(StepKind::LetterPrinted, kind, "2026-10-15"),
            letter(StepKind::LetterSent, kind, "2026-10-15"),
        ];
        assert_eq!(
            next(&routine(), &steps),
            (
                State::New,
                NextKind::Print(LetterKind::Referral),
                day("2026-10-24")
            ),
            "{kind:?}"
        );
    }
}

#[test]
fn an_urgent_one_is_asked_about_and_not_written_to_after_weeks() {
    let opened = Opened {
        urgency: Urgency::Emergency,
        act_by: Some(day("2026-10-14")),
        ..routine()
    };
    let steps = [
        call("2026-10-14", ContactResult::Reached),
        letter(StepKind::LetterPrinted, LetterKind::Urgent, "2026-10-14"),
        letter(StepKind::LetterSent, LetterKind::Urgent, "2026-10-14"),
    ];
    assert_eq!(
        next(&opened, &steps),
        (State::Told, NextKind::AskReport, day("2026-10-14"))
    );
}

#[test]
fn what_no_longer_refers_is_withdrawn_or_settled_first() {
    let sent = [letter(
        StepKind::LetterSent,
        LetterKind::Referral,
        "2026-10-15",
    )];
    for (outcome, kind) in [
        (OutcomeKind::Pass, NextKind::Withdraw),
        (OutcomeKind::Exempt, NextKind::Withdraw),
        (OutcomeKind::Incomplete, NextKind::SettleOutcome),
        (OutcomeKind::Rescreen, NextKind::SettleOutcome),
    ] {
        let mut stands = standing(&routine(), &sent, None, &SETTINGS);
        stands.no_longer_refers(outcome);
        assert_eq!(stands.next.unwrap().kind, kind);
    }
}
