//! What fills a place of a suppressor: a part of the parts files, or a resistor or capacitor of a standard value and a
//! usual class of rating.

use super::catalogue::Part;
use super::standard_values::Series;
use crate::units::{self, Kind, engineering};

/// A resistor or a capacitor of a standard value.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Standard {
    /// What it is.
    pub kind: StandardKind,
    /// Its value [SI].
    pub value: f64,
    /// The series that it is taken from, which gives its tolerance.
    pub series: Series,
    /// Highest voltage [V].
    pub voltage: f64,
    /// Highest mean power [W]; of a capacitor not rated.
    pub power: Option<f64>,
}

/// Resistor or capacitor.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum StandardKind {
    /// A resistor.
    Resistor,
    /// A capacitor.
    Capacitor,
}

/// Power [W] and highest voltage [V] of film resistors, size by size (common practice).
const RESISTOR_CLASSES: [(f64, f64); 7] = [
    (0.125, 150.0),
    (0.25, 250.0),
    (0.5, 350.0),
    (1.0, 500.0),
    (2.0, 500.0),
    (5.0, 750.0),
    (10.0, 1000.0),
];

/// Direct voltages [V] that film capacitors are made for (common practice).
const CAPACITOR_CLASSES: [f64; 8] = [63.0, 100.0, 160.0, 250.0, 400.0, 630.0, 1000.0, 1600.0];

/// Tolerance of film capacitors: what is bought in E6 values usually holds 10 % (common practice).
const CAPACITOR_TOLERANCE: f64 = 0.10;

/// What fills a place.
#[derive(Clone, Debug)]
pub enum Filling {
    /// A part by name.
    Part(Part),
    /// A standard value.
    Standard(Standard),
}

impl Filling {
    /// A resistor value in all its classes, small ones first.
    pub fn resistors(value: f64, series: Series) -> Vec<Filling> {
        let class = |&(power, voltage): &(f64, f64)| {
            Filling::Standard(Standard {
                kind: StandardKind::Resistor,
                value,
                series,
                voltage,
                power: Some(power),
            })
        };
        RESISTOR_CLASSES.iter().map(class).collect()
    }

    /// A capacitor value in all its classes, low voltages first.
    pub fn capacitors(value: f64, series: Series) -> Vec<Filling> {
        let class = |&voltage: &f64| {
            Filling::Standard(Standard {
                kind: StandardKind::Capacitor,
                value,
                series,
                voltage,
                power: None,
            })
        };
        CAPACITOR_CLASSES.iter().map(class).collect()
    }

    /// Its keys in a netlist, without terminals.
    pub fn keys(&self) -> String {
        match self {
            Filling::Part(part) => format!("part: {}", part.name),
            Filling::Standard(standard) => standard.keys(),
        }
    }

    /// What it is rated for, by key [SI]; None where it does not say.
    pub fn rating(&self, key: &str) -> Option<f64> {
        match (self, key) {
            (Filling::Part(part), _) => part.rating(key),
            (Filling::Standard(standard), "voltage") => Some(standard.voltage),
            (Filling::Standard(standard), "power") => standard.power,
            (Filling::Standard(_), _) => None,
        }
    }

    /// True where it says what power or current it stands.
    pub fn is_rated(&self) -> bool {
        match self {
            Filling::Part(part) => part.is_rated(),
            Filling::Standard(_) => true,
        }
    }

    /// As it reads in a table: `220 Ω 0.5 W`, `100 nF 160 V`, `zener_18V_0W5`.
    pub fn shown(&self) -> String {
        match self {
            Filling::Part(part) => part.name.clone(),
            Filling::Standard(standard) => {
                let class = match standard.power {
                    Some(power) => format!("{power} W"),
                    None => format!("{} V", standard.voltage),
                };
                format!(
                    "{} {class}",
                    engineering(standard.value, standard.unit(), 3)
                )
            }
        }
    }

    /// Where its choice stands in a netlist below its element, and what stands there: a part's name or a value [SI].
    pub fn choice(&self) -> (&'static str, Choice) {
        match self {
            Filling::Part(part) => ("part", Choice::Part(part.name.clone())),
            Filling::Standard(standard) => (standard.key(), Choice::Value(standard.value)),
        }
    }
}

/// A part by name, or a value [SI].
#[derive(Clone, Debug, PartialEq)]
pub enum Choice {
    /// A part.
    Part(String),
    /// A value.
    Value(f64),
}

impl Standard {
    fn key(&self) -> &'static str {
        match self.kind {
            StandardKind::Resistor => "resistance",
            StandardKind::Capacitor => "capacitance",
        }
    }

    fn unit(&self) -> Kind {
        match self.kind {
            StandardKind::Resistor => units::RESISTANCE,
            StandardKind::Capacitor => units::CAPACITANCE,
        }
    }

    fn tolerance(&self) -> f64 {
        match self.kind {
            StandardKind::Resistor => self.series.tolerance().unwrap_or(0.2),
            StandardKind::Capacitor => CAPACITOR_TOLERANCE,
        }
    }

    fn keys(&self) -> String {
        let kind = match self.kind {
            StandardKind::Resistor => "resistor",
            StandardKind::Capacitor => "capacitor",
        };
        let power = self.power.map_or(String::new(), |power| {
            format!("power: {}, ", engineering(power, units::POWER, 3))
        });
        format!(
            "kind: {kind}, {}: {} ± {} %, ratings: {{{power}voltage: {}}}",
            self.key(),
            engineering(self.value, self.unit(), 6),
            100.0 * self.tolerance(),
            engineering(self.voltage, units::VOLTAGE, 4)
        )
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn standard_values_are_written_with_tolerance_and_ratings() {
        let resistors = Filling::resistors(220.0, Series::E24);
        assert_eq!(
            resistors[2].keys(),
            "kind: resistor, resistance: 220 Ω ± 5 %, ratings: {power: 500 mW, voltage: 350 V}"
        );
        assert_eq!(resistors[2].shown(), "220 Ω 0.5 W");
        let capacitors = Filling::capacitors(4.7e-8, Series::E6);
        assert_eq!(
            capacitors[0].keys(),
            "kind: capacitor, capacitance: 47 nF ± 10 %, ratings: {voltage: 63 V}"
        );
        assert_eq!(capacitors[0].rating("voltage"), Some(63.0));
        assert_eq!(
            capacitors[1].choice(),
            ("capacitance", Choice::Value(4.7e-8))
        );
    }
}
