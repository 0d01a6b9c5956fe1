//! Dependent current source: i = gain times the followed signal, from the first to the second node through the source.

use super::claims::{Claims, Measure, Wanted};
use super::dependent::Followed;
use super::element::{Element, Energy, Follower, Path, PathKind, Point, Unknown, Unsound};
use super::kind::{ElementKind, Made, NODES, Surroundings, pair};
use super::stamper::Stamper;
use crate::netlist::{Fields, Key, Takes, Values};
use crate::units;

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "dependent_current_source",
    about: "A current that is a gain times any signal, driven from the first to the second node through the source.",
    keys: &[
        NODES,
        Key::required("follows", Takes::Phrase, "the signal that it follows"),
        Key::required(
            "gain",
            Takes::Quantity(units::ANY),
            "current per unit of the signal",
        ),
    ],
    read,
};

struct DependentCurrentSource {
    followed: Followed,
    a: Unknown,
    b: Unknown,
    /// The current as an unknown, where another element follows it.
    current: Option<Unknown>,
}

fn read(fields: &Fields<'_>, _around: &Surroundings<'_>) -> Option<Made> {
    let terminals = pair(fields);
    let followed = Followed::read(fields, units::CURRENT)?;
    let element = DependentCurrentSource {
        followed,
        a: Unknown::GROUND,
        b: Unknown::GROUND,
        current: None,
    };
    Some(Made::new(terminals?, element))
}

impl Element for DependentCurrentSource {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        self.followed.derive(values)
    }

    fn claim(&mut self, claims: &mut Claims<'_>) {
        (self.a, self.b) = (claims.terminal(0), claims.terminal(1));
        let (first, second) = (Wanted::Current(0), Wanted::Current(1));
        let followed = claims.wants(first) || claims.wants(second);
        self.current = followed.then(|| claims.unknown("current", Measure::Current));
        if let Some(current) = self.current {
            claims.offer(first, current, 1.0);
            claims.offer(second, current, -1.0);
        }
    }

    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        let current = self.followed.value(at.x);
        if let Some(i) = self.current {
            into.carry(self.a, self.b, i, i.of(at.x));
            into.f(i, current - i.of(at.x));
            into.df(i, i, -1.0);
            for &(unknown, factor) in &self.followed.terms {
                into.df(i, unknown, self.followed.gain * factor);
            }
            return;
        }
        into.f(self.a, current);
        into.f(self.b, -current);
        for &(unknown, factor) in &self.followed.terms {
            into.df(self.a, unknown, self.followed.gain * factor);
            into.df(self.b, unknown, -self.followed.gain * factor);
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
            kind: PathKind::CurrentSource,
        }]
    }
}

impl Energy for DependentCurrentSource {
    fn currents(&self, at: Point<'_>, out: &mut [f64]) {
        out[0] = self.followed.value(at.x);
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
