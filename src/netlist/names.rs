//! Names, and the nearest known word to a misspelt one.

use crate::diag::Span;

/// A text with its place.
#[derive(Clone, Debug, PartialEq)]
pub struct Named {
    /// The text.
    pub text: String,
    /// Where it stands.
    pub span: Span,
}

/// Whether a text is a name: letters, digits, `_`, `-`, starting with a letter. Letters of every script count.
pub fn is_name(text: &str) -> bool {
    let mut chars = text.chars();
    chars.next().is_some_and(char::is_alphabetic)
        && chars.all(|c| c.is_alphanumeric() || c == '_' || c == '-')
}

/// The candidate that a misspelt word probably means; None where nothing is near. Of two equally near ones the
/// first.
pub fn nearest<'a>(word: &str, candidates: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let folded = word.to_lowercase().replace('-', "_");
    // Beyond any real word; keeps a hostile key of megabytes from being compared.
    if folded.len() > 100 {
        return None;
    }
    let mut best: Option<(usize, &str)> = None;
    for candidate in candidates {
        let plain = candidate.to_lowercase().replace('-', "_");
        let length = plain.chars().count().max(folded.chars().count());
        if plain.len() > 100 {
            continue;
        }
        let mut distance = strsim::osa_distance(&folded, &plain);
        // A word cut short, `resist` or `cap`, means the one that it begins.
        if folded.len() >= 3 && plain.starts_with(&folded) {
            distance = distance.min(2);
        }
        let allowed = length.div_ceil(3).max(1);
        // Words without a common letter, such as the nodes `a` and `b`, are not meant for each other.
        if distance <= allowed
            && distance < length
            && best.is_none_or(|(least, _)| distance < least)
        {
            best = Some((distance, candidate));
        }
    }
    best.map(|(_, candidate)| candidate)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_nearest_word_is_one_slip_away() {
        let words = [
            "resistance",
            "capacitance",
            "closed_resistance",
            "open_resistance",
            "turns",
        ];
        assert_eq!(nearest("resistence", words), Some("resistance"));
        assert_eq!(
            nearest("closed-resistance", words),
            Some("closed_resistance")
        );
        assert_eq!(nearest("Turns", words), Some("turns"));
        assert_eq!(nearest("trun", words), Some("turns"));
        assert_eq!(nearest("cap", words), Some("capacitance"));
        assert_eq!(nearest("flux", words), None);
        assert_eq!(nearest("", words), None);
        assert_eq!(nearest("a", ["b", "c"]), None);
    }

    #[test]
    fn names_start_with_a_letter_and_hold_no_dots_or_blanks() {
        for name in ["k1", "K1-coil", "a_b", "Spule_ä"] {
            assert!(is_name(name), "{name}");
        }
        for text in ["", "1k", "_a", "a b", "a.b", "a/b", "-", "a\n", "<b>"] {
            assert!(!is_name(text), "{text}");
        }
    }
}
