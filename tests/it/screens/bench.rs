//! The bench: typing, undoing, states, signing, correcting.

use crossterm::event::KeyCode;
use twoline::domain::codes::AcuityMethod;
use twoline::keys::Key;
use twoline::tui::app::{Answer, Effect, Message, Refused};

use super::desk::{Hands, ROSTER};

#[test]
fn the_gap_of_two_lines_is_bracketed_and_smaller_ones_are_not() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("25").misses("┐");
    h.key(KeyCode::Delete)
        .typed("32")
        .sees("┐")
        .sees("two steps")
        .sees("┘");
    h.key(KeyCode::Delete).typed("63").sees("five steps");
}

#[test]
fn a_text_that_is_no_acuity_is_refused_with_what_was_expected() {
    let mut h = Hands::sit();
    h.typed("hello")
        .sees("not understood")
        .sees("expected HM (hand movement)");
    h.enter().sees("hello").sees("OKAFOR, Ada");
    h.press(Key::ctrl('u'))
        .typed("<=20/40")
        .sees("one of two readings");
}

#[test]
fn a_field_says_what_it_understood_before_it_is_accepted() {
    let mut h = Hands::sit();
    h.typed(">=20/32").sees("right eye 20/32 or better");
    h.press(Key::ctrl('u'))
        .typed("37")
        .sees("no chart has 20/37");
}

#[test]
fn on_a_critical_line_day_the_field_says_what_is_stored() {
    let mut h = Hands::sit_at(ROSTER, AcuityMethod::CriticalLine);
    h.typed("32").sees("critical line passed: 20/32 or better");
    h.enter().typed("-").sees("worse than 20/32").enter();
    h.sees("RESCREEN");
}

#[test]
fn ctrl_z_takes_back_edits_and_then_offers_the_last_signature() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("25");
    h.press(Key::ctrl('z')).press(Key::ctrl('z')).sees("20/20");
    h.typed("25").enter().enter().sees("saved Okafor, Ada");
    h.press(Key::ctrl('z'))
        .sees("take back the signature for Okafor, Ada?");
    h.enter().sees("reason is needed");
    h.typed("wrong child").enter();
    h.sees("is taken back")
        .sees("OKAFOR, Ada")
        .sees("To come 10 of 10");
}

#[test]
fn esc_keeps_the_draft_and_the_list_says_so() {
    let mut h = Hands::sit();
    h.typed("20").key(KeyCode::Esc).sees("draft");
    h.key(KeyCode::Down).enter().sees("OYELARAN, Tunde");
    h.scan("Q-10482").sees("OKAFOR, Ada");
    let screen = h.screen();
    assert!(
        screen
            .lines()
            .any(|l| l.contains("distance") && l.contains("20")),
        "{screen}"
    );
    let mut h = h.again();
    h.sees("1 draft kept from before").sees("OKAFOR, Ada");
    h.enter()
        .typed("20")
        .enter()
        .enter()
        .sees("saved Okafor, Ada: pass");
    let mut h = h.again();
    h.misses("draft");
}

#[test]
fn a_signal_keeps_the_draft() {
    let mut h = Hands::sit();
    h.typed("20/2");
    let effects = h.app.update(Message::Leave);
    assert!(effects.contains(&Effect::FlushDrafts) && effects.contains(&Effect::Quit));
    h.again().sees("1 draft kept from before");
}

#[test]
fn a_paste_is_one_edit_and_never_submits() {
    let mut h = Hands::sit();
    h.paste("20/25\n20/30\n\x1b[2J")
        .sees("20/25")
        .sees("only the first line")
        .sees("OKAFOR, Ada");
    h.press(Key::ctrl('z'));
    assert!(
        h.screen()
            .lines()
            .any(|l| l.contains("distance") && l.contains("____"))
    );
}

#[test]
fn swapping_the_eyes_is_one_edit_and_a_correction_once_signed() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("32").enter();
    h.press(Key::f(6)).sees("swapped");
    let row = |h: &Hands| {
        h.screen()
            .lines()
            .find(|l| l.contains("distance"))
            .unwrap()
            .to_owned()
    };
    assert!(row(&h).find("20/32") < row(&h).find("20/20"), "{}", row(&h));
    h.press(Key::ctrl('z'));
    assert!(row(&h).find("20/20") < row(&h).find("20/32"));
    h.enter().scan("Q-10482").sees("signed");
    h.press(Key::alt('x')).typed("other eye").enter();
    h.sees("corrected Okafor, Ada: rescreen");
    assert!(row(&h).find("20/32") < row(&h).find("20/20"), "{}", row(&h));
}

