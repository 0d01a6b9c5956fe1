//! Currents, loss and stored energy of windings on legs.

use super::WoundLegs;
use crate::elements::{Energy, Point};

impl Energy for WoundLegs {
    fn currents(&self, at: Point<'_>, out: &mut [f64]) {
        for (t, port) in self.ports.iter().enumerate() {
            let winding = || {
                let sign = if t % 2 == 0 { 1.0 } else { -1.0 };
                sign * self.currents[t / 2].of(at.x)
            };
            out[t] = port.current.map_or_else(winding, |i| i.of(at.x));
        }
    }

    fn loss(&self, at: Point<'_>) -> f64 {
        let copper: f64 = (0..self.currents.len())
            .map(|k| {
                let current = self.currents[k].of(at.x);
                self.resistances[k] * current.powi(2) + self.skins[k].loss(at.x, current)
            })
            .sum();
        copper + self.legs.iter().map(|leg| leg.loss(at.x)).sum::<f64>()
    }

    fn stored(&self, at: Point<'_>) -> f64 {
        let legs = self.legs.iter().map(|leg| leg.stored(at.x));
        let copper = self.skins.iter().map(|skin| skin.stored(at.x));
        let mut energy: f64 = legs.chain(copper).sum();
        for (j, first) in self.currents.iter().enumerate() {
            for (k, second) in self.currents.iter().enumerate() {
                energy += 0.5 * self.matrix[(j, k)] * first.of(at.x) * second.of(at.x);
            }
        }
        for capacitor in &self.capacitors {
            let (a, b) = (&self.ports[capacitor.from], &self.ports[capacitor.to]);
            let voltage = a.node.of(at.x) - b.node.of(at.x);
            energy += 0.5 * capacitor.capacitance * voltage * voltage;
        }
        energy
    }
}
