//! How a winding lies in its window, which decides what field its conductors stand in.
//!
//! Layers fill the window's breadth and follow each other outwards from the side where the field is zero. Where
//! `layers` is not told, as many turns as fit side by side make a layer, and all layers share the turns evenly.

use super::impedance::{Impedance, Layers};
use crate::magnetics::geometry::{Fault, Geometry, Remark};
use crate::magnetics::winding::WindingPlan;
use crate::magnetics::wire::{COPPER, Conductors, TWENTY, copper_ratio};

/// The laws of skin and proximity effect, as written; the first is none.
pub const SKIN_WORDS: [&str; 3] = ["none", "dowell", "ferreira"];

/// Below this porosity Dowell's foils are no picture of round wires: tens of per cent off at high frequency (Nan and
/// Sullivan, PESC 2003, from memory).
const LEAST_POROSITY: f64 = 0.6;
/// A last layer less full than this leaves the field of the layers below it uneven.
const PARTIAL: f64 = 0.7;
/// A coil in air shorter than so many mean diameters has a field unlike that of layers without end.
const LONG: f64 = 2.0;

/// A law of skin and proximity effect.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum SkinLaw {
    /// Layers of foil, or of wire as the foil of the same copper.
    Dowell,
    /// Round wires in their own and in the layers' field.
    Ferreira,
}

impl SkinLaw {
    /// The law of one of [`SKIN_WORDS`]; None for `none`.
    pub fn of(word: &str) -> Option<Self> {
        match word {
            "dowell" => Some(SkinLaw::Dowell),
            "ferreira" => Some(SkinLaw::Ferreira),
            _ => None,
        }
    }
}

/// A winding's lay as told.
#[derive(Clone, Copy, Debug)]
pub struct Lay {
    /// The law.
    pub law: SkinLaw,
    /// Number of layers, where it is told.
    pub layers: Option<usize>,
    /// Length of a layer along the leg [m], where it is told; the core's otherwise.
    pub breadth: Option<f64>,
}

/// What a winding's copper comes out as.
#[derive(Clone, Debug)]
pub struct Arranged {
    /// Its impedance over its resistance to direct current.
    pub impedance: Impedance,
    /// What somebody should know.
    pub remarks: Vec<Remark>,
}

impl Lay {
    /// The impedance of a winding in a core's window at a `temperature` [K].
    ///
    /// # Errors
    /// A winding without a wire, layers that nobody tells, and foil by a law of round wires.
    pub fn arrange(
        &self,
        winding: &WindingPlan,
        geometry: &Geometry,
        temperature: f64,
    ) -> Result<Arranged, Fault> {
        let wire = winding.wire.as_ref().ok_or(Fault {
            word: "missing-wire",
            key: "skin_and_proximity",
            text: "skin and proximity effect need the winding's `wire`".into(),
            help: "`wire: {diameter: 0.2 mm}` in place of `resistance`, or `skin_and_proximity: none`",
        })?;
        let resistivity = COPPER * copper_ratio(temperature, TWENTY);
        let breadth = self.breadth.or(geometry.layer_breadth);
        let mut remarks = Vec::new();
        let impedance = match wire.conductors {
            Conductors::Sheet(thickness, width) => {
                if self.law == SkinLaw::Ferreira {
                    return Err(Fault {
                        word: "conflicting-keys",
                        key: "skin_and_proximity",
                        text: "`ferreira` is a law of round wires, and this winding is of foil"
                            .into(),
                        help: "skin_and_proximity: dowell",
                    });
                }
                let porosity = breadth.map_or(1.0, |breadth| (width / breadth).min(1.0));
                remarks.extend(porous(porosity));
                let layers = self.layers.unwrap_or(winding.turns) as f64;
                Impedance::sheets(thickness, porosity, layers, resistivity)
            }
            Conductors::Round(diameter) => {
                let layers = self.layers(winding, wire.outer, breadth, &mut remarks)?;
                match self.law {
                    SkinLaw::Dowell => {
                        remarks.extend(porous(fill(diameter, layers.pitch)));
                        Impedance::equivalent_foil(diameter, layers, resistivity)
                    }
                    SkinLaw::Ferreira => {
                        remarks.extend(close(diameter, layers.pitch, wire.outer));
                        Impedance::rounds(diameter, layers, resistivity)
                    }
                }
            }
            Conductors::Strands(count, diameter) => {
                let layers = self.layers(winding, wire.outer, breadth, &mut remarks)?;
                match self.law {
                    SkinLaw::Dowell => {
                        remarks.extend(porous(fill(diameter * count.sqrt(), layers.pitch)));
                        Impedance::equivalent_strand_foil(diameter, count, layers, resistivity)
                    }
                    SkinLaw::Ferreira => {
                        Impedance::strands(diameter, count, wire.outer, layers, resistivity)
                    }
                }
            }
        };
        remarks.extend(short_in_air(geometry));
        Ok(Arranged { impedance, remarks })
    }

