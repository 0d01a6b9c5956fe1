//! Two methods on one circuit: the default one at the accuracy asked, another at a hundredth of it.

use coilbreak::analysis::{Analysis, Failure, Settings, Simulation, simulate::Shown};
use coilbreak::dae::{METHODS, Method};
use coilbreak::run::Netlist;
use std::ops::ControlFlow;

/// How a transient compares with that of another method at a hundredth of the accuracy.
#[derive(Clone, Debug, PartialEq)]
pub enum Agreement {
    /// The largest deviation, in swings.
    Within(f64),
    /// The deviation and the waveform.
    Off(f64, String),
    /// The other method gave up.
    Stopped(String),
}

/// Deviations may reach so many times the accuracy asked.
const ALLOWED: f64 = 10.0;

/// Compares means and final values of all node potentials; None where there is no transient.
pub fn agreement(netlist: &Netlist) -> Option<Agreement> {
    let Analysis::Transient(transient) = &netlist.analysis else {
        return None;
    };
    let accuracy = netlist.circuit.values()[transient.accuracy];
    let other = Method::named("radau_iia_9").expect("the list has this method");
    let ours = potentials(netlist, &METHODS[0], accuracy).ok()?;
    let theirs = match potentials(netlist, other, accuracy / 100.0) {
        Ok(theirs) => theirs,
        Err(Failure::Stopped { headline, .. }) => return Some(Agreement::Stopped(headline)),
        Err(Failure::Refused(_) | Failure::Interrupted) => return None,
    };
    let largest = theirs.iter().map(Potential::swing).fold(1e-9, f64::max);
    let mut most = (0.0, String::new());
    for (node, (ours, theirs)) in ours.iter().zip(&theirs).enumerate() {
        let swing = theirs.swing().max(1e-4 * largest);
        for (what, by) in [
            ("mean", ours.mean - theirs.mean),
            ("final", ours.last - theirs.last),
        ] {
            let by = (by / swing).abs();
            if by > most.0 {
                let name = &netlist.circuit.node_names[node];
                most = (by, format!("the {what} potential of {name}"));
            }
        }
    }
    Some(if most.0 <= ALLOWED * accuracy {
        Agreement::Within(most.0)
    } else {
        Agreement::Off(most.0, most.1)
    })
}

/// What is compared of a node's potential [V].
#[derive(Clone, Copy)]
struct Potential {
    lowest: f64,
    highest: f64,
    mean: f64,
    last: f64,
}

impl Potential {
    fn swing(&self) -> f64 {
        self.highest - self.lowest
    }
}

fn potentials(
    netlist: &Netlist,
    method: &'static Method,
    accuracy: f64,
) -> Result<Vec<Potential>, Failure> {
    let Analysis::Transient(transient) = &netlist.analysis else {
        return Ok(Vec::new());
    };
    let circuit = &netlist.circuit;
    let duration = circuit.values()[transient.duration];
    let settings = Settings {
        most_steps: 20 * transient.most_steps as u64,
        ..Settings::new(duration, accuracy, transient.start)
    };
    let simulation = Simulation {
        circuit,
        settings,
        method,
        warm: None,
    };
    let scales = simulation.pilot(Vec::new())?;
    let nothing = Potential {
        lowest: f64::INFINITY,
        highest: f64::NEG_INFINITY,
        mean: 0.0,
        last: 0.0,
    };
    let mut found = vec![nothing; circuit.node_names.len()];
    let mut x = vec![0.0; circuit.unknowns.len()];
    simulation.run_scaled(&scales, &mut |_, shown, _| {
        if let Shown::Step(step) = shown {
            // Boole's rule, exact to degree five.
            let length = step.to - step.from;
            for (k, weight) in [7.0, 32.0, 12.0, 32.0, 7.0].into_iter().enumerate() {
                step.at(step.from + 0.25 * k as f64 * length, &mut x);
                for (potential, &value) in found.iter_mut().zip(&x) {
                    potential.lowest = potential.lowest.min(value);
                    potential.highest = potential.highest.max(value);
                    potential.mean += weight / 90.0 * length / settings.duration * value;
                    potential.last = value;
                }
            }
        }
        ControlFlow::Continue(())
    })?;
    Ok(found)
}
