//! Elements of a circuit: one file per kind, one line per kind in [`KINDS`].
//!
//! An element reads its keys into parameter handles, derives its numbers from the parameters' values, claims its
//! unknowns and stamps its share of d/dt q(x) + f(x, t, mode) = 0.

pub mod arc;
pub mod armature;
pub mod cable;
pub mod capacitor;
pub mod claims;
pub mod coil;
pub mod contact;
pub mod contact_pair;
pub mod coupled_inductors;
pub mod current_source;
pub mod dependent;
pub mod dependent_current_source;
pub mod dependent_voltage_source;
pub mod diode;
pub mod element;
pub mod inductor;
pub mod junction;
pub mod kind;
pub mod leg;
pub mod magnetic_circuit;
pub mod movement;
pub mod pairs;
pub mod rebounds;
pub mod relay;
pub mod relay_contact;
pub mod resistor;
pub mod skin;
pub mod stamper;
pub mod suppressor_diode;
pub mod switch;
pub mod switch_command;
pub mod touching;
pub mod transformer;
pub mod unknown;
pub mod voltage_source;
pub mod waveforms;
pub mod winding;
pub mod wound;
pub mod zener;

pub use claims::{Claimed, Claims, Measure, Offer, Wanted};
pub use element::{
    Element, Energy, Follower, Happening, Point, Quantity, Rhythm, Switching, Terms, Unknown,
    Unsound,
};
pub use kind::{ElementKind, Made, Surroundings, Terminal};
pub use stamper::Stamper;

/// Every kind of element that a netlist may name.
pub const KINDS: &[ElementKind] = &[
    cable::KIND,
    capacitor::KIND,
    coil::KIND,
    contact::KIND,
    coupled_inductors::KIND,
    current_source::KIND,
    dependent_current_source::KIND,
    dependent_voltage_source::KIND,
    diode::KIND,
    inductor::KIND,
    magnetic_circuit::KIND,
    relay::KIND,
    resistor::KIND,
    suppressor_diode::KIND,
    switch::KIND,
    transformer::KIND,
    voltage_source::KIND,
    zener::KIND,
];