    /// Number of layers and pitch of round wires of an `outer` diameter [m].
    fn layers(
        &self,
        winding: &WindingPlan,
        outer: f64,
        breadth: Option<f64>,
        remarks: &mut Vec<Remark>,
    ) -> Result<Layers, Fault> {
        let turns = winding.turns as f64;
        let side_by_side = |breadth: f64| (breadth / outer * (1.0 + 1e-9)).floor().max(1.0);
        let count = match (self.layers, breadth) {
            (Some(layers), _) => layers as f64,
            (None, Some(breadth)) => (turns / side_by_side(breadth)).ceil(),
            (None, None) => {
                return Err(Fault {
                    word: "layers-unknown",
                    key: "skin_and_proximity",
                    text: "neither the winding nor its core tells how many layers it has".into(),
                    help: "write the winding's `layers: 3`, or its `layer_breadth: 20 mm`",
                });
            }
        };
        if turns < count {
            return Err(Fault {
                word: "out-of-range",
                key: "layers",
                text: format!("{turns} turns make no {count} layers"),
                help: "a layer has one turn at least",
            });
        }
        let Some(breadth) = breadth else {
            // Turns that touch.
            return Ok(Layers {
                count,
                pitch: outer,
            });
        };
        let pitch = breadth * count / turns;
        if pitch < outer * (1.0 - 1e-9) {
            let text = format!(
                "{:.0} turns in each of {count} layers do not fit side by side into their breadth",
                turns / count
            );
            remarks.push(Remark::new("layers-overfilled", text));
        }
        let last = turns - (count - 1.0) * side_by_side(breadth);
        if self.layers.is_none() && count > 1.0 && last < PARTIAL * side_by_side(breadth) {
            let text = format!(
                "the last of {count} layers is filled to {:.0} %: the laws of skin and proximity effect \
                 count on full layers, and the turns are taken as spread evenly over all",
                100.0 * last / side_by_side(breadth)
            );
            remarks.push(Remark::new("partial-layer", text));
        }
        Ok(Layers {
            count,
            pitch: pitch.max(outer),
        })
    }
}

/// Porosity of the foil that stands for round conductors.
fn fill(diameter: f64, pitch: f64) -> f64 {
    0.5 * std::f64::consts::PI.sqrt() * diameter / pitch
}

fn porous(porosity: f64) -> Option<Remark> {
    (porosity < LEAST_POROSITY).then(|| {
        let text = format!(
            "the layers are filled to {porosity:.2} only; below {LEAST_POROSITY} Dowell's law is off by tens of \
             per cent at high frequency"
        );
        Remark::new("porous-layers", text)
    })
}

/// A caution where round wires would push more field aside than lies in their cells: a wire of radius r takes 2π r² of it
/// away at high frequency, each layer's cell being a pitch wide and the `outer` diameter [m] high.
fn close(diameter: f64, pitch: f64, outer: f64) -> Option<Remark> {
    let taken = std::f64::consts::FRAC_PI_2 * diameter * diameter / (pitch * outer);
    (taken > 1.0).then(|| {
        Remark::new(
            "close-wires",
            "the wires lie so close that Ferreira's law, which takes their field as even, finds too much loss at \
             high frequency; `dowell` is nearer",
        )
    })
}

