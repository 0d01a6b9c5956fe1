//! Legs that meet in magnetic nodes: which closed ways the flux has, and the flux that given ampere-turns drive.
//!
//! Flux has no source, so the legs' fluxes are sums of the fluxes of closed loops: one loop for each leg that a spanning
//! tree leaves over, through that leg and back along the tree. Loops take the place of the nodes' magnetic potentials,
//! and no law is left over between them. In a loop the legs' magnetomotive forces and the ampere-turns on them sum to
//! zero; this is where the field's energy less the ampere-turns' work is smallest, which has one bottom.

use super::materials::Magnetization;
use super::path::Path;
use nalgebra::{DMatrix, DVector};
use std::borrow::Borrow;
use std::sync::Arc;

/// The loops of legs.
#[derive(Clone, Debug)]
pub struct Network {
    /// Of each leg, the loops through it, 1 along the leg's direction and -1 against it.
    forms: Vec<Vec<(usize, f64)>>,
    loops: usize,
}

/// Newton steps at most; each halves the distance at worst.
const MOST_STEPS: usize = 200;

impl Network {
    /// One leg that closes upon itself.
    pub fn ring() -> Self {
        Network {
            forms: vec![vec![(0, 1.0)]],
            loops: 1,
        }
    }

    /// The loops of legs between numbered nodes; a leg of no loop can carry no flux.
    pub fn new(legs: &[(usize, usize)]) -> Self {
        Self::with_last(legs, usize::MAX)
    }

    /// The same with a loop of its own for the leg `last`, the last loop, unless it is in none.
    fn with_last(legs: &[(usize, usize)], last: usize) -> Self {
        let nodes = legs.iter().map(|&(a, b)| a.max(b) + 1).max().unwrap_or(0);
        // Each node's way to the others of its tree: (neighbour, leg, direction along the leg).
        let mut tree: Vec<Vec<(usize, usize, f64)>> = vec![Vec::new(); nodes];
        let mut forms = vec![Vec::new(); legs.len()];
        let mut order: Vec<usize> = (0..legs.len()).filter(|&leg| leg != last).collect();
        order.extend((last < legs.len()).then_some(last));
        let mut loops = 0;
        for leg in order {
            let (a, b) = legs[leg];
            match way(&tree, b, a) {
                None => {
                    tree[a].push((b, leg, 1.0));
                    tree[b].push((a, leg, -1.0));
                }
                Some(back) => {
                    forms[leg].push((loops, 1.0));
                    for (leg, direction) in back {
                        forms[leg].push((loops, direction));
                    }
                    loops += 1;
                }
            }
        }
        Network { forms, loops }
    }

    /// Number of loops.
    pub fn loops(&self) -> usize {
        self.loops
    }

    /// The loops through a leg with their directions; none where it closes no loop.
    pub fn form(&self, leg: usize) -> &[(usize, f64)] {
        &self.forms[leg]
    }

    /// A leg's flux [Wb] from those of the loops.
    pub fn flux(&self, leg: usize, loops: &[f64]) -> f64 {
        self.forms[leg].iter().map(|&(k, s)| s * loops[k]).sum()
    }

    /// Fluxes of the loops [Wb] under ampere-turns [A] on each leg.
    pub fn loop_fluxes<P: Borrow<Path>>(&self, paths: &[P], ampere_turns: &[f64]) -> Vec<f64> {
        self.settle(paths, ampere_turns, None)
    }

    /// Reluctances of the loops [1/H] about given fluxes of the loops: slopes of their forces.
    pub fn reluctances<P: Borrow<Path>>(&self, paths: &[P], loops: &[f64]) -> DMatrix<f64> {
        let mut matrix = DMatrix::zeros(self.loops, self.loops);
        for (leg, path) in paths.iter().enumerate() {
            let slope = path.borrow().magnetomotive(self.flux(leg, loops)).1;
            for &(j, s) in &self.forms[leg] {
                for &(k, t) in &self.forms[leg] {
                    matrix[(j, k)] += s * t * slope;
                }
            }
        }
        matrix
    }

    /// Of each loop, forces of the legs less the ampere-turns on them [A].
    fn excess<P: Borrow<Path>>(
        &self,
        paths: &[P],
        ampere_turns: &[f64],
        loops: &[f64],
    ) -> DVector<f64> {
        let mut sums = DVector::zeros(self.loops);
        for (leg, path) in paths.iter().enumerate() {
            let force = path.borrow().magnetomotive(self.flux(leg, loops)).0 - ampere_turns[leg];
            for &(k, s) in &self.forms[leg] {
                sums[k] += s * force;
            }
        }
        sums
    }

