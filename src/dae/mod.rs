//! Differential-algebraic systems d/dt q(x) + f(x, t) = 0: it knows vectors, modes and events, and `math` alone.

pub mod pattern;
pub mod system;

pub use pattern::Pattern;
pub use system::{Cause, Evaluation, Point, System};
