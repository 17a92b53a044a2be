//! Styles by meaning. A state is always a word as well, so nothing is lost without color.

use ratatui::style::{Color, Modifier, Style};

use crate::actions::QueueState;
use crate::domain::outcome::{OutcomeKind, Urgency};

/// Which styles a meaning has.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Theme {
    color: bool,
}

impl Theme {
    /// Makes a theme; without color only weight, underline and reverse remain.
    pub fn new(color: bool) -> Theme {
        Theme { color }
    }

    fn pick(self, color: Color) -> Style {
        if self.color {
            Style::new().fg(color)
        } else {
            Style::new()
        }
    }

    /// What has the focus.
    pub fn focus(self) -> Style {
        self.pick(Color::Cyan).add_modifier(Modifier::BOLD)
    }

    /// The row under the cursor: reversed, so that it is seen on any background.
    pub fn selected(self) -> Style {
        Style::new().add_modifier(Modifier::REVERSED)
    }

    /// A pass: never the loudest thing on the screen.
    pub fn pass(self) -> Style {
        self.pick(Color::Green)
    }

    /// Rescreen, incomplete, not testable: somebody comes back to it.
    pub fn attention(self) -> Style {
        self.pick(Color::Yellow)
    }

    /// A referral.
    pub fn refer(self) -> Style {
        self.pick(Color::Magenta).add_modifier(Modifier::BOLD)
    }

    /// An emergency.
    pub fn emergency(self) -> Style {
        if self.color {
            Style::new()
                .fg(Color::White)
                .bg(Color::Red)
                .add_modifier(Modifier::BOLD)
        } else {
            Style::new().add_modifier(Modifier::BOLD | Modifier::REVERSED)
        }
    }

    /// Something that is there if it is looked for.
    pub fn muted(self) -> Style {
        self.pick(Color::DarkGray).add_modifier(if self.color {
            Modifier::empty()
        } else {
            Modifier::DIM
        })
    }

    /// A name, a heading.
    pub fn strong(self) -> Style {
        Style::new().add_modifier(Modifier::BOLD)
    }

    /// An error or a refused value.
    pub fn error(self) -> Style {
        self.pick(Color::Red)
    }

    /// The style of an outcome.
    pub fn outcome(self, kind: OutcomeKind, urgency: Option<Urgency>) -> Style {
        match (kind, urgency) {
            (_, Some(Urgency::Emergency)) => self.emergency(),
            (OutcomeKind::Pass, _) => self.pass(),
            (OutcomeKind::Refer, _) => self.refer(),
            (OutcomeKind::Rescreen | OutcomeKind::Incomplete, _) => self.attention(),
            (OutcomeKind::Exempt, _) => self.muted(),
        }
    }

    /// The style of a child's state in the list.
    pub fn state(self, state: QueueState) -> Style {
        match state {
            QueueState::ToCome => Style::new(),
            QueueState::Signed(kind) => self.outcome(kind, None),
            QueueState::NotTestable | QueueState::GlassesAtHome | QueueState::LeftEarly => {
                self.attention()
            }
            _ => self.muted(),
        }
    }
}
