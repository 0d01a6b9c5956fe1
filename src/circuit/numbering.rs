//! Numbers unknowns, modes and guards, joins followers to what they follow, and finds the sparsity pattern once.

use super::{Circuit, Entry};
use crate::dae::Pattern;
use crate::elements::{Claimed, Claims, Measure, Offer, Point, Stamper, Terms, Unknown, Wanted};
use crate::signals::{Owner, Phrase};

/// A phrase that an element follows and that names nothing in the circuit.
#[derive(Clone, Debug)]
pub struct Unfollowed {
    /// The follower.
    pub entry: usize,
    /// The phrase.
    pub phrase: Phrase,
    /// Why it cannot be followed.
    pub why: String,
}

impl Circuit {
    /// Numbers everything anew. `probed` says whose terminal currents are asked for.
    pub(super) fn number(&mut self, probed: &[bool]) -> Result<(), Unfollowed> {
        let Following { wanted, links } = self.wanted()?;
        self.unknowns = (0..self.node_names.len())
            .map(|_| Claimed {
                element: None,
                what: "potential",
                measure: Measure::Voltage,
                reach: f64::INFINITY,
            })
            .collect();
        let mut offered: Vec<Offer> = Vec::new();
        let (mut modes, mut guards) = (0, 0);
        for (k, entry) in self.entries.iter_mut().enumerate() {
            let (first_mode, first_guard) = (modes, guards);
            entry.probed = probed[k];
            entry.element.claim(&mut Claims {
                element: k,
                terminals: &entry.nodes,
                probed: probed[k],
                wanted: &wanted[k],
                unknowns: &mut self.unknowns,
                offered: &mut offered,
                modes: &mut modes,
                guards: &mut guards,
            });
            entry.modes = first_mode..modes;
            entry.guards = first_guard..guards;
        }
        (self.mode_size, self.guard_size) = (modes, guards);
        self.connect(&links, &offered)?;
        self.find_pattern();
        Ok(())
    }

    /// What is wanted of each element, and how each follower's signals are made up.
    fn wanted(&mut self) -> Result<Following, Unfollowed> {
        let mut wanted: Vec<Vec<Wanted>> = vec![Vec::new(); self.entries.len()];
        let mut links: Vec<Vec<Link>> = Vec::new();
        for k in 0..self.entries.len() {
            let phrases: Vec<Phrase> = match self.entries[k].element.follower() {
                Some(follower) => follower.follows().into_iter().cloned().collect(),
                None => Vec::new(),
            };
            let mut own = Vec::new();
            for phrase in phrases {
                let link = self.link(&phrase).map_err(|why| Unfollowed {
                    entry: k,
                    phrase,
                    why,
                })?;
                if let Link::Of(owner, signal) = link {
                    wanted[owner].push(signal);
                }
                own.push(link);
            }
            links.push(own);
        }
        Ok(Following { wanted, links })
    }

    /// What a phrase comes down to, if it can be followed.
    fn link(&self, phrase: &Phrase) -> Result<Link, String> {
        let node = |name: &str| {
            self.node(name)
                .ok_or_else(|| format!("there is no node `{name}`"))
        };
        let owner = |owner: &Owner| {
            self.index_of(&owner.element)
                .ok_or_else(|| format!("there is no element `{}`", owner.element))
        };
        match phrase {
            Phrase::VoltageAt(name) => Ok(Link::Potential(node(name)?, Unknown::GROUND)),
            Phrase::VoltageFrom(a, b) => Ok(Link::Potential(node(a)?, node(b)?)),
            Phrase::VoltageAcross(whose) => {
                let entry = &self.entries[owner(whose)?];
                let (a, b) = terminal_pair(entry, whose)?;
                Ok(Link::Potential(entry.nodes[a], entry.nodes[b]))
            }
            Phrase::CurrentThrough(whose) => {
                let k = owner(whose)?;
                let (first, _) = terminal_pair(&self.entries[k], whose)?;
                Ok(Link::Of(k, Wanted::Current(first)))
            }
            Phrase::CurrentInto(whose, terminal) => {
                let k = owner(whose)?;
                let t = terminal_of(&self.entries[k], whose, terminal)?;
                Ok(Link::Of(k, Wanted::Current(t)))
            }
            Phrase::Of(quantity, whose) => {
                let k = owner(whose)?;
                let winding = winding_of(&self.entries[k], whose)?;
                Ok(Link::Of(k, Wanted::Of(*quantity, winding)))
            }
            Phrase::Power(_) | Phrase::Energy(_) => {
                Err("a power or an energy cannot be followed".into())
            }
        }
    }

