//! A station with one test, a masked one, a discreet screen, the chart on the wall.

use crossterm::event::KeyCode;
use twoline::actions::{
    Desk, DeskOptions, ForJoin, Kdf, NewChart, Secret, SignRequest, join, new_visit_id,
};
use twoline::domain::codes::{AcuityMethod, Attempt};
use twoline::domain::field::Field;
use twoline::domain::readings::{ReadingContext, Readings};
use twoline::keys::Key;

use super::desk::{Hands, ROSTER, day, store};

/// Another station of the same programme.
fn joined(h: &Hands, name: &str) -> Desk {
    let file = h.folder.path().join(format!("for-{name}.packet"));
    let options = DeskOptions {
        today: Some(day()),
        ..DeskOptions::default()
    };
    let first = Desk::open_to_read(&h.folder.path().join("store"), &Secret::None, &options);
    first
        .unwrap()
        .write_packet(&file, &ForJoin::No, false)
        .unwrap();
    let how = (name, Secret::None, Kdf::test());
    let dir = h.folder.path().join(name);
    let (desk, _, _) = join(&dir, &file, &Secret::None, how, &options).unwrap();
    desk
}

fn signs(desk: &mut Desk, child: &str, values: &[(Field, &str)]) {
    let mut readings = Readings::default();
    for (field, text) in values {
        readings
            .set(*field, text, ReadingContext::default())
            .unwrap();
    }
    let request = SignRequest {
        day: desk.days().unwrap()[0].id,
        child_id: child.into(),
        attempt: Attempt::First,
        visit: new_visit_id(),
        readings,
        remarks: Vec::new(),
    };
    desk.sign(request).unwrap();
}

/// Reads what another station signed, and sits down again.
fn reads(h: Hands, other: &Desk) -> Hands {
    let Hands { clerk, folder, .. } = h;
    clerk.keeper().flush().unwrap();
    let mut desk = clerk.into_desk();
    let file = folder.path().join("other.packet");
    other.write_packet(&file, &ForJoin::No, true).unwrap();
    desk.read_packet(&file, |_, _| {}).unwrap();
    Hands::with(desk, folder)
}

const CHART: [(Field, &str); 4] = [
    (Field::CorrectionWorn, "none"),
    (Field::DistanceRight, "20/20"),
    (Field::DistanceLeft, "20/63"),
    (Field::Signs, "none"),
];

/// What another station signed neither hides a draft nor stands against this station's own part.
#[test]
fn a_station_adds_its_part_to_what_another_one_signed() {
    let mut h = Hands::sit();
    set(&mut h, "instrument", "yes", "");
    h.sees("OKAFOR, Ada").typed("+1.00").enter();
    let mut west = joined(&h, "west");
    signs(&mut west, "Q-10482", &CHART);
    signs(&mut west, "Q-10484", &CHART);
    signs(
        &mut west,
        "Q-10488",
        &[(Field::CorrectionWorn, "none"), (Field::Status, "absent")],
    );
    let mut h = reads(h, &west);
    // The queue and the bench of a masked station tell nothing of it.
    h.press(Key::alt('l'))
        .sees("seen")
        .sees("absent")
        .misses("refer");
    h.scan("Q-10482")
        .sees("+1.00")
        .sees("sphere")
        .misses("signed ·")
        .misses("20/63")
        .misses("REFER");
    h.press(Key::f(11)).typed("petit").sees("Petit, Léa");
    h.sees("seen").misses("refer").key(KeyCode::Esc);
    h.key(KeyCode::Tab).key(KeyCode::Tab);
    h.typed("+1.25").enter().typed("0").enter().enter();
    h.press(Key::ctrl('s')).sees("saved Okafor, Ada");
    h.scan("Q-10482").sees("signed ·").sees("20/63");
    // Without a draft its own group is empty.
    h.scan("Q-10484").sees("sphere").misses("signed ·");
    h.typed("+0.50").enter().typed("0").enter().enter();
    h.typed("+0.75").enter().typed("0").enter().enter();
    h.press(Key::ctrl('s')).sees("saved Petit, Léa");
    // Nobody tests a child who is absent.
    h.scan("Q-10488").sees("signed ·");
    let desk = h.clerk.into_desk();
    let days = desk.days().unwrap();
    for (child, sphere) in [("Q-10482", "+1.25"), ("Q-10484", "+0.75")] {
        let visit = desk.visit(&days[0], child).unwrap().unwrap();
        let get = |field| visit.readings.get(field).unwrap_or_default();
        assert_eq!(get(Field::SphereLeft), sphere);
        assert_eq!(get(Field::DistanceLeft), "20/63");
        assert_eq!(visit.signatures.len(), 2);
        assert!(visit.unsettled.is_empty());
    }
}

/// A station for the whole screening sees what was signed, and adds the tests that were not done.
#[test]
fn a_station_of_all_tests_adds_those_that_nobody_signed() {
    let mut h = Hands::sit();
    let mut west = joined(&h, "west");
    let glasses = (Field::CorrectionWorn, "none");
    signs(&mut west, "Q-10482", &[glasses, (Field::Signs, "none")]);
    signs(&mut west, "Q-10484", &CHART);
    h.scan("Q-10484").typed("20").enter().typed("20");
    let mut h = reads(h, &west);
    h.scan("Q-10482")
        .sees("Alt-r adds the tests")
        .press(Key::alt('r'));
    h.sees("what is signed stays")
        .sees("none seen, signed")
        .typed("20")
        .enter()
        .typed("20")
        .sees("PASS")
        .enter()
        .sees("Enter signs this part: pass");
    h.enter().sees("saved Okafor, Ada");
    // One's own draft that says something else is shown; the store does not take it silently.
    h.scan("Q-10484").misses("signed ·").press(Key::ctrl('s'));
    h.sees("Petit, Léa").sees("is signed already");
}

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

/// On a critical-line day what is understood of one eye would tell the pass line before the other eye
/// is entered.
#[test]
fn a_masked_station_on_a_critical_line_day_shows_what_was_typed() {
    for (keys, shown) in [("20", "20"), ("40", "40"), ("+", "+"), ("-", "-")] {
        let mut h = Hands::sit_at(ROSTER, AcuityMethod::CriticalLine);
        set(&mut h, "", "yes", "");
        h.typed(keys);
        let untold = |h: &mut Hands| {
            let screen = h.screen_at(120, 36);
            assert!(screen.contains(&format!(" {shown}")), "{screen}");
            h.misses("or better")
                .misses("worse than")
                .misses(">=")
                .misses("critical line")
                .misses("<20")
                .misses("R↑")
                .misses("R↓");
        };
        untold(&mut h);
        h.app.linear = true;
        untold(&mut h);
        h.enter();
        untold(&mut h);
        h.app.linear = false;
        untold(&mut h);
        h.typed(keys).enter();
        let screen = h.screen_at(120, 36);
        assert!(screen.contains("passes at 6 years"), "{screen}");
    }
    let mut h = Hands::sit_at(ROSTER, AcuityMethod::CriticalLine);
    set(&mut h, "", "yes", "");
    h.typed("+").key(KeyCode::Backspace).misses("or better");
    // The arrows go on from what was typed.
    h.typed("40").key(KeyCode::Down).sees("20/50");
}

#[test]
fn a_discreet_screen_tells_no_outcome_where_a_visit_is_moved_to() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("63").press(Key::ctrl('s'));
    h.sees("refer").press(Key::alt('i'));
    h.press(Key::f(11)).typed("okaf").sees("Okafor, Ada");
    h.sees("seen").misses("refer");
}
