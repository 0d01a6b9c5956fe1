//! Why a solution ended: small errors that name the time and the unknown, for the caller to put into words.

use std::fmt;

/// What stood in the way.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Trouble {
    /// Newton's iteration did not settle, however short the step.
    Unsettled,
    /// The error estimate stayed above the tolerance, however short the step.
    Inaccurate,
    /// The equations do not determine the unknown.
    Singular,
    /// A value is infinite or not a number.
    NotFinite,
    /// Events follow one another without time going on; the guard is the last one.
    Chattering {
        /// Number of the guard, or none where the clock's events do not end.
        guard: Option<usize>,
    },
    /// The steps allowed were not enough.
    Endless,
}

impl fmt::Display for Trouble {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        out.write_str(match self {
            Trouble::Unsettled => "the iteration does not settle even with the shortest step",
            Trouble::Inaccurate => "the accuracy is not reached even with the shortest step",
            Trouble::Singular => "the equations do not determine this unknown",
            Trouble::NotFinite => "a value is infinite or not a number",
            Trouble::Chattering { .. } => "events follow one another without time going on",
            Trouble::Endless => "the steps allowed are used up",
        })
    }
}

/// Why the march ended early.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct MarchError {
    /// Instant [s] up to which the solution stands.
    pub time: f64,
    /// The unknown that made the trouble, where one did.
    pub unknown: Option<usize>,
    /// What it was.
    pub cause: Trouble,
}

impl fmt::Display for MarchError {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(out, "at {} s: {}", self.time, self.cause)?;
        self.unknown
            .map_or(Ok(()), |unknown| write!(out, " (unknown {unknown})"))
    }
}

impl std::error::Error for MarchError {}

/// Why no operating point or no consistent start was found.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct StartError {
    /// The unknown that settled last, or that nothing determines.
    pub unknown: Option<usize>,
    /// What stood in the way.
    pub cause: Trouble,
}

impl fmt::Display for StartError {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(out, "{}", self.cause)?;
        self.unknown
            .map_or(Ok(()), |unknown| write!(out, " (unknown {unknown})"))
    }
}

impl std::error::Error for StartError {}