    fn connect(&mut self, links: &[Vec<Link>], offered: &[Offer]) -> Result<(), Unfollowed> {
        for (k, own) in links.iter().enumerate() {
            let mut all: Vec<Terms> = Vec::new();
            for (nth, link) in own.iter().enumerate() {
                match link.terms(offered) {
                    Some(terms) => all.push(terms),
                    None => {
                        let follower = self.entries[k]
                            .element
                            .follower()
                            .expect("only followers have links");
                        let phrase = follower.follows()[nth].clone();
                        return Err(Unfollowed {
                            entry: k,
                            phrase,
                            why: "that element has no such signal to follow".into(),
                        });
                    }
                }
            }
            if let Some(follower) = self.entries[k].element.follower() {
                follower.connect(all);
            }
        }
        Ok(())
    }

    /// Records every position that the elements stamp, and the slot of each.
    fn find_pattern(&mut self) {
        let size = self.unknowns.len();
        let (x, mode) = (vec![0.0; size], self.start_mode());
        let (linear, stamped): (Vec<usize>, Vec<usize>) =
            (0..self.entries.len()).partition(|&k| self.entries[k].element.is_linear());
        let mut positions: Vec<(Unknown, Unknown)> = Vec::new();
        let mut of_linear = 0;
        for (nth, &k) in linear.iter().chain(&stamped).enumerate() {
            let entry = &self.entries[k];
            let at = Point {
                time: 0.0,
                x: &x,
                mode: &mode[entry.modes.clone()],
            };
            entry
                .element
                .stamp(at, &mut Stamper::recording(&mut positions));
            if nth + 1 == linear.len() {
                of_linear = positions.len();
            }
        }
        let inside: Vec<(usize, usize)> = positions
            .iter()
            .filter(|(row, column)| *row != Unknown::GROUND && *column != Unknown::GROUND)
            .map(|(row, column)| (row.0 as usize, column.0 as usize))
            .collect();
        self.pattern = Pattern::from_positions(size, &inside);
        let mut slots: Vec<u32> = positions
            .iter()
            .map(|(row, column)| {
                let slot = self.pattern.slot(row.0 as usize, column.0 as usize);
                slot.map_or(crate::elements::stamper::NOWHERE, |slot| slot as u32)
            })
            .collect();
        self.slots = slots.split_off(of_linear);
        self.linear_slots = slots;
        self.stamped = stamped;
        self.switching = (0..self.entries.len())
            .filter(|&k| self.entries[k].element.switching().is_some())
            .collect();
        self.lay_linear();
    }

    /// All modes at the start, before any signal is known.
    pub fn start_mode(&self) -> Vec<f64> {
        let mut mode = vec![0.0; self.mode_size];
        for entry in &self.entries {
            if let Some(switching) = entry.element.switching() {
                switching.start(&mut mode[entry.modes.clone()]);
            }
        }
        mode
    }

    /// The modes at `time` as if the clock had always run.
    pub fn mode_forever(&self, time: f64) -> Vec<f64> {
        let mut mode = self.start_mode();
        for entry in &self.entries {
            if let Some(switching) = entry.element.switching() {
                switching.forever(time, &mut mode[entry.modes.clone()]);
            }
        }
        mode
    }

    /// Charges and flux linkages of a zero start, one per row.
    pub fn initial_charges(&self) -> Vec<f64> {
        let mut charges = vec![0.0; self.unknowns.len()];
        for entry in &self.entries {
            entry
                .element
                .initial_charge(&mut |row: Unknown, charge: f64| {
                    if let Some(sum) = charges.get_mut(row.0 as usize) {
                        *sum += charge;
                    }
                });
        }
        charges
    }
}

