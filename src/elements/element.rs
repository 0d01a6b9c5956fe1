//! The one seam of all elements: what an element asks of the equations and what it adds to them.
//!
//! Currents count positive into an element's terminals. The row of a node unknown is Kirchhoff's current law:
//! the sum of f + dq/dt over all elements is zero, each element adding the current that flows *into* it.

use super::claims::{Claims, Wanted};
use super::stamper::Stamper;
pub use super::unknown::Unknown;
pub use crate::dae::Point;
use crate::netlist::parameters::Values;
use crate::signals::Phrase;
pub use crate::signals::{Happening, Quantity};

/// Why a set of values makes no sensible element: said where the caller knows the element's name and line.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Unsound {
    /// The diagnostic's word.
    pub word: &'static str,
    /// The key that it is about; empty for the element as a whole.
    pub key: &'static str,
    /// What is wrong.
    pub headline: String,
    /// What would be right.
    pub help: String,
}

/// An element of the circuit. It is immutable while the circuit is solved; memory lives in unknowns and modes.
pub trait Element: Send + Sync {
    /// Re-derives every number from the parameters. Called once after reading and after each change of a
    /// parameter that the element depends on.
    fn derive(&mut self, values: &Values) -> Result<(), Unsound>;
    /// Asks for terminals, unknowns, modes and guards, and remembers their numbers. Called after `derive`;
    /// what is claimed may depend on whether a value is zero.
    fn claim(&mut self, claims: &mut Claims<'_>);
    /// Adds f, q and their slopes; `at.mode` is the element's own slice. The sequence of `df` and `dq`
    /// positions must be the same at every call.
    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>);
    /// True where f and q are linear forms of the unknowns whose factors follow from parameters alone: they are then
    /// stamped once and not at every evaluation. Such an element shortens no Newton step.
    fn is_linear(&self) -> bool {
        false
    }
    /// Losses, stored energy and terminal currents, for readings, ratings and the ledger.
    fn energy(&self) -> &dyn Energy;
    /// Clockwork and guards, where the element has any.
    fn switching(&self) -> Option<&dyn Switching> {
        None
    }
    /// The signals of other elements that this one follows, if any.
    fn follower(&mut self) -> Option<&mut dyn Follower> {
        None
    }
    /// A quantity of its own (of one winding where the element has several, or of the [`WHOLE`]); None where it has no
    /// such thing.
    fn quantity(&self, _quantity: Quantity, _winding: usize, _at: Point<'_>) -> Option<f64> {
        None
    }
    /// Shortens the Newton step `dx` from `x` where an exponential law would be overshot; true if it did.
    fn limit(&self, _x: &[f64], _dx: &mut [f64]) -> bool {
        false
    }
    /// Charges and flux linkages at a zero start: adds to q of the rows what the initial conditions say
    /// (nothing for an uncharged element).
    fn initial_charge(&self, _q: &mut dyn FnMut(Unknown, f64)) {}
    /// What the structure checks need to know of the paths between the terminals.
    fn paths(&self) -> Vec<Path> {
        Vec::new()
    }
    /// Each magnetic winding's figures, for elements that have any.
    fn windings(&self) -> Vec<WindingFigures<'_>> {
        Vec::new()
    }
    /// Power in the quickest section of a winding's ladder of skin and proximity effect, and in all of them [W]; None
    /// where the winding has no ladder.
    fn quickest_of_ladder(&self, _winding: usize, _at: Point<'_>) -> Option<[f64; 2]> {
        None
    }
    /// Each core whose material may lose: by itself that of the first winding, on which all others are.
    fn cores(&self) -> Vec<CoreFigures<'_>> {
        let first = self.windings().into_iter().next();
        first
            .map(|winding| CoreFigures {
                name: "",
                place: 0,
                volume: winding.wound.geometry.volume,
                losses: winding.wound.losses,
                eddy_currents: winding.wound.shells.is_some(),
            })
            .into_iter()
            .collect()
    }
}

