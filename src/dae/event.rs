//! What happens at an event: transitions at one instant, charges kept, the rest solved anew.

use super::advance::{Advance, Impulse};
use super::crossing::Watch;
use super::instant::{Instant, Meeting};
use super::march::State;
use super::newton::{Newton, evaluation};
use super::statistics::Statistics;
use super::system::{Cause, Evaluation, Point, System};
use super::tolerances::Tolerances;
use super::trouble::{MarchError, Trouble};
use super::variations::{Moved, Taken, Variations};
use crate::math::Elimination;

/// So many events at one instant are taken for a circle.
const MOST_AT_ONCE: usize = 200;
/// So many guards' events in a row between which no unknown moves by a tolerance are chattering.
const MOST_IN_HASTE: usize = 100;

/// What goes along with the solution through an event.
pub(crate) struct Company<'r, 's, S: ?Sized> {
    pub tolerances: &'r Tolerances,
    /// Reciprocal tolerances.
    pub weights: &'r [f64],
    pub watch: &'r mut Watch,
    pub variations: Option<&'r mut Variations<'s, S>>,
}

/// Memory of the last event.
#[derive(Debug)]
pub(crate) struct Events {
    causes: Vec<Cause>,
    time: f64,
    x_before: Vec<f64>,
    mode_before: Vec<f64>,
    charge: Vec<f64>,
    newton: Newton,
    out: Evaluation,
    instant: Instant,
    impulses: Vec<Impulse>,
    /// Guards' events in a row, and the unknowns after the last one.
    row: usize,
    x_after: Vec<f64>,
}

impl Events {
    pub fn new<S: System + ?Sized>(system: &S, elimination: Elimination) -> Self {
        let size = system.size();
        Events {
            causes: Vec::with_capacity(8),
            time: 0.0,
            x_before: vec![0.0; size],
            mode_before: vec![0.0; system.mode_size()],
            charge: vec![0.0; size],
            newton: Newton::new(system, elimination),
            out: evaluation(size, system.pattern().len()),
            instant: Instant::new(size),
            impulses: Vec::new(),
            row: 0,
            x_after: vec![f64::INFINITY; size],
        }
    }

