//! The kinds of quantity that keys take. To add one: a constant here and its line in `ALL`.

use super::dimension::Dimension;

/// What a key takes: the quantity's name, the unit it is printed in, and how it may be written.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Kind {
    /// Name with its article: `a resistance`.
    pub name: &'static str,
    /// Coherent SI unit, in which values are kept: `Ω`; empty for a plain number.
    pub symbol: &'static str,
    /// What a message says the key takes: `Ω`; for a temperature `°C`.
    pub takes: &'static str,
    /// How it is usually written: `Ω, kΩ, MΩ`.
    pub examples: &'static str,
    /// Dimension; None takes any (`gain`).
    pub dimension: Option<Dimension>,
    /// True for a point on the temperature scale, which `°C` shifts and per cent has no meaning for.
    pub on_scale: bool,
}

impl Kind {
    const fn new(
        name: &'static str,
        symbol: &'static str,
        dimension: Dimension,
        examples: &'static str,
    ) -> Self {
        Kind {
            name,
            symbol,
            takes: symbol,
            examples,
            dimension: Some(dimension),
            on_scale: false,
        }
    }

    const fn taking(self, takes: &'static str) -> Self {
        Kind { takes, ..self }
    }

    /// The name without its article: `resistance`.
    pub fn noun(&self) -> &'static str {
        self.name
            .split_once(' ')
            .map_or(self.name, |(_, noun)| noun)
    }

    /// True where a bare number is accepted.
    pub fn is_bare(&self) -> bool {
        self.dimension.is_none_or(Dimension::is_none)
    }

    /// The first kind of this dimension in the list, for naming what was got.
    pub fn of_dimension(dimension: Dimension) -> Option<&'static Kind> {
        ALL.iter().find(|kind| kind.dimension == Some(dimension))
    }
}

const NONE: Dimension = Dimension::NONE;
const METRE: Dimension = Dimension::of(1, 0, 0, 0, 0);
const SECOND: Dimension = Dimension::of(0, 0, 1, 0, 0);
const AMPERE: Dimension = Dimension::of(0, 0, 0, 1, 0);
const KELVIN: Dimension = Dimension::of(0, 0, 0, 0, 1);
const KILOGRAM: Dimension = Dimension::of(0, 1, 0, 0, 0);
const NEWTON: Dimension = Dimension::of(1, 1, -2, 0, 0);
const JOULE: Dimension = NEWTON.times(METRE, 1);
const WATT: Dimension = JOULE.over(SECOND);
const COULOMB: Dimension = AMPERE.times(SECOND, 1);
const VOLT: Dimension = WATT.over(AMPERE);
const OHM: Dimension = VOLT.over(AMPERE);
const WEBER: Dimension = VOLT.times(SECOND, 1);
const HENRY: Dimension = WEBER.over(AMPERE);
const FARAD: Dimension = COULOMB.over(VOLT);
const TESLA: Dimension = WEBER.times(METRE, -2);

/// Resistance [Ω].
pub const RESISTANCE: Kind = Kind::new("a resistance", "Ω", OHM, "mΩ, Ω, kΩ, MΩ");
/// Capacitance [F].
pub const CAPACITANCE: Kind = Kind::new("a capacitance", "F", FARAD, "pF, nF, µF, mF");
/// Inductance [H].
pub const INDUCTANCE: Kind = Kind::new("an inductance", "H", HENRY, "nH, µH, mH, H");
/// Inductance per turn squared [H].
pub const INDUCTANCE_FACTOR: Kind = Kind::new(
    "an inductance factor",
    "H",
    HENRY,
    "nH, µH (per turn squared)",
);
/// Voltage [V].
pub const VOLTAGE: Kind = Kind::new("a voltage", "V", VOLT, "mV, V, kV");
/// Current [A].
pub const CURRENT: Kind = Kind::new("a current", "A", AMPERE, "nA, µA, mA, A");
/// Time [s].
pub const TIME: Kind = Kind::new("a time", "s", SECOND, "ns, µs, ms, s, min, h");
/// Frequency [Hz].
pub const FREQUENCY: Kind = Kind::new("a frequency", "Hz", NONE.over(SECOND), "Hz, kHz, MHz");
/// Rate of operation [1/s].
pub const RATE: Kind = Kind::new("a rate", "1/s", NONE.over(SECOND), "/s, /min, /h, Hz");
/// Length [m].
pub const LENGTH: Kind = Kind::new("a length", "m", METRE, "µm, mm, cm, m");
/// Area [m²].
pub const AREA: Kind = Kind::new("an area", "m²", METRE.times(METRE, 1), "mm², cm², m²");
/// Volume [m³].
pub const VOLUME: Kind = Kind::new("a volume", "m³", METRE.times(METRE, 2), "mm³, cm³, m³");
/// A point on the temperature scale [K].
pub const TEMPERATURE: Kind = Kind {
    on_scale: true,
    ..Kind::new("a temperature", "K", KELVIN, "°C, degC, K").taking("°C")
};
/// A temperature difference [K].
pub const TEMPERATURE_RISE: Kind = Kind::new("a temperature rise", "K", KELVIN, "K");
/// Power [W].
pub const POWER: Kind = Kind::new("a power", "W", WATT, "mW, W, kW");
/// Energy [J].
pub const ENERGY: Kind = Kind::new("an energy", "J", JOULE, "µJ, mJ, J, eV");
/// Charge [C].
pub const CHARGE: Kind = Kind::new("a charge", "C", COULOMB, "pC, nC, µC");
/// Flux linkage [Wb].
pub const FLUX_LINKAGE: Kind = Kind::new("a flux linkage", "Wb", WEBER, "µWb, mWb, Wb");
/// Flux density [T].
pub const FLUX_DENSITY: Kind = Kind::new("a flux density", "T", TESLA, "mT, T");
/// Magnetic field strength [A/m].
pub const FIELD_STRENGTH: Kind =
    Kind::new("a field strength", "A/m", AMPERE.over(METRE), "A/m, kA/m");
