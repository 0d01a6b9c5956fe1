//! What every magnetization curve must keep, for the tests of each.

use super::Magnetization;
use crate::magnetics::MU0;

/// Oddness, the vacuum's slope as the least, slopes that are derivatives, inverses and energies that fit together,
/// and bends between which dH/dB only rises or only falls, for |B| up to `most` [T].
pub fn hold(curve: &dyn Magnetization, most: f64) {
    let mut bends = curve.bends();
    let mut last: Option<(f64, f64, f64)> = None;
    let mut rising = None;
    let steps = 4000;
    for step in 0..=steps {
        let b = most * f64::from(step) / f64::from(steps);
        let (h, slope) = curve.field(b);
        assert!(
            curve.field(-b).0 == -h && curve.field(-b).1 == slope,
            "odd at {b} T"
        );
        assert!(
            slope <= (1.0 + 1e-9) / MU0 && slope > 0.0,
            "slope {slope} at {b} T"
        );
        let (back, permeability) = curve.flux_density(h);
        assert!(
            (back - b).abs() <= 4e-15 * b + 1e-300,
            "inverse at {b} T: {back}"
        );
        assert!((permeability * slope - 1.0).abs() < 1e-6, "slopes at {b} T");
        let energy = curve.energy_density(b);
        assert_eq!(energy, curve.energy_density(-b));
        if let Some((before, h_before, energy_before)) = last {
            // Mean value: H rises, so the energy of a step lies between its end fields.
            let db = b - before;
            let gained = energy - energy_before;
            let rounding = 1e-13 * energy;
            assert!(
                gained >= h_before * db - rounding && gained <= h * db + rounding,
                "energy at {b} T"
            );
            let passed = bends.first().is_some_and(|&bend| bend < b);
            bends.retain(|&bend| bend >= b);
            if passed {
                rising = None;
            } else {
                let (old, change) = (curve.field(before).1, slope - curve.field(before).1);
                if change.abs() > 1e-7 * old {
                    assert!(
                        *rising.get_or_insert(change > 0.0) == (change > 0.0),
                        "a bend not told of at {b} T"
                    );
                }
            }
        }
        last = Some((b, h, energy));
    }
}
