//! The only place that asks the time.

use chrono::{Local, NaiveDate, Offset};

/// A moment on the wall clock: when something was entered, never used for ordering.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Moment {
    /// Milliseconds since 1970 in UTC.
    pub utc_ms: i64,
    /// What the clock on the wall shows, in minutes east of UTC.
    pub offset_minutes: i32,
}

impl Moment {
    /// Returns the civil date that the clock on the wall showed.
    pub fn date(self) -> Option<NaiveDate> {
        let local = self.utc_ms + i64::from(self.offset_minutes) * 60_000;
        chrono::DateTime::from_timestamp_millis(local).map(|at| at.date_naive())
    }
}

/// Returns the present moment.
pub fn now() -> Moment {
    let now = Local::now();
    Moment {
        utc_ms: now.timestamp_millis(),
        offset_minutes: now.offset().fix().local_minus_utc() / 60,
    }
}

/// Returns today's civil date.
pub fn today() -> NaiveDate {
    Local::now().date_naive()
}
