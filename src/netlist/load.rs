//! A netlist from a file or a text, with the files it brings and the overrides of the command line.

use super::document::{Document, LARGEST_FILE, read_document};
use super::node::{Data, Entry, Node};
use crate::diag::{Diagnostic, Sink, Sources, Span};
use std::path::{Component, Path, PathBuf};

/// Where a netlist comes from.
#[derive(Clone, Debug)]
pub enum Input {
    /// A file; what it brings is looked for in its folder.
    File(PathBuf),
    /// A text (standard input, a test) under a name for messages, and the folder for what it brings, if it may.
    Text {
        /// Name in messages.
        name: String,
        /// The bytes.
        bytes: Vec<u8>,
        /// Folder of brought files.
        folder: Option<PathBuf>,
    },
}

/// A netlist that has a tree. Softer errors may be in the sink already; reading on finds the others.
#[derive(Debug)]
pub struct Loaded {
    /// The tree, with brought files merged and overrides applied.
    pub document: Document,
    /// All texts.
    pub sources: Sources,
    /// Messages so far.
    pub sink: Sink,
}

/// Messages and the texts they point into.
#[derive(Debug)]
pub struct Failure {
    /// Messages.
    pub diagnostics: Vec<Diagnostic>,
    /// Texts.
    pub sources: Sources,
}

/// Why there is no tree.
#[derive(Debug)]
pub enum LoadError {
    /// A file could not be read (exit code 4).
    Unreadable(Box<Failure>),
    /// The text is wrong (exit code 2).
    Wrong(Box<Failure>),
}

impl LoadError {
    /// The messages and texts.
    pub fn failure(&self) -> &Failure {
        match self {
            LoadError::Unreadable(failure) | LoadError::Wrong(failure) => failure,
        }
    }
}

/// Sections that a brought file may have.
const BROUGHT: [&str; 3] = ["materials", "cores", "parts"];

/// Reads a netlist, merges what it brings and applies overrides `PATH=VALUE` in their order.
///
/// # Errors
/// A file that cannot be read, or a text without a tree. Other faults are in the sink of what is returned.
pub fn load(input: &Input, overrides: &[String]) -> Result<Loaded, LoadError> {
    let mut loader = Loader {
        sources: Sources::new(),
        sink: Sink::new(),
        unreadable: false,
        torn: false,
    };
    let document = loader.read(input, overrides);
    let Loader {
        sources,
        sink,
        unreadable,
        torn,
    } = loader;
    match document {
        Some(document) if !unreadable && !torn => Ok(Loaded {
            document,
            sources,
            sink,
        }),
        _ => {
            let failure = Box::new(Failure {
                diagnostics: sink.sorted(),
                sources,
            });
            Err(if unreadable {
                LoadError::Unreadable(failure)
            } else {
                LoadError::Wrong(failure)
            })
        }
    }
}

struct Loader {
    sources: Sources,
    sink: Sink,
    unreadable: bool,
    /// A brought file has no tree: what it holds would be missed everywhere.
    torn: bool,
}

impl Loader {
    fn read(&mut self, input: &Input, overrides: &[String]) -> Option<Document> {
        let (name, bytes, folder) = match input {
            Input::Text {
                name,
                bytes,
                folder,
            } => (name.clone(), bytes.clone(), folder.clone()),
            Input::File(path) => {
                let bytes = self.bytes(path, None)?;
                let folder = path.parent().map(|folder| {
                    if folder.as_os_str().is_empty() {
                        Path::new(".")
                    } else {
                        folder
                    }
                });
                (
                    path.display().to_string(),
                    bytes,
                    folder.map(Path::to_path_buf),
                )
            }
        };
        let mut document = read_document(&name, &bytes, &mut self.sources, &self.sink)?;
        // What a changed `bring` brings must be there before other overrides look for it.
        let brings =
            |assignment: &&String| assignment.split('=').next().map(str::trim) == Some("bring");
        let (early, late): (Vec<&String>, Vec<&String>) = overrides.iter().partition(brings);
        for assignment in early {
            document.set(assignment, &mut self.sources, &self.sink);
        }
        self.bring(&mut document, folder.as_deref());
        for assignment in late {
            document.set(assignment, &mut self.sources, &self.sink);
        }
        Some(document)
    }

    /// The bytes of a file, at most one more than a netlist may have; a message where it cannot be read.
    fn bytes(&mut self, path: &Path, at: Option<Span>) -> Option<Vec<u8>> {
        use std::io::Read;
        let mut bytes = Vec::new();
        let read = std::fs::File::open(path)
            .and_then(|file| file.take(LARGEST_FILE as u64 + 1).read_to_end(&mut bytes));
        if let Err(error) = read {
            let headline = format!("{} could not be read: {error}", path.display());
            let mut diagnostic = Diagnostic::error("unreadable-file", headline);
            if let Some(span) = at {
                diagnostic = diagnostic.at(span, "brought here");
            }
            self.sink.report(diagnostic);
            self.unreadable = true;
            return None;
        }
        Some(bytes)
    }

