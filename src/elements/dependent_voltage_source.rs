//! Dependent voltage source: v = gain times the followed signal.

use super::claims::Claims;
use super::dependent::Followed;
use super::element::{Branch, Element, Energy, Follower, Path, PathKind, Point, Unknown, Unsound};
use super::kind::{ElementKind, Made, NODES, Surroundings, pair};
use super::stamper::Stamper;
use crate::netlist::{Fields, Key, Takes, Values};
use crate::units;

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "dependent_voltage_source",
    about: "A voltage that is a gain times any signal.",
    keys: &[
        NODES,
        Key::required("follows", Takes::Phrase, "the signal that it follows"),
        Key::required(
            "gain",
            Takes::Quantity(units::ANY),
            "voltage per unit of the signal",
        ),
    ],
    read,
};

struct DependentVoltageSource {
    followed: Followed,
    branch: Branch,
    i: Unknown,
}

fn read(fields: &Fields<'_>, _around: &Surroundings<'_>) -> Option<Made> {
    let terminals = pair(fields);
    let followed = Followed::read(fields, units::VOLTAGE);
    let element = DependentVoltageSource {
        followed: followed?,
        branch: Branch::default(),
        i: Unknown::GROUND,
    };
    Some(Made::new(terminals?, element))
}

impl Element for DependentVoltageSource {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        self.followed.derive(values)
    }

    fn claim(&mut self, claims: &mut Claims<'_>) {
        self.branch = Branch::claim(claims, true);
        self.i = self
            .branch
            .current
            .expect("a voltage source always claims its current");
    }

    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        into.carry(self.branch.a, self.branch.b, self.i, self.i.of(at.x));
        into.f(
            self.i,
            self.branch.voltage(at.x) - self.followed.value(at.x),
        );
        into.df(self.i, self.branch.a, 1.0);
        into.df(self.i, self.branch.b, -1.0);
        for &(unknown, factor) in &self.followed.terms {
            into.df(self.i, unknown, -self.followed.gain * factor);
        }
    }

    fn is_linear(&self) -> bool {
        true
    }

    fn energy(&self) -> &dyn Energy {
        self
    }

    fn follower(&mut self) -> Option<&mut dyn Follower> {
        Some(&mut self.followed)
    }

    fn paths(&self) -> Vec<Path> {
        vec![Path {
            from: 0,
            to: 1,
            kind: PathKind::VoltageSource,
        }]
    }
}

impl Energy for DependentVoltageSource {
    fn currents(&self, at: Point<'_>, out: &mut [f64]) {
        out[0] = self.i.of(at.x);
        out[1] = -out[0];
    }

    fn loss(&self, _at: Point<'_>) -> f64 {
        0.0
    }

    fn stored(&self, _at: Point<'_>) -> f64 {
        0.0
    }

    fn is_source(&self) -> bool {
        true
    }
}
