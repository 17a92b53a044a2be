//! Tests of `rules`.

mod broken;
mod children;
mod local;
mod nhanes;
mod parts;
mod properties;
mod shipped;
mod support;
mod thresholds;
