//! Circuits of the literature with published values: the test set for initial value problems of Mazzia & Magherini
//! (release 2.4, 2008), its transistor amplifier (index 1) and its ring modulator. Equations and values from memory;
//! that these methods meet all printed digits at fine tolerances is the check of that memory.

/// Values of the amplifier at 0.2 s.
pub const AMPLIFIER: &[f64] = &[
    -0.5562145012262709e-2,
    0.3006522471903042e1,
    0.2849958788608128e1,
    0.2926422536206241e1,
    0.2704617865010554e1,
    0.2761837778393145e1,
    0.4770927631616772e1,
    0.1236995868091548e1,
];

/// Values of the modulator at 1 ms.
pub const MODULATOR: &[f64] = &[
    -0.2339057358486745e-1,
    -0.7367485485540825e-2,
    0.2582956709291169,
    -0.406446572128345,
    -0.4039455665149794,
    0.2607966765422943,
    0.1106761861269975,
    0.2939904342435596e-6,
    -0.2840029933642329e-7,
    0.7267198267264553e-3,
    0.792948719696084e-3,
    -0.7255283495698965e-3,
    -0.7941401968526521e-3,
    0.7088495416976114e-4,
    0.239005907523657e-4,
];

/// Two transistor stages, eight node voltages, five capacitors.
pub mod amplifier {
    use crate::circuits::problems::Hand;
    use crate::circuits::stamps::{GROUND, Stamps};

    const UB: f64 = 6.0;
    const R: f64 = 9000.0;
    /// Largest less smallest value of each node over the run, to two digits.
    pub const SWINGS: &[f64] = &[0.2, 0.19, 0.15, 3.1, 4.5, 2.9, 5.9, 5.9];

    pub fn start() -> Vec<f64> {
        vec![0.0, UB / 2.0, UB / 2.0, UB, UB / 2.0, UB / 2.0, UB, 0.0]
    }

    /// A current of `share` of the emitter's junction from `from` to `to`, the junction's voltage being x[b] - x[e].
    fn transistor(s: &mut Stamps<'_>, x: &[f64], [c, b, e]: [usize; 3]) {
        let (alpha, beta, uf) = (0.99, 1e-6, 0.026);
        let power = ((x[b] - x[e]) / uf).exp();
        let (i, slope) = (beta * (power - 1.0), beta * power / uf);
        for (row, share) in [(b, 1.0 - alpha), (e, -1.0), (c, alpha)] {
            s.f(row, share * i);
            s.df(row, b, share * slope);
            s.df(row, e, -share * slope);
        }
    }

    pub fn system() -> Hand<impl Fn(&mut Stamps<'_>, f64, &[f64])> {
        Hand::new(8, |s, t, x| {
            let farads = |k: f64| k * 1e-6;
            s.capacitance(x, 0, 1, farads(1.0));
            s.capacitance(x, 2, GROUND, farads(2.0));
            s.capacitance(x, 3, 4, farads(3.0));
            s.capacitance(x, 5, GROUND, farads(4.0));
            s.capacitance(x, 6, 7, farads(5.0));
            s.conductance(x, 0, GROUND, 1e-3);
            s.f(0, -0.1 * (200.0 * std::f64::consts::PI * t).sin() * 1e-3);
            for node in [1, 4] {
                s.conductance(x, node, GROUND, 2.0 / R);
                s.f(node, -UB / R);
            }
            for node in [3, 6] {
                s.conductance(x, node, GROUND, 1.0 / R);
                s.f(node, -UB / R);
            }
            for node in [2, 5, 7] {
                s.conductance(x, node, GROUND, 1.0 / R);
            }
            transistor(s, x, [3, 1, 2]);
            transistor(s, x, [6, 4, 5]);
        })
    }
}

/// Four diodes in a ring, two transformers: fifteen states, 2 pF at the diodes.
pub mod modulator {
    use crate::circuits::problems::Hand;
    use crate::circuits::stamps::Stamps;
    use std::f64::consts::PI;

