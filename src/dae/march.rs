//! The march through time: steps of the length that the accuracy asks for, from event to event.
//!
//! A step is tried, weighed and kept or shortened. The clock's events are ends of steps; a guard that rises within
//! a step is located on the step's polynomial and the step is taken anew up to it. What happens at an event is in
//! `event`.

use super::advance::{Advance, Step};
use super::control::Control;
use super::crossing::{Crossing, Watch};
use super::event::{Company, Events};
use super::experience::Experience;
use super::methods::{Attempt, Family, Method, Stepper, Trial};
use super::pile::Pile;
use super::statistics::Statistics;
use super::system::{Cause, Point, System};
use super::tolerances::{Tolerances, largest};
use super::trouble::{MarchError, Trouble};
use super::variations::{Kept, Variations};
use crate::math::Elimination;
use std::ops::ControlFlow;

/// Most steps in a row, each as short as the clock can tell, that may be kept for a jump.
const MOST_JUMPS: u32 = 100;

/// Shortest step [s]: below it no lumped circuit has a time constant.
const SHORTEST: f64 = 1e-16;

/// Largest jump, in tolerances: what reaches beyond is no swing of the circuit.
const LARGEST_JUMP: f64 = 1e5;

/// Where the solution stands.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct State {
    /// Instant [s].
    pub time: f64,
    /// Unknowns.
    pub x: Vec<f64>,
    /// Modes.
    pub mode: Vec<f64>,
}

impl State {
    /// The state as a point.
    pub fn point(&self) -> Point<'_> {
        Point {
            time: self.time,
            x: &self.x,
            mode: &self.mode,
        }
    }
}

/// How far to march, and how.
#[derive(Clone, Copy, Debug)]
pub struct Span<'a> {
    /// End [s].
    pub until: f64,
    /// Tolerated error of each unknown in a step.
    pub tolerances: &'a Tolerances,
    /// So many steps' errors may pile up before the tolerances fall, see [`Method::pile`]; infinity where they are those
    /// of single steps however long the run.
    pub pile: f64,
    /// Longest step [s]; infinity for none.
    pub longest_step: f64,
    /// Length [s] tried first; none lets the march choose.
    pub first_step: Option<f64>,
    /// Steps that may be tried before the march gives up.
    pub most_steps: u64,
}

impl<'a> Span<'a> {
    /// A span up to `until` [s] without further wishes.
    pub fn new(until: f64, tolerances: &'a Tolerances) -> Self {
        Span {
            until,
            tolerances,
            pile: f64::INFINITY,
            longest_step: f64::INFINITY,
            first_step: None,
            most_steps: u64::MAX,
        }
    }
}

/// How a march ended.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Ending {
    /// The span's end is reached.
    Reached,
    /// The observer asked to stop.
    Stopped,
}

/// A march: where it stands, and the memory that it reuses from run to run.
#[derive(Debug)]
pub struct March {
    /// Where the solution stands; to be set before the first run.
    pub state: State,
    /// Work done since the march was made.
    pub counted: Statistics,
    method: &'static Method,
    elimination: Elimination,
    scratch: Option<Scratch>,
}

#[derive(Debug)]
struct Scratch {
    stepper: Stepper,
    control: Control,
    watch: Watch,
    events: Events,
    experience: Experience,
    pile: Pile,
    weights: Vec<f64>,
    before: Vec<f64>,
}

impl Scratch {
    /// Adds the error of the step tried last to what is left of those before it.
    fn pile_up(&mut self, free: f64) {
        let share = self.pile.share;
        if self.stepper.carry(&mut self.pile.errors, 1.0 / share) {
            let height = share * largest(&self.pile.errors, &self.weights).0;
            self.pile.grown(height, free);
        }
    }
}

/// The observer's face.
pub type Observer<'a> = dyn FnMut(&Advance<'_>) -> ControlFlow<()> + 'a;

impl March {
    /// A march by this method from this state; the elimination is chosen by size.
    pub fn new(method: &'static Method, state: State) -> Self {
        March::with_elimination(method, state, Elimination::Automatic)
    }

    /// A march with a forced choice of elimination.
    pub fn with_elimination(
        method: &'static Method,
        state: State,
        elimination: Elimination,
    ) -> Self {
        March {
            state,
            counted: Statistics::default(),
            method,
            elimination,
            scratch: None,
        }
    }

