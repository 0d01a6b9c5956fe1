//! What a netlist asks to be computed, and the computing of it.

pub mod failure;
pub mod ledger;
pub mod period;
pub mod simulate;
pub mod start;
pub mod steady;
pub mod swings;
pub mod task;

pub use failure::Failure;
pub use ledger::{Account, Ledger, LedgerKeeper};
pub use simulate::{Settings, Simulation};
pub use start::start;
pub use steady::{Found, Warm};
pub use swings::{Swings, Wish};
pub use task::{Analysis, MOST_STEPS, Start, SteadyState, Transient};