    const C: f64 = 1.6e-8;
    const CS: f64 = 2e-12;
    const CP: f64 = 1e-8;
    const LH: f64 = 4.45;
    const LS1: f64 = 2e-3;
    const LS23: f64 = 5e-4;
    /// Largest less smallest value of each state over the run, to two digits.
    pub const SWINGS: &[f64] = &[
        1.0, 1.0, 1.0, 1.0, 1.0, 1.0, 0.3, 1e-5, 1e-5, 2e-3, 2e-3, 2e-3, 2e-3, 1e-3, 1e-3,
    ];

    /// Signed states that a diode's voltage is made of.
    type Sum = &'static [(usize, f64)];

    fn row(s: &mut Stamps<'_>, x: &[f64], row: usize, storage: f64, terms: &[(usize, f64)]) {
        s.q(row, storage * x[row]);
        s.dq(row, row, storage);
        for &(column, share) in terms {
            s.f(row, -share * x[column]);
            s.df(row, column, -share);
        }
    }

    pub fn system() -> Hand<impl Fn(&mut Stamps<'_>, f64, &[f64])> {
        Hand::new(15, |s, t, x| {
            let (rp, r, ri, rc, rg1, rg23) = (50.0, 25000.0, 50.0, 600.0, 36.3, 17.3);
            let (in1, in2) = (0.5 * (2e3 * PI * t).sin(), 2.0 * (2e4 * PI * t).sin());
            row(
                s,
                x,
                0,
                C,
                &[(7, 1.0), (9, -0.5), (10, 0.5), (13, 1.0), (0, -1.0 / r)],
            );
            row(
                s,
                x,
                1,
                C,
                &[(8, 1.0), (11, -0.5), (12, 0.5), (14, 1.0), (1, -1.0 / r)],
            );
            row(s, x, 2, CS, &[(9, 1.0)]);
            row(s, x, 3, CS, &[(10, -1.0)]);
            row(s, x, 4, CS, &[(11, 1.0)]);
            row(s, x, 5, CS, &[(12, -1.0)]);
            row(s, x, 6, CP, &[(6, -1.0 / rp)]);
            row(s, x, 7, LH, &[(0, -1.0)]);
            row(s, x, 8, LH, &[(1, -1.0)]);
            row(s, x, 9, LS23, &[(0, 0.5), (2, -1.0), (9, -rg23)]);
            row(s, x, 10, LS23, &[(0, -0.5), (3, 1.0), (10, -rg23)]);
            row(s, x, 11, LS23, &[(1, 0.5), (4, -1.0), (11, -rg23)]);
            row(s, x, 12, LS23, &[(1, -0.5), (5, 1.0), (12, -rg23)]);
            row(s, x, 13, LS1, &[(0, -1.0), (13, -(ri + rg1))]);
            row(s, x, 14, LS1, &[(1, -1.0), (14, -(rc + rg1))]);
            s.f(13, -in1);
            // Each diode: its voltage as signed states and a share of the second input, and where its current goes.
            let diodes: [(Sum, f64, Sum); 4] = [
                (
                    &[(2, 1.0), (4, -1.0), (6, -1.0)],
                    -1.0,
                    &[(2, -1.0), (4, 1.0), (6, 1.0)],
                ),
                (
                    &[(3, -1.0), (5, 1.0), (6, -1.0)],
                    -1.0,
                    &[(3, 1.0), (5, -1.0), (6, 1.0)],
                ),
                (
                    &[(3, 1.0), (4, 1.0), (6, 1.0)],
                    1.0,
                    &[(3, -1.0), (4, -1.0), (6, -1.0)],
                ),
                (
                    &[(2, -1.0), (5, -1.0), (6, 1.0)],
                    1.0,
                    &[(2, 1.0), (5, 1.0), (6, -1.0)],
                ),
            ];
            for (volts, share, goes) in diodes {
                let v: f64 = volts.iter().map(|&(k, sign)| sign * x[k]).sum::<f64>() + share * in2;
                let power = (17.7493332 * v).exp();
                let (i, slope) = (
                    40.67286402e-9 * (power - 1.0),
                    40.67286402e-9 * 17.7493332 * power,
                );
                for &(row, sign) in goes {
                    s.f(row, -sign * i);
                    for &(column, of) in volts {
                        s.df(row, column, -sign * slope * of);
                    }
                }
            }
        })
    }
}
