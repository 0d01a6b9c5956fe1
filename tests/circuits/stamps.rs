//! Adds shares of hand-written elements to an evaluation; row and column numbers are unknowns, `GROUND` drops out.

use coilbreak::dae::{Evaluation, Pattern};

/// The reference node.
pub const GROUND: usize = usize::MAX;

/// Where each position is stored.
#[derive(Clone, Debug)]
pub struct Places {
    pub pattern: Pattern,
    slots: Vec<usize>,
}

impl Places {
    /// Records the positions that `stamp` touches.
    pub fn new(size: usize, stamp: impl Fn(&mut Stamps<'_>)) -> Self {
        let mut positions = Vec::new();
        stamp(&mut Stamps {
            goal: Goal::Record(&mut positions),
        });
        let pattern = Pattern::from_positions(size, &positions);
        let slots = positions
            .iter()
            .map(|&(row, column)| pattern.slot(row, column).unwrap())
            .collect();
        Places { pattern, slots }
    }

    /// Fills `out` by the same stamps.
    pub fn fill(&self, slopes: bool, out: &mut Evaluation, stamp: impl Fn(&mut Stamps<'_>)) {
        out.f.fill(0.0);
        out.q.fill(0.0);
        if slopes {
            out.df.fill(0.0);
            out.dq.fill(0.0);
        }
        stamp(&mut Stamps {
            goal: Goal::Fill {
                out,
                slots: &self.slots,
                slopes,
            },
        });
    }
}

pub struct Stamps<'a> {
    goal: Goal<'a>,
}

enum Goal<'a> {
    Record(&'a mut Vec<(usize, usize)>),
    Fill {
        out: &'a mut Evaluation,
        slots: &'a [usize],
        slopes: bool,
    },
}

impl Stamps<'_> {
    #[inline]
    pub fn f(&mut self, row: usize, value: f64) {
        if let Goal::Fill { out, .. } = &mut self.goal
            && row != GROUND
        {
            out.f[row] += value;
        }
    }

    #[inline]
    pub fn q(&mut self, row: usize, value: f64) {
        if let Goal::Fill { out, .. } = &mut self.goal
            && row != GROUND
        {
            out.q[row] += value;
        }
    }

    #[inline]
    pub fn df(&mut self, row: usize, column: usize, slope: f64) {
        self.slope(row, column, slope, false);
    }

    #[inline]
    pub fn dq(&mut self, row: usize, column: usize, slope: f64) {
        self.slope(row, column, slope, true);
    }

    #[inline]
    fn slope(&mut self, row: usize, column: usize, slope: f64, charge: bool) {
        if row == GROUND || column == GROUND {
            return;
        }
        match &mut self.goal {
            Goal::Record(positions) => positions.push((row, column)),
            Goal::Fill { out, slots, slopes } => {
                if *slopes {
                    let slot = slots[0];
                    *slots = &slots[1..];
                    if charge {
                        out.dq[slot] += slope
                    } else {
                        out.df[slot] += slope
                    }
                }
            }
        }
    }

    /// A current from `a` to `b` of `value` with `slope` over their voltage.
    pub fn branch(&mut self, a: usize, b: usize, value: f64, slope: f64) {
        self.f(a, value);
        self.f(b, -value);
        self.df(a, a, slope);
        self.df(a, b, -slope);
        self.df(b, a, -slope);
        self.df(b, b, slope);
    }

    /// A linear conductance [S].
    pub fn conductance(&mut self, x: &[f64], a: usize, b: usize, g: f64) {
        self.branch(a, b, g * (value(x, a) - value(x, b)), g);
    }

    /// A linear capacitance [F].
    pub fn capacitance(&mut self, x: &[f64], a: usize, b: usize, c: f64) {
        let charge = c * (value(x, a) - value(x, b));
        self.q(a, charge);
        self.q(b, -charge);
        self.dq(a, a, c);
        self.dq(a, b, -c);
        self.dq(b, a, -c);
        self.dq(b, b, c);
    }

    /// The current unknown `i` flows from `a` to `b`.
    pub fn carry(&mut self, x: &[f64], a: usize, b: usize, i: usize) {
        self.f(a, value(x, i));
        self.f(b, -value(x, i));
        self.df(a, i, 1.0);
        self.df(b, i, -1.0);
    }
}

/// Value of an unknown; zero for ground.
pub fn value(x: &[f64], k: usize) -> f64 {
    if k == GROUND { 0.0 } else { x[k] }
}
