//! Each test that a protocol can ask for, entered on the bench and found again.

use crossterm::event::KeyCode;
use twoline::domain::codes::AcuityMethod;
use twoline::keys::Key;

use super::desk::{Hands, ROSTER};

/// Opens a test by the words of its row in the choice of tests.
fn open(h: &mut Hands, title: &str) {
    h.press(Key::alt('t'));
    let screen = h.screen_at(120, 36);
    let line = screen
        .lines()
        .skip_while(|l| !l.contains("which test?"))
        .find(|l| l.contains(title))
        .unwrap_or_else(|| panic!("{title} is not offered\n{screen}"));
    let key = line.chars().find(char::is_ascii_alphanumeric).unwrap();
    h.press(Key::char(key));
}

/// The value that the store has for a field of a child.
fn stored(h: &mut Hands, child: &str, field: &str) -> Option<String> {
    let desk_history = h
        .clerk
        .answer(twoline::tui::app::Request::History(child.into()));
    let twoline::tui::app::Answer::History(Some(history)) = desk_history else {
        panic!("no history of {child}");
    };
    history.visits[0]
        .readings
        .recorded()
        .into_iter()
        .find(|(f, _)| f.word() == field)
        .map(|(_, value)| value)
}

#[test]
fn every_test_is_one_key_away_and_comes_out_as_entered() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("25").enter();
    open(&mut h, "near acuity");
    h.typed("20")
        .enter()
        .typed("25")
        .sees("left eye 20/25")
        .enter();
    open(&mut h, "stereo");
    h.typed("5")
        .sees("5 answered correctly")
        .enter()
        .typed("6")
        .sees("6 shown")
        .enter();
    open(&mut h, "color plates");
    h.typed("0")
        .enter()
        .typed("6")
        .sees("6 plates shown")
        .enter();
    open(&mut h, "red reflex");
    h.typed("n").typed("n");
    open(&mut h, "plus lens");
    h.typed("b");
    open(&mut h, "both eyes open");
    h.typed("20").enter();
    open(&mut h, "history");
    h.typed("n");
    h.press(Key::ctrl('s')).sees("saved Okafor, Ada: pass");
    for (field, value) in [
        ("distance_right", "20/20"),
        ("distance_left", "20/25"),
        ("distance_both", "20/20"),
        ("near_right", "20/20"),
        ("near_left", "20/25"),
        ("stereo_correct", "5"),
        ("stereo_shown", "6"),
        ("plates_missed", "0"),
        ("plates_shown", "6"),
        ("red_reflex_right", "normal"),
        ("red_reflex_left", "normal"),
        ("plus_lens", "blurred"),
        ("history", "none"),
    ] {
        assert_eq!(
            stored(&mut h, "Q-10482", field).as_deref(),
            Some(value),
            "{field}"
        );
    }
}

#[test]
fn a_manifest_deviation_asks_for_its_size_eye_and_direction() {
    let mut h = Hands::sit();
    h.misses("deviation  ");
    open(&mut h, "cover test");
    h.typed("n").misses("deviation  ");
    open(&mut h, "cover test");
    h.key(KeyCode::Delete).typed("i").sees("deviation  ");
    h.typed("12").sees("12 prism dioptres").enter();
    h.typed("l").typed("i");
    h.press(Key::ctrl('s')).sees("saved Okafor, Ada: rescreen");
    for (field, value) in [
        ("cover", "intermittent"),
        ("deviation_pd", "12"),
        ("deviating_eye", "left"),
        ("deviation_direction", "in"),
    ] {
        assert_eq!(
            stored(&mut h, "Q-10482", field).as_deref(),
            Some(value),
            "{field}"
        );
    }
}

#[test]
fn the_instrument_takes_both_eyes_out_of_range_values_and_no_reading() {
    let mut h = Hands::sit();
    h.press(Key::f(2))
        .key(KeyCode::Tab)
        .key(KeyCode::Tab)
        .typed("1");
    h.sees("sphere");
    h.typed(">7.5")
        .sees("more than +7.50 dioptres, out of range")
        .enter();
    h.typed("-1.25").sees("-1.25 dioptres").enter();
    h.typed("90").sees("axis 90°").enter();
    // No reading of the left eye is one key.
    h.sees("x no reading").typed("x").sees("no reading");
    h.enter().sees("saved Okafor, Ada");
    for (field, value) in [
        ("sphere_right", ">7.50"),
        ("cylinder_right", "-1.25"),
        ("axis_right", "90"),
        ("instrument_left", "no_reading"),
    ] {
        assert_eq!(
            stored(&mut h, "Q-10482", field).as_deref(),
            Some(value),
            "{field}"
        );
    }
    assert_eq!(
        stored(&mut h, "Q-10482", "sphere_left"),
        None,
        "nothing is copied"
    );
}

