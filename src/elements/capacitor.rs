//! Capacitor: q = C u behind its series resistance and inductance, with a leakage resistance across u.

use super::claims::{Claims, Measure};
use super::element::{Branch, Element, Energy, Path, PathKind, Point, Unknown, Unsound};
use super::kind::{ElementKind, Made, NODES, Surroundings, pair};
use super::stamper::Stamper;
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units;

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "capacitor",
    about: "A capacitance with what a real capacitor brings along: series resistance and inductance, leakage.",
    keys: &[
        NODES,
        Key::required(
            "capacitance",
            Takes::Quantity(units::CAPACITANCE),
            "capacitance",
        ),
        Key::default(
            "series_resistance",
            Takes::Quantity(units::RESISTANCE),
            "0 Ω",
            "resistance in series",
        ),
        Key::default(
            "series_inductance",
            Takes::Quantity(units::INDUCTANCE),
            "0 H",
            "inductance in series",
        ),
        Key::optional(
            "leakage_resistance",
            Takes::Quantity(units::RESISTANCE),
            "resistance across the capacitance",
        ),
        Key::default(
            "initial_voltage",
            Takes::Quantity(units::VOLTAGE),
            "0 V",
            "voltage across the capacitance at a zero start",
        ),
    ],
    read,
};

struct Capacitor {
    keys: Keys,
    capacitance: f64,
    resistance: f64,
    inductance: f64,
    leakage: f64,
    initial: f64,
    branch: Branch,
    /// Voltage across the capacitance, an unknown of its own behind series resistance or inductance.
    inner: Option<Unknown>,
}

struct Keys {
    capacitance: Value,
    resistance: Value,
    inductance: Value,
    leakage: Option<Value>,
    initial: Value,
}

fn read(fields: &Fields<'_>, _around: &Surroundings<'_>) -> Option<Made> {
    let terminals = pair(fields);
    let capacitance = fields.positive("capacitance");
    let resistance = fields.non_negative("series_resistance");
    let inductance = fields.non_negative("series_inductance");
    let leakage = if fields.has("leakage_resistance") {
        Some(fields.positive("leakage_resistance"))
    } else {
        None
    };
    let initial = fields.value("initial_voltage");
    let keys = Keys {
        capacitance: capacitance?,
        resistance: resistance?,
        inductance: inductance?,
        leakage: match leakage {
            Some(value) => Some(value?),
            None => None,
        },
        initial: initial?,
    };
    let element = Capacitor {
        keys,
        capacitance: 0.0,
        resistance: 0.0,
        inductance: 0.0,
        leakage: 0.0,
        initial: 0.0,
        branch: Branch::default(),
        inner: None,
    };
    Some(Made::new(terminals?, element))
}

impl Capacitor {
    fn inner_voltage(&self, x: &[f64]) -> f64 {
        self.inner
            .map_or_else(|| self.branch.voltage(x), |u| u.of(x))
    }
}

impl Element for Capacitor {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        self.capacitance = values[self.keys.capacitance];
        self.resistance = values[self.keys.resistance];
        self.inductance = values[self.keys.inductance];
        self.leakage = self.keys.leakage.map_or(0.0, |value| 1.0 / values[value]);
        self.initial = values[self.keys.initial];
        Ok(())
    }

    fn claim(&mut self, claims: &mut Claims<'_>) {
        let behind = self.resistance > 0.0 || self.inductance > 0.0;
        let probed = claims.probed;
        self.branch = Branch::claim(claims, behind || probed);
        self.inner = behind.then(|| claims.unknown("capacitor voltage", Measure::Voltage));
    }

    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        let (Some(u), Some(i)) = (self.inner, self.branch.current) else {
            let voltage = self.branch.voltage(at.x);
            self.branch
                .conduct(at.x, self.leakage * voltage, self.leakage, into);
            self.branch
                .store(self.capacitance * voltage, self.capacitance, into);
            return;
        };
        let (voltage, current) = (u.of(at.x), i.of(at.x));
        into.carry(self.branch.a, self.branch.b, i, current);
        into.q(i, self.inductance * current);
        into.dq(i, i, self.inductance);
        into.f(
            i,
            self.resistance * current + voltage - self.branch.voltage(at.x),
        );
        into.df(i, i, self.resistance);
        into.df(i, u, 1.0);
        into.df(i, self.branch.a, -1.0);
        into.df(i, self.branch.b, 1.0);
        into.q(u, self.capacitance * voltage);
        into.dq(u, u, self.capacitance);
        into.f(u, self.leakage * voltage - current);
        into.df(u, u, self.leakage);
        into.df(u, i, -1.0);
    }

    fn is_linear(&self) -> bool {
        true
    }

    fn energy(&self) -> &dyn Energy {
        self
    }

    fn initial_charge(&self, q: &mut dyn FnMut(Unknown, f64)) {
        let charge = self.capacitance * self.initial;
        match (self.inner, self.branch.current) {
            (Some(u), _) => q(u, charge),
            (None, Some(i)) => q(i, charge),
            (None, None) => {
                q(self.branch.a, charge);
                q(self.branch.b, -charge);
            }
        }
    }

    fn paths(&self) -> Vec<Path> {
        let kind = if self.resistance > 0.0 {
            PathKind::Conductive
        } else {
            PathKind::Capacitive
        };
        vec![Path {
            from: 0,
            to: 1,
            kind,
        }]
    }
}

impl Energy for Capacitor {
    fn currents(&self, at: Point<'_>, out: &mut [f64]) {
        let current = self.branch.current.map_or(0.0, |i| i.of(at.x));
        out[0] = current;
        out[1] = -current;
    }

    fn loss(&self, at: Point<'_>) -> f64 {
        let voltage = self.inner_voltage(at.x);
        let series = if self.inner.is_some() {
            self.branch.current.map_or(0.0, |i| i.of(at.x))
        } else {
            0.0
        };
        self.leakage * voltage * voltage + self.resistance * series * series
    }

    fn stored(&self, at: Point<'_>) -> f64 {
        let voltage = self.inner_voltage(at.x);
        let series = if self.inner.is_some() {
            self.branch.current.map_or(0.0, |i| i.of(at.x))
        } else {
            0.0
        };
        0.5 * (self.capacitance * voltage * voltage + self.inductance * series * series)
    }
}
