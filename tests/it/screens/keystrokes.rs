//! What a child costs in keys, counted by hands that type them.

use crossterm::event::KeyCode;
use twoline::domain::codes::AcuityMethod;
use twoline::keys::Key;

use super::desk::{Hands, ROSTER};

#[test]
fn a_passing_child_who_is_next_costs_at_most_eight_keys() {
    let mut h = Hands::sit();
    h.sees("OKAFOR, Ada");
    h.typed("20").enter().typed("25").enter().enter();
    assert!(h.keys <= 8, "{} keys", h.keys);
    h.sees("saved Okafor, Ada: pass").sees("OYELARAN, Tunde");

    // On the ladder: 20/32 is the line that still passes at six years, 20/25 the one above it.
    let before = h.keys;
    h.key(KeyCode::Up)
        .enter()
        .key(KeyCode::Down)
        .enter()
        .enter();
    assert!(h.keys - before <= 8);
    h.sees("saved Oyelaran, Tunde: pass").sees("PETIT, Léa");
}

#[test]
fn a_child_whose_glasses_are_not_known_costs_eight() {
    let mut h = Hands::sit();
    h.scan("Q-10488").sees("TRAN, Bảo").sees("not known: ask");
    let before = h.keys;
    h.typed("n").typed("20").enter().typed("20").enter().enter();
    assert_eq!(h.keys - before, 8);
    h.sees("saved Tran, Bảo: pass");
}

#[test]
fn plus_lens_and_signs_each_answered_cost_at_most_ten() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("20").enter();
    h.typed("b").sees("blurred by the lens");
    h.typed("n").sees("none seen");
    h.enter();
    assert!(h.keys <= 10, "{} keys", h.keys);
    h.sees("saved Okafor, Ada: pass");
}

#[test]
fn an_exact_line_never_costs_more_than_a_critical_line_pass() {
    let mut critical = Hands::sit_at(ROSTER, AcuityMethod::CriticalLine);
    critical
        .typed("+")
        .sees("20/32 or better")
        .enter()
        .typed("+")
        .enter()
        .enter();
    critical.sees("saved Okafor, Ada: pass (critical line");
    let mut exact = Hands::sit();
    exact
        .key(KeyCode::Down)
        .enter()
        .key(KeyCode::Down)
        .enter()
        .enter();
    exact.sees("saved Okafor, Ada: pass");
    assert!(exact.keys <= critical.keys);
}

#[test]
fn nothing_is_filled_in_and_nothing_is_copied_from_one_eye_to_the_other() {
    let mut h = Hands::sit();
    h.enter().enter().sees("Enter signs: incomplete");
    h.enter().sees("nothing was tested yet").sees("OKAFOR, Ada");
    h.typed("20").enter();
    let screen = h.screen();
    let row = screen.lines().find(|l| l.contains("distance")).unwrap();
    assert!(row.contains("20/20") && row.contains("____"), "{row}");
}

#[test]
fn the_five_children_come_out_as_written() {
    // Acceptance table, second child: 20/20 and 20/32 at 73 months.
    let mut h = Hands::sit();
    h.typed("20").enter().typed("32").enter();
    h.sees("two steps").sees("RESCREEN by 28 Oct 2026");
    h.enter().sees("saved Okafor, Ada: rescreen");
    // First: 20/20, 20/25, plus lens blurred, no signs.
    h.typed("20")
        .enter()
        .typed("25")
        .enter()
        .typed("bn")
        .sees("PASS");
    h.enter().sees("saved Oyelaran, Tunde: pass");
    // Fourth: glasses left at home, 20/80 and 20/63.
    h.scan("q-10485").sees("owns glasses (roster)");
    h.typed("h").typed("80").enter().typed("63").enter();
    h.sees("INCOMPLETE").sees("28 Oct 2026");
    h.enter()
        .sees("saved Quiroga, Inés: incomplete")
        .sees("glasses");
    // Fifth: not consented, a white pupil in the left eye.
    h.scan("Q-10490").sees("no consent");
    h.press(Key::f(5));
    for _ in 0..3 {
        h.key(KeyCode::Down);
    }
    h.typed("l").sees("marked: white pupil, left eye").enter();
    h.sees("EMERGENCY").typed("f");
    h.sees("saved Uzun, Elif: refer");
    h.sees("EMERGENCY 00:00:").sees("Enter who was told");
}
