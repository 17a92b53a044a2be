//! Every state of the bench at four sizes; each picture was read before it was accepted.

use crossterm::event::KeyCode;
use twoline::actions::Unsettled;
use twoline::domain::codes::AcuityMethod;
use twoline::domain::field::Field;
use twoline::keys::Key;
use twoline::tui::app::{Answer, Effect, Message, Request};

use super::desk::Hands;
use super::drawn::snapshot;

const SIZES: [(u16, u16); 4] = [(80, 24), (100, 30), (120, 36), (200, 60)];

fn drawn(state: &str, h: &Hands) {
    for (columns, rows) in SIZES {
        let screen = h.screen_at(columns, rows);
        // The foot line has pictures of its own; here it would change with every new key.
        let lines: Vec<&str> = screen.lines().take(usize::from(rows) - 1).collect();
        snapshot(
            &format!("bench_{state}_{columns}x{rows}"),
            &lines.join("\n"),
        );
    }
}

#[test]
fn a_question_about_a_rare_value() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("80").enter();
    drawn("rare", &h);
}

#[test]
fn the_instrument_beside_a_chart_that_was_not_testable() {
    let mut h = Hands::sit();
    h.press(Key::f(2))
        .key(KeyCode::Tab)
        .key(KeyCode::Tab)
        .typed("1");
    h.typed("+1.25").enter().typed("-0.75").enter();
    drawn("instrument", &h);
}

#[test]
fn a_second_try() {
    let mut h = Hands::sit();
    h.press(Key::f(2))
        .key(KeyCode::Tab)
        .key(KeyCode::Tab)
        .typed("1");
    h.press(Key::ctrl('s')).scan("Q-10482");
    drawn("not_testable_signed", &h);
    h.press(Key::alt('r')).typed("20");
    drawn("second_try", &h);
}

#[test]
fn a_signed_child_with_a_note_and_swapped_eyes() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("32").press(Key::f(6));
    h.press(Key::f(7))
        .typed("peeked through the fingers")
        .enter();
    h.press(Key::ctrl('s')).scan("Q-10482");
    drawn("signed", &h);
}

#[test]
fn a_masked_station_and_a_discreet_screen() {
    let mut h = Hands::sit();
    h.app.session.role.masked = true;
    h.scan("Q-10483").typed("20").enter();
    drawn("masked", &h);
    let mut h = Hands::sit();
    h.typed("20").enter().typed("32").press(Key::alt('i'));
    drawn("discreet", &h);
}

#[test]
fn an_emergency_and_more_rows_than_the_screen_has() {
    let mut h = Hands::sit();
    h.press(Key::f(5));
    for _ in 0..3 {
        h.key(KeyCode::Down);
    }
    h.typed("l").enter().typed("f");
    for test in ["4", "9", "d"] {
        h.press(Key::alt('t')).typed(test);
    }
    // The clock last: a key after such a pause would meet the lock.
    h.app.session.now_ms = h.app.urgent[0].since.utc_ms + 221_000;
    drawn("emergency_rows", &h);
}

/// A child whose visit two stations have recorded differently, as the store says it.
fn two_stations() -> Hands {
    let mut h = Hands::sit();
    h.typed("20")
        .enter()
        .typed("25")
        .press(Key::ctrl('s'))
        .scan("Q-10482");
    let day = h.app.day.as_ref().unwrap();
    let mut visit = day.bench.as_ref().unwrap().signed.clone().unwrap();
    visit.readings.distance.left = None;
    visit.unsettled.push(Unsettled {
        try_no: 1,
        field: Field::DistanceLeft,
        values: vec!["20/25".into(), "20/40".into()],
    });
    h.answer(Answer::Visit("Q-10482".into(), Some(Box::new(visit))));
    h
}

#[test]
fn values_that_differ_between_stations_are_both_shown_and_one_is_chosen_with_a_reason() {
    let mut h = two_stations();
    drawn("differs", &h);
    h.sees("20/25 or 20/40 ?");
    while h.app.day.as_ref().unwrap().bench.as_ref().unwrap().field() != Some(Field::DistanceLeft) {
        h.key(KeyCode::Up);
    }
    h.enter().sees("which stands?").sees("use this one: 20/40");
    h.typed("2").sees("20/40 stands").typed("asked east");
    let effects = h.app.update(Message::Key(Key::plain(KeyCode::Enter)));
    let asked = effects.iter().any(|e| {
        matches!(e, Effect::Ask(r) if matches!(&**r, Request::Settle(_, Field::DistanceLeft, value, reason)
            if value == "20/40" && reason == "asked east"))
    });
    assert!(asked, "{effects:?}");
}

#[test]
fn names_that_are_not_kind_to_a_screen_reach_it_safely() {
    const NAMES: [&str; 12] = [
        "Ｔｈｅ ｑｕｉｃｋ",
        "Z̮̞̠͙͔ͅa̡l̵g̴o̶",
        "\u{202E}evitcepsrep",
        "zero\u{200B}width",
        "👩‍👩‍👧‍👦 family",
        "ﷺﷺﷺ",
        "田中さんにあげて下さい田中さんにあげて下さい",
        "Null",
        "O'); DROP TABLE child;--",
        "<script>alert(1)</script>",
        "مُنَاقَشَةُ سُبُلِ اِسْتِخْدَامِ",
        "ⅎnoⅎ ˙ɐnbᴉlɐ ɐuƃɐɯ",
    ];
    let mut roster = String::from("child_id,family_name,given_name,dob,grade,class,site\n");
    for (i, name) in NAMES.iter().enumerate() {
        use std::fmt::Write as _;
        let quoted = name.replace('"', "\"\"");
        let _ = writeln!(roster, "N-{i},\"{quoted}\",\"{quoted}\",2020-01-01,1,1B,QE");
    }
    let mut h = Hands::sit_at(&roster, AcuityMethod::Threshold);
    for (i, name) in NAMES.iter().enumerate() {
        h.scan(&format!("N-{i}"));
        for (columns, rows) in SIZES {
            let screen = h.screen_at(columns, rows);
            assert!(
                !screen.chars().any(|c| c != '\n' && c.is_control()),
                "{name:?}"
            );
            assert!(
                !screen.contains('\u{202E}') && !screen.contains('\u{200B}'),
                "{screen}"
            );
        }
        assert!(h.screen().contains("N-"), "{}", h.screen());
        h.typed("n")
            .typed("20")
            .enter()
            .typed("20")
            .press(Key::ctrl('s'));
        h.sees("saved");
    }
    assert_eq!(h.app.day.as_ref().unwrap().queue.counts().0, 0);
}
