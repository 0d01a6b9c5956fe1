//! Signals of a circuit: from a phrase to a function of the point.

use super::numbering::{terminal_of, terminal_pair, winding_of};
use super::{Circuit, Entry};
use crate::dae::{Impulse, Point};
use crate::elements::element::WHOLE;
use crate::elements::{Quantity, Unknown};
use crate::signals::{Owner, Phrase};

/// A signal that can be read off at any point of a run.
#[derive(Clone, Debug, PartialEq)]
pub enum Tap {
    /// A difference of potentials.
    Potential(Unknown, Unknown),
    /// The current into a terminal of an element.
    Current(usize, usize),
    /// The power absorbed by an element.
    Power(usize),
    /// The energy absorbed by an element: the integral of its power, kept by whoever records.
    Energy(usize),
    /// A quantity of an element's own, of one winding.
    Of(usize, Quantity, usize),
}

impl Circuit {
    /// The tap of a phrase.
    ///
    /// # Errors
    /// What the phrase names is not there, or has no such signal; the text says which.
    pub fn tap(&self, phrase: &Phrase) -> Result<Tap, String> {
        let node = |name: &str| {
            self.node(name).ok_or_else(|| {
                let known = self
                    .node_names
                    .iter()
                    .map(String::as_str)
                    .chain([super::GROUND]);
                match crate::netlist::nearest(name, known) {
                    Some(near) => format!("there is no node `{name}`; did you mean `{near}`?"),
                    None => format!("there is no node `{name}`"),
                }
            })
        };
        let owner = |owner: &Owner| {
            self.index_of(&owner.element).ok_or_else(|| {
                let known = self.entries.iter().map(|entry| entry.name.as_str());
                match crate::netlist::nearest(&owner.element, known) {
                    Some(near) => format!(
                        "there is no element `{}`; did you mean `{near}`?",
                        owner.element
                    ),
                    None => format!("there is no element `{}`", owner.element),
                }
            })
        };
        match phrase {
            Phrase::VoltageAt(name) => Ok(Tap::Potential(node(name)?, Unknown::GROUND)),
            Phrase::VoltageFrom(a, b) => Ok(Tap::Potential(node(a)?, node(b)?)),
            Phrase::VoltageAcross(whose) => {
                let entry = &self.entries[owner(whose)?];
                let (a, b) = terminal_pair(entry, whose)?;
                Ok(Tap::Potential(entry.nodes[a], entry.nodes[b]))
            }
            Phrase::CurrentThrough(whose) => {
                let k = owner(whose)?;
                let (first, _) = terminal_pair(&self.entries[k], whose)?;
                Ok(Tap::Current(k, first))
            }
            Phrase::CurrentInto(whose, terminal) => {
                let k = owner(whose)?;
                Ok(Tap::Current(
                    k,
                    terminal_of(&self.entries[k], whose, terminal)?,
                ))
            }
            Phrase::Power(whose) => Ok(Tap::Power(owner(whose)?)),
            Phrase::Energy(whose) => Ok(Tap::Energy(owner(whose)?)),
            Phrase::Of(quantity, whose) => {
                let k = owner(whose)?;
                let entry = &self.entries[k];
                let of_core = matches!(quantity, Quantity::FluxDensity | Quantity::FieldStrength);
                let winding = match &whose.winding {
                    None if of_core && entry.windings.len() > 1 => WHOLE,
                    _ => winding_of(entry, whose)?,
                };
                let (x, mode) = (vec![0.0; self.unknowns.len()], self.start_mode());
                let at = Point {
                    time: 0.0,
                    x: &x,
                    mode: &mode[entry.modes.clone()],
                };
                match entry.element.quantity(*quantity, winding, at) {
                    Some(_) => Ok(Tap::Of(k, *quantity, winding)),
                    None => Err(format!(
                        "`{}` is a {} and has no {}",
                        entry.name,
                        entry.kind.word,
                        quantity.noun()
                    )),
                }
            }
        }
    }

