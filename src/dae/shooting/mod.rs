//! Periodic steady state: Newton's iteration on the charges at the period's start.
//!
//! One period maps the charges at its start to those at its end; a state that it maps onto itself is periodic. The
//! map's derivative, the monodromy matrix M, comes from variations carried along the period. With r = z1 - z0 in
//! coordinates z of the charges that can vary (`directions`), (1 - M) dz = r; where the period is unknown too,
//! (1 - M) dz - z' dT = r with the phase held, z'.dz = 0. The eigenvalues of M are the multipliers: by these factors
//! small deviations grow from period to period. T. J. Aprille and T. N. Trick, *Proc. IEEE* 60 (1972) 108 (from
//! memory). Modes carry themselves from period to period; [`System::earlier`] takes their memory of instants back.

mod directions;
mod period;

use super::march::{Ending, March, Observer, Span, State};
use super::methods::Method;
use super::newton::evaluation;
use super::start::consistent_start;
use super::statistics::Statistics;
use super::system::System;
use super::tolerances::Tolerances;
use super::trouble::{MarchError, Trouble};
use super::variations::{Variations, charge_slope};
use directions::Directions;
use nalgebra::DMatrix;
use num_complex::Complex64;
use period::{Period, SMALL, multipliers, newton_inverse};

/// Periods marched between attempts of Newton's iteration that did not contract.
const PATIENCE: usize = 5;
/// A Newton step made things worse when the change over the next period is so many times larger,
const WORSE: f64 = 2.0;
/// and is halved down to this share at least.
const SMALLEST_SHARE: f64 = 0.05;
/// After a Newton step larger than this, in scales, a period passes by itself: what rings finds its place.
const LARGE: f64 = 0.5;
/// Most by which an unknown period changes in one step.
const STRETCH: f64 = 0.2;
/// Most directions that are carried along; beyond that whole periods are cheaper.
const MOST_DIRECTIONS: usize = 300;

/// The periodic state that is looked for.
#[derive(Clone, Debug)]
pub struct Cycle<'a> {
    /// The period, or where it is looked for [s].
    pub period: f64,
    /// True where the period is unknown.
    pub free: bool,
    /// Tolerated errors of the steps.
    pub tolerances: &'a Tolerances,
    /// How far each unknown swings: what deviations are relative to.
    pub scales: &'a [f64],
    /// Deviation from the periodic state that is good enough, in scales.
    pub enough: f64,
    /// Longest step [s].
    pub longest_step: f64,
    /// Periods that are marched first.
    pub plain: usize,
    /// Newton steps at most, and periods of plain marching where these do not lead there.
    pub most: (usize, usize),
}

/// What was found.
#[derive(Clone, Debug, Default)]
pub struct Orbit {
    /// The period [s].
    pub period: f64,
    /// Largest change of a charge's unknown over the last period, in scales.
    pub residual: f64,
    /// Eigenvalues of the monodromy matrix, largest first; for an unknown period without the one at 1. Empty where
    /// no Newton step was taken.
    pub multipliers: Vec<Complex64>,
    /// True where Newton's iteration came to its end.
    pub converged: bool,
    /// True where the state repeats itself as well as asked, by either way.
    pub settled: bool,
    /// True where the observer stopped it.
    pub stopped: bool,
    /// Periods marched, those with variations among them.
    pub periods: usize,
    /// Periods marched with variations.
    pub varied: usize,
    /// Unknowns that can vary, and (1 - M)^-1 between them in their own units, a row for each: how an error that every
    /// period repeats piles up.
    pub response: (Vec<usize>, Vec<f64>),
    /// Work of the marches, and of the variations alone.
    pub counted: [Statistics; 2],
}

impl Orbit {
    /// How many times an error of each unknown that every period repeats piles up, the largest of all unknowns in their
    /// scales.
    pub fn piling(&self, scales: &[f64]) -> Vec<(usize, f64)> {
        let (unknowns, response) = &self.response;
        let count = unknowns.len();
        let times = |column: usize| {
            (0..count)
                .map(|row| {
                    let slope = response[row * count + column].abs();
                    slope * scales[unknowns[column]] / scales[unknowns[row]]
                })
                .fold(0.0, f64::max)
        };
        (0..count).map(|k| (unknowns[k], times(k))).collect()
    }
}

