//! Leakage of windings on one core: the flux linkage of winding j is N_j flux + Σ S_jk i_k, S being what is found here.
//!
//! All is reckoned per turn squared: permeances [H]. Between two windings whose ampere-turns cancel, the leakage field's
//! permeance is l_jk = s_jj + s_kk - 2 s_jk, what a measurement with one of them shorted tells. That leaves open how much of
//! the field the magnetizing flux is thought to share; here the windings' leakage fields couple no two of them on average,
//! which for two windings is the usual half of the leakage on each side.

use super::MU0;
use nalgebra::{DMatrix, DVector};
use std::f64::consts::PI;

/// Share of the largest eigenvalue by which rounding may put the least below zero.
const ROUNDING: f64 = 1e-9;

/// Why no leakage field can be like this.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Impossible;

/// Permeances from `l` between each two windings (zero on the diagonal), magnetizing flux aside.
///
/// # Errors
/// Where some ampere-turns that sum to zero would take energy from the field.
pub fn from_pairs(l: &DMatrix<f64>) -> Result<DMatrix<f64>, Impossible> {
    let n = l.nrows();
    let count = n as f64;
    // About their mean: s = -J l J/2 with J = 1 - 1/n, as points are found from the squares of their distances.
    let centre = DMatrix::identity(n, n) - DMatrix::from_element(n, n, 1.0 / count);
    let about = -0.5 * (&centre * l * &centre);
    positive(&about)?;
    // Its rows sum to zero; what couples the windings on average is taken out.
    let mean = about.trace() / (count * (count - 1.0));
    Ok(about.add_scalar(mean))
}

/// Permeances from the inductance of each first winding of a pair with the second one shorted, per turn squared of the
/// first, over a core of permeance `shared` [H]: exact in the straight part of the core's curve.
///
/// # Errors
/// As [`from_pairs`].
pub fn from_short_circuits(
    shared: f64,
    wanted: &[(usize, usize, f64)],
    windings: usize,
) -> Result<DMatrix<f64>, Impossible> {
    let mut l = DMatrix::zeros(windings, windings);
    for &(j, k, value) in wanted {
        (l[(j, k)], l[(k, j)]) = (value, value);
    }
    for _ in 0..200 {
        let s = from_pairs(&l)?;
        let mut worst = 0.0_f64;
        for &(j, k, value) in wanted.iter().filter(|pair| pair.2 > 0.0) {
            // (L1 L2 - M²)/L2 without the difference of what is nearly equal.
            let (first, second, mutual) = (s[(j, j)], s[(k, k)], s[(j, k)]);
            let pair = first + second - 2.0 * mutual;
            let reached = (shared * pair + first * second - mutual * mutual) / (shared + second);
            let ratio = value / reached;
            if !(ratio > 0.0 && ratio.is_finite()) {
                return Err(Impossible);
            }
            worst = worst.max((ratio - 1.0).abs());
            l[(j, k)] *= ratio;
            l[(k, j)] = l[(j, k)];
        }
        if worst < 1e-12 {
            return Ok(s);
        }
    }
    Err(Impossible)
}

/// Permeances that give windings over a core of permeance `shared` [H] these coefficients of coupling in the straight
/// part of its curve, all with the same self-inductance per turn squared.
///
/// # Errors
/// Coefficients that no windings can have.
pub fn from_coefficients(
    shared: f64,
    coefficients: &DMatrix<f64>,
) -> Result<DMatrix<f64>, Impossible> {
    let n = coefficients.nrows();
    positive(coefficients)?;
    let mean = (coefficients.sum() - n as f64) / (n * (n - 1)) as f64;
    if mean <= 0.0 {
        return Err(Impossible);
    }
    let among = |whole: f64| (whole * coefficients).add_scalar(-shared);
    let average = among(shared / mean);
    if positive(&average).is_ok() {
        return Ok(average);
    }
    // The least self-inductance at which the core's flux leaves a field behind that stores energy.
    let ones = DVector::from_element(n, 1.0);
    let solved = coefficients.clone().lu().solve(&ones).ok_or(Impossible)?;
    let least = among(shared * ones.dot(&solved));
    positive(&least)?;
    Ok(least)
}

/// One cylinder of winding among others about the same axis, listed from the inside out.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Layer {
    /// Radial build [m].
    pub build: f64,
    /// Insulation between it and the one before [m].
    pub spacing: f64,
}

