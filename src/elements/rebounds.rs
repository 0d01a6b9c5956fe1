//! The rebounds of a contact that has closed: a train that dies away.
//!
//! A contact that strikes with the speed V leaves with e V, e the restitution. Its spring pulls it back with a nearly
//! constant acceleration, so that a flight lasts in proportion to the speed of its start: flight k lasts
//! `first_duration` e^(k-1), its gap is u t (1 - t/d) with u = V e^k and d its duration (projectile motion of a body that
//! bounces, any textbook of mechanics). How long the contact touches between two flights is given by `touch`; without it
//! each touch lasts as long as the flight that follows it (common practice: as much make as break).

use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units;

/// The keys of `bounce`.
pub const KEYS: &[Key] = &[
    Key::required("count", Takes::Count, "number of rebounds after a closing"),
    Key::required(
        "first_duration",
        Takes::Quantity(units::TIME),
        "how long the first rebound leaves the contact open",
    ),
    Key::required(
        "restitution",
        Takes::Quantity(units::RATIO),
        "duration of a rebound over that of the one before it",
    ),
    Key::optional(
        "touch",
        Takes::Quantity(units::TIME),
        "how long the contact touches between rebounds; without it, as long as the rebound that follows",
    ),
];

/// Most rebounds of one closing: with more of them a contact would not be said to have closed.
const MOST: usize = 100;

/// A train of rebounds.
pub struct Rebounds {
    count: usize,
    keys: [Value; 2],
    touch_key: Option<Value>,
    first: f64,
    restitution: f64,
    touch: Option<f64>,
}

/// One rebound of a train, counted from the first touch.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Flight {
    /// When it leaves [s].
    pub leaves: f64,
    /// How long it lasts [s].
    pub lasts: f64,
    /// Speed with which it leaves, over the speed of the stroke that came before the train.
    pub speed: f64,
}

impl Rebounds {
    /// Reads the mapping behind `bounce`.
    pub fn read(fields: &Fields<'_>) -> Option<Self> {
        let count = fields.count("count").filter(|&count| {
            let few = count <= MOST;
            if !few {
                fields.error_at(
                    fields.span("count"),
                    "out-of-range",
                    format!("count must be at most {MOST}, got {count}"),
                    "too many",
                    "the later rebounds of a train are too short to matter",
                );
            }
            few
        });
        let first = fields.positive("first_duration");
        let restitution = fields.checked("restitution", "above 0 and below 1", |amount| {
            amount.low > 0.0 && amount.high < 1.0
        });
        let touch = if fields.has("touch") {
            fields.positive("touch").map(Some)
        } else {
            Some(None)
        };
        fields.finish();
        Some(Rebounds {
            count: count?,
            keys: [first?, restitution?],
            touch_key: touch?,
            first: 0.0,
            restitution: 0.0,
            touch: None,
        })
    }

    /// Re-derives the numbers.
    pub fn derive(&mut self, values: &Values) {
        [self.first, self.restitution] = self.keys.map(|key| values[key]);
        self.touch = self.touch_key.map(|key| values[key]);
    }

    /// The rebounds in order.
    pub fn flights(&self) -> impl Iterator<Item = Flight> + '_ {
        let mut at = 0.0;
        let (mut lasts, mut speed) = (self.first, self.restitution);
        (0..self.count).map(move |_| {
            let leaves = at + self.touch.unwrap_or(lasts);
            let flight = Flight {
                leaves,
                lasts,
                speed,
            };
            at = leaves + lasts;
            lasts *= self.restitution;
            speed *= self.restitution;
            flight
        })
    }

    /// The rebound of a number from 1.
    pub fn flight(&self, number: usize) -> Option<Flight> {
        self.flights().nth(number.checked_sub(1)?)
    }

    /// The changes of a train that began at `touched` [s]: instant [s], number of the rebound, and whether it ends there.
    pub fn changes(&self, touched: f64) -> impl Iterator<Item = (f64, usize, bool)> + '_ {
        self.flights().enumerate().flat_map(move |(k, flight)| {
            let leaves = touched + flight.leaves;
            [(leaves, k + 1, false), (leaves + flight.lasts, k + 1, true)]
        })
    }
}

impl Flight {
    /// Gap [m] at `since` seconds after the first touch of a contact that struck with `stroke` [m/s].
    pub fn gap(&self, stroke: f64, since: f64) -> f64 {
        let flown = since - self.leaves;
        stroke * self.speed * flown * (1.0 - flown / self.lasts)
    }

    /// True in the second half, in which the gap shrinks.
    pub fn falls(&self, since: f64) -> bool {
        since - self.leaves > 0.5 * self.lasts
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::netlist::{Parameter, Parameters};

    fn train(count: usize, touch: Option<f64>) -> Rebounds {
        let value = Parameters::default().add(Parameter {
            path: "none".into(),
            kind: units::TIME,
            nominal: 0.0,
            spread: (0.0, 0.0),
            span: None,
        });
        Rebounds {
            count,
            keys: [value; 2],
            touch_key: None,
            first: 1e-3,
            restitution: 0.5,
            touch,
        }
    }

    /// A geometric series: first/(1 - e) for the flights of an endless train, as much again for the touches.
    #[test]
    fn a_long_train_lasts_as_its_geometric_series_says() {
        let last = train(40, None).flights().last().expect("forty");
        assert!((last.leaves + last.lasts - 4e-3).abs() < 1e-12);
        let short = train(3, Some(1e-4));
        let leaves: Vec<f64> = short.flights().map(|flight| flight.leaves).collect();
        for (leaves, wanted) in leaves.iter().zip([1e-4, 1.2e-3, 1.8e-3]) {
            assert!((leaves - wanted).abs() < 1e-15, "{leaves} for {wanted}");
        }
    }

    /// The highest point of a flight is u d/4, reached with no speed after half of it.
    #[test]
    fn a_flight_is_a_parabola() {
        let flight = train(2, None).flights().nth(1).expect("two");
        let middle = flight.leaves + 0.5 * flight.lasts;
        assert!((flight.gap(2.0, middle) - 2.0 * 0.25 * 0.5e-3 / 4.0).abs() < 1e-12);
        assert_eq!(flight.gap(2.0, flight.leaves), 0.0);
        assert!(!flight.falls(middle) && flight.falls(middle + 1e-6));
    }

    #[test]
    fn a_train_opens_and_closes_in_turn() {
        let changes: Vec<_> = train(2, None).changes(5.0).collect();
        let wanted = [
            (5.001, 1, false),
            (5.002, 1, true),
            (5.0025, 2, false),
            (5.003, 2, true),
        ];
        for (change, wanted) in changes.iter().zip(wanted) {
            assert!((change.0 - wanted.0).abs() < 1e-12);
            assert_eq!((change.1, change.2), (wanted.1, wanted.2));
        }
        assert_eq!(changes.len(), wanted.len());
    }
}
