//! What each way through a child costs, counted through the update loop, beside the keystroke-level
//! model: 0.2 s a key and 1.35 s a decision (Card, Moran, Newell. Commun ACM 1980;23:396–410; basis:
//! memory). A decision is one value that the screener makes up their mind about: one for each eye,
//! each choice, each name sought, and the signature.

#![allow(clippy::print_stdout)]

use crossterm::event::KeyCode;
use twoline::domain::codes::AcuityMethod;
use twoline::keys::Key;

use super::desk::{Hands, ROSTER};

const KEY_S: f64 = 0.2;
const DECISION_S: f64 = 1.35;

/// Checks and prints one row of the table.
#[track_caller]
fn row(what: &str, h: &Hands, keys: usize, decisions: u32, budget: usize) {
    let model = KEY_S * keys as f64 + DECISION_S * f64::from(decisions);
    println!("{what:<46} {keys:>2} of {budget:>2} keys  {decisions} decisions  {model:>5.2} s");
    assert!(keys <= budget, "{what}: {keys} keys\n{}", h.screen());
}

#[test]
fn each_way_through_a_child_keeps_its_budget() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("25").enter().enter();
    h.sees("saved Okafor, Ada: pass");
    row("passing child, next in queue, typed", &h, h.keys, 3, 8);

    let before = h.keys;
    h.key(KeyCode::Down)
        .enter()
        .key(KeyCode::Down)
        .enter()
        .enter();
    h.sees("saved Oyelaran, Tunde: pass");
    let ladder = h.keys - before;
    row(
        "passing child, next in queue, on the ladder",
        &h,
        ladder,
        3,
        8,
    );

    let before = h.keys;
    h.typed("20")
        .enter()
        .typed("20")
        .enter()
        .typed("b")
        .typed("n")
        .enter();
    h.sees("saved Petit, Léa: pass");
    row(
        "passing child, plus lens and signs answered",
        &h,
        h.keys - before,
        5,
        10,
    );

    let mut h = Hands::sit_at(ROSTER, AcuityMethod::CriticalLine);
    h.typed("+").enter().typed("+").press(Key::ctrl('s'));
    h.sees("saved Okafor, Ada: pass (critical line");
    row("critical-line day, passing child", &h, h.keys, 3, 4);
    let critical = h.keys;

    let mut h = Hands::sit();
    h.key(KeyCode::Down)
        .enter()
        .key(KeyCode::Down)
        .press(Key::ctrl('s'));
    h.sees("saved Okafor, Ada: pass");
    row(
        "an exact line on the ladder, Ctrl-S signs",
        &h,
        h.keys,
        3,
        critical,
    );

    let mut h = Hands::sit();
    h.key(KeyCode::Esc)
        .typed("oye")
        .enter()
        .sees("OYELARAN, Tunde");
    h.typed("20").enter().typed("25").enter().enter();
    h.sees("saved Oyelaran, Tunde: pass");
    row("found by three letters, passing", &h, h.keys, 4, 12);

    let mut h = Hands::sit();
    h.typed("20-1").enter().typed("80-2").enter().enter();
    h.press(Key::f(5)).key(KeyCode::Down).typed("l").enter();
    h.press(Key::ctrl('s')).sees("saved Okafor, Ada: refer");
    row(
        "refer, letters in both eyes, a sign in one",
        &h,
        h.keys,
        5,
        22,
    );

    let mut h = Hands::sit();
    h.press(Key::f(3))
        .typed("a")
        .enter()
        .sees("saved Okafor, Ada");
    row("absent", &h, h.keys, 2, 3);
}
