//! The one integration test binary: each further one would link the encrypted engine again.

mod actions;
mod architecture;
mod cli;
mod cli_store;
mod compare;
mod demo;
mod domain;
mod intake;
mod kill;
mod letters;
mod rule_check;
mod rules;
mod screens;
mod stats;
mod store;
