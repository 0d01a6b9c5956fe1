//! Phrases as patterns of words: matching a text to one, and finding the one that was probably meant.
//!
//! A pattern is written as the reference shows it, `voltage at NODE`: small letters stand for themselves, a
//! word in capitals is a place for a name.

use crate::netlist::{is_name, shortened};
use std::fmt;
use std::ops::Range;

/// A text that is no phrase. Whoever knows its place in a file makes a diagnostic of it.
#[derive(Clone, Debug, PartialEq)]
pub struct PhraseError {
    /// The message's word: `unknown-signal`, `unknown-event`.
    pub word: &'static str,
    /// Bytes of the text that are at fault.
    pub range: Range<usize>,
    /// A headline that stands alone.
    pub headline: String,
    /// What to say at the place.
    pub label: String,
    /// What would be right, ready to type where it can be known.
    pub help: String,
}

impl fmt::Display for PhraseError {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        out.write_str(&self.headline)
    }
}

impl std::error::Error for PhraseError {}

/// A family of phrases, for matching and for messages.
pub(super) struct Family {
    /// The message's word where a text is none of them.
    pub word: &'static str,
    /// What each of them is: `a signal`.
    pub noun: &'static str,
    /// A few of them for somebody who is far off.
    pub help: &'static str,
}

/// One word of a pattern.
#[derive(Clone, Copy, PartialEq)]
enum Place {
    /// This word and no other.
    Word(&'static str),
    /// One name: a node, a relay.
    Name,
    /// An element, or a winding or contact of one: `t1.primary`.
    Owner,
    /// A terminal: `k1.first`, `t1.primary.first`.
    Terminal,
    /// A whole number from 1.
    Count,
}

impl Place {
    fn of(word: &'static str) -> Place {
        match word {
            "NODE" | "A" | "B" | "RELAY" => Place::Name,
            "ELEMENT" | "COIL" => Place::Owner,
            "ELEMENT.TERMINAL" => Place::Terminal,
            "COUNT" => Place::Count,
            _ => Place::Word(word),
        }
    }

