//! What the circuit is like before any suppressor: currents, voltages and energy at rest, nominal and at their worst.

use crate::analysis::Failure;
use crate::analysis::start::at_rest;
use crate::circuit::{Circuit, Entry};
use crate::dae::{Point, State};
use crate::diag::Diagnostic;
use crate::elements::{Happening, Quantity};
use crate::magnetics::wire::copper_ratio;
use crate::netlist::Value;
use crate::run::Netlist;
use crate::studies::{Side, Spread, spreads, worst};

/// Share of the supply's current below which a coil counts as carrying none.
const NO_CURRENT: f64 = 1e-12;

/// What a coil and its switch do at rest [SI].
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct AtRest {
    /// Winding current with the switch closed; its sign is that from the coil's first node to its second.
    pub current: f64,
    /// Voltage from the coil's first node to its second with the switch closed.
    pub coil_voltage: f64,
    /// Voltage from the switch's first node to its second with the switch open.
    pub open_voltage: f64,
    /// Energy of the coil's field with the switch closed.
    pub energy: f64,
    /// Resistance of the winding at its temperature.
    pub resistance: f64,
    /// Share of its inductance that the coil has lost at that current.
    pub saturation: f64,
}

/// What is known of the circuit before any suppressor.
#[derive(Clone, Debug)]
pub struct Facts {
    /// Name of the coil.
    pub coil: String,
    /// Name of the switch.
    pub switch: String,
    /// The coil's nodes, the one at the higher potential with the switch closed first.
    pub coil_nodes: [String; 2],
    /// The switch's nodes, the one at the higher potential with the switch open first.
    pub switch_nodes: [String; 2],
    /// At nominal values.
    pub nominal: AtRest,
    /// Highest magnitude of the winding current over all corners [A].
    pub current_high: f64,
    /// Highest magnitude of the voltage across the open switch at rest [V].
    pub open_voltage_high: f64,
    /// Highest energy of the field [J].
    pub energy_high: f64,
    /// Largest share of its inductance that the coil has lost.
    pub saturation_high: f64,
    /// Lowest resistance of the winding, cold [Ω].
    pub resistance_low: f64,
    /// Inductance at zero current [H].
    pub inductance: f64,
    /// Capacitance across the coil that the netlist counts [F].
    pub stray: f64,
    /// The voltage that the switch may see with every margin that is asked for [V], and what says so.
    pub allowed_voltage: Option<(f64, String)>,
}

impl Facts {
    /// Time constant of the coil on its own, cold [s]: of the loop with its supply where the winding has no resistance.
    pub fn time_constant(&self) -> f64 {
        let loop_resistance = self.nominal.open_voltage.abs() / self.nominal.current.abs();
        let resistance = if self.resistance_low > 0.0 {
            self.resistance_low
        } else {
            loop_resistance
        };
        self.inductance / resistance
    }

    /// What is left for a clamp across the coil [V]: the allowed voltage less the highest supply.
    pub fn headroom(&self) -> Option<f64> {
        let (allowed, _) = self.allowed_voltage.as_ref()?;
        Some(allowed - self.open_voltage_high)
    }

    /// Finds them on a netlist without suppressor. Values are nominal again afterwards.
    ///
    /// # Errors
    /// A circuit that has no state at rest, or a coil that carries no current.
    pub fn find(netlist: &mut Netlist, coil: &str, switch: &str) -> Result<Self, Failure> {
        let circuit = &netlist.circuit;
        let (Some(coil_at), Some(switch_at)) = (circuit.index_of(coil), circuit.index_of(switch))
        else {
            return Err(refused("`sizing` names no coil and switch", coil));
        };
        let places = Places {
            coil: coil_at,
            switch: switch_at,
        };
        let all = spreads(circuit);
        let nominal = places.rest(circuit)?;
        if nominal.current.abs() < NO_CURRENT {
            let headline = format!("no current flows in `{coil}` while `{switch}` is closed");
            return Err(refused(&headline, coil));
        }
        let extremes = worst(all.len(), &mut |corner| {
            set(&mut netlist.circuit, &all, corner)?;
            let rest = places.rest(&netlist.circuit)?;
            let (current, voltage) = (rest.current.abs(), rest.open_voltage.abs());
            Ok::<_, Failure>(vec![
                -current,
                -voltage,
                -rest.energy,
                rest.resistance,
                -rest.saturation,
            ])
        })?;
        set(&mut netlist.circuit, &all, &vec![Side::Nominal; all.len()])?;
        let circuit = &netlist.circuit;
        let coil_entry = &circuit.entries[coil_at];
        Ok(Facts {
            coil: coil.to_owned(),
            switch: switch.to_owned(),
            coil_nodes: nodes(coil_entry, nominal.coil_voltage < 0.0),
            switch_nodes: nodes(&circuit.entries[switch_at], nominal.open_voltage < 0.0),
            nominal,
            current_high: -extremes.margin(0),
            open_voltage_high: -extremes.margin(1),
            energy_high: -extremes.margin(2),
            resistance_low: extremes.margin(3),
            saturation_high: -extremes.margin(4),
            inductance: inductance(circuit, coil_entry),
            stray: figure(circuit, coil_entry, "self_capacitance").unwrap_or(0.0),
            allowed_voltage: None,
        })
    }
}

