//! Each part of the rules on its own.

mod chart;
mod measured;
mod order;
mod signs;

use super::support::{child, word};

fn kind(set: &str, age: u32, text: &str) -> &'static str {
    word(&child(age, text).by_set(set))
}