/// Mass [kg].
pub const MASS: Kind = Kind::new("a mass", "kg", KILOGRAM, "mg, g, kg");
/// Speed [m/s].
pub const SPEED: Kind = Kind::new("a speed", "m/s", METRE.over(SECOND), "mm/s, m/s");
/// Force [N].
pub const FORCE: Kind = Kind::new("a force", "N", NEWTON, "mN, N");
/// Spring rate [N/m].
pub const SPRING_RATE: Kind = Kind::new("a spring rate", "N/m", NEWTON.over(METRE), "N/m, N/mm");
/// Viscous damping [N s/m].
pub const DAMPING: Kind = Kind::new(
    "a damping",
    "N s/m",
    NEWTON.times(SECOND, 1).over(METRE),
    "N s/m",
);
/// Ratio: a bare number or per cent.
pub const RATIO: Kind = Kind::new("a ratio", "", NONE, "0.5, 50 %").taking("a plain number or %");
/// Relative permeability: a bare number.
pub const PERMEABILITY: Kind =
    Kind::new("a relative permeability", "", NONE, "2300").taking("a plain number");
/// Plane angle [rad].
pub const ANGLE: Kind = Kind::new("an angle", "rad", Dimension::ANGLE, "deg, rad").taking("deg");
/// Thermal resistance [K/W].
pub const THERMAL_RESISTANCE: Kind =
    Kind::new("a thermal resistance", "K/W", KELVIN.over(WATT), "K/W");
/// Thermal capacity [J/K].
pub const THERMAL_CAPACITY: Kind =
    Kind::new("a thermal capacity", "J/K", JOULE.over(KELVIN), "mJ/K, J/K");
