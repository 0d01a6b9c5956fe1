//! From the elements of a netlist to numbered equations: building, checking, numbering, and the system that is solved.

mod build;
pub mod checks;
mod explain;
mod linear;
mod numbering;
mod system;
mod taps;

pub use build::{Built, Demand, TOP_KEYS, build, refusal};
pub use explain::Explained;
pub use taps::Tap;

use crate::dae::Pattern;
use crate::diag::Span;
use crate::elements::{Claimed, Element, ElementKind, Terminal, Unknown, Unsound};
use crate::netlist::{Node, Parameters, Value, Values};
use crate::signals::{Owner, Rated};
use std::collections::BTreeMap;
use std::ops::Range;

/// One element of the circuit with what the netlist says of it.
pub struct Entry {
    /// Its name.
    pub name: String,
    /// Where its name stands.
    pub span: Span,
    /// Its mapping, for messages that point at a key.
    pub node: Node,
    /// Its kind.
    pub kind: &'static ElementKind,
    /// Designation on the drawing.
    pub label: Option<String>,
    /// What it is rated for.
    pub ratings: Vec<Rated>,
    /// Terminals with the nodes they are on.
    pub terminals: Vec<Terminal>,
    /// The unknown of each terminal.
    pub nodes: Vec<Unknown>,
    /// Names of its windings, from terminal 2 k to 2 k + 1.
    pub windings: Vec<String>,
    /// The element.
    pub element: Box<dyn Element>,
    /// Its modes among all.
    pub modes: Range<usize>,
    /// Its guards among all.
    pub guards: Range<usize>,
    /// True where the currents into its terminals can be read.
    pub probed: bool,
}

impl Entry {
    /// What its windings on cores are called in phrases: `k1_coil`, `t1.primary`.
    pub fn winding_owners(&self) -> Vec<String> {
        let name = |winding: &str| match winding {
            "" => self.name.clone(),
            _ => format!("{}.{winding}", self.name),
        };
        let figures = self.element.windings();
        figures.iter().map(|figures| name(figures.name)).collect()
    }
}

/// Who opens or closes: an element, or a contact of one.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Actor {
    /// Index of the element.
    pub entry: usize,
    /// Number of the contact among its windings; 0 for the element as a whole.
    pub winding: usize,
}

impl Actor {
    /// An element as a whole.
    pub fn whole(entry: usize) -> Self {
        Actor { entry, winding: 0 }
    }
}

/// A checked circuit with its equations numbered. It is immutable while it is solved.
pub struct Circuit {
    /// Elements in the order of the netlist.
    pub entries: Vec<Entry>,
    /// Names of the nodes but `ground`, in order of first appearance; node k is unknown k.
    pub node_names: Vec<String>,
    /// All unknowns: nodes first, then what the elements claimed.
    pub unknowns: Vec<Claimed>,
    /// Every number of the netlist with a path.
    pub parameters: Parameters,
    /// The values in force.
    values: Values,
    /// Elements that read each parameter.
    dependents: BTreeMap<Value, Vec<usize>>,
    pattern: Pattern,
    /// Elements that are stamped at every evaluation, and one slot per position that they stamp.
    stamped: Vec<usize>,
    slots: Vec<u32>,
    /// One slot per position that the linear elements stamp, and what they stamped.
    linear_slots: Vec<u32>,
    linear: linear::Linear,
    /// Elements with clockwork or guards.
    switching: Vec<usize>,
    mode_size: usize,
    guard_size: usize,
    by_name: BTreeMap<String, usize>,
    solvable: bool,
}

/// A value that makes no sensible circuit: which element, and why.
#[derive(Clone, Debug)]
pub struct Refused {
    /// Index of the element.
    pub entry: usize,
    /// Why.
    pub reason: Unsound,
}

impl Circuit {
    /// What somebody who opens or closes is called.
    pub fn owner(&self, actor: Actor) -> Owner {
        let entry = &self.entries[actor.entry];
        let winding = entry.windings.get(actor.winding);
        Owner {
            element: entry.name.clone(),
            winding: winding.filter(|_| actor.winding > 0).cloned(),
        }
    }

    /// The element of a name.
    pub fn find(&self, name: &str) -> Option<&Entry> {
        self.by_name.get(name).map(|&k| &self.entries[k])
    }

    /// The index of an element's name.
    pub fn index_of(&self, name: &str) -> Option<usize> {
        self.by_name.get(name).copied()
    }

    /// The unknown of a node's name; `ground` included.
    pub fn node(&self, name: &str) -> Option<Unknown> {
        if name == GROUND {
            return Some(Unknown::GROUND);
        }
        self.node_names
            .iter()
            .position(|node| node == name)
            .map(|k| Unknown(k as u32))
    }

    /// Takes over parameters that were read after the circuit was built (levels, bounds, wishes), at their nominal
    /// values; those it has already stay at their places.
    pub fn complete(&mut self, parameters: Parameters) {
        self.values = parameters.nominal();
        self.parameters = parameters;
    }

    /// True where the structure allows a solution; false for coils that lie on a table.
    pub fn is_solvable(&self) -> bool {
        self.solvable
    }

    /// The values in force.
    pub fn values(&self) -> &Values {
        &self.values
    }

    /// Changes values and re-derives only what depends on them.
    ///
    /// # Errors
    /// Values that make no sensible element; the circuit then has to be given sound values before it is solved.
    pub fn set(&mut self, changes: &[(Value, f64)]) -> Result<(), Refused> {
        let mut touched: Vec<usize> = Vec::new();
        let mut reshaped = false;
        for &(value, number) in changes {
            // What an element claims may depend on whether a value is zero.
            reshaped |= (self.values[value] == 0.0) != (number == 0.0);
            self.values.set(value, number);
            touched.extend(self.dependents.get(&value).into_iter().flatten());
        }
        touched.sort_unstable();
        touched.dedup();
        for k in touched {
            let entry = &mut self.entries[k];
            entry
                .element
                .derive(&self.values)
                .map_err(|reason| Refused { entry: k, reason })?;
        }
        if reshaped {
            let probed: Vec<bool> = self.entries.iter().map(|entry| entry.probed).collect();
            self.number(&probed)
                .expect("the same phrases were found when the circuit was built");
        } else {
            self.lay_linear();
        }
        Ok(())
    }
}

/// The name of the reference node.
pub const GROUND: &str = "ground";