    /// Newton's iteration to the least energy, from rest; where the last loop's flux is given, over the others alone.
    fn settle<P: Borrow<Path>>(
        &self,
        paths: &[P],
        ampere_turns: &[f64],
        last: Option<f64>,
    ) -> Vec<f64> {
        let mut x = vec![0.0; self.loops];
        if let (Some(given), Some(flux)) = (last, x.last_mut()) {
            *flux = given;
        }
        let free = self.loops - usize::from(last.is_some());
        if free == 0 {
            return x;
        }
        let mut excess = self.excess(paths, ampere_turns, &x);
        for _ in 0..MOST_STEPS {
            let matrix = self
                .reluctances(paths, &x)
                .view((0, 0), (free, free))
                .into_owned();
            let Some(step) = matrix.lu().solve(&excess.rows(0, free).into_owned()) else {
                break;
            };
            // The energy's slope along the step falls from its largest value to zero where the energy is least.
            let fall = step.dot(&excess.rows(0, free));
            let mut share = 1.0;
            let (mut next, mut there);
            loop {
                next = x.clone();
                for k in 0..free {
                    next[k] -= share * step[k];
                }
                there = self.excess(paths, ampere_turns, &next);
                let beyond = step.dot(&there.rows(0, free));
                if beyond > -0.5 * fall || share < 1e-9 {
                    break;
                }
                share *= 0.5;
            }
            let moved = x
                .iter()
                .zip(&next)
                .any(|(a, b)| (a - b).abs() > 1e-14 * a.abs().max(b.abs()));
            (x, excess) = (next, there);
            if !moved {
                break;
            }
        }
        x
    }
}

/// The legs from node `from` to node `to` along a tree, with the direction in which each is passed.
fn way(tree: &[Vec<(usize, usize, f64)>], from: usize, to: usize) -> Option<Vec<(usize, f64)>> {
    let mut came: Vec<Option<(usize, usize, f64)>> = vec![None; tree.len()];
    let mut open = vec![from];
    while let Some(node) = open.pop() {
        if node == to {
            let mut legs = Vec::new();
            let mut at = to;
            while at != from {
                let (before, leg, direction) =
                    came[at].expect("the search came here from somewhere");
                legs.push((leg, direction));
                at = before;
            }
            return Some(legs);
        }
        for &(next, leg, direction) in &tree[node] {
            if next != from && came[next].is_none() {
                came[next] = Some((node, leg, direction));
                open.push(next);
            }
        }
    }
    None
}

/// The whole network as one leg sees it, all ampere-turns on that leg: a law of magnetization for one metre of the
/// leg's area, so that a winding's figures are reckoned as those of any coil.
#[derive(Debug)]
pub struct Seen {
    network: Network,
    paths: Vec<Path>,
    leg: usize,
}

impl Seen {
    /// Legs between numbered nodes as `leg` sees them; None where it closes no loop.
    pub fn new(legs: &[(usize, usize)], paths: &[Path], leg: usize) -> Option<Self> {
        let network = Network::with_last(legs, leg);
        (!network.form(leg).is_empty()).then(|| Seen {
            network,
            paths: paths.to_vec(),
            leg,
        })
    }

    /// The path that stands for it, of one metre.
    pub fn path(self) -> Path {
        let geometry = super::geometry::Geometry::closed(1.0, self.paths[self.leg].area());
        Path::new(&geometry, Arc::new(self))
    }

    fn loops_at(&self, flux_density: f64) -> Vec<f64> {
        let flux = flux_density * self.paths[self.leg].area();
        let none = vec![0.0; self.paths.len()];
        self.network.settle(&self.paths, &none, Some(flux))
    }
}

impl Magnetization for Seen {
    fn flux_density(&self, field: f64) -> (f64, f64) {
        let mut ampere_turns = vec![0.0; self.paths.len()];
        ampere_turns[self.leg] = field;
        let loops = self.network.loop_fluxes(&self.paths, &ampere_turns);
        let b = self.network.flux(self.leg, &loops) / self.paths[self.leg].area();
        (b, 1.0 / self.field(b).1)
    }

    fn field(&self, flux_density: f64) -> (f64, f64) {
        let loops = self.loops_at(flux_density.abs());
        let none = vec![0.0; self.paths.len()];
        let last = self.network.loops - 1;
        let force = self.network.excess(&self.paths, &none, &loops)[last];
        let matrix = self.network.reluctances(&self.paths, &loops);
        // What is left of the last loop's reluctance when the others follow.
        let slope = match matrix.try_inverse() {
            Some(inverse) => 1.0 / inverse[(last, last)],
            None => f64::INFINITY,
        };
        (
            force.copysign(flux_density),
            slope * self.paths[self.leg].area(),
        )
    }

