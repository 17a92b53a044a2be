//! The tour of the demo, played through the real update loop.

use crossterm::event::KeyCode;
use twoline::keys::Key;

use super::desk::Hands;

/// Asserts that the tour is at a step, on the screen of every size and in plain lines.
#[track_caller]
fn at(h: &mut Hands, step: usize) {
    let words = format!("tour {step}/10:");
    for (columns, rows) in [(80, 24), (120, 36)] {
        let screen = h.screen_at(columns, rows);
        let lines: Vec<&str> = screen.lines().collect();
        assert!(lines[usize::from(rows) - 2].contains(&words), "{screen}");
        assert!(screen.contains("Alt-g leaves"), "{screen}");
    }
    h.app.linear = true;
    assert!(h.screen().contains(&words), "{}", h.screen());
    h.app.linear = false;
}

#[test]
fn each_step_waits_until_it_is_done() {
    let mut h = Hands::sit();
    h.press(Key::alt('g'));
    at(&mut h, 1);
    // Anything else leaves the step where it is.
    h.typed("20").key(KeyCode::Esc).key(KeyCode::Down);
    at(&mut h, 1);
    insta::assert_snapshot!("tour_80x24", h.screen());
    h.typed("pet").enter().sees("PETIT, Léa");
    at(&mut h, 2);
    h.key(KeyCode::Up).enter();
    at(&mut h, 2);
    h.key(KeyCode::Up).enter();
    at(&mut h, 3);
    h.enter().sees("saved Petit, Léa: pass");
    at(&mut h, 4);
    // A child who passes is not what the step asks for.
    h.typed("n").typed("20").enter().typed("20").enter().enter();
    at(&mut h, 4);
    h.typed("50").enter().typed("50").enter().enter();
    at(&mut h, 5);
    h.press(Key::f(4)).sees("the whole reason");
    at(&mut h, 6);
    h.key(KeyCode::Esc).press(Key::f(2)).typed("1");
    at(&mut h, 7);
    h.press(Key::f(3)).typed("a");
    at(&mut h, 8);
    h.press(Key::ctrl('z'));
    at(&mut h, 9);
    h.press(Key::f(8));
    at(&mut h, 10);
    h.key(KeyCode::Esc).press(Key::char('?'));
    h.key(KeyCode::Esc)
        .sees("that was the tour")
        .misses("tour 10/10");
}

#[test]
fn it_is_left_at_any_time_and_is_in_the_demo_alone() {
    let mut h = Hands::sit();
    h.press(Key::ctrl('p')).typed("tour").enter();
    at(&mut h, 1);
    h.press(Key::alt('g')).misses("tour 1/10");
    h.app.session.demo = false;
    h.press(Key::alt('g')).sees("the tour is in the demo");
    h.press(Key::ctrl('p'))
        .typed("tour")
        .sees("(only in the demo)");
}