    /// Marches `system` on from the present state, which must be consistent.
    pub fn run<S: System + ?Sized>(
        &mut self,
        system: &S,
        span: Span<'_>,
        observer: &mut Observer<'_>,
    ) -> Result<Ending, MarchError> {
        self.run_varied(system, span, None, observer)
    }

    /// As [`March::run`], with variations carried along, which must have been started at the present state.
    pub fn run_varied<S: System + ?Sized>(
        &mut self,
        system: &S,
        span: Span<'_>,
        variations: Option<&mut Variations<'_, S>>,
        observer: &mut Observer<'_>,
    ) -> Result<Ending, MarchError> {
        let scratch = self.scratch.get_or_insert_with(|| Scratch {
            stepper: Stepper::new(self.method, system, self.elimination),
            control: Control::new(self.method.estimated),
            watch: Watch::new(system),
            events: Events::new(system, self.elimination),
            experience: Experience::default(),
            pile: Pile::new(system.size()),
            weights: vec![0.0; system.size()],
            before: vec![0.0; system.size()],
        });
        let mut run = Run {
            system,
            span,
            state: &mut self.state,
            counted: &mut self.counted,
            scratch,
            method: self.method,
            variations,
            observer,
            length: 0.0,
            last_step: 0,
            jumped: 0,
            busiest: None,
        };
        run.last_step = run.tried().saturating_add(span.most_steps);
        run.whole()
    }
}

struct Run<'a, 'o, 's, S: ?Sized> {
    system: &'a S,
    span: Span<'a>,
    state: &'a mut State,
    counted: &'a mut Statistics,
    scratch: &'a mut Scratch,
    method: &'static Method,
    variations: Option<&'a mut Variations<'s, S>>,
    observer: &'a mut Observer<'o>,
    /// Length of the next step [s].
    length: f64,
    /// The march gives up when so many steps have been tried.
    last_step: u64,
    /// Steps in a row that were kept as jumps.
    jumped: u32,
    /// The unknown that set the length of the step kept last.
    busiest: Option<usize>,
}

/// What ended a step.
enum End {
    Own,
    Clock,
    Guard(usize),
}

