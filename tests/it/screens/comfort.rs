//! Lock, day PIN, themes, the palette, and what is said while the store is slow.

use crossterm::event::KeyCode;
use ratatui::Terminal;
use ratatui::backend::TestBackend;
use ratatui::style::Color;
use twoline::actions::{Desk, DeskOptions, Kdf, NewDay, NewStore, Secret, init};
use twoline::domain::acuity::Notation;
use twoline::domain::codes::AcuityMethod;
use twoline::keys::Key;
use twoline::tui::Theme;
use twoline::tui::app::{Effect, Message, Request};

use super::desk::{Hands, day, store};

const PASSPHRASE: &str = "nine green kettles sing";

/// A desk at a store that a passphrase protects, on a day that has begun.
fn protected() -> Hands {
    let (unused, folder) = store(super::desk::ROSTER, AcuityMethod::Threshold);
    drop(unused);
    let options = DeskOptions {
        today: Some(day()),
        ..DeskOptions::default()
    };
    let (mut desk, _): (Desk, _) = init(
        &folder.path().join("kept"),
        NewStore {
            programme: "Quillmere".into(),
            station: "east".into(),
            notation: Notation::Feet,
            secret: Secret::typed(PASSPHRASE),
            kdf: Kdf::test(),
        },
        &options,
    )
    .unwrap();
    let on = |m, d| chrono::NaiveDate::from_ymd_opt(2026, m, d).unwrap();
    desk.add_site("QE", "Quillmere East").unwrap();
    desk.add_term("2026A", "Autumn 2026", on(8, 1), on(12, 31))
        .unwrap();
    desk.add_screener("JI", "J. Imani").unwrap();
    let plan = desk
        .plan_roster("roster.csv", super::desk::ROSTER.as_bytes(), None, None)
        .unwrap();
    desk.add_roster(&plan).unwrap();
    desk.open_day(NewDay {
        site: "QE".into(),
        date: day(),
        protocol: "us-school".into(),
        method: AcuityMethod::Threshold,
    })
    .unwrap();
    Hands::with(desk, folder)
}

/// Everything that a child of the roster could be known by.
fn shows_a_child(screen: &str) -> bool {
    super::desk::ROSTER.lines().skip(1).any(|line| {
        let mut cells = line.split(',');
        let id = cells.next().unwrap();
        (id != "40" && screen.contains(id))
            || cells
                .take(2)
                .any(|n| screen.to_lowercase().contains(&n.to_lowercase()))
    })
}

#[track_caller]
fn is_locked(h: &Hands) {
    for (columns, rows) in [(80, 24), (200, 60), (60, 10), (20, 3), (1, 1)] {
        let screen = h.screen_at(columns, rows);
        assert!(!shows_a_child(&screen), "{screen}");
    }
    assert!(h.screen().contains("Twoline is locked"), "{}", h.screen());
}

#[test]
fn a_lock_shows_nothing_of_a_child_and_keeps_what_was_typed() {
    let mut h = protected();
    h.typed("20").enter().typed("3");
    h.press(Key::ctrl('x'));
    is_locked(&h);
    // Keys, a scan, a paste and function keys at the lock reach nothing behind it.
    h.scan("Q-10488")
        .paste("777/7")
        .press(Key::f(10))
        .typed("99");
    is_locked(&h);
    h.press(Key::ctrl('u')).typed(PASSPHRASE);
    assert!(!h.screen().contains(PASSPHRASE));
    h.enter();
    h.sees("OKAFOR, Ada").misses("777/7");
    h.typed("2").enter().sees("20/32");
    // A draft lay in the store before the screen went blank: a crash at the lock loses nothing.
    h.press(Key::ctrl('x'));
    let h = {
        let Hands { clerk, folder, .. } = h;
        drop(clerk);
        let desk = Desk::open(
            &folder.path().join("kept"),
            &Secret::typed(PASSPHRASE),
            &DeskOptions {
                today: Some(day()),
                ..DeskOptions::default()
            },
        )
        .unwrap();
        Hands::with(desk, folder)
    };
    assert!(h.screen().contains("20/32"), "{}", h.screen());
}

#[test]
fn a_wrong_passphrase_opens_nothing() {
    let mut h = protected();
    h.press(Key::ctrl('x'))
        .typed("nine green kettles sang")
        .enter();
    is_locked(&h);
    assert!(h.screen().contains("does not open this store"));
    h.enter();
    is_locked(&h);
    // While the passphrase is checked, keys go nowhere, and so not to the bench afterwards.
    h.held = Some(Vec::new());
    h.typed(PASSPHRASE).enter().typed("NLP").enter();
    is_locked(&h);
    h.let_store_work();
    h.sees("OKAFOR, Ada").misses("NLP");
}