/// What followers need, per element.
struct Following {
    /// Signals that each element must offer.
    wanted: Vec<Vec<Wanted>>,
    /// What each follower's signals are made of.
    links: Vec<Vec<Link>>,
}

/// How a followed signal is made up.
enum Link {
    /// A difference of two potentials.
    Potential(Unknown, Unknown),
    /// What an element offers.
    Of(usize, Wanted),
}

impl Link {
    fn terms(&self, offered: &[Offer]) -> Option<Terms> {
        match self {
            Link::Potential(a, b) => Some(vec![(*a, 1.0), (*b, -1.0)]),
            Link::Of(owner, wanted) => offered
                .iter()
                .find(|offer| offer.element == *owner && offer.wanted == *wanted)
                .map(|offer| vec![(offer.unknown, offer.factor)]),
        }
    }
}

/// The two terminals that `across` and `through` mean: an element of two, or a winding.
pub(super) fn terminal_pair(entry: &Entry, owner: &Owner) -> Result<(usize, usize), String> {
    match &owner.winding {
        Some(_) => {
            let winding = winding_of(entry, owner)?;
            // A closed ring counts among the windings and has no ends.
            if 2 * winding + 1 >= entry.terminals.len() {
                return Err(format!(
                    "`{owner}` is closed upon itself and has no terminals"
                ));
            }
            Ok((2 * winding, 2 * winding + 1))
        }
        None if entry.terminals.len() == 2 || is_coil_of_its_own(entry) => Ok((0, 1)),
        None if entry.windings.is_empty() => {
            let names: Vec<&str> = entry
                .terminals
                .iter()
                .map(|terminal| terminal.name.as_str())
                .collect();
            Err(format!(
                "`{}` has {} terminals; ask for `current into {}.{}`",
                entry.name,
                names.len(),
                entry.name,
                names.first().unwrap_or(&"")
            ))
        }
        None => Err(format!(
            "`{}` has several windings: {}",
            entry.name,
            entry.windings.join(", ")
        )),
    }
}

/// The winding that an owner names; 0 for an element without named windings.
pub(super) fn winding_of(entry: &Entry, owner: &Owner) -> Result<usize, String> {
    match &owner.winding {
        Some(name) => entry
            .windings
            .iter()
            .position(|winding| winding == name)
            .ok_or_else(|| no_winding(entry, name)),
        None if entry.windings.len() > 1 && !is_coil_of_its_own(entry) => Err(format!(
            "`{}` has several windings: {}",
            entry.name,
            entry.windings.join(", ")
        )),
        None => Ok(0),
    }
}

/// True where an element's first winding has no name: it is the coil that the element's own name means.
fn is_coil_of_its_own(entry: &Entry) -> bool {
    entry.windings.first().is_some_and(String::is_empty)
}

fn no_winding(entry: &Entry, name: &str) -> String {
    if entry.windings.is_empty() {
        format!(
            "`{}` is a {} and has no windings",
            entry.name, entry.kind.word
        )
    } else {
        format!(
            "`{}` has no winding `{name}`; it has {}",
            entry.name,
            entry.windings.join(", ")
        )
    }
}

/// The terminal of a name; windings are written `TRANSFORMER.WINDING.first`.
pub(super) fn terminal_of(entry: &Entry, owner: &Owner, terminal: &str) -> Result<usize, String> {
    let full = match &owner.winding {
        Some(winding) => format!("{winding}.{terminal}"),
        None => terminal.to_owned(),
    };
    entry
        .terminals
        .iter()
        .position(|known| known.name == full)
        .ok_or_else(|| {
            let names: Vec<&str> = entry
                .terminals
                .iter()
                .map(|known| known.name.as_str())
                .collect();
            format!(
                "`{}` has no terminal `{full}`; it has {}",
                entry.name,
                names.join(", ")
            )
        })
}