impl<S: System + ?Sized> Run<'_, '_, '_, S> {
    fn whole(&mut self) -> Result<Ending, MarchError> {
        if self.begin()?.is_break() {
            return Ok(Ending::Stopped);
        }
        while self.state.time < self.span.until {
            let event = self.system.next_event(self.state.time, &self.state.mode);
            let (end, flow) = self.step(event.min(self.span.until))?;
            if flow.is_break() {
                return Ok(Ending::Stopped);
            }
            let clock = (self.state.time == event).then_some(Cause::Time);
            // A guard may rise at the very instant of the clock's event: both are taken.
            let causes = match end {
                End::Guard(guard) => [Some(Cause::Guard(guard)), clock],
                End::Clock => [clock, None],
                End::Own => [None, None],
            };
            for cause in causes.into_iter().flatten() {
                if self.take(cause)?.is_break() {
                    return Ok(Ending::Stopped);
                }
            }
        }
        Ok(Ending::Reached)
    }

    fn begin(&mut self) -> Result<ControlFlow<()>, MarchError> {
        let State { time, x, mode } = &*self.state;
        if let Some(unknown) = x.iter().position(|value| !value.is_finite()) {
            return Err(MarchError {
                time: *time,
                unknown: Some(unknown),
                cause: Trouble::NotFinite,
            });
        }
        self.scratch.pile = Pile::new(x.len());
        self.span.tolerances.weigh(x, &mut self.scratch.weights);
        let flow = (self.observer)(&Advance::Start {
            time: *time,
            x,
            mode,
        });
        if flow.is_break() {
            return Ok(flow);
        }
        if let Some(variations) = &mut self.variations {
            variations.begin(self.state.time);
        }
        self.scratch.stepper.restart();
        self.scratch.control.restart();
        self.length = self.span.first_step.unwrap_or_else(|| self.first_length());
        let at = self.state.point();
        match self.scratch.watch.begin(self.system, at) {
            Some(guard) => self.take(Cause::Guard(guard)),
            None => Ok(ControlFlow::Continue(())),
        }
    }

    fn first_length(&self) -> f64 {
        let whole = self.span.until - self.state.time;
        let event = self.system.next_event(self.state.time, &self.state.mode) - self.state.time;
        1e-3 * whole.min(event).min(self.span.longest_step)
    }

    /// Shortest step [s] that still moves the clock by some units in the last place.
    fn shortest(&self) -> f64 {
        (32.0 * f64::EPSILON * self.state.time.abs()).max(SHORTEST)
    }

    /// Steps tried since the march was made.
    fn tried(&self) -> u64 {
        self.counted.accepted + self.counted.rejected
    }

    /// Takes one step that ends at `stop` at the latest.
    fn step(&mut self, stop: f64) -> Result<(End, ControlFlow<()>), MarchError> {
        if self.tried() >= self.last_step {
            return Err(MarchError {
                time: self.state.time,
                unknown: self.busiest,
                cause: Trouble::Endless,
            });
        }
        let mut aim = f64::INFINITY;
        let mut located = 0;
        loop {
            let (to, at_stop) = self.goal(stop.min(aim));
            let trial = Trial {
                from: self.state.point(),
                length: to - self.state.time,
                weights: &self.scratch.weights,
            };
            let length = trial.length;
            match self
                .scratch
                .stepper
                .attempt(self.system, trial, self.counted)
            {
                Attempt::Solved { error, unknown } if error <= 1.0 || self.jumps(length, error) => {
                    self.busiest = Some(unknown);
                    let end = match self.crossing(to, located) {
                        Crossing::None => None,
                        Crossing::Here(guard) => Some(End::Guard(guard)),
                        Crossing::Before(instant) if located < 12 => {
                            aim = instant;
                            located += 1;
                            continue;
                        }
                        Crossing::Before(_) => None,
                    };
                    let end = end.unwrap_or(if at_stop && to == stop {
                        End::Clock
                    } else {
                        End::Own
                    });
                    if error <= 1.0 {
                        self.jumped = 0;
                    }
                    self.follow_order();
                    let factor = self.scratch.control.next(length, error);
                    // A step cut short by an event says little about the steps after it, unless it would shrink.
                    let hard = self.scratch.stepper.is_hard();
                    self.scratch
                        .experience
                        .learn(length * factor.clamp(0.5, 2.0), hard);
                    let next = self.scratch.stepper.choose(length, length * factor);
                    self.length = if at_stop { self.length.max(next) } else { next };
                    return Ok((end, self.keep(to)?));
                }
                Attempt::Solved { error, unknown } => {
                    self.follow_order();
                    let factor = self.scratch.control.again(error);
                    self.shrink(length, factor, unknown, Trouble::Inaccurate)?;
                }
                Attempt::Stalled { unknown, cause } => {
                    self.counted.unsettled += 1;
                    let factor = self.scratch.control.after_stall();
                    self.shrink(length, factor, unknown, cause)?;
                }
            }
        }
    }

    /// Tells the control the order of the estimate made last.
    fn follow_order(&mut self) {
        let method = self.scratch.stepper.method(self.method);
        self.scratch.control.follow(method.estimated);
    }

    /// True where a step that is not accurate enough is kept all the same: what moves within the clock's own resolution
    /// cannot be followed and is taken for a jump. The stages are solved, so charges and flux linkages are kept. A method
    /// whose estimate does not tell rounding from error gives up instead.
    fn jumps(&mut self, length: f64, error: f64) -> bool {
        let may = error <= LARGEST_JUMP
            && self.jumped < MOST_JUMPS
            && !matches!(self.method.family, Family::Diagonal(_));
        if error <= 1.0 || length > 2.0 * self.shortest() || !may {
            return false;
        }
        self.jumped += 1;
        true
    }

    /// End of the step to be tried, and whether it is the stop.
    fn goal(&self, stop: f64) -> (f64, bool) {
        let length = self.length.min(self.span.longest_step).max(self.shortest());
        let left = stop - self.state.time;
        if left <= 1.01 * length {
            (stop, true)
        } else if left < 2.0 * length {
            (self.state.time + 0.5 * left, false)
        } else {
            (self.state.time + length, false)
        }
    }

    fn crossing(&mut self, to: f64, located: usize) -> Crossing {
        if self.scratch.watch.is_empty() {
            return Crossing::None;
        }
        self.scratch.stepper.lay();
        let step = Step {
            from: self.state.time,
            to,
            mode: &self.state.mode,
            x0: &self.state.x,
            x1: self.scratch.stepper.end(),
            dense: self.scratch.stepper.dense(),
            varied: None,
        };
        self.scratch
            .watch
            .look(self.system, &step, &self.scratch.weights, located)
    }

    fn shrink(
        &mut self,
        length: f64,
        factor: f64,
        unknown: usize,
        cause: Trouble,
    ) -> Result<(), MarchError> {
        self.counted.rejected += 1;
        self.length = length * factor;
        // The difference of two instants rounds: twice the shortest step is still the shortest.
        if length > 2.0 * self.shortest() {
            return Ok(());
        }
        // Where values overflow, every unknown is soon no number: the one that has grown most is to blame.
        let unknown = match cause {
            Trouble::NotFinite => self.grown_most().unwrap_or(unknown),
            _ => unknown,
        };
        Err(MarchError {
            time: self.state.time,
            unknown: Some(unknown),
            cause,
        })
    }

    /// The unknown that lies highest above its absolute tolerance.
    fn grown_most(&self) -> Option<usize> {
        let sizes = self.state.x.iter().zip(&self.span.tolerances.absolute);
        let sizes = sizes.map(|(x, tolerance)| x.abs() / tolerance).enumerate();
        sizes.max_by(|a, b| a.1.total_cmp(&b.1)).map(|most| most.0)
    }

    /// Commits the step tried last and shows it.
    fn keep(&mut self, to: f64) -> Result<ControlFlow<()>, MarchError> {
        let scratch = &mut *self.scratch;
        scratch.before.copy_from_slice(&self.state.x);
        self.state.x.copy_from_slice(scratch.stepper.end());
        let from = std::mem::replace(&mut self.state.time, to);
        scratch.stepper.lay();
        if let Some(variations) = &mut self.variations {
            let kept = Kept {
                from,
                length: to - from,
                mode: &self.state.mode,
                stages: scratch.stepper.stages(),
                dense: scratch.stepper.dense(),
            };
            variations
                .step(self.system, scratch.stepper.method(self.method), &kept)
                .map_err(|singular| MarchError {
                    time: to,
                    unknown: Some(singular.column),
                    cause: Trouble::Singular,
                })?;
        }
        if self.span.pile.is_finite() {
            scratch.pile_up(self.span.pile);
        }
        scratch.stepper.keep();
        scratch.watch.keep();
        scratch.pile.weigh(
            self.span.tolerances,
            &self.state.x,
            to - from,
            &mut scratch.weights,
        );
        self.counted.accepted += 1;
        let step = Step {
            from,
            to,
            mode: &self.state.mode,
            x0: &scratch.before,
            x1: &self.state.x,
            dense: scratch.stepper.dense(),
            varied: self
                .variations
                .as_ref()
                .map(|variations| variations.varied(scratch.stepper.dense().points)),
        };
        Ok((self.observer)(&Advance::Step(&step)))
    }

    /// Takes an event and whatever follows from it at the same instant.
    fn take(&mut self, cause: Cause) -> Result<ControlFlow<()>, MarchError> {
        let scratch = &mut *self.scratch;
        let company = Company {
            tolerances: self.span.tolerances,
            weights: &scratch.weights,
            watch: &mut scratch.watch,
            variations: self.variations.as_deref_mut(),
        };
        let changed = scratch
            .events
            .take(self.system, cause, self.state, company, self.counted)?;
        let moved = self
            .variations
            .as_ref()
            .map(|variations| variations.moved());
        let event = scratch.events.advance(self.state, moved);
        if changed {
            scratch.stepper.restart();
            scratch.control.restart();
            if let Some((length, hard)) = scratch.experience.recall(&event) {
                self.length = length;
                scratch.stepper.expect_hard(hard);
            }
            scratch.pile.weigh(
                self.span.tolerances,
                &self.state.x,
                0.0,
                &mut scratch.weights,
            );
        }
        Ok((self.observer)(&event))
    }
}
