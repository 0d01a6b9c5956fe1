//! The periodic steady state of a circuit: a rough one first, whose swings tell the tolerances, then the fine one.
//!
//! It is looked for over the period that ends at time zero, with the clock as if it had always run: what happens once
//! (`opens_at`, `steps`) lies ahead and is held. An error that every period repeats piles up by (1 - M)^-1, M being the
//! monodromy matrix; the tolerances of unknowns that this concerns are tightened.

use super::failure::Failure;
use super::period::fits;
use super::simulate::Simulation;
use super::start::running;
use super::swings::Range;
use crate::dae::{Advance, Cycle, Orbit, State, Statistics, Tolerances, shoot};
use crate::diag::Diagnostic;
use std::cell::RefCell;
use std::ops::ControlFlow;

/// Periods marched at the start of the search.
const PLAIN: usize = 2;
/// Deviation of the rough state, in swings.
const ROUGH: f64 = 1e-2;
/// Smallest share of its magnitude that an unknown of the rough state is scaled to.
const SHARE: f64 = 1e-2;
/// Newton steps at most, for the rough state and for the fine one.
const STEPS: [usize; 2] = [25, 12];
/// Periods of plain marching where Newton's iteration does not lead there.
const MOST_PERIODS: usize = 1000;
/// Share of the accuracy to which the state is settled.
const ENOUGH: f64 = 0.1;
/// Tolerances are tightened at most so many times for errors that pile up: the errors of steps are mostly far smaller
/// than their estimates.
const TIGHTEST: f64 = 100.0;
/// No tolerance lies below this share of an unknown's magnitude.
const ROUNDING: f64 = 1e-13;

/// A periodic state.
#[derive(Clone, Debug)]
pub struct Found {
    /// Where a period begins.
    pub state: State,
    /// The period [s].
    pub period: f64,
    /// Largest change of an unknown over a period, relative to its swing.
    pub residual: f64,
    /// Magnitude of the slowest multiplier; None where no state can vary.
    pub multiplier: Option<f64>,
    /// True where Newton's iteration came to its end.
    pub converged: bool,
    /// True where the state repeats itself as well as asked.
    pub settled: bool,
    /// Periods marched on the way, those to the rough state among them.
    pub periods: usize,
    /// Work on the way, variations included.
    pub counted: Statistics,
    /// Of it the variations' own.
    pub varied: Statistics,
    /// Tolerances tightened where errors pile up from period to period.
    pub tolerances: Option<Tolerances>,
}

/// The last periodic state found with the same circuit, and what was spent on the way.
pub type Warm = RefCell<Option<Past>>;

/// A periodic state found before.
#[derive(Clone, Debug)]
pub struct Past {
    state: State,
    orbit: Orbit,
    periods: usize,
    counted: [Statistics; 2],
}

/// Finds the periodic state; `scales` are the swings that the accuracy is relative to, None for a rough one. `watch` is
/// called now and then and may stop it.
pub fn find(
    simulation: &Simulation<'_>,
    (period, unknown): (f64, bool),
    scales: Option<&[f64]>,
    watch: &mut dyn FnMut() -> ControlFlow<()>,
) -> Result<Found, Failure> {
    let mut search = Search {
        simulation,
        unknown,
        start: -period,
        periods: 0,
        counted: [Statistics::default(); 2],
    };
    if let Err(diagnostic) = fits(simulation.circuit, period, unknown) {
        return Err(Failure::Refused(Box::new(diagnostic)));
    }
    let warm = simulation.warm.and_then(|warm| warm.borrow().clone());
    let (mut state, mut orbit) = match warm {
        Some(past) => {
            (search.periods, search.counted) = (past.periods, past.counted);
            (past.state, past.orbit)
        }
        None => search.rough(period, watch)?,
    };
    let mut tight = None;
    if let Some(scales) = scales {
        let mut fine = simulation.tolerances(scales);
        tighten(&mut fine, &orbit.piling(scales), scales, &state.x);
        let cycle = Cycle {
            period: orbit.period,
            free: unknown,
            tolerances: &fine,
            scales,
            enough: ENOUGH * simulation.settings.accuracy,
            longest_step: simulation.settings.longest_step,
            plain: 0,
            most: (STEPS[1], MOST_PERIODS),
        };
        orbit = search.shoot(&mut state, &cycle, watch)?;
        tight = Some(fine);
    }
    if let Some(warm) = simulation.warm {
        warm.replace(Some(Past {
            state: state.clone(),
            orbit: orbit.clone(),
            periods: search.periods,
            counted: search.counted,
        }));
    }
    let [mut counted, varied] = search.counted;
    counted.add(&varied);
    Ok(Found {
        state,
        period: orbit.period,
        residual: orbit.residual,
        multiplier: orbit
            .multipliers
            .first()
            .map(|multiplier| multiplier.norm()),
        converged: orbit.converged,
        settled: orbit.settled,
        periods: search.periods,
        counted,
        varied,
        tolerances: tight,
    })
}

