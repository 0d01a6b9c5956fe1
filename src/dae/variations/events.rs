//! An event, differentiated: its instant, its transition, the charges that pass through it and the instant after it.
//!
//! With the instant's derivative T, what was dq/dp at fixed time is dq + (dq/dt) T at the event itself, passes the
//! transition, and is (…) - (dq/dt) T of the motion afterwards at fixed time again: the saltation of M. A. Aizerman and
//! F. R. Gantmakher (1958; from memory). A guard gives T = -(dg/dp)/(dg/dt); the clock's instants are asked of the
//! shadows.

use super::Variations;
use super::explicit::Explicit;
use super::linear::multiply;
use super::shadows::OF_SCALE;
use crate::dae::instant::{INSTANT, LONGEST_INSTANT, Meeting, ROUNDING};
use crate::dae::system::{Cause, Point, System};
use crate::dae::tolerances::{SIGNS, rounding};
use crate::math::Singular;

/// An event that was taken.
pub(crate) struct Taken<'a> {
    pub cause: Cause,
    /// Before it.
    pub before: Point<'a>,
    /// Unknowns after the transition, before the charges met.
    pub jumped: &'a [f64],
    /// After it.
    pub after: Point<'a>,
    /// How the charges met; None where nothing changed.
    pub meeting: Option<&'a Meeting>,
}

/// The motion before an event.
pub(super) struct Motion {
    /// dx/dt.
    pub x: Vec<f64>,
    /// dq/dt.
    pub q: Vec<f64>,
}

