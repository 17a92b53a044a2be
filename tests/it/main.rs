//! The one integration test binary: each further one would link the encrypted engine again.

mod actions;
mod architecture;
mod cli;
mod cli_store;
mod demo;
mod domain;
mod intake;
mod kill;
mod rules;
mod screens;
mod store;
