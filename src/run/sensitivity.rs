//! Sensitivities: how readings move with values of the netlist.
//!
//! Along one run the derivatives of all unknowns by each parameter are carried through the steps' own equations and over
//! every event (`dae::Variations`). Each step is then shown, moved to first order, to two watchers: one of the same netlist
//! with the parameter a little larger, one with it a little smaller. Their readings are ordinary ones: they see peaks,
//! crossings, windows and levels where the neighbours have them, and the laws of signals with the neighbours' values. The
//! derivative is the central difference of the two, free of the noise of two separate runs. Where it depends on the
//! side from which the parameter is approached (two peaks of one height, an edge at the end of a window) there is no
//! derivative, and that is said.

use super::feed::{Feed, Keeps};
use super::{Netlist, Work, read_document};
use crate::analysis::{Analysis, Failure, simulate::Shown};
use crate::circuit::Circuit;
use crate::dae::variations::{HeldStep, MovedStep};
use crate::dae::{Point, Shadows, Step};
use crate::diag::{Diagnostic, Span};
use crate::netlist::{Value, nearest};
use crate::readings::Outcome as Found;
use crate::signals::EventLog;
use crate::units::Kind;

/// How far a neighbour's value lies away, as a share of it: central differences of laws are then exact to some 1e-10,
/// and phases stay small after thousands of rings.
const SHARE: f64 = 2e-6;
/// The same for a value of zero [its SI unit].
const FROM_ZERO: f64 = 1e-9;
/// Share by which the two one-sided derivatives may differ from their mean; curvature makes far less.
const ONE_SIDED: f64 = 0.05;
/// Rounding of a reading, as a share of it.
const ROUNDING: f64 = 1e-11;
/// Pieces in place of each one that a reading is fed. Where a crest lies between a cubic's values matters little to its
/// height and much to how that moves: 1e-4 of it in a ring of 30 periods at an accuracy of 1e-6 with one piece, 2e-6
/// with four, no less with sixteen.
pub const PIECES: usize = 4;
/// The name under which a path of the command line stands among the sources.
const ASKED: &str = "--sensitivity";

/// How one reading moves with one value.
#[derive(Clone, Debug)]
pub struct Sensitivity {
    /// The reading.
    pub reading: String,
    /// What the reading measures.
    pub kind: Kind,
    /// The path of the value.
    pub path: String,
    /// What the value measures.
    pub by: Kind,
    /// The value in force [SI].
    pub at: f64,
    /// The derivative [SI unit of the reading per SI unit of the value]; None where there is none.
    pub value: Option<f64>,
    /// Why there is none.
    pub remark: Option<&'static str>,
}

impl Sensitivity {
    /// Unit of the derivative: `V/Ω`.
    pub fn unit(&self) -> String {
        match (self.kind.symbol, self.by.symbol) {
            (own, "") => own.to_owned(),
            ("", by) => format!("1/{by}"),
            (own, by) => format!("{own}/{by}"),
        }
    }

    /// By how much the reading changes with a step of the value that people have a feeling for, and that step: one per
    /// cent, of a temperature one kelvin.
    pub fn step(&self) -> (Option<f64>, &'static str) {
        let (step, words) = match self.by.on_scale {
            true => (1.0, "+1 K"),
            false => (0.01 * self.at, "+1 %"),
        };
        (self.value.map(|value| value * step), words)
    }
}

/// The value that a path names.
///
/// # Errors
/// A path that names no number of the netlist.
pub fn parameter(netlist: &mut Netlist, path: &str) -> Result<Value, Box<Diagnostic>> {
    let parameters = &netlist.circuit.parameters;
    if let Some(value) = parameters.find(path) {
        return Ok(value);
    }
    let known = parameters.iter().map(|(_, known)| known.path.as_str());
    let label = match nearest(path, known) {
        Some(near) => format!("did you mean `{near}`?"),
        None => "no value of this netlist".into(),
    };
    let whole = Span {
        file: netlist.sources.add(ASKED, path),
        start: 0,
        end: path.len(),
    };
    let diagnostic = Diagnostic::error("unknown-path", format!("there is no value at `{path}`"));
    Err(Box::new(diagnostic.at(whole, label).help(
        "a path is that of a number in the netlist, such as `elements.k1_coil.resistance`; keys that an element takes from a part are at `parts.PART.KEY`",
    )))
}

/// A value with the netlists of its two neighbours, the larger one first.
pub struct Neighbours {
    value: Value,
    step: f64,
    netlists: [Netlist; 2],
}

impl Neighbours {
    /// The neighbours of a value of a netlist, all other values as they are in force.
    ///
    /// # Errors
    /// A value that cannot be moved both ways.
    pub fn of(netlist: &Netlist, value: Value) -> Result<Self, Failure> {
        let at = netlist.circuit.values()[value];
        let step = if at == 0.0 {
            FROM_ZERO
        } else {
            SHARE * at.abs()
        };
        let [more, less] = [step, -step].map(|by| neighbour(netlist, value, at + by));
        Ok(Neighbours {
            value,
            step,
            netlists: [more?, less?],
        })
    }

