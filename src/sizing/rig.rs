//! The rig: a netlist made ready for sizing.
//!
//! The switch gets commands of its own (closed and settled, open, closed again), suppressors that are there are taken
//! out, and of the readings and limits those stay that make sense in such a run.

use super::taken_out::{Chain, mentions, suppressors};
use crate::circuit::Entry;
use crate::diag::{Diagnostic, Sink, Sources};
use crate::netlist::{Document, Node, read_fragment};
use crate::readings::{Needs, Reading};
use crate::run::{Netlist, Sizing};
use crate::signals::{Happening, WrittenInstant};

/// Keys that command a switch.
const COMMANDS: [&str; 5] = ["opens_at", "closes_at", "square", "watches", "initially"];

/// A limit that is not judged here, and why.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct LeftOut {
    /// Its name.
    pub limit: String,
    /// Why.
    pub why: String,
}

/// A netlist made ready for sizing.
#[derive(Clone, Debug)]
pub struct Rig {
    /// The tree, without any suppressor.
    pub document: Document,
    /// The texts that it points into.
    pub sources: Sources,
    /// Name of the coil.
    pub coil: String,
    /// Name of the switch.
    pub switch: String,
    /// Elements that were taken out.
    pub taken_out: Vec<String>,
    /// Suppressors that could not be taken out.
    pub kept: Vec<String>,
    /// Limits that are not judged.
    pub left_out: Vec<LeftOut>,
}

impl Rig {
    /// Prepares a netlist.
    pub fn of(netlist: &Netlist, sizing: &Sizing) -> Self {
        let (coil, switch) = (sizing.coil.text.clone(), sizing.switch.text.clone());
        let mut rig = Rig {
            document: netlist.document.clone(),
            sources: netlist.sources.clone(),
            coil,
            switch,
            taken_out: Vec::new(),
            kept: Vec::new(),
            left_out: Vec::new(),
        };
        let closes_again = rig.command_switch();
        let gone = rig.make_room(netlist, sizing);
        rig.choose_limits(netlist, &gone, closes_again);
        rig
    }

    /// Takes the switch's own commands away; true where it would have closed again.
    fn command_switch(&mut self) -> bool {
        let path = format!("elements.{}", self.switch);
        let mut closes_again = false;
        let mut strip = |document: &mut Document, path: &str| {
            for key in COMMANDS {
                let taken = document.remove(&format!("{path}.{key}"));
                closes_again |= taken.is_some() && !matches!(key, "opens_at" | "initially");
            }
        };
        strip(&mut self.document, &path);
        let part = self.document.at(&format!("{path}.part"));
        if let Some(part) = part.and_then(Node::text).map(str::to_owned) {
            let copy = self.free_name("parts", &format!("{part}_{}", self.switch));
            let node = self.document.at(&format!("parts.{part}")).cloned();
            let commanded = |node: &Node| COMMANDS.iter().any(|key| node.get(key).is_some());
            if let Some(node) = node.filter(commanded) {
                self.document.insert(&format!("parts.{copy}"), node);
                strip(&mut self.document, &format!("parts.{copy}"));
                self.put(&format!("{path}.part"), &copy);
            }
        }
        closes_again
    }

    /// Takes suppressors out; returns the names that are gone, private nodes included.
    fn make_room(&mut self, netlist: &Netlist, sizing: &Sizing) -> Vec<String> {
        let circuit = &netlist.circuit;
        let keep = |name: &str| {
            let mut names = sizing.keep.iter().flatten();
            names.any(|kept| kept.text == name)
        };
        let across = [&self.coil, &self.switch].map(|name| circuit.find(name));
        let chains: Vec<Chain> = across
            .into_iter()
            .flatten()
            .flat_map(|entry| suppressors(circuit, entry))
            .collect();
        let mut gone = Vec::new();
        for chain in chains {
            let entries: Vec<&Entry> = chain.entries.iter().map(|&k| &circuit.entries[k]).collect();
            let names: Vec<String> = entries.iter().map(|entry| entry.name.clone()).collect();
            if names.iter().any(|name| keep(name)) {
                continue;
            }
            let mut lost = names.clone();
            lost.extend(chain.nodes.iter().cloned());
            let followed = circuit.entries.iter().any(|other| {
                let own = names.contains(&other.name);
                let phrases = ["follows", "watches"].map(|key| other.node.get(key));
                !own && phrases
                    .into_iter()
                    .flatten()
                    .any(|node| mentions(node, &lost))
            });
            if followed {
                self.kept.extend(names);
                continue;
            }
            for name in &names {
                self.document.remove(&format!("elements.{name}"));
            }
            self.taken_out.extend(names);
            gone.extend(lost);
        }
        gone
    }

