//! Losses as plain numbers: the impedance of a winding's copper over frequency ([`impedance`]), and the ladder of
//! positive resistances and inductances that has it in time ([`ladder`]).

pub mod impedance;
pub mod ladder;

pub use impedance::Impedance;
pub use ladder::{Ladder, Section};
