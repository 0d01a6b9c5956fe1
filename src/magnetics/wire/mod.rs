//! Wire: copper area, resistance per metre, and the room that a turn takes.
//!
//! Copper after IEC 60028, 1/58 Ω mm²/m at 20 °C, over temperature by the design's law R ∝ 234.5 + T (T in °C). Gauges
//! after ASTM B258: d = 0.127 mm · 92^((36 - n)/39).

mod gauge;
mod spec;

pub use gauge::{Gauge, GaugeFault};
pub use spec::{WIRE_KEYS, WireSpec};

use std::f64::consts::FRAC_PI_4;

/// Resistivity of annealed copper at 20 °C [Ω m], IEC 60028.
pub const COPPER: f64 = 1e-6 / 58.0;

/// 20 °C [K].
pub const TWENTY: f64 = 293.15;

/// Copper's resistance at `temperature` over that at `reference` [K]: (234.5 + T)/(234.5 + T0), T in °C.
pub fn copper_ratio(temperature: f64, reference: f64) -> f64 {
    // 234.5 - 273.15 moves the law from °C to K.
    (temperature - 38.65) / (reference - 38.65)
}

/// A wire with numbers. SI units.
#[derive(Clone, Debug, PartialEq)]
pub struct Wire {
    /// Copper section [m²].
    pub copper: f64,
    /// Diameter of the bare conductor [m]; of the bundle for litz; None for foil.
    pub bare_diameter: Option<f64>,
    /// Size across, insulation included [m]: the diameter, or a foil's thickness.
    pub outer: f64,
    /// Room that one turn takes in a window [m²]: a square over the insulated wire, or a foil's section.
    pub cell: f64,
    /// What its field sees of it.
    pub conductors: Conductors,
}

/// The conductors of a turn. SI units.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Conductors {
    /// One round wire of a bare diameter [m].
    Round(f64),
    /// Insulated strands, so many of a bare diameter [m], twisted so that all carry the same current.
    Strands(f64, f64),
    /// A sheet of a thickness and a width [m].
    Sheet(f64, f64),
}

impl Wire {
    /// Round wire of a bare diameter [m]; where the outer diameter is not known it is that of [`grade_one`].
    pub fn round(diameter: f64, outer_diameter: Option<f64>) -> Self {
        let outer = outer_diameter.unwrap_or_else(|| grade_one(diameter));
        Wire {
            copper: FRAC_PI_4 * diameter * diameter,
            bare_diameter: Some(diameter),
            outer,
            cell: outer * outer,
            conductors: Conductors::Round(diameter),
        }
    }

    /// A bundle of insulated strands of a bare diameter [m]. No allowance for the strands' longer way.
    ///
    /// Without a given outer diameter the bundle's is 1.155 √strands times the strand's (from memory; hexagonal packing
    /// would give 1.05 √strands).
    pub fn litz(strands: usize, strand_diameter: f64, outer_diameter: Option<f64>) -> Self {
        let bundle = 1.155 * (strands as f64).sqrt() * grade_one(strand_diameter);
        let outer = outer_diameter.unwrap_or(bundle);
        Wire {
            copper: strands as f64 * FRAC_PI_4 * strand_diameter * strand_diameter,
            bare_diameter: Some(outer),
            outer,
            cell: outer * outer,
            conductors: Conductors::Strands(strands as f64, strand_diameter),
        }
    }

    /// Foil, one turn per layer [m]; insulation is not counted.
    pub fn foil(thickness: f64, width: f64) -> Self {
        Wire {
            copper: thickness * width,
            bare_diameter: None,
            outer: thickness,
            cell: thickness * width,
            conductors: Conductors::Sheet(thickness, width),
        }
    }

    /// Resistance [Ω/m] at a `temperature` [K].
    pub fn resistance_per_metre(&self, temperature: f64) -> f64 {
        COPPER / self.copper * copper_ratio(temperature, TWENTY)
    }
}

/// Largest outer diameter [m] of enamelled round wire, grade 1, of a bare diameter [m]: d + 0.062 mm (d/1 mm)^0.55.
///
/// A fit of ours to the figures of IEC 60317 (from memory: 0.1 mm 0.117, 0.2 mm 0.226, 0.5 mm 0.544, 1 mm 1.062),
/// within 0.002 mm of each between 0.05 mm and 1 mm.
pub fn grade_one(diameter: f64) -> f64 {
    diameter + 0.062e-3 * (diameter / 1e-3).powf(0.55)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn copper_follows_the_line_through_234_5() {
        assert!((copper_ratio(TWENTY, TWENTY) - 1.0).abs() < 1e-15);
        assert!((copper_ratio(373.15, 273.15) - 334.5 / 234.5).abs() < 1e-14);
    }

    #[test]
    fn enamel_is_within_two_micrometres_of_the_standard() {
        // Largest outer diameters of grade 1, IEC 60317-0-1 [mm] (from memory).
        for (bare, outer) in [
            (0.05, 0.060),
            (0.1, 0.117),
            (0.2, 0.226),
            (0.5, 0.544),
            (1.0, 1.062),
        ] {
            assert!(
                (grade_one(bare * 1e-3) * 1e3 - outer).abs() < 0.002,
                "{bare}"
            );
        }
    }

    #[test]
    fn a_bundle_has_the_copper_of_its_strands() {
        let (strand, bundle) = (Wire::round(0.1e-3, None), Wire::litz(60, 0.1e-3, None));
        let ratio = strand.resistance_per_metre(300.0) / bundle.resistance_per_metre(300.0);
        assert!((ratio - 60.0).abs() < 1e-12);
        assert!(bundle.outer * bundle.outer > 60.0 * 0.8 * strand.cell);
    }
}
