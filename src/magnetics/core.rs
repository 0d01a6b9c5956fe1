//! A core: a shape filled with a material, and what it comes out as under a winding.

use super::MU0;
use super::eddy::{Section, Shells};
use super::geometry::{Fault, Geometry, Remark};
use super::linkage::{CurvePoint, Linkage};
use super::losses::{Arranged, Impedance, Ladder};
use super::materials::{Filling, Linear, Losses, Magnetized};
use super::path::Path;
use super::shapes::{Around, Shape};
use super::winding::WindingPlan;
use crate::netlist::{Value, Values};
use std::sync::Arc;

/// A core as written. Coils share it.
#[derive(Debug)]
pub struct Core {
    /// Where it stands: `cores.k1_core`.
    pub path: String,
    pub(super) shape: Box<dyn Shape>,
    pub(super) material: Option<Arc<Filling>>,
    pub(super) eddy: Option<Eddy>,
}

/// Eddy currents of a core as written.
#[derive(Clone, Copy, Debug)]
pub(super) struct Eddy {
    /// Thickness of its sheets; None for a solid round bar.
    pub lamination: Option<Value>,
}

/// A core with one winding, with numbers.
#[derive(Clone, Debug)]
pub struct Wound {
    /// The core's geometry.
    pub geometry: Geometry,
    /// Current over flux linkage.
    pub linkage: Linkage,
    /// The shells of its iron, where eddy currents are counted.
    pub shells: Option<Shells>,
    /// Winding resistance [Ω] from wire and mean turn; None where either is not known.
    pub resistance: Option<f64>,
    /// What its material loses, where that is told.
    pub losses: Losses,
    /// Skin and proximity effect of its copper, where they are counted.
    pub inside: Option<Inside>,
    /// What somebody should know, geometry's remarks included.
    pub remarks: Vec<Remark>,
}

/// Skin and proximity effect of a winding.
#[derive(Clone, Debug)]
pub struct Inside {
    /// The law: impedance over the resistance to direct current.
    pub impedance: Impedance,
    /// What the equations have in its place.
    pub ladder: Ladder,
    /// Inductance of the field inside the conductors at direct current [H], beside that of the core's flux.
    pub inductance: f64,
}

/// The figures of one coil over its current, for tables and JSON. SI units.
#[derive(Clone, Debug, PartialEq)]
pub struct Figures {
    /// Incremental inductance at zero [H].
    pub inductance_at_zero: f64,
    /// Current at 70 % of it [A], where there is one.
    pub current_at_70_percent: Option<f64>,
    /// Energy at the operating current [J], where one is known.
    pub stored_energy: Option<f64>,
    /// Flux density in the smallest section at the operating current [T].
    pub peak_flux_density: Option<f64>,
    /// Flux linkage, inductance and flux density over current.
    pub curve: Vec<CurvePoint>,
}

impl Core {
    /// The core's path with the values in force, its material at a `temperature` [K].
    ///
    /// # Errors
    /// A shape, material or winding that cannot be; what reading can tell beforehand it has refused already.
    pub fn path(
        &self,
        values: &Values,
        winding: Option<&WindingPlan>,
        temperature: f64,
    ) -> Result<(Path, Geometry), Fault> {
        let magnetized = match &self.material {
            Some(filling) => filling.magnetization.derive(values, temperature)?,
            None => Magnetized {
                curve: Arc::new(Linear::AIR),
                remarks: Vec::new(),
            },
        };
        let around = Around {
            winding,
            permeability: magnetized.curve.flux_density(0.0).1 / MU0,
        };
        let mut geometry = sound(self.shape.derive(values, &around)?)?;
        geometry.remarks.extend(magnetized.remarks);
        Ok((Path::new(&geometry, magnetized.curve), geometry))
    }

    /// What its material loses; nothing is known of a core without one.
    ///
    /// # Errors
    /// A value that a study set out of its range.
    pub fn losses(&self, values: &Values) -> Result<Losses, Fault> {
        match &self.material {
            Some(filling) => filling.losses.derive(values),
            None => Ok(Losses::default()),
        }
    }

    /// The shells of its path's iron with the values in force; None where eddy currents are not counted.
    ///
    /// # Errors
    /// A value that a study set out of its range.
    pub fn shells(&self, values: &Values, path: &Path) -> Result<Option<Shells>, Fault> {
        let Some((eddy, resistivity)) = self.eddy.zip(self.losses(values)?.resistivity) else {
            return Ok(None);
        };
        let section = match eddy.lamination.map(|thickness| values[thickness]) {
            None => Section::Round,
            Some(thickness) if thickness > 0.0 => Section::Sheets(thickness),
            Some(_) => {
                return Err(Fault {
                    word: "out-of-range",
                    key: "lamination",
                    text: "lamination must be above zero".into(),
                    help: "lamination: 0.5 mm",
                });
            }
        };
        // An open core's path counts a section of its own; currents in a bar run round the bar's.
        let resistivity = match section {
            Section::Round => resistivity * path.area() / path.section(),
            Section::Sheets(_) => resistivity,
        };
        let shells = Shells::new(section, path.iron(), path.area(), resistivity);
        Ok(Some(shells))
    }

