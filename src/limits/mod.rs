//! Limits: a bound from the netlist, and the signed margin of a reading or a rating to it.

mod limit;
pub mod ratings;
mod verdict;

pub use limit::{KEY, Limit, On, read_limits};
pub use ratings::{RatingMeter, RatingUse};
pub use verdict::{Sense, Verdict};