    /// The event as an observer sees it.
    pub fn advance<'a>(&'a self, state: &'a State, varied: Option<Moved<'a>>) -> Advance<'a> {
        Advance::Event {
            time: self.time,
            causes: &self.causes,
            x_before: &self.x_before,
            x_after: &state.x,
            mode_before: &self.mode_before,
            mode_after: &state.mode,
            varied,
            impulses: &self.impulses,
        }
    }

    /// Takes the event of `cause` and all that follow at the same instant; true where something changed.
    pub fn take<S: System + ?Sized>(
        &mut self,
        system: &S,
        cause: Cause,
        state: &mut State,
        company: Company<'_, '_, S>,
        counted: &mut Statistics,
    ) -> Result<bool, MarchError> {
        let Company {
            tolerances,
            weights,
            watch,
            mut variations,
        } = company;
        self.causes.clear();
        self.impulses.clear();
        self.time = state.time;
        self.x_before.copy_from_slice(&state.x);
        self.mode_before.copy_from_slice(&state.mode);
        self.haste(cause, state, weights)?;
        if let Some(variations) = variations.as_deref_mut() {
            variations.before_events();
        }
        let mut changed = false;
        let mut next = Some(cause);
        while let Some(cause) = next {
            changed |= self.one(
                system,
                cause,
                state,
                tolerances,
                variations.as_deref_mut(),
                counted,
            )?;
            let fired = if let Cause::Guard(guard) = cause {
                Some(guard)
            } else {
                None
            };
            let at = state.point();
            next = watch.renew(system, at, fired).map(Cause::Guard);
            if self.causes.len() > MOST_AT_ONCE {
                return Err(self.chattering(state.time, cause));
            }
        }
        self.x_after.copy_from_slice(&state.x);
        Ok(changed)
    }

    /// One transition (and the clock's next ones where they fall at the same instant), then consistent values.
    fn one<S: System + ?Sized>(
        &mut self,
        system: &S,
        cause: Cause,
        state: &mut State,
        tolerances: &Tolerances,
        variations: Option<&mut Variations<'_, S>>,
        counted: &mut Statistics,
    ) -> Result<bool, MarchError> {
        let held = variations.as_ref().map(|_| state.clone());
        let before = state.point();
        system.evaluate(before, false, &mut self.out);
        counted.evaluations += 1;
        self.charge.copy_from_slice(&self.out.q);
        let x_held = state.x.clone();
        let mut x = std::mem::take(&mut state.x);
        let mode_held = state.mode.clone();
        let mut changed = self.transition(system, cause, &mut x, state, counted);
        if cause == Cause::Time {
            loop {
                let next = system.next_event(state.time, &state.mode);
                if next - state.time > 8.0 * f64::EPSILON * state.time.abs() {
                    break;
                }
                state.time = next.max(state.time);
                changed |= self.transition(system, Cause::Time, &mut x, state, counted);
                if self.causes.len() > MOST_AT_ONCE {
                    return Err(self.chattering(state.time, cause));
                }
            }
        }
        self.time = state.time;
        state.x = x;
        if !changed {
            if let (Some(variations), Some(held)) = (variations, &held) {
                vary(system, variations, cause, held, &held.x, state, None)?;
            }
            return Ok(false);
        }
        let jumped = held.as_ref().map(|_| state.x.clone());
        // A jump in x carries the charges of the rows that depend on it along; all other rows keep theirs.
        let after = Point {
            time: state.time,
            x: &state.x,
            mode: &mode_held,
        };
        let still = std::mem::take(&mut self.out.q);
        self.out.q = vec![0.0; still.len()];
        system.evaluate(after, false, &mut self.out);
        counted.evaluations += 1;
        for ((charge, jumped), still) in self.charge.iter_mut().zip(&self.out.q).zip(&still) {
            *charge += jumped - still;
        }
        let at = Point {
            time: state.time,
            x: &[],
            mode: &state.mode,
        };
        self.instant
            .pass(
                system,
                &mut self.newton,
                at,
                tolerances,
                &mut self.charge,
                &mut state.x,
                counted,
            )
            .map_err(|failure| MarchError {
                time: state.time,
                unknown: Some(failure.unknown),
                cause: failure.cause,
            })?;
        if let (Some(variations), Some(held), Some(jumped)) = (variations, &held, &jumped) {
            let meeting = Some(&self.instant.meeting);
            vary(system, variations, cause, held, jumped, state, meeting)?;
        }
        self.impulses.push(Impulse {
            before: x_held,
            during: self.instant.meeting.x.clone(),
            after: state.x.clone(),
            mode_before: mode_held,
            mode: state.mode.clone(),
            length: 1.0 / self.instant.meeting.rates[0],
            spent: self.instant.spent,
        });
        Ok(true)
    }

    fn transition<S: System + ?Sized>(
        &mut self,
        system: &S,
        cause: Cause,
        x: &mut [f64],
        state: &mut State,
        counted: &mut Statistics,
    ) -> bool {
        self.causes.push(cause);
        counted.events += 1;
        system.transition(cause, state.time, x, &mut state.mode)
    }

    /// Counts guards' events that follow one another while nothing moves.
    fn haste(&mut self, cause: Cause, state: &State, weights: &[f64]) -> Result<(), MarchError> {
        let moved = |k: usize| (state.x[k] - self.x_after[k]).abs() * weights[k] > 1.0;
        self.row = if cause == Cause::Time || (0..weights.len()).any(moved) {
            0
        } else {
            self.row + 1
        };
        if self.row > MOST_IN_HASTE {
            Err(self.chattering(state.time, cause))
        } else {
            Ok(())
        }
    }

    fn chattering(&self, time: f64, cause: Cause) -> MarchError {
        let guard = if let Cause::Guard(guard) = cause {
            Some(guard)
        } else {
            None
        };
        MarchError {
            time,
            unknown: None,
            cause: Trouble::Chattering { guard },
        }
    }
}

/// Carries variations over an event.
fn vary<S: System + ?Sized>(
    system: &S,
    variations: &mut Variations<'_, S>,
    cause: Cause,
    held: &State,
    jumped: &[f64],
    state: &State,
    meeting: Option<&Meeting>,
) -> Result<(), MarchError> {
    let taken = Taken {
        cause,
        before: held.point(),
        jumped,
        after: state.point(),
        meeting,
    };
    variations
        .event(system, &taken)
        .map_err(|singular| MarchError {
            time: state.time,
            unknown: Some(singular.column),
            cause: Trouble::Singular,
        })
}
