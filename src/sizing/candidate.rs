//! One suppressor sized: the harshest standard value that holds, in the smallest parts that hold.

use super::checks::Check;
use super::facts::Facts;
use super::fillings::Filling;
use super::harshest::{Outcome, harshest};
use super::suppressors::{Choices, Search, Suppressor, Wiring};
use super::trial::{Addition, Ground, Study, Trial, Trouble};
use crate::studies::{Corner, Spread, in_words};
use std::collections::BTreeMap;

/// Sizes are fitted so often at most; each round only ever follows stresses that were simulated.
const MOST_FITS: usize = 6;
/// Steps of a ladder by which the best one is sought, wide ones first.
const STRIDES: [usize; 3] = [6, 2, 1];

/// One element of a sized suppressor.
#[derive(Clone, Debug)]
pub struct Fitted {
    /// Its name in the netlist.
    pub element: String,
    /// What it is.
    pub filling: Filling,
}

/// What set the size of a candidate.
#[derive(Clone, Debug, PartialEq)]
pub struct SetBy {
    /// The element whose size it is.
    pub part: String,
    /// The rating, as `ELEMENT.RATING`, or the limit that stopped the next choice.
    pub rating: String,
    /// In a sentence.
    pub sentence: String,
}

/// A suppressor with the parts that suit it best, and how it does.
#[derive(Clone, Debug)]
pub struct Candidate {
    /// Which one.
    pub suppressor: &'static Suppressor,
    /// Its elements; empty where there was no part to choose.
    pub fitted: Vec<Fitted>,
    /// How it is put into the netlist.
    pub addition: Addition,
    /// What had to hold.
    pub checks: Vec<Check>,
    /// Spreads of the circuit with it.
    pub spreads: Vec<Spread>,
    /// How it did; None where it could not be simulated.
    pub study: Option<Study>,
    /// The worst corner of every check, in words.
    pub corners: Vec<String>,
    /// Names of the elements that its stresses belong to, by index.
    pub elements: Vec<String>,
    /// What set its size.
    pub set_by: Option<SetBy>,
    /// Why there is no study.
    pub trouble: Option<Trouble>,
    /// Simulations that it took.
    pub runs: usize,
}

impl Candidate {
    /// True where everything holds at every corner that was tried.
    pub fn holds(&self) -> bool {
        self.study.as_ref().is_some_and(Study::holds)
    }
}

/// A step and a size within it, one of each element's choices.
type Pick = (usize, usize);

/// What one evaluation came to.
struct Evaluated {
    picks: Vec<Pick>,
    trial: Trial,
    study: Study,
    /// True where all corners were looked at.
    whole: bool,
}

/// A search for one suppressor.
pub struct Hunt<'a> {
    ground: &'a Ground<'a>,
    facts: &'a Facts,
    suppressor: &'static Suppressor,
    choices: Vec<Choices>,
    names: Vec<String>,
    between: String,
    /// Corners at which something was worst so far, that of the least margin first.
    corners: Vec<Corner>,
    best: Option<Evaluated>,
    least_bad: Option<Evaluated>,
    /// Why the step after the best one does not hold.
    blocked: BTreeMap<usize, Blocked>,
    runs: usize,
    tick: &'a mut dyn FnMut(usize),
}

/// Why a step does not hold.
#[derive(Clone, Debug)]
struct Blocked {
    shown: String,
    check: String,
    margin: Option<f64>,
    asked: f64,
}

impl<'a> Hunt<'a> {
    /// Prepares the search for a suppressor. `tick` is told how many simulations it has taken.
    pub fn new(
        ground: &'a Ground<'a>,
        facts: &'a Facts,
        suppressor: &'static Suppressor,
        choices: Vec<Choices>,
        tick: &'a mut dyn FnMut(usize),
    ) -> Self {
        let owner = if suppressor.place == "switch" {
            &facts.switch
        } else {
            &facts.coil
        };
        let name = |word: &&str| ground.rig.free_name("elements", &format!("{owner}_{word}"));
        Hunt {
            names: suppressor.elements.iter().map(name).collect(),
            between: ground.rig.free_node(&format!("{owner}_between")),
            ground,
            facts,
            suppressor,
            choices,
            corners: Vec::new(),
            best: None,
            least_bad: None,
            blocked: BTreeMap::new(),
            runs: 0,
            tick,
        }
    }

