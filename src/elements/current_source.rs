//! Current source: i = I(t) from the first to the second node through the source.

use super::claims::Claims;
use super::element::{Branch, Element, Energy, Path, PathKind, Point, Switching, Unsound};
use super::kind::{ElementKind, Made, NODES, Surroundings, pair};
use super::stamper::Stamper;
use super::waveforms::{Clocked, Wave};
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units;

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "current_source",
    about: "A source of current, constant or a waveform, driven through the source from the first to the second node.",
    keys: &[
        NODES,
        Key::required(
            "current",
            Takes::Waveform(units::CURRENT),
            "current through the source from first to second node",
        ),
        Key::default(
            "series_resistance",
            Takes::Quantity(units::RESISTANCE),
            "0 Ω",
            "resistance in series; it takes power, the current stays as it is",
        ),
    ],
    read,
};

struct CurrentSource {
    wave: Wave,
    series: Value,
    resistance: f64,
    branch: Branch,
}

fn read(fields: &Fields<'_>, _around: &Surroundings<'_>) -> Option<Made> {
    let terminals = pair(fields);
    let wave = Wave::read(fields, "current", units::CURRENT);
    let series = fields.non_negative("series_resistance");
    let element = CurrentSource {
        wave: wave?,
        series: series?,
        resistance: 0.0,
        branch: Branch::default(),
    };
    Some(Made::new(terminals?, element))
}

impl Element for CurrentSource {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        self.resistance = values[self.series];
        self.wave.derive(values)
    }

    fn claim(&mut self, claims: &mut Claims<'_>) {
        self.branch = Branch::claim(claims, false);
        self.wave.claim(claims);
    }

    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        let current = self.wave.value(at) * into.source_share();
        self.branch.conduct(at.x, current, 0.0, into);
    }

    fn energy(&self) -> &dyn Energy {
        self
    }

    fn switching(&self) -> Option<&dyn Switching> {
        self.wave.clock()
    }

    fn paths(&self) -> Vec<Path> {
        vec![Path {
            from: 0,
            to: 1,
            kind: PathKind::CurrentSource,
        }]
    }
}

impl Energy for CurrentSource {
    fn currents(&self, at: Point<'_>, out: &mut [f64]) {
        out[0] = self.wave.value(at);
        out[1] = -out[0];
    }

    fn loss(&self, at: Point<'_>) -> f64 {
        self.resistance * self.wave.value(at).powi(2)
    }

    fn stored(&self, _at: Point<'_>) -> f64 {
        0.0
    }

    fn is_source(&self) -> bool {
        true
    }
}
