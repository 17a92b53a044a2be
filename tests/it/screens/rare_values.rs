//! Values that would be rare are asked about once; eyes are swapped with a trail; notes; the history
//! of a value. The limits are common practice.

use crossterm::event::KeyCode;
use twoline::keys::Key;

use super::desk::{Hands, ROSTER};

#[test]
fn more_than_three_lines_between_the_eyes_is_asked_once_and_changes_nothing() {
    let mut h = Hands::sit();
    h.typed("20")
        .enter()
        .typed("40")
        .misses("is that so?")
        .enter();
    h.sees("Enter signs");
    let mut h = Hands::sit();
    h.typed("20").enter().typed("80").enter();
    h.sees("6 lines between the eyes: is that so? Enter: yes, F6 swaps");
    h.sees("asked above 3 lines, common practice");
    h.enter()
        .misses("is that so?")
        .sees("Enter signs: refer")
        .enter();
    h.sees("saved Okafor, Ada: refer");
}

#[test]
fn ctrl_s_is_asked_too_and_an_emergency_is_never_held_up() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("80").press(Key::ctrl('s'));
    h.sees("is that so?").misses("saved Okafor");
    h.press(Key::ctrl('s')).sees("saved Okafor, Ada: refer");
    h.typed("20").enter().typed("80").press(Key::f(5));
    for _ in 0..3 {
        h.key(KeyCode::Down);
    }
    h.typed("l")
        .enter()
        .typed("f")
        .sees("saved Oyelaran, Tunde: refer");
}

#[test]
fn swapped_eyes_leave_a_trail_that_undo_takes_with_it() {
    let mut h = Hands::sit();
    h.press(Key::f(6)).sees("nothing to swap");
    h.typed("20").enter().typed("80").enter().press(Key::f(6));
    h.press(Key::ctrl('s'));
    h.sees("saved Okafor, Ada: refer").scan("Q-10482");
    h.sees("eyes swapped").press(Key::f(4));
    h.sees("swapped before signing: distance acuity, each eye")
        .key(KeyCode::Esc);
    h.scan("Q-10483")
        .typed("20")
        .enter()
        .typed("25")
        .press(Key::f(6))
        .press(Key::ctrl('z'));
    h.press(Key::ctrl('s'))
        .sees("saved Oyelaran, Tunde")
        .scan("Q-10483")
        .misses("eyes swapped");
}

#[test]
fn a_swap_in_the_instrument_leaves_the_chart_alone() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("25").enter();
    h.press(Key::alt('t')).typed("a");
    h.typed("+1.00")
        .enter()
        .enter()
        .enter()
        .typed("-2.00")
        .enter();
    h.sees("spheres of opposite sign").press(Key::f(6));
    let screen = h.screen_at(120, 36);
    let row = |word: &str| {
        screen
            .lines()
            .find(|l| l.contains(word))
            .unwrap()
            .to_owned()
    };
    assert!(
        row("sphere").find("-2.00") < row("sphere").find("+1.00"),
        "{screen}"
    );
    assert!(
        row("distance").find("20/20") < row("distance").find("20/25"),
        "{screen}"
    );
}

#[test]
fn an_age_outside_school_ages_is_asked_on_signing() {
    let roster = ROSTER.replace("2020-09-01", "1990-09-01");
    let mut h = Hands::sit_at(&roster, twoline::domain::codes::AcuityMethod::Threshold);
    h.scan("Q-10482")
        .typed("20")
        .enter()
        .typed("20")
        .enter()
        .enter();
    h.sees("36 y 1 m old: is the birth date right?")
        .sees("common practice");
    h.enter().sees("saved Okafor, Ada");
}

#[test]
fn a_note_is_kept_shown_corrected_and_never_judged() {
    let mut h = Hands::sit();
    h.press(Key::alt('o')).typed("hid under the table").enter();
    h.sees("hid under the table").sees("Enter next");
    h.press(Key::ctrl('s')).sees("nothing was tested yet");
    h.typed("20")
        .enter()
        .typed("20")
        .press(Key::ctrl('s'))
        .sees("saved Okafor, Ada: pass");
    h.scan("Q-10482").sees("hid under the table");
    h.press(Key::alt('o'))
        .typed(", twice")
        .enter()
        .enter()
        .sees("reason is needed");
    h.typed("more")
        .enter()
        .sees("corrected Okafor, Ada: pass")
        .sees("hid under the table, twice");
    let long = "x".repeat(600);
    h.scan("Q-10483").press(Key::alt('o'));
    h.typed(&long)
        .enter()
        .sees("one line of at most 500 characters");
}

#[test]
fn the_history_of_the_value_under_the_cursor_is_on_one_key() {
    let mut h = Hands::sit();
    h.typed("20")
        .press(Key::alt('v'))
        .sees("from its signature on");
    h.enter().typed("32").enter().enter().scan("Q-10482");
    h.press(Key::alt('v')).sees("go to a value first");
    // From the line that signs up to the row of distance, then to the left eye.
    while h
        .app
        .day
        .as_ref()
        .unwrap()
        .bench
        .as_ref()
        .unwrap()
        .field()
        .is_none_or(|f| f.word() != "distance_left")
    {
        h.key(KeyCode::Up);
    }
    h.press(Key::alt('v')).sees("20/32  holds").sees("J. Imani");
    h.key(KeyCode::Esc).press(Key::alt('c'));
    let screen = h.screen();
    let line = screen
        .lines()
        .find(|l| l.contains("distance acuity, left eye:"))
        .unwrap();
    let key = line.chars().find(char::is_ascii_alphanumeric).unwrap();
    h.press(Key::char(key))
        .typed("25")
        .enter()
        .typed("wrong row")
        .enter();
    h.sees("corrected Okafor, Ada");
    while h
        .app
        .day
        .as_ref()
        .unwrap()
        .bench
        .as_ref()
        .unwrap()
        .field()
        .is_none_or(|f| f.word() != "distance_left")
    {
        h.key(KeyCode::Up);
    }
    h.press(Key::alt('v'))
        .sees("20/25  holds")
        .sees("wrong row")
        .sees("corrected");
}

#[test]
fn a_number_on_a_choice_or_on_the_line_that_signs_says_that_it_is_not_taken() {
    let mut h = Hands::sit();
    h.typed("20")
        .enter()
        .typed("20")
        .enter()
        .sees("Enter signs");
    h.typed("2")
        .sees("a number is not taken on the line that signs")
        .misses("saved Okafor");
    let mut h = Hands::sit();
    h.scan("Q-10482").press(Key::alt('t'));
    h.misses("takes no number");
}

#[test]
fn a_child_signed_incomplete_stays_in_the_list() {
    let mut h = Hands::sit();
    h.typed("20").enter().press(Key::ctrl('s'));
    h.sees("saved Okafor, Ada: incomplete");
    h.sees("incomplete").sees("Okafor, Ada");
}
