//! Small systems with known solutions, written by hand for the tests.

use crate::dae::{Cause, Evaluation, Pattern, Point, System};

/// Fills (q, f, dq, df) at (t, x), the last two row by row.
pub trait Law: Fn(f64, &[f64], &mut [f64], &mut [f64], &mut [f64], &mut [f64]) {}
impl<F: Fn(f64, &[f64], &mut [f64], &mut [f64], &mut [f64], &mut [f64])> Law for F {}

/// A system on a full pattern from one closure.
pub struct Written<F> {
    pub size: usize,
    pub pattern: Pattern,
    pub law: F,
    /// Shortens Newton steps, where a law asks for it.
    pub limit: fn(&[f64], &mut [f64]) -> bool,
}

impl<F: Law> Written<F> {
    pub fn new(size: usize, law: F) -> Self {
        let positions: Vec<_> = (0..size * size).map(|k| (k / size, k % size)).collect();
        Written {
            size,
            pattern: Pattern::from_positions(size, &positions),
            law,
            limit: |_, _| false,
        }
    }
}

impl<F: Law> System for Written<F> {
    fn size(&self) -> usize {
        self.size
    }
    fn pattern(&self) -> &Pattern {
        &self.pattern
    }
    fn limit(&self, x: &[f64], dx: &mut [f64]) -> bool {
        (self.limit)(x, dx)
    }
    fn evaluate(&self, at: Point<'_>, slopes: bool, out: &mut Evaluation) {
        let n = self.size;
        let (mut dq, mut df) = (vec![0.0; n * n], vec![0.0; n * n]);
        (self.law)(at.time, at.x, &mut out.q, &mut out.f, &mut dq, &mut df);
        if slopes {
            for row in 0..n {
                for column in 0..n {
                    out.dq[column * n + row] = dq[row * n + column];
                    out.df[column * n + row] = df[row * n + column];
                }
            }
        }
    }
}

/// A smooth problem with its solution on 0 to 1.
pub struct Smooth {
    pub name: &'static str,
    pub system: fn() -> Box<dyn System>,
    /// Name and index of each unknown; index 0 for a differential one.
    pub unknowns: &'static [(&'static str, u32)],
    pub solution: fn(f64) -> Vec<f64>,
}

/// Every problem is made so that its solution is known; all are nonlinear.
pub const SMOOTH: &[Smooth] = &[
    Smooth {
        name: "a turning pair with an algebraic companion",
        system: || Box::new(turning()),
        unknowns: &[("u", 0), ("v", 0), ("w", 1)],
        solution: |t| vec![t.sin(), t.cos(), (-t.sin() * t.cos()).exp()],
    },
    Smooth {
        name: "a charge that is not proportional, driven through an algebraic node",
        system: || Box::new(bent_charge()),
        unknowns: &[("u", 0), ("w", 1)],
        solution: |t| vec![t.sin(), t.sin() + t.cos()],
    },
    Smooth {
        name: "a circle held by a force of index 2",
        system: || Box::new(circle()),
        unknowns: &[("u", 0), ("v", 0), ("force", 2)],
        solution: |t| vec![t.cos(), t.sin(), t.exp()],
    },
    Smooth {
        name: "a stiff node that follows a source",
        system: || Box::new(stiff()),
        unknowns: &[("fast", 1), ("slow", 0)],
        solution: |t| vec![(3.0 * t).cos(), (-t).exp()],
    },
];

/// u' = v w e^(sin t cos t), v' = -u w e^(sin t cos t), 0 = w - e^(-u v).
fn turning() -> impl System {
    Written::new(3, |t, x, q, f, dq, df| {
        let (u, v, w) = (x[0], x[1], x[2]);
        let (drive, e) = ((t.sin() * t.cos()).exp(), (-u * v).exp());
        q.copy_from_slice(&[u, v, 0.0]);
        f.copy_from_slice(&[-v * w * drive, u * w * drive, w - e]);
        dq.copy_from_slice(&[1.0, 0.0, 0.0, 0.0, 1.0, 0.0, 0.0, 0.0, 0.0]);
        df.copy_from_slice(&[
            0.0,
            -w * drive,
            -v * drive,
            w * drive,
            0.0,
            u * drive,
            v * e,
            u * e,
            1.0,
        ]);
    })
}

