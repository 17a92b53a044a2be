//! An emergency: saved at once, a line with a clock in every place until it is answered.

use crossterm::event::KeyCode;
use twoline::keys::Key;
use twoline::tui::app::Message;

use super::desk::Hands;

fn white_pupil(h: &mut Hands) {
    h.press(Key::f(5));
    for _ in 0..3 {
        h.key(KeyCode::Down);
    }
    h.typed("l").enter();
}

#[test]
fn one_key_saves_an_emergency_and_another_than_the_one_that_chose_it() {
    let mut h = Hands::sit();
    white_pupil(&mut h);
    h.sees("EMERGENCY  Okafor, Ada: white pupil, left eye");
    h.enter().misses("saved Okafor").sees("nurse fetched");
    h.typed("f")
        .sees("saved Okafor, Ada: refer")
        .sees("OYELARAN, Tunde");
}

#[test]
fn the_line_runs_in_every_place_until_it_is_answered() {
    let mut h = Hands::sit();
    h.app.session.idle_minutes = 0;
    white_pupil(&mut h);
    h.typed("f");
    let since = h.app.urgent[0].since.utc_ms;
    h.app.session.now_ms = since + 221_000;
    h.app.update(Message::Tick);
    for place in ['1', '2', '3', '4', '5'] {
        h.press(Key::alt(place));
        h.sees("EMERGENCY 00:03:41  Okafor, Ada (1B): white pupil, left eye")
            .sees("F9");
        h.app.session.now_ms = since + 221_000;
    }
    h.press(Key::alt('1'));
    // The next child may be entered meanwhile.
    h.typed("20")
        .enter()
        .typed("20")
        .enter()
        .enter()
        .sees("saved Oyelaran, Tunde: pass");
    h.press(Key::f(9)).enter().sees("who was told is needed");
    h.typed("mother")
        .enter()
        .typed("10:42")
        .enter()
        .typed("J. Imani")
        .enter();
    h.misses("EMERGENCY").sees("who was told");
}

#[test]
fn an_emergency_that_is_not_saved_says_so() {
    let mut h = Hands::sit();
    white_pupil(&mut h);
    h.key(KeyCode::Esc).sees("not saved yet");
    h.press(Key::ctrl('s')).sees("saved Okafor, Ada: refer");
}

#[test]
fn it_stays_over_a_restart() {
    let mut h = Hands::sit();
    white_pupil(&mut h);
    h.typed("f");
    h.again().sees("EMERGENCY").sees("white pupil, left eye");
}

/// A move gives the emergency another visit, a retraction takes it away: nobody was told by that.
#[test]
fn that_somebody_was_told_is_said_only_where_it_was_entered() {
    let mut h = Hands::sit();
    white_pupil(&mut h);
    h.typed("f").scan("Q-10482").press(Key::f(11));
    h.typed("Q-10484").enter().typed("wrong child").enter();
    h.sees("moved to Petit, Léa: refer")
        .misses("saved: who was told");
    h.sees("Petit, Léa (1B): white pupil, left eye");
    h.press(Key::ctrl('z')).typed("never seen").enter();
    h.sees("is taken back")
        .misses("saved: who was told")
        .misses("EMERGENCY");
    white_pupil(&mut h);
    h.typed("f").press(Key::f(9)).typed("mother").enter();
    h.enter()
        .enter()
        .sees("saved: who was told of the emergency, Petit, Léa");
}

#[test]
fn an_emergency_that_is_not_saved_holds_its_child_on_the_bench() {
    let mut h = Hands::sit();
    white_pupil(&mut h);
    h.key(KeyCode::Esc).sees("is not saved yet");
    h.press(Key::ctrl('n'))
        .sees("an emergency of Okafor, Ada is not saved: Ctrl-S saves it")
        .sees("OKAFOR, Ada");
    h.press(Key::ctrl('s')).sees("saved Okafor, Ada: refer");
    h.sees("EMERGENCY");
}
