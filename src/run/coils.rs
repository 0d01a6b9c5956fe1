//! What each coil of a circuit came out as: the figures of `coilbreak coil`.

use crate::circuit::{Circuit, Entry};
use crate::dae::Point;
use crate::elements::{Quantity, element::WindingFigures};
pub use crate::magnetics::CurvePoint;
use crate::magnetics::Geometry;

/// The figures of one coil or winding. SI units.
#[derive(Clone, Debug)]
pub struct CoilReport {
    /// Name of the element, with its winding where it has several.
    pub name: String,
    /// Number of turns.
    pub turns: f64,
    /// Incremental inductance at zero [H].
    pub inductance_at_zero: f64,
    /// Current at which it has fallen to 70 % [A]; None where it never does.
    pub current_at_70_percent: Option<f64>,
    /// Winding resistance at its temperature [Ω].
    pub resistance: f64,
    /// Inductance at zero over resistance [s]; None without resistance.
    pub time_constant: Option<f64>,
    /// Largest winding current at rest, switches as they start or all closed [A].
    pub operating_current: Option<f64>,
    /// Energy of the field at that current [J].
    pub stored_energy: Option<f64>,
    /// Path, gaps, mean turn, window and fringing.
    pub geometry: Geometry,
    /// Flux density in the smallest section at the operating current [T].
    pub peak_flux_density: Option<f64>,
    /// Flux linkage, inductance and flux density over current.
    pub curve: Vec<CurvePoint>,
    /// The copper over frequency, where skin and proximity effect are counted.
    pub copper: Option<Copper>,
}

/// A winding's copper over frequency.
#[derive(Clone, Debug)]
pub struct Copper {
    /// Sections of the ladder.
    pub sections: usize,
    /// Highest frequency [Hz] at which the ladder follows the law.
    pub up_to: f64,
    /// From a hundredth of the corner to a thousand times it.
    pub points: Vec<CopperPoint>,
}

/// One frequency. SI units.
#[derive(Clone, Copy, Debug)]
pub struct CopperPoint {
    /// [Hz].
    pub frequency: f64,
    /// Resistance by the law [Ω].
    pub resistance: f64,
    /// Inductance of the field inside the conductors by the law [H].
    pub inductance: f64,
    /// The ladder's resistance [Ω].
    pub ladder_resistance: f64,
    /// The ladder's inductance [H].
    pub ladder_inductance: f64,
}

/// Points per decade of the copper's table.
const PER_DECADE: i32 = 10;

fn copper(figures: &WindingFigures<'_>) -> Option<Copper> {
    let inside = figures.wound.inside.as_ref()?;
    let (impedance, ladder) = (inside.impedance, &inside.ladder);
    let point = |k: i32| {
        let frequency = impedance.corner() * 10f64.powf(f64::from(k) / f64::from(PER_DECADE));
        let omega = std::f64::consts::TAU * frequency;
        let [law, ladder] =
            [impedance.at(frequency), ladder.at(frequency)].map(|ratio| figures.resistance * ratio);
        CopperPoint {
            frequency,
            resistance: law.re,
            inductance: law.im / omega,
            ladder_resistance: ladder.re,
            ladder_inductance: ladder.im / omega,
        }
    };
    Some(Copper {
        sections: ladder.sections.len(),
        up_to: ladder.up_to(),
        points: (-2 * PER_DECADE..=3 * PER_DECADE).map(point).collect(),
    })
}

/// Points of each curve.
const POINTS: usize = 61;

/// The figures of every coil of a circuit, in the order of the netlist.
pub fn coil_reports(circuit: &Circuit) -> Vec<CoilReport> {
    let currents = resting_currents(circuit);
    let mut reports = Vec::new();
    for (k, entry) in circuit.entries.iter().enumerate() {
        for (winding, figures) in entry.element.windings().iter().enumerate() {
            let current = currents
                .iter()
                .find(|(owner, nth, _)| *owner == k && *nth == winding)
                .map(|c| c.2);
            reports.push(coil_report(entry, figures, current));
        }
    }
    reports
}

/// The figures of one winding, with its operating current where one is known.
pub fn coil_report(
    entry: &Entry,
    figures: &WindingFigures<'_>,
    current: Option<f64>,
) -> CoilReport {
    let (linkage, geometry) = (&figures.wound.linkage, &figures.wound.geometry);
    let name = if figures.name.is_empty() {
        entry.name.clone()
    } else {
        format!("{}.{}", entry.name, figures.name)
    };
    let current = current.filter(|current| current.is_finite());
    let found = figures.wound.figures(current, POINTS);
    CoilReport {
        name,
        turns: linkage.turns(),
        inductance_at_zero: found.inductance_at_zero,
        current_at_70_percent: found.current_at_70_percent,
        resistance: figures.resistance,
        time_constant: (figures.resistance > 0.0)
            .then(|| found.inductance_at_zero / figures.resistance),
        operating_current: current,
        stored_energy: found.stored_energy,
        geometry: geometry.clone(),
        peak_flux_density: found.peak_flux_density,
        curve: found.curve,
        copper: copper(figures),
    }
}

/// The largest winding current of each coil at rest, with the switches as they start and with all of them closed;
/// nothing for a coil that carries no current then, or where a switch never rests.
fn resting_currents(circuit: &Circuit) -> Vec<(usize, usize, f64)> {
    use crate::analysis::{Start, start};
    let mut found: Vec<(usize, usize, f64)> = Vec::new();
    if !circuit.is_solvable() || never_rests(circuit) {
        return found;
    }
    let states = [
        start(circuit, Start::OperatingPoint)
            .ok()
            .map(|(state, _)| state),
        closed(circuit),
    ];
    for state in states.into_iter().flatten() {
        let at = Point {
            time: 0.0,
            x: &state.x,
            mode: &state.mode,
        };
        for (k, entry) in circuit.entries.iter().enumerate() {
            for winding in 0..entry.element.windings().len() {
                let own = Point {
                    mode: &at.mode[entry.modes.clone()],
                    ..at
                };
                let Some(current) = entry
                    .element
                    .quantity(Quantity::WindingCurrent, winding, own)
                else {
                    continue;
                };
                if current == 0.0 {
                    continue;
                }
                match found
                    .iter_mut()
                    .find(|(owner, nth, _)| *owner == k && *nth == winding)
                {
                    Some(known) if known.2.abs() >= current.abs() => {}
                    Some(known) => known.2 = current,
                    None => found.push((k, winding, current)),
                }
            }
        }
    }
    found
}

/// True where a switch is driven by a square wave: what its coils carry is no matter of rest.
fn never_rests(circuit: &Circuit) -> bool {
    circuit
        .entries
        .iter()
        .any(|entry| entry.node.get("square").is_some())
}

/// The state at rest with every switch closed.
fn closed(circuit: &Circuit) -> Option<crate::dae::State> {
    use crate::elements::Happening;
    let mut mode = circuit.start_mode();
    let mut any = false;
    for entry in &circuit.entries {
        if let Some(switching) = entry.element.switching() {
            any |= switching.rest(Happening::Closes, &mut mode[entry.modes.clone()]);
        }
    }
    if !any {
        return None;
    }
    crate::analysis::start::at_rest(circuit, mode).ok()
}
