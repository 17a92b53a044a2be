//! Who goes first on a worklist, and why.

use std::cmp::Reverse;

use chrono::NaiveDate;

use crate::domain::age::{AgeMonths, spoken};
use crate::domain::outcome::Basis;

use super::{Level, Window};

/// One child who waits.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Waiting {
    /// Whether the finding is an emergency.
    pub emergency: bool,
    /// The date to act by, where a source or a band prints a number of days.
    pub act_by: Option<NaiveDate>,
    /// The band, where one spoke.
    pub band: Option<Level>,
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
    key: Key,
    /// The reasons, each in words.
    pub reasons: Vec<String>,
}

/// Not an emergency; no date, and the date; the band where no date stands for it; days waited, the
/// treatment window, the condition group.
type Key = (
    bool,
    (bool, Option<NaiveDate>),
    (bool, Option<Level>),
    Reverse<u32>,
    u32,
    u32,
);

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

/// Returns a child's place: emergencies, then the date to act by (the band where there is no date),
/// then the days waited, then the age against the treatment window, then the condition group. An
/// unknown age or group goes with the first; no date goes last.
pub fn order(windows: &[Window], waiting: &Waiting) -> Place {
    let (rank, age) = window(windows, waiting.age);
    let band = waiting.band.filter(|_| waiting.act_by.is_none());
    let mut reasons = Vec::new();
    if waiting.emergency {
        reasons.push("an emergency goes first".to_owned());
    }
    reasons.push(match (waiting.act_by, waiting.band) {
        (Some(date), _) => format!("act by {}", spoken(date)),
        (None, Some(band)) => band.in_words(),
        (None, None) => "no date to act by".to_owned(),
    });
    reasons.push(match waiting.days_waited {
        1 => "waiting 1 day".to_owned(),
        days => format!("waiting {days} days"),
    });
    reasons.push(age);
    reasons.push(waiting.group.map_or_else(
        || "condition group unknown: taken with group 1".to_owned(),
        |group| format!("condition group {group}"),
    ));
    Place {
        key: (
            !waiting.emergency,
            (waiting.act_by.is_none(), waiting.act_by),
            (band.is_none(), band),
            Reverse(waiting.days_waited),
            rank,
            waiting.group.unwrap_or(1),
        ),
        reasons,
    }
}

/// Returns how an age stands to the treatment window, as a rank and in words.
fn window(windows: &[Window], age: Option<AgeMonths>) -> (u32, String) {
    let ranks = || windows.iter().map(|w| w.rank);
    let Some(age) = age else {
        let first = ranks().min().unwrap_or(0);
        return (first, "age unknown: taken with the first".to_owned());
    };
    if windows.is_empty() {
        return (0, format!("{age}: no treatment window is named"));
    }
    match windows.iter().find(|w| w.applies.holds_age(age)) {
        Some(window) => {
            let basis = match window.source.basis {
                Basis::Practice => "common practice",
                _ => &window.source.citation,
            };
            (window.rank, format!("{age}: {} ({basis})", window.words))
        }
        None => (
            ranks().max().map_or(0, |last| last + 1),
            format!("{age}: outside the ages of the treatment window"),
        ),
    }
}