    /// Searches and reports.
    pub fn candidate(mut self) -> Candidate {
        let lacking = self.choices.iter().position(|choices| {
            choices.steps.is_empty() || choices.steps.iter().any(Vec::is_empty)
        });
        if let Some(lacking) = lacking {
            let what = self.suppressor.elements.get(lacking).unwrap_or(&"part");
            let why = format!("there is no {} to choose from", what.replace('_', " "));
            return self.empty(Trouble::Refused(why));
        }
        match self.search() {
            Ok(chosen) => self.report(chosen),
            Err(trouble) => self.empty(trouble),
        }
    }

    fn empty(self, trouble: Trouble) -> Candidate {
        Candidate {
            suppressor: self.suppressor,
            fitted: Vec::new(),
            addition: Addition::default(),
            checks: Vec::new(),
            spreads: Vec::new(),
            study: None,
            corners: Vec::new(),
            elements: Vec::new(),
            set_by: None,
            trouble: Some(trouble),
            runs: self.runs,
        }
    }

    /// The place whose step is chosen in some way.
    fn place(&self, search: Search) -> Option<usize> {
        self.choices
            .iter()
            .position(|choices| choices.search == search)
    }

    fn search(&mut self) -> Result<Evaluated, Trouble> {
        let start: Vec<Pick> = self
            .choices
            .iter()
            .map(|choices| (choices.seed, 0))
            .collect();
        match self.place(Search::Harshest) {
            None => {
                let evaluated = self.evaluate(start)?;
                self.settle(evaluated, None);
            }
            Some(main) => {
                let (steps, seed) = (self.choices[main].steps.len(), self.choices[main].seed);
                let mut picks = start;
                harshest(steps, seed, &mut |step| {
                    picks[main].0 = step;
                    let evaluated = self.evaluate(picks.clone())?;
                    picks = evaluated.picks.clone();
                    Ok::<_, Trouble>(self.settle(evaluated, Some((main, step))))
                })?;
            }
        }
        let chosen = self.best.take().or(self.least_bad.take());
        let mut chosen = chosen.ok_or_else(|| Trouble::Refused("nothing was tried".into()))?;
        if !chosen.whole {
            chosen.study = self.counted(&mut chosen.trial, Trial::study)?;
        }
        let Evaluated { trial, study, .. } = &mut chosen;
        let before = trial.runs;
        trial.refine(study)?;
        self.runs += trial.runs - before;
        Ok(chosen)
    }

    /// Keeps an evaluation where it is the best so far, and says how it came out.
    fn settle(&mut self, evaluated: Evaluated, step: Option<(usize, usize)>) -> Outcome {
        let outcome = outcome(&evaluated);
        if outcome != Outcome::Holds
            && let Some((main, step)) = step
        {
            self.note_blocked(&evaluated, main, step);
        }
        let slot = if outcome == Outcome::Holds {
            &mut self.best
        } else {
            &mut self.least_bad
        };
        let better = match (outcome, slot.as_ref()) {
            (_, None) => true,
            // Later ones that hold are harsher ones.
            (Outcome::Holds, Some(_)) => true,
            (_, Some(known)) => evaluated.study.slack() > known.study.slack(),
        };
        if better {
            *slot = Some(evaluated);
        }
        outcome
    }

    fn note_blocked(&mut self, evaluated: &Evaluated, main: usize, step: usize) {
        let failing = (0..evaluated.trial.checks.len())
            .filter(|&k| !evaluated.study.verdict(k).holds)
            .min_by(|&a, &b| {
                let slack = |k: usize| evaluated.study.worst.margin(k);
                // Where a limit says the same as a rating, the rating is named.
                let limit = |k: usize| evaluated.trial.checks[k].rating.is_none();
                slack(a).total_cmp(&slack(b)).then(limit(a).cmp(&limit(b)))
            });
        let Some(check) = failing else { return };
        let verdict = evaluated.study.verdict(check);
        let (step_at, size) = evaluated.picks[main];
        let shown = self.choices[main].steps[step_at][size].shown();
        self.blocked.insert(
            step,
            Blocked {
                shown,
                check: evaluated.trial.checks[check].name.clone(),
                margin: verdict.margin,
                asked: verdict.asked,
            },
        );
    }

