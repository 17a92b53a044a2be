//! Two rule sets on the same children: who is referred by which, and what moving a threshold does.
//!
//! A criterion's answer only turns once as its threshold is moved from strict to lenient: refer,
//! then perhaps unknown, then pass. So each child's two turning points are found once, by asking
//! the evaluator itself, and a step of a threshold is a comparison of small numbers.

mod column;
mod ladder;

use std::sync::Arc;

use chrono::NaiveDate;

use crate::domain::age::{AgeMonths, Grade};
use crate::domain::codes::{AcuityMethod, Attempt, Consent};
use crate::domain::readings::Readings;
use crate::rules::{Applies, Case, Earlier, RuleSet};

use column::Judged;
pub use column::Movable;

/// A child as it is compared: who, where, and all that is known beside the readings.
#[derive(Debug, Clone, PartialEq)]
pub struct Subject {
    /// The child's id, empty where the file has none.
    pub child_id: String,
    /// The child's name, where it is known.
    pub name: String,
    /// Site, empty where it is not known.
    pub site: String,
    /// Completed months on the screening day.
    pub age: Option<AgeMonths>,
    /// School grade.
    pub grade: Option<Grade>,
    /// The screening day.
    pub on: Option<NaiveDate>,
    /// First visit or rescreen.
    pub attempt: Attempt,
    /// How the chart was read on that day.
    pub method: Option<AcuityMethod>,
    /// Consent as the roster knows it.
    pub consent: Option<Consent>,
    /// Under care, as the roster knows it.
    pub under_care: bool,
    /// The readings.
    pub readings: Readings,
}

impl Subject {
    /// Returns what the evaluator is asked about.
    pub fn case(&self) -> Case<'_> {
        Case {
            age: self.age,
            grade: self.grade,
            on: self.on,
            attempt: self.attempt,
            method: self.method,
            consent: self.consent,
            under_care: self.under_care,
            earlier: Earlier::default(),
            ..Case::new(&self.readings)
        }
    }
}

/// Which of the two sets.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Side {
    /// The first.
    A,
    /// The second.
    B,
}

impl Side {
    /// Both, in order.
    pub const BOTH: [Side; 2] = [Side::A, Side::B];

    fn index(self) -> usize {
        match self {
            Side::A => 0,
            Side::B => 1,
        }
    }
}

/// What one set says of one child.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
#[repr(u8)]
pub enum Verdict {
    /// Nothing refers and nothing required is unknown.
    Pass = 0,
    /// Nothing refers and something required is unknown.
    Incomplete = 1,
    /// A criterion asks for a second screening, and nothing that is unknown could refer instead.
    Rescreen = 2,
    /// A criterion refers.
    Refer = 3,
}

impl Verdict {
    /// Returns the word of the outcome.
    pub fn word(self) -> &'static str {
        match self {
            Verdict::Pass => "pass",
            Verdict::Incomplete => "incomplete",
            Verdict::Rescreen => "rescreen",
            Verdict::Refer => "refer",
        }
    }
}

/// How the two sets judge a group of children.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct Counts {
    /// Children by what the first set (rows) and the second (columns) say, in the order pass,
    /// incomplete, rescreen, refer.
    pub by: [[u64; 4]; 4],
}

impl Counts {
    /// Returns how many children there are.
    pub fn children(&self) -> u64 {
        self.by.iter().flatten().sum()
    }

    /// Returns how many children a set judges so.
    pub fn of(&self, side: Side, verdict: Verdict) -> u64 {
        let at = verdict as usize;
        match side {
            Side::A => self.by[at].iter().sum(),
            Side::B => self.by.iter().map(|row| row[at]).sum(),
        }
    }

    /// Returns how many children only this set refers.
    pub fn only(&self, side: Side) -> u64 {
        let refer = Verdict::Refer as usize;
        (0..refer)
            .map(|other| match side {
                Side::A => self.by[refer][other],
                Side::B => self.by[other][refer],
            })
            .sum()
    }

    /// Returns how many of those only this set refers the other one could not answer for.
    pub fn only_unanswered(&self, side: Side) -> u64 {
        let (refer, open) = (Verdict::Refer as usize, Verdict::Incomplete as usize);
        match side {
            Side::A => self.by[refer][open],
            Side::B => self.by[open][refer],
        }
    }

    /// Returns how many more children the second set refers than the first (fewer is negative).
    pub fn more(&self) -> i64 {
        self.of(Side::B, Verdict::Refer) as i64 - self.of(Side::A, Verdict::Refer) as i64
    }

    fn add(&mut self, a: Verdict, b: Verdict) {
        self.by[a as usize][b as usize] += 1;
    }
}

/// Counts of all children, by age band and by site.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Tally {
    /// All of them.
    pub all: Counts,
    /// By age band, youngest first; a band nobody is in is left out.
    pub by_age: Vec<(String, Counts)>,
    /// By site in order of its name.
    pub by_site: Vec<(String, Counts)>,
    /// For each set: children whose eyes differ by more than its limit along one meridian while
    /// their spherical equivalents agree, which does not refer. None where the set does not compare
    /// spherical equivalents.
    pub meridional: [Option<u64>; 2],
}