#[test]
fn an_eye_that_is_not_testable_has_a_reason() {
    let mut h = Hands::sit();
    h.press(Key::f(2)).sees("why?").sees("right eye");
    h.key(KeyCode::Tab)
        .key(KeyCode::Tab)
        .sees("both eyes")
        .typed("1");
    h.sees("not testable (shy)");
    // The instrument is offered instead.
    h.sees("instrument").sees("sphere");
    h.press(Key::ctrl('s'))
        .sees("saved Okafor, Ada: not testable, rescreen")
        .sees("not test");
}

#[test]
fn every_way_of_not_being_tested_is_a_state_of_its_own() {
    for (key, state) in [
        ('a', "absent"),
        ('o', "opted out"),
        ('n', "not att"),
        ('l', "left"),
        ('u', "under care"),
    ] {
        let mut h = Hands::sit();
        h.press(Key::f(3)).typed(&key.to_string()).enter();
        h.sees("saved Okafor, Ada").sees("OYELARAN, Tunde");
        h.press(Key::alt('l')).sees(state);
    }
    let mut h = Hands::sit();
    h.press(Key::f(3))
        .typed("h")
        .sees("glasses left at home")
        .enter();
    h.sees("saved Okafor, Ada: glasses at home, incomplete")
        .sees("glasses");
}

#[test]
fn a_signed_value_is_corrected_with_a_reason_and_the_old_one_stays() {
    let mut h = Hands::sit();
    h.typed("20")
        .enter()
        .typed("32")
        .enter()
        .enter()
        .sees("saved Okafor, Ada: rescreen");
    h.scan("Q-10482").sees("signed");
    h.typed("2").sees("this visit is signed");
    h.press(Key::ctrl('e'))
        .sees("which value is wrong?")
        .sees("distance acuity, left eye: 20/32");
    let line = h.screen();
    let key = line
        .lines()
        .find(|l| l.contains("distance acuity, left eye"))
        .unwrap()
        .trim()
        .chars()
        .find(char::is_ascii_alphanumeric)
        .unwrap();
    h.typed(&key.to_string())
        .typed("hello")
        .enter()
        .typed("typo")
        .enter()
        .sees("expected");
    h.press(Key::ctrl('u')).typed("25").enter().enter();
    h.sees("corrected Okafor, Ada: pass");
    h.press(Key::alt('2')).typed("okaf").enter();
    h.sees("20/32 → 20/25").sees("typo").sees("J. Imani");
}

#[test]
fn saving_is_said_until_the_store_has_answered() {
    let mut h = Hands::sit();
    h.held = Some(Vec::new());
    h.typed("20").enter().typed("20").enter().enter();
    h.sees("saving…")
        .misses("saved Okafor")
        .sees("OYELARAN, Tunde");
    h.let_store_work();
    h.misses("saving…").sees("saved Okafor, Ada: pass");
}

#[test]
fn what_the_store_refuses_is_said_and_stays_a_draft() {
    let mut h = Hands::sit();
    h.held = Some(Vec::new());
    h.typed("20").enter().typed("20").enter().enter();
    h.held = None;
    h.answer(Answer::NotSigned(
        "Q-10482".into(),
        Refused {
            message: "the disk is full".into(),
            hint: "free some space and sign again".into(),
        },
    ));
    h.sees("Okafor, Ada: not confirmed, the draft is kept. the disk is full");
    h.sees("free some space")
        .sees("draft")
        .sees("To come 10 of 10");
    h.scan("Q-10482").press(Key::ctrl('s'));
    h.sees("saved Okafor, Ada: pass");
}

#[test]
fn the_whole_reason_names_reading_threshold_source_and_basis() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("32").press(Key::f(4));
    h.sees("the whole reason")
        .sees("20/32")
        .sees("Pediatrics 2016");
    h.key(KeyCode::Esc).sees("Enter next");
}
