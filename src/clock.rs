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
