//! The day board: its figures on a real store, its pictures, its keys through the update loop.

use std::fmt::Write as _;
use std::time::Duration;

use crossterm::event::KeyCode;
use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::{Rng, SeedableRng};
use twoline::actions::board::watch::{Compared, Level, Share, Watch, With};
use twoline::actions::board::{Board, Counts, Pace, STATES, Side, StationRow};
use twoline::actions::{DayInfo, NewDay, QueueState, SignRequest, new_visit_id};
use twoline::clock::Moment;
use twoline::domain::codes::{AcuityMethod, Attempt};
use twoline::domain::field::Field;
use twoline::domain::outcome::OutcomeKind;
use twoline::domain::readings::{ReadingContext, Readings};
use twoline::keys::Key;
use twoline::stats::pace::Paces;
use twoline::tui::app::{Answer, Effect, Message, Request};
use twoline::tui::board::plain;

use super::desk::{Hands, NOW_MS, ROSTER, day, store};
use super::drawn::snapshot;

const BOARD: Key = Key::f(8);

fn info() -> DayInfo {
    DayInfo {
        id: uuid::Uuid::nil(),
        site: "QE".into(),
        site_name: "Quillmere East".into(),
        date: day(),
        protocol: "us-school".into(),
        method: AcuityMethod::Threshold,
        chart: Vec::new(),
        calendar: None,
    }
}

fn counts(of: &[(QueueState, usize)]) -> Counts {
    let mut counts = Counts::default();
    for (state, n) in of {
        (0..*n).for_each(|_| counts.add(*state));
    }
    counts
}

fn station(name: &str, seen: usize, hits: u64, of: u64, watch: Watch) -> StationRow {
    let moment = Moment {
        utc_ms: NOW_MS - 60_000,
        offset_minutes: 0,
    };
    StationRow {
        name: name.into(),
        seen,
        judged: of,
        hits,
        pace: Paces::default(),
        last: Some(moment),
        watch,
    }
}

fn compared(hits: u64, of: u64, passed: Option<(Level, Side)>) -> Watch {
    Watch::Compared(Compared {
        share: Share { hits, of },
        expected: of as f64 * 0.15,
        gentle: (of / 12, of / 4),
        strong: (of / 20, of / 3),
        funnel: (0.05, 0.28),
        with: With::Today,
        passed,
    })
}

/// A full morning, all of it invented.
fn morning(classes: &[&str]) -> Board {
    use QueueState as Q;
    let pass = Q::Signed(OutcomeKind::Pass);
    let of_class = |i: usize| {
        counts(&[
            (Q::ToCome, i * 6),
            (pass, 19 - 5 * i.min(3)),
            (Q::Signed(OutcomeKind::Rescreen), 3 - i.min(2)),
            (Q::Signed(OutcomeKind::Refer), 1),
            (Q::NotTestable, usize::from(i == 0)),
            (Q::Absent, i % 2),
            (Q::GlassesAtHome, i / 2),
            (Q::Signed(OutcomeKind::Incomplete), usize::from(i == 1)),
            (Q::LeftEarly, usize::from(i == 2)),
        ])
    };
    let classes: Vec<(String, Counts)> = classes
        .iter()
        .enumerate()
        .map(|(i, name)| ((*name).to_owned(), of_class(i)))
        .collect();
    let mut whole = Counts::default();
    for (_, c) in &classes {
        for state in STATES {
            (0..c.of(state)).for_each(|_| whole.add(state));
        }
    }
    let pace = |gaps, minutes: i64| {
        Some(Pace {
            gaps,
            working_ms: minutes * 60_000,
        })
    };
    let strong = Some((Level::Strong, Side::Above));
    Board {
        day: info(),
        now: Moment {
            utc_ms: NOW_MS,
            offset_minutes: 0,
        },
        whole,
        classes,
        stations: vec![
            station("east", 58, 9, 55, compared(9, 55, None)),
            station("west", 61, 25, 60, compared(25, 60, strong)),
            station(
                "the stage, behind the curtain",
                40,
                2,
                40,
                compared(2, 40, Some((Level::Gentle, Side::Below))),
            ),
            station("講堂", 12, 1, 12, Watch::TooFew),
            station("library", 30, 3, 30, Watch::Alone),
        ],
        due: (2, 5),
        pace: Paces {
            whole: pace(76, 120),
            recent: pace(20, 29),
            paused_since: None,
        },
        ends: Some((NOW_MS + 45 * 60_000, NOW_MS + 75 * 60_000)),
    }
}

/// Hands on the board page with a board of our own.
fn at(mut board: Board) -> Hands {
    let mut h = Hands::sit();
    h.held = Some(Vec::new());
    h.press(BOARD);
    board.day.id = h.app.day.as_ref().unwrap().info.id;
    h.answer(Answer::Board(Box::new(board)));
    h
}

