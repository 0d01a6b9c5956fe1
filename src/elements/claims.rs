//! What an element asks for when the unknowns are numbered.

use super::unknown::Unknown;
use crate::signals::Quantity;

/// What an unknown measures; its tolerance is scaled among its own kind.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Measure {
    /// Volts.
    Voltage,
    /// Amperes.
    Current,
    /// Webers, times the turns that they pass through.
    FluxLinkage,
    /// Webers of a core: a flux linkage of one turn.
    Flux,
    /// Coulombs.
    Charge,
    /// Metres.
    Length,
    /// Metres per second.
    Speed,
    /// Kelvins.
    Temperature,
    /// Amperes per metre.
    Magnetization,
    /// Anything without a unit.
    Number,
}

/// One numbered unknown: whose it is and what it measures.
#[derive(Clone, Debug)]
pub struct Claimed {
    /// Index of the element; None for the potential of a named node.
    pub element: Option<usize>,
    /// What it is, in words: `current`, `junction voltage`, `flux linkage`.
    pub what: &'static str,
    /// Its unit's kind.
    pub measure: Measure,
    /// Largest swing that its tolerance may be relative to, in its own unit: a law of it bends within far less.
    pub reach: f64,
}

/// The ledger of numbers while one element claims its own.
pub struct Claims<'a> {
    /// Index of the claiming element.
    pub element: usize,
    /// Unknowns of its terminals.
    pub terminals: &'a [Unknown],
    /// True where the currents into its terminals are asked for (a phrase, the ledger).
    pub probed: bool,
    /// Quantities that other elements follow: the element must offer an unknown for each. A current is
    /// asked for by `Wanted::Current(terminal)`.
    pub wanted: &'a [Wanted],
    /// All unknowns so far.
    pub unknowns: &'a mut Vec<Claimed>,
    /// Unknowns offered to followers.
    pub offered: &'a mut Vec<Offer>,
    /// Number of mode values so far.
    pub modes: &'a mut usize,
    /// Number of guards so far.
    pub guards: &'a mut usize,
}

/// An unknown that carries a signal of an element.
#[derive(Clone, Copy, Debug)]
pub struct Offer {
    /// Index of the element that offers.
    pub element: usize,
    /// The signal.
    pub wanted: Wanted,
    /// The unknown that carries it.
    pub unknown: Unknown,
    /// The signal is this factor times the unknown.
    pub factor: f64,
}

/// A signal of one element that another one follows.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Wanted {
    /// The current into a terminal.
    Current(usize),
    /// A quantity of a winding (0 where there is one).
    Of(Quantity, usize),
}

impl Claims<'_> {
    /// Unknown of terminal `k`.
    pub fn terminal(&self, k: usize) -> Unknown {
        self.terminals[k]
    }

    /// A new unknown with the row of the same number.
    pub fn unknown(&mut self, what: &'static str, measure: Measure) -> Unknown {
        let number = Unknown(self.unknowns.len() as u32);
        self.unknowns.push(Claimed {
            element: Some(self.element),
            what,
            measure,
            reach: f64::INFINITY,
        });
        number
    }

    /// The tolerances of these unknowns are relative to no more than `reach` of their own unit.
    pub fn reach(&mut self, unknowns: [Unknown; 2], reach: f64) {
        for unknown in unknowns {
            if let Some(claimed) = self.unknowns.get_mut(unknown.0 as usize) {
                claimed.reach = claimed.reach.min(reach);
            }
        }
    }

    /// Reserves `count` mode values; the element sees them as its own slice.
    pub fn modes(&mut self, count: usize) {
        *self.modes += count;
    }

    /// Reserves `count` guards; the element counts them from zero.
    pub fn guards(&mut self, count: usize) {
        *self.guards += count;
    }

    /// True where another element follows this signal.
    pub fn wants(&self, wanted: Wanted) -> bool {
        self.wanted.contains(&wanted)
    }

    /// Offers an unknown that carries a wanted signal, times `factor`.
    pub fn offer(&mut self, wanted: Wanted, unknown: Unknown, factor: f64) {
        self.offered.push(Offer {
            element: self.element,
            wanted,
            unknown,
            factor,
        });
    }
}
