//! Rating keys as they are written.

use super::*;
use crate::diag::{Sink, Sources};
use crate::netlist::{Reader, read_document};

fn read(text: &str) -> (Vec<(&'static str, f64)>, Vec<String>) {
    let (mut sources, sink) = (Sources::new(), Sink::new());
    let document = read_document("t", text.as_bytes(), &mut sources, &sink).expect("a document");
    let reader = Reader::new(&sink);
    let rated = read_ratings(&Fields::new(
        &document.root,
        "elements.d.ratings",
        RATING_KEYS,
        &reader,
    ));
    let values = reader.parameters.borrow().nominal();
    let rated = rated
        .iter()
        .map(|rated| (rated.rating.key, values[rated.value]))
        .collect();
    (
        rated,
        sink.sorted()
            .into_iter()
            .map(|diagnostic| diagnostic.headline)
            .collect(),
    )
}

#[test]
fn every_rating_key_of_the_design_is_read() {
    let text = "{flux_density: 0.3 T, voltage: 60 V, reverse_voltage: 200 V, working_voltage_dc: 28 V,
        working_voltage_ac: 25 V, voltage_rate: 1 kV/µs, current: 2 A, current_mean: 1 A, current_surge: 30 A,
        making_current: 10 A, breaking_current: 5 A, ripple_current: 1 A, power: 0.5 W, pulse: {power: 600 W,
        width: 1 ms}, pulse_energy: 1 J, repetitive_energy: 5 mJ, junction_temperature: 150 °C}";
    let (rated, messages) = read(text);
    assert_eq!(messages, Vec::<String>::new());
    assert_eq!(rated.len(), RATINGS.len());
    assert!(rated.contains(&("pulse", 600.0)) && rated.contains(&("voltage_rate", 1e9)));
    assert!(rated.contains(&("junction_temperature", 423.15)));
}

#[test]
fn wrong_ratings_are_refused() {
    let (rated, messages) =
        read("{voltag: 60 V, current: 5 V, power: 0 W, pulse: {power: 600 W}, pulse_energy: -1 J}");
    assert!(rated.is_empty());
    assert_eq!(messages.len(), 5, "{messages:?}");
    for wanted in [
        "`voltag` is no key",
        "current takes A, got 5 V",
        "power must be above zero",
        "needs `width`",
        "pulse_energy must be above zero",
    ] {
        assert!(
            messages.iter().any(|message| message.contains(wanted)),
            "{wanted}: {messages:?}"
        );
    }
}
