//! What the sizing gives cause for: where a figure rests on thin ground, and what every suppressor brings along.

use super::Comparison;
use super::candidate::Candidate;
use super::facts::Facts;
use super::fillings::{Filling, StandardKind};
use crate::diag::Diagnostic;
use crate::run::Netlist;
use crate::units::{CAPACITANCE, CURRENT, TIME, VOLTAGE, engineering};

/// Beyond this loss of inductance a coil is past its knee.
const PAST_THE_KNEE: f64 = 0.5;
/// A kick this many times the supply counts as unsuppressed.
const UNSUPPRESSED: f64 = 4.0;
/// A snubber below this many times the stray capacitance is not told from it.
const ABOVE_STRAY: f64 = 10.0;

/// What every suppressor brings along, whatever the netlist.
pub const ALWAYS: &[&str] = &[
    "figures are predictions: confirm them on the bench with rated probes",
    "an interrupted coil makes voltages that injure people and destroy parts; energy remains after switch-off",
    "a suppressor fails short (fuse it) or open (the kick returns)",
    "a diode put in the wrong way round shorts the driver",
    "a slow release wears contacts and changes stopping times: safety functions are re-assessed",
    "mains-connected parts need the proper class, a fusible resistor and a bleed",
    "emission is not predicted; `ground` is not protective earth",
    "mains and safety circuits follow the local code and a licensed practitioner",
];

/// What hangs on the netlist and the results.
pub fn cautions(netlist: &Netlist, comparison: &Comparison) -> Vec<Diagnostic> {
    let mut cautions = Vec::new();
    if !comparison.bounded {
        let headline = format!(
            "nothing bounds the voltage across `{}`, so the suppressors are sized for the supply",
            comparison.facts.switch
        );
        let help = format!(
            "elements: {}: {{ratings: {{voltage: 60 V}}}}",
            comparison.facts.switch
        );
        cautions.push(Diagnostic::caution("no-voltage-limit", headline).help(help));
    }
    release(netlist, comparison, &mut cautions);
    knee(comparison, &mut cautions);
    unbroken(netlist, comparison, &mut cautions);
    rate(netlist, comparison, &mut cautions);
    moving_sources(netlist, &mut cautions);
    for candidate in &comparison.candidates {
        parts(candidate, &comparison.facts, &mut cautions);
    }
    unevaluated(comparison, &mut cautions);
    cautions
}

fn release(netlist: &Netlist, comparison: &Comparison, cautions: &mut Vec<Diagnostic>) {
    let sizing = netlist.sizing.as_ref();
    let named = sizing.is_some_and(|s| s.release_current.is_some() || s.release_voltage.is_some());
    if !named {
        let headline = format!(
            "no release current is given: 10 % of the operating current, {}, is taken for it",
            engineering(comparison.level, CURRENT, 3)
        );
        let help = "sizing: {release: {current: 8 mA, within: 25 ms, margin: 10 %}}";
        cautions.push(Diagnostic::caution("release-assumed", headline).help(help));
    }
    let headline =
        "the release times are taken from the current alone: an armature adds its own time";
    cautions.push(Diagnostic::caution("release-from-current", headline).help(
        "moving parts, eddy currents and contact bounce come on top; measure them on the bench",
    ));
}

/// A coil past its knee rests on its magnetization far out.
fn knee(comparison: &Comparison, cautions: &mut Vec<Diagnostic>) {
    let facts = &comparison.facts;
    if facts.saturation_high > PAST_THE_KNEE {
        let headline = format!(
            "`{}` is driven past its knee: at worst {:.0} % of its inductance is gone",
            facts.coil,
            100.0 * facts.saturation_high
        );
        cautions.push(Diagnostic::caution("past-the-knee", headline).help(
            "the figures rest on the magnetization far out: give the material a measured `curve`",
        ));
    }
}

