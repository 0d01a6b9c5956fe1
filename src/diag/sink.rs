//! Collects the messages of one reading, so that all of a file's errors come in one go.

use super::diagnostic::{Diagnostic, Severity};
use std::cell::{Cell, RefCell};

/// How many messages are kept; a file with more is told how many it has.
const KEPT: usize = 100;

/// Messages so far. Shared by reference while a netlist is read.
#[derive(Debug, Default)]
pub struct Sink {
    found: RefCell<Vec<Diagnostic>>,
    errors: Cell<usize>,
    left_out: Cell<usize>,
}

impl Sink {
    /// No messages.
    pub fn new() -> Self {
        Sink::default()
    }

    /// Takes a message; one that is there already is dropped, and beyond a hundred errors are only counted.
    pub fn report(&self, diagnostic: Diagnostic) {
        let mut found = self.found.borrow_mut();
        if found.contains(&diagnostic) {
            return;
        }
        if diagnostic.severity == Severity::Error {
            self.errors.set(self.errors.get() + 1);
        }
        if found.len() < KEPT {
            found.push(diagnostic);
        } else {
            self.left_out.set(self.left_out.get() + 1);
        }
    }

    /// True once an error was reported.
    pub fn has_errors(&self) -> bool {
        self.errors.get() > 0
    }

    /// Number of errors reported.
    pub fn error_count(&self) -> usize {
        self.errors.get()
    }

    /// The messages by position (those without a place first), and one line on how many more there were.
    pub fn sorted(&self) -> Vec<Diagnostic> {
        let mut all = self.found.borrow().clone();
        all.sort_by_key(|diagnostic| diagnostic.span());
        let more = self.left_out.get();
        if more > 0 {
            let headline = format!("{more} more messages are left out; mend these first");
            all.push(Diagnostic::note("more-messages", headline));
        }
        all
    }
}

#[cfg(test)]
mod tests {
    use super::super::sources::{Sources, Span};
    use super::*;

    #[test]
    fn messages_are_sorted_by_place_and_repeats_dropped() {
        let file = Sources::new().add("a", "");
        let at = |start| {
            Diagnostic::error("x", format!("at {start}")).at(
                Span {
                    file,
                    start,
                    end: start,
                },
                "",
            )
        };
        let sink = Sink::new();
        for start in [7, 3, 7, 5] {
            sink.report(at(start));
        }
        let order: Vec<String> = sink
            .sorted()
            .into_iter()
            .map(|found| found.headline)
            .collect();
        assert_eq!(order, ["at 3", "at 5", "at 7"]);
        assert_eq!(sink.error_count(), 3);
    }

    #[test]
    fn beyond_a_hundred_they_are_counted() {
        let sink = Sink::new();
        for k in 0..250 {
            sink.report(Diagnostic::error("x", format!("{k}")));
        }
        let all = sink.sorted();
        assert_eq!(all.len(), 101);
        assert_eq!(
            all[100].headline,
            "150 more messages are left out; mend these first"
        );
        assert_eq!(sink.error_count(), 250);
    }
}
