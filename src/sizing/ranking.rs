//! Which candidate is recommended, which ones no other beats, and why the rest is not taken.

use super::candidate::Candidate;

/// Release times within this share of each other are equally quick.
const AS_QUICK: f64 = 0.05;

/// How a candidate stands in the ranking. SI units.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Standing {
    /// True where everything holds.
    pub holds: bool,
    /// Number of added elements.
    pub parts: usize,
    /// Release time at its worst corner; infinity where it never lets go, no number where it was not simulated.
    pub slowest: f64,
    /// Highest switch voltage of all corners; no number where it was not simulated.
    pub highest: f64,
}

/// The candidate to recommend: of those that hold the one with the fewest elements, then the quickest where a release
/// time is asked for (a quick release spares contacts), else the one with the lowest voltage; then the lower voltage.
pub fn recommended(standings: &[Standing], quickness_counts: bool) -> Option<usize> {
    let mut best: Option<usize> = None;
    for (k, next) in standings.iter().enumerate().filter(|(_, s)| s.holds) {
        let better = best.is_none_or(|known| {
            let known = &standings[known];
            if next.parts != known.parts {
                return next.parts < known.parts;
            }
            let quicker = next.slowest < (1.0 - AS_QUICK) * known.slowest;
            let slower = known.slowest < (1.0 - AS_QUICK) * next.slowest;
            if quickness_counts && (quicker || slower) {
                return quicker;
            }
            next.highest < known.highest
        });
        if better {
            best = Some(k);
        }
    }
    best
}

/// The candidates than which no other is at least as good in both release time and switch voltage and better in one.
/// In: both per candidate at nominal values [s, V]; None for a candidate that is no answer at all.
pub fn front(figures: &[Option<(f64, f64)>]) -> Vec<usize> {
    let beaten = |k: usize, (time, voltage): (f64, f64)| {
        figures
            .iter()
            .enumerate()
            .any(|(other, figure)| match figure {
                Some((t, v)) if other != k => {
                    *t <= time && *v <= voltage && (*t < time || *v < voltage)
                }
                _ => false,
            })
    };
    let kept = |(k, figure): (usize, &Option<(f64, f64)>)| {
        let figure = (*figure)?;
        (!beaten(k, figure)).then_some(k)
    };
    figures.iter().enumerate().filter_map(kept).collect()
}

/// How a candidate stands. `bounded` says whether anything bounds the voltage across the switch.
pub fn standing(candidate: &Candidate, bounded: bool) -> Standing {
    let reached = candidate.study.iter().flat_map(|study| &study.reached);
    // The larger of a number and none is the number.
    let (mut slowest, mut highest) = (f64::NAN, f64::NAN);
    for reached in reached {
        slowest = slowest.max(reached.release.unwrap_or(f64::INFINITY));
        highest = highest.max(reached.peak_voltage);
    }
    let parts = candidate.suppressor.elements.len();
    Standing {
        // Nothing to be exceeded is no proof that a bare switch survives.
        holds: candidate.holds() && (bounded || parts > 0),
        parts,
        slowest,
        highest,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn at(holds: bool, parts: usize, slowest: f64, highest: f64) -> Standing {
        Standing {
            holds,
            parts,
            slowest,
            highest,
        }
    }

    #[test]
    fn few_parts_come_first_then_quickness_where_it_counts() {
        let standings = [
            at(false, 0, 1e-4, 9e3),
            at(true, 1, 30e-3, 25.0),
            at(true, 2, 5e-3, 45.0),
            at(true, 1, 6e-3, 46.0),
            at(true, 1, 6.1e-3, 40.0),
        ];
        assert_eq!(recommended(&standings, true), Some(4));
        assert_eq!(recommended(&standings, false), Some(1));
        assert_eq!(recommended(&standings[..1], true), None);
    }

    #[test]
    fn the_front_is_what_nothing_beats() {
        let figures = [
            Some((1.0, 9.0)),
            Some((5.0, 2.0)),
            Some((5.0, 3.0)),
            None,
            Some((1.0, 9.0)),
            Some((3.0, 4.0)),
        ];
        assert_eq!(front(&figures), [0, 1, 4, 5]);
    }
}
