//! Losses as plain numbers: the impedance of a winding's copper over frequency ([`impedance`], of a winding as it lies
//! [`lay`]), and the ladder of positive resistances and inductances that has it in time ([`ladder`]); the loss of a core under any waveform ([`loops`]).

pub mod impedance;
pub mod ladder;
pub mod lay;
pub mod loops;

pub use impedance::Impedance;
pub use ladder::{Ladder, Section};
pub use lay::{Arranged, Lay, SKIN_WORDS, SkinLaw};
pub use loops::{Improved, Loops};
