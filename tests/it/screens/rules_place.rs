//! The Rules place: sheets, kinds, and two rule sets on the children of this term.

use crossterm::event::KeyCode;
use twoline::keys::Key;

use super::desk::Hands;

fn go_to(h: &mut Hands, id: &str) {
    for _ in 0..60 {
        let screen = h.screen();
        if screen.lines().any(|l| l.starts_with(&format!(" ▸ {id}"))) {
            return;
        }
        h.key(KeyCode::Down);
    }
    panic!("{id} is not listed:\n{}", h.screen());
}

#[test]
fn thresholds_move_and_the_counts_follow() {
    let mut h = Hands::sit();
    // Two steps between the eyes: the joint policy refers, the standards for schools do not.
    h.typed("20")
        .enter()
        .typed("32")
        .enter()
        .press(Key::ctrl('s'));
    h.press(Key::alt('5'));
    go_to(&mut h, "iapb-school-6-12");
    h.press(Key::char('c')).sees("press c again");
    go_to(&mut h, "joint-policy-2016");
    h.press(Key::char('c'))
        .sees("iapb-school-6-12 and joint-policy-2016 on 1 children")
        .sees("only joint-policy-2016 refers 1/1")
        .sees("1 more examination for 1 children");
    h.key(KeyCode::Tab).sees("Thresholds of joint-policy-2016");
    for _ in 0..20 {
        if h.screen().lines().any(|l| l.contains("▸ between-eyes")) {
            break;
        }
        h.key(KeyCode::Down);
    }
    h.key(KeyCode::Right)
        .sees("3 lines or more")
        .sees("in the file: 2 lines or more")
        .sees("only joint-policy-2016 refers 0/1")
        .sees("as many examinations");
    h.press(Key::char('r'))
        .misses("in the file")
        .sees("only joint-policy-2016 refers 1/1");
    h.key(KeyCode::Esc).sees("▸ joint-policy-2016");
}

#[test]
fn kinds_are_listed_one_after_the_other_and_superseded_sets_are_bracketed() {
    let mut h = Hands::sit();
    h.press(Key::alt('5')).sees("[joint-policy-2003]");
    go_to(&mut h, "joint-policy-2016");
    let screen = h.screen_at(110, 40);
    for part in ["Passes, at this line or better", "20/32 ┤", "══"] {
        assert!(screen.contains(part), "{part}\n{screen}");
    }
    h.press(Key::char('f'))
        .sees("only chart acuity")
        .misses("instrument-2021");
    h.press(Key::char('f'))
        .sees("instrument-2021")
        .misses("joint-policy-2016");
    for _ in 0..3 {
        h.press(Key::char('f'));
    }
    h.sees("arizona-school");
}
