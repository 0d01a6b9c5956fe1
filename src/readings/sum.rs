//! A sum that does not lose small terms beside a large total.

/// Neumaier's compensated sum (from memory): what rounding takes from the total is kept apart and added at the end.
#[derive(Clone, Copy, Debug, Default)]
pub(super) struct Sum {
    total: f64,
    lost: f64,
}

impl Sum {
    /// Adds a term.
    pub fn add(&mut self, term: f64) {
        let total = self.total + term;
        self.lost += if self.total.abs() >= term.abs() {
            (self.total - total) + term
        } else {
            (term - total) + self.total
        };
        self.total = total;
    }

    /// The sum.
    pub fn value(self) -> f64 {
        self.total + self.lost
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_million_small_terms_beside_a_large_one_are_kept() {
        let mut sum = Sum::default();
        sum.add(1e16);
        (0..1_000_000).for_each(|_| sum.add(0.1));
        sum.add(-1e16);
        // A plain sum gives 0: each term is less than half a unit in the last place of 1e16.
        assert!((sum.value() - 1e5).abs() < 1e-5);
    }
}
