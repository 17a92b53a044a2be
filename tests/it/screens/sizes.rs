//! Every place and every question at every size of a window, drawn and as plain lines.

use crossterm::event::KeyCode;
use twoline::keys::Key;

use super::desk::Hands;

/// Each place and question with some hands in the middle of a day.
fn everything() -> Vec<(&'static str, Hands)> {
    let keys: &[(&str, &[Key])] = &[
        ("bench", &[]),
        ("list", &[Key::plain(KeyCode::Esc)]),
        ("not testable", &[Key::f(2)]),
        ("not present", &[Key::f(3)]),
        ("whole reason", &[Key::f(4)]),
        ("signs", &[Key::f(5)]),
        ("move", &[Key::f(11)]),
        ("tests", &[Key::f(12)]),
        ("add child", &[Key::f(10)]),
        ("keys", &[Key::char('?')]),
        ("palette", &[Key::ctrl('p')]),
        ("screener", &[Key::alt('y')]),
        (
            "children",
            &[Key::alt('2'), Key::char('o'), Key::plain(KeyCode::Enter)],
        ),
        ("referrals", &[Key::alt('3')]),
        ("term", &[Key::alt('4')]),
        ("rules", &[Key::alt('5')]),
        ("days", &[Key::alt('d')]),
        ("new day", &[Key::alt('d'), Key::char('n')]),
        ("board", &[Key::f(8)]),
        ("tour", &[Key::alt('g')]),
        ("locked", &[Key::ctrl('x')]),
    ];
    let mut out = Vec::new();
    for (name, keys) in keys {
        let mut h = begun();
        for key in *keys {
            h.press(*key);
        }
        out.push((*name, h));
    }
    let mut urgent = begun();
    urgent.press(Key::f(5));
    for _ in 0..3 {
        urgent.key(KeyCode::Down);
    }
    urgent.typed("l").enter().typed("f").press(Key::f(9));
    out.push(("emergency", urgent));
    let mut slow = begun();
    slow.held = Some(Vec::new());
    slow.enter().enter();
    slow.app.session.now_ms += 6_000;
    out.push(("slow disk", slow));
    out
}

/// A day that has begun: one child passed, one absent, a draft on the bench.
fn begun() -> Hands {
    let mut h = Hands::sit();
    h.app.session.idle_minutes = 0;
    h.typed("20").enter().typed("25").enter().enter();
    h.press(Key::f(3)).typed("a").enter();
    h.typed("20").enter().typed("32");
    h
}

/// Sampled; with `TWOLINE_ALL_SIZES=1` every size from 1 by 1 to 250 by 70.
#[test]
fn no_size_crashes_anything() {
    let all = std::env::var_os("TWOLINE_ALL_SIZES").is_some();
    let (columns, rows): (Vec<u16>, Vec<u16>) = if all {
        ((1..=250).collect(), (1..=70).collect())
    } else {
        (
            (1..=250).step_by(7).chain([79, 80, 81, 250]).collect(),
            (1..=70).step_by(5).chain([23, 24, 25, 70]).collect(),
        )
    };
    for (i, (_, h)) in everything().iter_mut().enumerate() {
        for linear in [false, true] {
            h.app.linear = linear;
            for c in &columns {
                for r in &rows {
                    if all || (c + r + i as u16 + u16::from(linear)).is_multiple_of(5) {
                        let _ = h.screen_at(*c, *r);
                    }
                }
            }
        }
    }
}

/// At each size that is promised, the keys of the context stand in the last line and help is last.
#[test]
fn every_place_fits_each_promised_size() {
    for (name, h) in everything() {
        for (columns, rows) in [(80, 24), (100, 30), (120, 36), (200, 60), (250, 70)] {
            let screen = h.screen_at(columns, rows);
            assert!(!screen.contains("Twoline needs"), "{name}\n{screen}");
            if name != "locked" {
                let foot = screen.lines().last().unwrap_or_default();
                assert!(
                    foot.contains("keys") || foot.contains("Esc back"),
                    "{name} at {columns}x{rows}: {foot}\n{screen}"
                );
            }
        }
    }
}