    /// The core with one winding on it, core and copper at a `temperature` [K].
    ///
    /// # Errors
    /// As [`Core::path`].
    pub fn wound(
        &self,
        values: &Values,
        winding: &WindingPlan,
        temperature: f64,
    ) -> Result<Wound, Fault> {
        let (path, geometry) = self.path(values, Some(winding), temperature)?;
        let resistance = geometry
            .mean_turn
            .and_then(|turn| winding.resistance(turn, temperature));
        let remarks = geometry.remarks.clone();
        let shells = self.shells(values, &path)?;
        Ok(Wound {
            geometry,
            linkage: Linkage::new(path, winding.turns as f64),
            shells,
            resistance,
            losses: self.losses(values)?,
            inside: None,
            remarks,
        })
    }
}

/// Refuses what no core can be: a study may set values that the reading of the netlist never saw.
fn sound(geometry: Geometry) -> Result<Geometry, Fault> {
    let lengths = geometry.iron >= 0.0 && geometry.air >= 0.0 && geometry.iron + geometry.air > 0.0;
    let areas = geometry.area > 0.0 && geometry.minimum_area > 0.0;
    let finite = (geometry.iron + geometry.air + geometry.area).is_finite();
    if lengths && areas && finite {
        return Ok(geometry);
    }
    Err(Fault {
        word: "out-of-range",
        key: "shape",
        text: "these dimensions make no core: a length or an area comes out as zero or less".into(),
        help: "dimensions are above zero, a gap is zero or more",
    })
}

impl Wound {
    /// Counts skin and proximity effect of its copper, whose `resistance` [Ω] to direct current is known.
    ///
    /// The flux of a core does not pass through the copper: what the ladder holds comes on top of it. The inductance of a
    /// coil in air is that of its whole field, so what the ladder holds of it is taken out of the flux.
    ///
    /// # Errors
    /// A coil in air so short and thick that the field of long layers would hold more than half of its inductance.
    pub fn count_inside(
        &mut self,
        arranged: Arranged,
        ladder: &Ladder,
        resistance: f64,
    ) -> Result<(), Fault> {
        let inductance = resistance * ladder.time();
        if self.geometry.iron == 0.0 {
            let turns = self.linkage.turns();
            let left = self.linkage.path().less(inductance / (turns * turns));
            let left = left.filter(|_| inductance < 0.5 * self.linkage.inductance_at_zero());
            self.linkage = Linkage::new(
                left.ok_or(Fault {
                    word: "short-coil",
                    key: "skin_and_proximity",
                    text: "this coil in air is too short and thick for the laws of long layers"
                        .into(),
                    help: "skin_and_proximity: none",
                })?,
                turns,
            );
        }
        self.remarks.extend(arranged.remarks);
        self.inside = Some(Inside {
            impedance: arranged.impedance,
            ladder: ladder.clone(),
            inductance,
        });
        Ok(())
    }

    /// The figures over current; `operating_current` [A] where one is known. The curve has `points` points and
    /// reaches beyond the operating current and the knee.
    pub fn figures(&self, operating_current: Option<f64>, points: usize) -> Figures {
        // The field inside the copper comes on top of the core's flux.
        let inner = self.inside.as_ref().map_or(0.0, |inside| inside.inductance);
        let knee = self.linkage.current_at_70_percent(inner);
        let linkage = operating_current.map(|current| self.linkage.linkage_at(current));
        // Half as far again as what matters; a coil of which nothing is known is shown up to an ampere.
        let reach = 1.5
            * knee
                .into_iter()
                .chain(operating_current.map(f64::abs))
                .fold(0.0, f64::max);
        Figures {
            inductance_at_zero: self.linkage.inductance_at_zero() + inner,
            current_at_70_percent: knee,
            stored_energy: linkage.zip(operating_current).map(|(linkage, current)| {
                self.linkage.energy(linkage) + 0.5 * inner * current * current
            }),
            peak_flux_density: linkage.map(|linkage| self.linkage.peak_flux_density(linkage).abs()),
            curve: self
                .linkage
                .curve(if reach > 0.0 { reach } else { 1.0 }, points)
                .into_iter()
                .map(|point| CurvePoint {
                    flux_linkage: point.flux_linkage + inner * point.current,
                    inductance: point.inductance + inner,
                    ..point
                })
                .collect(),
        }
    }
}