    /// As the shadows of a column of variations.
    pub fn shadows(&self) -> Shadows<'_, Circuit> {
        let [more, less] = &self.netlists;
        Shadows {
            more: &more.circuit,
            less: &less.circuit,
            step: self.step,
        }
    }

    /// How the end of the run moves with the value.
    fn end(&self) -> f64 {
        let [more, less] = self
            .netlists
            .each_ref()
            .map(|netlist| match &netlist.analysis {
                Analysis::Transient(transient) => netlist.circuit.values()[transient.duration],
                _ => 0.0,
            });
        (more - less) / (2.0 * self.step)
    }
}

/// The same netlist with one value changed.
fn neighbour(netlist: &Netlist, value: Value, number: f64) -> Result<Netlist, Failure> {
    let refused = |why: &str| {
        let parameter = netlist.circuit.parameters.get(value);
        let headline = format!("`{}` cannot be moved to both sides: {why}", parameter.path);
        let diagnostic = Diagnostic::error("no-neighbour", headline)
            .help("a derivative looks at values just above and just below the one that is written");
        Failure::Refused(Box::new(match parameter.span {
            Some(span) => diagnostic.at(span, "this value"),
            None => diagnostic,
        }))
    };
    let read = read_document(netlist.document.clone(), netlist.sources.clone());
    let mut other = read.map_err(|_| refused("the netlist is refused"))?;
    let (own, values) = (&netlist.circuit, netlist.circuit.values());
    let mut changes: Vec<(Value, f64)> = own
        .parameters
        .iter()
        .map(|(value, _)| (value, values[value]))
        .collect();
    changes.push((value, number));
    if other.circuit.set(&changes).is_err() {
        return Err(refused("the element is refused"));
    }
    let same = own.unknowns.len() == other.circuit.unknowns.len()
        && own.start_mode().len() == other.circuit.start_mode().len();
    if !same {
        return Err(refused("beside it the circuit has other unknowns"));
    }
    Ok(other)
}

/// Watches one run for the sensitivities of all its readings.
pub struct Watcher<'a> {
    columns: &'a [Neighbours],
    feeds: Vec<[(Feed, EventLog); 2]>,
    /// The step shown last, until it is known how its end moves; how its start moves.
    held: Option<Vec<f64>>,
    step: HeldStep,
    moved: MovedStep,
    /// How the instant just passed moves, by column.
    shifts: Vec<f64>,
}

impl<'a> Watcher<'a> {
    /// Nothing seen yet.
    pub fn new(columns: &'a [Neighbours]) -> Self {
        let keeps = Keeps {
            waveforms: None,
            accounts: Some(&[]),
            pieces: PIECES,
        };
        let feed = |netlist: &Netlist| (Feed::new(netlist, keeps), EventLog::default());
        Watcher {
            columns,
            feeds: columns
                .iter()
                .map(|column| column.netlists.each_ref().map(feed))
                .collect(),
            held: None,
            step: HeldStep::default(),
            moved: MovedStep::default(),
            shifts: vec![0.0; columns.len()],
        }
    }

    /// Takes what is shown of the run itself.
    pub fn take(&mut self, shown: &Shown<'_>, log: &EventLog) {
        match shown {
            Shown::Settling | Shown::Settled(_) => {}
            Shown::Start(at) => self.start(*at, log),
            Shown::Step(step) => self.take_step(step),
            Shown::Event {
                after,
                happened,
                varied,
                impulses,
                ..
            } => {
                let shifts =
                    varied.map_or(vec![0.0; self.columns.len()], |moved| moved.shifts.to_vec());
                self.release(&shifts);
                for (column, feeds) in self.feeds.iter_mut().enumerate() {
                    let neighbours = &self.columns[column];
                    for (side, (feed, log)) in feeds.iter_mut().enumerate() {
                        let circuit = &neighbours.netlists[side].circuit;
                        let time = after.time + neighbours.by(side) * shifts[column];
                        for &(actor, what) in *happened {
                            log.note(&circuit.owner(actor), what, time);
                        }
                        let after = Point { time, ..*after };
                        let event = Shown::Event {
                            time,
                            before: after,
                            after,
                            happened,
                            varied: None,
                            // An impulse's own derivative is not carried along.
                            impulses,
                        };
                        feed.take(circuit, event, log);
                    }
                }
                self.shifts = shifts;
            }
        }
    }

    fn start(&mut self, at: Point<'_>, log: &EventLog) {
        for (neighbours, feeds) in self.columns.iter().zip(&mut self.feeds) {
            for (netlist, (feed, own)) in neighbours.netlists.iter().zip(feeds) {
                *own = log.clone();
                feed.take(&netlist.circuit, Shown::Start(at), own);
            }
        }
    }

