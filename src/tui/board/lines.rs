//! The board in lines of words with meanings; the screens give them styles, the command line none.

use crate::actions::QueueState;
use crate::actions::board::{Board, Counts, STATES, came, pace};
use crate::domain::age::spoken;
use crate::domain::outcome::OutcomeKind;
use crate::tui::board::stations;
use crate::tui::text::{cut, ends, fit, safe, width, wrap};
use crate::tui::view::wall_clock;

/// What a piece of a line means.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Meaning {
    /// Nothing in particular.
    Plain,
    /// A heading.
    Strong,
    /// There if it is looked for.
    Muted,
    /// Worth a look.
    Attention,
    /// Worth a look before the next child.
    Loud,
    /// The state of a child.
    State(QueueState),
}

/// A line in pieces.
pub type Text = Vec<(Meaning, String)>;

/// How the board is set.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Look {
    /// Columns of the window.
    pub columns: usize,
    /// Whether bars are drawn beside the words.
    pub pictures: bool,
}

/// Returns the whole board.
pub fn lines(board: &Board, look: Look) -> Vec<Text> {
    let mut out = vec![heading(board, look)];
    progress(board, look, &mut out);
    out.push(Text::new());
    classes(board, look, &mut out);
    out.push(Text::new());
    stations::lines(board, look, &mut out);
    out
}

/// Puts a paragraph, wrapped and set in by a blank.
pub(super) fn paragraph(meaning: Meaning, words: &str, look: Look, out: &mut Vec<Text>) {
    for line in wrap(words, look.columns.saturating_sub(2)) {
        out.push(vec![(meaning, format!(" {line}"))]);
    }
}

fn plural(n: usize, one: &str, many: &str) -> String {
    format!("{n} {}", if n == 1 { one } else { many })
}

fn heading(board: &Board, look: Look) -> Text {
    let at = wall_clock(board.now.utc_ms, board.now.offset_minutes);
    let (left, right) = ends(
        &format!(
            " {} · {} · {} · {}",
            safe(&board.day.site_name),
            spoken(board.day.date),
            safe(&board.day.protocol),
            plural(board.stations.len(), "station", "stations"),
        ),
        &format!("as of {at} "),
        look.columns,
    );
    vec![(Meaning::Strong, left), (Meaning::Muted, right)]
}

fn an_hour(pace: pace::Pace) -> String {
    format!("{:.0} an hour", pace.an_hour())
}

fn progress(board: &Board, look: Look, out: &mut Vec<Text>) {
    let counts = &board.whole;
    let (seen, all, to_come) = (counts.seen(), counts.children(), counts.to_come());
    let left = format!(" Seen {seen} of {all}, {to_come} to come");
    let right = board
        .pace
        .recent
        .or(board.pace.whole)
        .map_or_else(String::new, |p| format!("{} ", an_hour(p)));
    let room = look
        .columns
        .saturating_sub(width(&left) + width(&right) + 5);
    let mut line = vec![(Meaning::Plain, left)];
    if look.pictures && room >= 10 && all > 0 {
        let done = room * (all - to_come) / all;
        line.push((Meaning::Plain, format!("  {}", "█".repeat(done))));
        line.push((Meaning::Muted, format!("{}  ", "░".repeat(room - done))));
    } else {
        line.push((Meaning::Plain, "   ".into()));
    }
    line.push((Meaning::Plain, right));
    out.push(line);
    let words = ending(board);
    if !words.is_empty() {
        paragraph(Meaning::Plain, &words, look, out);
    }
    let (due_to_come, due) = board.due;
    if due > 0 {
        let words = format!("Rescreens and returns due: {due_to_come} of {due} still to come.");
        let meaning = if due_to_come > 0 {
            Meaning::Attention
        } else {
            Meaning::Plain
        };
        paragraph(meaning, &words, look, out);
    }
    stations::warnings(board, look, out);
}

