//! The highest step of a ladder that holds, found from a seed by evaluating as few steps as possible.
//!
//! Steps go from gentle to harsh. A step that is too gentle rules out all below it, one that is too harsh all above it; a
//! step that is both rules out all. From the seed the search strides up or down, the strides doubling, and halves the rest
//! once both ends are known.

/// How a step came out.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Outcome {
    /// Everything holds.
    Holds,
    /// What a harsher step would ease does not hold.
    TooGentle,
    /// What a gentler step would ease does not hold.
    TooHarsh,
    /// Both.
    Neither,
}

/// The highest step that holds, or None. `evaluate` is asked at most once per step.
///
/// # Errors
/// The first error of `evaluate`.
pub fn harshest<E>(
    steps: usize,
    seed: usize,
    evaluate: &mut dyn FnMut(usize) -> Result<Outcome, E>,
) -> Result<Option<usize>, E> {
    // Everything at or below `gentle` and at or above `harsh` is decided, as far as harsher ones are sought.
    let (mut gentle, mut harsh) = (None, steps);
    let mut best = None;
    let mut stride = 1;
    let mut step = seed.min(steps.saturating_sub(1));
    while next_of(gentle) < harsh {
        match evaluate(step)? {
            Outcome::Holds => {
                best = Some(step);
                gentle = Some(step);
            }
            Outcome::TooGentle => gentle = Some(step),
            Outcome::TooHarsh => harsh = step,
            Outcome::Neither => return Ok(best),
        }
        let (low, high) = (next_of(gentle), harsh);
        let up = gentle == Some(step);
        let open = if up { harsh == steps } else { gentle.is_none() };
        step = if !open {
            low + high.saturating_sub(low) / 2
        } else if up {
            (step + stride).min(steps - 1)
        } else {
            step.saturating_sub(stride)
        };
        stride = if open { 2 * stride } else { stride };
    }
    Ok(best)
}

fn next_of(gentle: Option<usize>) -> usize {
    gentle.map_or(0, |step| step + 1)
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::convert::Infallible;

    /// Steps from `low` to below `high` hold; returns what is found and how many steps were looked at.
    fn found(steps: usize, seed: usize, low: usize, high: usize) -> (Option<usize>, usize) {
        let mut asked = Vec::new();
        let found = harshest::<Infallible>(steps, seed, &mut |step| {
            assert!(step < steps && !asked.contains(&step), "{step} of {steps}");
            asked.push(step);
            Ok(match (step < low, step >= high) {
                (false, false) => Outcome::Holds,
                (true, false) => Outcome::TooGentle,
                (false, true) => Outcome::TooHarsh,
                (true, true) => Outcome::Neither,
            })
        });
        let Ok(found) = found;
        (found, asked.len())
    }

    #[test]
    fn the_highest_that_holds_is_found_from_any_seed() {
        for steps in 1..14 {
            for seed in 0..steps {
                for low in 0..=steps {
                    for high in 0..=steps {
                        let wanted = (low < high).then(|| high - 1);
                        let (got, _) = found(steps, seed, low, high);
                        assert_eq!(got, wanted, "{steps} {seed} {low} {high}");
                    }
                }
            }
        }
    }

    #[test]
    fn a_good_seed_needs_two_looks() {
        assert_eq!(found(33, 14, 0, 15), (Some(14), 2));
        assert_eq!(found(33, 15, 0, 15), (Some(14), 2));
        assert!(found(200, 199, 0, 3).1 < 18);
    }

    #[test]
    fn no_steps_hold_nothing() {
        assert_eq!(found(0, 0, 0, 0), (None, 0));
    }
}
