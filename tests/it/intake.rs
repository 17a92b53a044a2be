//! Tests of `intake`.
