//! Tests of `rules`.
#![allow(
    clippy::unwrap_used,
    clippy::panic,
    clippy::too_many_lines,
    clippy::items_after_statements,
    clippy::format_collect
)]

mod again;
mod alike;
mod alternatives;
mod broken;
mod check;
mod children;
mod edges;
mod grading;
mod local;
mod nhanes;
mod parts;
mod properties;
mod said;
mod second_evaluation;
mod settings;
mod shipped;
mod sources;
mod support;
mod thresholds;
mod words;
