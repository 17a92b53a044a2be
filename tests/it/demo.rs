//! Tests of `demo`: the invented district and the sample files.

#![allow(clippy::panic)]

mod district;
mod outcomes;
mod sample_files;