/// A caution for coils in air, whose field must run along them and vanish outside.
fn short_in_air(geometry: &Geometry) -> Option<Remark> {
    let diameter = geometry.mean_turn? / std::f64::consts::PI;
    let short = geometry.iron == 0.0 && geometry.length < LONG * diameter;
    short.then(|| {
        let text = format!(
            "a coil in air of {:.1} mean diameters has a field unlike that of long layers: skin and proximity effect are rough",
            geometry.length / diameter
        );
        Remark::new("short-coil", text)
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::magnetics::Wire;

    fn arranged(
        lay: Lay,
        turns: usize,
        wire: Wire,
        breadth: Option<f64>,
    ) -> Result<Arranged, Fault> {
        let mut geometry = Geometry::closed(0.06, 5e-5);
        geometry.layer_breadth = breadth;
        let wire = Some(wire);
        lay.arrange(&WindingPlan { turns, wire }, &geometry, TWENTY)
    }

    fn lay(law: SkinLaw) -> Lay {
        Lay {
            law,
            layers: None,
            breadth: None,
        }
    }

    #[test]
    fn a_window_tells_layers_and_pitch() {
        // 50 turns of 0.4 mm fit into 20 mm: 150 turns make three full layers.
        let wire = Wire::round(0.3e-3, Some(0.4e-3));
        let layers = Layers {
            count: 3.0,
            pitch: 0.4e-3,
        };
        let found = arranged(lay(SkinLaw::Ferreira), 150, wire.clone(), Some(20e-3)).unwrap();
        assert_eq!(
            found.impedance,
            Impedance::rounds(0.3e-3, layers, COPPER * copper_ratio(TWENTY, TWENTY))
        );
        assert!(found.remarks.is_empty());
        let told = Lay {
            layers: Some(3),
            ..lay(SkinLaw::Ferreira)
        };
        let same = arranged(told, 150, wire, None).unwrap();
        assert_eq!(same.impedance, found.impedance);
    }

    #[test]
    fn what_no_law_covers_raises_a_remark_or_a_fault() {
        let wire = || Wire::round(0.35e-3, Some(0.4e-3));
        let word = |found: Result<Arranged, Fault>| match found {
            Ok(found) => found.remarks.first().map(|remark| remark.word),
            Err(fault) => Some(fault.word),
        };
        let dowell = lay(SkinLaw::Dowell);
        let layers = |layers| Lay {
            layers: Some(layers),
            ..dowell
        };
        let breadth = Some(20e-3);
        assert_eq!(word(arranged(dowell, 150, wire(), breadth)), None);
        assert_eq!(
            word(arranged(dowell, 110, wire(), breadth)),
            Some("partial-layer")
        );
        assert_eq!(
            word(arranged(layers(1), 20, wire(), breadth)),
            Some("porous-layers")
        );
        assert_eq!(
            word(arranged(layers(2), 150, wire(), breadth)),
            Some("layers-overfilled")
        );
        assert_eq!(
            word(arranged(layers(9), 5, wire(), breadth)),
            Some("out-of-range")
        );
        assert_eq!(
            word(arranged(dowell, 150, wire(), None)),
            Some("layers-unknown")
        );
        assert_eq!(
            word(arranged(lay(SkinLaw::Ferreira), 150, wire(), breadth)),
            Some("close-wires")
        );
        let foil = Wire::foil(0.1e-3, 18e-3);
        assert_eq!(
            word(arranged(lay(SkinLaw::Ferreira), 10, foil, breadth)),
            Some("conflicting-keys")
        );
    }

    #[test]
    fn strands_by_both_laws_agree_where_the_current_still_fills_them() {
        // At a tenth of the corner the rise over direct current is that of the field across the strands.
        let bundle = Wire::litz(40, 0.1e-3, None);
        let of = |law| {
            let lay = Lay {
                layers: Some(4),
                ..lay(law)
            };
            arranged(lay, 80, bundle.clone(), None).unwrap().impedance
        };
        let (foil, round) = (of(SkinLaw::Dowell), of(SkinLaw::Ferreira));
        let rise = |impedance: Impedance| impedance.at(0.1 * round.corner()).re - 1.0;
        assert!((rise(foil) / rise(round) - 1.0).abs() < 0.15);
    }
}
