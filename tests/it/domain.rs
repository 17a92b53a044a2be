//! Tests of `domain`, most of them against tables from outside the project (`tests/data`).

#![allow(clippy::panic, clippy::print_stdout)]

mod acuity;
mod age;
mod parsing;
mod readings;
mod refraction;
mod text;

use std::collections::BTreeMap;
use std::hash::{BuildHasher, Hasher, RandomState};

use proptest::prelude::ProptestConfig;
use proptest::test_runner::RngSeed;

/// One row of a table by column name.
pub type Row = BTreeMap<String, String>;

/// Reads a table of `tests/data`; every row must name its source.
pub fn table(name: &str) -> Vec<Row> {
    let path = format!("{}/tests/data/{name}", env!("CARGO_MANIFEST_DIR"));
    let mut reader = csv::Reader::from_path(&path).expect("the table opens");
    let rows: Vec<Row> = reader
        .deserialize()
        .collect::<Result<_, _>>()
        .expect("the table parses");
    assert!(
        rows.iter().all(|row| !row["source"].trim().is_empty()),
        "{name}: every row names its source"
    );
    rows
}

/// Reads a decimal of an oracle table as a float, or nothing from an empty cell.
pub fn number(cell: &str) -> Option<f64> {
    (!cell.is_empty()).then(|| cell.trim_start_matches('+').parse().expect("a number"))
}

/// Returns the settings of a random test and prints its seed, which a failing test shows; the
/// variable `PROPTEST_RNG_SEED` repeats it.
pub fn random(cases: u32) -> ProptestConfig {
    let config = ProptestConfig {
        cases,
        failure_persistence: None,
        ..ProptestConfig::default()
    };
    let seed = match config.rng_seed {
        RngSeed::Fixed(seed) => seed,
        RngSeed::Random => RandomState::new().build_hasher().finish(),
    };
    println!("PROPTEST_RNG_SEED={seed}");
    ProptestConfig {
        rng_seed: RngSeed::Fixed(seed),
        ..config
    }
}