    fn takes(self, text: &str) -> bool {
        let parts = || text.split('.').count();
        match self {
            Place::Word(word) => word == text,
            Place::Name => is_name(text),
            Place::Owner => parts() <= 2 && text.split('.').all(is_name),
            Place::Terminal => (2..=3).contains(&parts()) && text.split('.').all(is_name),
            Place::Count => {
                text.parse::<u32>().is_ok_and(|count| count > 0) && !text.starts_with('+')
            }
        }
    }
}

/// The words of a text with their bytes.
fn words(text: &str) -> Vec<(Range<usize>, &str)> {
    let start = text.as_ptr() as usize;
    text.split_whitespace()
        .map(|word| {
            let from = word.as_ptr() as usize - start;
            (from..from + word.len(), word)
        })
        .collect()
}

/// The texts at the places of a pattern, if the whole text matches it.
pub(super) fn matched<'a>(text: &'a str, pattern: &'static str) -> Option<Vec<&'a str>> {
    let given = words(text);
    let wanted: Vec<Place> = pattern.split(' ').map(Place::of).collect();
    let fits = given.len() == wanted.len()
        && wanted
            .iter()
            .zip(&given)
            .all(|(place, (_, word))| place.takes(word));
    fits.then(|| {
        let places = wanted
            .iter()
            .zip(&given)
            .filter(|(place, _)| !matches!(place, Place::Word(_)));
        places.map(|(_, (_, word))| *word).collect()
    })
}

/// What is wrong with a text that matches none of the patterns, with the nearest one filled in.
pub(super) fn refuse(text: &str, patterns: &[&'static str], family: &Family) -> PhraseError {
    let shown = text.trim();
    let start = text.len() - text.trim_start().len();
    let whole = start..start + shown.len();
    let nearest = patterns
        .iter()
        .filter(|_| shown.len() <= LONGEST)
        .map(|pattern| align(text, pattern))
        .min_by(|a, b| a.cost.total_cmp(&b.cost))
        .filter(|alignment| alignment.cost <= FAR);
    let headline = match shown {
        "" => format!("an empty text is not {}", family.noun),
        _ => format!("`{}` is not {}", shortened(shown), family.noun),
    };
    match nearest {
        Some(Alignment {
            fault, suggestion, ..
        }) => PhraseError {
            word: family.word,
            range: fault.unwrap_or(whole),
            headline,
            label: format!("did you mean `{suggestion}`?"),
            help: format!("`{suggestion}`"),
        },
        None => PhraseError {
            word: family.word,
            range: whole,
            headline,
            label: format!("not {}", family.noun),
            help: family.help.to_string(),
        },
    }
}

/// A cost beyond which a pattern is not what was meant: two words missing, or one missing and one unlike.
const FAR: f64 = 2.0;

/// Bytes beyond which a text is no misspelt phrase; keeps a hostile line of megabytes from being compared.
const LONGEST: usize = 300;

struct Alignment {
    cost: f64,
    /// Bytes of the first word that does not fit; None where a word is missing.
    fault: Option<Range<usize>>,
    suggestion: String,
}

/// Aligns the words of a text with a pattern at the least cost (the edit distance over words).
fn align(text: &str, pattern: &'static str) -> Alignment {
    let given = words(text);
    let wanted: Vec<&'static str> = pattern.split(' ').collect();
    // cost[i][j]: the first i words given against the first j wanted.
    let mut cost = vec![vec![0.0; wanted.len() + 1]; given.len() + 1];
    for i in 0..=given.len() {
        for j in 0..=wanted.len() {
            let mut best = if i + j == 0 { 0.0 } else { f64::INFINITY };
            if i > 0 {
                best = f64::min(best, cost[i - 1][j] + SURPLUS);
            }
            if j > 0 {
                best = f64::min(best, cost[i][j - 1] + missing(wanted[j - 1]));
            }
            if i > 0 && j > 0 {
                best = f64::min(
                    best,
                    cost[i - 1][j - 1] + exchange(given[i - 1].1, wanted[j - 1]),
                );
            }
            cost[i][j] = best;
        }
    }
    trace_back(&cost, &given, &wanted)
}

/// Reads the way of least cost backwards: the suggestion and the first fault.
fn trace_back(
    cost: &[Vec<f64>],
    given: &[(Range<usize>, &str)],
    wanted: &[&'static str],
) -> Alignment {
    let (mut i, mut j) = (given.len(), wanted.len());
    let (mut fault, mut parts) = (None, Vec::new());
    while i + j > 0 {
        let here = cost[i][j];
        let swap = if i > 0 && j > 0 {
            exchange(given[i - 1].1, wanted[j - 1])
        } else {
            f64::INFINITY
        };
        if i > 0 && j > 0 && here == cost[i - 1][j - 1] + swap {
            (i, j) = (i - 1, j - 1);
            if swap > 0.0 {
                fault = Some(given[i].0.clone());
            }
            let place = Place::of(wanted[j]);
            let kept = !matches!(place, Place::Word(_)) && place.takes(given[i].1);
            parts.push(if kept { given[i].1 } else { wanted[j] });
        } else if j > 0 && here == cost[i][j - 1] + missing(wanted[j - 1]) {
            j -= 1;
            fault = None;
            parts.push(wanted[j]);
        } else {
            i -= 1;
            fault = Some(given[i].0.clone());
        }
    }
    parts.reverse();
    let suggestion = parts.join(" ");
    Alignment {
        cost: cost[given.len()][wanted.len()],
        fault,
        suggestion,
    }
}

/// Cost of a word too many.
const SURPLUS: f64 = 1.0;

/// Words that join others; people mix them up, so that a wrong one says little.
const JOINTS: &[&str] = &["at", "from", "to", "across", "through", "into", "of", "in"];

/// Cost of a word that is not there.
fn missing(wanted: &'static str) -> f64 {
    match Place::of(wanted) {
        Place::Word(word) if JOINTS.contains(&word) => 0.7,
        Place::Word(_) => 1.0,
        _ => 1.4,
    }
}

/// Cost of taking one word for another.
fn exchange(given: &str, wanted: &'static str) -> f64 {
    let place = Place::of(wanted);
    match place {
        Place::Word(word) if word == given => 0.0,
        Place::Word(word) if JOINTS.contains(&word) => {
            let joint = given.chars().count() <= 7 && given.chars().all(char::is_alphabetic);
            if joint { 0.6 } else { 1.4 }
        }
        Place::Word(word) => {
            let likeness = strsim::normalized_damerau_levenshtein(&given.to_lowercase(), word);
            // A little for the letters' case alone.
            0.1 + 1.4 * (1.0 - likeness)
        }
        _ if !place.takes(given) => 1.2,
        _ if JOINTS.contains(&given) => 0.9,
        _ => 0.0,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_bytes_of_words_are_found_in_any_spacing() {
        let text = "  voltage\tat  µ_node ";
        let found: Vec<_> = words(text)
            .into_iter()
            .map(|(range, word)| (&text[range], word))
            .collect();
        assert_eq!(
            found,
            [("voltage", "voltage"), ("at", "at"), ("µ_node", "µ_node")]
        );
    }

    #[test]
    fn places_take_what_they_say() {
        let takes = |place: &'static str, text| Place::of(place).takes(text);
        assert!(takes("NODE", "rail_2-b") && !takes("NODE", "2rail") && !takes("NODE", "a.b"));
        assert!(
            takes("ELEMENT", "t1.primary") && !takes("ELEMENT", "a.b.c") && !takes("ELEMENT", "a.")
        );
        assert!(takes("ELEMENT.TERMINAL", "a.b.c") && !takes("ELEMENT.TERMINAL", "a"));
        assert!(
            takes("COUNT", "3")
                && !takes("COUNT", "0")
                && !takes("COUNT", "+3")
                && !takes("COUNT", "-1")
        );
    }
}
