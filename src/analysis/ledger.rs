//! The energy ledger: absorbed by integrating terminal power, dissipated by integrating each element's own loss law,
//! stored from its state function; three independent computations, none by difference.
//!
//! Integrals are taken over the points of each step at which the method has solved the equations, with the weights of the
//! polynomial through them: of Radau's three points exact up to degree four, which is the method's own order. Between
//! these points the polynomial of a junction's voltage is off by little and the junction's current by any factor.
//! imbalance = sum over all but sources of |absorbed - dissipated - stored| over half the sum over all of the integrals
//! of |p|. What an impulse moves within an instant (a source that jumps across a capacitor) counts with both.

use crate::circuit::Circuit;
use crate::dae::{Impulse, Point, Step};

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
    /// Integral of the magnitude of the power into its terminals, or of its loss where that is more: an inductor that
    /// runs down in its own resistance turns its energy over though no terminal sees it.
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

/// Accounts of elements, in the order of the circuit.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Ledger {
    /// One per element that an account was kept of.
    pub accounts: Vec<Account>,
    /// What does not add up, as a fraction of the energy turned over.
    pub imbalance: f64,
}

/// Keeps the accounts while a run goes on.
#[derive(Clone, Debug)]
pub struct LedgerKeeper {
    entries: Vec<usize>,
    accounts: Vec<Account>,
    stored_at_start: Vec<f64>,
    /// Unknowns at the places of the rule, one row each.
    x: Vec<f64>,
    /// The points of a step that the rule was made for, and the rule: places and weights.
    points: Vec<f64>,
    rule: Vec<(f64, f64)>,
}

/// Below this [J] an energy is nothing: Boltzmann's constant times a tenth of a kelvin, far less than the thermal motion
/// in any part. What rounding leaves in a circuit at rest is no imbalance.
const NOTHING: f64 = 1.4e-24;

/// Most collocation points that serve without the step's start.
const ENOUGH: usize = 3;

/// Places and weights of the interpolating quadrature over the points of a step, 0 first: over those at which the
/// equations are solved, with the start where these are few.
pub fn rule(points: &[f64]) -> Vec<(f64, f64)> {
    let solved = points.get(1..).unwrap_or(&[]);
    let places = if solved.len() >= ENOUGH {
        solved
    } else {
        points
    };
    let weight = |&place: &f64| {
        let others = || places.iter().filter(move |&&other| other != place);
        let basis = |s: f64| -> f64 {
            others()
                .map(|other| (s - other) / (place - other))
                .product()
        };
        GAUSS.iter().map(|(s, weight)| weight * basis(*s)).sum()
    };
    places.iter().map(|place| (*place, weight(place))).collect()
}

impl LedgerKeeper {
    /// Opens the accounts of all elements at the start of a run.
    pub fn open(circuit: &Circuit, at: Point<'_>) -> Self {
        Self::of((0..circuit.entries.len()).collect(), circuit, at)
    }

    /// Opens the accounts of some elements, by their indices: a ledger that need not close, for what they dissipate.
    pub fn of(entries: Vec<usize>, circuit: &Circuit, at: Point<'_>) -> Self {
        let accounts = entries
            .iter()
            .map(|&k| Account {
                is_source: circuit.entries[k].element.energy().is_source(),
                ..Account::default()
            })
            .collect();
        let stored_at_start = entries.iter().map(|&k| circuit.stored(k, at)).collect();
        LedgerKeeper {
            entries,
            accounts,
            stored_at_start,
            x: Vec::new(),
            points: Vec::new(),
            rule: Vec::new(),
        }
    }

    /// Adds a step.
    pub fn step(&mut self, circuit: &Circuit, step: &Step<'_>) {
        if self.entries.is_empty() {
            return;
        }
        let length = step.to - step.from;
        if self.points != step.dense.points {
            self.points = step.dense.points.to_vec();
            self.rule = rule(&self.points);
        }
        let size = step.x1.len();
        self.x.resize(size * self.rule.len(), 0.0);
        for (row, (place, _)) in self.x.chunks_exact_mut(size.max(1)).zip(&self.rule) {
            step.dense.at(*place, row);
        }
        // Element by element: what belongs to one lies together in memory, the next one far away.
        for (&k, account) in self.entries.iter().zip(&mut self.accounts) {
            for (x, &(place, weight)) in self.x.chunks_exact(size.max(1)).zip(&self.rule) {
                let at = Point {
                    time: step.from + place * length,
                    x,
                    mode: step.mode,
                };
                let (power, loss) = (circuit.power(k, at), circuit.loss(k, at));
                account.absorbed += weight * length * power;
                account.turnover += weight * length * power.abs().max(loss);
                account.dissipated += weight * length * loss;
            }
        }
    }

    /// Adds what an impulse moves: energy that is absorbed at once.
    pub fn impulse(&mut self, circuit: &Circuit, impulse: &Impulse, time: f64) {
        for (&k, account) in self.entries.iter().zip(&mut self.accounts) {
            let energy = circuit.impulse(k, impulse, time);
            let (flown, lost) = circuit.meanwhile(k, impulse, time);
            account.absorbed += energy + flown;
            account.dissipated += lost;
            account.turnover += energy.abs() + flown.abs().max(lost);
        }
    }

    /// Closes the accounts at the end of a run.
    pub fn close(mut self, circuit: &Circuit, at: Point<'_>) -> Ledger {
        let starts = self.entries.iter().zip(&self.stored_at_start);
        for ((&k, start), account) in starts.zip(&mut self.accounts) {
            account.stored = circuit.stored(k, at) - start;
        }
        let turnover: f64 = self.accounts.iter().map(|account| account.turnover).sum();
        let gaps: f64 = self
            .accounts
            .iter()
            .filter(|account| !account.is_source)
            .map(Account::gap)
            .sum();
        let imbalance = gaps / (0.5 * turnover).max(NOTHING);
        Ledger {
            accounts: self.accounts,
            imbalance,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Radau's points 0.4 -+ 0.1 sqrt(6) and 1 have the weights 4/9 +- sqrt(6)/36 and 1/9 (Hairer and Wanner, table
    /// IV.5.6, from memory); the rule is exact up to degree four.
    #[test]
    fn the_rule_is_radaus_own() {
        let root = 6.0_f64.sqrt();
        let points = [0.0, 0.4 - 0.1 * root, 0.4 + 0.1 * root, 1.0];
        let rule = rule(&points);
        let wanted = [4.0 / 9.0 - root / 36.0, 4.0 / 9.0 + root / 36.0, 1.0 / 9.0];
        for ((_, weight), wanted) in rule.iter().zip(wanted) {
            assert!((weight - wanted).abs() < 1e-14, "{weight} for {wanted}");
        }
        for degree in 0..5 {
            let sum: f64 = rule.iter().map(|(s, w)| w * s.powi(degree)).sum();
            assert!((sum - 1.0 / f64::from(degree + 1)).abs() < 1e-14);
        }
    }

    #[test]
    fn few_points_take_the_start_in() {
        let places = rule(&[0.0, 0.5, 1.0]);
        let simpson = [1.0 / 6.0, 4.0 / 6.0, 1.0 / 6.0];
        for ((_, weight), wanted) in places.iter().zip(simpson) {
            assert!((weight - wanted).abs() < 1e-15);
        }
    }
}
