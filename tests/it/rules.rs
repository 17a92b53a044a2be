//! Tests of `rules`.
#![allow(
    clippy::unwrap_used,
    clippy::panic,
    clippy::too_many_lines,
    clippy::items_after_statements,
    clippy::format_collect
)]

mod broken;
mod children;
mod local;
mod nhanes;
mod parts;
mod properties;
mod shipped;
mod support;
mod thresholds;
