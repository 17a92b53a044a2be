//! Tests of the statistics that stand on a distribution library.

mod funnel;
mod pace;
