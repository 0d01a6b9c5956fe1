//! Differential-algebraic systems d/dt q(x) + f(x, t) = 0: it knows vectors, modes and events, and `math` alone.
//!
//! ```text
//! System -> operating_point | consistent_start -> State -> March (Method, Tolerances) -> Advance -> observer
//! ```

pub mod advance;
mod control;
mod crossing;
pub mod dense;
mod event;
mod experience;
mod instant;
pub mod march;
pub mod methods;
mod newton;
pub mod pattern;
mod pile;
pub mod shooting;
pub mod start;
pub mod statistics;
pub mod system;
pub mod tolerances;
pub mod trouble;
pub mod variations;

pub use advance::{Advance, Impulse, Step};
pub use dense::Dense;
pub use march::{Ending, March, Observer, Span, State};
pub use methods::{METHODS, Method};
pub use pattern::Pattern;
pub use shooting::{Cycle, Orbit, shoot};
pub use start::{consistent_start, operating_point};
pub use statistics::Statistics;
pub use system::{Cause, Evaluation, Point, System};
pub use tolerances::Tolerances;
pub use trouble::{MarchError, StartError, Trouble};
pub use variations::{Moved, Shadows, Variations, Varied};

#[cfg(test)]
mod tests;
