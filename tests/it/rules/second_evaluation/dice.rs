//! Random choices that a seed repeats.

/// A seeded generator: xorshift.
pub struct Dice(pub u64);

impl Dice {
    pub fn roll(&mut self, sides: u64) -> u64 {
        self.0 ^= self.0 << 13;
        self.0 ^= self.0 >> 7;
        self.0 ^= self.0 << 17;
        (self.0 >> 16) % sides
    }

    pub fn index(&mut self, sides: u64) -> usize {
        usize::try_from(self.roll(sides)).unwrap()
    }
}
