//! Tests of `intake`, and of `reports` where one must read what the other writes.

mod bytes;
mod day_report;
mod exams;
mod never_panics;
mod quoting;
mod results;
mod roster;
mod spreadsheet;
