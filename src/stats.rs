//! Intervals, prediction limits and pace, on top of a distribution library; knows nothing of the rest.

pub mod funnel;
pub mod intervals;
pub mod pace;