/// A core as its loss is told by its flux density.
pub struct CoreFigures<'a> {
    /// Name of the leg; empty where the element has one core.
    pub name: &'a str,
    /// Stands for the core where a winding's number is asked for: of a winding on it, or of the leg ([`of_leg`]).
    pub place: usize,
    /// Volume of the material [m³].
    pub volume: f64,
    /// What the material loses.
    pub losses: crate::magnetics::Losses,
    /// True where eddy currents in it are part of the equations.
    pub eddy_currents: bool,
}

/// Stands for the core as a whole where a winding's number is asked for: its flux density and field strength need no
/// winding.
pub const WHOLE: usize = usize::MAX;

/// Stands for a leg of a core where a winding's number is asked for.
pub const fn of_leg(leg: usize) -> usize {
    WHOLE - 1 - leg
}

/// What the magnetics of one winding came out as.
pub struct WindingFigures<'a> {
    /// Name of the winding; empty where the element has one.
    pub name: &'a str,
    /// Winding resistance at its temperature [Ω].
    pub resistance: f64,
    /// The core with the winding on it.
    pub wound: &'a crate::magnetics::Wound,
}

/// How two terminals of an element are joined, for the structure checks.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Path {
    /// The first terminal.
    pub from: usize,
    /// The second terminal.
    pub to: usize,
    /// What joins them.
    pub kind: PathKind,
}

/// What joins two terminals.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum PathKind {
    /// The voltage is given, whatever the current.
    VoltageSource,
    /// The current is given, whatever the voltage.
    CurrentSource,
    /// A finite resistance, a junction, a switch.
    Conductive,
    /// A winding or inductor with resistance in it.
    InductiveWithResistance,
    /// A winding or inductor without resistance.
    Inductive,
    /// A capacitor.
    Capacitive,
}

