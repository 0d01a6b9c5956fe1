//! Readings of a march, taken from the dense output as an observer sees it.

use coilbreak::dae::Step;

/// Points and weights of Gauss's rule with five points on (0, 1): exact to degree 9. Abramowitz & Stegun,
/// table 25.4 (from memory).
const GAUSS: [(f64, f64); 5] = [
    (0.046910077030668, 0.118463442528095),
    (0.230765344947158, 0.239314335249683),
    (0.5, 0.284444444444444),
    (0.769234655052842, 0.239314335249683),
    (0.953089922969332, 0.118463442528095),
];

/// Adds the integral of `law` over the step to `sums`.
pub fn integrate<const N: usize>(
    step: &Step<'_>,
    x: &mut [f64],
    sums: &mut [f64; N],
    law: impl Fn(f64, &[f64]) -> [f64; N],
) {
    let length = step.to - step.from;
    for (share, weight) in GAUSS {
        step.dense.at(share, x);
        for (sum, power) in sums.iter_mut().zip(law(step.from + share * length, x)) {
            *sum += weight * length * power;
        }
    }
}

/// Extremes of one unknown within a step, with the shares at which they fall: ends and inner turning points.
pub fn extremes(step: &Step<'_>, which: usize) -> [(f64, f64); 2] {
    let n = step.x0.len();
    let mut found = [(step.x0[which], 0.0), (step.x0[which], 0.0)];
    let mut take = |value: f64, share: f64| {
        if value < found[0].0 {
            found[0] = (value, share);
        }
        if value > found[1].0 {
            found[1] = (value, share);
        }
    };
    take(step.x1[which], 1.0);
    let slope = |share: f64| step.dense.one(share, which, n).1;
    for cell in 0..8 {
        let (mut low, mut high) = (f64::from(cell) / 8.0, f64::from(cell + 1) / 8.0);
        let sign = slope(low);
        if sign * slope(high) >= 0.0 {
            continue;
        }
        for _ in 0..50 {
            let middle = 0.5 * (low + high);
            if sign * slope(middle) > 0.0 {
                low = middle
            } else {
                high = middle
            }
        }
        take(step.dense.one(low, which, n).0, low);
    }
    found
}

/// Share of the step at which one unknown passes `level`, given that its ends lie on either side.
pub fn passes(step: &Step<'_>, which: usize, level: f64) -> f64 {
    let n = step.x0.len();
    let below = step.x0[which] < level;
    let (mut low, mut high) = (0.0, 1.0);
    for _ in 0..60 {
        let middle = 0.5 * (low + high);
        if (step.dense.one(middle, which, n).0 < level) == below {
            low = middle
        } else {
            high = middle
        }
    }
    0.5 * (low + high)
}
