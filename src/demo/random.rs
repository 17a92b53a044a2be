//! Seeded chance: the same seed gives the same district on every machine.

use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::{Rng, SeedableRng};

/// A stream of choices that depends on its seed alone.
pub struct Random(ChaCha8Rng);

impl Random {
    /// Starts the stream of a seed.
    pub fn new(seed: u64) -> Random {
        Random(ChaCha8Rng::seed_from_u64(seed))
    }

    /// Returns a number from 0 to `end` − 1 (0 for an empty range).
    pub fn below(&mut self, end: usize) -> usize {
        let wide = u64::from(self.0.next_u32()) * end as u64;
        (wide >> 32) as usize
    }

    /// Says yes so many times in a hundred.
    pub fn percent(&mut self, share: usize) -> bool {
        self.below(100) < share
    }

    /// Returns one of the values of an array, which is never empty.
    pub fn pick<T: Copy, const N: usize>(&mut self, from: [T; N]) -> T {
        const { assert!(N > 0) };
        from[self.below(N)]
    }

    /// Returns one of the words of a list, or an empty one from an empty list.
    pub fn word(&mut self, from: &[&'static str]) -> &'static str {
        from.get(self.below(from.len())).copied().unwrap_or("")
    }

    /// Returns an index, each as likely as its weight.
    pub fn weighted(&mut self, weights: impl Iterator<Item = usize> + Clone) -> usize {
        let mut left = self.below(weights.clone().sum());
        for (i, weight) in weights.enumerate() {
            if left < weight {
                return i;
            }
            left -= weight;
        }
        0
    }
}
