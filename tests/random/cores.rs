//! Random cores: every shape, every kind of material.

use super::circuit::Maker;

impl Maker {
    /// The keys of a core of any shape, of dimensions that belong together.
    pub(super) fn core_keys(&mut self) -> String {
        let material = match self.dice.below(10) {
            0 => "solid_iron, eddy_currents: solid".to_owned(),
            1 => {
                let thickness = self.dice.over_decades(0.03, 3.0);
                format!("solid_iron, eddy_currents: laminated, lamination: {thickness:.3} mm")
            }
            2 => "powder".to_owned(),
            3 => "hot_ferrite".to_owned(),
            4..7 => "ferrite".to_owned(),
            _ => "iron".to_owned(),
        };
        let size = self.dice.over_decades(5.0, 80.0);
        let mm = |share: f64| format!("{:.4} mm", share * size);
        let gap = self.perhaps(0.6, "gap", |maker| maker.quantity(1e-5, 1e-3, "m"));
        let shape = match self.dice.below(12) {
            0..=4 => {
                let length = self.quantity(5e-3, 0.2, "m");
                let area = self.dice.over_decades(1.0, 1e3);
                format!(
                    "shape: effective, length: {length}, area: {area:.3} mm²{gap}, mean_turn: 40 mm"
                )
            }
            5 => format!(
                "shape: toroid, outer_diameter: {}, inner_diameter: {}, height: {}{gap}",
                mm(1.0),
                mm(0.55),
                mm(0.4)
            ),
            6 => format!(
                "shape: e_pair, width: {}, height: {}, depth: {}, window_depth: {}, window_width: {}, {}: {}, \
                 centre_gap: [{}, {}]",
                mm(1.0),
                mm(0.5),
                mm(0.3),
                mm(0.35),
                mm(0.7),
                self.dice.one_of(&["leg_width", "leg_diameter"]),
                mm(0.3),
                mm(0.01),
                mm(0.005)
            ),
            7 => format!(
                "shape: u_pair, width: {}, height: {}, depth: {}, window_depth: {}, window_width: {}, spacer: {}",
                mm(1.0),
                mm(0.6),
                mm(0.3),
                mm(0.35),
                mm(0.45),
                mm(0.01)
            ),
            8 => format!(
                "shape: pot, diameter: {}, height: {}, window_depth: {}, window_diameter: {}, leg_diameter: {}, \
                 inductance_factor: {:.4} nH",
                mm(1.0),
                mm(0.3),
                mm(0.2),
                mm(0.82),
                mm(0.42),
                // The gap that this takes is a few hundredths of the size, whatever the size.
                6.0 * size
            ),
            9 => format!(
                "shape: yoke, core_diameter: {}, core_length: {}, frame_width: {}, frame_thickness: {}, \
                 frame_distance: {}, armature_thickness: {}, gap: {}, hinge_gap: {}",
                mm(0.25),
                mm(0.8),
                mm(0.5),
                mm(0.08),
                mm(0.4),
                mm(0.08),
                mm(0.02),
                mm(0.002)
            ),
            10 => format!(
                "shape: rod, diameter: {}, length: {}, winding_length: {}",
                mm(0.2),
                mm(1.0),
                mm(0.7)
            ),
            _ => format!(
                "shape: solenoid, inner_diameter: {}, outer_diameter: {}, length: {}, core_diameter: {}, core_length: {}",
                mm(0.3),
                mm(0.6),
                mm(1.0),
                mm(0.27),
                mm(1.2)
            ),
        };
        format!("{shape}, material: {material}")
    }
}