/// A real switch breaks down or arcs over before it sees an unsuppressed kick.
fn unbroken(netlist: &Netlist, comparison: &Comparison, cautions: &mut Vec<Diagnostic>) {
    let facts = &comparison.facts;
    let entry = netlist.circuit.find(&facts.switch);
    let breaks = entry.is_some_and(|entry| entry.node.get("breakdown_voltage").is_some());
    let bare = comparison.candidates.iter().find(|c| c.fitted.is_empty());
    let kick = bare.and_then(|bare| Some(bare.study.as_ref()?.nominal().peak_voltage));
    let kick = kick.filter(|kick| *kick > UNSUPPRESSED * facts.nominal.open_voltage.abs());
    if let (Some(kick), false) = (kick, breaks) {
        let headline = format!(
            "without a suppressor `{}` would see {}: a real one breaks down or arcs before that",
            facts.switch,
            engineering(kick, VOLTAGE, 3)
        );
        cautions.push(
            Diagnostic::caution("no-breakdown", headline)
                .help("the figure shows that a suppressor is needed, not what would be measured"),
        );
    }
}

fn rate(netlist: &Netlist, comparison: &Comparison, cautions: &mut Vec<Diagnostic>) {
    let rate = netlist
        .sizing
        .as_ref()
        .and_then(|sizing| sizing.operating_rate);
    let Some(rate) = rate else {
        cautions.push(
            Diagnostic::caution(
                "no-operating-rate",
                "no operating rate is given: averages are those of operations without pause",
            )
            .help("sizing: {operating_rate: 600 /h}"),
        );
        return;
    };
    let period = 1.0 / netlist.circuit.values()[rate];
    if period < comparison.cycle.duration() {
        let headline = format!(
            "an operation every {} leaves the coil no time to settle: a simulated one takes {}",
            engineering(period, TIME, 3),
            engineering(comparison.cycle.duration(), TIME, 3)
        );
        cautions.push(
            Diagnostic::caution("rate-too-high", headline).help(
                "the figures hold for single operations; at this rate run the netlist itself",
            ),
        );
    }
}

/// A supply that changes with time is taken at its first value by the operating point.
fn moving_sources(netlist: &Netlist, cautions: &mut Vec<Diagnostic>) {
    for entry in &netlist.circuit.entries {
        let key = match entry.kind.word {
            "voltage_source" => "voltage",
            "current_source" => "current",
            _ => continue,
        };
        let moves = entry
            .node
            .get(key)
            .is_some_and(|node| !node.entries().is_empty());
        if moves {
            let headline = format!(
                "`{}` changes with time: it is sized for what it does at the instants of this run alone",
                entry.name
            );
            cautions.push(
                Diagnostic::caution("source-moves", headline)
                    .at(entry.span, "not constant")
                    .help("size with the highest constant voltage; on an alternating supply the instant of opening matters"),
            );
        }
    }
}

fn parts(candidate: &Candidate, facts: &Facts, cautions: &mut Vec<Diagnostic>) {
    for fitted in &candidate.fitted {
        if !fitted.filling.is_rated() {
            let headline = format!(
                "{} in `{}` has no rating of power or current: nothing was checked of it",
                fitted.filling.shown(),
                candidate.suppressor.word
            );
            cautions.push(
                Diagnostic::caution("unrated-part", headline)
                    .help("give the part `ratings: {power: ..., current_surge: ...}`"),
            );
        }
        if let Filling::Standard(standard) = &fitted.filling
            && standard.kind == StandardKind::Capacitor
            && facts.stray > 0.0
            && standard.value < ABOVE_STRAY * facts.stray
        {
            let headline = format!(
                "the snubber's {} is near the stray capacitance of {}: what it does depends on the wiring",
                engineering(standard.value, CAPACITANCE, 3),
                engineering(facts.stray, CAPACITANCE, 3)
            );
            cautions.push(Diagnostic::caution("near-stray", headline));
        }
    }
}

fn unevaluated(comparison: &Comparison, cautions: &mut Vec<Diagnostic>) {
    let mut names: Vec<String> = Vec::new();
    for candidate in &comparison.candidates {
        let stresses = candidate
            .study
            .iter()
            .flat_map(|study| &study.nominal().stresses);
        for stress in stresses {
            let kind = crate::signals::RatingKind::find(stress.key);
            if kind.is_some_and(|kind| !kind.is_evaluated()) {
                let name = format!("{}.{}", candidate.elements[stress.entry], stress.key);
                if !names.contains(&name) {
                    names.push(name);
                }
            }
        }
    }
    if !names.is_empty() {
        let headline = format!(
            "read but not evaluated by this version: {}",
            names.join(", ")
        );
        cautions.push(Diagnostic::caution("rating-not-evaluated", headline));
    }
}
