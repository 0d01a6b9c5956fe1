//! The pilot run finds the swings that a fine run has.

use crate::netlists::from_file;
use coilbreak::analysis::{Analysis, Settings, Simulation, Swings, Wish};
use coilbreak::run::{Netlist, method};
use std::ops::ControlFlow;

fn wishes(netlist: &Netlist) -> Vec<Wish> {
    let values = netlist.circuit.values();
    let wish = |reading: &coilbreak::readings::Reading| Wish {
        window: reading.window(values),
        unknowns: Vec::new(),
    };
    netlist.readings.iter().map(wish).collect()
}

#[test]
fn scales_are_within_a_sixth_of_those_that_a_fine_run_shows() {
    for case in ["r1", "r2", "r3", "b"] {
        let netlist = from_file(&format!("tests/netlists/peers/{case}.yaml"), &[]);
        let Analysis::Transient(transient) = &netlist.analysis else {
            panic!("{case} is a transient")
        };
        let circuit = &netlist.circuit;
        let simulation = Simulation {
            circuit,
            settings: Settings::new(circuit.values()[transient.duration], 1e-4, transient.start),
            method: method(),
            warm: None,
        };
        let found = simulation.pilot(wishes(&netlist)).unwrap();
        let mut swings = Swings::new(circuit.unknowns.len(), wishes(&netlist));
        simulation
            .run_scaled(&found, &mut |_, shown, log| {
                if let coilbreak::analysis::simulate::Shown::Step(step) = shown {
                    swings.step(step, log);
                }
                ControlFlow::Continue(())
            })
            .unwrap();
        for (unknown, (found, fine)) in found.iter().zip(swings.scales(circuit)).enumerate() {
            assert!(
                (found / fine).ln().abs() < 0.15,
                "{case}: {found:e} for {fine:e} in unknown {unknown}"
            );
        }
    }
}
