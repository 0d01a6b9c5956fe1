//! The matrices: those of a netlist's own run, and grids.

use coilbreak::analysis::simulate::Shown;
use coilbreak::analysis::{Analysis, Settings, Simulation};
use coilbreak::dae::{Evaluation, Pattern, Point, System};
use coilbreak::math::Scalar;
use coilbreak::netlist::Input;
use coilbreak::run::{method, read};
use num_complex::Complex64;
use std::fmt::Write as _;
use std::ops::ControlFlow;
use std::path::Path;

/// Values on one pattern, compressed by column.
pub struct Set<T> {
    pub name: String,
    pub size: usize,
    pub starts: Vec<usize>,
    pub rows: Vec<usize>,
    pub values: Vec<Vec<T>>,
}

impl<T: Scalar> Set<T> {
    /// Backward error by component of a solution for a right side of ones.
    pub fn error(&self, values: &[T], x: &[T]) -> f64 {
        let (mut left, mut terms) = (vec![-T::ONE; self.size], vec![1.0; self.size]);
        for (column, &x) in x.iter().enumerate() {
            for slot in self.starts[column]..self.starts[column + 1] {
                let term = values[slot] * x;
                left[self.rows[slot]] += term;
                terms[self.rows[slot]] += term.size();
            }
        }
        let rows = left.iter().zip(&terms);
        rows.fold(0.0, |most, (left, terms)| {
            f64::max(most, left.size() / terms)
        })
    }
}

/// Every third step of a run: its length and the slopes at its end.
pub struct Run {
    name: String,
    pattern: Pattern,
    steps: Vec<(f64, Evaluation)>,
}

/// Steps taken from a run at most, and values held at most.
const MOST: (usize, usize) = (200, 1_000_000);
/// W of three Radau points (Hairer & Wanner II, IV.5, from memory), its real eigenvalue and one of its pair.
const W: [[f64; 3]; 3] = [
    [3.224744871391589, 1.1678400846904053, -0.25319726474218085],
    [-3.5678400846904053, 0.7752551286084105, 1.0531972647421808],
    [5.531972647421809, -7.531972647421809, 5.0],
];
const REAL: f64 = 3.6378342527444957;
const PAIR: Complex64 = Complex64::new(2.6810828736277523, 3.0504301992474105);

/// A shipped netlist.
pub fn shipped(name: &str) -> Input {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../../netlists");
    Input::File(root.join(name).with_extension("yaml"))
}

/// A line: sections of 1 uH + 0.1 ohm in series and 1 nF with 10 Mohm across, 50 ohm at both ends.
pub fn line(sections: usize) -> Input {
    let mut text = String::from(
        "elements:\n  source: {kind: voltage_source, nodes: [n0, ground], voltage: {points: [[0 s, 0 V], [1 us, 1 V]]}, series_resistance: 50 ohm}\n",
    );
    for k in 1..=sections {
        let before = k - 1;
        let _ = writeln!(
            text,
            "  l{k}: {{kind: inductor, nodes: [n{before}, n{k}], inductance: 1 uH, series_resistance: 0.1 ohm}}"
        );
        let _ = writeln!(
            text,
            "  c{k}: {{kind: capacitor, nodes: [n{k}, ground], capacitance: 1 nF, leakage_resistance: 10 Mohm}}"
        );
    }
    let _ = writeln!(
        text,
        "  end: {{kind: resistor, nodes: [n{sections}, ground], resistance: 50 ohm}}"
    );
    let _ = writeln!(
        text,
        "analysis: {{transient: {{duration: 4 us, start: zero}}}}"
    );
    Input::Text {
        name: "line".into(),
        bytes: text.into_bytes(),
        folder: None,
    }
}

