//! Voltage source: v = V(t) + R i, the current an unknown, positive into the first terminal.

use super::claims::Claims;
use super::element::{Branch, Element, Energy, Path, PathKind, Point, Switching, Unknown, Unsound};
use super::kind::{ElementKind, Made, NODES, Surroundings, pair};
use super::stamper::Stamper;
use super::waveforms::{Clocked, Wave};
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units;

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "voltage_source",
    about: "A source of voltage, constant or a waveform, from the second to the first node.",
    keys: &[
        NODES,
        Key::required(
            "voltage",
            Takes::Waveform(units::VOLTAGE),
            "voltage of the first node against the second, unloaded",
        ),
        Key::default(
            "series_resistance",
            Takes::Quantity(units::RESISTANCE),
            "0 Ω",
            "inner resistance",
        ),
    ],
    read,
};

struct VoltageSource {
    wave: Wave,
    series: Value,
    resistance: f64,
    branch: Branch,
    i: Unknown,
}

fn read(fields: &Fields<'_>, _around: &Surroundings<'_>) -> Option<Made> {
    let terminals = pair(fields);
    let wave = Wave::read(fields, "voltage", units::VOLTAGE);
    let series = fields.non_negative("series_resistance");
    let element = VoltageSource {
        wave: wave?,
        series: series?,
        resistance: 0.0,
        branch: Branch::default(),
        i: Unknown::GROUND,
    };
    Some(Made::new(terminals?, element))
}

impl Element for VoltageSource {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        self.resistance = values[self.series];
        self.wave.derive(values)
    }

    fn claim(&mut self, claims: &mut Claims<'_>) {
        self.branch = Branch::claim(claims, true);
        self.i = self
            .branch
            .current
            .expect("a voltage source always claims its current");
        self.wave.claim(claims);
    }

    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        let current = self.i.of(at.x);
        into.carry(self.branch.a, self.branch.b, self.i, current);
        let voltage = self.wave.value(at) * into.source_share();
        into.f(
            self.i,
            self.branch.voltage(at.x) - voltage - self.resistance * current,
        );
        into.df(self.i, self.branch.a, 1.0);
        into.df(self.i, self.branch.b, -1.0);
        into.df(self.i, self.i, -self.resistance);
    }

    fn energy(&self) -> &dyn Energy {
        self
    }

    fn switching(&self) -> Option<&dyn Switching> {
        self.wave.clock()
    }

    fn paths(&self) -> Vec<Path> {
        let kind = if self.resistance > 0.0 {
            PathKind::Conductive
        } else {
            PathKind::VoltageSource
        };
        vec![Path {
            from: 0,
            to: 1,
            kind,
        }]
    }
}

impl Energy for VoltageSource {
    fn currents(&self, at: Point<'_>, out: &mut [f64]) {
        out[0] = self.i.of(at.x);
        out[1] = -out[0];
    }

    fn loss(&self, at: Point<'_>) -> f64 {
        self.resistance * self.i.of(at.x).powi(2)
    }

    fn stored(&self, _at: Point<'_>) -> f64 {
        0.0
    }

    fn is_source(&self) -> bool {
        true
    }
}
