//! What the screens look like; each snapshot was read before it was accepted.

use std::fmt::Write as _;

use crossterm::event::KeyCode;
use ratatui::Terminal;
use ratatui::backend::TestBackend;
use ratatui::buffer::Cell;
use ratatui::style::Color;
use twoline::domain::codes::AcuityMethod;
use twoline::keys::Key;

use super::desk::Hands;

/// Saves a snapshot with the store's head blanked out: it differs in each run.
pub fn snapshot(name: &str, screen: &str) {
    let clean: Vec<String> = screen
        .lines()
        .map(|line| {
            line.split(' ')
                .map(|word| {
                    if word.len() == 16 && word.chars().all(|c| c.is_ascii_hexdigit()) {
                        "0123456789abcdef".to_owned()
                    } else {
                        word.to_owned()
                    }
                })
                .collect::<Vec<_>>()
                .join(" ")
        })
        .collect();
    insta::assert_snapshot!(name, clean.join("\n"));
}

/// A day that has begun: one child passed, one absent, a draft on the bench.
fn begun() -> Hands {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("25").enter().enter();
    h.press(Key::f(3)).typed("a").enter();
    h.typed("20").enter().typed("32");
    h
}

#[test]
fn the_day_at_each_size() {
    let mut h = begun();
    for (columns, rows) in [(120, 36), (100, 30), (80, 24)] {
        snapshot(
            &format!("day_{columns}x{rows}"),
            &h.screen_at(columns, rows),
        );
    }
    h.enter();
    snapshot("day_sign_80x24", &h.screen());
    h.enter();
    snapshot("day_next_80x24", &h.screen());
}

#[test]
fn too_small_says_the_size_that_is_needed() {
    snapshot("too_small_60x10", &begun().screen_at(60, 10));
}

#[test]
fn without_color_every_state_is_still_a_word() {
    let mut h = begun();
    let colored = h.screen();
    h.without_color();
    assert_eq!(colored, h.screen(), "color is never the only carrier");
    let mut terminal = Terminal::new(TestBackend::new(80, 24)).unwrap();
    terminal.draw(|frame| h.app.draw(frame)).unwrap();
    let plain = |cell: &Cell| cell.fg == Color::Reset && cell.bg == Color::Reset;
    assert!(terminal.backend().buffer().content.iter().all(plain));
}

#[test]
fn the_terminals_own_cursor_stands_in_the_focused_field() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("32");
    let mut terminal = Terminal::new(TestBackend::new(80, 24)).unwrap();
    terminal.draw(|frame| h.app.draw(frame)).unwrap();
    let at = terminal.get_cursor_position().unwrap();
    let buffer = terminal.backend().buffer();
    assert_eq!(buffer[(at.x - 2, at.y)].symbol(), "3");
    assert_eq!(buffer[(at.x - 1, at.y)].symbol(), "2");
    h.press(Key::f(11)).typed("pe");
    terminal.draw(|frame| h.app.draw(frame)).unwrap();
    let at = terminal.get_cursor_position().unwrap();
    assert_eq!(terminal.backend().buffer()[(at.x - 1, at.y)].symbol(), "e");
}

#[test]
fn questions_stand_above_the_foot_line() {
    let mut h = begun();
    h.press(Key::f(2));
    snapshot("not_testable_80x24", &h.screen());
    h.key(KeyCode::Esc)
        .press(Key::f(5))
        .key(KeyCode::Down)
        .typed("r");
    snapshot("signs_80x24", &h.screen());
    h.key(KeyCode::Esc).press(Key::f(4));
    snapshot("whole_reason_80x24", &h.screen());
    h.key(KeyCode::Esc).press(Key::char('?'));
    snapshot("keys_80x24", &h.screen());
    h.key(KeyCode::Esc).press(Key::ctrl('p'));
    snapshot("palette_80x24", &h.screen());
    h.key(KeyCode::Esc).press(Key::f(11)).typed("o");
    snapshot("move_80x24", &h.screen());
}

#[test]
fn the_other_places() {
    let mut h = begun();
    h.enter().enter();
    h.press(Key::alt('2')).typed("o").enter();
    snapshot("children_80x24", &h.screen());
    h.press(Key::alt('3'));
    snapshot("referrals_80x24", &h.screen());
    h.press(Key::alt('4'));
    snapshot("term_80x24", &h.screen());
    h.press(Key::alt('5'));
    snapshot("rules_100x30", &h.screen_at(100, 30));
    h.press(Key::alt('1')).press(Key::alt('d'));
    snapshot("days_80x24", &h.screen());
}

#[test]
fn a_critical_line_day_and_an_emergency() {
    let mut h = Hands::sit_at(super::desk::ROSTER, AcuityMethod::CriticalLine);
    h.typed("+").enter().typed("+").enter();
    snapshot("critical_line_80x24", &h.screen());
    h.press(Key::f(5));
    for _ in 0..3 {
        h.key(KeyCode::Down);
    }
    h.typed("l").enter();
    snapshot("emergency_question_80x24", &h.screen());
    h.typed("f");
    h.app.session.now_ms = h.app.urgent[0].since.utc_ms + 221_000;
    snapshot("emergency_line_80x24", &h.screen());
}

#[test]
fn names_of_every_script_keep_the_rule_in_its_column() {
    let h = Hands::sit();
    let screen = h.screen();
    let columns: Vec<usize> = screen
        .lines()
        .skip(2)
        .take(14)
        .map(|line| {
            let before = &line[..line.find('│').unwrap_or_else(|| panic!("{line}"))];
            unicode_width::UnicodeWidthStr::width(before)
        })
        .collect();
    assert!(
        columns.windows(2).all(|w| w[0] == w[1]),
        "{columns:?}\n{screen}"
    );
}

#[test]
fn a_very_long_roster_opens_and_scrolls() {
    let mut roster = String::from("child_id,family_name,given_name,dob,grade,class,site\n");
    for i in 0..5_000 {
        let _ = writeln!(
            roster,
            "R-{i:05},Family{i:05},Given,2019-01-01,1,C{},QE",
            i / 25
        );
    }
    let mut h = Hands::sit_at(&roster, AcuityMethod::Threshold);
    h.sees("To come 5000 of 5000")
        .key(KeyCode::Esc)
        .key(KeyCode::End)
        .sees("Family02499");
    h.typed("family0432").sees("10 found");
    h.scan("R-02500").sees("FAMILY02500");
}
