//! Names from a list of strings that break programs, from the roster to every screen and back.

use ratatui::Terminal;
use ratatui::backend::TestBackend;
use twoline::domain::codes::AcuityMethod;
use twoline::domain::formula::unguarded;
use twoline::domain::text::is_unsafe;
use twoline::keys::Key;

use super::desk::{Hands, store};

/// See `tests/data/README.md`.
const STRINGS: &str = include_str!("../../data/naughty_strings/blns.txt");

fn strings() -> Vec<&'static str> {
    STRINGS
        .split('\n')
        .filter(|line| !line.trim().is_empty() && !line.starts_with('#'))
        .collect()
}

/// Writes a roster with such family names and the same given names.
fn roster(names: &[&str]) -> Vec<u8> {
    let mut out = csv::Writer::from_writer(Vec::new());
    out.write_record([
        "child_id",
        "family_name",
        "given_name",
        "dob",
        "grade",
        "class",
        "site",
        "wears_glasses",
    ])
    .unwrap();
    for (i, name) in names.iter().enumerate() {
        let id = format!("N-{i:04}");
        let given = "Ada";
        out.write_record([
            id.as_str(),
            name,
            given,
            "2020-09-01",
            "1",
            "1B",
            "QE",
            "no",
        ])
        .unwrap();
    }
    out.into_inner().unwrap()
}

/// Draws at a size and returns the first character that must not reach a terminal. The mark that
/// settles a right-to-left name is the program's own.
fn unsafe_char(h: &Hands, columns: u16, rows: u16) -> Option<char> {
    let mut terminal = Terminal::new(TestBackend::new(columns, rows)).unwrap();
    terminal.draw(|frame| h.app.draw(frame)).unwrap();
    terminal
        .backend()
        .buffer()
        .content
        .iter()
        .flat_map(|cell| cell.symbol().chars().collect::<Vec<_>>())
        .find(|c| is_unsafe(*c) && *c != '\u{200E}')
}

#[test]
fn naughty_names_go_from_roster_to_screens_to_report_and_back() {
    let (mut desk, folder) = store(super::desk::ROSTER, AcuityMethod::Threshold);
    let all = strings();
    assert!(all.len() > 400, "the list was read");
    let plan = |desk: &mut twoline::actions::Desk, names: &[&str]| {
        desk.plan_roster("naughty.csv", &roster(names), None, None)
    };
    // A name is taken as it is, or its file is refused with the place; nothing between.
    let (taken, refused): (Vec<&str>, Vec<&str>) = all
        .iter()
        .partition(|name| plan(&mut desk, &[**name]).is_ok());
    assert!(taken.len() > 400, "{} of {}", taken.len(), all.len());
    for name in &refused {
        let error = plan(&mut desk, &[*name]).unwrap_err();
        assert!(error.message.contains("naughty.csv"), "{error:?}");
        assert!(
            !error.message.chars().any(|c| c != '\n' && is_unsafe(c)),
            "{error:?}"
        );
    }
    let written = plan(&mut desk, &taken).unwrap();
    let known: Vec<(String, String)> = written
        .roster
        .children
        .iter()
        .map(|c| (c.child_id.clone(), c.family_name.clone()))
        .collect();
    desk.add_roster(&written).unwrap();

    let mut h = Hands::with(desk, folder);
    for (i, (id, _)) in known.iter().enumerate() {
        h.scan(id);
        let sizes = [(80, 24), (120, 36), (200, 60)];
        let (columns, rows) = sizes[i % sizes.len()];
        assert_eq!(unsafe_char(&h, columns, rows), None, "{id} on the bench");
        if i.is_multiple_of(8) {
            h.app.linear = true;
            assert_eq!(unsafe_char(&h, columns, rows), None, "{id} in plain lines");
            h.app.linear = false;
            h.typed("20").enter().typed("25").enter().enter();
            assert_eq!(unsafe_char(&h, columns, rows), None, "{id} saved");
            h.press(Key::alt('2'));
            h.key(crossterm::event::KeyCode::Esc).typed(id).enter();
            assert_eq!(unsafe_char(&h, columns, rows), None, "{id} in Children");
            h.press(Key::alt('1'));
        }
    }

    let desk = h.clerk.into_desk();
    let day = desk.days().unwrap().remove(0);
    for exact in [true, false] {
        let report = desk.day_report(&day, exact).unwrap();
        let text = String::from_utf8(report.bytes).unwrap();
        let mut reader = csv::Reader::from_reader(text.trim_start_matches('\u{FEFF}').as_bytes());
        let headers = reader.headers().unwrap().clone();
        let column = |name: &str| headers.iter().position(|h| h == name).unwrap();
        let (id, family) = (column("child_id"), column("family_name"));
        let mut back = 0;
        for record in reader.records() {
            let record = record.unwrap();
            let Some((_, name)) = known.iter().find(|(k, _)| k == &record[id]) else {
                continue;
            };
            let read = if exact {
                &record[family]
            } else {
                unguarded(&record[family])
            };
            assert_eq!(read, name, "{}", &record[id]);
            back += 1;
        }
        assert!(back >= known.len() / 8, "{back} came back");
    }
}
