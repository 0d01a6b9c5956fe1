//! Variations: how the solution of a march moves with where it starts and with parameters, carried along.
//!
//! A column is dx/dp at fixed time, for one direction p of the starting state or one parameter of the system. It is
//! the derivative of the discrete solution itself at fixed step lengths: each kept step's equations are
//! differentiated at its own stages (`stages`), each event's transition, charges and instant likewise (`events`).
//! H. G. Bock, *Recent advances in parameter identification for ODE* (1983), called it internal differentiation (from
//! memory).
//!
//! Slopes along a parameter come from two shadows: the same system with the parameter a little larger and a little
//! smaller (`explicit`). Where modes hold continuous memory (the instant at which a switch set out), its derivative
//! is carried as well.

mod events;
mod explicit;
mod linear;
mod shadows;
mod shifted;
mod stages;

use super::dense::Dense;
use super::instant::INSTANT;
use super::statistics::Statistics;
use super::system::{Point, System};
pub(crate) use events::Taken;
use explicit::{Differences, Explicit, Moving};
use linear::Linear;
pub(crate) use linear::charge_slope;
pub use shifted::{HeldStep, MovedStep};
pub(crate) use stages::Kept;
use stages::Stages;

/// A system with one parameter a little larger, and one with it a little smaller.
pub struct Shadows<'a, S: ?Sized> {
    /// The larger one; size, pattern, modes and guards as the system's own.
    pub more: &'a S,
    /// The smaller one.
    pub less: &'a S,
    /// Half the difference of the parameter between them, in its own unit. A hundred-thousandth of the parameter
    /// leaves an error of some 1e-8 in slopes; the whole relative precision of event times is 1e-16 over that share.
    pub step: f64,
}

impl<S: ?Sized> Clone for Shadows<'_, S> {
    fn clone(&self) -> Self {
        *self
    }
}
impl<S: ?Sized> Copy for Shadows<'_, S> {}

/// Columns of derivatives that a march carries along.
pub struct Variations<'a, S: ?Sized> {
    /// Work done for the variations alone.
    pub counted: Statistics,
    /// Shadows of the columns that are parameters; None for directions of the starting state.
    columns: Vec<Option<Shadows<'a, S>>>,
    /// How far each unknown moves in a run: finite differences are small shares of it.
    scales: Vec<f64>,
    /// dx/dp at fixed time, one row of unknowns per column.
    x: Vec<f64>,
    /// dq/dp at fixed time, likewise.
    q: Vec<f64>,
    /// df/dp at fixed time, likewise.
    f: Vec<f64>,
    /// d(mode)/dp, one row of modes per column.
    mode: Vec<f64>,
    /// dx/dp before the event taken last.
    x_before: Vec<f64>,
    /// dt/dp of the event taken last, and when it was.
    shifts: Vec<f64>,
    last_event: f64,
    /// As `shifts`, of the event before.
    last_shifts: Vec<f64>,
    /// Length [s] of the longest step kept since the last event that was followed by any: the pace of the motion.
    length: f64,
    /// An event has been taken since a step was kept.
    turned: bool,
    differences: Differences,
    linear: Linear,
    stages: Vec<(&'static str, Stages)>,
    /// Polynomials of the step kept last: for each column the coefficients as in [`Dense`].
    coefficients: Vec<f64>,
}

impl<'a, S: System + ?Sized> Variations<'a, S> {
    /// Columns for `system`, at rest until they are started; `scales` holds a positive typical movement per unknown.
    pub fn new(system: &S, columns: Vec<Option<Shadows<'a, S>>>, scales: Vec<f64>) -> Self {
        let (n, m) = (system.size(), columns.len());
        Variations {
            counted: Statistics::default(),
            columns,
            scales,
            x: vec![0.0; m * n],
            q: vec![0.0; m * n],
            f: vec![0.0; m * n],
            mode: vec![0.0; m * system.mode_size()],
            x_before: vec![0.0; m * n],
            shifts: vec![0.0; m],
            last_shifts: vec![0.0; m],
            last_event: f64::NAN,
            length: 0.0,
            turned: true,
            differences: Differences::new(system),
            linear: Linear::new(system),
            stages: Vec::new(),
            coefficients: Vec::new(),
        }
    }

    /// Number of columns.
    pub fn len(&self) -> usize {
        self.columns.len()
    }

    /// True where there is no column.
    pub fn is_empty(&self) -> bool {
        self.columns.is_empty()
    }

    /// dx/dp of a column where the march stands, at fixed time.
    pub fn x(&self, column: usize) -> &[f64] {
        let n = self.scales.len();
        &self.x[column * n..(column + 1) * n]
    }

    /// dq/dp of a column where the march stands, at fixed time.
    pub fn q(&self, column: usize) -> &[f64] {
        let n = self.scales.len();
        &self.q[column * n..(column + 1) * n]
    }

    /// d(mode)/dp of a column; to be set where the modes at the start depend on the parameter.
    pub fn mode_mut(&mut self, column: usize) -> &mut [f64] {
        let modes = self.differences.modes();
        &mut self.mode[column * modes..(column + 1) * modes]
    }

    /// How f and q move with the columns at fixed x.
    fn explicit(&mut self, system: &S, at: Point<'_>, into: &mut Explicit) {
        let moving = Moving {
            columns: &self.columns,
            modes: &self.mode,
            length: self.length.max(INSTANT),
        };
        self.differences
            .take(system, &moving, at, into, &mut self.counted);
    }

    /// A march begins at this instant [s].
    pub(crate) fn begin(&mut self, time: f64) {
        self.last_event = time;
        self.shifts.fill(0.0);
        self.length = 0.0;
        self.turned = true;
    }

    /// The columns' polynomials of the step kept last.
    pub(crate) fn varied<'v>(&'v self, points: &'v [f64]) -> Varied<'v> {
        Varied {
            points,
            coefficients: &self.coefficients,
            size: self.scales.len(),
            modes: &self.mode,
            mode_size: self.differences.modes(),
        }
    }

    /// What the event taken last did.
    pub(crate) fn moved(&self) -> Moved<'_> {
        Moved {
            shifts: &self.shifts,
            before: &self.x_before,
            after: &self.x,
        }
    }
}

/// Derivatives within a step: the method's own polynomial, differentiated.
#[derive(Clone, Copy, Debug)]
pub struct Varied<'a> {
    points: &'a [f64],
    coefficients: &'a [f64],
    size: usize,
    modes: &'a [f64],
    mode_size: usize,
}

impl<'a> Varied<'a> {
    /// d(mode)/dp of a column, constant over the step.
    pub fn mode(&self, column: usize) -> &'a [f64] {
        &self.modes[column * self.mode_size..(column + 1) * self.mode_size]
    }

    /// The polynomial of dx/dp of a column, at fixed time.
    pub fn dense(&self, column: usize) -> Dense<'a> {
        let rows = self.points.len() * self.size;
        Dense {
            points: self.points,
            coefficients: &self.coefficients[column * rows..(column + 1) * rows],
        }
    }
}

/// Derivatives at an event; rows of unknowns, one per column.
#[derive(Clone, Copy, Debug)]
pub struct Moved<'a> {
    /// dt/dp of the event's instant, one per column.
    pub shifts: &'a [f64],
    /// dx/dp at fixed time before it.
    pub before: &'a [f64],
    /// dx/dp at fixed time after it.
    pub after: &'a [f64],
}
