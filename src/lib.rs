//! Twoline records children's vision screenings, applies published referral rules exactly and
//! explains each outcome.
//!
//! The map of the crate; arrows point one way and a test says so.
//!
//! - [`domain`]: what vision screening knows, without I/O, clock or database
//! - [`rules`]: rule files in, three-valued answers and their reasons out
//! - [`intake`]: bytes in, typed rows or located errors out
//! - [`reports`]: typed rows in, bytes out
//! - [`stats`]: intervals; knows nothing of the rest
//! - [`store`]: the encrypted, append-only store; the only place with SQL
//! - [`actions`]: one function = one user intention = one transaction
//! - [`keys`]: the one declaration of commands and keys
//! - [`demo`]: an invented district, made by actions
//! - [`cli`]: the command line
//! - [`tui`]: the terminal screens
//! - [`clock`]: the only place that asks the time

pub mod actions;
pub mod cli;
pub mod clock;
pub mod demo;
pub mod domain;
pub mod intake;
pub mod keys;
pub mod reports;
pub mod rules;
pub mod stats;
pub mod store;
pub mod tui;
