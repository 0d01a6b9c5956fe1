//! Cautions that the program raises by itself where its model is thin.

use super::netlist::Netlist;
use super::outcome::Outcome;
use crate::analysis::steady;
use crate::circuit::Circuit;
use crate::diag::Diagnostic;
use crate::elements::element::{CoreFigures, WindingFigures};
use crate::signals::Trace;

/// A kick this many times the largest supply counts as unsuppressed.
const UNSUPPRESSED: f64 = 4.0;
/// Beyond this saturation a coil is past its knee.
const PAST_THE_KNEE: f64 = 0.5;

/// Adds what the outcome gives cause for.
pub fn add(netlist: &Netlist, outcome: &mut Outcome) {
    let mut cautions = Vec::new();
    if let Some(found) = &outcome.steady {
        cautions.extend(steady::cautions(found));
    }
    unbroken_switches(netlist, outcome, &mut cautions);
    saturated_coils(netlist, outcome, &mut cautions);
    beyond_the_curve(netlist, outcome, &mut cautions);
    releases_from_current(netlist, &mut cautions);
    unevaluated_ratings(outcome, &mut cautions);
    core_loss_twice(netlist, &mut cautions);
    cautions.extend(coils(&netlist.circuit));
    outcome.cautions.extend(cautions);
}

/// What the magnetics of a circuit's coils give cause for: an overfilled window, a formula outside its range.
pub fn coils(circuit: &Circuit) -> Vec<Diagnostic> {
    let mut cautions = Vec::new();
    for entry in &circuit.entries {
        for figures in entry.element.windings() {
            for remark in &figures.wound.remarks {
                let text = format!("`{}`: {}", entry.name, remark.text);
                cautions.push(Diagnostic::caution(remark.word, text).at(entry.span, "this coil"));
            }
        }
    }
    cautions
}

fn largest(trace: &Trace) -> f64 {
    trace
        .pieces
        .iter()
        .flat_map(|piece| {
            piece
                .extremes()
                .map(|(_, value)| value.abs())
                .collect::<Vec<f64>>()
        })
        .fold(0.0, f64::max)
}

/// A switch without breakdown that sees a kick: a real one would break down or arc over.
fn unbroken_switches(netlist: &Netlist, outcome: &Outcome, cautions: &mut Vec<Diagnostic>) {
    let circuit = &netlist.circuit;
    let supply = circuit
        .entries
        .iter()
        .filter(|entry| entry.kind.word == "voltage_source")
        .filter_map(|entry| {
            outcome.trace(&format!(
                "voltage at {}",
                entry.terminals.first()?.node.text
            ))
        })
        .map(largest)
        .fold(0.0, f64::max);
    for entry in circuit
        .entries
        .iter()
        .filter(|entry| entry.kind.is_switch())
    {
        let broken_down = ["breakdown_voltage", "arc"]
            .iter()
            .any(|key| entry.node.get(key).is_some());
        if broken_down || supply == 0.0 || within_rating(outcome, &entry.name) {
            continue;
        }
        let Some(trace) = outcome.trace(&format!("voltage across {}", entry.name)) else {
            continue;
        };
        let kick = largest(trace);
        if kick > UNSUPPRESSED * supply {
            let text = format!(
                "`{}` has no breakdown and sees {}, {:.0} times the supply: a real switch breaks down or arcs before",
                entry.name,
                crate::units::engineering(kick, crate::units::VOLTAGE, 3),
                kick / supply
            );
            cautions.push(
                Diagnostic::caution("no-breakdown", text)
                    .at(entry.span, "an ideal switch")
                    .help(
                        "the figure shows that a suppressor is needed, not what would be measured",
                    ),
            );
        }
    }
}

/// True where the voltage is rated and stays within: then nothing breaks down.
fn within_rating(outcome: &Outcome, element: &str) -> bool {
    outcome.ratings.iter().any(|rating| {
        rating.element == element && rating.rating == "voltage" && rating.used.holds()
    })
}

