//! Waveforms: their names, their pieces, and what a run keeps of them.

mod cubic;
#[cfg(test)]
pub(crate) mod draw;
mod event;
mod phrase;
mod piece;
mod rating;
mod recorder;
pub mod resample;
mod trace;
mod window;
mod words;
mod written;

pub use event::{EVENTS, EventLog, EventPhrase, Happening};
pub use phrase::{Owner, PHRASES, Phrase, PhraseKind, Quantity};
pub use piece::{Crossing, Piece};
pub use rating::{RATING_KEYS, RATINGS, Rated, RatingKind, Ratings, Stress, Watched, read_ratings};
pub use recorder::Recorder;
pub use resample::{Row, Sample, Thinner};
pub use trace::{Side, Trace};
pub use window::{Gate, GateState, Instant, Passed, Window};
pub use words::PhraseError;
pub use written::{WrittenInstant, WrittenPhrase, read_instant, read_phrase};
