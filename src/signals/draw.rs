//! Numbers for property tests: the same ones at every run.

/// A multiplicative congruential generator with 64 bits of state, its upper half used (Knuth's MMIX constants,
/// from memory). Good enough to wander through cases, and seeded.
pub(crate) struct Draw(u64);

impl Draw {
    /// Starts at a seed.
    pub fn new(seed: u64) -> Self {
        Draw(seed)
    }

    /// The next 32 bits.
    pub fn bits(&mut self) -> u32 {
        self.0 = self
            .0
            .wrapping_mul(6_364_136_223_846_793_005)
            .wrapping_add(1_442_695_040_888_963_407);
        (self.0 >> 32) as u32
    }

    /// Uniform between two numbers.
    pub fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * f64::from(self.bits()) / 4_294_967_296.0
    }

    /// One of `count`, from 0.
    pub fn below(&mut self, count: usize) -> usize {
        self.bits() as usize % count.max(1)
    }
}