/// d/dt (u + u^3) = (1 + 3 u^2) (w - u), 0 = w - u - cos t + (u - sin t) u.
fn bent_charge() -> impl System {
    Written::new(2, |t, x, q, f, dq, df| {
        let (u, w) = (x[0], x[1]);
        q.copy_from_slice(&[u + u.powi(3), 0.0]);
        f.copy_from_slice(&[
            -(1.0 + 3.0 * u * u) * (w - u),
            w - u - t.cos() + (u - t.sin()) * u,
        ]);
        dq.copy_from_slice(&[1.0 + 3.0 * u * u, 0.0, 0.0, 0.0]);
        let slope = 1.0 + 3.0 * u * u;
        df.copy_from_slice(&[
            slope - 6.0 * u * (w - u),
            -slope,
            -1.0 + 2.0 * u - t.sin(),
            1.0,
        ]);
    })
}

/// u' = -v + u (z - e^t), v' = u + v (z - e^t) + (z - e^t)^2, 0 = u^2 + v^2 - 1: the force z has index 2.
fn circle() -> impl System {
    Written::new(3, |t, x, q, f, dq, df| {
        let (u, v, z) = (x[0], x[1], x[2] - t.exp());
        q.copy_from_slice(&[u, v, 0.0]);
        f.copy_from_slice(&[v - u * z, -u - v * z - z * z, u * u + v * v - 1.0]);
        dq.copy_from_slice(&[1.0, 0.0, 0.0, 0.0, 1.0, 0.0, 0.0, 0.0, 0.0]);
        df.copy_from_slice(&[-z, 1.0, -u, -1.0, -z, -v - 2.0 * z, 2.0 * u, 2.0 * v, 0.0]);
    })
}

/// 1e-8 fast' = cos 3t - fast + (slow - e^-t) - 3e-8 sin 3t, slow' = -slow - (fast - cos 3t) slow.
fn stiff() -> impl System {
    Written::new(2, |t, x, q, f, dq, df| {
        let (fast, slow) = (x[0], x[1]);
        q.copy_from_slice(&[1e-8 * fast, slow]);
        let drive = (3.0 * t).cos();
        let known = -1e-8 * 3.0 * (3.0 * t).sin();
        f.copy_from_slice(&[
            fast - drive - known - (slow - (-t).exp()),
            slow + (fast - drive) * slow,
        ]);
        dq.copy_from_slice(&[1e-8, 0.0, 0.0, 1.0]);
        df.copy_from_slice(&[1.0, -1.0, slow, 1.0 + fast - drive]);
    })
}

/// 1 F through 1 ohm to a 1 V source that a mode switches off at time 1; a guard at 0.5 V switches it on again.
pub struct Charger {
    pub pattern: Pattern,
}

impl Charger {
    pub fn new() -> Self {
        Charger {
            pattern: Pattern::from_positions(2, &[(0, 0), (0, 1), (1, 0), (1, 1)]),
        }
    }
}

impl System for Charger {
    fn size(&self) -> usize {
        2
    }
    fn pattern(&self) -> &Pattern {
        &self.pattern
    }
    /// x0: capacitor [V], x1: current into it [A]; mode 0: source [V], mode 1: number of events.
    fn evaluate(&self, at: Point<'_>, slopes: bool, out: &mut Evaluation) {
        out.q.copy_from_slice(&[at.x[0], 0.0]);
        out.f
            .copy_from_slice(&[-at.x[1], at.x[1] - (at.mode[0] - at.x[0])]);
        if slopes {
            out.dq.copy_from_slice(&[1.0, 0.0, 0.0, 0.0]);
            out.df.copy_from_slice(&[0.0, 1.0, -1.0, 1.0]);
        }
    }
    fn mode_size(&self) -> usize {
        2
    }
    fn next_event(&self, time: f64, _mode: &[f64]) -> f64 {
        if time < 1.0 { 1.0 } else { f64::INFINITY }
    }
    fn guard_size(&self) -> usize {
        1
    }
    fn guards(&self, at: Point<'_>, out: &mut [f64]) {
        out[0] = if at.mode[0] == 0.0 {
            0.5 - at.x[0]
        } else {
            -1.0
        };
    }
    fn transition(&self, cause: Cause, _time: f64, _x: &mut [f64], mode: &mut [f64]) -> bool {
        mode[0] = if cause == Cause::Time { 0.0 } else { 1.0 };
        mode[1] += 1.0;
        true
    }
}

