//! What a netlist asks to be computed, and the computing of it.

pub mod ledger;
pub mod simulate;
pub mod start;
pub mod swings;
pub mod task;

pub use ledger::{Account, Ledger, LedgerKeeper};
pub use simulate::{Failure, Settings, Simulation};
pub use start::start;
pub use swings::{Swings, Wish};
pub use task::{Analysis, Start, Transient};
