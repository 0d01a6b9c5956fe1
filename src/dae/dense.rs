//! Dense output: the polynomial that a method lays through a step, for every unknown.
//!
//! In Newton's form over the step's own points: x(s) = c0 + (s - p0) (c1 + (s - p1) (c2 + ...)), with s = 0 at the
//! step's start and 1 at its end. It passes through the values at both ends.

/// The polynomial of one step.
#[derive(Clone, Copy, Debug)]
pub struct Dense<'a> {
    /// Points p of the step in its own measure, 0 first; one more than the polynomial's degree.
    pub points: &'a [f64],
    /// Coefficients, `points.len()` rows of one value per unknown.
    pub coefficients: &'a [f64],
}

impl Dense<'_> {
    /// Values of all unknowns at `s`.
    pub fn at(&self, s: f64, x: &mut [f64]) {
        let n = x.len();
        let last = self.points.len() - 1;
        x.copy_from_slice(&self.coefficients[last * n..]);
        for k in (0..last).rev() {
            let distance = s - self.points[k];
            for (value, &coefficient) in x.iter_mut().zip(&self.coefficients[k * n..]) {
                *value = coefficient + distance * *value;
            }
        }
    }

    /// Value and slope (per step) of unknown `which` of `n`.
    pub fn one(&self, s: f64, which: usize, n: usize) -> (f64, f64) {
        let (mut value, mut slope) = (0.0, 0.0);
        for k in (0..self.points.len()).rev() {
            let distance = s - self.points[k];
            slope = value + distance * slope;
            value = self.coefficients[k * n + which] + distance * value;
        }
        (value, slope)
    }
}

/// Turns rows of values at `points` into coefficients, in place (divided differences).
pub(crate) fn divide_differences(points: &[f64], rows: &mut [f64], n: usize) {
    for level in 1..points.len() {
        for k in (level..points.len()).rev() {
            let reciprocal = 1.0 / (points[k] - points[k - level]);
            let (before, after) = rows.split_at_mut(k * n);
            for (value, &previous) in after[..n].iter_mut().zip(&before[(k - 1) * n..]) {
                *value = (*value - previous) * reciprocal;
            }
        }
    }
}
