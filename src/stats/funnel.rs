//! Prediction limits of a count: how many children of a group would be expected to count, and between
//! which numbers chance alone leaves it.
//!
//! Probability-based limits, not limits of a confidence interval: Spiegelhalter, Stat Med
//! 2005;24:1185–1202; Seaton and Manktelow, Stat Methods Med Res 2012;21:517–537. Sums of different
//! shares are exact by convolution; what is left out at the far ends weighs less than 1e-15 together.

use statrs::distribution::{Binomial, Discrete};
use statrs::function::beta::ln_beta;
use statrs::function::factorial::ln_binomial;

/// Probability that is left out at each end of a distribution.
const NEGLIGIBLE: f64 = 1e-17;

/// How many of `n` would count, with the probability of each number.
#[derive(Debug, Clone, PartialEq)]
pub struct Prediction {
    n: u64,
    /// The number that `weights[0]` is the probability of.
    first: u64,
    weights: Vec<f64>,
}

/// On which side of what chance leaves a count stands.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Side {
    /// Fewer than chance leaves.
    Below,
    /// Within.
    Within,
    /// More than chance leaves.
    Above,
}

impl Prediction {
    /// Returns the prediction for nobody, from which sums begin.
    pub fn nobody() -> Prediction {
        Prediction {
            n: 0,
            first: 0,
            weights: vec![1.0],
        }
    }

    /// Returns the prediction for `n` that each count with the known probability `p`; nothing for a
    /// `p` outside 0 to 1.
    pub fn known(n: u64, p: f64) -> Option<Prediction> {
        let binomial = Binomial::new(p, n).ok()?;
        Some(Prediction::of(n, |k| binomial.pmf(k)))
    }

    /// Returns the prediction for `n` whose probability is known only from `hits` of `of` others: the
    /// beta-binomial distribution with the prior of Jeffreys, Proc R Soc Lond A 1946;186:453–461.
    ///
    /// It is wider than the binomial one, because the share of the others is itself uncertain, and
    /// becomes it as the others grow many. Nothing for `hits` above `of`.
    pub fn from_others(n: u64, hits: u64, of: u64) -> Option<Prediction> {
        let misses = of.checked_sub(hits)?;
        let (a, b) = (hits as f64 + 0.5, misses as f64 + 0.5);
        let whole = ln_beta(a, b);
        Some(Prediction::of(n, |k| {
            (ln_binomial(n, k) + ln_beta(k as f64 + a, (n - k) as f64 + b) - whole).exp()
        }))
    }

    fn of(n: u64, weight: impl Fn(u64) -> f64) -> Prediction {
        Prediction {
            n,
            first: 0,
            weights: (0..=n).map(weight).collect(),
        }
        .trimmed()
    }

    fn trimmed(mut self) -> Prediction {
        let negligible = |weights: &mut dyn Iterator<Item = &f64>| {
            let mut sum = 0.0;
            weights
                .take_while(|w| {
                    sum += **w;
                    sum < NEGLIGIBLE
                })
                .count()
        };
        let last = negligible(&mut self.weights.iter().rev());
        let first = negligible(&mut self.weights.iter());
        self.weights.truncate(self.weights.len() - last);
        self.weights.drain(..first.min(self.weights.len()));
        self.first += first as u64;
        self
    }

    /// Returns the prediction of both groups together.
    #[must_use]
    pub fn plus(&self, other: &Prediction) -> Prediction {
        let mut weights = vec![0.0; (self.weights.len() + other.weights.len()).saturating_sub(1)];
        for (i, a) in self.weights.iter().enumerate() {
            for (j, b) in other.weights.iter().enumerate() {
                weights[i + j] += a * b;
            }
        }
        Prediction {
            n: self.n + other.n,
            first: self.first + other.first,
            weights,
        }
        .trimmed()
    }

    /// Returns of how many.
    pub fn children(&self) -> u64 {
        self.n
    }

    /// Returns the number to expect.
    pub fn mean(&self) -> f64 {
        let numbers = self.first..;
        numbers
            .zip(&self.weights)
            .map(|(k, w)| k as f64 * w)
            .sum::<f64>()
    }

    /// Returns the probability of `k` or fewer.
    pub fn at_most(&self, k: u64) -> f64 {
        let Some(k) = k.checked_sub(self.first) else {
            return 0.0;
        };
        let weights = self.weights.iter().take(k as usize + 1);
        weights.sum::<f64>().min(1.0)
    }

    /// Returns the probability of `k` or more.
    pub fn at_least(&self, k: u64) -> f64 {
        let weights = self.weights.iter();
        weights
            .skip(k.saturating_sub(self.first) as usize)
            .sum::<f64>()
            .min(1.0)
    }

    /// Returns the limit of a funnel plot below which a count falls with probability `p`, as a share
    /// from 0 to 1 and interpolated between the numbers on either side of it (Spiegelhalter 2005,
    /// appendix A.1.1); nothing for nobody or a `p` outside 0 to 1.
    pub fn limit(&self, p: f64) -> Option<f64> {
        if self.n == 0 || !(p > 0.0 && p < 1.0) {
            return None;
        }
        let mut below = 0.0;
        for (k, weight) in (self.first..).zip(&self.weights) {
            if below + weight >= p {
                let part = (below + weight - p) / weight;
                return Some(((k as f64 - part) / self.n as f64).clamp(0.0, 1.0));
            }
            below += weight;
        }
        Some((self.first + self.weights.len() as u64 - 1) as f64 / self.n as f64)
    }

    /// Says where a count stands: outside only if a count as far out, or further, on that side has at
    /// most half of what the confidence leaves. Judged on whole numbers, not on the interpolated
    /// limits, which a count may pass that chance brings more often.
    pub fn side(&self, count: u64, confidence: f64) -> Side {
        let tail = (1.0 - confidence) / 2.0;
        if self.at_most(count) <= tail {
            Side::Below
        } else if self.at_least(count) <= tail {
            Side::Above
        } else {
            Side::Within
        }
    }

    /// Returns the smallest and the largest number that stand within.
    pub fn within(&self, confidence: f64) -> (u64, u64) {
        let inside = |k: &u64| self.side(*k, confidence) == Side::Within;
        let last = self.first + self.weights.len() as u64 - 1;
        let low = (self.first..=last).find(inside).unwrap_or(self.first);
        let high = (self.first..=last).rfind(inside).unwrap_or(last);
        (low, high)
    }
}