/// Conductance [S].
pub const CONDUCTANCE: Kind = Kind::new("a conductance", "S", NONE.over(OHM), "µS, mS, S");
/// Rate of rise of a voltage [V/s].
pub const VOLTAGE_RATE: Kind = Kind::new(
    "a voltage rate",
    "V/s",
    VOLT.over(SECOND),
    "V/s, V/µs, kV/µs",
);
/// Electric field [V/m].
pub const ELECTRIC_FIELD: Kind = Kind::new(
    "an electric field",
    "V/m",
    VOLT.over(METRE),
    "V/mm, kV/mm, V/µm",
);
/// Rate of rise of a current [A/s].
pub const CURRENT_RATE: Kind = Kind::new("a current rate", "A/s", AMPERE.over(SECOND), "A/s, A/µs");
/// Relative change per kelvin [1/K].
pub const TEMPERATURE_COEFFICIENT: Kind = Kind::new(
    "a temperature coefficient",
    "1/K",
    NONE.over(KELVIN),
    "/K, %/K, ppm/K",
);
/// Change of a voltage per kelvin [V/K].
pub const VOLTAGE_PER_KELVIN: Kind = Kind::new(
    "a voltage per kelvin",
    "V/K",
    VOLT.over(KELVIN),
    "µV/K, mV/K, V/K",
);
/// Resistivity [Ω m].
pub const RESISTIVITY: Kind = Kind::new(
    "a resistivity",
    "Ω m",
    OHM.times(METRE, 1),
    "nΩ m, µΩ m, Ω m",
);
/// Factor of a square law [A/V²].
pub const SQUARE_LAW: Kind = Kind::new(
    "a square-law factor",
    "A/V²",
    AMPERE.times(VOLT, -2),
    "mA/V², A/V²",
);
/// Loss per volume [W/m³].
pub const LOSS_DENSITY: Kind = Kind::new(
    "a loss per volume",
    "W/m³",
    WATT.times(METRE, -3),
    "W/m³, kW/m³, mW/cm³",
);
/// Resistance per metre [Ω/m].
pub const RESISTANCE_PER_METRE: Kind = Kind::new(
    "a resistance per metre",
    "Ω/m",
    OHM.over(METRE),
    "mΩ/m, Ω/m, Ω/km",
);
/// Inductance per metre [H/m].
pub const INDUCTANCE_PER_METRE: Kind = Kind::new(
    "an inductance per metre",
    "H/m",
    HENRY.over(METRE),
    "nH/m, µH/m",
);
/// Capacitance per metre [F/m].
pub const CAPACITANCE_PER_METRE: Kind = Kind::new(
    "a capacitance per metre",
    "F/m",
    FARAD.over(METRE),
    "pF/m, nF/m",
);
/// Any quantity at all, or a bare number: the gain of a dependent source.
pub const ANY: Kind = Kind {
    dimension: None,
    ..Kind::new("a gain", "", NONE, "2, 0.1 Ω, 5 mS").taking("a number with or without a unit")
};

/// Every kind; where two share a dimension the first names it in messages.
pub const ALL: &[Kind] = &[
    RATIO,
    RESISTANCE,
    CAPACITANCE,
    INDUCTANCE,
    VOLTAGE,
    CURRENT,
    TIME,
    FREQUENCY,
    LENGTH,
    AREA,
    VOLUME,
    TEMPERATURE,
    POWER,
    ENERGY,
    CHARGE,
    FLUX_LINKAGE,
    FLUX_DENSITY,
    FIELD_STRENGTH,
    MASS,
    SPEED,
    FORCE,
    SPRING_RATE,
    DAMPING,
    ANGLE,
    THERMAL_RESISTANCE,
    THERMAL_CAPACITY,
    CONDUCTANCE,
    VOLTAGE_RATE,
    ELECTRIC_FIELD,
    CURRENT_RATE,
    TEMPERATURE_COEFFICIENT,
    VOLTAGE_PER_KELVIN,
    RESISTIVITY,
    SQUARE_LAW,
    LOSS_DENSITY,
    RESISTANCE_PER_METRE,
    INDUCTANCE_PER_METRE,
    CAPACITANCE_PER_METRE,
    RATE,
    TEMPERATURE_RISE,
    INDUCTANCE_FACTOR,
    PERMEABILITY,
    ANY,
];

#[cfg(test)]
mod tests {
    use super::*;

    /// SI brochure, table 4: the derived units in base units (from memory).
    #[test]
    fn dimensions_are_those_of_the_si_brochure() {
        let cases = [
            (RESISTANCE, Dimension::of(2, 1, -3, -2, 0)),
            (CAPACITANCE, Dimension::of(-2, -1, 4, 2, 0)),
            (INDUCTANCE, Dimension::of(2, 1, -2, -2, 0)),
            (VOLTAGE, Dimension::of(2, 1, -3, -1, 0)),
            (FLUX_LINKAGE, Dimension::of(2, 1, -2, -1, 0)),
            (FLUX_DENSITY, Dimension::of(0, 1, -2, -1, 0)),
            (POWER, Dimension::of(2, 1, -3, 0, 0)),
            (CONDUCTANCE, Dimension::of(-2, -1, 3, 2, 0)),
        ];
        for (kind, dimension) in cases {
            assert_eq!(kind.dimension, Some(dimension), "{}", kind.name);
        }
    }

    #[test]
    fn every_kind_names_itself_or_the_first_of_its_dimension() {
        for kind in ALL {
            assert!(
                kind.name.starts_with("a ") || kind.name.starts_with("an "),
                "{}",
                kind.name
            );
            if let Some(dimension) = kind.dimension {
                assert!(Kind::of_dimension(dimension).is_some());
            }
        }
        assert_eq!(VOLTAGE.noun(), "voltage");
        assert_eq!(FLUX_LINKAGE.noun(), "flux linkage");
    }
}
