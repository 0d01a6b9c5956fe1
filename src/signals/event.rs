//! Events that a person can name, `k1_driver opens 3`, and the log of those that have happened.

use super::phrase::Owner;
use super::words::{Family, PhraseError, matched, refuse};
use std::collections::{BTreeMap, VecDeque};
use std::fmt;

/// What happens at a switch or contact.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Happening {
    /// A contact or switch begins to open.
    Opens,
    /// A contact or switch begins to close.
    Closes,
}

/// One event of a run: the `count`-th opening or closing of a switch since the start.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct EventPhrase {
    /// The switch, or a contact of a relay: `k1.main`.
    pub element: Owner,
    /// What it does.
    pub happening: Happening,
    /// Which time, from 1.
    pub count: u32,
}

/// How an event may be written.
pub const EVENTS: &[&str] = &[
    "ELEMENT opens",
    "ELEMENT closes",
    "ELEMENT opens COUNT",
    "ELEMENT closes COUNT",
];

const FAMILY: Family = Family {
    word: "unknown-event",
    noun: "an instant",
    help: "an instant is a time like `20 ms` or an event like `k1_driver opens` (its first) or `k1_driver opens 3`",
};

impl EventPhrase {
    /// Reads `ELEMENT opens|closes [COUNT]`.
    pub fn parse(text: &str) -> Result<EventPhrase, PhraseError> {
        let read = |pattern: &&'static str| {
            let names = matched(text, pattern)?;
            let happening = if pattern.contains("opens") {
                Happening::Opens
            } else {
                Happening::Closes
            };
            let count = names.get(1).map_or(Some(1), |count| count.parse().ok())?;
            Some(EventPhrase {
                element: Owner::parse(names.first()?),
                happening,
                count,
            })
        };
        EVENTS
            .iter()
            .find_map(read)
            .ok_or_else(|| refuse(text, EVENTS, &FAMILY))
    }
}

impl fmt::Display for Happening {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        out.write_str(match self {
            Happening::Opens => "opens",
            Happening::Closes => "closes",
        })
    }
}

impl fmt::Display for EventPhrase {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(out, "{} {}", self.element, self.happening)?;
        if self.count == 1 {
            Ok(())
        } else {
            write!(out, " {}", self.count)
        }
    }
}

/// Instants that a log keeps of what one element does again and again: so many first and so many latest ones. Who waits
/// for an event looks step by step and sees it among the latest.
const KEPT: usize = 1_000;

/// Events that have happened so far, in order of time. An event is logged before any piece that starts at its
/// instant is handed on. Of a switch that never rests the log keeps the first and the latest events alone.
#[derive(Clone, Debug, Default)]
pub struct EventLog {
    /// Openings and closings of each element.
    instants: BTreeMap<Owner, [Instants; 2]>,
}

/// The first and the latest instants of one kind of event.
#[derive(Clone, Debug, Default)]
struct Instants {
    count: usize,
    first: Vec<f64>,
    latest: VecDeque<f64>,
}

impl Instants {
    fn note(&mut self, time: f64) {
        self.count += 1;
        if self.first.len() < KEPT {
            self.first.push(time);
            return;
        }
        if self.latest.len() == KEPT {
            self.latest.pop_front();
        }
        self.latest.push_back(time);
    }

    /// The instant of a number from 0; None where it has not happened or is forgotten.
    fn get(&self, number: usize) -> Option<f64> {
        let forgotten = self.count - self.first.len() - self.latest.len();
        let behind = || number.checked_sub(self.first.len() + forgotten);
        let first = self.first.get(number);
        first.or_else(|| self.latest.get(behind()?)).copied()
    }

    fn kept(&self) -> impl Iterator<Item = f64> {
        self.first.iter().chain(&self.latest).copied()
    }
}

impl EventLog {
    /// Notes an event at `time` [s].
    pub fn note(&mut self, element: &Owner, happening: Happening, time: f64) {
        if !self.instants.contains_key(element) {
            self.instants.insert(element.clone(), Default::default());
        }
        if let Some(times) = self.instants.get_mut(element) {
            times[happening as usize].note(time);
        }
    }

