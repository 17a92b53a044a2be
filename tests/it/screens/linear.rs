//! The screens as plain lines for a screen reader.

use crossterm::event::KeyCode;
use ratatui::Terminal;
use ratatui::backend::TestBackend;
use twoline::keys::Key;

use super::desk::Hands;

fn linear() -> Hands {
    let mut h = Hands::sit();
    h.app.linear = true;
    h
}

/// Drawn lines, bars, arrows and other pictures that a screen reader spells out.
fn is_picture(c: char) -> bool {
    matches!(c, '\u{2190}'..='\u{21FF}' | '\u{2500}'..='\u{27BF}')
}

/// Draws at a size and returns the lines with the one that the cursor stands in.
fn read(h: &Hands, columns: u16, rows: u16) -> (Vec<String>, String) {
    let mut terminal = Terminal::new(TestBackend::new(columns, rows)).unwrap();
    terminal.draw(|frame| h.app.draw(frame)).unwrap();
    let at = terminal.get_cursor_position().unwrap();
    let screen = h.screen_at(columns, rows);
    assert!(
        !screen.contains(is_picture),
        "a picture is drawn:\n{screen}"
    );
    let lines: Vec<String> = screen.lines().map(str::to_owned).collect();
    let focused = lines[usize::from(at.y)].clone();
    (lines, focused)
}

#[test]
fn a_child_is_entered_by_listening() {
    let mut h = linear();
    let (lines, focused) = read(&h, 80, 24);
    assert!(lines[0].starts_with("News:"), "{lines:?}");
    assert_eq!(focused, "right eye, distance: nothing entered");
    h.typed("20");
    assert_eq!(read(&h, 80, 24).1, "right eye, distance: 20 (20/20)");
    h.enter().typed("3");
    assert!(
        read(&h, 80, 24)
            .1
            .contains("left eye, distance: 3 (not understood, expected")
    );
    h.typed("2").enter();
    let (lines, focused) = read(&h, 80, 24);
    assert_eq!(focused, "sign: Enter signs: rescreen, no signs seen");
    assert!(lines.iter().any(|l| l.contains("RESCREEN by 28 Oct 2026")));
    h.enter();
    // What changed stands in the first row, in every place and at every height.
    for rows in [2, 10, 24, 60] {
        let (lines, _) = read(&h, 80, rows);
        assert!(
            lines[0].starts_with("News: saved Okafor, Ada: rescreen"),
            "{lines:?}"
        );
    }
    h.key(KeyCode::Esc);
    assert!(read(&h, 80, 24).1.contains("Oyelaran, Tunde"));
    h.key(KeyCode::Down);
    assert!(read(&h, 80, 24).1.contains("Petit, Léa"));
}

#[test]
fn every_place_and_question_is_read_out_in_plain_lines() {
    let mut h = linear();
    h.typed("20").enter().typed("32").enter().enter();
    let see = |name: &str, h: &Hands| {
        for (columns, rows) in [(40, 12), (80, 24), (100, 30), (120, 36), (200, 60)] {
            read(h, columns, rows);
        }
        insta::assert_snapshot!(format!("linear_{name}"), read(h, 80, 48).0.join("\n"));
    };
    see("bench", &h);
    h.press(Key::f(2));
    see("not_testable", &h);
    h.key(KeyCode::Esc).press(Key::f(3));
    see("not_present", &h);
    h.key(KeyCode::Esc).press(Key::f(4));
    see("whole_reason", &h);
    h.key(KeyCode::Esc)
        .press(Key::f(5))
        .key(KeyCode::Down)
        .typed("r");
    see("signs", &h);
    h.key(KeyCode::Esc).press(Key::f(10));
    see("add_child", &h);
    h.key(KeyCode::Esc).press(Key::ctrl('p')).typed("swap");
    see("palette", &h);
    h.key(KeyCode::Esc).press(Key::f(8));
    let station = read(&h, 80, 60).0;
    assert!(
        station.iter().any(|l| l.starts_with("east, 1")),
        "each station has its line: {station:?}"
    );
    h.key(KeyCode::Esc)
        .press(Key::alt('2'))
        .typed("okafor")
        .enter();
    see("children", &h);
    h.press(Key::alt('3'));
    see("referrals", &h);
    h.press(Key::alt('4'));
    see("term", &h);
    h.press(Key::alt('5'));
    for _ in 0..6 {
        h.key(KeyCode::Down);
    }
    see("rules", &h);
    h.press(Key::alt('1')).key(KeyCode::Esc);
    see("list", &h);
    h.press(Key::alt('d'));
    see("days", &h);
    h.press(Key::ctrl('x'));
    see("locked", &h);
}

#[test]
fn an_emergency_is_said_with_minutes_and_no_running_seconds() {
    let mut h = linear();
    h.app.session.idle_minutes = 0;
    h.press(Key::f(5));
    for _ in 0..3 {
        h.key(KeyCode::Down);
    }
    h.typed("l").enter();
    assert!(read(&h, 80, 24).0.join("\n").contains("EMERGENCY"));
    h.typed("f");
    h.app.session.now_ms = h.app.urgent[0].since.utc_ms + 221_000;
    for place in ['1', '2', '3', '4', '5'] {
        h.press(Key::alt(place));
        let (lines, _) = read(&h, 80, 24);
        assert!(
            lines[1].starts_with("Emergency for 3 minutes: Okafor, Ada"),
            "{lines:?}"
        );
    }
}
