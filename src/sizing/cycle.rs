//! The run of a sizing: closed and settled, open until the coil has let go and all has rung out, closed again.

use super::rig::{Rig, put};
use crate::diag::Sources;
use crate::netlist::{Document, Value};
use crate::run::Netlist;
use crate::units;

/// Accuracy of the runs that a search makes.
pub const COARSE: f64 = 1e-3;
/// Accuracy of the runs whose figures are reported, and of close calls.
pub const FINE: f64 = 1e-4;

/// Of the open phase, the share at its end in which everything has to be at rest.
const REST: f64 = 0.1;

/// Instants of one operation [s].
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Cycle {
    /// Closed and settled from 0 until the switch begins to open.
    pub opens: f64,
    /// From the opening to the closing.
    pub off: f64,
    /// From the closing to the end.
    pub on: f64,
}

impl Cycle {
    /// Lengths for a time constant of the cold coil [s]: eight of them open, in which an exponential falls to 0.03 %,
    /// and six closed again. They are rounded, so that they read well in a netlist.
    pub fn of(time_constant: f64, transition: f64) -> Self {
        let off = rounded((8.0 * time_constant).max(1e3 * transition));
        Cycle {
            opens: rounded(off / 20.0),
            off,
            on: rounded(0.75 * off),
        }
    }

    /// The same with the switch open for longer.
    pub fn stretched(self, factor: f64) -> Self {
        Cycle {
            off: factor * self.off,
            ..self
        }
    }

    /// When the switch closes again [s].
    pub fn closes(&self) -> f64 {
        self.opens + self.off
    }

    /// The whole run [s].
    pub fn duration(&self) -> f64 {
        self.closes() + self.on
    }
}

/// Up to two digits.
fn rounded(value: f64) -> f64 {
    let decade = 10f64.powf(value.log10().floor() - 1.0);
    (value / decade).round() * decade
}

/// Names of the readings that the sizing adds.
#[derive(Clone, Debug)]
pub struct Names {
    peak: String,
    falls: String,
    rises: String,
    at_opening: String,
    at_closing: String,
    rest: String,
}

impl Names {
    /// Names that the netlist does not use.
    pub fn free(rig: &Rig) -> Self {
        let name = |wish: &str| rig.free_name("readings", &format!("sizing_{wish}"));
        Names {
            peak: name("peak_voltage"),
            falls: name("release"),
            rises: name("release_negative"),
            at_opening: name("current_at_opening"),
            at_closing: name("current_at_closing"),
            rest: name("unrest"),
        }
    }

    /// Writes commands, analysis and readings of the sizing run into a document. `level` is the release current [A].
    pub fn write(
        &self,
        rig: &Rig,
        cycle: Cycle,
        level: f64,
        document: &mut Document,
        sources: &mut Sources,
    ) {
        let (coil, switch) = (&rig.coil, &rig.switch);
        let time = |value: f64| units::engineering(value, units::TIME, 9);
        let mut set = |path: &str, yaml: &str| put(document, sources, path, yaml);
        set(&format!("elements.{switch}.initially"), "closed");
        let at = format!("[{}]", time(cycle.opens));
        set(&format!("elements.{switch}.opens_at"), &at);
        let at = format!("[{}]", time(cycle.closes()));
        set(&format!("elements.{switch}.closes_at"), &at);
        let (duration, accuracy) = (time(cycle.duration()), format!("{COARSE:e}"));
        set(
            "analysis",
            &format!("{{transient: {{duration: {duration}, accuracy: {accuracy}}}}}"),
        );
        let current = |value: f64| units::engineering(value, units::CURRENT, 12);
        let (level, negative) = (current(level), current(-level));
        let open = format!("from: {switch} opens, to: {switch} closes");
        let winding = format!("signal: winding current of {coil}");
        let mut reading = |name: &str, keys: String| {
            set(&format!("readings.{name}"), &format!("{{{keys}}}"));
        };
        reading(
            &self.peak,
            format!("signal: voltage across {switch}, take: peak, from: {switch} opens"),
        );
        reading(
            &self.falls,
            format!("{winding}, take: time_until_last, falls_to: {level}, {open}"),
        );
        reading(
            &self.rises,
            format!("{winding}, take: time_until_last, rises_to: {negative}, {open}"),
        );
        reading(
            &self.at_opening,
            format!("{winding}, take: value_at, at: {switch} opens"),
        );
        reading(
            &self.at_closing,
            format!("{winding}, take: value_at, at: {switch} closes"),
        );
        let from = time(cycle.closes() - REST * cycle.off);
        reading(
            &self.rest,
            format!("{winding}, take: ripple, from: {from}, to: {switch} closes"),
        );
    }
}

/// Handles of what a study changes, and the numbers of its readings.
#[derive(Clone, Copy, Debug)]
pub struct Handles {
    closes: Value,
    duration: Value,
    accuracy: Value,
    rest_from: Value,
    falls_to: Value,
    rises_to: Value,
    /// Number of the reading of the peak voltage.
    pub peak: usize,
    /// Numbers of the readings of the last passings of the release current, falling and rising.
    pub release: [usize; 2],
    /// Numbers of the readings of the winding current as the switch opens and as it closes.
    pub current: [usize; 2],
    /// Number of the reading of what still moves at the end of the open phase.
    pub rest: usize,
}

impl Handles {
    /// Finds them in a netlist that [`Names::write`] has prepared.
    pub fn find(netlist: &Netlist, switch: &str, names: &Names) -> Option<Self> {
        let value = |path: &str| netlist.circuit.parameters.find(path);
        let reading = |name: &String| {
            netlist
                .readings
                .iter()
                .position(|reading| reading.name.text == *name)
        };
        Some(Handles {
            closes: value(&format!("elements.{switch}.closes_at.0"))?,
            duration: value("analysis.transient.duration")?,
            accuracy: value("analysis.transient.accuracy")?,
            rest_from: value(&format!("readings.{}.from", names.rest))?,
            falls_to: value(&format!("readings.{}.falls_to", names.falls))?,
            rises_to: value(&format!("readings.{}.rises_to", names.rises))?,
            peak: reading(&names.peak)?,
            release: [reading(&names.falls)?, reading(&names.rises)?],
            current: [reading(&names.at_opening)?, reading(&names.at_closing)?],
            rest: reading(&names.rest)?,
        })
    }

    /// The changes that give a run this cycle, release current [A] and accuracy.
    pub fn changes(&self, cycle: Cycle, level: f64, accuracy: f64) -> [(Value, f64); 6] {
        [
            (self.closes, cycle.closes()),
            (self.duration, cycle.duration()),
            (self.accuracy, accuracy),
            (self.rest_from, cycle.closes() - REST * cycle.off),
            (self.falls_to, level),
            (self.rises_to, -level),
        ]
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_cycle_is_long_enough_and_reads_well() {
        let cycle = Cycle::of(20.13e-3, 1e-6);
        assert!((cycle.off - 0.16).abs() < 1e-12, "{cycle:?}");
        assert!((cycle.opens - 8e-3).abs() < 1e-12);
        assert!((cycle.duration() - (8e-3 + 0.16 + 0.12)).abs() < 1e-12);
        // A slow switch sets the length of a quick coil's run.
        assert_eq!(Cycle::of(1e-9, 1e-3).off, 1.0);
    }
}
