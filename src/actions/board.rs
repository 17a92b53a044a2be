//! The day board: how a day stands by class and by station, when it will end, and whether a station
//! differs from the others by more than chance.

mod counts;
mod table;
pub mod watch;

use std::collections::{BTreeMap, HashMap, HashSet};

use chrono::Days;
use uuid::Uuid;

use super::days::key_of;
use super::desk::Desk;
use super::error::Result;
use super::views::{DayChild, DayInfo, QueueState};
use crate::clock::{self, Moment};
use crate::domain::codes::Status;
use crate::domain::outcome::{DecidedBy, OutcomeKind};
use crate::stats::pace::Paces;
use crate::store::read::SignedVisit;

pub use crate::stats::funnel::Side;
pub use crate::stats::pace::{self, Pace};
pub use counts::{Counts, STATES, came};
use watch::{Band, Group, Judged, Test, Watch};

/// How far back earlier days are looked at where a day has nobody to compare with.
const EARLIER_DAYS: u64 = 365;

/// A day at a glance.
#[derive(Debug, Clone, PartialEq)]
pub struct Board {
    /// The day.
    pub day: DayInfo,
    /// The moment it was made.
    pub now: Moment,
    /// All children of the day.
    pub whole: Counts,
    /// The children of each class, in the order of the roster.
    pub classes: Vec<(String, Counts)>,
    /// Each station at which a visit was signed, by name.
    pub stations: Vec<StationRow>,
    /// Rescreens and returns that are due by this day: still to come, and all.
    pub due: (usize, usize),
    /// How fast children were seen; nothing on another day than today.
    pub pace: Paces,
    /// Between which instants (milliseconds since 1970) the day will end at this pace, to the
    /// outer five minutes; none before enough children, when nobody is to come, or on another day.
    pub ends: Option<(i64, i64)>,
}

/// A station of a day.
#[derive(Debug, Clone, PartialEq)]
pub struct StationRow {
    /// Its name.
    pub name: String,
    /// How many children were seen there.
    pub seen: usize,
    /// How many of them a chart or an instrument judged.
    pub judged: u64,
    /// How many of those came to refer or rescreen.
    pub hits: u64,
    /// How fast.
    pub pace: Paces,
    /// The newest signature of the day that this store has of it, on the clock of the wall.
    pub last: Option<Moment>,
    /// Whether it differs from the others.
    pub watch: Watch,
}

impl Board {
    /// Returns how many stations have enough children to be compared.
    pub fn compared(&self) -> usize {
        let compared = |s: &&StationRow| matches!(s.watch, Watch::Compared(_));
        self.stations.iter().filter(compared).count()
    }
}

impl Desk {
    /// Returns the board of a day as it stands now.
    pub fn board(&self, day: &DayInfo) -> Result<Board> {
        self.board_at(day, clock::now())
    }

    /// Returns the board of a day as it stands in the store, with this moment as the present.
    pub fn board_at(&self, day: &DayInfo, now: Moment) -> Result<Board> {
        let children = self.day_children(day)?;
        let signed = self.read().signed_visits(&key_of(day))?;
        let mut whole = Counts::default();
        for child in &children {
            whole.add(child.state);
        }
        let is_due = |c: &&DayChild| c.due_on.is_some_and(|due| due <= day.date);
        let due_to_come = children
            .iter()
            .filter(is_due)
            .filter(|c| c.state == QueueState::ToCome);
        let at_work = by_hand(&signed, day);
        let is_today = now.date() == Some(day.date);
        let instants: Vec<i64> = at_work.iter().map(|v| v.signed.utc_ms).collect();
        let paces = |instants: &[i64]| {
            if is_today {
                Paces::of(instants, now.utc_ms)
            } else {
                Paces::default()
            }
        };
        let pace = paces(&instants);
        Ok(Board {
            now,
            whole,
            classes: by_class(&children),
            due: (due_to_come.count(), children.iter().filter(is_due).count()),
            ends: pace
                .time_for(whole.to_come())
                .map(|(soon, late)| outer(now.utc_ms, soon, late)),
            pace,
            stations: self.station_rows(day, &signed, &at_work, paces)?,
            day: day.clone(),
        })
    }