fn refused(headline: &str, coil: &str) -> Failure {
    let diagnostic = Diagnostic::error("nothing-to-size", headline.to_owned()).help(format!(
        "the closed switch has to carry the current of `{coil}` at rest"
    ));
    Failure::Refused(Box::new(diagnostic))
}

/// Sets every spread to its side of a corner.
pub fn set(circuit: &mut Circuit, spreads: &[Spread], corner: &[Side]) -> Result<(), Failure> {
    let changes: Vec<(Value, f64)> = spreads
        .iter()
        .zip(corner)
        .map(|(spread, side)| (spread.value, spread.at(*side)))
        .collect();
    apply(circuit, &changes)
}

/// Changes values; what makes no sensible circuit is a failure that names the element.
pub fn apply(circuit: &mut Circuit, changes: &[(Value, f64)]) -> Result<(), Failure> {
    circuit.set(changes).map_err(|refused| {
        let diagnostic = crate::circuit::refusal(circuit, &refused);
        Failure::Refused(Box::new(diagnostic))
    })
}

/// Where coil and switch stand among the elements.
struct Places {
    coil: usize,
    switch: usize,
}

impl Places {
    fn rest(&self, circuit: &Circuit) -> Result<AtRest, Failure> {
        let closed = self.state(circuit, Happening::Closes)?;
        let open = self.state(circuit, Happening::Opens)?;
        let (coil, switch) = (&circuit.entries[self.coil], &circuit.entries[self.switch]);
        let voltage = |entry: &Entry, state: &State| match entry.nodes[..] {
            [a, b, ..] => a.of(&state.x) - b.of(&state.x),
            _ => 0.0,
        };
        let at = closed.point();
        let own = Point {
            mode: &closed.mode[coil.modes.clone()],
            ..at
        };
        let current = coil.element.quantity(Quantity::WindingCurrent, 0, own);
        let saturation = coil.element.quantity(Quantity::Saturation, 0, own);
        Ok(AtRest {
            current: current.unwrap_or(0.0),
            coil_voltage: voltage(coil, &closed),
            open_voltage: voltage(switch, &open),
            energy: circuit.stored(self.coil, at),
            resistance: winding_resistance(circuit, coil),
            saturation: saturation.unwrap_or(0.0),
        })
    }

    fn state(&self, circuit: &Circuit, after: Happening) -> Result<State, Failure> {
        let mut mode = circuit.start_mode();
        let entry = &circuit.entries[self.switch];
        if let Some(switching) = entry.element.switching() {
            switching.rest(after, &mut mode[entry.modes.clone()]);
        }
        at_rest(circuit, mode)
    }
}

fn nodes(entry: &Entry, swapped: bool) -> [String; 2] {
    let name = |k: usize| {
        let terminal = entry.terminals.get(k);
        terminal.map_or(String::new(), |terminal| terminal.node.text.clone())
    };
    if swapped {
        [name(1), name(0)]
    } else {
        [name(0), name(1)]
    }
}

/// A parameter of an element, its own or its part's, in force [SI].
fn figure(circuit: &Circuit, entry: &Entry, key: &str) -> Option<f64> {
    let own = format!("elements.{}.{key}", entry.name);
    let part = entry.node.get("part").and_then(|part| part.text());
    let behind = part.map(|part| format!("parts.{part}.{key}"));
    std::iter::once(own)
        .chain(behind)
        .find_map(|path| circuit.parameters.find(&path))
        .map(|value| circuit.values()[value])
}

fn winding_resistance(circuit: &Circuit, coil: &Entry) -> f64 {
    match coil.element.windings().first() {
        Some(winding) => winding.resistance,
        None => figure(circuit, coil, "series_resistance").unwrap_or(0.0),
    }
}

fn inductance(circuit: &Circuit, coil: &Entry) -> f64 {
    match coil.element.windings().first() {
        Some(winding) => winding.wound.linkage.inductance_at_zero(),
        None => figure(circuit, coil, "inductance").unwrap_or(0.0),
    }
}

/// Resistance of a coil's winding at the temperature at which its values hold [Ω]: the coil as its data sheet knows it.
pub fn cold_resistance(circuit: &Circuit, coil: &Entry) -> f64 {
    if let Some(resistance) = figure(circuit, coil, "resistance") {
        return resistance;
    }
    let parameter = |path: &str| {
        let value = circuit.parameters.find(path)?;
        Some(circuit.values()[value])
    };
    let reference = figure(circuit, coil, "reference_temperature")
        .or_else(|| parameter("reference_temperature"));
    let resistance = winding_resistance(circuit, coil);
    match (parameter("ambient"), reference, coil.kind.word) {
        (Some(ambient), Some(reference), "coil") => resistance / copper_ratio(ambient, reference),
        _ => resistance,
    }
}
