//! A system whose law has a kink where one unknown passes zero, with that passage as a located event.

use coilbreak::dae::{Cause, Evaluation, Pattern, Point, System};

/// The system within, and the unknown whose sign is watched. The last mode is the side on which it is, 1 or -1.
pub struct Located<S> {
    pub system: S,
    pub unknown: usize,
}

impl<S: System> Located<S> {
    fn inner<'a>(&self, at: Point<'a>) -> Point<'a> {
        Point {
            mode: &at.mode[..self.system.mode_size()],
            ..at
        }
    }
}

impl<S: System> System for Located<S> {
    fn size(&self) -> usize {
        self.system.size()
    }
    fn pattern(&self) -> &Pattern {
        self.system.pattern()
    }
    fn evaluate(&self, at: Point<'_>, slopes: bool, out: &mut Evaluation) {
        self.system.evaluate(self.inner(at), slopes, out);
    }
    fn limit(&self, x: &[f64], dx: &mut [f64]) -> bool {
        self.system.limit(x, dx)
    }
    fn mode_size(&self) -> usize {
        self.system.mode_size() + 1
    }
    fn next_event(&self, time: f64, mode: &[f64]) -> f64 {
        self.system
            .next_event(time, &mode[..self.system.mode_size()])
    }
    fn guard_size(&self) -> usize {
        1
    }
    fn guards(&self, at: Point<'_>, out: &mut [f64]) {
        out[0] = -at.mode[self.system.mode_size()] * at.x[self.unknown];
    }
    fn transition(&self, cause: Cause, time: f64, x: &mut [f64], mode: &mut [f64]) -> bool {
        let own = self.system.mode_size();
        match cause {
            Cause::Time => self.system.transition(cause, time, x, &mut mode[..own]),
            // Everything is continuous: the step ends here and the march goes on with what it knows.
            Cause::Guard(_) => {
                mode[own] = -mode[own];
                false
            }
        }
    }
}
