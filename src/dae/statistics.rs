//! Counted work.

/// Work done, counted.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Statistics {
    /// Steps that were kept.
    pub accepted: u64,
    /// Steps that were given up: too inaccurate, or not settled.
    pub rejected: u64,
    /// Of these, the ones whose iteration did not settle.
    pub unsettled: u64,
    /// Newton iterations (of all stages together where they are coupled).
    pub newton_iterations: u64,
    /// Evaluations of the system.
    pub evaluations: u64,
    /// Factorisations, a complex one counted like a real one.
    pub factorizations: u64,
    /// Solutions with factors at hand.
    pub solves: u64,
    /// Events taken.
    pub events: u64,
}

impl Statistics {
    /// Adds the work of another.
    pub fn add(&mut self, other: &Statistics) {
        self.accepted += other.accepted;
        self.rejected += other.rejected;
        self.unsettled += other.unsettled;
        self.newton_iterations += other.newton_iterations;
        self.evaluations += other.evaluations;
        self.factorizations += other.factorizations;
        self.solves += other.solves;
        self.events += other.events;
    }
}
