//! Chance from a seed: the same seed, the same netlists.

/// A generator of random numbers (SplitMix64: a counter and a mixing function; Steele, Lea and Flood, 2014, from memory).
#[derive(Clone, Debug)]
pub struct Dice(u64);

impl Dice {
    /// Dice of their own for each number under a seed.
    pub fn new(seed: u64, number: u64) -> Self {
        let mut dice = Dice(seed ^ number.wrapping_mul(0xd134_2543_de82_ef95));
        dice.next();
        dice
    }

    fn next(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    }

    /// Uniform in [0, 1).
    pub fn share(&mut self) -> f64 {
        (self.next() >> 11) as f64 / (1_u64 << 53) as f64
    }

    /// Uniform between two values.
    pub fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * self.share()
    }

    /// Between two positive values, every decade as likely as the next.
    pub fn over_decades(&mut self, low: f64, high: f64) -> f64 {
        low * (high / low).powf(self.share())
    }

    /// A whole number below `count`, which is not 0.
    pub fn below(&mut self, count: usize) -> usize {
        (self.next() % count as u64) as usize
    }

    /// True with this chance.
    pub fn chance(&mut self, share: f64) -> bool {
        self.share() < share
    }

    /// One of several.
    pub fn one_of<T: Copy>(&mut self, all: &[T]) -> T {
        all[self.below(all.len())]
    }
}
