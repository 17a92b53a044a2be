//! Whether a station refers or rescreens more, or fewer, children than the others would.

use std::collections::BTreeMap;

use uuid::Uuid;

use crate::domain::age::Grade;
use crate::domain::codes::Attempt;
use crate::stats::funnel::{Prediction, Side};

/// Below this many children nothing is said of a station, and a comparison with fewer is none.
/// Practice: of 20 children, two referred are anything from 3% to 30%.
pub const ENOUGH: u64 = 20;

/// Below this many others a grade is compared with all grades of the same test. Practice.
const ENOUGH_OF_A_GRADE: u64 = 10;

/// What is said gently.
pub const GENTLE: f64 = 0.95;

/// What is said in stronger words.
pub const STRONG: f64 = 0.998;

/// What children have in common who are compared.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub struct Group {
    /// First visit or rescreen: those who come again fail far more often.
    pub attempt: Attempt,
    /// What they were tested with.
    pub test: Test,
    /// How old they are.
    pub band: Band,
}

/// What a child was tested with.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
#[allow(missing_docs)]
pub enum Test {
    Chart,
    Instrument,
    Both,
}

/// The grade, or the age in years where no grade is known.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
#[allow(missing_docs)]
pub enum Band {
    Grade(Grade),
    Years(i64),
    NotKnown,
}

/// A child whose reading was judged.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Judged {
    /// Where.
    pub station: Option<Uuid>,
    /// Whom the child is compared with.
    pub group: Group,
    /// Whether it came to refer or rescreen.
    pub hit: bool,
}

/// So many of so many came to refer or rescreen.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct Share {
    /// How many did.
    pub hits: u64,
    /// Of how many.
    pub of: u64,
}

impl Share {
    fn add(&mut self, other: Share) {
        self.hits += other.hits;
        self.of += other.of;
    }
}

/// How loud a difference is.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Level {
    /// Outside the 95% limits.
    Gentle,
    /// Outside the 99.8% limits.
    Strong,
}

/// What a station was compared with.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum With {
    /// The other stations of this day.
    Today,
    /// Earlier days of the same protocol.
    Earlier,
    /// The one for some tests, the other for the rest.
    Both,
}

/// What the watch says of a station.
#[derive(Debug, Clone, PartialEq)]
pub enum Watch {
    /// Fewer than [`ENOUGH`] children were judged.
    TooFew,
    /// Nobody stands to be compared with.
    Alone,
    /// The station stands so.
    Compared(Compared),
}

/// A station beside what the others would give for its children.
#[derive(Debug, Clone, PartialEq)]
pub struct Compared {
    /// What came of its children who have somebody to be compared with.
    pub share: Share,
    /// How many would be expected.
    pub expected: f64,
    /// The numbers within the 95% limits.
    pub gentle: (u64, u64),
    /// The numbers within the 99.8% limits.
    pub strong: (u64, u64),
    /// The interpolated 95% limits of a funnel plot, as shares.
    pub funnel: (f64, f64),
    /// Whom it was compared with.
    pub with: With,
    /// How loud, and on which side.
    pub passed: Option<(Level, Side)>,
}

/// What came of the children of each group.
pub type Tally = BTreeMap<Group, Share>;

/// Counts children by group.
pub fn tally<'a>(judged: impl IntoIterator<Item = &'a Judged>) -> Tally {
    let mut out = Tally::new();
    for child in judged {
        out.entry(child.group).or_default().add(Share {
            hits: u64::from(child.hit),
            of: 1,
        });
    }
    out
}

/// Compares a station with what the others would give for the same children.
///
/// `own` are the station's children, `others` those of every other station of the day: a station is
/// left out of what it is compared with, because it would pull the comparison towards itself. Where
/// too few others did the same test, earlier days of the same protocol stand in, the same station's
/// among them.
///
/// The number is a sum over the groups, each with its own share. That share is known only from the
/// others, so its uncertainty widens the limits ([`Prediction::from_others`]): two stations that are
/// compared with each other alone would otherwise pass a 95% limit on one day in six.
pub fn watch(own: &Tally, others: &Tally, earlier: &Tally) -> Watch {
    if own.values().map(|s| s.of).sum::<u64>() < ENOUGH {
        return Watch::TooFew;
    }
    let mut sum = Prediction::nobody();
    let mut share = Share::default();
    // Children of too small a grade are compared together with all grades of the same test.
    let mut rest: BTreeMap<(Attempt, Test), u64> = BTreeMap::new();
    let (mut today, mut before) = (false, false);
    let source = |group: &Group| {
        [others, earlier]
            .into_iter()
            .find(|from| same_test(from, group.attempt, group.test).of >= ENOUGH)
    };
    for (group, mine) in own {
        let Some(from) = source(group) else {
            continue;
        };
        today |= std::ptr::eq(from, others);
        before |= std::ptr::eq(from, earlier);
        share.add(*mine);
        let grade = from.get(group).filter(|s| s.of >= ENOUGH_OF_A_GRADE);
        match grade.and_then(|of| Prediction::from_others(mine.of, of.hits, of.of)) {
            Some(part) => sum = sum.plus(&part),
            None => *rest.entry((group.attempt, group.test)).or_default() += mine.of,
        }
    }
    for ((attempt, test), n) in rest {
        let all = [others, earlier]
            .map(|from| same_test(from, attempt, test))
            .into_iter()
            .find(|all| all.of >= ENOUGH);
        if let Some(part) = all.and_then(|all| Prediction::from_others(n, all.hits, all.of)) {
            sum = sum.plus(&part);
        }
    }
    if share.of < ENOUGH {
        return Watch::Alone;
    }
    let at = |p: f64| sum.limit(p).unwrap_or_default();
    let side = |confidence: f64| sum.side(share.hits, confidence);
    Watch::Compared(Compared {
        share,
        expected: sum.mean(),
        gentle: sum.within(GENTLE),
        strong: sum.within(STRONG),
        funnel: (at((1.0 - GENTLE) / 2.0), at(f64::midpoint(1.0, GENTLE))),
        with: match (today, before) {
            (true, true) => With::Both,
            (true, false) => With::Today,
            _ => With::Earlier,
        },
        passed: match (side(STRONG), side(GENTLE)) {
            (Side::Within, Side::Within) => None,
            (Side::Within, gentle) => Some((Level::Gentle, gentle)),
            (strong, _) => Some((Level::Strong, strong)),
        },
    })
}

