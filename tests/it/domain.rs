//! Tests of `domain`.