    fn take_step(&mut self, step: &Step<'_>) {
        // Between two steps without an event in between nothing moves.
        self.release(&vec![0.0; self.columns.len()]);
        self.step.hold(step, self.columns.len());
        let still = vec![0.0; self.columns.len()];
        self.held = Some(std::mem::replace(&mut self.shifts, still));
    }

    /// Shows the step held to all neighbours, now that it is known how its end moves.
    fn release(&mut self, ends: &[f64]) {
        let Some(starts) = self.held.take() else {
            return;
        };
        for (column, feeds) in self.feeds.iter_mut().enumerate() {
            let neighbours = &self.columns[column];
            let moves = [starts[column], ends[column]];
            for (side, (feed, log)) in feeds.iter_mut().enumerate() {
                let by = neighbours.by(side);
                self.step.moved(column, by, moves, &mut self.moved);
                let circuit = &neighbours.netlists[side].circuit;
                feed.take(circuit, Shown::Step(&self.moved.step()), log);
            }
        }
    }

    /// The sensitivities at the end of the run; `found` are its own readings.
    pub fn finish(mut self, netlist: &Netlist, found: &[Found], work: Work) -> Vec<Sensitivity> {
        let ends: Vec<f64> = self.columns.iter().map(Neighbours::end).collect();
        self.release(&ends);
        let mut all = Vec::new();
        for (neighbours, feeds) in self.columns.iter().zip(self.feeds) {
            let [more, less] = feeds;
            let [high, low] = &neighbours.netlists;
            let readings = [(more, high), (less, low)]
                .map(|((feed, _), netlist)| feed.figures(&netlist.circuit, work).readings);
            all.extend(neighbours.sensitivities(netlist, found, &readings));
        }
        all
    }
}

impl Neighbours {
    /// How far the neighbour of a side lies away.
    fn by(&self, side: usize) -> f64 {
        if side == 0 { self.step } else { -self.step }
    }

    /// What work gives of both neighbours, of the larger one first.
    ///
    /// # Errors
    /// Those of the work.
    pub fn each<T, E>(&self, work: impl Fn(&Netlist) -> Result<T, E>) -> Result<[T; 2], E> {
        let [more, less] = &self.netlists;
        Ok([work(more)?, work(less)?])
    }

    /// How the readings of a netlist move, from its own and those of the two neighbours.
    pub fn sensitivities(
        &self,
        netlist: &Netlist,
        found: &[Found],
        [more, less]: &[Vec<Found>; 2],
    ) -> Vec<Sensitivity> {
        let parameter = netlist.circuit.parameters.get(self.value);
        let one = |k: usize| {
            let (value, remark) = slope(&found[k], [&more[k], &less[k]], self.step);
            Sensitivity {
                reading: netlist.readings[k].name.text.clone(),
                kind: found[k].kind,
                path: parameter.path.clone(),
                by: parameter.kind,
                at: netlist.circuit.values()[self.value],
                value,
                remark,
            }
        };
        (0..found.len()).map(one).collect()
    }
}

/// The derivative of a reading from its own value and those of its two neighbours; why there is none.
fn slope(found: &Found, neighbours: [&Found; 2], step: f64) -> (Option<f64>, Option<&'static str>) {
    let value = |found: &Found| found.taken.map(|taken| taken.value);
    let [more, less] = neighbours.map(value);
    let (Some(at), Some(more), Some(less)) = (value(found), more, less) else {
        let none = value(found).is_none() && more.is_none() && less.is_none();
        let why = if none {
            "it has no value"
        } else {
            "it comes and goes with this value"
        };
        return (None, Some(why));
    };
    let first = 0.5 * (more - less);
    let second = 0.5 * (more - at + (less - at));
    if second.abs() > ONE_SIDED * first.abs() + ROUNDING * at.abs() {
        return (
            None,
            Some("not smooth here: a tie, a plateau or an edge at the window"),
        );
    }
    (Some(first / step), None)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::readings::Taken;

    fn found(value: Option<f64>) -> Found {
        Found {
            taken: value.map(|value| Taken { value, time: None }),
            kind: crate::units::VOLTAGE,
            remark: None,
        }
    }

    fn of(at: Option<f64>, more: Option<f64>, less: Option<f64>) -> Option<f64> {
        slope(&found(at), [&found(more), &found(less)], 0.5).0
    }

    #[test]
    fn a_derivative_is_the_same_from_both_sides() {
        assert_eq!(of(Some(1.0), Some(1.5), Some(0.5)), Some(1.0));
        assert_eq!(of(Some(1.0), Some(1.0), Some(1.0)), Some(0.0));
        // The higher of two peaks of one height.
        assert_eq!(of(Some(1.0), Some(1.5), Some(1.5)), None);
        assert_eq!(of(Some(1.0), Some(1.5), Some(1.0)), None);
        assert_eq!(of(None, None, None), None);
        assert_eq!(of(Some(1.0), None, Some(0.5)), None);
    }
}
