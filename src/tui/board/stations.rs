//! The stations of the board, and the words of the station watch: what to look at, never whose fault.

use crate::actions::board::watch::{Compared, ENOUGH, Level, Watch, With};
use crate::actions::board::{Board, Side, StationRow};
use crate::tui::board::lines::{Look, Meaning, Text, paragraph};
use crate::tui::text::{cut, fit, safe, width};
use crate::tui::view::wall_clock;

/// Columns of the figures beside a station's name, the scale left out.
const FIGURES: usize = 66;

/// A scale narrower than this stands on a line of its own.
const NARROW: usize = 16;

const HIGH: &str = "distance, light, covering, chart";
const LOW: &str = "peeking through fingers or past the cover, chart too near, rows pointed at";

/// Puts the stations.
pub(super) fn lines(board: &Board, look: Look, out: &mut Vec<Text>) {
    if board.stations.is_empty() {
        paragraph(
            Meaning::Muted,
            "No station has signed a visit of this day.",
            look,
            out,
        );
        return;
    }
    let longest = board.stations.iter().map(|s| width(&safe(&s.name)));
    let scale = if look.pictures {
        Some(look.columns.saturating_sub(FIGURES + 12).min(60)).filter(|s| *s >= NARROW)
    } else {
        None
    };
    let first = longest.chain([width("station")]).max().unwrap_or(0).min(
        look.columns
            .saturating_sub(FIGURES + scale.unwrap_or(0))
            .max(8),
    );
    let most = board.stations.iter().map(reach).fold(0.2, f64::max);
    out.push(vec![(
        Meaning::Strong,
        cut(
            &format!(
                " {}  seen  an hour   last  refer or rescreen  {}expected",
                fit("station", first),
                scale.map_or(String::new(), |s| format!("{}  ", ruler(s, most)))
            ),
            look.columns,
        ),
    )]);
    for station in &board.stations {
        let hour = station
            .pace
            .recent
            .or(station.pace.whole)
            .map_or("·".to_owned(), |p| format!("{:.0}", p.an_hour()));
        let last = station.last.map_or("·".to_owned(), |at| {
            wall_clock(at.utc_ms, at.offset_minutes)
        });
        let share = match station.judged {
            0 => "·".to_owned(),
            n => format!(
                "{} of {n} {:>5.1}%",
                station.hits,
                station.hits as f64 * 100.0 / n as f64
            ),
        };
        let mut line = vec![(
            Meaning::Plain,
            format!(
                " {}  {:>4}  {hour:>7}  {last:>5}  {share:>17}  ",
                fit(&safe(&station.name), first),
                station.seen
            ),
        )];
        if let Some(scale) = scale {
            line.push((Meaning::Plain, format!("{}  ", plot(station, scale, most))));
        }
        line.push(expected(station));
        out.push(line);
        if look.pictures && scale.is_none() && matches!(station.watch, Watch::Compared(_)) {
            let end = percent(most);
            let columns = look.columns.saturating_sub(first + width(&end) + 9);
            out.push(vec![
                (Meaning::Muted, format!("{}0% ", " ".repeat(first + 3))),
                (Meaning::Plain, plot(station, columns, most)),
                (Meaning::Muted, format!(" {end}")),
            ]);
        }
    }
    for station in &board.stations {
        if let Watch::Compared(compared) = &station.watch
            && let Some((level, side)) = compared.passed
        {
            let words = advice(station, compared, level, side);
            paragraph(meaning(level), &words, look, out);
        }
    }
    footing(board, look, out);
}

/// Returns the largest share that a station's scale must hold.
fn reach(station: &StationRow) -> f64 {
    match &station.watch {
        Watch::Compared(c) => {
            let own = c.share.hits as f64 / c.share.of.max(1) as f64;
            own.max(c.strong.1 as f64 / c.share.of.max(1) as f64)
        }
        _ => 0.0,
    }
}

fn percent(share: f64) -> String {
    format!("{:.0}%", share * 100.0)
}

/// Returns the ends of the scale.
fn ruler(columns: usize, most: f64) -> String {
    let end = percent(most);
    format!("0%{end:>rest$}", rest = columns.saturating_sub(2))
}

/// Puts a line for each station that is outside its limits: the details stand below.
pub(super) fn warnings(board: &Board, look: Look, out: &mut Vec<Text>) {
    for station in &board.stations {
        if let Watch::Compared(compared) = &station.watch
            && let Some((level, side)) = compared.passed
        {
            let words = format!(
                "{}: {} refer or rescreen than expected; below stands what to check.",
                safe(&station.name),
                word(level, side)
            );
            paragraph(meaning(level), &words, look, out);
        }
    }
}