/// The independent computations of the energy ledger.
pub trait Energy {
    /// Currents into the terminals [A], in the order of the terminals. Where a current holds the derivative of a
    /// charge it is an unknown of the element, claimed when `Claims::probed` says that it is asked for.
    fn currents(&self, at: Point<'_>, out: &mut [f64]);
    /// Power turned to heat by the element's own loss law [W].
    fn loss(&self, at: Point<'_>) -> f64;
    /// Energy in its state function [J].
    fn stored(&self, at: Point<'_>) -> f64;
    /// Energy [J] that enters when unknowns move at once from `before` to `after`, where the charge or the flux linkage
    /// that moves is not linear: the integral of its own law along the way. None where it is linear or does not move.
    fn impulse(&self, _before: &[f64], _after: &[f64]) -> Option<f64> {
        None
    }
    /// Energy [J] that an event turns to heat at once, `before` and `after` it: an impact.
    fn struck(&self, _before: &[f64], _after: &[f64]) -> f64 {
        0.0
    }
    /// True for sources, which stand outside the balance.
    fn is_source(&self) -> bool {
        false
    }
}

/// What the clock does to an element.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Rhythm {
    /// Nothing: it follows the circuit alone.
    None,
    /// The same again after so many seconds.
    Every(f64),
    /// Things at instants of their own, once.
    Once,
}

/// Discrete behaviour: modes that change at instants and at zeros of guards. Slices are the element's own.
pub trait Switching {
    /// The modes at the start (time zero); `x` is not known yet.
    fn start(&self, mode: &mut [f64]);
    /// What the clock does to it.
    fn rhythm(&self) -> Rhythm {
        Rhythm::None
    }
    /// Leaves in `mode`, which holds the modes of the start, those of `time` as if the clock had always run.
    fn forever(&self, _time: f64, _mode: &mut [f64]) {}
    /// Takes the memory of instants back by `by` seconds, a whole number of periods (forward where it is negative).
    fn earlier(&self, _by: f64, _mode: &mut [f64]) {}
    /// Puts a switch or contact at rest where a happening leads to; true where it is one.
    fn rest(&self, _after: Happening, _mode: &mut [f64]) -> bool {
        false
    }
    /// The next instant strictly after `time` at which the mode changes by the clock, or infinity.
    fn next_event(&self, _time: f64, _mode: &[f64]) -> f64 {
        f64::INFINITY
    }
    /// Takes the clock's event of `time`; returns what happened where it is of interest.
    fn at_instant(&self, _time: f64, _mode: &mut [f64]) -> Option<Happening> {
        None
    }
    /// Fills the guards that the element claimed; an event falls where one rises through zero.
    fn guards(&self, _at: Point<'_>, _out: &mut [f64]) {}
    /// The winding or contact that guard `which` is of; 0 where the element is but one thing.
    fn winding_of_guard(&self, _which: usize) -> usize {
        0
    }
    /// Takes the event of guard `which` (counted within the element).
    fn at_guard(
        &self,
        _which: usize,
        _time: f64,
        _x: &mut [f64],
        _mode: &mut [f64],
    ) -> Option<Happening> {
        None
    }
}

/// A linear form of unknowns that carries a signal.
pub type Terms = Vec<(Unknown, f64)>;

/// Value of a linear form.
#[inline]
pub fn sum(terms: &[(Unknown, f64)], x: &[f64]) -> f64 {
    terms
        .iter()
        .map(|&(unknown, factor)| factor * unknown.of(x))
        .sum()
}

/// An element that follows signals of others.
pub trait Follower {
    /// The signals followed, in a fixed order.
    fn follows(&self) -> Vec<&Phrase>;
    /// Receives one linear form per signal, in that order, after all unknowns are numbered.
    fn connect(&mut self, terms: Vec<Terms>);
}

/// The current unknown of a two-terminal element where one was claimed, and the element's two nodes.
#[derive(Clone, Copy, Debug)]
pub struct Branch {
    /// Unknown of the first terminal.
    pub a: Unknown,
    /// Unknown of the second terminal.
    pub b: Unknown,
    /// The branch current, where it is an unknown.
    pub current: Option<Unknown>,
}

impl Default for Branch {
    fn default() -> Self {
        Branch {
            a: Unknown::GROUND,
            b: Unknown::GROUND,
            current: None,
        }
    }
}

impl Branch {
    /// Claims the two terminals, and the current as an unknown where `always` or where it is followed.
    pub fn claim(claims: &mut Claims<'_>, always: bool) -> Self {
        Self::claim_at(claims, 0, always)
    }

    /// The same between the terminal `from` and the next one.
    pub fn claim_at(claims: &mut Claims<'_>, from: usize, always: bool) -> Self {
        let (first, second) = (Wanted::Current(from), Wanted::Current(from + 1));
        let followed = claims.wants(first) || claims.wants(second);
        let current = (always || followed)
            .then(|| claims.unknown("current", super::claims::Measure::Current));
        if let Some(current) = current {
            claims.offer(first, current, 1.0);
            claims.offer(second, current, -1.0);
        }
        Branch {
            a: claims.terminal(from),
            b: claims.terminal(from + 1),
            current,
        }
    }

    /// Voltage from the first to the second terminal [V].
    #[inline]
    pub fn voltage(&self, x: &[f64]) -> f64 {
        self.a.of(x) - self.b.of(x)
    }

    /// Stamps a current law i(v) between the terminals, through the current unknown where there is one.
    #[inline]
    pub fn conduct(&self, x: &[f64], current: f64, slope: f64, into: &mut Stamper<'_>) {
        match self.current {
            None => into.branch(self.a, self.b, current, slope),
            Some(i) => {
                into.carry(self.a, self.b, i, i.of(x));
                into.f(i, current - i.of(x));
                into.df(i, i, -1.0);
                into.df(i, self.a, slope);
                into.df(i, self.b, -slope);
            }
        }
    }

    /// Stamps a charge law q(v) that is in parallel with what `conduct` stamped.
    #[inline]
    pub fn store(&self, charge: f64, slope: f64, into: &mut Stamper<'_>) {
        match self.current {
            None => into.store(self.a, self.b, charge, slope),
            Some(i) => {
                into.q(i, charge);
                into.dq(i, self.a, slope);
                into.dq(i, self.b, -slope);
            }
        }
    }
}