/// Finds the periodic state near `state`, which is moved to the start of a period there.
///
/// # Errors
/// Where a march ends early.
pub fn shoot<S: System + ?Sized>(
    system: &S,
    method: &'static Method,
    state: &mut State,
    cycle: &Cycle<'_>,
    observer: &mut Observer<'_>,
) -> Result<Orbit, MarchError> {
    let mut shot = Shot {
        system,
        cycle,
        march: March::new(method, state.clone()),
        orbit: Orbit {
            period: cycle.period,
            ..Orbit::default()
        },
        observer,
    };
    let done = shot.whole();
    shot.orbit.counted[0] = shot.march.counted;
    *state = shot.march.state;
    done.map(|()| shot.orbit)
}

struct Shot<'a, 'o, S: ?Sized> {
    system: &'a S,
    cycle: &'a Cycle<'a>,
    march: March,
    orbit: Orbit,
    observer: &'a mut Observer<'o>,
}

impl<S: System + ?Sized> Shot<'_, '_, S> {
    fn whole(&mut self) -> Result<(), MarchError> {
        for _ in 0..self.cycle.plain {
            self.plain()?;
        }
        let mut held: Option<Period> = None;
        let mut share = 1.0;
        for _ in 0..self.cycle.most.0 {
            let Some(period) = self.varied()? else { break };
            if self.orbit.stopped {
                return Ok(());
            }
            let worse = held.as_ref().filter(|held| {
                let (now, before) = (period.change(&held.traces), held.change(&held.traces));
                before > self.cycle.enough && (now > WORSE * before || !now.is_finite())
            });
            if let Some(before) = worse {
                share *= 0.5;
                if share < SMALLEST_SHARE || !self.place(before, share) {
                    (held, share) = (None, 1.0);
                    self.rest()?;
                }
                continue;
            }
            let size = period.size();
            let curvature = held.map_or(f64::INFINITY, |held| size / held.size().powi(2));
            let quick =
                size <= SMALL && curvature.max(1.0) * size * size <= 0.1 * self.cycle.enough;
            if !self.place(&period, 1.0) {
                (held, share) = (None, 1.0);
                self.rest()?;
                continue;
            }
            if size <= self.cycle.enough || quick {
                (self.orbit.converged, self.orbit.settled) = (true, true);
                return Ok(());
            }
            if size > LARGE {
                self.plain()?;
            }
            (held, share) = (Some(period), 1.0);
        }
        self.settle_plainly()
    }

    /// Leaves an attempt that leads nowhere to the circuit itself for a while.
    fn rest(&mut self) -> Result<(), MarchError> {
        for _ in 0..PATIENCE {
            self.plain()?;
        }
        Ok(())
    }

    /// Marches until the state repeats itself.
    fn settle_plainly(&mut self) -> Result<(), MarchError> {
        for _ in 0..self.cycle.most.1 {
            if self.orbit.stopped {
                break;
            }
            let before = self.march.state.x.clone();
            let directions = self.directions();
            self.plain()?;
            let moved =
                |&k: &usize| ((self.march.state.x[k] - before[k]) / self.cycle.scales[k]).abs();
            self.orbit.residual = directions.unknowns.iter().map(moved).fold(0.0, f64::max);
            // Without the monodromy matrix nothing tells how far the end still is: a tenth of what is asked.
            if self.orbit.residual <= 0.1 * self.cycle.enough {
                self.orbit.settled = true;
                break;
            }
        }
        Ok(())
    }

    /// Marches over one period, with or without variations.
    fn over(&mut self, variations: Option<&mut Variations<'_, S>>) -> Result<f64, MarchError> {
        let start = self.march.state.time;
        let span = Span {
            longest_step: self.cycle.longest_step,
            ..Span::new(start + self.orbit.period, self.cycle.tolerances)
        };
        self.orbit.periods += 1;
        let ending = self
            .march
            .run_varied(self.system, span, variations, self.observer)?;
        self.orbit.stopped |= ending == Ending::Stopped;
        Ok(start)
    }

    /// The same instant of the period before.
    fn turn_back(&mut self, start: f64) {
        let state = &mut self.march.state;
        self.system.earlier(state.time - start, &mut state.mode);
        state.time = start;
    }

    fn plain(&mut self) -> Result<(), MarchError> {
        if !self.orbit.stopped {
            let start = self.over(None)?;
            self.turn_back(start);
        }
        Ok(())
    }

