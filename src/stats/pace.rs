//! How fast children are seen, and when those still to come will be.
//!
//! Practice, and a model: the gaps between children are taken as those of a Poisson process. The time
//! for the next `m` after `k` gaps in a time `t` is then `t·x/(1−x)` with `x` from the beta
//! distribution of `m` and `k`, which counts in that the pace is known from few children only.

use statrs::distribution::{Beta, ContinuousCDF};

const MINUTE_MS: i64 = 60_000;

/// A gap without any child that is longer than this is a break. Practice.
pub const BREAK_MS: i64 = 15 * MINUTE_MS;

/// How much working time the recent pace looks back. Practice.
pub const RECENT_MS: i64 = 30 * MINUTE_MS;

/// Gaps from which a pace is said, and fewer are not. Practice.
pub const ENOUGH: usize = 10;

/// How often the time at which the day ends lies in the range that is said, if the model holds.
pub const CONFIDENCE: f64 = 0.8;

/// So many gaps in so much working time.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Pace {
    /// Gaps between one child and the next.
    pub gaps: usize,
    /// Working time in milliseconds, breaks left out.
    pub working_ms: i64,
}

impl Pace {
    /// Returns children an hour.
    pub fn an_hour(self) -> f64 {
        self.gaps as f64 * 3_600_000.0 / self.working_ms.max(1) as f64
    }

    /// Returns how long the next `m` children take, in milliseconds, as the ends of a range that holds
    /// it with [`CONFIDENCE`].
    pub fn time_for(self, m: usize) -> Option<(f64, f64)> {
        if m == 0 || self.gaps == 0 {
            return None;
        }
        let share = Beta::new(m as f64, self.gaps as f64).ok()?;
        let at = |p: f64| {
            let x = share.inverse_cdf(p);
            self.working_ms as f64 * x / (1.0 - x)
        };
        let tail = (1.0 - CONFIDENCE) / 2.0;
        Some((at(tail), at(1.0 - tail)))
    }
}

/// What the instants of a day tell.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Paces {
    /// Of the whole day; none below [`ENOUGH`] gaps.
    pub whole: Option<Pace>,
    /// Of the last [`RECENT_MS`] of working time; none below [`ENOUGH`] gaps.
    pub recent: Option<Pace>,
    /// Since when nobody was seen, in milliseconds since 1970, if that is a break by now.
    pub paused_since: Option<i64>,
}

impl Paces {
    /// Takes the instants at which children were signed, in milliseconds since 1970 and in any order,
    /// and the present. The time since the last one counts until it is a break.
    pub fn of(instants: &[i64], now_ms: i64) -> Paces {
        let mut at: Vec<i64> = instants.to_vec();
        at.sort_unstable();
        let Some(last) = at.last().copied() else {
            return Paces::default();
        };
        let waiting = (now_ms - last).max(0);
        let open = if waiting > BREAK_MS { 0 } else { waiting };
        let (mut whole, mut recent) = (Pace::none(open), Pace::none(open));
        for pair in at.windows(2).rev() {
            let gap = pair[1] - pair[0];
            if gap > BREAK_MS {
                continue;
            }
            if recent.gaps == whole.gaps && recent.working_ms + gap <= RECENT_MS {
                recent.take(gap);
            }
            whole.take(gap);
        }
        let enough = |pace: Pace| (pace.gaps >= ENOUGH && pace.working_ms > 0).then_some(pace);
        Paces {
            whole: enough(whole),
            recent: enough(recent),
            paused_since: (waiting > BREAK_MS).then_some(last),
        }
    }

    /// Returns how long the next `m` children take, in milliseconds, from the earlier end to the later
    /// one of what the whole day and the recent pace say.
    pub fn time_for(&self, m: usize) -> Option<(f64, f64)> {
        [self.whole, self.recent]
            .into_iter()
            .flatten()
            .filter_map(|pace| pace.time_for(m))
            .reduce(|a, b| (a.0.min(b.0), a.1.max(b.1)))
    }
}

impl Pace {
    fn none(working_ms: i64) -> Pace {
        Pace {
            gaps: 0,
            working_ms,
        }
    }

    fn take(&mut self, gap: i64) {
        self.gaps += 1;
        self.working_ms += gap;
    }
}
