//! Tests of `rules`.