    /// Evaluates a step with the sizes that fit: a glance at the corners known to be bad, all corners where that holds.
    fn evaluate(&mut self, mut picks: Vec<Pick>) -> Result<Evaluated, Trouble> {
        if let Some(place) = self.place(Search::Best) {
            picks = self.climb(picks, place)?;
        }
        let mut tried: Vec<Vec<Pick>> = Vec::new();
        loop {
            tried.push(picks.clone());
            let mut evaluated = self.look(&picks)?;
            let fitting = self.fitting(&evaluated);
            let again = fitting != picks && !tried.contains(&fitting) && tried.len() < MOST_FITS;
            if again {
                picks = fitting;
                continue;
            }
            if !evaluated.whole && evaluated.study.holds() {
                evaluated.study = self.counted(&mut evaluated.trial, Trial::study)?;
                evaluated.whole = true;
                self.corners = evaluated.study.worst_corners();
                let fitting = self.fitting(&evaluated);
                if fitting != picks && !tried.contains(&fitting) {
                    picks = fitting;
                    continue;
                }
            }
            return Ok(evaluated);
        }
    }

    /// Tries one choice of parts: all corners the first time, then those known to be bad.
    fn look(&mut self, picks: &[Pick]) -> Result<Evaluated, Trouble> {
        let mut trial = Trial::new(self.ground, &self.addition(picks))?;
        let known = self.knows_corners(&trial);
        let study = if known {
            let corners = self.corners.clone();
            self.counted(&mut trial, |trial| trial.glance(&corners))?
        } else {
            let study = self.counted(&mut trial, Trial::study)?;
            self.corners = study.worst_corners();
            study
        };
        Ok(Evaluated {
            picks: picks.to_vec(),
            trial,
            study,
            whole: !known,
        })
    }

    fn knows_corners(&self, trial: &Trial) -> bool {
        let fits = |corner: &Corner| corner.len() == trial.spreads.len();
        self.corners.iter().any(fits)
    }

    /// The least margin of a choice of parts at nominal values and at the worst corner known.
    fn height(&mut self, picks: &[Pick]) -> Result<f64, Trouble> {
        let mut trial = Trial::new(self.ground, &self.addition(picks))?;
        if !self.knows_corners(&trial) {
            return Ok(self.look(picks)?.study.slack());
        }
        let corners: Vec<Corner> = self.corners.first().cloned().into_iter().collect();
        let study = self.counted(&mut trial, |trial| trial.estimate(&corners))?;
        Ok(study.slack())
    }

    fn counted(
        &mut self,
        trial: &mut Trial,
        work: impl FnOnce(&mut Trial) -> Result<Study, Trouble>,
    ) -> Result<Study, Trouble> {
        let before = trial.runs;
        let study = work(trial);
        self.runs += trial.runs - before;
        (self.tick)(self.runs);
        study
    }

    /// Goes up the hill of the lowest margin along one element's steps.
    fn climb(&mut self, mut picks: Vec<Pick>, place: usize) -> Result<Vec<Pick>, Trouble> {
        let last = self.choices[place].steps.len() - 1;
        let mut known: BTreeMap<usize, f64> = BTreeMap::new();
        let mut height = |hunt: &mut Self, step: usize| -> Result<f64, Trouble> {
            if let Some(&height) = known.get(&step) {
                return Ok(height);
            }
            let mut at = picks.clone();
            at[place] = (step, 0);
            let at = hunt.largest_sizes(at);
            let height = hunt.height(&at)?;
            known.insert(step, height);
            Ok(height)
        };
        let mut at = picks[place].0;
        let mut best = height(self, at)?;
        for stride in STRIDES {
            loop {
                let mut moved = false;
                for next in [at.saturating_sub(stride), (at + stride).min(last)] {
                    let height = height(self, next)?;
                    if height > best {
                        (at, best, moved) = (next, height, true);
                    }
                }
                if !moved {
                    break;
                }
            }
        }
        picks[place].0 = at;
        Ok(picks)
    }