fn with_pin() -> Hands {
    let mut h = protected();
    h.press(Key::ctrl('p')).typed("day-pin").enter();
    h.typed("123456").enter();
    assert!(h.screen().contains("too easy"));
    h.typed("40291").enter();
    assert!(h.screen().contains("six digits are needed"));
    h.typed("402917").enter().typed("402918").enter();
    assert!(h.screen().contains("not the same"));
    h.typed("402917").enter();
    assert!(!h.screen().contains("402917"));
    h.typed("402917").enter().sees("day PIN set");
    h
}

#[test]
fn the_day_pin_opens_day_alone() {
    let mut h = with_pin();
    h.press(Key::alt('2')).typed("okafor").sees("Q-10482");
    h.press(Key::ctrl('x')).typed("402917").enter();
    h.sees("OKAFOR, Ada").sees("opened by the day PIN");
    for place in ['2', '3', '4', '5'] {
        h.press(Key::alt(place));
        let screen = h.screen();
        assert!(
            screen.contains("needs the passphrase") && !shows_a_child(&screen),
            "{screen}"
        );
        // The PIN is no passphrase here.
        h.typed("402917").enter();
        assert!(h.screen().contains("needs the passphrase"));
        h.key(KeyCode::Esc).sees("OKAFOR, Ada");
    }
    h.typed("20").enter().typed("25").enter().enter();
    h.sees("saved Okafor, Ada: pass");
    h.press(Key::ctrl('p')).typed("day-pin").enter();
    h.sees("the passphrase first");
    h.press(Key::alt('2')).typed(PASSPHRASE).enter();
    h.sees("Q-10482");
}

#[test]
fn five_wrong_pins_need_the_passphrase() {
    let mut h = with_pin();
    h.press(Key::ctrl('x'));
    for left in ["4 tries", "3 tries", "2 tries", "1 tries"] {
        h.typed("555111").enter();
        assert!(h.screen().contains(left), "{}", h.screen());
    }
    h.typed("555111").enter();
    assert!(h.screen().contains("five wrong PINs"));
    h.typed("402917").enter();
    is_locked(&h);
    h.typed(PASSPHRASE).enter().sees("OKAFOR, Ada");
}

#[test]
fn it_locks_when_nobody_presses_a_key_and_the_next_key_goes_nowhere() {
    let mut h = Hands::sit();
    h.app.session.now_ms += 10 * 60_000;
    h.app.update(Message::Tick);
    is_locked(&h);
    h.enter().typed("20");
    h.app.session.now_ms += 9 * 60_000;
    h.app.update(Message::Tick);
    assert!(h.screen().contains("OKAFOR"));
    h.app.session.now_ms += 60_000;
    h.press(Key::char('7'));
    is_locked(&h);
    assert!(!h.screen().contains("demo): *"), "{}", h.screen());
    // The demo is opened by Enter alone.
    h.enter().sees("OKAFOR, Ada").sees("20").misses("207");
    h.app.session.now_ms += 11 * 60_000;
    h.app.update(Message::Tick);
    is_locked(&h);
}

#[test]
fn suspending_locks_and_an_emergency_still_counts_without_a_name() {
    let mut h = Hands::sit();
    h.press(Key::f(5));
    for _ in 0..3 {
        h.key(KeyCode::Down);
    }
    h.typed("l").enter().typed("f").sees("EMERGENCY 00:00:");
    let effects = h.app.update(Message::Suspend);
    assert!(matches!(
        effects[..],
        [.., Effect::FlushDrafts, Effect::Suspend]
    ));
    h.app.session.now_ms = h.app.urgent[0].since.utc_ms + 221_000;
    let screen = h.screen();
    assert!(screen.contains("EMERGENCY 00:03:41 waits"), "{screen}");
    is_locked(&h);
    insta::assert_snapshot!("locked_80x24", screen);
}

#[test]
fn a_slow_disk_is_said_and_nothing_is_called_saved() {
    let mut h = Hands::sit();
    h.held = Some(Vec::new());
    h.typed("20").enter().typed("25").enter().enter();
    h.misses("saving Okafor").misses("saved");
    h.app.session.now_ms += 1_500;
    h.sees("saving Okafor, Ada …").misses("saved");
    h.app.session.now_ms += 5_000;
    h.sees("not confirmed yet: Okafor, Ada; draft kept")
        .misses("saved");
    // One works on meanwhile.
    h.typed("20").enter().typed("20").enter().enter();
    h.sees("not confirmed yet: Okafor, Ada and 1 more");
    h.let_store_work();
    h.sees("saved").misses("not confirmed yet");
    assert!(!h.app.is_waiting());
}