#[test]
fn the_board_at_each_size() {
    let h = at(morning(&[
        "1A",
        "1B",
        "1C",
        "KG Sonnenblumen am Nachmittag",
        "王老師",
    ]));
    for (columns, rows) in [(80, 24), (120, 36), (200, 60)] {
        snapshot(
            &format!("board_{columns}x{rows}"),
            &h.screen_at(columns, rows),
        );
    }
}

#[test]
fn the_end_of_the_board_is_reached_by_scrolling() {
    let mut h = at(morning(&["1A", "1B", "1C"]));
    h.key(KeyCode::End);
    snapshot("board_end_80x24", &h.screen());
    let end = h.screen();
    h.key(KeyCode::PageDown).key(KeyCode::Up);
    assert_ne!(end, h.screen(), "one line up from the end is seen at once");
    h.key(KeyCode::Home).sees("Seen");
    h.key(KeyCode::PageDown).key(KeyCode::Up).key(KeyCode::Down);
}

#[test]
fn without_color_the_board_says_the_same() {
    let mut h = at(morning(&["1A", "1B", "1C"]));
    let colored = h.screen_at(120, 36);
    h.without_color();
    assert_eq!(colored, h.screen_at(120, 36));
    for words in [
        "far more",
        "fewer",
        "distance, light, covering, chart",
        "peeking",
    ] {
        assert!(colored.contains(words), "{words}\n{colored}");
    }
}

#[test]
fn no_line_is_wider_than_the_window_and_no_size_crashes() {
    let long = "The class with a name that somebody pasted from a letter, all of it, to the end";
    let board = morning(&[long, "", "صف الأول", "Le\u{301}a's"]);
    for columns in (40..=250).step_by(7) {
        for line in plain(&board, columns) {
            let wide = unicode_width::UnicodeWidthStr::width(line.as_str());
            assert!(columns < 80 || wide <= columns, "{columns}: {wide} {line}");
        }
    }
    let h = at(board);
    for columns in (80..=250).step_by(17) {
        for rows in (24..=70).step_by(9) {
            let _ = h.screen_at(columns, rows);
        }
    }
}

#[test]
fn an_empty_day_and_a_day_with_no_class_have_a_board() {
    let header = "child_id,family_name,given_name,dob,grade,site\n";
    let (mut desk, _folder) = store(ROSTER, AcuityMethod::Threshold);
    desk.add_site("QW", "Quillmere West").unwrap();
    let west = desk
        .open_day(NewDay {
            site: "QW".into(),
            date: day(),
            protocol: "us-school".into(),
            method: AcuityMethod::Threshold,
        })
        .unwrap();
    let empty = desk.board(&west).unwrap();
    assert_eq!(empty.whole.children(), 0);
    let text = plain(&empty, 80).join("\n");
    assert!(text.contains("Nobody is on the roster"), "{text}");
    assert!(text.contains("No station has signed"), "{text}");

    let roster =
        format!("{header}Q-1,Okafor,Ada,2020-09-01,1,QE\nQ-2,Sands,Oliver,2020-06-01,,QE\n");
    let (desk, _folder) = store(&roster, AcuityMethod::Threshold);
    let board = desk.board(&desk.days().unwrap()[0]).unwrap();
    let titles: Vec<&str> = board.classes.iter().map(|(t, _)| t.as_str()).collect();
    assert_eq!(titles, ["no class", "grade 01"]);
}

#[test]
fn the_board_opens_closes_and_counts_what_was_signed() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("25").enter().enter();
    h.press(BOARD)
        .sees("Seen 1 of 10, 9 to come")
        .sees("from 20 children on");
    h.sees("Esc back").misses("Enter next, or sign");
    h.key(KeyCode::Esc).sees("RIGHT EYE");
    h.typed("20").press(BOARD).press(BOARD);
    h.sees("RIGHT EYE").sees("20");
}

#[test]
fn an_open_board_is_asked_for_again_after_a_signature_and_not_too_often() {
    let mut h = Hands::sit();
    let asks = |h: &mut Hands, after_ms: i64| {
        h.app.session.now_ms += after_ms;
        let effects = h.app.update(Message::Tick);
        let asked = |e: &Effect| matches!(e, Effect::Ask(r) if matches!(**r, Request::Board(_)));
        let n = effects.iter().filter(|e| asked(e)).count();
        (n > 0).then_some(effects)
    };
    assert!(
        asks(&mut h, 300_000).is_none(),
        "nobody looks, nothing was signed"
    );
    h.press(BOARD);
    assert!(asks(&mut h, 1_000).is_none(), "a board is fresh");
    assert!(asks(&mut h, 5_000).is_some());
    assert!(asks(&mut h, 5_000).is_none(), "one is on its way");
    h.key(KeyCode::Esc);
    // The watch goes on while the page is closed, if anything was signed.
    let board = h
        .app
        .update(Message::Answer(Answer::Board(Box::new(morning(&["1A"])))));
    assert!(board.is_empty());
    let mut h = Hands::sit();
    h.typed("20").enter().typed("25").enter().enter();
    assert!(asks(&mut h, 1_000).is_some());
}