    /// The same steps in their largest sizes: what is sought is a value that no small part's rating hides.
    fn largest_sizes(&self, picks: Vec<Pick>) -> Vec<Pick> {
        let largest = |(k, (step, _)): (usize, Pick)| (step, self.choices[k].steps[step].len() - 1);
        picks.into_iter().enumerate().map(largest).collect()
    }

    fn addition(&self, picks: &[Pick]) -> Addition {
        let fillings: Vec<Filling> = picks
            .iter()
            .enumerate()
            .map(|(k, &(step, size))| self.choices[k].steps[step][size].clone())
            .collect();
        let mut wiring = Wiring {
            fillings: &fillings,
            names: &self.names,
            between: self.between.clone(),
            elements: Vec::new(),
        };
        (self.suppressor.wire)(self.facts, &mut wiring);
        let elements = wiring.elements;
        let parts = fillings.into_iter().filter_map(|filling| match filling {
            Filling::Part(part) => Some((part.name, part.node)),
            Filling::Standard(_) => None,
        });
        Addition {
            parts: parts.collect(),
            elements,
        }
    }

    /// For every element the smallest size whose ratings hold the stresses that were simulated.
    fn fitting(&self, evaluated: &Evaluated) -> Vec<Pick> {
        let fit = |(k, &(step, _)): (usize, &Pick)| {
            let sizes = &self.choices[k].steps[step];
            let fits = |filling: &Filling| self.violated(evaluated, k, filling).is_none();
            (step, sizes.iter().position(fits).unwrap_or(sizes.len() - 1))
        };
        evaluated.picks.iter().enumerate().map(fit).collect()
    }

    /// The first rating that a filling in place of element `k` would not hold, with the share of it that is used.
    fn violated(
        &self,
        evaluated: &Evaluated,
        k: usize,
        filling: &Filling,
    ) -> Option<(&'static str, f64)> {
        let name = &self.names[k];
        let circuit = &evaluated.trial.netlist.circuit;
        let entry = circuit.index_of(name)?;
        let asked = evaluated
            .trial
            .checks
            .iter()
            .enumerate()
            .find_map(|(number, check)| {
                let own = check
                    .rating
                    .as_ref()
                    .is_some_and(|rating| rating.0 == *name);
                own.then(|| evaluated.study.verdict(number).asked)
            })?;
        let mut worst: BTreeMap<&'static str, f64> = BTreeMap::new();
        for reached in &evaluated.study.reached {
            for stress in reached
                .stresses
                .iter()
                .filter(|stress| stress.entry == entry)
            {
                if let Some(counts) = stress.counts {
                    let known = worst.entry(stress.key).or_insert(counts);
                    *known = known.max(counts);
                }
            }
        }
        worst.into_iter().find_map(|(key, stress)| {
            let used = stress / filling.rating(key)?;
            (used > 1.0 - asked).then_some((key, used))
        })
    }

    fn report(self, chosen: Evaluated) -> Candidate {
        let set_by = self.set_by(&chosen);
        let addition = self.addition(&chosen.picks);
        let Evaluated {
            picks,
            mut trial,
            study,
            ..
        } = chosen;
        // Values as written, for whoever looks at the circuit; they were sound before.
        let trouble = trial.back_to_nominal().err();
        let circuit = &trial.netlist.circuit;
        let corners = (0..trial.checks.len())
            .map(|check| in_words(circuit, &trial.spreads, &study.worst, check))
            .collect();
        let elements = circuit.entries.iter().map(|entry| entry.name.clone());
        let fitted = picks.iter().zip(&self.names).zip(&self.choices);
        (self.tick)(self.runs);
        Candidate {
            suppressor: self.suppressor,
            fitted: fitted
                .map(|((&(step, size), name), choices)| Fitted {
                    element: name.clone(),
                    filling: choices.steps[step][size].clone(),
                })
                .collect(),
            addition,
            elements: elements.collect(),
            checks: trial.checks,
            spreads: trial.spreads,
            study: Some(study),
            corners,
            set_by,
            trouble,
            runs: self.runs,
        }
    }

