//! How many children stand how. The states are never merged.

use crate::actions::views::QueueState;
use crate::domain::outcome::OutcomeKind;

/// Every state a child of a day can be in, in the order of the board.
pub const STATES: [QueueState; 13] = [
    QueueState::ToCome,
    QueueState::Signed(OutcomeKind::Pass),
    QueueState::Signed(OutcomeKind::Rescreen),
    QueueState::Signed(OutcomeKind::Refer),
    QueueState::NotTestable,
    QueueState::Absent,
    QueueState::GlassesAtHome,
    QueueState::Signed(OutcomeKind::Incomplete),
    QueueState::LeftEarly,
    QueueState::NotAttempted,
    QueueState::OptedOut,
    QueueState::UnderCare,
    QueueState::Signed(OutcomeKind::Exempt),
];

/// How many children stand in each state.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct Counts([usize; STATES.len()]);

impl Counts {
    /// Counts a child in.
    pub fn add(&mut self, state: QueueState) {
        if let Some(at) = STATES.iter().position(|s| *s == state) {
            self.0[at] += 1;
        }
    }

    /// Returns how many children stand in a state.
    pub fn of(&self, state: QueueState) -> usize {
        STATES
            .iter()
            .position(|s| *s == state)
            .map_or(0, |at| self.0[at])
    }

    /// Returns how many children there are.
    pub fn children(&self) -> usize {
        self.0.iter().sum()
    }

    /// Returns how many are still to come.
    pub fn to_come(&self) -> usize {
        self.of(QueueState::ToCome)
    }

    /// Returns how many came to a table, whatever came of it.
    pub fn seen(&self) -> usize {
        STATES
            .iter()
            .filter(|s| came(**s))
            .map(|s| self.of(*s))
            .sum()
    }
}

/// Says whether a child in this state came to a table on the day.
pub fn came(state: QueueState) -> bool {
    match state {
        QueueState::Signed(kind) => kind != OutcomeKind::Exempt,
        QueueState::NotTestable | QueueState::GlassesAtHome | QueueState::LeftEarly => true,
        QueueState::ToCome
        | QueueState::Absent
        | QueueState::OptedOut
        | QueueState::UnderCare
        | QueueState::NotAttempted => false,
    }
}
