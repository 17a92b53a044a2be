//! The tour of the demo: one line above the foot, each step waits until the person has done it.

use crate::domain::codes::Status;
use crate::domain::field::Field;
use crate::domain::outcome::OutcomeKind;
use crate::keys::Command;
use crate::tui::app::{App, Tone};
use crate::tui::day::bench::Bench;
use crate::tui::prompt::Ask;

/// What each step asks for, in a line that fits beside its number.
const STEPS: [&str; 10] = [
    "find a child: Esc, three letters of a name, Enter",
    "two eyes on the ladder: ↑ Enter, then ↑ Enter",
    "Enter until it signs; the next child comes by itself",
    "a child who does not pass: 50 for both eyes, then sign",
    "F4 shows the whole reason with its source; Esc closes",
    "an eye that cannot be tested: F2 and a reason",
    "a child who is not here: F3, then a",
    "Ctrl-Z takes the last entry back",
    "F8 shows how the day stands; Esc goes back",
    "? shows the keys of where you are; Esc closes",
];

/// Where somebody is in the tour.
#[derive(Debug, Default)]
pub struct Tour {
    step: usize,
    /// The last command that ran in this step.
    last: Option<Command>,
    /// Whether a name was typed into the list.
    sought: bool,
    /// What the last signature of this step came to.
    signed: Option<OutcomeKind>,
}

impl Tour {
    /// Notes a command that ran.
    pub fn ran(&mut self, command: Command) {
        self.last = Some(command);
    }

    /// Notes a confirmed signature.
    pub fn signed(&mut self, kind: OutcomeKind) {
        self.signed = Some(kind);
    }

    /// Returns the line of the step.
    pub fn line(&self) -> String {
        let what = STEPS.get(self.step).copied().unwrap_or_default();
        format!("tour {}/{}: {what}", self.step + 1, STEPS.len())
    }
}

impl App {
    /// Begins the tour, or leaves it.
    pub(crate) fn toggle_tour(&mut self) {
        if self.tour.take().is_some() {
            self.say(Tone::Quiet, "the tour is left; Alt-g begins it again");
        } else if self.session.demo {
            self.begin_tour();
        } else {
            self.say(
                Tone::Attention,
                "the tour is in the demo: twoline demo --tour",
            );
        }
    }

    /// Begins the tour of the demo.
    pub fn begin_tour(&mut self) {
        self.tour = Some(Tour::default());
    }

    /// Goes on when what the step waits for has been done.
    pub(crate) fn tour_on(&mut self) {
        let Some(mut tour) = self.tour.take() else {
            return;
        };
        let day = self.day.as_ref().ok();
        tour.sought |= day.is_some_and(|d| d.in_list() && !d.queue.find().is_empty());
        if self.is_done(&tour) {
            let step = tour.step + 1;
            tour = Tour {
                step,
                ..Tour::default()
            };
        }
        if tour.step < STEPS.len() {
            self.tour = Some(tour);
        } else {
            self.say(
                Tone::Quiet,
                "that was the tour; ? and Ctrl-P know everything else",
            );
        }
    }

    fn is_done(&self, tour: &Tour) -> bool {
        let day = self.day.as_ref().ok();
        let bench = day
            .and_then(|d| d.bench.as_ref())
            .filter(|b| !b.is_signed());
        let page = |command| {
            tour.last == Some(command) && self.prompt.as_ref().is_some_and(|p| p.ask == Ask::Read)
        };
        let asks = |test: &dyn Fn(&Bench) -> bool| bench.is_some_and(test);
        match tour.step {
            0 => tour.sought && day.is_some_and(|d| !d.in_list()),
            1 => asks(&|b| b.readings.distance.both().iter().all(Option::is_some)),
            2 => tour.signed.is_some(),
            3 => matches!(
                tour.signed,
                Some(OutcomeKind::Rescreen | OutcomeKind::Refer)
            ),
            4 => page(Command::Why),
            5 => asks(&|b| {
                [Field::DistanceRight, Field::DistanceLeft]
                    .iter()
                    .any(|f| b.raw(*f).starts_with("NT"))
            }),
            6 => asks(&|b| b.status() == Some(Status::Absent)),
            7 => tour.last == Some(Command::Undo),
            8 => self.board.is_shown(),
            _ => page(Command::Help),
        }
    }
}
