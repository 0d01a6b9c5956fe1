//! Whether windings carry currents quicker than their ladders of skin and proximity effect follow: then the quickest section
//! takes a larger share of the loss than at the highest frequency of the fit.

use crate::circuit::Circuit;
use crate::dae::{Point, Step};
use crate::diag::Diagnostic;
use crate::units;

/// The windings that have ladders, with the energy in the quickest section and in all of each.
pub struct Ladders {
    windings: Vec<Winding>,
}

struct Winding {
    entry: usize,
    winding: usize,
    energies: [f64; 2],
}

impl Ladders {
    /// Nothing seen yet.
    pub fn new(circuit: &Circuit) -> Self {
        let mut windings = Vec::new();
        for (entry, of) in circuit.entries.iter().enumerate() {
            let figures = of.element.windings();
            let with = figures.iter().enumerate();
            let with = with.filter(|(_, figures)| figures.wound.inside.is_some());
            windings.extend(with.map(|(winding, _)| Winding {
                entry,
                winding,
                energies: [0.0; 2],
            }));
        }
        Ladders { windings }
    }

    /// Takes a step; its end stands for all of it, which is enough for a share.
    pub fn step(&mut self, circuit: &Circuit, step: &Step<'_>) {
        for own in &mut self.windings {
            let entry = &circuit.entries[own.entry];
            let at = Point {
                time: step.to,
                x: step.x1,
                mode: &step.mode[entry.modes.clone()],
            };
            let powers = entry.element.quickest_of_ladder(own.winding, at);
            for (energy, power) in own.energies.iter_mut().zip(powers.unwrap_or_default()) {
                *energy += power * (step.to - step.from);
            }
        }
    }

    /// A caution for each winding whose ladder was left behind.
    pub fn cautions(&self, circuit: &Circuit) -> Vec<Diagnostic> {
        let beyond = self.windings.iter().filter_map(|own| {
            let entry = &circuit.entries[own.entry];
            let figures = entry.element.windings();
            let inside = figures.get(own.winding)?.wound.inside.as_ref()?;
            let [quickest, all] = own.energies;
            let up_to = inside.ladder.up_to();
            if quickest <= inside.ladder.quickest_share(up_to) * all {
                return None;
            }
            let text = format!(
                "`{}` carries currents quicker than {}, up to which its ladder of skin and proximity effect is fitted",
                entry.winding_owners()[own.winding],
                units::engineering(up_to, units::FREQUENCY, 3)
            );
            let caution = Diagnostic::caution("beyond-the-ladder", text).at(entry.span, "this winding");
            Some(caution.help("beyond it the damping by the copper is rough: the resistance is a third off at first, then grows no more"))
        });
        beyond.collect()
    }
}
