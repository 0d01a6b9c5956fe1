//! One period with variations: what came of it, and the Newton step that follows.

use super::directions::Directions;
use crate::dae::march::State;
use nalgebra::{DMatrix, DVector};
use num_complex::Complex64;

/// A Newton step this small, in scales, converges quadratically.
pub(super) const SMALL: f64 = 0.03;
/// A coordinate whose whole scale moves nothing by more than this share over a period is forgotten within it.
const FORGOTTEN: f64 = 0.05;
/// One that keeps less than this share of itself moves by so many scales at most in one step.
const KEPT: f64 = 0.5;
const STRAYING: f64 = 2.0;

/// A period with variations, and the Newton step that follows from it.
pub(super) struct Period {
    pub directions: Directions,
    /// Where it ended, turned back by the period.
    pub state: State,
    /// Its length [s].
    pub length: f64,
    /// Charges at its end.
    pub charges: Vec<f64>,
    /// Change of the coordinates over it.
    pub residual: DVector<f64>,
    /// Newton step of the coordinates and of the period [s].
    pub step: DVector<f64>,
    pub stretch: f64,
    /// How far the unknown of each direction drifted over it, in its scale.
    pub drift: Vec<f64>,
    /// What each coordinate leaves behind of itself at the end, and the most of any.
    pub traces: Vec<(f64, f64)>,
}

impl Period {
    /// Largest drift of an unknown that is remembered from one period to the next.
    pub fn change(&self, traces: &[(f64, f64)]) -> f64 {
        let pairs = self.drift.iter().zip(traces);
        pairs
            .filter(|(_, (_, any))| *any > FORGOTTEN)
            .fold(0.0, |most: f64, (drift, _)| most.max(drift.abs()))
    }

    /// The Newton step seen from the period's end. While it is large, what is forgotten within a period is left as it
    /// is there, and what keeps little of itself stays near its swing: straight lines lead nowhere for a junction or a
    /// ringing, and by the next end they have found their place by themselves.
    pub fn moved(&self, share: f64) -> DVector<f64> {
        let mut moved = (&self.step - &self.residual) * share;
        if self.size() > SMALL {
            for (moved, &(own, any)) in moved.iter_mut().zip(&self.traces) {
                if any <= FORGOTTEN {
                    *moved = 0.0;
                } else if own < KEPT {
                    *moved = moved.clamp(-STRAYING, STRAYING);
                }
            }
        }
        moved
    }

    /// Size of the Newton step, in scales and periods.
    pub fn size(&self) -> f64 {
        self.step.amax().max(self.stretch.abs() / self.length)
    }
}

/// Inverse of 1 - M, with `motion` (dz per period) bordered by the phase: the last unknown is dT/T.
pub(super) fn newton_inverse(
    monodromy: &DMatrix<f64>,
    motion: Option<&DVector<f64>>,
) -> Option<DMatrix<f64>> {
    let count = monodromy.nrows();
    let size = count + usize::from(motion.is_some());
    let mut matrix = DMatrix::identity(size, size);
    for row in 0..count {
        for column in 0..count {
            matrix[(row, column)] -= monodromy[(row, column)];
        }
        if let Some(motion) = motion {
            matrix[(row, count)] = -motion[row];
            matrix[(count, row)] = motion[row];
        }
    }
    if motion.is_some() {
        matrix[(count, count)] = 0.0;
    }
    matrix
        .try_inverse()
        .filter(|inverse| inverse.iter().all(|value| value.is_finite()))
}

/// Eigenvalues, largest first; for a free period the one nearest to 1 belongs to a shift in time and is left out.
pub(super) fn multipliers(monodromy: &DMatrix<f64>, free: bool) -> Vec<Complex64> {
    if monodromy.is_empty() || monodromy.iter().any(|value| !value.is_finite()) {
        return Vec::new();
    }
    let mut values: Vec<Complex64> = monodromy
        .complex_eigenvalues()
        .iter()
        .map(|value| Complex64::new(value.re, value.im))
        .collect();
    if free {
        let distance = |value: &Complex64| (value - 1.0).norm();
        values.sort_by(|a, b| distance(a).total_cmp(&distance(b)));
        values.remove(0);
    }
    values.sort_by(|a, b| b.norm().total_cmp(&a.norm()));
    values
}