/// 1 F and 2 F with 1 Mohm each, joined by a switch at time 1; at `second` a source of 5 V is put across both.
///
/// Unknowns: both voltages, the source's current, the switch's current; mode 0 counts events.
pub struct Sharing {
    pub pattern: Pattern,
    pub second: f64,
}

impl Sharing {
    pub fn new() -> Self {
        let positions: Vec<_> = (0..16).map(|k| (k / 4, k % 4)).collect();
        Sharing {
            pattern: Pattern::from_positions(4, &positions),
            second: 2.0,
        }
    }
}

impl System for Sharing {
    fn size(&self) -> usize {
        4
    }
    fn pattern(&self) -> &Pattern {
        &self.pattern
    }
    fn evaluate(&self, at: Point<'_>, slopes: bool, out: &mut Evaluation) {
        let (a, b, source, switch) = (at.x[0], at.x[1], at.x[2], at.x[3]);
        let (joined, driven) = (at.mode[0] > 0.5, at.mode[0] > 1.5);
        out.q.copy_from_slice(&[a, 2.0 * b, 0.0, 0.0]);
        out.f.copy_from_slice(&[
            1e-6 * a + switch + source,
            1e-6 * b - switch,
            if driven { a - 5.0 } else { source },
            if joined { a - b } else { switch },
        ]);
        if slopes {
            out.dq.fill(0.0);
            (out.dq[0], out.dq[5]) = (1.0, 2.0);
            out.df.fill(0.0);
            let mut set = |row: usize, column: usize, slope: f64| out.df[4 * column + row] = slope;
            set(0, 0, 1e-6);
            set(0, 2, 1.0);
            set(0, 3, 1.0);
            set(1, 1, 1e-6);
            set(1, 3, -1.0);
            if driven {
                set(2, 0, 1.0)
            } else {
                set(2, 2, 1.0)
            }
            if joined {
                set(3, 0, 1.0);
                set(3, 1, -1.0);
            } else {
                set(3, 3, 1.0);
            }
        }
    }
    fn mode_size(&self) -> usize {
        1
    }
    fn next_event(&self, time: f64, _mode: &[f64]) -> f64 {
        [1.0, self.second]
            .into_iter()
            .find(|&event| event > time)
            .unwrap_or(f64::INFINITY)
    }
    fn transition(&self, _cause: Cause, _time: f64, _x: &mut [f64], mode: &mut [f64]) -> bool {
        mode[0] += 1.0;
        true
    }
}

/// A ball of 1 kg above a floor: height and speed; an impact turns the speed round and takes a share of it.
pub struct Ball {
    pub pattern: Pattern,
    pub restitution: f64,
}

impl Ball {
    pub fn new(restitution: f64) -> Self {
        Ball {
            pattern: Pattern::from_positions(2, &[(0, 1), (1, 1)]),
            restitution,
        }
    }
}

impl System for Ball {
    fn size(&self) -> usize {
        2
    }
    fn pattern(&self) -> &Pattern {
        &self.pattern
    }
    fn evaluate(&self, at: Point<'_>, slopes: bool, out: &mut Evaluation) {
        out.q.copy_from_slice(&[at.x[0], at.x[1]]);
        out.f.copy_from_slice(&[-at.x[1], 10.0]);
        if slopes {
            out.dq.copy_from_slice(&[1.0, 0.0, 1.0]);
            out.df.copy_from_slice(&[0.0, -1.0, 0.0]);
        }
    }
    fn guard_size(&self) -> usize {
        1
    }
    fn guards(&self, at: Point<'_>, out: &mut [f64]) {
        out[0] = -at.x[0];
    }
    fn transition(&self, _cause: Cause, _time: f64, x: &mut [f64], _mode: &mut [f64]) -> bool {
        x[0] = 0.0;
        x[1] *= -self.restitution;
        true
    }
}