#[test]
fn a_station_that_passes_a_limit_is_told_once_on_day() {
    let mut h = Hands::sit();
    let id = h.app.day.as_ref().unwrap().info.id;
    let board = |level| {
        let mut board = morning(&["1A"]);
        board.day.id = id;
        board.stations = vec![station(
            "west",
            61,
            25,
            60,
            compared(25, 60, Some((level, Side::Above))),
        )];
        Answer::Board(Box::new(board))
    };
    let told = "west: more refer or rescreen than expected";
    h.answer(board(Level::Gentle));
    h.sees(told);
    h.key(KeyCode::Tab).misses(told);
    h.answer(board(Level::Gentle));
    h.misses(told);
    h.answer(board(Level::Strong));
    h.sees("west: far more refer");
}

/// Every child of the roster stands in one state and one class, whatever is signed.
#[test]
fn the_sums_agree_with_the_roster() {
    let mut random = ChaCha8Rng::seed_from_u64(20_261_014);
    let mut roster = String::from("child_id,family_name,given_name,dob,grade,class,site,consent\n");
    for i in 0..60 {
        let consent = if i % 9 == 0 { "no" } else { "yes" };
        let class = ["1A", "1B", "", "2A"][i % 4];
        let _ = writeln!(
            roster,
            "Q-{i},Family{i},Ada,2019-06-01,1,{class},QE,{consent}"
        );
    }
    let (mut desk, _folder) = store(&roster, AcuityMethod::Threshold);
    let day = desk.days().unwrap().remove(0);
    let stories: [&[(Field, &str)]; 8] = [
        &[
            (Field::DistanceRight, "20/20"),
            (Field::DistanceLeft, "20/25"),
        ],
        &[
            (Field::DistanceRight, "20/20"),
            (Field::DistanceLeft, "20/80"),
        ],
        &[(Field::Status, "absent")],
        &[(Field::Status, "left_early")],
        &[(Field::Status, "not_attempted")],
        &[(Field::Status, "opted_out")],
        &[(Field::CorrectionWorn, "left_at_home")],
        &[(Field::Testable, "no"), (Field::NotTestableReason, "shy")],
    ];
    for i in 0..60 {
        if random.next_u32().is_multiple_of(3) {
            continue;
        }
        let mut readings = Readings::default();
        for (field, text) in stories[random.next_u32() as usize % stories.len()] {
            readings
                .set(*field, text, ReadingContext::default())
                .unwrap();
        }
        // A story that the protocol refuses is no story of this day.
        let _ = desk.sign(SignRequest {
            day: day.id,
            child_id: format!("Q-{i}"),
            attempt: Attempt::First,
            visit: new_visit_id(),
            remarks: Vec::new(),
            readings,
        });
        let board = desk.board(&day).unwrap();
        let children = desk.day_children(&day).unwrap();
        assert_eq!(board.whole.children(), children.len());
        for state in STATES {
            let n = children.iter().filter(|c| c.state == state).count();
            assert_eq!(board.whole.of(state), n, "{}", state.title());
            let by_class: usize = board.classes.iter().map(|(_, c)| c.of(state)).sum();
            assert_eq!(by_class, n, "{} by class", state.title());
        }
        let at_stations: usize = board.stations.iter().map(|s| s.seen).sum();
        assert_eq!(at_stations, board.whole.seen());
    }
    let states = STATES
        .iter()
        .filter(|s| desk.board(&day).unwrap().whole.of(**s) > 0);
    assert!(states.count() >= 6, "the stories were told");
}

#[test]
fn the_pace_of_today_is_that_of_its_signatures() {
    let mut h = Hands::sit();
    h.typed("20").enter().typed("25").enter().enter();
    let desk = h.clerk.into_desk();
    let mut today = desk.days().unwrap().remove(0);
    let now = twoline::clock::now();
    let later = Moment {
        utc_ms: now.utc_ms + Duration::from_hours(1).as_millis() as i64,
        ..now
    };
    let board = desk.board_at(&today, later).unwrap();
    assert_eq!(
        board.pace,
        Paces::default(),
        "the day is long past or to come"
    );
    today.date = later.date().unwrap();
    let text = plain(&desk.board_at(&today, later).unwrap(), 100).join("\n");
    assert!(
        text.contains("from 11 children signed one by one"),
        "{text}"
    );
}