impl<S: System + ?Sized> Variations<'_, S> {
    /// Starts the columns at rest: charges stay as they are, f(x) = 0 moves with the parameters.
    ///
    /// # Errors
    /// Where the state at rest is not determined.
    pub fn start_at_rest(&mut self, system: &S, at: Point<'_>) -> Result<(), Singular> {
        let explicit = self.explicit_at(system, at);
        self.linear.at(system, at, 0.0, &mut self.counted)?;
        for (x, f) in self.x.iter_mut().zip(&explicit.f) {
            *x = -f;
        }
        let n = self.scales.len();
        for x in self.x.chunks_exact_mut(n.max(1)) {
            self.linear.solve(x, &mut self.counted);
        }
        self.finish(&explicit);
        Ok(())
    }

    /// Starts the columns from given derivatives of the charges, one row per column; parameters' direct share in
    /// them included.
    ///
    /// # Errors
    /// Where charges and algebraic equations do not determine the state.
    pub fn start_from_charges(
        &mut self,
        system: &S,
        at: Point<'_>,
        charges: &[f64],
    ) -> Result<(), Singular> {
        let explicit = self.explicit_at(system, at);
        self.q.copy_from_slice(charges);
        let mut length = INSTANT;
        self.linear
            .at(system, at, 1.0 / length, &mut self.counted)?;
        while length < LONGEST_INSTANT && self.noise(at) > ROUNDING * OF_SCALE {
            length *= 10.0;
            self.linear.factor(1.0 / length, &mut self.counted)?;
        }
        for _ in 0..2 {
            self.meet(&explicit);
            self.finish(&explicit);
        }
        Ok(())
    }

    /// By what share of its scale an unknown moves when the charges' last digits do.
    fn noise(&mut self, at: Point<'_>) -> f64 {
        let mut charge = vec![0.0; at.x.len()];
        multiply(
            &self.linear.pattern,
            &self.linear.out.dq,
            &self.scales,
            &mut charge,
        );
        let rate = self.linear.rate;
        let mut v: Vec<f64> = charge
            .iter()
            .enumerate()
            .map(|(row, charge)| rounding(row, rate * charge, SIGNS[0]))
            .collect();
        self.linear.solve(&mut v, &mut self.counted);
        let shares = v.iter().zip(&self.scales);
        shares
            .map(|(v, scale)| (v / scale).abs())
            .fold(0.0, f64::max)
    }

    fn explicit_at(&mut self, system: &S, at: Point<'_>) -> Explicit {
        let mut explicit = Explicit::default();
        self.explicit(system, at, &mut explicit);
        explicit
    }

    /// One implicit Euler step of an instant's length for every column, from dq to dx.
    fn meet(&mut self, explicit: &Explicit) {
        let rate = self.linear.rate;
        for (k, x) in self.x.iter_mut().enumerate() {
            *x = rate * (self.q[k] - explicit.q[k]) - explicit.f[k];
        }
        let n = self.scales.len();
        for x in self.x.chunks_exact_mut(n.max(1)) {
            self.linear.solve(x, &mut self.counted);
        }
    }

    /// dq and df that belong to dx, with the slopes at hand.
    fn finish(&mut self, explicit: &Explicit) {
        let n = self.scales.len().max(1);
        self.q.copy_from_slice(&explicit.q);
        self.f.copy_from_slice(&explicit.f);
        let charges = self.q.chunks_exact_mut(n).zip(self.f.chunks_exact_mut(n));
        for (x, (q, f)) in self.x.chunks_exact(n).zip(charges) {
            multiply(&self.linear.pattern, &self.linear.out.dq, x, q);
            multiply(&self.linear.pattern, &self.linear.out.df, x, f);
        }
    }

    /// The first event of an instant is about to be taken.
    pub(crate) fn before_events(&mut self) {
        self.x_before.copy_from_slice(&self.x);
    }

    /// Carries the columns over an event.
    pub(crate) fn event(&mut self, system: &S, taken: &Taken<'_>) -> Result<(), Singular> {
        self.last_shifts.copy_from_slice(&self.shifts);
        let rate = taken
            .meeting
            .map_or(1.0 / INSTANT, |meeting| meeting.rates[1]);
        let follows = taken.cause != Cause::Time && taken.before.time == self.last_event;
        let mut motion = None;
        if let (Cause::Guard(guard), false) = (taken.cause, follows) {
            let before = self.motion(system, taken.before, rate)?;
            self.guard_shifts(system, guard, taken.before, &before);
            motion = Some(before);
        } else if taken.cause == Cause::Time {
            self.clock_shifts(system, taken);
        }
        let still = self.shifts.iter().all(|&shift| shift == 0.0);
        if motion.is_none() && !still {
            motion = Some(self.motion(system, taken.before, rate)?);
        }
        let jumps = taken.jumped != taken.before.x;
        let held = jumps.then(|| (self.mode.clone(), self.explicit_at(system, taken.before)));
        let moved = self.transitions(system, taken, motion.as_ref());
        if let Some(motion) = &motion {
            self.shift_charges(&motion.q, 1.0);
        }
        if let Some((modes, explicit)) = held {
            let modes = std::mem::replace(&mut self.mode, modes);
            self.jump(system, taken, motion.as_ref(), &moved, &explicit);
            self.mode = modes;
        }
        self.differences.restart();
        self.note_instants(taken);
        self.turned = true;
        self.last_event = taken.after.time;
        match taken.meeting {
            Some(meeting) => self.settle(system, taken.after, meeting, still),
            None => {
                if let Some(motion) = &motion {
                    self.shift_charges(&motion.q, -1.0);
                }
                Ok(())
            }
        }
    }

    /// Adds `sign` dq/dt T to every column's dq.
    fn shift_charges(&mut self, slope: &[f64], sign: f64) {
        let n = slope.len().max(1);
        for (q, shift) in self.q.chunks_exact_mut(n).zip(&self.shifts) {
            for (q, slope) in q.iter_mut().zip(slope) {
                *q += sign * slope * shift;
            }
        }
    }

    /// The instant after an event: at fixed time again, charges first, then the rest.
    fn settle(
        &mut self,
        system: &S,
        after: Point<'_>,
        meeting: &Meeting,
        still: bool,
    ) -> Result<(), Singular> {
        let [first, second] = meeting.rates;
        self.linear.at(system, after, second, &mut self.counted)?;
        if !still {
            let slope = self.linear.charge_slope(&mut self.counted);
            self.shift_charges(&slope, -1.0);
        }
        let explicit = self.explicit_at(system, after);
        let met = Point {
            x: &meeting.x,
            ..after
        };
        if meeting.x != after.x || first != second {
            self.linear.at(system, met, first, &mut self.counted)?;
            let at_meeting = self.explicit_at(system, met);
            self.meet(&at_meeting);
            self.finish(&at_meeting);
            self.linear.at(system, after, second, &mut self.counted)?;
        } else {
            self.meet(&explicit);
            self.finish(&explicit);
        }
        self.meet(&explicit);
        self.finish(&explicit);
        Ok(())
    }

    /// dx/dt and dq/dt at a point, algebraic unknowns included.
    fn motion(&mut self, system: &S, at: Point<'_>, rate: f64) -> Result<Motion, Singular> {
        self.linear.at(system, at, rate, &mut self.counted)?;
        let q = self.linear.charge_slope(&mut self.counted);
        let by_time = self.slope_by_time(system, at);
        let mut charge = q.clone();
        let mut x = vec![0.0; q.len()];
        for _ in 0..2 {
            for ((x, q), f) in x.iter_mut().zip(&charge).zip(&by_time) {
                *x = rate * q - f;
            }
            self.linear.solve(&mut x, &mut self.counted);
            charge.fill(0.0);
            multiply(&self.linear.pattern, &self.linear.out.dq, &x, &mut charge);
        }
        Ok(Motion { x, q })
    }

    /// df/dt at fixed x, by a central difference.
    fn slope_by_time(&mut self, system: &S, at: Point<'_>) -> Vec<f64> {
        let shift = self.along(at.time);
        let times = [at.time + shift, at.time - shift];
        let [more, less] = times.map(|time| {
            let mut out = crate::dae::newton::evaluation(at.x.len(), self.linear.pattern.len());
            system.evaluate(Point { time, ..at }, false, &mut out);
            out.f
        });
        self.counted.evaluations += 2;
        let between = times[0] - times[1];
        if between == 0.0 {
            return vec![0.0; at.x.len()];
        }
        let pairs = more.iter().zip(&less);
        pairs.map(|(more, less)| (more - less) / between).collect()
    }

    /// Charges carried along by unknowns that jump: C(x') dx' - C(x) dx more than before.
    fn jump(
        &mut self,
        system: &S,
        taken: &Taken<'_>,
        motion: Option<&Motion>,
        jumped: &[f64],
        before: &Explicit,
    ) {
        let n = self.scales.len().max(1);
        let mode = taken.before.mode;
        let at = Point {
            time: taken.after.time,
            x: taken.jumped,
            mode,
        };
        let after = self.explicit_at(system, at);
        let mut outs = [taken.before, at].map(|at| {
            let mut out = crate::dae::newton::evaluation(n, self.linear.pattern.len());
            system.evaluate(at, true, &mut out);
            out
        });
        self.counted.evaluations += 2;
        outs[0].dq.iter_mut().for_each(|slope| *slope = -*slope);
        for column in 0..self.columns.len() {
            let rows = column * n..(column + 1) * n;
            let mut slope = self.x[rows.clone()].to_vec();
            if let Some(motion) = motion {
                for (slope, x) in slope.iter_mut().zip(&motion.x) {
                    *slope += x * self.shifts[column];
                }
            }
            let q = &mut self.q[rows.clone()];
            for (q, (after, before)) in q
                .iter_mut()
                .zip(after.q[rows.clone()].iter().zip(&before.q[rows.clone()]))
            {
                *q += after - before;
            }
            multiply(&self.linear.pattern, &outs[0].dq, &slope, q);
            multiply(&self.linear.pattern, &outs[1].dq, &jumped[rows], q);
        }
    }

    /// Which mode entries hold an instant now.
    fn note_instants(&mut self, taken: &Taken<'_>) {
        let changes = taken.before.mode.iter().zip(taken.after.mode);
        for (instant, (before, after)) in self.differences.instants.iter_mut().zip(changes) {
            if before != after {
                *instant = *after == taken.after.time;
            }
        }
    }
}