    fn energy_density(&self, flux_density: f64) -> f64 {
        let loops = self.loops_at(flux_density);
        let energy: f64 = (0..self.paths.len())
            .map(|leg| self.paths[leg].energy(self.network.flux(leg, &loops)))
            .sum();
        energy / self.paths[self.leg].area()
    }

    /// Other legs bend the curve where this one does not: places close together, up to where the leg is full.
    fn bends(&self) -> Vec<f64> {
        let ends = self.paths.iter().flat_map(|path| {
            let share = path.area() / self.paths[self.leg].area();
            path.bends().into_iter().map(move |bend| bend * share)
        });
        let end: f64 = ends.sum();
        (1..=40)
            .map(|k| end * f64::from(k) / 40.0)
            .filter(|b| *b > 0.0)
            .collect()
    }

    fn known_to(&self) -> Option<f64> {
        self.paths[self.leg].known_to()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::magnetics::Geometry;
    use crate::magnetics::materials::{Linear, Smooth};

    /// Three legs side by side between two nodes.
    const THREE: [(usize, usize); 3] = [(0, 1), (0, 1), (0, 1)];

    fn paths(material: impl Magnetization + Clone + 'static) -> Vec<Path> {
        [(0.12, 5e-5, 0.0), (0.05, 1e-4, 0.4e-3), (0.12, 6e-5, 0.0)]
            .iter()
            .map(|&(length, area, gap)| {
                let geometry = Geometry::closed(length, area).with_gap(gap, None);
                Path::new(&geometry, Arc::new(material.clone()))
            })
            .collect()
    }

    #[test]
    fn three_legs_have_two_loops_and_no_flux_is_lost() {
        let network = Network::new(&THREE);
        assert_eq!(network.loops(), 2);
        let sum: f64 = (0..3).map(|leg| network.flux(leg, &[0.3, -0.7])).sum();
        assert!(sum.abs() < 1e-15);
    }

    #[test]
    fn a_leg_that_leads_nowhere_has_no_loop() {
        let network = Network::new(&[(0, 1), (1, 0), (1, 2)]);
        assert_eq!(network.loops(), 1);
        assert!(network.form(2).is_empty());
    }

    #[test]
    fn linear_legs_follow_their_reluctances() {
        let paths = paths(Linear::relative(1500.0));
        let r: Vec<f64> = paths.iter().map(|path| path.magnetomotive(0.0).1).collect();
        let network = Network::new(&THREE);
        let loops = network.loop_fluxes(&paths, &[0.0, 60.0, 0.0]);
        // 60 A in the middle leg against the two others side by side.
        let expected = 60.0 / (r[1] + r[0] * r[2] / (r[0] + r[2]));
        assert!((network.flux(1, &loops) / expected - 1.0).abs() < 1e-13);
        assert!((network.flux(0, &loops) / -expected - r[2] / (r[0] + r[2])).abs() < 1e-13);
    }

    #[test]
    fn saturated_legs_keep_the_law_of_every_loop() {
        let paths = paths(Smooth::new(2500.0, 1.4));
        let network = Network::new(&THREE);
        for scale in [0.1, 10.0, 1e3, 1e5] {
            let forces = [scale, 2.0 * scale, -0.4 * scale];
            let loops = network.loop_fluxes(&paths, &forces);
            let drop =
                |leg: usize| paths[leg].magnetomotive(network.flux(leg, &loops)).0 - forces[leg];
            assert!((drop(0) - drop(1)).abs() < 1e-9 * scale, "at {scale} A");
            assert!((drop(2) - drop(1)).abs() < 1e-9 * scale, "at {scale} A");
        }
    }

    #[test]
    fn what_a_leg_sees_is_the_network_under_its_own_ampere_turns() {
        let paths = paths(Smooth::new(2500.0, 1.4));
        let network = Network::new(&THREE);
        for leg in 0..3 {
            let seen = Seen::new(&THREE, &paths, leg).unwrap().path();
            for force in [1.0, 50.0, 2000.0, -300.0] {
                let mut ampere_turns = [0.0; 3];
                ampere_turns[leg] = force;
                let loops = network.loop_fluxes(&paths, &ampere_turns);
                let flux = network.flux(leg, &loops);
                assert!((seen.magnetomotive(flux).0 / force - 1.0).abs() < 1e-9);
                let (more, less) = (
                    seen.magnetomotive(1.00001 * flux),
                    seen.magnetomotive(0.99999 * flux),
                );
                let slope = (more.0 - less.0) / (0.00002 * flux);
                let told = seen.magnetomotive(flux).1;
                assert!(
                    (told / slope - 1.0).abs() < 1e-6,
                    "{leg} {force} A: {told} {slope}"
                );
                let gained = seen.energy(1.00001 * flux) - seen.energy(0.99999 * flux);
                assert!((gained / (0.00002 * flux * force) - 1.0).abs() < 1e-6);
            }
        }
    }
}
