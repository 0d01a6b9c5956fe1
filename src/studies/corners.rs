//! The worst corner of several margins at once.
//!
//! In: how many spreads there are, and a function that gives all margins at a corner. Out: for every margin its lowest
//! value and the corner it was found at. Up to [`ALL_UP_TO`] spreads every combination of their ends is tried. With more,
//! each end is tried alone first; the ends that lower a margin are put together to that margin's corner; and from
//! there spreads are turned over as long as that makes it worse, which finds what they do only together. Margins that are
//! worst inside a spread are not looked for.

use std::collections::BTreeMap;

/// Most spreads of which all combinations are tried: 32 runs.
pub const ALL_UP_TO: usize = 5;
/// Rounds of turning spreads over.
const ROUNDS: usize = 4;
/// Spreads that are turned over in pairs.
const IN_PAIRS: usize = 4;

/// Where a value stands within its spread.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Side {
    /// At its lowest.
    Low,
    /// As written.
    Nominal,
    /// At its highest.
    High,
}

impl Side {
    fn opposite(self) -> Self {
        match self {
            Side::Low => Side::High,
            Side::Nominal => Side::Nominal,
            Side::High => Side::Low,
        }
    }
}

/// One side for every spread.
pub type Corner = Vec<Side>;

/// A corner that was tried, with the margins there.
#[derive(Clone, Debug, PartialEq)]
pub struct Tried {
    /// Where.
    pub corner: Corner,
    /// The margins there, in the caller's order.
    pub margins: Vec<f64>,
}

/// What a search of corners found. The first corner tried is the nominal one.
#[derive(Clone, Debug, PartialEq)]
pub struct Worst {
    /// All corners tried, in order.
    pub tried: Vec<Tried>,
    /// For every margin the number, among those tried, of its worst corner.
    pub at: Vec<usize>,
}

impl Worst {
    /// The worst corners among those tried; of several equally bad ones the first.
    pub fn among(tried: Vec<Tried>) -> Self {
        Worst {
            at: lowest(&tried),
            tried,
        }
    }

    /// The lowest value of a margin.
    pub fn margin(&self, which: usize) -> f64 {
        self.tried[self.at[which]].margins[which]
    }

    /// The corner at which a margin is lowest.
    pub fn corner(&self, which: usize) -> &Corner {
        &self.tried[self.at[which]].corner
    }

    /// The nominal value of a margin.
    pub fn nominal(&self, which: usize) -> f64 {
        self.tried[0].margins[which]
    }

    /// By how much a margin rises when one spread of its worst corner is turned over; None where that was not tried.
    pub fn relief(&self, which: usize, spread: usize) -> Option<f64> {
        let mut other = self.corner(which).clone();
        other[spread] = other[spread].opposite();
        let tried = self.tried.iter().find(|tried| tried.corner == other)?;
        Some(tried.margins[which] - self.margin(which))
    }
}

/// Gives the margins at a corner.
pub type Evaluate<'a, E> = dyn FnMut(&[Side]) -> Result<Vec<f64>, E> + 'a;

/// Looks for the worst corner of every margin. `evaluate` gives the margins at a corner, always as many; what is no
/// number counts as the worst there is.
///
/// # Errors
/// The first error of `evaluate`.
pub fn worst<E>(spreads: usize, evaluate: &mut Evaluate<'_, E>) -> Result<Worst, E> {
    let mut search = Search {
        tried: Vec::new(),
        known: BTreeMap::new(),
        evaluate,
    };
    search.try_corner(&vec![Side::Nominal; spreads])?;
    if spreads <= ALL_UP_TO {
        search.try_all(spreads)?;
    } else {
        search.try_ends(spreads)?;
        search.put_together(spreads)?;
        search.turn_over()?;
    }
    Ok(Worst::among(search.tried))
}

struct Search<'a, 'e, E> {
    tried: Vec<Tried>,
    known: BTreeMap<Corner, usize>,
    evaluate: &'a mut Evaluate<'e, E>,
}

