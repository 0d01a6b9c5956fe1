//! How errors pile up: what is left of the errors of all steps so far, and the share of a tolerance that this leaves.
//!
//! The sum of the steps' estimated errors, each in tolerances, is carried along by the linearised step: v <- P v + e. In
//! a barely damped ring its size is the number of steps made (they all err the same way), in a circuit that forgets
//! it stays near one. Errors of steps fall faster than their estimates (order 5 as h^6 beside h^4, order 9 as h^10
//! beside h^6), like the tolerance to the power 1.5 to 1.67: when the tolerance falls as the pile to the power -0.63,
//! the step's error falls as 1/pile, and a sum over the whole run grows like the logarithm of its length.

use super::tolerances::Tolerances;

/// The tolerance falls as the pile to this power.
const POWER: f64 = -0.63;
/// Smallest share: a solution that doubles every error again and again must not end in steps of nothing.
const LEAST: f64 = 0.01;
/// The share rises again by this factor a step at most, where the pile has melted.
const RISE: f64 = 1.05;

/// The pile.
#[derive(Clone, Debug)]
pub(crate) struct Pile {
    /// Errors so far, each divided by the share that was in force.
    pub errors: Vec<f64>,
    /// Share of the tolerance in force.
    pub share: f64,
    /// Share that is in the weights.
    weighed: f64,
}

impl Pile {
    /// Nothing yet, for so many unknowns.
    pub fn new(size: usize) -> Self {
        Pile {
            errors: vec![0.0; size],
            share: 1.0,
            weighed: 1.0,
        }
    }

    /// Lets the reciprocal tolerances follow to `x`, where the march has gone on by `length` [s], with the share in force.
    pub fn weigh(&mut self, tolerances: &Tolerances, x: &[f64], length: f64, weights: &mut [f64]) {
        if self.weighed < 1.0 {
            for weight in &mut *weights {
                *weight *= self.weighed;
            }
        }
        tolerances.follow(x, length, weights);
        if self.share < 1.0 {
            for weight in weights {
                *weight /= self.share;
            }
        }
        self.weighed = self.share;
    }

    /// The errors are now this many tolerances (without the share) high; up to `free` of them are harmless.
    pub fn grown(&mut self, height: f64, free: f64) {
        let share = (1.0 + height / free).powf(POWER);
        if share.is_finite() {
            self.share = share.min(RISE * self.share).clamp(LEAST, 1.0);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_share_falls_with_the_pile_and_rises_slowly() {
        let mut pile = Pile::new(0);
        pile.grown(0.0, 7.0);
        assert_eq!(pile.share, 1.0);
        pile.grown(63.0, 7.0);
        let fallen = 10.0_f64.powf(POWER);
        assert!((pile.share - fallen).abs() < 1e-12);
        pile.grown(0.0, 7.0);
        assert!((pile.share - RISE * fallen).abs() < 1e-12);
        pile.grown(f64::INFINITY, 7.0);
        assert_eq!(pile.share, LEAST);
        pile.grown(f64::NAN, 7.0);
        assert_eq!(pile.share, LEAST);
    }
}
