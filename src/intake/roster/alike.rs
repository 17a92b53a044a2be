//! Children that may be mixed up: pointed out, never merged.

use std::collections::HashMap;

use chrono::NaiveDate;

use crate::domain::roster::RosterChild;
use crate::domain::text::folded;

/// How two children are alike.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum AlikeKind {
    /// Born on one day with the same or nearly the same name: perhaps one child under two ids.
    ProbableDuplicate,
    /// Born on one day with one family name at one site: perhaps twins.
    Twins,
    /// The same name, born on another day or on an unknown one.
    SameName,
}

impl AlikeKind {
    /// Returns the words for people.
    pub fn title(self) -> &'static str {
        match self {
            AlikeKind::ProbableDuplicate => "perhaps one child under two ids",
            AlikeKind::Twins => "perhaps twins",
            AlikeKind::SameName => "same name",
        }
    }
}

/// Two children to look at, by index.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Alike {
    /// Why.
    pub kind: AlikeKind,
    /// The earlier row.
    pub first: usize,
    /// The later row.
    pub second: usize,
}

/// How near two names must be to be called nearly the same (practice: lets one typing mistake pass,
/// and the two given names of twins not).
const NEARLY_SAME: f64 = 0.95;

/// Up to this many children born on one day are all compared with each other; of more, each is
/// compared with its neighbours in the order of names and named with the first that is alike, so
/// that time and list stay linear.
const ALL_PAIRS: usize = 64;
const NEIGHBOURS: usize = 12;

/// How many children of one name are listed one by one; a file full of one name says nothing more.
const SAME_NAMES: usize = 20;

struct Names {
    family: String,
    given: String,
    /// All words of both names in order, so that swapped names look the same.
    tokens: String,
}

impl Names {
    fn of(child: &RosterChild) -> Names {
        let (family, given) = (folded(&child.family_name), folded(&child.given_name));
        let mut words: Vec<&str> = family
            .split(|c: char| !c.is_alphanumeric())
            .chain(given.split(|c: char| !c.is_alphanumeric()))
            .filter(|w| !w.is_empty())
            .collect();
        words.sort_unstable();
        let tokens = words.join(" ");
        Names {
            family,
            given,
            tokens,
        }
    }
}

/// Finds the pairs, in the order of the later row.
pub(super) fn find(children: &[RosterChild]) -> Vec<Alike> {
    let names: Vec<Names> = children.iter().map(Names::of).collect();
    let mut alike = Vec::new();
    let mut by_day: HashMap<NaiveDate, Vec<usize>> = HashMap::new();
    let mut by_name: HashMap<&str, Vec<usize>> = HashMap::new();
    for (i, child) in children.iter().enumerate() {
        if let Some(dob) = child.dob {
            by_day.entry(dob).or_default().push(i);
        }
        if !names[i].tokens.is_empty() {
            by_name.entry(&names[i].tokens).or_default().push(i);
        }
    }
    for mut group in by_day.into_values() {
        let reach = if group.len() > ALL_PAIRS {
            group.sort_by(|a, b| names[*a].tokens.cmp(&names[*b].tokens));
            NEIGHBOURS
        } else {
            group.len()
        };
        let most = if reach == group.len() { reach } else { 1 };
        for (at, &a) in group.iter().enumerate() {
            let found = group.iter().skip(at + 1).take(reach).filter_map(|&b| {
                let same_site = children[a].site == children[b].site;
                born_together(&names[a], &names[b], same_site).map(|kind| pair(kind, a, b))
            });
            alike.extend(found.take(most));
        }
    }
    for group in by_name.into_values() {
        for (at, &a) in group.iter().enumerate().take(SAME_NAMES) {
            for &b in group.iter().skip(at + 1).take(1) {
                if children[a].dob.is_none() || children[a].dob != children[b].dob {
                    alike.push(pair(AlikeKind::SameName, a, b));
                }
            }
        }
    }
    alike.sort_by_key(|found| (found.second, found.first));
    alike
}

fn pair(kind: AlikeKind, a: usize, b: usize) -> Alike {
    Alike {
        kind,
        first: a.min(b),
        second: a.max(b),
    }
}

fn born_together(a: &Names, b: &Names, same_site: bool) -> Option<AlikeKind> {
    if a.tokens == b.tokens {
        return (!a.tokens.is_empty()).then_some(AlikeKind::ProbableDuplicate);
    }
    // One slip leaves one of the two names whole; measuring every pair costs more than reading.
    let one_whole =
        a.family == b.family || a.given == b.given || a.family == b.given || a.given == b.family;
    if !one_whole {
        return None;
    }
    let near = a.tokens.len().abs_diff(b.tokens.len()) <= 2
        && strsim::jaro_winkler(&a.tokens, &b.tokens) >= NEARLY_SAME;
    if a.family == b.family && same_site && !a.family.is_empty() {
        // Twins share a name but one: only a slip of one letter in the given name is doubtful.
        return Some(
            if strsim::damerau_levenshtein(&a.given, &b.given) <= 1 && a.given.len() > 3 {
                AlikeKind::ProbableDuplicate
            } else {
                AlikeKind::Twins
            },
        );
    }
    near.then_some(AlikeKind::ProbableDuplicate)
}