impl<E> Search<'_, '_, E> {
    /// Tries a corner, once; its number among those tried.
    fn try_corner(&mut self, corner: &Corner) -> Result<usize, E> {
        if let Some(&known) = self.known.get(corner) {
            return Ok(known);
        }
        let mut margins = (self.evaluate)(corner)?;
        for margin in margins.iter_mut().filter(|margin| margin.is_nan()) {
            *margin = f64::NEG_INFINITY;
        }
        self.known.insert(corner.clone(), self.tried.len());
        self.tried.push(Tried {
            corner: corner.clone(),
            margins,
        });
        Ok(self.tried.len() - 1)
    }

    fn try_all(&mut self, spreads: usize) -> Result<(), E> {
        for number in 0..1_u32 << spreads {
            let side = |k: usize| {
                if number >> k & 1 == 0 {
                    Side::Low
                } else {
                    Side::High
                }
            };
            self.try_corner(&(0..spreads).map(side).collect())?;
        }
        Ok(())
    }

    fn try_ends(&mut self, spreads: usize) -> Result<(), E> {
        for k in 0..spreads {
            for side in [Side::Low, Side::High] {
                self.try_corner(&alone(spreads, k, side))?;
            }
        }
        Ok(())
    }

    /// For every margin the corner of all ends that lower it; of two ends the lower one, of two without effect the
    /// value as written.
    fn put_together(&mut self, spreads: usize) -> Result<(), E> {
        let margins = self.tried[0].margins.len();
        for which in 0..margins {
            let at_end = |k: usize, side: Side| {
                let number = self.known[&alone(spreads, k, side)];
                self.tried[number].margins[which]
            };
            let lower = |k: usize| {
                let (low, high) = (at_end(k, Side::Low), at_end(k, Side::High));
                match low.total_cmp(&high) {
                    std::cmp::Ordering::Less => Side::Low,
                    std::cmp::Ordering::Equal => Side::Nominal,
                    std::cmp::Ordering::Greater => Side::High,
                }
            };
            let corner: Corner = (0..spreads).map(lower).collect();
            self.try_corner(&corner)?;
        }
        Ok(())
    }

    /// Turns spreads over at the worst corners until nothing gets worse: one at a time, then pairs of those that matter
    /// least alone.
    fn turn_over(&mut self) -> Result<(), E> {
        let mut before = Vec::new();
        for _ in 0..ROUNDS {
            let worst = self.worst();
            if worst == before {
                break;
            }
            for (which, &number) in worst.iter().enumerate() {
                let corner = self.tried[number].corner.clone();
                let mut alone: Vec<(f64, usize)> = Vec::new();
                for k in 0..corner.len() {
                    let other = self.try_corner(&turned(&corner, &[k]))?;
                    alone.push((self.tried[other].margins[which], k));
                }
                alone.sort_by(|a, b| a.0.total_cmp(&b.0));
                alone.truncate(IN_PAIRS);
                for (k, &(_, first)) in alone.iter().enumerate() {
                    for &(_, second) in &alone[..k] {
                        self.try_corner(&turned(&corner, &[first, second]))?;
                    }
                }
            }
            before = worst;
        }
        Ok(())
    }

    /// For every margin the number of its worst corner.
    fn worst(&self) -> Vec<usize> {
        lowest(&self.tried)
    }
}

/// For every margin the number of the corner at which it is lowest, the first of several.
fn lowest(tried: &[Tried]) -> Vec<usize> {
    let margins = tried.first().map_or(0, |first| first.margins.len());
    let of = |which: usize| {
        (0..tried.len()).fold(0, |best, next| {
            let margin = |number: usize| tried[number].margins[which];
            if margin(next) < margin(best) {
                next
            } else {
                best
            }
        })
    };
    (0..margins).map(of).collect()
}

