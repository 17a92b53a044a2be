//! Tests of `intake`, and of `reports` where one must read what the other writes.

mod bytes;
mod quoting;
mod results;
mod roster;
mod spreadsheet;
