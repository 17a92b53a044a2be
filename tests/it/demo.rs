//! Tests of `demo`: the invented district and the sample files.

mod district;
mod sample_files;
