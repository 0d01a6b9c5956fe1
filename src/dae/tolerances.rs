//! How finely each unknown is wanted.

/// Tolerated error of each unknown in a step, in the unknown's own unit.
#[derive(Clone, Debug, PartialEq)]
pub struct Tolerances {
    /// Absolute part, one positive value per unknown.
    pub absolute: Vec<f64>,
    /// Share of the unknown's magnitude that is added; 0 leaves the absolute part alone.
    pub relative: f64,
    /// How long a magnitude past still counts [s], 0 for the present one alone: it fades by e in this time. An
    /// oscillation's zeros are then not resolved as if they were all there is.
    pub memory: f64,
}

impl Tolerances {
    /// Absolute tolerances alone.
    pub fn absolute(absolute: Vec<f64>) -> Self {
        Tolerances {
            absolute,
            relative: 0.0,
            memory: f64::INFINITY,
        }
    }

    /// Fills `weights` with the reciprocal of what is tolerated at `x`, where a march begins.
    pub(crate) fn weigh(&self, x: &[f64], weights: &mut [f64]) {
        for ((weight, &absolute), &value) in weights.iter_mut().zip(&self.absolute).zip(x) {
            *weight = 1.0 / (absolute + self.relative * value.abs());
        }
    }

    /// Lets `weights` follow to `x`, where the march has gone on by `length` [s].
    pub(crate) fn follow(&self, x: &[f64], length: f64, weights: &mut [f64]) {
        if self.relative == 0.0 {
            self.weigh(x, weights);
            return;
        }
        let faded = (length / self.memory).exp();
        for ((weight, &absolute), &value) in weights.iter_mut().zip(&self.absolute).zip(x) {
            let here = 1.0 / (absolute + self.relative * value.abs());
            *weight = here.min(*weight * faded);
        }
    }
}

/// The largest weighted entry of `v` and its place: an error in tolerances, and the unknown that sets it.
///
/// The largest, not a mean: a mean over a long line or a large circuit is diluted by its quiet parts. Entries that
/// are not numbers win.
#[inline]
pub(crate) fn largest(v: &[f64], weights: &[f64]) -> (f64, usize) {
    let mut most = (0.0, 0);
    for (place, (&value, &weight)) in v.iter().zip(weights).enumerate() {
        let size = (value * weight).abs();
        if size > most.0 {
            most = (size, place);
        } else if size.is_nan() {
            return (f64::INFINITY, place);
        }
    }
    most
}

/// True where some entry of a Newton step is above `close` tolerances and has hardly fallen since the step `before`.
///
/// An exponential law far above its solution moves by one and the same small voltage in every iteration: beside a
/// quickly falling entry elsewhere that looks like convergence, and is not.
#[inline]
pub(crate) fn lags(step: &[f64], before: &[f64], weights: &[f64], close: f64) -> bool {
    let entries = step.iter().zip(before).zip(weights);
    entries.into_iter().any(|((step, before), weight)| {
        let size = (step * weight).abs();
        size > close && size > 0.3 * (before * weight).abs()
    })
}

/// True where every entry of a Newton step that is above `close` tolerances is below what rounding does to it, `noise`.
///
/// Every entry of its own: beside a current of megamperes, whose last digit moves, a voltage may still have far to go.
pub(crate) fn drowns(step: &[f64], noise: &[f64], weights: &[f64], close: f64) -> bool {
    let mut entries = step.iter().zip(noise).zip(weights);
    entries.all(|((step, noise), weight)| step.abs() <= noise.max(close / weight))
}

/// Patterns of signs with which rounding is tried: what cancels in one (two rows of one branch, two windings on one
/// core) adds up in another. Any two of eight rows in a row differ in sign in some of them (Walsh's functions).
pub(crate) const SIGNS: [[f64; 8]; 4] = [
    [1.0, -1.0, 1.0, -1.0, 1.0, -1.0, 1.0, -1.0],
    [1.0, 1.0, 1.0, 1.0, 1.0, 1.0, 1.0, 1.0],
    [1.0, 1.0, -1.0, -1.0, 1.0, 1.0, -1.0, -1.0],
    [1.0, 1.0, 1.0, 1.0, -1.0, -1.0, -1.0, -1.0],
];

/// What rounding may do to a row whose terms are of this size.
#[inline]
pub(crate) fn rounding(row: usize, terms: f64, signs: [f64; 8]) -> f64 {
    4.0 * f64::EPSILON * terms * signs[row % 8]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_step_drowns_only_where_each_of_its_entries_does() {
        let (noise, weights) = ([1e-3, 1e-15], [1e10, 1e7]);
        assert!(drowns(&[6e-4, 1e-10], &noise, &weights, 1e-2));
        assert!(!drowns(&[6e-4, 0.05], &noise, &weights, 1e-2));
    }

    #[test]
    fn any_two_of_eight_rows_differ_in_sign_in_some_pattern_and_agree_in_another() {
        for (a, b) in (0..8).flat_map(|a| (0..a).map(move |b| (a, b))) {
            assert!(SIGNS.iter().any(|signs| signs[a] != signs[b]), "{a} {b}");
            assert!(SIGNS.iter().any(|signs| signs[a] == signs[b]), "{a} {b}");
        }
    }
}