    /// Value of a tap; an energy reads as its power, which whoever records integrates.
    pub fn read(&self, tap: &Tap, at: Point<'_>) -> f64 {
        match tap {
            Tap::Potential(a, b) => a.of(at.x) - b.of(at.x),
            Tap::Current(k, terminal) => self.with_currents(*k, at, |currents| currents[*terminal]),
            Tap::Power(k) | Tap::Energy(k) => self.power(*k, at),
            Tap::Of(k, quantity, winding) => {
                let entry = &self.entries[*k];
                entry
                    .element
                    .quantity(*quantity, *winding, self.own(entry, at))
                    .unwrap_or(f64::NAN)
            }
        }
    }

    /// Power absorbed by an element over all its terminals [W].
    pub fn power(&self, entry: usize, at: Point<'_>) -> f64 {
        let nodes = &self.entries[entry].nodes;
        self.with_currents(entry, at, |currents| {
            nodes
                .iter()
                .zip(currents)
                .map(|(node, current)| node.of(at.x) * current)
                .sum()
        })
    }

    /// Energy that an impulse brings into an element's terminals [J].
    ///
    /// The impulsive part of a current meets the mean of the voltages before and after, that of a voltage the mean of
    /// the currents: what a linear change of both within the instant gives, exact for linear charges and flux linkages.
    pub fn impulse(&self, entry: usize, impulse: &Impulse, time: f64) -> f64 {
        let energy = self.entries[entry].element.energy();
        if let Some(energy) = energy.impulse(&impulse.before, &impulse.after) {
            return energy;
        }
        let nodes = &self.entries[entry].nodes;
        let points = [
            (&impulse.before, &impulse.mode_before),
            (&impulse.during, &impulse.mode),
            (&impulse.after, &impulse.mode),
        ];
        let [before, during, after] = points.map(|(x, mode)| {
            let at = Point { time, x, mode };
            self.with_currents(entry, at, <[f64]>::to_vec)
        });
        let energy = |(t, node): (usize, &Unknown)| {
            let [v0, v, v1] = points.map(|(x, _)| node.of(x));
            0.5 * ((during[t] - after[t]) * (v0 + v1) + (v - v1) * (before[t] + after[t]))
        };
        impulse.length * nodes.iter().enumerate().map(energy).sum::<f64>()
    }

    /// Energy that flows into an element's terminals and that its own loss laws turn to heat [J] while an instant passes,
    /// the impulse aside: a picosecond's discharge has a thousandth of it done by then, an impact all.
    pub fn meanwhile(&self, entry: usize, impulse: &Impulse, time: f64) -> (f64, f64) {
        let at = Point {
            time,
            x: &impulse.after,
            mode: &impulse.mode,
        };
        let (power, loss) = (self.power(entry, at), self.loss(entry, at));
        let energy = self.entries[entry].element.energy();
        let struck = energy.struck(&impulse.before, &impulse.after);
        (impulse.spent * power, impulse.spent * loss + struck)
    }

    /// Power turned to heat by an element's own loss law [W].
    pub fn loss(&self, entry: usize, at: Point<'_>) -> f64 {
        let entry = &self.entries[entry];
        entry.element.energy().loss(self.own(entry, at))
    }

    /// Energy in an element's state function [J].
    pub fn stored(&self, entry: usize, at: Point<'_>) -> f64 {
        let entry = &self.entries[entry];
        entry.element.energy().stored(self.own(entry, at))
    }

    fn with_currents<T>(&self, entry: usize, at: Point<'_>, read: impl FnOnce(&[f64]) -> T) -> T {
        let entry = &self.entries[entry];
        let count = entry.terminals.len();
        let mut few = [0.0; 8];
        let mut many = Vec::new();
        let currents = if count <= few.len() {
            &mut few[..count]
        } else {
            many.resize(count, 0.0);
            many.as_mut_slice()
        };
        entry
            .element
            .energy()
            .currents(self.own(entry, at), currents);
        read(currents)
    }

    /// The point as the element sees it: with its own modes.
    pub(super) fn own<'a>(&self, entry: &Entry, at: Point<'a>) -> Point<'a> {
        Point {
            mode: &at.mode[entry.modes.clone()],
            ..at
        }
    }

    /// Whether a phrase asks for the currents of an element.
    pub fn probes(&self, phrase: &Phrase) -> Option<usize> {
        match phrase {
            Phrase::CurrentThrough(owner)
            | Phrase::CurrentInto(owner, _)
            | Phrase::Power(owner)
            | Phrase::Energy(owner) => self.index_of(&owner.element),
            _ => None,
        }
    }
}