    /// When a named event happened [s]; None as long as it has not, and again once it is forgotten.
    pub fn when(&self, event: &EventPhrase) -> Option<f64> {
        let which = usize::try_from(event.count).ok()?.checked_sub(1)?;
        let times = self.instants.get(&event.element)?;
        times[event.happening as usize].get(which)
    }

    /// Every time [s] kept at which an element did this, in order.
    pub fn all(&self, element: &Owner, happening: Happening) -> impl Iterator<Item = f64> {
        let times = self.instants.get(element);
        times
            .into_iter()
            .flat_map(move |times| times[happening as usize].kept())
    }

    /// All events kept, in order of time; at one instant in the order of the elements' names.
    pub fn in_order(&self) -> Vec<(f64, &Owner, Happening)> {
        let mut all = Vec::new();
        for (element, times) in &self.instants {
            for happening in [Happening::Opens, Happening::Closes] {
                let times = times[happening as usize].kept();
                all.extend(times.map(|time| (time, element, happening)));
            }
        }
        all.sort_by(|a, b| a.0.total_cmp(&b.0));
        all
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn events_are_read_and_printed() {
        for text in ["k1_driver opens", "k1_driver closes 3", "k1.main opens 12"] {
            assert_eq!(EventPhrase::parse(text).expect(text).to_string(), text);
        }
        assert_eq!(
            EventPhrase::parse("s1 opens 1")
                .expect("the first")
                .to_string(),
            "s1 opens"
        );
    }

    #[test]
    fn the_nearest_event_is_suggested() {
        for (text, fault, meant) in [
            ("k1_driver open", "open", "k1_driver opens"),
            ("k1_driver closed 2", "closed", "k1_driver closes 2"),
            ("k1_driver opens 0", "0", "k1_driver opens"),
            ("k1_driver opens twice", "twice", "k1_driver opens"),
            ("when k1_driver opens", "when", "k1_driver opens"),
        ] {
            let error = EventPhrase::parse(text).expect_err(text);
            assert_eq!(error.help, format!("`{meant}`"), "{text}");
            assert_eq!(&text[error.range], fault, "{text}");
        }
        assert_eq!(EventPhrase::parse("").expect_err("empty").help, FAMILY.help);
    }

    #[test]
    fn the_log_knows_what_has_happened() {
        let (mut log, s1) = (EventLog::default(), Owner::parse("s1"));
        let third = EventPhrase::parse("s1 opens 3").expect("an event");
        for (happening, time) in [
            (Happening::Opens, 1.0),
            (Happening::Closes, 2.0),
            (Happening::Opens, 3.0),
        ] {
            log.note(&s1, happening, time);
        }
        assert_eq!(log.when(&third), None);
        log.note(&s1, Happening::Opens, 5.0);
        assert_eq!(log.when(&third), Some(5.0));
        let times: Vec<f64> = log.in_order().iter().map(|event| event.0).collect();
        assert_eq!(times, [1.0, 2.0, 3.0, 5.0]);
    }

    #[test]
    fn of_a_switch_that_never_rests_the_first_and_the_latest_events_are_kept() {
        let (mut log, s1) = (EventLog::default(), Owner::parse("s1"));
        let total = 5 * KEPT as u32;
        for count in 1..=total {
            log.note(&s1, Happening::Opens, f64::from(count));
            let event = EventPhrase::parse(&format!("s1 opens {count}")).expect("an event");
            assert_eq!(log.when(&event), Some(f64::from(count)));
        }
        let when = |count| {
            log.when(&EventPhrase {
                element: s1.clone(),
                happening: Happening::Opens,
                count,
            })
        };
        let kept = KEPT as u32;
        assert_eq!(when(kept), Some(f64::from(kept)));
        assert_eq!((when(kept + 1), when(total - kept)), (None, None));
        assert_eq!(when(total - kept + 1), Some(f64::from(total - kept + 1)));
        assert_eq!(
            (when(total), when(total + 1)),
            (Some(f64::from(total)), None)
        );
        assert_eq!(log.all(&s1, Happening::Opens).count(), 2 * KEPT);
        assert_eq!(log.all(&s1, Happening::Closes).count(), 0);
    }
}