/// Says when the day will end, and what that rests on.
fn ending(board: &Board) -> String {
    let clock = |ms| wall_clock(ms, board.now.offset_minutes);
    if board.whole.children() == 0 {
        return "Nobody is on the roster of this day.".into();
    }
    if board.whole.to_come() == 0 {
        return "Nobody is still to come.".into();
    }
    if board.now.date() != Some(board.day.date) {
        return "Pace and end are shown on the day itself.".into();
    }
    let paused = board
        .pace
        .paused_since
        .map_or_else(String::new, |ms| format!(" Nobody since {}.", clock(ms)));
    let Some((soon, late)) = board.ends else {
        return format!(
            "The end is said from {} children signed one by one (practice).{paused}",
            pace::ENOUGH + 1
        );
    };
    let paces = match (board.pace.whole, board.pace.recent) {
        (Some(whole), Some(recent)) => format!(
            " Whole day {}, last half hour at work {}.",
            an_hour(whole),
            an_hour(recent)
        ),
        (Some(whole), None) => format!(" Whole day {}.", an_hour(whole)),
        _ => String::new(),
    };
    format!(
        "At this pace done between {} and {}, breaks not counted (8 days in 10, practice).{paces}{paused}",
        clock(soon),
        clock(late)
    )
}

/// A column of counts: its heading, what it holds, how it is shown.
type Column = (
    &'static str,
    Meaning,
    fn(&Counts, QueueState) -> usize,
    QueueState,
);

fn title(state: QueueState) -> &'static str {
    match state {
        QueueState::GlassesAtHome => "glasses",
        state => state.title(),
    }
}

/// The columns that are always there, and those of further states in which anybody stands.
fn columns(whole: &Counts) -> Vec<Column> {
    let always = |state| {
        !matches!(
            state,
            QueueState::Signed(OutcomeKind::Incomplete | OutcomeKind::Exempt)
                | QueueState::LeftEarly
                | QueueState::NotAttempted
                | QueueState::OptedOut
                | QueueState::UnderCare
        )
    };
    let mut out: Vec<Column> = STATES
        .into_iter()
        .filter(|s| always(*s) || whole.of(*s) > 0)
        .map(|s| -> Column { (title(s), Meaning::State(s), Counts::of, s) })
        .collect();
    out.insert(
        1,
        (
            "seen",
            Meaning::Plain,
            |counts, _| counts.seen(),
            QueueState::ToCome,
        ),
    );
    out
}

/// Sets the table of classes; columns that do not fit stand in a table below it.
fn classes(board: &Board, look: Look, out: &mut Vec<Text>) {
    let columns = columns(&board.whole);
    let longest = board.classes.iter().map(|(title, _)| width(&safe(title)));
    let longest = longest.chain([width("whole day")]).max().unwrap_or(0);
    let least = 8;
    let mut rest = columns.as_slice();
    while !rest.is_empty() {
        let mut used = 1 + least;
        let taken = rest
            .iter()
            .take_while(|c| {
                used += width(c.0) + 2;
                used <= look.columns
            })
            .count()
            .max(1);
        let (here, later) = rest.split_at(taken);
        let cells: usize = here.iter().map(|c| width(c.0) + 2).sum();
        let room = look.columns.saturating_sub(1 + cells);
        let first = longest.min(room.max(least)).min(40);
        let mut head = format!(" {}", fit("class", first));
        for column in here {
            head.push_str("  ");
            head.push_str(column.0);
        }
        out.push(vec![(Meaning::Strong, cut(&head, look.columns))]);
        let first_table = rest.len() == columns.len();
        for (title, counts) in &board.classes {
            // Below the first table only classes that have something to say.
            if !first_table && here.iter().all(|(_, _, of, state)| of(counts, *state) == 0) {
                continue;
            }
            out.push(row(title, counts, here, first, Meaning::Plain));
        }
        out.push(row("whole day", &board.whole, here, first, Meaning::Strong));
        rest = later;
        if !rest.is_empty() {
            out.push(Text::new());
        }
    }
    let came: Vec<&str> = STATES
        .into_iter()
        .filter(|s| came(*s))
        .map(QueueState::title)
        .collect();
    paragraph(
        Meaning::Muted,
        &format!("Seen: {}.", came.join(", ")),
        look,
        out,
    );
}

fn row(title: &str, counts: &Counts, columns: &[Column], first: usize, meaning: Meaning) -> Text {
    let mut line = vec![(meaning, format!(" {}", fit(&safe(title), first)))];
    for (heading, state, of, what) in columns {
        let n = of(counts, *what);
        let (text, meaning) = match n {
            0 => ("·".to_owned(), Meaning::Muted),
            n => (n.to_string(), *state),
        };
        let gap = (width(heading) + 2).saturating_sub(width(&text));
        line.push((Meaning::Plain, " ".repeat(gap)));
        line.push((meaning, text));
    }
    line
}