#[test]
fn another_distance_than_the_charts_is_said_in_words_and_shifts_the_line() {
    let mut h = Hands::sit();
    h.typed("32").enter().typed("32").enter().sees("PASS");
    open(&mut h, "chart used");
    h.enter().typed("20").sees("chart made for 20 ft").enter();
    h.typed("10")
        .sees("nearer: each line counts as a worse one")
        .enter();
    h.sees("RESCREEN");
}

#[test]
fn plus_in_an_empty_field_is_the_pass_line_or_better_on_every_day() {
    for method in [AcuityMethod::Threshold, AcuityMethod::CriticalLine] {
        let mut h = Hands::sit_at(ROSTER, method);
        h.typed("+").sees("20/32 or better");
    }
}

#[test]
fn a_second_try_keeps_the_first_and_the_later_complete_one_is_judged() {
    let mut h = Hands::sit();
    h.press(Key::alt('r'))
        .sees("another try is for a signed child");
    h.press(Key::f(2))
        .key(KeyCode::Tab)
        .key(KeyCode::Tab)
        .typed("1");
    h.press(Key::f(5)).typed("n");
    h.press(Key::ctrl('s'))
        .sees("saved Okafor, Ada: not testable");
    h.sees("second try");
    h.scan("Q-10482").sees("Alt-r second try");
    h.press(Key::alt('r'))
        .sees("try 1")
        .sees("not testable (shy)");
    h.misses("no signs seen");
    // What was begun is a draft, over a restart too.
    h.typed("20");
    let mut h = h.again();
    h.sees("1 draft kept").scan("Q-10482").sees("try 1");
    h.key(KeyCode::Delete)
        .typed("20")
        .enter()
        .typed("25")
        .enter();
    h.sees("Enter signs this try: pass").enter();
    h.sees("saved Okafor, Ada: pass").misses("second try");
    h.scan("Q-10482")
        .sees("try 1")
        .sees("not testable (shy)")
        .sees("20/25");
    let visit = h
        .app
        .day
        .as_ref()
        .unwrap()
        .bench
        .as_ref()
        .unwrap()
        .signed
        .clone()
        .unwrap();
    assert_eq!(visit.earlier_tries.len(), 1);
    assert_eq!(
        visit.readings.signs.as_deref(),
        Some(&[][..]),
        "the signs of the first try stand"
    );
}

#[test]
fn a_second_try_that_is_not_testable_either_is_not_testable_and_no_longer_waits() {
    let mut h = Hands::sit();
    for _ in 0..2 {
        h.scan("Q-10482");
        if h.screen().contains("Alt-r") {
            h.press(Key::alt('r'));
        }
        h.press(Key::f(2));
        h.press(Key::char('1'));
        h.press(Key::f(2)).press(Key::char('1'));
        h.press(Key::ctrl('s'))
            .sees("saved Okafor, Ada: not testable");
    }
    h.misses("second try").sees("not testable");
}

#[test]
fn rows_out_of_sight_are_counted_and_a_signed_child_opens_at_its_top() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("20").enter();
    for title in [
        "stereo",
        "near acuity",
        "color plates",
        "instrument refraction",
        "red reflex",
    ] {
        open(&mut h, title);
    }
    let screen = h.screen();
    assert!(screen.contains("more"), "{screen}");
    open(&mut h, "glasses");
    let screen = h.screen();
    assert!(
        screen.contains('↓') && screen.contains("b glasses broken or lost"),
        "{screen}"
    );
    h.typed("n").press(Key::ctrl('s')).scan("Q-10482");
    let screen = h.screen();
    let rows: Vec<&str> = screen.lines().filter_map(|l| l.split('│').nth(1)).collect();
    assert!(rows[3].contains("glasses"), "{screen}");
    assert!(
        screen.contains("signed · Ctrl-E corrects · Enter next"),
        "{screen}"
    );
}