/// A corner with some spreads turned over.
fn turned(corner: &Corner, which: &[usize]) -> Corner {
    let mut other = corner.clone();
    for &k in which {
        other[k] = other[k].opposite();
    }
    other
}

/// One spread at an end, the others as written.
fn alone(spreads: usize, k: usize, side: Side) -> Corner {
    let mut corner = vec![Side::Nominal; spreads];
    corner[k] = side;
    corner
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::convert::Infallible;

    fn sign(side: Side) -> f64 {
        match side {
            Side::Low => -1.0,
            Side::Nominal => 0.0,
            Side::High => 1.0,
        }
    }

    fn found(spreads: usize, mut margins: impl FnMut(&[f64]) -> Vec<f64>) -> (Worst, usize) {
        let mut runs = 0;
        let result = worst::<Infallible>(spreads, &mut |corner| {
            runs += 1;
            let signs: Vec<f64> = corner.iter().copied().map(sign).collect();
            Ok(margins(&signs))
        });
        let Ok(worst) = result;
        (worst, runs)
    }

    /// Lowest value over all combinations.
    fn enumerated(spreads: usize, which: usize, margins: impl Fn(&[f64]) -> Vec<f64>) -> f64 {
        (0..1_u32 << spreads)
            .map(|number| {
                let signs: Vec<f64> = (0..spreads)
                    .map(|k| if number >> k & 1 == 0 { -1.0 } else { 1.0 })
                    .collect();
                margins(&signs)[which]
            })
            .fold(f64::INFINITY, f64::min)
    }

    #[test]
    fn few_spreads_are_tried_in_all_combinations() {
        // Worst only together: no spread alone lowers the margin.
        let (worst, runs) = found(3, |x| vec![1.0 - x[0] * x[1] * x[2], x[0]]);
        assert_eq!(runs, 9);
        assert_eq!(worst.margin(0), 0.0);
        assert_eq!(worst.nominal(0), 1.0);
        assert_eq!(worst.margin(1), -1.0);
        assert_eq!(worst.corner(1)[0], Side::Low);
        assert_eq!(worst.relief(0, 1), Some(2.0));
    }

    #[test]
    fn many_spreads_find_the_worst_that_enumeration_finds() {
        // Slopes of either sign, and products of neighbours that turn some of them over.
        let margins = |x: &[f64]| {
            let linear = |shift: usize| {
                let term = |(k, x): (usize, &f64)| {
                    let slope = ((k + shift) as f64 * 2.399).sin();
                    slope * x
                };
                x.iter().enumerate().map(term).sum::<f64>()
            };
            let products: f64 = x.windows(2).map(|pair| 0.15 * pair[0] * pair[1]).sum();
            vec![linear(0) + products, linear(5) - products, linear(9)]
        };
        let (worst, runs) = found(10, margins);
        for which in 0..3 {
            let wanted = enumerated(10, which, margins);
            assert!((worst.margin(which) - wanted).abs() < 1e-12, "{which}");
        }
        assert!(runs < 120, "{runs} runs");
    }

    #[test]
    fn what_is_no_number_is_the_worst() {
        let (worst, _) = found(1, |x| vec![if x[0] > 0.0 { f64::NAN } else { 1.0 }]);
        assert_eq!(worst.margin(0), f64::NEG_INFINITY);
        assert_eq!(worst.corner(0), &vec![Side::High]);
    }

    #[test]
    fn without_spreads_the_nominal_corner_is_the_only_one() {
        let (worst, runs) = found(0, |_| vec![0.25]);
        assert_eq!((runs, worst.margin(0)), (1, 0.25));
    }

    #[test]
    fn an_error_ends_the_search() {
        let mut runs = 0;
        let result = worst(4, &mut |_| {
            runs += 1;
            if runs == 3 {
                Err("stop")
            } else {
                Ok(vec![0.0])
            }
        });
        assert_eq!((result, runs), (Err("stop"), 3));
    }
}
