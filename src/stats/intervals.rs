//! Confidence intervals of a proportion.
//!
//! Wilson, J Am Stat Assoc 1927;22:209–212; Clopper and Pearson, Biometrika 1934;26:404–413. The
//! quantiles come from the statistics library.

use statrs::distribution::{Beta, ContinuousCDF, Normal};

/// The bounds of a proportion, each from 0 to 1.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Interval {
    /// Lower bound.
    pub low: f64,
    /// Upper bound.
    pub high: f64,
}

/// Says whether `k` of `n` at this confidence is a question that has an answer.
fn sound(k: u64, n: u64, confidence: f64) -> bool {
    n > 0 && k <= n && confidence > 0.0 && confidence < 1.0
}

/// Returns Wilson's score interval for `k` of `n`; nothing for `n` of 0 or `k` above it.
pub fn wilson(k: u64, n: u64, confidence: f64) -> Option<Interval> {
    if !sound(k, n, confidence) {
        return None;
    }
    let z = Normal::new(0.0, 1.0)
        .ok()?
        .inverse_cdf(f64::midpoint(1.0, confidence));
    let (k, n) = (k as f64, n as f64);
    let (p, z2) = (k / n, z * z);
    let middle = (p + z2 / (2.0 * n)) / (1.0 + z2 / n);
    let half = z / (1.0 + z2 / n) * (p * (1.0 - p) / n + z2 / (4.0 * n * n)).sqrt();
    Some(Interval {
        low: if k == 0.0 {
            0.0
        } else {
            (middle - half).max(0.0)
        },
        high: if k >= n {
            1.0
        } else {
            (middle + half).min(1.0)
        },
    })
}

/// Returns the exact interval of Clopper and Pearson for `k` of `n`; nothing for `n` of 0 or `k`
/// above it.
pub fn clopper_pearson(k: u64, n: u64, confidence: f64) -> Option<Interval> {
    if !sound(k, n, confidence) {
        return None;
    }
    let tail = (1.0 - confidence) / 2.0;
    let (hits, misses) = (k as f64, (n - k) as f64);
    let low = if k == 0 {
        0.0
    } else {
        Beta::new(hits, misses + 1.0).ok()?.inverse_cdf(tail)
    };
    let high = if k == n {
        1.0
    } else {
        Beta::new(hits + 1.0, misses).ok()?.inverse_cdf(1.0 - tail)
    };
    Some(Interval { low, high })
}
