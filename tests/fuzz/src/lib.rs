//! The modules under test, compiled from the program's own sources (linked into this folder).
#![allow(missing_docs, dead_code)]

pub mod domain;
pub mod intake;
pub mod rules;