fn meaning(level: Level) -> Meaning {
    match level {
        Level::Gentle => Meaning::Attention,
        Level::Strong => Meaning::Loud,
    }
}

/// Returns a station's share on a scale from none to `most`, with what is expected between two bars.
fn plot(station: &StationRow, columns: usize, most: f64) -> String {
    let Watch::Compared(c) = &station.watch else {
        return " ".repeat(columns);
    };
    let at = |count: u64| {
        let share = count as f64 / c.share.of.max(1) as f64 / most;
        ((share * (columns - 1) as f64).round() as usize).min(columns - 1)
    };
    let (low, high, own) = (at(c.gentle.0), at(c.gentle.1), at(c.share.hits));
    (0..columns)
        .map(|x| match x {
            x if x == own => '●',
            x if x == low && x == high => '┼',
            x if x == low => '├',
            x if x == high => '┤',
            x if x > low && x < high => '─',
            x if x > high && x < own || x < low && x > own => '·',
            _ => ' ',
        })
        .collect()
}

fn expected(station: &StationRow) -> (Meaning, String) {
    match &station.watch {
        Watch::TooFew => (Meaning::Muted, format!("from {ENOUGH} children on")),
        Watch::Alone => (Meaning::Muted, "nothing to compare".into()),
        Watch::Compared(c) => {
            let range = format!("{} to {}", c.gentle.0, c.gentle.1);
            match c.passed {
                None => (Meaning::Plain, range),
                Some((level, side)) => (meaning(level), format!("{range}: {}", word(level, side))),
            }
        }
    }
}

fn word(level: Level, side: Side) -> &'static str {
    match (level, side) {
        (Level::Gentle, Side::Above) => "more",
        (Level::Strong, Side::Above) => "far more",
        (Level::Gentle, _) => "fewer",
        (Level::Strong, _) => "far fewer",
    }
}

/// Says in one line, on Day, that a station has passed a limit.
pub(super) fn notice(station: &StationRow, compared: &Compared) -> String {
    let (level, side) = compared.passed.unwrap_or((Level::Gentle, Side::Above));
    format!(
        "{}: {} refer or rescreen than expected; F8 says what to check",
        safe(&station.name),
        word(level, side)
    )
}

/// Says what was found at a station and what to look at.
fn advice(station: &StationRow, c: &Compared, level: Level, side: Side) -> String {
    let (within, confidence) = match level {
        Level::Gentle => (c.gentle, "95%"),
        Level::Strong => (c.strong, "99.8%"),
    };
    let look = match level {
        Level::Gentle => "It may be chance. Worth a look",
        Level::Strong => "Check before the next child",
    };
    let check = if side == Side::Above { HIGH } else { LOW };
    format!(
        "{}: {} of {} refer or rescreen, {} than the {:.1} expected; chance alone leaves {} to {} \
         ({confidence} limits). {look}: {check}.",
        safe(&station.name),
        c.share.hits,
        c.share.of,
        word(level, side),
        c.expected,
        within.0,
        within.1,
    )
}

/// Says what the comparison rests on.
fn footing(board: &Board, look: Look, out: &mut Vec<Text>) {
    let mut words = Vec::new();
    let with = |wanted: With| {
        board.stations.iter().any(
            |s| matches!(&s.watch, Watch::Compared(c) if c.with == wanted || c.with == With::Both),
        )
    };
    if with(With::Today) {
        words.push(
            "Expected: what the day's other stations would give for children of the same grade \
             and test (95% limits)."
                .to_owned(),
        );
    }
    if with(With::Earlier) {
        words.push(
            "Expected from earlier days of this protocol, for children of the same grade and test, \
             where no other station of the day did the test (95% limits)."
                .to_owned(),
        );
    }
    if board.stations.iter().any(|s| s.watch == Watch::Alone) {
        words.push(format!(
            "Nothing to compare: fewer than {ENOUGH} children with the same test at other stations, \
             or on earlier days of this protocol."
        ));
    }
    match board.compared() {
        0 | 1 => {}
        n => words.push(format!(
            "Of {n} stations at least one passes its limits by chance alone on about {:.0} days in \
             100, and on more when it is looked at all day long.",
            (1.0 - 0.95_f64.powi(n as i32)) * 100.0
        )),
    }
    words.push(format!(
        "A station is compared from {ENOUGH} children on (practice); readings count, not testable and \
         glasses at home do not. This board knows the entries of this laptop and of the packets it read."
    ));
    paragraph(Meaning::Muted, &words.join(" "), look, out);
}
