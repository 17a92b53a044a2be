//! The modules under test, compiled from the program's own sources.
#![allow(missing_docs, dead_code)]

#[path = "../../../src/domain.rs"]
pub mod domain;
#[path = "../../../src/intake.rs"]
pub mod intake;
#[path = "../../../src/rules.rs"]
pub mod rules;
