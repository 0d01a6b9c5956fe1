//! The kick of a coil from Rust: read a netlist, change a value, run it again without reading text, look at the readings.
//!
//! `cargo run --example kick`

use coilbreak::netlist::Input;
use coilbreak::report::engineering::engineering_or_dash;
use std::error::Error;
use std::ops::ControlFlow;

const VALVE: &str = "
title: Valve solenoid on a clamped driver
materials:
  iron: {initial_permeability: 2000, saturation: 1.6 T}
cores:
  plunger: {shape: effective, length: 90 mm, area: 110 mm², gap: 0.8 mm, material: iron}
elements:
  supply: {kind: voltage_source, nodes: [rail, ground], voltage: 24 V}
  valve:  {kind: coil, nodes: [rail, drive], core: plunger, turns: 1800, resistance: 48 Ω, self_capacitance: 200 pF}
  driver: {kind: switch, nodes: [drive, ground], closed_resistance: 80 mΩ, open_resistance: 5 MΩ, transition: 2 µs,
           initially: closed, opens_at: [2 ms]}
  clamp:  {kind: suppressor_diode, nodes: [drive, ground], directions: one, breakdown_voltage: 47 V,
           breakdown_resistance: 0.8 Ω}
analysis: {transient: {duration: 60 ms}}
readings:
  kick:    {signal: voltage at drive, take: highest, from: driver opens}
  release: {signal: winding current of valve, take: time_until_last, falls_to: 60 mA, from: driver opens}
  pulse:   {signal: energy in clamp, take: final}
";

fn main() -> Result<(), Box<dyn Error>> {
    let input = Input::Text {
        name: "valve".into(),
        bytes: VALVE.into(),
        folder: None,
    };
    let mut netlist = coilbreak::run::read(&input, &[]).map_err(|error| {
        let failure = error.failure();
        coilbreak::diag::draw_all(
            &failure.diagnostics,
            &failure.sources,
            coilbreak::diag::Paint::Plain,
        )
    })?;
    let clamp = netlist
        .circuit
        .parameters
        .find("elements.clamp.breakdown_voltage")
        .ok_or("the clamp is in the netlist")?;
    for volts in [39.0, 47.0, 56.0, 68.0] {
        netlist
            .circuit
            .set(&[(clamp, volts)])
            .map_err(|refused| refused.reason.headline)?;
        let outcome = coilbreak::run::run(&netlist, &mut |_, _| ControlFlow::Continue(()))
            .map_err(|failure| format!("{failure:?}"))?;
        let shown: Vec<String> = outcome
            .readings
            .iter()
            .map(|reading| {
                format!(
                    "{} {}",
                    reading.name,
                    engineering_or_dash(reading.value, reading.kind, 3)
                )
            })
            .collect();
        println!("clamp {volts} V: {}", shown.join(", "));
    }
    Ok(())
}
