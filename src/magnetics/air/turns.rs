//! A layered coil turn by turn: the sum over all pairs of coaxial circles, and of each with itself.
//!
//! Layers are counted from the inside, turns in each layer from one end. In a regular lattice a pair is told by
//! its two layers and its axial offset, so offsets are summed once and weighted by how often they occur.

use super::loops::{mutual, own};
use std::f64::consts::PI;

/// A lattice of turns [m].
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Lattice {
    /// Number of turns, 1 or more.
    pub turns: usize,
    /// Number of layers, 1 or more; the last may be shorter than the others.
    pub layers: usize,
    /// Diameter on which the first layer lies.
    pub inner_diameter: f64,
    /// From turn to turn along the axis.
    pub axial_pitch: f64,
    /// From layer to layer.
    pub radial_pitch: f64,
    /// Diameter of the bare wire.
    pub bare_diameter: f64,
}

impl Lattice {
    /// Turns of a full layer.
    pub fn per_layer(&self) -> usize {
        self.turns.div_ceil(self.layers)
    }

    /// Layers that hold turns: fewer than asked for where the turns run out.
    pub fn used_layers(&self) -> usize {
        self.turns.div_ceil(self.per_layer())
    }

    /// Axial length that the turns take [m].
    pub fn length(&self) -> f64 {
        self.per_layer() as f64 * self.axial_pitch
    }

    /// Diameter that the last layer reaches [m].
    pub fn outer_diameter(&self) -> f64 {
        self.inner_diameter + 2.0 * self.used_layers() as f64 * self.radial_pitch
    }

    /// Mean length of a turn [m].
    pub fn mean_turn(&self) -> f64 {
        let wire: f64 = (0..self.used_layers())
            .map(|layer| self.count(layer) as f64 * self.radius(layer))
            .sum();
        2.0 * PI * wire / self.turns as f64
    }

    /// Inductance [H].
    pub fn inductance(&self) -> f64 {
        let layers = self.used_layers();
        let mut sum = 0.0;
        for one in 0..layers {
            let (count, radius) = (self.count(one), self.radius(one));
            sum += count as f64 * own(radius, 0.5 * self.bare_diameter);
            for offset in 1..count {
                let distance = offset as f64 * self.axial_pitch;
                sum += 2.0 * (count - offset) as f64 * mutual(radius, radius, distance);
            }
            for other in one + 1..layers {
                sum += 2.0 * self.between(one, other);
            }
        }
        sum
    }

    /// Sum of the mutual inductances of two layers.
    fn between(&self, one: usize, other: usize) -> f64 {
        let (radius, further) = (self.radius(one), self.radius(other));
        let (count, fewer) = (self.count(one), self.count(other));
        let mut sum = 0.0;
        for offset in 0..count {
            // Pairs with this offset either way; the second layer has `fewer` turns, or as many.
            let forward = fewer.min(count - offset);
            let backward = if offset == 0 {
                0
            } else {
                fewer.saturating_sub(offset)
            };
            let distance = offset as f64 * self.axial_pitch;
            sum += (forward + backward) as f64 * mutual(radius, further, distance);
        }
        sum
    }

    fn count(&self, layer: usize) -> usize {
        self.per_layer().min(self.turns - layer * self.per_layer())
    }

    fn radius(&self, layer: usize) -> f64 {
        0.5 * self.inner_diameter + (layer as f64 + 0.5) * self.radial_pitch
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn offsets_counted_once_give_the_sum_over_all_pairs() {
        for (turns, layers) in [(1, 1), (7, 1), (24, 4), (23, 4), (10, 8)] {
            let lattice = Lattice {
                turns,
                layers,
                inner_diameter: 0.02,
                axial_pitch: 0.5e-3,
                radial_pitch: 0.4e-3,
                bare_diameter: 0.35e-3,
            };
            let places: Vec<(f64, f64)> = (0..turns)
                .map(|turn| (turn / lattice.per_layer(), turn % lattice.per_layer()))
                .map(|(layer, place)| (lattice.radius(layer), place as f64 * 0.5e-3))
                .collect();
            let mut plain = 0.0;
            for (i, (r, z)) in places.iter().enumerate() {
                for (j, (s, y)) in places.iter().enumerate() {
                    plain += if i == j {
                        own(*r, 0.175e-3)
                    } else {
                        mutual(*r, *s, z - y)
                    };
                }
            }
            assert!(
                (lattice.inductance() / plain - 1.0).abs() < 1e-13,
                "{turns} turns in {layers} layers"
            );
            let wire: f64 = places.iter().map(|(r, _)| 2.0 * PI * r).sum();
            assert!((lattice.mean_turn() * turns as f64 / wire - 1.0).abs() < 1e-13);
        }
    }
}