/// Permeance [H] between each two of concentric windings of an axial `breadth` and a `mean_turn` [m]:
/// mu0 · mean turn/breadth · (build_j/3 + what lies between + build_k/3), the breadth lengthened by Rogowski's factor,
/// 1 - (1 - exp(-u))/u with u = pi breadth/whole build (Kulkarni and Khaparde, *Transformer Engineering*, chapter 3, from
/// memory). It takes the field to run along the axis and the ampere-turns to be spread evenly.
pub fn concentric(layers: &[Layer], breadth: f64, mean_turn: f64) -> DMatrix<f64> {
    let n = layers.len();
    let insulation: f64 = layers.iter().skip(1).map(|layer| layer.spacing).sum();
    let whole: f64 = insulation + layers.iter().map(|layer| layer.build).sum::<f64>();
    let slenderness = PI * breadth / whole;
    let rogowski = 1.0 - (1.0 - (-slenderness).exp()) / slenderness;
    let per_metre = MU0 * mean_turn / breadth * rogowski;
    let mut l = DMatrix::zeros(n, n);
    for j in 0..n {
        let mut between = 0.0;
        for k in j + 1..n {
            between += layers[k].spacing;
            l[(j, k)] = per_metre * (layers[j].build / 3.0 + between + layers[k].build / 3.0);
            l[(k, j)] = l[(j, k)];
            between += layers[k].build;
        }
    }
    l
}

/// Refuses a matrix with an eigenvalue below zero.
fn positive(matrix: &DMatrix<f64>) -> Result<(), Impossible> {
    if !matrix.iter().all(|value| value.is_finite()) {
        return Err(Impossible);
    }
    let values = matrix.clone().symmetric_eigenvalues();
    if values.min() < -ROUNDING * values.max().max(f64::MIN_POSITIVE) {
        return Err(Impossible);
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn two_windings_share_the_leakage_evenly() {
        let l = DMatrix::from_row_slice(2, 2, &[0.0, 3.0, 3.0, 0.0]);
        let s = from_pairs(&l).unwrap();
        assert!((s - DMatrix::from_diagonal_element(2, 2, 1.5)).norm() < 1e-14);
    }

    #[test]
    fn a_shorted_winding_leaves_the_leakage_told() {
        let wanted = [(0, 1, 0.03), (0, 2, 0.05), (1, 2, 0.04)];
        let s = from_short_circuits(1.0, &wanted, 3).unwrap();
        for (j, k, value) in wanted {
            let full = |a: usize, b: usize| 1.0 + s[(a, b)];
            let left = full(j, j) - full(j, k).powi(2) / full(k, k);
            assert!((left / value - 1.0).abs() < 1e-12);
        }
        // Far apart though both are close to a third: no field is like this.
        let wanted = [(0, 1, 0.001), (0, 2, 0.001), (1, 2, 0.05)];
        assert_eq!(from_short_circuits(1.0, &wanted, 3), Err(Impossible));
        // Two windings may be as far apart as they like: x + x/(1 + x) = 50.
        let apart = from_short_circuits(1.0, &[(0, 1, 50.0)], 2).unwrap()[(0, 0)];
        assert!((apart + apart / (1.0 + apart) - 50.0).abs() < 1e-9);
    }

    #[test]
    fn a_leakage_may_be_any_small_share_of_the_whole() {
        for value in [0.0, 1e-12, 1e-9, 1e-6, 1e-3] {
            let s = from_short_circuits(1.0, &[(0, 1, value)], 2).unwrap();
            // x + x/(1 + x) = value.
            assert!((s[(0, 0)] * (1.0 + 1.0 / (1.0 + s[(0, 0)])) - value).abs() <= 1e-11 * value);
        }
    }

    #[test]
    fn coefficients_come_out_as_told() {
        let k = DMatrix::from_row_slice(3, 3, &[1.0, 0.99, 0.5, 0.99, 1.0, 0.5, 0.5, 0.5, 1.0]);
        let full = from_coefficients(2.0, &k).unwrap().add_scalar(2.0);
        for a in 0..3 {
            for b in 0..3 {
                let reached = full[(a, b)] / (full[(a, a)] * full[(b, b)]).sqrt();
                assert!((reached - k[(a, b)]).abs() < 1e-12);
            }
        }
        let tight = DMatrix::from_element(2, 2, 1.0);
        assert!(from_coefficients(2.0, &tight).unwrap().norm() < 1e-12);
    }

    /// Three windings of equal build: the field's energy, from the ampere-turns that have been passed at each radius.
    #[test]
    fn concentric_windings_store_the_energy_of_their_field() {
        let layer = |spacing: f64| Layer {
            build: 2e-3,
            spacing,
        };
        let layers = [layer(0.0), layer(0.5e-3), layer(1e-3)];
        let (breadth, turn) = (20e-3, 60e-3);
        let l = concentric(&layers, breadth, turn);
        let s = from_pairs(&l).unwrap();
        let currents = [3.0, -5.0, 2.0];
        let vector = DVector::from_row_slice(&currents);
        let energy = 0.5 * vector.dot(&(&s * &vector));
        let u = PI * breadth / 7.5e-3;
        let per_metre = MU0 * turn / breadth * (1.0 - (1.0 - (-u).exp()) / u);
        let (mut passed, mut integral) = (0.0_f64, 0.0);
        for (layer, current) in layers.iter().zip(currents) {
            integral += passed * passed * layer.spacing;
            let after = passed + current;
            integral += layer.build * (passed * passed + passed * after + after * after) / 3.0;
            passed = after;
        }
        assert!((energy / (0.5 * per_metre * integral) - 1.0).abs() < 1e-12);
    }
}
