//! Tests of `store`.
