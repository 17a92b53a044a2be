//! The screens through the real update loop, on a real store in a temporary folder.

#![allow(clippy::unwrap_used, clippy::panic)]

mod bench;
mod bench_drawn;
mod board;
mod budgets;
mod comfort;
mod desk;
mod drawn;
mod every_test;
mod keystrokes;
mod linear;
mod naughty;
mod people;
mod rare_values;
mod referrals;
mod rules_place;
mod sizes;
mod stations;
mod storms;
mod terminal;
mod tour;
mod urgent;
