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
    h.press(Key::char('f')).sees("only signs");
    h.press(Key::char('f'))
        .sees("only groups and bands")
        .sees("preschool-groups");
    h.press(Key::char('c')).sees("only rule sets are compared");
    h.press(Key::char('f'))
        .sees("only protocols")
        .sees("us-school");
    h.press(Key::char('f'))
        .misses("only protocols")
        .sees("arizona-school");
}

/// Only what another edition came after is bracketed: a text of its time is not.
#[test]
fn a_set_that_nothing_came_after_is_not_bracketed() {
    for id in ["texas-school", "stereo-random-dot-e", "[instrument-2003]"] {
        let mut h = Hands::sit();
        h.press(Key::alt('5'));
        go_to(&mut h, id);
    }
}

/// Scrolling past the end of a sheet is not counted: the first key back moves it at once.
#[test]
fn a_sheet_scrolls_to_its_end_and_no_further() {
    let mut h = Hands::sit();
    h.press(Key::alt('5'));
    go_to(&mut h, "preschool-groups");
    let mut before = String::new();
    for _ in 0..40 {
        let now = h.screen();
        if now == before {
            break;
        }
        before = now;
        h.key(KeyCode::PageDown);
    }
    let end = h.screen();
    for _ in 0..5 {
        h.key(KeyCode::PageDown);
        assert_eq!(h.screen(), end, "the end stays");
    }
    h.key(KeyCode::PageUp);
    assert_ne!(h.screen(), end, "one key back is seen");
}

/// The list is longer than either screen: it goes along, so that the focus is always seen, and every
/// entry comes by once, in both directions.
#[test]
fn a_list_longer_than_the_screen_scrolls() {
    let library = twoline::rules::Library::shipped();
    let count =
        library.rule_sets().count() + library.protocols().count() + library.gradings().count();
    for (columns, rows) in [(80, 24), (100, 30)] {
        assert!(count > usize::from(rows), "{count} fit without scrolling");
        let mut h = Hands::sit();
        h.press(Key::alt('5'));
        let focused = |h: &Hands| {
            let screen = h.screen_at(columns, rows);
            let lines: Vec<&str> = screen.lines().filter(|l| l.starts_with(" ▸ ")).collect();
            assert_eq!(lines.len(), 1, "one focus is seen:\n{screen}");
            lines[0].split('│').next().unwrap_or_default().to_owned()
        };
        let mut down = vec![focused(&h)];
        for _ in 1..count {
            h.key(KeyCode::Down);
            down.push(focused(&h));
        }
        let mut each = down.clone();
        each.sort_unstable();
        each.dedup();
        assert_eq!(each.len(), count);
        h.key(KeyCode::Down);
        assert_eq!(focused(&h), down[count - 1], "the last one stays");
        for last in down.iter().rev().skip(1) {
            h.key(KeyCode::Up);
            assert_eq!(focused(&h), *last);
        }
    }
}
