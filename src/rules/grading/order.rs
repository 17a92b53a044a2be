//! Who goes first inside one band, and why.

use std::cmp::Reverse;

use crate::domain::age::AgeMonths;
use crate::domain::outcome::Basis;

use super::{Grading, Level};

/// One child who waits in a band.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Waiting {
    /// The band.
    pub band: Level,
    /// Days since the referral.
    pub days_waited: u32,
    /// Completed months.
    pub age: Option<AgeMonths>,
    /// Condition group, where one is known.
    pub group: Option<u32>,
}

/// Where a child stands, and the reasons in the order in which they were asked. Places compare: the
/// smaller goes first.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Place {
    key: (Level, Reverse<u32>, u32, u32),
    /// The reasons, each in words.
    pub reasons: Vec<String>,
}

impl PartialOrd for Place {
    fn partial_cmp(&self, other: &Place) -> Option<std::cmp::Ordering> {
        Some(self.cmp(other))
    }
}

impl Ord for Place {
    fn cmp(&self, other: &Place) -> std::cmp::Ordering {
        self.key
            .cmp(&other.key)
            .then_with(|| self.reasons.cmp(&other.reasons))
    }
}

/// Returns a child's place by a triage table: the band, then the days waited, then the age against
/// the treatment window, then the condition group. What is unknown goes with the first.
pub fn order(grading: &Grading, waiting: &Waiting) -> Place {
    let window = waiting
        .age
        .and_then(|age| grading.windows.iter().find(|w| w.applies.holds_age(age)));
    let age = match (window, waiting.age) {
        (Some(window), Some(age)) => {
            let basis = match window.source.basis {
                Basis::Practice => "common practice".to_owned(),
                _ => window.source.citation.clone(),
            };
            format!("{age}: {} ({basis})", window.words)
        }
        (None, Some(age)) => format!("{age}: outside the ages of the treatment window"),
        (_, None) => "age unknown: taken with the first".to_owned(),
    };
    let first = grading.windows.iter().map(|w| w.rank).min().unwrap_or(0);
    let last = grading
        .windows
        .iter()
        .map(|w| w.rank + 1)
        .max()
        .unwrap_or(0);
    Place {
        key: (
            waiting.band,
            Reverse(waiting.days_waited),
            match (window, waiting.age) {
                (Some(window), _) => window.rank,
                (None, None) => first,
                (None, Some(_)) => last,
            },
            waiting.group.unwrap_or(1),
        ),
        reasons: vec![
            waiting.band.in_words(),
            match waiting.days_waited {
                1 => "waiting 1 day".to_owned(),
                days => format!("waiting {days} days"),
            },
            age,
            waiting.group.map_or_else(
                || "condition group unknown: taken with group 1".to_owned(),
                |group| format!("condition group {group}"),
            ),
        ],
    }
}
