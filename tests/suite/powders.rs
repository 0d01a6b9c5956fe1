//! Guards: a powder's permeability rolls off by its law, and its flux is the integral of it.

use crate::coils::Coil;
use crate::record::{Bound, check};
use std::f64::consts::PI;

const MU0: f64 = 4e-7 * PI;

fn ring(roll_off: &str) -> coilbreak::magnetics::Linkage {
    let material = format!("{{initial_permeability: 60, roll_off: {roll_off}}}");
    let core = "shape: effective, length: 100 mm, area: 50 mm²";
    Coil::on(material, core, 100).wound().linkage
}

#[test]
fn inductance_rolls_off_by_the_fit() {
    let linkage = ring("{half_field: 8 kA/m, exponent: 1.6}");
    let source = "mu = 1 + (mu_i - 1)/(1 + (H/Hh)^n), the form in which powders are fitted (common practice)";
    for step in 0..60 {
        let current = 0.5 * f64::from(step);
        let field: f64 = 100.0 * current / 0.1;
        let permeability = 1.0 + 59.0 / (1.0 + (field / 8e3).powf(1.6));
        let expected = 1e4 * MU0 * permeability * 50e-6 / 0.1;
        let reached = linkage.point(current).inductance;
        check(
            "inductance of a powder",
            source,
            reached,
            expected,
            Bound::Relative(1e-11),
        );
    }
    // 70 % are left where (H/Hh)^n is such that 1 + 59/(1 + y) = 42.
    let field = 8e3 * (59.0f64 / 41.0 - 1.0).powf(1.0 / 1.6);
    let reached = linkage.current_at_70_percent(0.0).expect("it rolls off");
    check(
        "inductance of a powder",
        source,
        reached,
        field * 1e-3,
        Bound::Relative(1e-9),
    );
}

#[test]
fn flux_of_a_square_law_is_an_arc_tangent() {
    let linkage = ring("{half_field: 8 kA/m, exponent: 2}");
    let source = "integral of 1/(1 + x²), closed form";
    for step in 1..60 {
        let current = 0.5 * f64::from(step);
        let field: f64 = 1e3 * current;
        let density = MU0 * field + MU0 * 59.0 * 8e3 * (field / 8e3).atan();
        let reached = linkage.linkage_at(current);
        check(
            "flux of a powder",
            source,
            reached,
            100.0 * 50e-6 * density,
            Bound::Relative(1e-12),
        );
        // The field's energy over the volume.
        let energy = 0.5 * MU0 * (field * field + 59.0 * 64e6 * (field / 8e3).powi(2).ln_1p());
        check(
            "energy of a powder",
            source,
            linkage.energy(reached),
            5e-6 * energy,
            Bound::Relative(1e-11),
        );
    }
}
