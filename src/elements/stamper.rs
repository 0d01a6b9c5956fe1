//! Adds an element's share to f, q and their slopes: no look-ups in the inner loop.
//!
//! Every element touches the same (row, column) positions in the same order at every call, so the positions
//! are recorded once and turned into a list of slots; afterwards each `df` or `dq` takes the next slot.

use super::unknown::Unknown;
use crate::dae::Evaluation;

/// Slot of a position that belongs to ground and is dropped.
pub const NOWHERE: u32 = u32::MAX;

/// Where shares go; made anew for each evaluation of the whole circuit.
pub struct Stamper<'a> {
    f: &'a mut [f64],
    q: &'a mut [f64],
    /// Slopes df and dq.
    slopes: [&'a mut [f64]; 2],
    /// Slots of the slopes that are still to come; none where no slopes are asked for.
    slots: std::slice::Iter<'a, u32>,
    /// Where positions are recorded instead.
    record: Option<&'a mut Vec<(Unknown, Unknown)>>,
    /// What independent sources multiply their value by: 1 but while an operating point is being sought.
    source_share: f64,
}

impl<'a> Stamper<'a> {
    /// Records the positions only; values are dropped.
    pub fn recording(positions: &'a mut Vec<(Unknown, Unknown)>) -> Self {
        Stamper {
            f: &mut [],
            q: &mut [],
            slopes: [&mut [], &mut []],
            slots: [].iter(),
            record: Some(positions),
            source_share: 1.0,
        }
    }

    /// Adds to `out`, whose vectors are sized and zeroed; `slots` is one number per recorded position.
    pub fn filling(out: &'a mut Evaluation, slots: &'a [u32], slopes: bool) -> Self {
        let Evaluation { f, q, df, dq } = out;
        let slots = if slopes { slots } else { &[] };
        Stamper {
            f,
            q,
            slopes: [df, dq],
            slots: slots.iter(),
            record: None,
            source_share: 1.0,
        }
    }

    /// With every independent source multiplied by `share`.
    #[must_use]
    pub fn raised(mut self, share: f64) -> Self {
        self.source_share = share;
        self
    }

    /// What independent sources multiply their value by.
    #[inline]
    pub fn source_share(&self) -> f64 {
        self.source_share
    }

    /// Adds `value` to f of a row.
    #[inline]
    pub fn f(&mut self, row: Unknown, value: f64) {
        if let Some(f) = self.f.get_mut(row.0 as usize) {
            *f += value;
        }
    }

    /// Adds `value` to q of a row.
    #[inline]
    pub fn q(&mut self, row: Unknown, value: f64) {
        if let Some(q) = self.q.get_mut(row.0 as usize) {
            *q += value;
        }
    }

    /// Adds `slope` to df(row)/dx(column).
    #[inline]
    pub fn df(&mut self, row: Unknown, column: Unknown, slope: f64) {
        self.slope(row, column, slope, false);
    }

    /// Adds `slope` to dq(row)/dx(column).
    #[inline]
    pub fn dq(&mut self, row: Unknown, column: Unknown, slope: f64) {
        self.slope(row, column, slope, true);
    }

    #[inline]
    fn slope(&mut self, row: Unknown, column: Unknown, slope: f64, charge: bool) {
        if let Some(&slot) = self.slots.next() {
            if let Some(value) = self.slopes[usize::from(charge)].get_mut(slot as usize) {
                *value += slope;
            }
        } else if let Some(positions) = &mut self.record {
            positions.push((row, column));
        }
    }

    /// A two-terminal current from `a` to `b`: `value` [A] with `slope` [S] over the voltage between them.
    #[inline]
    pub fn branch(&mut self, a: Unknown, b: Unknown, value: f64, slope: f64) {
        self.f(a, value);
        self.f(b, -value);
        self.df(a, a, slope);
        self.df(a, b, -slope);
        self.df(b, a, -slope);
        self.df(b, b, slope);
    }

    /// A two-terminal charge between `a` and `b`: `value` [C] with `slope` [F] over the voltage between them.
    #[inline]
    pub fn store(&mut self, a: Unknown, b: Unknown, value: f64, slope: f64) {
        self.q(a, value);
        self.q(b, -value);
        self.dq(a, a, slope);
        self.dq(a, b, -slope);
        self.dq(b, a, -slope);
        self.dq(b, b, slope);
    }

    /// A current unknown `i` that flows from `a` to `b`: adds it to both current laws.
    #[inline]
    pub fn carry(&mut self, a: Unknown, b: Unknown, i: Unknown, value: f64) {
        self.f(a, value);
        self.f(b, -value);
        self.df(a, i, 1.0);
        self.df(b, i, -1.0);
    }
}
