use super::*;
use crate::dae::Evaluation;
use crate::dae::Pattern;
use crate::elements::stamper::NOWHERE;
use crate::magnetics::eddy::Section;
use crate::magnetics::fringing::RULES;
use crate::magnetics::materials::Smooth;
use crate::magnetics::moving::FringingRule;
use crate::magnetics::{Geometry, MU0};
use std::sync::Arc;

/// A pole of 80 mm² and a shim of 50 µm; fringing by a rule of the table, or none.
fn gap(rule: &str) -> MovingGap {
    let rule = RULES
        .iter()
        .find(|known| known.word == rule)
        .expect("it is in the table");
    MovingGap {
        area: 80e-6,
        gap: 0.5e-3,
        residual: 50e-6,
        leakage: 2e-8,
        fixed: 1e6,
        pole_diameter: 10e-3,
        pole_height: 20e-3,
        rule: FringingRule(rule),
    }
}

/// A leg of relay iron whose flux is x0 - x1 over 100 turns, with a gap x2 where it moves, solid where it conducts.
fn leg(solid: bool, moves: bool) -> Leg {
    with_rule(solid, moves, "none")
}

fn with_rule(solid: bool, moves: bool, rule: &str) -> Leg {
    let geometry = Geometry::closed(0.06, 50e-6).with_gap(0.1e-3, None);
    let path = Path::new(&geometry, Arc::new(Smooth::new(3000.0, 1.5)));
    let shells = solid.then(|| Shells::new(Section::Round, 0.06, 50e-6, 0.12e-6));
    let mut leg = Leg::default();
    leg.derive(path, shells, moves.then(|| gap(rule)));
    let mut unknowns = Vec::new();
    let (mut offered, mut modes, mut guards) = (Vec::new(), 0, 0);
    let mut claims = Claims {
        element: 0,
        terminals: &[],
        probed: false,
        wanted: &[],
        unknowns: &mut unknowns,
        offered: &mut offered,
        modes: &mut modes,
        guards: &mut guards,
    };
    for what in ["one", "other", "gap"] {
        claims.unknown(what, Measure::Number);
    }
    let flux = vec![(Unknown(0), 1.0), (Unknown(1), -1.0)];
    leg.claim(&mut claims, flux, 100.0, moves.then_some(Unknown(2)));
    leg
}

/// A state of saturated outer and hardly magnetized inner iron, gap half a millimetre.
fn state(leg: &Leg) -> Vec<f64> {
    let mut x = vec![7e-3, 1e-3, 0.5e-3];
    let shares = [0.9, 0.7, 0.3, 0.05];
    x.extend(
        shares
            .iter()
            .take(leg.inner.len())
            .map(|share| share * 60e-6),
    );
    x
}

/// The same with one unknown moved by a share of itself; the move.
fn moved(x: &[f64], k: usize, by: f64) -> (Vec<f64>, f64) {
    let mut other = x.to_vec();
    other[k] *= 1.0 + by;
    let step = other[k] - x[k];
    (other, step)
}

/// Central difference of a value over an unknown.
fn slope(x: &[f64], k: usize, value: impl Fn(&[f64]) -> f64) -> f64 {
    let ((more, up), (less, down)) = (moved(x, k, 1e-6), moved(x, k, -1e-6));
    (value(&more) - value(&less)) / (up - down)
}

/// All slopes of what hangs on the flux.
fn slopes(leg: &Leg, of: &OfFlux, size: usize) -> Vec<f64> {
    let mut all = vec![0.0; size];
    for &(unknown, factor) in leg.terms() {
        all[unknown.0 as usize] += of.by_flux * factor / 100.0;
    }
    for &(unknown, slope) in of.others() {
        all[unknown.0 as usize] += slope;
    }
    all
}

fn close(a: f64, b: f64, scale: f64) -> bool {
    (a - b).abs() < 1e-7 * (a.abs() + b.abs()) + scale
}

