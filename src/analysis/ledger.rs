//! The energy ledger: absorbed by integrating terminal power, dissipated by integrating each element's own loss law,
//! stored from its state function; three independent computations, none by difference.
//!
//! Integrals are taken with four Gauss points on the method's own polynomial of each step: exact for the product of two
//! cubics. imbalance = sum over all but sources of |absorbed - dissipated - stored| over half the sum over all of the
//! integrals of |p|.

use crate::circuit::Circuit;
use crate::dae::{Point, Step};

/// Abscissae in [0, 1] and weights of the four-point Gauss-Legendre rule (Abramowitz and Stegun, table 25.4).
const GAUSS: [(f64, f64); 4] = [
    (0.069_431_844_202_973_7, 0.173_927_422_568_726_9),
    (0.330_009_478_207_571_9, 0.326_072_577_431_273_1),
    (0.669_990_521_792_428_1, 0.326_072_577_431_273_1),
    (0.930_568_155_797_026_3, 0.173_927_422_568_726_9),
];

/// One element's account [J].
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Account {
    /// Integral of the power into its terminals.
    pub absorbed: f64,
    /// Integral of its own loss law.
    pub dissipated: f64,
    /// Final less initial value of its state function.
    pub stored: f64,
    /// Integral of the magnitude of the power into its terminals.
    pub turnover: f64,
    /// True for sources, which stand outside the balance.
    pub is_source: bool,
}

impl Account {
    /// What does not add up [J].
    pub fn gap(&self) -> f64 {
        (self.absorbed - self.dissipated - self.stored).abs()
    }
}

/// Accounts of all elements, in the order of the circuit.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Ledger {
    /// One per element.
    pub accounts: Vec<Account>,
    /// What does not add up, as a fraction of the energy turned over.
    pub imbalance: f64,
}

/// Keeps the accounts while a run goes on.
#[derive(Clone, Debug)]
pub struct LedgerKeeper {
    accounts: Vec<Account>,
    stored_at_start: Vec<f64>,
    x: Vec<f64>,
}

impl LedgerKeeper {
    /// Opens the accounts at the start of a run.
    pub fn open(circuit: &Circuit, at: Point<'_>) -> Self {
        let entries = 0..circuit.entries.len();
        let accounts = entries
            .clone()
            .map(|k| Account {
                is_source: circuit.entries[k].element.energy().is_source(),
                ..Account::default()
            })
            .collect();
        let stored_at_start = entries.map(|k| circuit.stored(k, at)).collect();
        LedgerKeeper {
            accounts,
            stored_at_start,
            x: vec![0.0; at.x.len()],
        }
    }

    /// Adds a step.
    pub fn step(&mut self, circuit: &Circuit, step: &Step<'_>) {
        let length = step.to - step.from;
        for (place, weight) in GAUSS {
            let time = step.from + place * length;
            step.at(time, &mut self.x);
            let at = Point {
                time,
                x: &self.x,
                mode: step.mode,
            };
            for (k, account) in self.accounts.iter_mut().enumerate() {
                let power = circuit.power(k, at);
                account.absorbed += weight * length * power;
                account.turnover += weight * length * power.abs();
                account.dissipated += weight * length * circuit.loss(k, at);
            }
        }
    }

    /// Energy absorbed by an element so far [J].
    pub fn absorbed(&self, entry: usize) -> f64 {
        self.accounts[entry].absorbed
    }

    /// Closes the accounts at the end of a run.
    pub fn close(mut self, circuit: &Circuit, at: Point<'_>) -> Ledger {
        for (k, account) in self.accounts.iter_mut().enumerate() {
            account.stored = circuit.stored(k, at) - self.stored_at_start[k];
        }
        let turnover: f64 = self.accounts.iter().map(|account| account.turnover).sum();
        let gaps: f64 = self
            .accounts
            .iter()
            .filter(|account| !account.is_source)
            .map(Account::gap)
            .sum();
        let imbalance = if turnover > 0.0 {
            gaps / (0.5 * turnover)
        } else {
            0.0
        };
        Ledger {
            accounts: self.accounts,
            imbalance,
        }
    }
}
