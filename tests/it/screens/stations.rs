//! A station with one test, a masked one, a discreet screen, the chart on the wall.

use crossterm::event::KeyCode;
use twoline::actions::NewChart;
use twoline::domain::codes::AcuityMethod;
use twoline::keys::Key;

use super::desk::{Hands, ROSTER, store};

/// Runs a command of the palette that has no key.
fn palette(h: &mut Hands, words: &str) {
    h.press(Key::ctrl('p')).typed(words).enter();
}

/// Sets the station in its question: task, masked, chart.
fn set(h: &mut Hands, task: &str, masked: &str, chart: &str) {
    palette(h, "masked chart");
    h.typed(task)
        .enter()
        .typed(masked)
        .enter()
        .typed(chart)
        .enter();
}

#[test]
fn a_station_with_a_task_shows_that_test_alone_and_signs_a_part() {
    let mut h = Hands::sit();
    set(&mut h, "instrument", "", "");
    h.sees("station east: instrument")
        .sees("sphere")
        .misses("distance  ");
    h.typed("+1.00").enter().typed("0").enter().enter();
    h.typed("+1.25").enter().typed("0").enter().enter();
    h.sees("Enter signs: part of the visit, instrument")
        .misses("no signs seen");
    h.enter().sees("saved Okafor, Ada");
    set(&mut h, "nonsense", "", "");
    h.sees("expected all, distance");
    h.key(KeyCode::Esc);
    set(&mut h, "all", "", "");
    h.sees("distance  ");
}

#[test]
fn a_masked_station_tells_nothing_until_both_eyes_are_entered() {
    let mut h = Hands::sit();
    set(&mut h, "", "yes", "");
    h.sees("station east: the whole screening, masked")
        .misses("passes at");
    h.typed("20")
        .enter()
        .typed("32")
        .press(Key::ctrl('u'))
        .misses("PASS")
        .misses("RESCREEN")
        .misses("passes at");
    h.sees("this station is masked");
    h.key(KeyCode::Delete)
        .press(Key::f(4))
        .sees("reasons are shown when both eyes");
    h.typed("32").sees("RESCREEN").sees("passes at");
    h.press(Key::alt('2')).sees("shows no child's history");
    h.press(Key::alt('3'))
        .sees("nobody's telephone")
        .sees("OKAFOR");
}

#[test]
fn a_masked_station_does_not_tell_the_pass_line_by_its_first_arrow() {
    let mut h = Hands::sit();
    set(&mut h, "", "yes", "");
    h.key(KeyCode::Down).sees("20/20");
}

#[test]
fn a_discreet_screen_keeps_outcomes_reasons_and_notes_back() {
    let mut h = Hands::sit();
    h.typed("20")
        .enter()
        .typed("32")
        .press(Key::alt('o'))
        .typed("cried")
        .enter();
    h.sees("RESCREEN").sees("cried").press(Key::alt('i'));
    h.misses("RESCREEN")
        .misses("cried")
        .misses("two steps")
        .misses("passes at");
    h.press(Key::f(4)).sees("RESCREEN").key(KeyCode::Esc);
    h.press(Key::ctrl('s'))
        .sees("saved Okafor, Ada")
        .misses("rescreen");
    h.press(Key::alt('l')).sees("seen").misses("rescreen");
    h.press(Key::alt('i')).sees("rescreen");
}

#[test]
fn the_chart_on_the_wall_gives_letters_distance_and_lines() {
    let (mut desk, folder) = store(ROSTER, AcuityMethod::Threshold);
    let lines = [
        "20/200", "20/100", "20/70", "20/50", "20/40", "20/30", "20/20",
    ];
    desk.add_chart(&NewChart {
        name: "Wall".into(),
        letters: true,
        crowded: false,
        letters_per_line: 4,
        distance_mm: 6096,
        lines: lines.map(str::to_owned).to_vec(),
    })
    .unwrap();
    let mut h = Hands::with(desk, folder);
    set(&mut h, "", "", "no such chart");
    h.sees("there is no chart").sees("known: Wall");
    set(&mut h, "", "", "wall");
    h.sees("chart Wall").sees("20/30").sees("20/70");
    // The arrows go along the lines of this chart.
    h.key(KeyCode::Up).sees("20/20").enter();
    h.key(KeyCode::Down).key(KeyCode::Down).sees("20/40");
    h.key(KeyCode::Delete)
        .typed("40-5")
        .enter()
        .press(Key::ctrl('s'));
    h.sees("-1 to -4 or +1 to +4");
    h.key(KeyCode::Delete).typed("30").enter();
    h.press(Key::f(4))
        .sees("neighbouring lines on this chart")
        .key(KeyCode::Esc);
    // Read at half of the chart's distance: only that is asked for.
    h.press(Key::alt('t'))
        .typed("6")
        .misses("chart at")
        .typed("10");
    h.sees("nearer: each line counts as a worse one").enter();
    h.press(Key::ctrl('s')).sees("saved Okafor, Ada");
    h.scan("Q-10482");
    let readings = h
        .app
        .day
        .as_ref()
        .unwrap()
        .bench
        .as_ref()
        .unwrap()
        .readings
        .clone();
    let recorded: Vec<String> = readings
        .recorded()
        .into_iter()
        .map(|(f, v)| format!("{}={v}", f.word()))
        .collect();
    for wanted in [
        "letters_per_line=4",
        "chart_distance_ft=20",
        "used_distance_ft=10",
    ] {
        assert!(
            recorded.contains(&wanted.to_owned()),
            "{wanted} in {recorded:?}"
        );
    }
}