#[test]
fn force_and_pull_have_the_slopes_that_they_tell() {
    let rules = ["none", "mclyman", "muehlethaler"];
    let cases = [(false, false), (true, false), (false, true), (true, true)];
    for ((solid, moves), rule) in cases
        .iter()
        .flat_map(|case| rules.map(|rule| (*case, rule)))
    {
        let leg = with_rule(solid, moves, rule);
        let x = state(&leg);
        let laws: [fn(&Leg, &[f64]) -> OfFlux; 2] = [Leg::force, Leg::pull];
        for law in laws {
            let told = slopes(&leg, &law(&leg, &x), x.len());
            for (k, told) in told.into_iter().enumerate() {
                let found = slope(&x, k, |x| law(&leg, x).value);
                // The reluctance's slope is good to about 1e-9 itself, which a difference enlarges.
                let noise = 1e-6 + if k == 2 { 1e-5 * told.abs() } else { 0.0 };
                assert!(close(told, found, noise), "{k}: {told} {found}");
            }
        }
    }
}

#[test]
fn the_rows_of_the_shells_have_the_slopes_that_they_stamp() {
    let leg = leg(true, true);
    let x = state(&leg);
    let mut positions = Vec::new();
    leg.stamp(&x, &mut Stamper::recording(&mut positions));
    let inside: Vec<(usize, usize)> = positions
        .iter()
        .map(|(row, column)| (row.0 as usize, column.0 as usize))
        .collect();
    let pattern = Pattern::from_positions(x.len(), &inside);
    let slots: Vec<u32> = inside
        .iter()
        .map(|&(row, column)| {
            pattern
                .slot(row, column)
                .map_or(NOWHERE, |slot| slot as u32)
        })
        .collect();
    let evaluate = |x: &[f64]| {
        let mut out = Evaluation {
            f: vec![0.0; x.len()],
            q: vec![0.0; x.len()],
            df: vec![0.0; pattern.len()],
            dq: vec![0.0; pattern.len()],
        };
        leg.stamp(x, &mut Stamper::filling(&mut out, &slots, true));
        out
    };
    let here = evaluate(&x);
    for row in 3..x.len() {
        for column in 0..x.len() {
            let told = |slopes: &[f64]| pattern.slot(row, column).map_or(0.0, |slot| slopes[slot]);
            let f = slope(&x, column, |x| evaluate(x).f[row]);
            let q = slope(&x, column, |x| evaluate(x).q[row]);
            assert!(close(told(&here.df), f, 1e-3), "{row} {column}: {f}");
            assert!(close(told(&here.dq), q, 1e-6), "{row} {column}: {q}");
        }
    }
}

#[test]
fn pull_is_the_fall_of_the_energy_as_the_gap_closes_at_constant_flux() {
    for solid in [false, true] {
        let leg = leg(solid, true);
        let x = state(&leg);
        let fall = slope(&x, 2, |x| leg.stored(x));
        assert!((leg.pull(&x).value / fall - 1.0).abs() < 1e-8, "{fall}");
        // Leakage beside the gap takes its share of the flux from the pole.
        let across = MU0 * 80e-6 / 0.55e-3;
        let through = 60e-6 * across / (across + 2e-8);
        let maxwell = through * through / (2.0 * MU0 * 80e-6);
        assert!((leg.pull(&x).value / maxwell - 1.0).abs() < 1e-8);
    }
}

#[test]
fn energy_is_what_the_force_puts_in_less_what_the_sheets_lose() {
    // dW = F dflux - Σ (fall of force between shells) d(flux within): what is left over between two shells is lost.
    let leg = leg(true, true);
    let x = state(&leg);
    let sheets = leg.shells.expect("it is solid").sheets;
    let by = |k: usize| slope(&x, k, |x| leg.stored(x));
    assert!(close(by(0), leg.force(&x).value / 100.0, 1e-9));
    for k in 0..leg.inner.len() {
        let fall = leg.drop(k + 1, &x).0 - leg.drop(k, &x).0;
        assert!(close(by(3 + k), fall, 1e-6), "{k}: {} {fall}", by(3 + k));
    }
    let lost: f64 = (0..leg.inner.len())
        .map(|k| (leg.drop(k, &x).0 - leg.drop(k + 1, &x).0).powi(2) / sheets[k])
        .sum();
    assert!((leg.loss(&x) / lost - 1.0).abs() < 1e-12 && lost > 0.0);
}