    /// Merges the files of `bring:` into the document.
    fn bring(&mut self, document: &mut Document, folder: Option<&Path>) {
        let Some(list) = document.root.get("bring").cloned() else {
            return;
        };
        let Data::List(items) = &list.data else {
            let diagnostic = Diagnostic::error(
                "wrong-type",
                format!("bring takes a list of files, got {}", list.what()),
            )
            .at(super::reader::place(&list), "a list has brackets")
            .help(format!(
                "bring: [{}]",
                list.text()
                    .filter(|text| !text.is_empty())
                    .unwrap_or("parts/relays.yaml")
            ));
            self.sink.report(diagnostic);
            return;
        };
        let mut seen: Vec<PathBuf> = Vec::new();
        for item in items {
            self.bring_file(document, item, folder, &mut seen);
        }
    }

    fn bring_file(
        &mut self,
        document: &mut Document,
        item: &Node,
        folder: Option<&Path>,
        seen: &mut Vec<PathBuf>,
    ) -> Option<()> {
        let path = self.allowed(item, folder, seen)?;
        let name = path.display().to_string();
        let bytes = self.bytes(&path, Some(item.span))?;
        let Some(brought) = read_document(&name, &bytes, &mut self.sources, &self.sink) else {
            self.torn = true;
            return None;
        };
        for section in brought.root.entries() {
            if !BROUGHT.contains(&section.key.as_str()) {
                let diagnostic = Diagnostic::error(
                    "bad-bring",
                    format!(
                        "a brought file has {}, got `{}`",
                        BROUGHT.join(", "),
                        super::shortened(&section.key)
                    ),
                )
                .at(section.key_span, "not among them")
                .at(item.span, "brought here");
                self.sink.report(diagnostic);
                continue;
            }
            self.merge(document, section);
        }
        Some(())
    }

    /// The path of a brought file, where it lies in or below the folder.
    fn allowed(
        &self,
        item: &Node,
        folder: Option<&Path>,
        seen: &mut Vec<PathBuf>,
    ) -> Option<PathBuf> {
        let refuse = |headline: String, label: &str| {
            self.sink.report(
                Diagnostic::error("bad-bring", headline).at(super::reader::place(item), label),
            );
        };
        let Some(text) = item.text().filter(|text| !text.is_empty()) else {
            refuse(
                format!("bring takes names of files, got {}", item.what()),
                "not a file's name",
            );
            return None;
        };
        let shown = super::shortened(text);
        let Some(folder) = folder else {
            refuse(
                format!("a netlist without a folder cannot bring {shown}"),
                "there is no folder to look in",
            );
            return None;
        };
        let relative = Path::new(text);
        if relative
            .components()
            .any(|part| !matches!(part, Component::Normal(_) | Component::CurDir))
            || text.contains('\\')
        {
            refuse(
                format!("{shown} does not lie in or below the netlist's folder"),
                "only names below the folder, without `..`",
            );
            return None;
        }
        let path = folder.join(relative);
        // Symbolic links are followed before the comparison; a file that is not there is the reader's to report.
        if let (Ok(real), Ok(base)) = (path.canonicalize(), folder.canonicalize()) {
            if !real.starts_with(&base) {
                refuse(
                    format!("{shown} leads out of the netlist's folder"),
                    "a link to somewhere else",
                );
                return None;
            }
            if seen.contains(&real) {
                refuse(format!("{shown} is brought twice"), "a second time");
                return None;
            }
            seen.push(real);
        }
        Some(path)
    }

    /// Adds the entries of one brought section; a name that is there already is an error that points to both.
    fn merge(&mut self, document: &mut Document, section: &Entry) {
        let Data::Map(brought) = &section.value.data else {
            if !section.value.is_empty() {
                let headline = format!(
                    "{} takes a mapping of names, got {}",
                    section.key,
                    section.value.what()
                );
                self.sink.report(
                    Diagnostic::error("wrong-type", headline)
                        .at(section.value.span, "not a mapping"),
                );
            }
            return;
        };
        let Data::Map(top) = &mut document.root.data else {
            return;
        };
        let at = match top.iter().position(|entry| entry.key == section.key) {
            Some(at) => at,
            None => {
                let value = Node {
                    data: Data::Map(Vec::new()),
                    ..section.value.clone()
                };
                top.push(Entry {
                    value,
                    ..section.clone()
                });
                top.len() - 1
            }
        };
        // A section that is no mapping is reported when it is read.
        let Data::Map(entries) = &mut top[at].value.data else {
            return;
        };
        let mut known: std::collections::BTreeMap<String, Span> = entries
            .iter()
            .map(|entry| (entry.key.clone(), entry.key_span))
            .collect();
        for entry in brought {
            match known.get(&entry.key) {
                Some(&first) => {
                    let diagnostic = Diagnostic::error(
                        "duplicate-key",
                        format!(
                            "`{}` is in {} twice",
                            super::shortened(&entry.key),
                            section.key
                        ),
                    )
                    .at(entry.key_span, "brought from here")
                    .at(first, "first here")
                    .help("rename one of them");
                    self.sink.report(diagnostic);
                }
                None => {
                    known.insert(entry.key.clone(), entry.key_span);
                    entries.push(entry.clone());
                }
            }
        }
    }
}

#[cfg(test)]
mod tests;
