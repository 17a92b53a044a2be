//! Quillmere: an invented school district part-way through a screening day.
//!
//! Everything here is made by chance from a seed: the same seed and day give the same district.
//! Names are ordinary given and family names combined at random, telephone numbers lie in the range
//! that is kept free for fiction (555-01xx), mail addresses end in `example.invalid`.

mod names;
mod populate;
mod random;
mod roster;
mod samples;
mod sheet;
mod visits;

use chrono::{Days, NaiveDate};

use crate::domain::codes::Attempt;
use crate::domain::readings::Readings;
use crate::domain::roster::RosterChild;

pub use populate::populate;
pub use samples::{SAMPLE_DAY, sample_results, sample_roster};

/// The seed of the demonstration when none is given.
pub const DEFAULT_SEED: u64 = 20_261_014;

/// An invented district on its screening day.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct District {
    /// Name of the screening programme.
    pub programme: String,
    /// Schools, the one that is screened today first.
    pub sites: Vec<Site>,
    /// Who records.
    pub screeners: Vec<Screener>,
    /// Everybody on the roster, by site, grade and class.
    pub children: Vec<RosterChild>,
    /// The protocol of both days.
    pub protocol: &'static str,
    /// A day two weeks before, on which a few children of the same school were screened.
    pub earlier_day: NaiveDate,
    /// The visits of that day; two of them lead to a rescreen that is due today.
    pub earlier_visits: Vec<DemoVisit>,
    /// Today.
    pub day: NaiveDate,
    /// The visits recorded so far today, in the order in which the children came.
    pub visits: Vec<DemoVisit>,
}

/// A school or preschool.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Site {
    /// The code in the roster.
    pub code: &'static str,
    /// Its name.
    pub name: &'static str,
}

/// A person who records.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Screener {
    /// Initials, by which visits name the person.
    pub initials: &'static str,
    /// Full name.
    pub name: &'static str,
}

/// One visit as it was recorded.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct DemoVisit {
    /// The child's id in the roster.
    pub child_id: String,
    /// First visit or rescreen.
    pub attempt: Attempt,
    /// What was recorded.
    pub readings: Readings,
    /// The table it was recorded at.
    pub station: &'static str,
    /// Initials of the screener.
    pub screener: &'static str,
}

/// Returns the district of a seed, part-way through the screening day.
pub fn generate(seed: u64, day: NaiveDate) -> District {
    let mut random = random::Random::new(seed);
    let earlier_day = day.checked_sub_days(Days::new(14)).unwrap_or(day);
    let children = roster::children(&mut random, day);
    let told = visits::told(&mut random, &children, day);
    District {
        programme: "Quillmere District Vision Screening".into(),
        sites: roster::SITES.to_vec(),
        screeners: visits::SCREENERS.to_vec(),
        children,
        protocol: "us-school",
        earlier_day,
        earlier_visits: told.earlier,
        day,
        visits: told.today.into_iter().map(|(_, visit)| visit).collect(),
    }
}
