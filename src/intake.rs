//! Bytes in, typed rows or located errors out.
//!
//! A file goes through four steps: its bytes are [read in](mod@file), recognised as UTF-8 text, checked
//! against RFC 4180 ([`quoting`]) and read by the columns of its header ([`sheet`]). Then
//! [`roster`], [`results`] and [`exams`] give each cell its type. Whatever is wrong is a [`Problem`] that
//! names file, row, column, what was found and what was expected.

pub mod cells;
pub mod encoding;
pub mod exams;
pub mod file;
pub mod problem;
pub mod quoting;
pub mod results;
pub mod roster;
pub mod sheet;

pub use file::InputFile;
pub use problem::{Found, Place, Problem, Problems};
