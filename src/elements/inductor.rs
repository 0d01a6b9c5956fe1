//! Linear inductor: d(L i)/dt + R i = v, the current an unknown.

use super::claims::{Claims, Wanted};
use super::element::{Branch, Element, Energy, Path, PathKind, Point, Quantity, Unknown, Unsound};
use super::kind::{ElementKind, Made, NODES, Surroundings, pair};
use super::stamper::Stamper;
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units;

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "inductor",
    about: "A linear inductance in series with its resistance; a coil on a core is a `coil`.",
    keys: &[
        NODES,
        Key::required(
            "inductance",
            Takes::Quantity(units::INDUCTANCE),
            "inductance",
        ),
        Key::default(
            "series_resistance",
            Takes::Quantity(units::RESISTANCE),
            "0 Ω",
            "resistance in series",
        ),
        Key::default(
            "initial_current",
            Takes::Quantity(units::CURRENT),
            "0 A",
            "current at a zero start",
        ),
    ],
    read,
};

struct Inductor {
    keys: [Value; 3],
    inductance: f64,
    resistance: f64,
    initial: f64,
    branch: Branch,
    i: Unknown,
}

fn read(fields: &Fields<'_>, _around: &Surroundings<'_>) -> Option<Made> {
    let terminals = pair(fields);
    let inductance = fields.positive("inductance");
    let resistance = fields.non_negative("series_resistance");
    let initial = fields.value("initial_current");
    let element = Inductor {
        keys: [inductance?, resistance?, initial?],
        inductance: 0.0,
        resistance: 0.0,
        initial: 0.0,
        branch: Branch::default(),
        i: Unknown::GROUND,
    };
    Some(Made::new(terminals?, element))
}

impl Element for Inductor {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        let [inductance, resistance, initial] = self.keys;
        self.inductance = values[inductance];
        self.resistance = values[resistance];
        self.initial = values[initial];
        Ok(())
    }

    fn claim(&mut self, claims: &mut Claims<'_>) {
        self.branch = Branch::claim(claims, true);
        self.i = self
            .branch
            .current
            .expect("an inductor always claims its current");
        claims.offer(Wanted::Of(Quantity::WindingCurrent, 0), self.i, 1.0);
    }

    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        let current = self.i.of(at.x);
        into.carry(self.branch.a, self.branch.b, self.i, current);
        into.q(self.i, self.inductance * current);
        into.dq(self.i, self.i, self.inductance);
        into.f(
            self.i,
            self.resistance * current - self.branch.voltage(at.x),
        );
        into.df(self.i, self.i, self.resistance);
        into.df(self.i, self.branch.a, -1.0);
        into.df(self.i, self.branch.b, 1.0);
    }

    fn is_linear(&self) -> bool {
        true
    }

    fn energy(&self) -> &dyn Energy {
        self
    }

    fn quantity(&self, quantity: Quantity, _winding: usize, at: Point<'_>) -> Option<f64> {
        match quantity {
            Quantity::WindingCurrent => Some(self.i.of(at.x)),
            Quantity::FluxLinkage => Some(self.inductance * self.i.of(at.x)),
            Quantity::Inductance => Some(self.inductance),
            Quantity::Saturation => Some(0.0),
            _ => None,
        }
    }

    fn initial_charge(&self, q: &mut dyn FnMut(Unknown, f64)) {
        q(self.i, self.inductance * self.initial);
    }

    fn paths(&self) -> Vec<Path> {
        let kind = if self.resistance > 0.0 {
            PathKind::InductiveWithResistance
        } else {
            PathKind::Inductive
        };
        vec![Path {
            from: 0,
            to: 1,
            kind,
        }]
    }
}

impl Energy for Inductor {
    fn currents(&self, at: Point<'_>, out: &mut [f64]) {
        out[0] = self.i.of(at.x);
        out[1] = -out[0];
    }

    fn loss(&self, at: Point<'_>) -> f64 {
        self.resistance * self.i.of(at.x).powi(2)
    }

    fn stored(&self, at: Point<'_>) -> f64 {
        0.5 * self.inductance * self.i.of(at.x).powi(2)
    }
}
