//! The suppressors that are tried, one file per kind. To add one: a file with its entry, and its line in `SUPPRESSORS`.

mod across;
mod diode;
mod diode_resistor;
mod diode_zener;
mod none;
mod rc;
mod suppressor_diode;

use super::catalogue::Catalogue;
use super::facts::Facts;
use super::fillings::Filling;

/// Every suppressor, simple ones first.
pub const SUPPRESSORS: &[Suppressor] = &[
    none::NONE,
    diode::DIODE,
    diode_resistor::DIODE_RESISTOR,
    diode_zener::DIODE_ZENER,
    suppressor_diode::ACROSS_COIL,
    suppressor_diode::ACROSS_SWITCH,
    rc::ACROSS_SWITCH,
];

/// A kind of suppressor.
#[derive(Debug)]
pub struct Suppressor {
    /// Its word, in results and in `try:`.
    pub word: &'static str,
    /// A shorter word in `try:` that means all of its family.
    pub family: &'static str,
    /// What it is, in a phrase.
    pub about: &'static str,
    /// Where it is put: `coil`, `switch`, or empty.
    pub place: &'static str,
    /// What it is made of, one word per element: `diode`, `zener`.
    pub elements: &'static [&'static str],
    /// What each of its elements may be.
    pub choices: fn(&Facts, &Catalogue) -> Vec<Choices>,
    /// How its elements are wired.
    pub wire: fn(&Facts, &mut Wiring<'_>),
}

/// What one element of a suppressor may be.
pub struct Choices {
    /// From gentle to harsh: later ones let the coil go sooner and the voltage rise higher. Within a step the same
    /// value in rising sizes.
    pub steps: Vec<Vec<Filling>>,
    /// The step at which a search begins.
    pub seed: usize,
    /// How its step is chosen.
    pub search: Search,
}

/// How a step is chosen.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Search {
    /// There is one step; only the size is chosen.
    SizeOnly,
    /// The harshest step that holds.
    Harshest,
    /// The step with the largest margin.
    Best,
}

impl Choices {
    /// One step of rising sizes.
    pub fn sizes(sizes: Vec<Filling>) -> Self {
        Choices {
            steps: vec![sizes],
            seed: 0,
            search: Search::SizeOnly,
        }
    }

    /// Steps from gentle to harsh; the search begins at the last one for which `gentle_enough` says so.
    pub fn harshest(steps: Vec<Vec<Filling>>, gentle_enough: impl Fn(&[Filling]) -> bool) -> Self {
        let seed = steps
            .iter()
            .rposition(|step| gentle_enough(step))
            .unwrap_or(0);
        Choices {
            steps,
            seed,
            search: Search::Harshest,
        }
    }
}

/// Where a suppressor's elements go.
pub struct Wiring<'a> {
    /// The chosen fillings, one per element.
    pub fillings: &'a [Filling],
    /// The names of the elements.
    pub names: &'a [String],
    /// A free name for a node between two of them.
    pub between: String,
    /// Elements as they read in the netlist: name and mapping.
    pub elements: Vec<(String, String)>,
}

impl Wiring<'_> {
    /// Adds element `k` with its terminals, as they read in the netlist.
    pub fn add(&mut self, k: usize, terminals: String) {
        let keys = self.fillings[k].keys();
        self.elements
            .push((self.names[k].clone(), format!("{{{keys}, {terminals}}}")));
    }
}

/// The suppressors that a word of `try:` means; none where it is no such word.
pub fn meant(word: &str) -> Vec<&'static Suppressor> {
    SUPPRESSORS
        .iter()
        .filter(|suppressor| suppressor.word == word || suppressor.family == word)
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn words_are_unique_and_families_lead_to_their_members() {
        for (k, suppressor) in SUPPRESSORS.iter().enumerate() {
            let same = SUPPRESSORS[..k]
                .iter()
                .any(|other| other.word == suppressor.word);
            assert!(!same, "{}", suppressor.word);
            assert!(
                meant(suppressor.family)
                    .iter()
                    .any(|meant| meant.word == suppressor.word),
                "{}",
                suppressor.word
            );
        }
        assert_eq!(meant("suppressor_diode").len(), 2);
        assert!(meant("fuse").is_empty());
    }
}
