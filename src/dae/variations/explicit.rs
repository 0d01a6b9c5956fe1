//! How f and q move with parameters and with the memory in modes while x stands still: central differences.
//!
//! A parameter's shadows are evaluated as they are. A mode entry that moves with any column is shifted by itself: an
//! entry that took an event's instant by a small share of the step, any other by a small share of its value. The
//! shift is what remains of it after rounding, so that late instants lose nothing.

use super::Shadows;
use crate::dae::newton::evaluation;
use crate::dae::statistics::Statistics;
use crate::dae::system::{Evaluation, Point, System};

/// Share of a step by which an instant in the modes is shifted.
const OF_STEP: f64 = 1e-5;
/// Share of its value by which any other entry is shifted.
const OF_VALUE: f64 = 1e-5;

/// df/dp and dq/dp at fixed x, one row per column.
#[derive(Clone, Debug, Default)]
pub(super) struct Explicit {
    pub f: Vec<f64>,
    pub q: Vec<f64>,
}

/// What moves with the columns besides x.
pub(super) struct Moving<'v, 'a, S: ?Sized> {
    /// Shadows of the columns that are parameters.
    pub columns: &'v [Option<Shadows<'a, S>>],
    /// d(mode)/dp, one row per column.
    pub modes: &'v [f64],
    /// Pace of the motion [s].
    pub length: f64,
}

/// Memory for differences.
#[derive(Debug)]
pub(super) struct Differences {
    more: Evaluation,
    less: Evaluation,
    shifted: Vec<f64>,
    /// Mode entries that hold instants of events,
    pub instants: Vec<bool>,
    /// entries that had an influence in the step at hand,
    felt: Vec<bool>,
    /// and entries that had none in a whole step since the last event: laws are smooth between events, so what has no
    /// influence in one step has none in the next.
    idle: Vec<bool>,
}

impl Differences {
    pub fn new<S: System + ?Sized>(system: &S) -> Self {
        let modes = system.mode_size();
        Differences {
            more: evaluation(system.size(), system.pattern().len()),
            less: evaluation(system.size(), system.pattern().len()),
            shifted: vec![0.0; modes],
            instants: vec![false; modes],
            felt: vec![false; modes],
            idle: vec![false; modes],
        }
    }

    pub fn modes(&self) -> usize {
        self.shifted.len()
    }

    /// An event: every entry of the modes may have an influence again.
    pub fn restart(&mut self) {
        self.idle.fill(false);
        self.felt.fill(false);
    }

    /// A step is over whose stages have all been looked at.
    pub fn settle(&mut self) {
        for (idle, felt) in self.idle.iter_mut().zip(&mut self.felt) {
            *idle = !std::mem::take(felt);
        }
    }

    /// The size by which entry `slot` of `mode` may be shifted; `length` [s] is the pace of the motion.
    fn shift(&self, slot: usize, mode: &[f64], length: f64) -> f64 {
        if self.instants[slot] {
            OF_STEP * length
        } else {
            OF_VALUE * mode[slot].abs().max(1e-6)
        }
    }

    /// Fills `into` for the columns at a point.
    pub fn take<S: System + ?Sized>(
        &mut self,
        system: &S,
        moving: &Moving<'_, '_, S>,
        at: Point<'_>,
        into: &mut Explicit,
        counted: &mut Statistics,
    ) {
        let (n, columns) = (at.x.len(), moving.columns);
        for rows in [&mut into.f, &mut into.q] {
            rows.clear();
            rows.resize(columns.len() * n, 0.0);
        }
        for slot in 0..self.shifted.len() {
            let moves = |row: &[f64]| row[slot] != 0.0;
            if self.idle[slot] || !moving.modes.chunks_exact(self.shifted.len()).any(moves) {
                continue;
            }
            self.along_mode(system, slot, moving, at, into);
            counted.evaluations += 2;
        }
        for (column, shadows) in columns.iter().enumerate() {
            let Some(shadows) = shadows else { continue };
            shadows.more.evaluate(at, false, &mut self.more);
            shadows.less.evaluate(at, false, &mut self.less);
            counted.evaluations += 2;
            let reciprocal = 0.5 / shadows.step;
            let rows = column * n..(column + 1) * n;
            add(
                &mut into.f[rows.clone()],
                &self.more.f,
                &self.less.f,
                reciprocal,
            );
            add(&mut into.q[rows], &self.more.q, &self.less.q, reciprocal);
        }
    }

    fn along_mode<S: System + ?Sized>(
        &mut self,
        system: &S,
        slot: usize,
        moving: &Moving<'_, '_, S>,
        at: Point<'_>,
        into: &mut Explicit,
    ) {
        let n = at.x.len();
        let shift = self.shift(slot, at.mode, moving.length);
        let (high, low) = (at.mode[slot] + shift, at.mode[slot] - shift);
        self.shifted.copy_from_slice(at.mode);
        for (value, out) in [(high, &mut self.more), (low, &mut self.less)] {
            self.shifted[slot] = value;
            let mode = &self.shifted;
            system.evaluate(Point { mode, ..at }, false, out);
        }
        if self.more.f == self.less.f && self.more.q == self.less.q {
            return;
        }
        self.felt[slot] = true;
        let rows = moving.modes.chunks_exact(self.shifted.len());
        for (column, row) in rows.enumerate() {
            let factor = row[slot] / (high - low);
            let rows = column * n..(column + 1) * n;
            add(
                &mut into.f[rows.clone()],
                &self.more.f,
                &self.less.f,
                factor,
            );
            add(&mut into.q[rows], &self.more.q, &self.less.q, factor);
        }
    }
}

fn add(into: &mut [f64], more: &[f64], less: &[f64], factor: f64) {
    for ((into, more), less) in into.iter_mut().zip(more).zip(less) {
        *into += (more - less) * factor;
    }
}