    fn directions(&self) -> Directions {
        let mut out = evaluation(self.system.size(), self.system.pattern().len());
        self.system
            .evaluate(self.march.state.point(), true, &mut out);
        Directions::new(self.system.pattern(), &out.dq, self.cycle.scales)
    }

    /// A period with variations; None where there are too many directions, or Newton's equations have no solution.
    fn varied(&mut self) -> Result<Option<Period>, MarchError> {
        let n = self.system.size();
        let mut out = evaluation(n, self.system.pattern().len());
        let directions = self.directions();
        let count = directions.unknowns.len();
        if count > MOST_DIRECTIONS {
            return Ok(None);
        }
        self.system
            .evaluate(self.march.state.point(), false, &mut out);
        let before = std::mem::take(&mut out.q);
        out.q = vec![0.0; n];
        let mut variations =
            Variations::new(self.system, vec![None; count], self.cycle.scales.to_vec());
        let singular = |singular: crate::math::Singular, time| MarchError {
            time,
            unknown: Some(singular.column),
            cause: Trouble::Singular,
        };
        let time = self.march.state.time;
        variations
            .start_from_charges(self.system, self.march.state.point(), &directions.charges)
            .map_err(|error| singular(error, time))?;
        let begun = self.march.state.x.clone();
        let start = self.over(Some(&mut variations))?;
        self.orbit.varied += 1;
        self.system
            .evaluate(self.march.state.point(), false, &mut out);
        let change: Vec<f64> = out
            .q
            .iter()
            .zip(&before)
            .map(|(q, before)| q - before)
            .collect();
        let residual = directions.coordinates(&change);
        let mut monodromy = DMatrix::zeros(count, count);
        for column in 0..count {
            monodromy.set_column(column, &directions.coordinates(variations.q(column)));
        }
        let motion = if self.cycle.free {
            let slope = charge_slope(
                self.system,
                self.march.state.point(),
                &mut variations.counted,
            )
            .map_err(|error| singular(error, time))?;
            Some(directions.coordinates(&slope) * self.orbit.period)
        } else {
            None
        };
        self.orbit.counted[1].add(&variations.counted);
        self.turn_back(start);
        let drift: Vec<f64> = directions
            .unknowns
            .iter()
            .map(|&k| (self.march.state.x[k] - begun[k]) / self.cycle.scales[k])
            .collect();
        self.orbit.residual = drift.iter().fold(0.0, |most, drift| most.max(drift.abs()));
        self.orbit.multipliers = multipliers(&monodromy, self.cycle.free);
        let Some(inverse) = newton_inverse(&monodromy, motion.as_ref()) else {
            return Ok(None);
        };
        let scale = |k: usize| self.cycle.scales[directions.unknowns[k]];
        self.orbit.response = (
            directions.unknowns.clone(),
            (0..count * count)
                .map(|k| (k / count, k % count))
                .map(|(row, column)| inverse[(row, column)] * scale(row) / scale(column))
                .collect(),
        );
        let solved = inverse.columns(0, count) * &residual;
        let stretch = if self.cycle.free {
            (solved[count] * self.orbit.period)
                .clamp(-STRETCH * self.orbit.period, STRETCH * self.orbit.period)
        } else {
            0.0
        };
        Ok(Some(Period {
            directions,
            state: self.march.state.clone(),
            length: self.orbit.period,
            charges: out.q,
            residual,
            step: solved.rows(0, count).into_owned(),
            stretch,
            drift,
            traces: (0..count)
                .map(|k| (monodromy[(k, k)].abs(), monodromy.column(k).amax()))
                .collect(),
        }))
    }

    /// Puts this share of a period's Newton step upon its end; false, with the end itself kept, where no state has
    /// such charges.
    fn place(&mut self, period: &Period, share: f64) -> bool {
        let mut charges = period.charges.clone();
        let moved = period.moved(share);
        period.directions.add(moved.as_slice(), &mut charges);
        let mut state = period.state.clone();
        let found = consistent_start(
            self.system,
            state.time,
            &state.mode,
            &charges,
            &mut state.x,
            self.cycle.tolerances,
        );
        let sound = found.is_ok() && state.x.iter().all(|x| x.is_finite());
        self.march.state = if sound { state } else { period.state.clone() };
        self.orbit.period = if sound {
            period.length + share * period.stretch
        } else {
            period.length
        };
        sound
    }
}