    /// What set the size: what the next harsher step does not hold, or the rating that a smaller size does not.
    fn set_by(&self, chosen: &Evaluated) -> Option<SetBy> {
        let main = self
            .place(Search::Harshest)
            .filter(|_| chosen.study.holds());
        let Some(main) = main else {
            return self.size_set_by(chosen);
        };
        let (step, size) = chosen.picks[main];
        let part = self.names[main].clone();
        let own = self.choices[main].steps[step][size].shown();
        let percent = |share: f64| crate::units::engineering(100.0 * share, "%", 3);
        if let Some(blocked) = self.blocked.get(&(step + 1)) {
            let kept = blocked.margin.map_or("none".into(), percent);
            return Some(SetBy {
                sentence: format!(
                    "{own} is the last that holds: with {} `{}` would keep a margin of {kept} of the {} asked",
                    blocked.shown,
                    blocked.check,
                    percent(blocked.asked)
                ),
                part,
                rating: blocked.check.clone(),
            });
        }
        let checks = 0..chosen.trial.checks.len();
        let tightest = checks.min_by(|&a, &b| {
            let worst = &chosen.study.worst;
            worst.margin(a).total_cmp(&worst.margin(b))
        })?;
        let check = chosen.trial.checks[tightest].name.clone();
        Some(SetBy {
            sentence: format!(
                "{own} is the last of those to choose from; `{check}` comes next to stopping it"
            ),
            part,
            rating: check,
        })
    }

    /// The rating that rules a smaller size out; where there is none smaller, the rating that is used most.
    fn size_set_by(&self, chosen: &Evaluated) -> Option<SetBy> {
        for (k, &(step, size)) in chosen.picks.iter().enumerate() {
            let sizes = &self.choices[k].steps[step];
            let Some(smaller) = size.checked_sub(1).and_then(|smaller| sizes.get(smaller)) else {
                continue;
            };
            if let Some((key, used)) = self.violated(chosen, k, smaller) {
                let part = self.names[k].clone();
                let used = crate::units::engineering(100.0 * used, "%", 3);
                return Some(SetBy {
                    sentence: format!(
                        "{} is the smallest that holds: {} would be used to {used} of its `{key}`",
                        sizes[size].shown(),
                        smaller.shown()
                    ),
                    rating: format!("{part}.{key}"),
                    part,
                });
            }
        }
        let mut most: Option<(usize, f64)> = None;
        for (number, check) in chosen.trial.checks.iter().enumerate() {
            let own = check
                .rating
                .as_ref()
                .is_some_and(|rating| self.names.contains(&rating.0));
            let margin = chosen.study.verdict(number).margin;
            if let (true, Some(margin)) = (own, margin)
                && most.is_none_or(|(_, least)| margin < least)
            {
                most = Some((number, margin));
            }
        }
        let (number, margin) = most?;
        let check = &chosen.trial.checks[number];
        let (part, _) = check.rating.clone()?;
        let used = crate::units::engineering(100.0 * (1.0 - margin), "%", 3);
        Some(SetBy {
            sentence: format!(
                "the smallest part will do: it is used to {used} of `{}` at most",
                check.name
            ),
            rating: check.name.clone(),
            part,
        })
    }
}

/// How an evaluation came out, seen along its ladder.
fn outcome(evaluated: &Evaluated) -> Outcome {
    let mut failing = (false, false);
    for (k, check) in evaluated.trial.checks.iter().enumerate() {
        let holds = evaluated
            .study
            .reached
            .iter()
            .all(|reached| reached.verdicts[k].holds);
        if !holds && check.eased_by_harshness {
            failing.0 = true;
        } else if !holds {
            failing.1 = true;
        }
    }
    match failing {
        (false, false) => Outcome::Holds,
        (true, false) => Outcome::TooGentle,
        (false, true) => Outcome::TooHarsh,
        (true, true) => Outcome::Neither,
    }
}
