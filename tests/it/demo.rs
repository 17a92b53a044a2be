//! Tests of `demo`: the invented district and the sample files.

#![allow(clippy::panic)]

mod district;
mod outcomes;
mod populated;
mod sample_files;