/// Returns what came of all grades with this test.
fn same_test(from: &Tally, attempt: Attempt, test: Test) -> Share {
    let mut all = Share::default();
    for (group, share) in from {
        if group.attempt == attempt && group.test == test {
            all.add(*share);
        }
    }
    all
}

#[cfg(test)]
#[allow(clippy::panic)]
mod tests {
    use super::*;

    fn group(grade: &str) -> Group {
        Group {
            attempt: Attempt::First,
            test: Test::Chart,
            band: Grade::parse(grade).map_or(Band::NotKnown, Band::Grade),
        }
    }

    fn of(groups: &[(Group, u64, u64)]) -> Tally {
        groups
            .iter()
            .map(|(group, hits, of)| {
                (
                    *group,
                    Share {
                        hits: *hits,
                        of: *of,
                    },
                )
            })
            .collect()
    }

    #[track_caller]
    fn compared(own: &Tally, others: &Tally, earlier: &Tally) -> Compared {
        match watch(own, others, earlier) {
            Watch::Compared(compared) => compared,
            other => panic!("{other:?}"),
        }
    }

    // Practice: 20 children.
    #[test]
    fn below_twenty_children_nothing_is_said() {
        let others = of(&[(group("1"), 20, 200)]);
        let none = Tally::new();
        assert_eq!(
            watch(&of(&[(group("1"), 19, 19)]), &others, &none),
            Watch::TooFew
        );
        let enough = compared(&of(&[(group("1"), 20, 20)]), &others, &none);
        assert_eq!(enough.passed, Some((Level::Strong, Side::Above)));
    }

    #[test]
    fn a_station_alone_is_compared_with_earlier_days_or_with_nobody() {
        let own = of(&[(group("1"), 4, 40)]);
        let few = of(&[(group("1"), 2, 19)]);
        let many = of(&[(group("1"), 20, 200)]);
        let none = Tally::new();
        assert_eq!(watch(&own, &none, &none), Watch::Alone);
        assert_eq!(watch(&own, &few, &few), Watch::Alone);
        assert_eq!(compared(&own, &few, &many).with, With::Earlier);
        assert_eq!(compared(&own, &many, &few).with, With::Today);
    }

    /// A station that sees the youngest is not blamed for them: they fail everywhere.
    #[test]
    fn the_grade_and_the_test_are_taken_into_account() {
        let others = of(&[(group("PK"), 60, 150), (group("5"), 15, 300)]);
        let none = Tally::new();
        let young = compared(&of(&[(group("PK"), 16, 40)]), &others, &none);
        assert_eq!(young.passed, None, "{young:?}");
        let old = compared(&of(&[(group("5"), 16, 40)]), &others, &none);
        assert_eq!(old.passed, Some((Level::Strong, Side::Above)));
        // Half of each: about 40% of 20 and 5% of 20.
        let both = compared(
            &of(&[(group("PK"), 8, 20), (group("5"), 1, 20)]),
            &others,
            &none,
        );
        assert!((both.expected - 9.1).abs() < 0.2, "{both:?}");
        // Another test is no comparison.
        let instrument = Group {
            test: Test::Instrument,
            ..group("5")
        };
        assert_eq!(
            watch(&of(&[(instrument, 16, 40)]), &others, &none),
            Watch::Alone
        );
        // Nor is another attempt.
        let rescreen = Group {
            attempt: Attempt::Rescreen,
            ..group("5")
        };
        assert_eq!(
            watch(&of(&[(rescreen, 16, 40)]), &others, &none),
            Watch::Alone
        );
    }

    #[test]
    fn a_grade_that_few_others_have_is_compared_with_all_grades() {
        let others = of(&[(group("1"), 30, 300), (group("2"), 9, 9)]);
        let found = compared(&of(&[(group("2"), 4, 30)]), &others, &Tally::new());
        // (39 + 1/2) of (309 + 1), times 30.
        assert!((found.expected - 3.82).abs() < 0.01, "{found:?}");
        assert_eq!(found.share, Share { hits: 4, of: 30 });
    }

    #[test]
    fn both_tails_and_both_levels_are_told_apart() {
        let others = of(&[(group("1"), 150, 1_000)]);
        let at = |hits| {
            let own = of(&[(group("1"), hits, 60)]);
            compared(&own, &others, &Tally::new()).passed
        };
        assert_eq!(at(9), None);
        assert_eq!(at(0), Some((Level::Strong, Side::Below)));
        assert_eq!(at(3), Some((Level::Gentle, Side::Below)));
        assert_eq!(at(16), Some((Level::Gentle, Side::Above)));
        assert_eq!(at(25), Some((Level::Strong, Side::Above)));
    }

    #[test]
    fn children_with_nobody_to_compare_are_left_out_of_the_number() {
        let instrument = Group {
            test: Test::Instrument,
            ..group("1")
        };
        let others = of(&[(group("1"), 30, 300)]);
        let own = of(&[(group("1"), 3, 30), (instrument, 9, 10)]);
        let found = compared(&own, &others, &Tally::new());
        assert_eq!(found.share, Share { hits: 3, of: 30 });
    }
}