    fn station_rows(
        &self,
        day: &DayInfo,
        signed: &[SignedVisit],
        at_work: &[&SignedVisit],
        paces: impl Fn(&[i64]) -> Paces,
    ) -> Result<Vec<StationRow>> {
        let names = self.stations()?;
        let judged: Vec<Judged> = signed.iter().filter_map(judged).collect();
        let of_day: HashSet<Option<Uuid>> = signed.iter().map(|v| v.station_id).collect();
        // Read only where the day itself may not be enough.
        let earlier = if of_day
            .iter()
            .any(|s| judged.iter().filter(|j| j.station != *s).count() < watch::ENOUGH as usize)
            || judged.iter().any(|j| j.group.test != Test::Chart)
        {
            self.earlier(day)?
        } else {
            watch::Tally::new()
        };
        let mut rows: Vec<StationRow> = of_day
            .into_iter()
            .map(|station| {
                let seen: HashSet<&str> = signed
                    .iter()
                    .filter(|v| v.station_id == station && sat_down(v))
                    .map(|v| v.child_id.as_str())
                    .collect();
                let here: Vec<&SignedVisit> = at_work
                    .iter()
                    .filter(|v| v.station_id == station)
                    .copied()
                    .collect();
                let instants: Vec<i64> = here.iter().map(|v| v.signed.utc_ms).collect();
                let own = watch::tally(judged.iter().filter(|j| j.station == station));
                let others = watch::tally(judged.iter().filter(|j| j.station != station));
                StationRow {
                    name: station
                        .and_then(|id| names.get(&id))
                        .map_or_else(|| "no station".to_owned(), |s| s.name.clone()),
                    seen: seen.len(),
                    judged: own.values().map(|s| s.of).sum(),
                    hits: own.values().map(|s| s.hits).sum(),
                    pace: paces(&instants),
                    last: here.iter().map(|v| v.signed).max_by_key(|at| at.utc_ms),
                    watch: watch::watch(&own, &others, &earlier),
                }
            })
            .collect();
        rows.sort_by(|a, b| a.name.cmp(&b.name).then(b.seen.cmp(&a.seen)));
        Ok(rows)
    }

    /// Returns what came of the children of the protocol's days before this one.
    fn earlier(&self, day: &DayInfo) -> Result<watch::Tally> {
        let from = day.date.checked_sub_days(Days::new(EARLIER_DAYS));
        let visits =
            self.read()
                .signed_between(&day.protocol, from.unwrap_or(day.date), day.date)?;
        let judged: Vec<Judged> = visits.iter().filter_map(judged).collect();
        Ok(watch::tally(&judged))
    }
}

/// Says whether the child of a visit came to the table.
fn sat_down(visit: &SignedVisit) -> bool {
    matches!(
        visit.status,
        None | Some(Status::Present | Status::LeftEarly)
    ) && visit.kind != OutcomeKind::Exempt
}

/// Returns the visits that tell of pace: of children who came to the table, signed on the day itself
/// and one at a time. What was read from a file, or entered on a later day, does not.
fn by_hand<'a>(signed: &'a [SignedVisit], day: &DayInfo) -> Vec<&'a SignedVisit> {
    let mut together: HashMap<i64, usize> = HashMap::new();
    for visit in signed {
        *together.entry(visit.tx).or_default() += 1;
    }
    signed
        .iter()
        .filter(|v| sat_down(v) && v.signed.date() == Some(day.date))
        .filter(|v| together.get(&v.tx) == Some(&1))
        .collect()
}

/// Returns a visit as the station watch counts it: a reading was judged, so that the table, the chart
/// and the light had a part in what it came to. Not testable, glasses not worn and exempt are states
/// of their own; values that nobody has settled are no result.
fn judged(visit: &SignedVisit) -> Option<Judged> {
    let test = match (visit.chart, visit.instrument) {
        (true, false) => Test::Chart,
        (false, true) => Test::Instrument,
        (true, true) => Test::Both,
        (false, false) => return None,
    };
    let by = DecidedBy::from_word(&visit.decided_by);
    let no_result = matches!(
        by,
        Some(
            DecidedBy::NotTestable
                | DecidedBy::GlassesNotWorn
                | DecidedBy::GlassesNeverAvailable
                | DecidedBy::Exempt
                | DecidedBy::Conflict
        )
    );
    let band = match (visit.grade, visit.age_months) {
        (Some(grade), _) => Band::Grade(grade),
        (None, Some(months)) => Band::Years(months / 12),
        (None, None) => Band::NotKnown,
    };
    (!no_result && sat_down(visit)).then_some(Judged {
        station: visit.station_id,
        group: Group {
            attempt: visit.attempt,
            test,
            band,
        },
        hit: matches!(visit.kind, OutcomeKind::Refer | OutcomeKind::Rescreen),
    })
}

