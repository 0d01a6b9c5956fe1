//! The length of the next step from the errors of the last ones.
//!
//! Predictive (PI) control: with the error of the step before, the trend of the error is followed and not only its
//! size. Gustafsson, *ACM Trans. Math. Software* 20 (1994) 496; Hairer & Wanner II, IV.8 (both from memory).

/// Aim below the tolerance by this factor of the length, so that few steps are lost.
const CAUTION: f64 = 0.9;
/// The next step is at most so many times longer,
const GROWTH: f64 = 6.0;
/// and a step that was too inaccurate is tried again at least this share as long.
const SHRINKAGE: f64 = 0.1;

/// A second failure in a row shortens the step at least so much: the error does not follow its order there.
const REPEATED: f64 = 0.5;
/// An error so large that it has not fallen with the step belongs to something far faster than the step: it is tried again
/// at this share.
const VAST: f64 = 1e3;
const LEAP: f64 = 1e-2;
/// Factor for trying a step again whose stages could not be solved.
const STALLED: f64 = 0.25;

/// Memory of the control.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Control {
    /// Order of the error estimate.
    order: f64,
    /// Length and error of the last kept step; none after an event.
    last: Option<(f64, f64)>,
    /// Attempts given up since a step was kept.
    failures: u32,
    /// Error of the attempt given up last.
    failed: f64,
}

impl Control {
    pub fn new(order: u32) -> Self {
        Control {
            order: f64::from(order),
            last: None,
            failures: 0,
            failed: 0.0,
        }
    }

    /// The order of the estimates to come.
    pub fn follow(&mut self, order: u32) {
        if self.order != f64::from(order) {
            self.order = f64::from(order);
            self.last = None;
        }
    }

    /// An event: the errors so far tell nothing about the steps to come.
    pub fn restart(&mut self) {
        self.last = None;
        self.failures = 0;
    }

    /// Factor for the step after a kept one of this length and error.
    pub fn next(&mut self, length: f64, error: f64) -> f64 {
        let error = error.max(1e-10);
        let plain = CAUTION * error.powf(-1.0 / self.order);
        let factor = match self.last {
            Some((before, error_before)) => {
                let trend = (error_before / error).powf(1.0 / self.order) * length / before;
                plain.min(plain * trend)
            }
            None => plain,
        };
        self.last = Some((length, error.max(1e-2)));
        let most = if self.failures > 0 { 1.0 } else { GROWTH };
        self.failures = 0;
        factor.clamp(SHRINKAGE, most)
    }

    /// Factor for trying a step again that had this error.
    pub fn again(&mut self, error: f64) -> f64 {
        self.failures += 1;
        let stuck = self.failures > 1 && error > VAST && error > 0.5 * self.failed;
        self.failed = error;
        if stuck {
            return LEAP;
        }
        let most = if self.failures > 1 { REPEATED } else { 0.9 };
        (CAUTION * error.powf(-1.0 / self.order)).clamp(SHRINKAGE, most)
    }

    /// Factor for trying a step again whose stages could not be solved.
    pub fn after_stall(&mut self) -> f64 {
        self.failures += 1;
        STALLED
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_vast_error_that_does_not_fall_with_the_step_is_left_by_a_leap() {
        let mut control = Control::new(4);
        assert_eq!(control.again(1e7), SHRINKAGE);
        assert_eq!(control.again(0.9e7), LEAP);
        assert_eq!(control.again(1e6), SHRINKAGE);
        // A small error that stays may be rounding: shorter steps would not help.
        assert_eq!(control.again(10.0), REPEATED);
        assert_eq!(control.again(10.0), REPEATED);
    }
}