/// A child on whom the two sets part.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Flip {
    /// Its place in the list that was compared.
    pub place: usize,
    /// What the first set says.
    pub a: Verdict,
    /// What the second set says.
    pub b: Verdict,
}

/// Two rule sets and the children they are compared on, ready to be asked again and again.
#[derive(Debug, Clone)]
pub struct Comparison {
    sides: [Judged; 2],
    ages: Vec<String>,
    sites: Vec<String>,
    age_of: Vec<u16>,
    site_of: Vec<u16>,
}

/// Ages at which a new row begins, where no set has a bound there.
const USUAL_BOUNDS: [u32; 5] = [36, 48, 60, 72, 144];

impl Comparison {
    /// Judges every child by both sets.
    pub fn new(a: &RuleSet, b: &RuleSet, subjects: &[Subject]) -> Comparison {
        let bounds = bounds([a, b]);
        let mut sites: Vec<String> = subjects.iter().map(|s| s.site.clone()).collect();
        sites.sort_unstable();
        sites.dedup();
        let site_of = subjects
            .iter()
            .map(|s| sites.binary_search(&s.site).unwrap_or(0) as u16)
            .collect();
        let age_of = subjects
            .iter()
            .map(|s| match s.age {
                Some(age) => bounds.partition_point(|b| *b <= age.0) as u16,
                None => bounds.len() as u16 + 1,
            })
            .collect();
        Comparison {
            sides: [Judged::new(a, subjects), Judged::new(b, subjects)],
            ages: age_names(&bounds),
            sites,
            age_of,
            site_of,
        }
    }

    /// Returns the ids of the two sets.
    pub fn ids(&self) -> [Arc<str>; 2] {
        [0, 1].map(|i| Arc::clone(&self.sides[i].set().id))
    }

    /// Returns a set with its thresholds where they were moved to.
    pub fn set(&self, side: Side) -> &RuleSet {
        self.sides[side.index()].set()
    }

    /// Returns the thresholds of a set that can be moved.
    pub fn movable(&self, side: Side) -> Vec<Movable> {
        self.sides[side.index()].movable()
    }

    /// Moves a threshold by so many rungs, positive toward lenient; says whether it moved.
    pub fn step(&mut self, side: Side, threshold: usize, by: isize) -> bool {
        self.sides[side.index()].step(threshold, by)
    }

    /// Puts every threshold of a set back.
    pub fn reset(&mut self, side: Side) {
        self.sides[side.index()].reset();
    }

    /// Returns what a set says of each child, in the order they were given.
    pub fn verdicts(&self, side: Side) -> impl Iterator<Item = Verdict> {
        self.sides[side.index()].verdicts()
    }

    /// Counts.
    pub fn tally(&self) -> Tally {
        let mut by_age = vec![Counts::default(); self.ages.len()];
        let mut by_site = vec![Counts::default(); self.sites.len()];
        let both = self.verdicts(Side::A).zip(self.verdicts(Side::B));
        for (i, (a, b)) in both.enumerate() {
            by_age[usize::from(self.age_of[i])].add(a, b);
            by_site[usize::from(self.site_of[i])].add(a, b);
        }
        let mut all = Counts::default();
        for counts in &by_age {
            for (total, row) in all.by.iter_mut().flatten().zip(counts.by.iter().flatten()) {
                *total += row;
            }
        }
        let named = |names: &[String], counts: Vec<Counts>| {
            names
                .iter()
                .cloned()
                .zip(counts)
                .filter(|(_, c)| c.children() > 0)
                .collect()
        };
        Tally {
            all,
            by_age: named(&self.ages, by_age),
            by_site: named(&self.sites, by_site),
            meridional: [self.sides[0].meridional(), self.sides[1].meridional()],
        }
    }

    /// Returns every child whom one set refers and the other does not, in the order given.
    pub fn flips(&self) -> Vec<Flip> {
        self.verdicts(Side::A)
            .zip(self.verdicts(Side::B))
            .enumerate()
            .filter(|(_, (a, b))| (*a == Verdict::Refer) != (*b == Verdict::Refer))
            .map(|(place, (a, b))| Flip { place, a, b })
            .collect()
    }
}

fn bounds(sets: [&RuleSet; 2]) -> Vec<u32> {
    let mut bounds: Vec<u32> = sets
        .iter()
        .flat_map(|set| &set.criteria)
        .filter_map(|c| match c.applies {
            Applies::Ages { from, to } => Some([Some(from), to]),
            _ => None,
        })
        .flatten()
        .flatten()
        .chain(USUAL_BOUNDS)
        .filter(|b| *b > 0)
        .collect();
    bounds.sort_unstable();
    bounds.dedup();
    bounds
}

fn age_names(bounds: &[u32]) -> Vec<String> {
    let mut names = Vec::with_capacity(bounds.len() + 2);
    let mut from = 0;
    for to in bounds.iter().copied().map(Some).chain([None]) {
        names.push(Applies::Ages { from, to }.to_string());
        from = to.unwrap_or(from);
    }
    names.push("age not known".to_owned());
    names
}