    /// Keeps the limits whose readings make sense in the sizing run, and their readings.
    fn choose_limits(&mut self, netlist: &Netlist, gone: &[String], closes_again: bool) {
        let mut readings: Vec<(String, bool)> = Vec::new();
        let limits = netlist.document.root.get("limits").cloned();
        for limit in limits.iter().flat_map(|limits| limits.entries()) {
            let verdict = match limit.value.get("reading").and_then(Node::text) {
                None if mentions(&limit.value, gone) => Err("its element is taken out".to_owned()),
                None => Ok(None),
                Some(name) => self.judge_reading(netlist, name, gone).map(Some),
            };
            match verdict {
                Ok(Some(reading)) => readings.push(reading),
                Ok(None) => {}
                Err(why) => {
                    self.document.remove(&format!("limits.{}", limit.key));
                    self.left_out.push(LeftOut {
                        limit: limit.key.clone(),
                        why,
                    });
                }
            }
        }
        let all = netlist.document.root.get("readings").cloned();
        for entry in all.iter().flat_map(|all| all.entries()) {
            let path = format!("readings.{}", entry.key);
            match readings.iter().find(|(name, _)| *name == entry.key) {
                None => {
                    self.document.remove(&path);
                }
                // The netlist's run ends with the switch open; here the window ends where it closes again.
                Some((_, true)) if !closes_again => {
                    self.put(&format!("{path}.to"), &format!("{} closes", self.switch));
                }
                Some(_) => {}
            }
        }
    }

    /// A reading that a limit judges: its name, and whether its window lasts from the opening to the end of the run.
    fn judge_reading(
        &self,
        netlist: &Netlist,
        name: &str,
        gone: &[String],
    ) -> Result<(String, bool), String> {
        let reading = netlist
            .readings
            .iter()
            .find(|reading| reading.name.text == name)
            .ok_or("its reading was not read")?;
        let written = netlist.document.at(&format!("readings.{name}"));
        if written.is_some_and(|written| mentions(written, gone)) {
            return Err(format!("its reading `{name}` is of what is taken out"));
        }
        let open_ended = self
            .window(reading)
            .map_err(|why| format!("its reading `{name}` {why}"))?;
        Ok((name.to_owned(), open_ended))
    }

    /// True where a reading's window lasts from the opening to the end of the run; an error where it makes no sense
    /// while the switch opens once and closes once.
    fn window(&self, reading: &Reading) -> Result<bool, &'static str> {
        let instants = [&reading.from, &reading.to];
        for instant in instants.into_iter().flatten() {
            match instant {
                WrittenInstant::Time(_) => return Err("is tied to simulated time"),
                WrittenInstant::Event(event, _) => {
                    if event.element.element != self.switch || event.count != 1 {
                        return Err("waits for another event than the first opening or closing");
                    }
                }
            }
        }
        let bounded = reading.from.is_some() && reading.to.is_some();
        match reading.kind.word {
            "first_time" | "last_time" => return Err("is a simulated time"),
            "mean" | "rms" | "integral" | "time_above" | "time_below" if !bounded => {
                return Err("depends on how long the run lasts");
            }
            "final" if !bounded => return Err("is taken at the end of the run"),
            _ => {}
        }
        let opens = reading.from.as_ref().and_then(WrittenInstant::event);
        let opens = opens.is_some_and(|(event, _)| event.happening == Happening::Opens);
        Ok(opens && reading.to.is_none() && reading.kind.needs != Needs::Instant)
    }

    /// A name that no entry of a section has yet, made from a wish.
    pub fn free_name(&self, section: &str, wish: &str) -> String {
        let taken = |name: &str| {
            let section = self.document.root.get(section);
            section.is_some_and(|section| section.get(name).is_some())
        };
        free(wish, taken)
    }

    /// A node name that no element uses yet, made from a wish.
    pub fn free_node(&self, wish: &str) -> String {
        let elements = self.document.root.get("elements");
        let taken =
            |name: &str| elements.is_some_and(|elements| mentions(elements, &[name.to_owned()]));
        free(wish, taken)
    }

    /// Puts a value at a path.
    pub fn put(&mut self, path: &str, yaml: &str) {
        put(&mut self.document, &mut self.sources, path, yaml);
    }

    /// What is to be said about what was taken out and left out.
    pub fn remarks(&self) -> Vec<Diagnostic> {
        let mut remarks = Vec::new();
        if !self.taken_out.is_empty() {
            let headline = format!(
                "taken out to make room for the candidates: {}",
                self.taken_out.join(", ")
            );
            let help = "`sizing: {keep: [NAME]}` keeps an element that is no suppressor";
            remarks.push(Diagnostic::note("taken-out", headline).help(help));
        }
        if !self.kept.is_empty() {
            let headline = format!(
                "another element follows {}, so it stays while the candidates are tried",
                self.kept.join(", ")
            );
            remarks.push(Diagnostic::caution("suppressor-kept", headline));
        }
        for LeftOut { limit, why } in &self.left_out {
            let headline = format!("limit `{limit}` is not judged: {why}");
            remarks.push(Diagnostic::caution("limit-not-judged", headline).help(
                "a reading `from: SWITCH opens` (and `to: SWITCH closes`) can be judged in the sizing run",
            ));
        }
        remarks
    }
}

/// Puts a value, written as YAML by the program, at a path of a document.
pub fn put(document: &mut Document, sources: &mut Sources, path: &str, yaml: &str) {
    if let Some(node) = read_fragment("sizing", yaml, sources, &Sink::new()) {
        document.insert(path, node);
    }
}

fn free(wish: &str, taken: impl Fn(&str) -> bool) -> String {
    let numbered = (2..).map(|k| format!("{wish}_{k}"));
    std::iter::once(wish.to_owned())
        .chain(numbered)
        .find(|name| !taken(name))
        .expect("of endlessly many names one is free")
}