/// Tightens the tolerances of unknowns whose errors pile up.
fn tighten(fine: &mut Tolerances, piling: &[(usize, f64)], scales: &[f64], x: &[f64]) {
    for &(unknown, times) in piling {
        let absolute = &mut fine.absolute[unknown];
        let floor = ROUNDING * (x[unknown].abs() + scales[unknown]);
        *absolute = (*absolute / times.clamp(1.0, TIGHTEST)).max(floor);
    }
}

struct Search<'a> {
    simulation: &'a Simulation<'a>,
    unknown: bool,
    /// Start of the period that is looked at [s].
    start: f64,
    periods: usize,
    counted: [Statistics; 2],
}

impl Search<'_> {
    fn shoot(
        &mut self,
        state: &mut State,
        cycle: &Cycle<'_>,
        watch: &mut dyn FnMut() -> ControlFlow<()>,
    ) -> Result<Orbit, Failure> {
        let circuit = self.simulation.circuit;
        let orbit = shoot(
            circuit,
            self.simulation.method,
            state,
            cycle,
            &mut |advance| match advance {
                Advance::Event { .. } => ControlFlow::Continue(()),
                _ => watch(),
            },
        )
        .map_err(|error| Failure::march(circuit, error))?;
        self.periods += orbit.periods;
        for (sum, counted) in self.counted.iter_mut().zip(&orbit.counted) {
            sum.add(counted);
        }
        if orbit.stopped {
            return Err(Failure::Interrupted);
        }
        Ok(orbit)
    }

    /// A rough periodic state from an uncharged start.
    fn rough(
        &mut self,
        period: f64,
        watch: &mut dyn FnMut() -> ControlFlow<()>,
    ) -> Result<(State, Orbit), Failure> {
        let circuit = self.simulation.circuit;
        let mut state = running(circuit, self.start)?;
        let loose = self.simulation.pilot_tolerances();
        // Of the period marched last.
        let mut range = Range::new(state.x.len());
        let ones = vec![1.0; state.x.len()];
        let first = Cycle {
            period,
            free: false,
            tolerances: &loose,
            scales: &ones,
            enough: 0.0,
            longest_step: self.simulation.settings.longest_step,
            plain: PLAIN,
            most: (0, 0),
        };
        let method = self.simulation.method;
        let begun = shoot(circuit, method, &mut state, &first, &mut |advance| {
            match advance {
                Advance::Start { x, .. } => {
                    range = Range::new(x.len());
                    range.take(x);
                }
                Advance::Step(step) => range.take(step.x1),
                Advance::Event { .. } => {}
            }
            watch()
        })
        .map_err(|error| Failure::march(circuit, error))?;
        self.periods += begun.periods;
        self.counted[0].add(&begun.counted[0]);
        if begun.stopped {
            return Err(Failure::Interrupted);
        }
        let floors = loose.absolute.iter().enumerate();
        let scales: Vec<f64> = floors
            .map(|(k, floor)| range.swing(k).max(SHARE * range.largest(k)).max(*floor))
            .collect();
        let cycle = Cycle {
            free: self.unknown,
            scales: &scales,
            enough: ROUGH,
            plain: 0,
            most: (STEPS[0], MOST_PERIODS),
            ..first
        };
        let orbit = self.shoot(&mut state, &cycle, watch)?;
        Ok((state, orbit))
    }
}

/// Cautions that a periodic state gives cause for.
pub fn cautions(found: &Found) -> Vec<Diagnostic> {
    let mut cautions = Vec::new();
    if !found.converged {
        let how = if found.settled {
            format!(
                "the periodic state was reached by marching {} periods, Newton's iteration did not lead there",
                found.periods
            )
        } else {
            format!(
                "no periodic state was found: after {} periods the state still changes by {:.1e} of its swing per period",
                found.periods, found.residual
            )
        };
        cautions.push(Diagnostic::caution("not-settled", how).help(
            "look at the waveforms: a longer `period` may hold a subharmonic; a `transient` shows the way there",
        ));
    }
    if let Some(multiplier) = found.multiplier.filter(|&multiplier| multiplier > 1.0) {
        let text = format!(
            "the circuit will not stay in this periodic state: a deviation grows {multiplier:.3} times per period"
        );
        cautions.push(Diagnostic::caution("unstable", text).help(
            "a transient shows where it goes; a ramp, a longer period or another duty may make it stay",
        ));
    }
    cautions
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_state_that_does_not_stay_or_was_not_found_is_told() {
        let mut found = Found {
            state: State::default(),
            period: 1e-5,
            residual: 1e-7,
            multiplier: Some(0.9),
            converged: true,
            settled: true,
            periods: 6,
            counted: Statistics::default(),
            varied: Statistics::default(),
            tolerances: None,
        };
        let words = |found: &Found| -> Vec<String> {
            let said = cautions(found);
            said.iter()
                .map(|caution| caution.word.to_string())
                .collect()
        };
        assert!(words(&found).is_empty());
        found.multiplier = Some(1.25);
        assert_eq!(words(&found), ["unstable"]);
        (found.converged, found.settled) = (false, false);
        assert_eq!(words(&found), ["not-settled", "unstable"]);
    }
}
