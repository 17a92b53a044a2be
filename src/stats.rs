//! Intervals, on top of a distribution library; knows nothing of the rest.

pub mod intervals;