#[test]
fn a_full_disk_says_what_to_do_and_keeps_the_draft() {
    let mut h = Hands::sit();
    h.held = Some(Vec::new());
    h.typed("20").enter().typed("25").enter().enter();
    h.app.session.now_ms += 2_000;
    h.sees("saving Okafor, Ada …");
    h.held = None;
    h.answer(twoline::tui::app::Answer::NotSigned(
        "Q-10482".into(),
        twoline::tui::app::Refused {
            message: "the disk is full".into(),
            hint: "make room, then sign again".into(),
        },
    ));
    h.sees("not confirmed, the draft is kept. the disk is full")
        .sees("make room, then sign again")
        .misses("saving Okafor")
        .misses("saved");
    h.scan("Q-10482").sees("20/25");
}

#[test]
fn the_palette_finds_by_words_and_by_keys_and_says_why_not() {
    let mut h = Hands::sit();
    for (typed, first) in [
        ("f6", "swap-eyes"),
        ("ctrl z", "undo"),
        ("Ctrl-Z", "undo"),
        ("alt m", "move-to-child"),
        ("take back", "undo"),
        ("colors", "theme"),
    ] {
        h.press(Key::ctrl('p')).typed(typed);
        let screen = h.screen();
        let row = screen
            .lines()
            .find(|l| l.contains('▸') && l.contains(first));
        assert!(row.is_some(), "{typed}: {first}\n{screen}");
        h.key(KeyCode::Esc);
    }
    // What cannot be done now stands there with the reason, and is not done.
    h.press(Key::ctrl('p')).typed("correct");
    h.sees("(nothing is signed yet").enter();
    h.sees("correct: nothing is signed yet");
    h.press(Key::alt('5'))
        .press(Key::ctrl('p'))
        .typed("swap-eyes");
    h.sees("(works in Day)")
        .enter()
        .sees("swap-eyes works in Day");
}

#[test]
fn who_records_is_changed_with_one_key_and_one_choice() {
    let mut h = Hands::sit();
    h.press(Key::alt('y')).sees("who is recording?");
    h.typed("1").sees("recording as J. Imani");
}

#[test]
fn a_theme_is_kept_for_this_installation() {
    let mut h = Hands::sit();
    h.press(Key::ctrl('p')).typed("theme").enter().typed("1");
    h.sees("theme light, kept for this installation");
    let mut h = h.again();
    assert_eq!(h.app.session.theme.name(), twoline::tui::ThemeName::Light);
    let mut terminal = Terminal::new(TestBackend::new(80, 24)).unwrap();
    let drawn = terminal.draw(|frame| h.app.draw(frame)).unwrap();
    let content = &drawn.buffer.content;
    assert!(
        content
            .iter()
            .all(|c| c.fg != Color::Reset && c.bg != Color::Reset),
        "no pair is left to the terminal's own colors"
    );
    // Without colors the theme stays plain, whatever is kept.
    h.app.session.color = false;
    h.app.session.theme = Theme::new(false);
    h.press(Key::ctrl('p')).typed("theme").enter();
    h.sees("theme: colors are off");
}

#[test]
fn a_refused_preference_is_said() {
    let mut h = Hands::sit();
    h.held = Some(Vec::new());
    h.press(Key::ctrl('p')).typed("theme").enter().typed("3");
    let held = h.held.take().unwrap();
    assert!(matches!(
        &held[..],
        [Effect::Ask(request)] if **request == Request::Prefer("theme", "contrast".into())
    ));
    h.misses("kept for this installation");
}

#[test]
fn a_slow_disk_is_said_for_a_setting_too() {
    let mut h = Hands::sit();
    h.held = Some(Vec::new());
    h.press(Key::ctrl('p')).typed("theme").enter().typed("3");
    h.app.session.now_ms += 6_000;
    h.app.update(Message::Tick);
    h.sees("not confirmed yet: the setting");
}

/// A file that somebody changed by hand and that cannot be read is not lost by the next choice.
#[test]
fn preferences_that_cannot_be_read_are_not_written_over() {
    let mut h = Hands::sit();
    let file = h.folder.path().join("store/screens.toml");
    let by_hand = "idle_minutes = \"3\"\ntheme = light\n";
    std::fs::write(&file, by_hand).unwrap();
    h.press(Key::ctrl('p')).typed("theme").enter().typed("3");
    h.sees("screens.toml, line 2")
        .misses("kept for this installation");
    assert_eq!(std::fs::read_to_string(&file).unwrap(), by_hand);
    std::fs::write(&file, "idle_minutes = \"3\"\n").unwrap();
    h.press(Key::ctrl('p')).typed("theme").enter().typed("3");
    h.sees("kept for this installation");
    let kept = std::fs::read_to_string(&file).unwrap();
    assert!(
        kept.contains("idle_minutes") && kept.contains("contrast"),
        "{kept}"
    );
}
