//! Tests of `screens`.
