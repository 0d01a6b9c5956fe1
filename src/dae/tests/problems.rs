//! Small systems with known solutions, written by hand for the tests.

use crate::dae::{Evaluation, Pattern, Point, System};

/// A system on a full pattern from closures of (t, x) that fill q and f; slopes by the closures too (row-major).
pub struct Written<F> {
    pub size: usize,
    pub pattern: Pattern,
    /// Fills (q, f, dq, df), the last two row by row.
    pub law: F,
}

impl<F: Fn(f64, &[f64], &mut [f64], &mut [f64], &mut [f64], &mut [f64])> Written<F> {
    pub fn new(size: usize, law: F) -> Self {
        let positions: Vec<_> = (0..size * size).map(|k| (k / size, k % size)).collect();
        Written {
            size,
            pattern: Pattern::from_positions(size, &positions),
            law,
        }
    }
}

impl<F: Fn(f64, &[f64], &mut [f64], &mut [f64], &mut [f64], &mut [f64])> System for Written<F> {
    fn size(&self) -> usize {
        self.size
    }
    fn pattern(&self) -> &Pattern {
        &self.pattern
    }
    fn evaluate(&self, at: Point<'_>, slopes: bool, out: &mut Evaluation) {
        let n = self.size;
        let (mut dq, mut df) = (vec![0.0; n * n], vec![0.0; n * n]);
        (self.law)(at.time, at.x, &mut out.q, &mut out.f, &mut dq, &mut df);
        if slopes {
            for row in 0..n {
                for column in 0..n {
                    out.dq[column * n + row] = dq[row * n + column];
                    out.df[column * n + row] = df[row * n + column];
                }
            }
        }
    }
}

/// 1 F through 1 ohm to a 1 V source that a mode switches off at time 1; a guard at 0.5 V switches it on again.
pub struct Charger {
    pub pattern: Pattern,
}

impl Charger {
    pub fn new() -> Self {
        Charger {
            pattern: Pattern::from_positions(2, &[(0, 0), (0, 1), (1, 0), (1, 1)]),
        }
    }
}

impl System for Charger {
    fn size(&self) -> usize {
        2
    }
    fn pattern(&self) -> &Pattern {
        &self.pattern
    }
    /// x0: capacitor [V], x1: current into it [A]; mode 0: source [V], mode 1: number of events.
    fn evaluate(&self, at: Point<'_>, slopes: bool, out: &mut Evaluation) {
        out.q.copy_from_slice(&[at.x[0], 0.0]);
        out.f
            .copy_from_slice(&[-at.x[1], at.x[1] - (at.mode[0] - at.x[0])]);
        if slopes {
            out.dq.copy_from_slice(&[1.0, 0.0, 0.0, 0.0]);
            out.df.copy_from_slice(&[0.0, 1.0, -1.0, 1.0]);
        }
    }
    fn mode_size(&self) -> usize {
        2
    }
    fn next_event(&self, time: f64, _mode: &[f64]) -> f64 {
        if time < 1.0 { 1.0 } else { f64::INFINITY }
    }
    fn guard_size(&self) -> usize {
        1
    }
    fn guards(&self, at: Point<'_>, out: &mut [f64]) {
        out[0] = if at.mode[0] == 0.0 {
            0.5 - at.x[0]
        } else {
            -1.0
        };
    }
    fn transition(
        &self,
        cause: crate::dae::Cause,
        _time: f64,
        _x: &mut [f64],
        mode: &mut [f64],
    ) -> bool {
        mode[0] = if cause == crate::dae::Cause::Time {
            0.0
        } else {
            1.0
        };
        mode[1] += 1.0;
        true
    }
}
