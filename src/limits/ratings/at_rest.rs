//! The voltage that lasts.
//!
//! A suppressor's working voltage is compared with what it sees between its pulses, not with the pulse. A run usually
//! starts and ends at rest, with the switch in its two positions; in between the mean counts. The largest of the
//! three is on the safe side wherever the run was long enough to come to rest.

use super::Meter;
use crate::readings::{Accumulator, Ask, MEAN, Taken};
use crate::signals::Piece;

/// Keeps the ends and the mean.
pub(super) struct AtRest {
    first: Option<Taken>,
    last: Option<Taken>,
    mean: Box<dyn Accumulator>,
}

impl Default for AtRest {
    fn default() -> Self {
        AtRest {
            first: None,
            last: None,
            mean: (MEAN.make)(&Ask::default()),
        }
    }
}

impl Meter for AtRest {
    fn feed(&mut self, piece: &Piece) {
        self.first.get_or_insert(Taken {
            value: piece.first(),
            time: Some(piece.from),
        });
        self.last = Some(Taken {
            value: piece.last(),
            time: Some(piece.to),
        });
        self.mean.feed(piece);
    }

    fn finish(&self) -> Option<Taken> {
        let all = [self.first, self.last, self.mean.finish()]
            .into_iter()
            .flatten();
        all.map(|taken| Taken {
            value: taken.value.abs(),
            ..taken
        })
        .reduce(
            |best, next| {
                if next.value > best.value { next } else { best }
            },
        )
    }
}