fn saturated_coils(netlist: &Netlist, outcome: &Outcome, cautions: &mut Vec<Diagnostic>) {
    for entry in &netlist.circuit.entries {
        let saturation = |owner: &String| {
            let trace = outcome.trace(&format!("saturation of {owner}"))?;
            let values = trace.pieces.iter().flat_map(|piece| {
                let extremes = piece.extremes();
                extremes.map(|(_, value)| value).collect::<Vec<f64>>()
            });
            Some(values.fold(f64::NEG_INFINITY, f64::max))
        };
        // Windings that share a leg share its saturation: it is said once, of the one that loses most.
        let owners = entry.winding_owners();
        let all = owners
            .iter()
            .filter_map(|owner| Some((owner, saturation(owner)?)));
        let Some((owner, highest)) = all.max_by(|a, b| a.1.total_cmp(&b.1)) else {
            continue;
        };
        if highest > PAST_THE_KNEE {
            cautions.push(
                Diagnostic::caution(
                    "past-the-knee",
                    format!("`{owner}` is driven past its knee: {:.0} % of its inductance is gone", 100.0 * highest),
                )
                .at(entry.span, "this coil")
                .help("there the figures rest on the magnetization far out: give the material a measured `curve`"),
            );
        }
    }
}

/// A flux density beyond the last point of a measured curve: the rest is vacuum by assumption.
fn beyond_the_curve(netlist: &Netlist, outcome: &Outcome, cautions: &mut Vec<Diagnostic>) {
    for entry in &netlist.circuit.entries {
        let beyond = |(owner, figures): (String, &WindingFigures<'_>)| {
            let end = figures.wound.linkage.path().known_to()?;
            let peak = largest(outcome.trace(&format!("flux density in {owner}"))?);
            (peak > end).then_some((owner, peak, end))
        };
        let windings = entry.element.windings();
        let mut all = entry.winding_owners().into_iter().zip(&windings);
        let Some((owner, peak, end)) = all.find_map(beyond) else {
            continue;
        };
        let tesla = |value: f64| crate::units::engineering(value, crate::units::FLUX_DENSITY, 3);
        cautions.push(
            Diagnostic::caution(
                "beyond-the-curve",
                format!(
                    "`{owner}` reaches {}, its material's curve ends at {}",
                    tesla(peak),
                    tesla(end)
                ),
            )
            .at(entry.span, "this coil")
            .help("beyond its end the curve goes on with the slope of vacuum: give it more points"),
        );
    }
}

/// True where the element that a phrase asks has an armature.
fn moves(netlist: &Netlist, phrase: &crate::signals::Phrase) -> bool {
    let owner = phrase.owner();
    let entry = owner.and_then(|owner| netlist.circuit.find(&owner.element));
    entry.is_some_and(|entry| entry.kind.word == "relay")
}

/// A release read from a winding current: an armature moves later than its current falls.
fn releases_from_current(netlist: &Netlist, cautions: &mut Vec<Diagnostic>) {
    use crate::signals::{Phrase, Quantity};
    let of_current = netlist.readings.iter().find(|reading| {
        reading.kind.word.starts_with("time_until")
            && matches!(
                reading.signal.phrase,
                Phrase::Of(Quantity::WindingCurrent, _)
            )
            && !moves(netlist, &reading.signal.phrase)
    });
    if let Some(reading) = of_current {
        cautions.push(
            Diagnostic::caution(
                "release-from-current",
                format!("`{}` is taken from the current alone", reading.name.text),
            )
            .at(reading.name.span, "no armature is modelled")
            .help("eddy currents, the armature's way and contact bounce come on top: measure them on the bench"),
        );
    }
}

/// A core whose loss is estimated beside the ledger and is in the ledger too.
fn core_loss_twice(netlist: &Netlist, cautions: &mut Vec<Diagnostic>) {
    for entry in &netlist.circuit.entries {
        let cores = entry.element.cores();
        let twice = |core: &CoreFigures<'_>| core.losses.steinmetz.is_some() && core.eddy_currents;
        if cores.iter().any(twice) {
            let text = format!(
                "the core of `{}` loses by `eddy_currents` in the ledger and by `steinmetz` beside it: the estimate counts the \
                 same loss once more",
                entry.name
            );
            let caution = Diagnostic::caution("core-loss-twice", text).at(entry.span, "this core");
            cautions.push(caution.help("take one of the two; they are not to be added"));
        }
    }
}

fn unevaluated_ratings(outcome: &Outcome, cautions: &mut Vec<Diagnostic>) {
    let missing: Vec<String> = outcome
        .ratings
        .iter()
        .filter(|rating| rating.used.not_evaluated_yet)
        .map(|rating| format!("{}.{}", rating.element, rating.rating))
        .collect();
    if !missing.is_empty() {
        cautions.push(Diagnostic::caution(
            "rating-not-evaluated",
            format!(
                "ratings that this version reads but does not evaluate: {}",
                missing.join(", ")
            ),
        ));
    }
}