/// Runs a netlist and keeps its matrices.
pub fn run(name: &str, input: &Input) -> Run {
    let netlist = read(input, &[]).unwrap_or_else(|_| panic!("a sound netlist"));
    let Analysis::Transient(transient) = &netlist.analysis else {
        panic!("a transient")
    };
    let circuit = &netlist.circuit;
    let duration = circuit.values()[transient.duration];
    let settings = Settings::new(duration, 1e-4, transient.start);
    let simulation = Simulation {
        circuit,
        settings,
        method: method(),
        warm: None,
    };
    let (size, slots) = (circuit.size(), circuit.pattern().len());
    let scales = simulation
        .pilot(Vec::new())
        .unwrap_or_else(|_| panic!("a run to the end"));
    let most = MOST.0.min(1 + MOST.1 / slots);
    let (mut steps, mut count) = (Vec::new(), 0);
    let _ = simulation.run_scaled(&scales, &mut |_, shown, _| {
        let Shown::Step(step) = shown else {
            return ControlFlow::Continue(());
        };
        count += 1;
        if count % 3 == 0 {
            let mut out = Evaluation::default();
            (out.f, out.q) = (vec![0.0; size], vec![0.0; size]);
            (out.df, out.dq) = (vec![0.0; slots], vec![0.0; slots]);
            let at = Point {
                time: step.to,
                x: step.x1,
                mode: step.mode,
            };
            circuit.evaluate(at, true, &mut out);
            steps.push((step.to - step.from, out));
        }
        if steps.len() < most {
            ControlFlow::Continue(())
        } else {
            ControlFlow::Break(())
        }
    });
    Run {
        name: name.into(),
        pattern: circuit.pattern().clone(),
        steps,
    }
}

impl Run {
    fn set<T>(&self, kind: &str, value: impl Fn(f64, f64, f64) -> T) -> Set<T> {
        let values = self.steps.iter().map(|(length, out)| {
            let slopes = out.dq.iter().zip(&out.df);
            slopes.map(|(&dq, &df)| value(*length, dq, df)).collect()
        });
        Set {
            name: format!("{} {kind}", self.name),
            size: self.pattern.size,
            starts: self.pattern.starts.clone(),
            rows: self.pattern.rows.clone(),
            values: values.collect(),
        }
    }

    pub fn real(&self) -> Set<f64> {
        self.set("real", |length, dq, df| REAL / length * dq + df)
    }

    pub fn complex(&self) -> Set<Complex64> {
        self.set("complex", |length, dq, df| PAIR / length * dq + df)
    }

    /// All three stages side by side; stages are joined where some charge has a slope.
    pub fn coupled(&self) -> Set<f64> {
        let mut positions = Vec::new();
        for column in 0..self.pattern.size {
            for slot in self.pattern.starts[column]..self.pattern.starts[column + 1] {
                let charged = self.steps.iter().any(|(_, out)| out.dq[slot] != 0.0);
                for (i, j) in (0..9)
                    .map(|k| (k / 3, k % 3))
                    .filter(|(i, j)| charged || i == j)
                {
                    positions.push((
                        3 * column + j,
                        3 * self.pattern.rows[slot] + i,
                        slot,
                        W[i][j],
                        i == j,
                    ));
                }
            }
        }
        positions.sort_by_key(|position| (position.0, position.1));
        let mut starts = vec![0; 3 * self.pattern.size + 1];
        for position in &positions {
            starts[position.0 + 1] += 1;
        }
        for k in 1..starts.len() {
            starts[k] += starts[k - 1];
        }
        let values = self.steps.iter().map(|(length, out)| {
            let value = |&(_, _, slot, w, own): &(usize, usize, usize, f64, bool)| {
                w / length * out.dq[slot] + if own { out.df[slot] } else { 0.0 }
            };
            positions.iter().map(value).collect()
        });
        Set {
            name: format!("{} coupled", self.name),
            size: 3 * self.pattern.size,
            rows: positions.iter().map(|position| position.1).collect(),
            values: values.collect(),
            starts,
        }
    }
}

/// A grid of nodes joined by resistors, each with a capacitor to ground.
pub fn grid(side: usize) -> Set<f64> {
    let size = side * side;
    let (mut starts, mut rows, mut values) = (vec![0], Vec::new(), Vec::new());
    for node in 0..size {
        let (i, j) = (node / side, node % side);
        let mut column = vec![(node, 4.1)];
        for (a, b) in [
            (i.wrapping_sub(1), j),
            (i + 1, j),
            (i, j.wrapping_sub(1)),
            (i, j + 1),
        ] {
            if a < side && b < side {
                // Conductances that differ, the same both ways.
                let other = a * side + b;
                column.push((other, -1.0 + 0.5 * ((node + other) as f64).sin()));
            }
        }
        column.sort_by_key(|entry| entry.0);
        rows.extend(column.iter().map(|entry| entry.0));
        values.extend(column.iter().map(|entry| entry.1));
        starts.push(rows.len());
    }
    Set {
        name: format!("grid of {side} x {side}"),
        size,
        starts,
        rows,
        values: vec![values],
    }
}