/// Counts the children of each class. Where two grades have a class of the same name, the grade
/// stands before it.
fn by_class(children: &[DayChild]) -> Vec<(String, Counts)> {
    let mut found: BTreeMap<_, Counts> = BTreeMap::new();
    for child in children {
        let key = (child.grade, child.class.as_str());
        found.entry(key).or_default().add(child.state);
    }
    let mut grades: HashMap<&str, usize> = HashMap::new();
    for (_, class) in found.keys() {
        *grades.entry(class).or_default() += 1;
    }
    found
        .iter()
        .map(|((grade, class), counts)| {
            let title = match (*class, grade) {
                ("", None) => "no class".to_owned(),
                ("", Some(grade)) => format!("grade {grade}"),
                (class, Some(grade)) if grades.get(class).is_some_and(|n| *n > 1) => {
                    format!("{grade} {class}")
                }
                (class, _) => class.to_owned(),
            };
            (title, *counts)
        })
        .collect()
}

/// Returns a range of time from now on, to the outer five minutes.
fn outer(now_ms: i64, soon: f64, late: f64) -> (i64, i64) {
    const STEP: i64 = 5 * 60_000;
    let (soon, late) = (now_ms + soon as i64, now_ms + late as i64);
    (
        soon.div_euclid(STEP) * STEP,
        late.div_euclid(STEP) * STEP + STEP,
    )
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::domain::codes::Attempt;
    use crate::stats::pace::ENOUGH;

    fn visit(tx: i64, minute: i64) -> SignedVisit {
        SignedVisit {
            child_id: format!("Q-{tx}"),
            attempt: Attempt::First,
            status: Some(Status::Present),
            kind: OutcomeKind::Pass,
            decided_by: DecidedBy::Nothing.word().into(),
            station_id: None,
            grade: None,
            age_months: Some(73),
            chart: true,
            instrument: false,
            signed: Moment {
                utc_ms: 1_791_972_000_000 + minute * 60_000,
                offset_minutes: 0,
            },
            tx,
        }
    }

    fn day() -> DayInfo {
        DayInfo {
            id: Uuid::nil(),
            site: "QE".into(),
            site_name: "Quillmere East".into(),
            date: "2026-10-14".parse().expect("a date"),
            protocol: "us-school".into(),
            method: crate::domain::codes::AcuityMethod::Threshold,
            chart: Vec::new(),
            calendar: None,
        }
    }

    // Practice: a pace is that of hands at a table.
    #[test]
    fn files_late_entries_and_absent_children_tell_nothing_of_the_pace() {
        let mut visits: Vec<SignedVisit> =
            (0..ENOUGH as i64 + 2).map(|i| visit(i, 2 * i)).collect();
        let whole = visits.len();
        assert_eq!(by_hand(&visits, &day()).len(), whole);
        visits[0].tx = visits[1].tx;
        assert_eq!(by_hand(&visits, &day()).len(), whole - 2, "from a file");
        visits[2].status = Some(Status::Absent);
        assert_eq!(by_hand(&visits, &day()).len(), whole - 3, "absent");
        visits[3].signed.utc_ms += 86_400_000;
        assert_eq!(by_hand(&visits, &day()).len(), whole - 4, "a day later");
    }

    #[test]
    fn the_watch_counts_readings_that_were_judged() {
        let with = |change: &dyn Fn(&mut SignedVisit)| {
            let mut v = visit(1, 0);
            change(&mut v);
            judged(&v)
        };
        assert_eq!(with(&|_| ()).map(|j| j.hit), Some(false));
        for kind in [OutcomeKind::Refer, OutcomeKind::Rescreen] {
            assert_eq!(with(&|v| v.kind = kind).map(|j| j.hit), Some(true));
        }
        for by in [
            DecidedBy::NotTestable,
            DecidedBy::GlassesNotWorn,
            DecidedBy::Exempt,
            DecidedBy::Conflict,
        ] {
            assert_eq!(with(&|v| v.decided_by = by.word().into()), None, "{by:?}");
        }
        assert_eq!(with(&|v| v.chart = false), None, "nothing was read");
        assert_eq!(with(&|v| v.status = Some(Status::Absent)), None);
        let band = |change: &dyn Fn(&mut SignedVisit)| with(change).map(|j| j.group.band);
        assert_eq!(band(&|_| ()), Some(Band::Years(6)));
        assert_eq!(band(&|v| v.age_months = None), Some(Band::NotKnown));
    }

    #[test]
    fn the_end_is_given_to_the_outer_five_minutes() {
        let minute = 60_000.0;
        assert_eq!(outer(0, 7.0 * minute, 11.0 * minute), (300_000, 900_000));
        assert_eq!(outer(0, 0.0, 5.0 * minute), (0, 600_000));
    }
}
