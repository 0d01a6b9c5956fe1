//! The netlist's `materials` and `cores`: named, shared by every coil that uses them.

use super::core::{Core, Eddy};
use super::geometry::Fault;
use super::materials::{self, Filling};
use super::shapes::{self, SHAPES, ShapeKind};
use crate::diag::Diagnostic;
use crate::netlist::{Data, Fields, Key, Named, Node, Reader, Takes, is_name, nearest};
use crate::units::LENGTH;
use std::collections::BTreeMap;
use std::sync::Arc;

/// The keys that this room reads at the top of a netlist.
pub const KEYS: &[Key] = &[
    Key::optional(
        "materials",
        Takes::Other("a mapping of names to materials"),
        "magnetic materials by name",
    ),
    Key::optional(
        "cores",
        Takes::Other("a mapping of names to cores"),
        "cores by name",
    ),
];

/// Keys that every core has.
pub const CORE_KEYS: &[Key] = &[
    Key::required("shape", Takes::Word(&shapes::WORDS), "the core's shape"),
    Key::optional(
        "material",
        Takes::Name("a material"),
        "what fills it; air unless said",
    ),
    Key::default(
        "eddy_currents",
        Takes::Word(&["none", "solid", "laminated"]),
        "none",
        "in iron whose material tells its `resistivity`: a solid round bar of the core's area, or sheets",
    ),
    Key::optional(
        "lamination",
        Takes::Quantity(LENGTH),
        "thickness of the sheets; of a flat bar too",
    ),
];

/// Named materials and cores.
pub struct Library<'a> {
    reader: &'a Reader<'a>,
    /// None for one that was refused: naming it is no second error.
    materials: BTreeMap<String, Option<Arc<Filling>>>,
    cores: BTreeMap<String, Option<Arc<Core>>>,
}

impl<'a> Library<'a> {
    /// Reads both mappings of a netlist's top, whose table has [`KEYS`].
    pub fn read(top: &Fields<'a>) -> Self {
        let mut library = Library {
            reader: top.reader(),
            materials: BTreeMap::new(),
            cores: BTreeMap::new(),
        };
        for entry in top.entries("materials") {
            let material = materials::read(&entry, library.reader);
            library.materials.insert(entry.name.text, material);
        }
        for entry in top.entries("cores") {
            let core = library.core_at(entry.node, &entry.path, &[]);
            library.cores.insert(entry.name.text, core);
        }
        library
    }

    /// The core behind `key` of an element: a name from `cores`, or a core written in place.
    ///
    /// None where it is missing or wrong, which is reported.
    pub fn core(&self, fields: &Fields<'a>, key: &str) -> Option<Arc<Core>> {
        let Some((node, path)) = fields.node_and_path(key) else {
            fields.missing(key);
            return None;
        };
        let Some(name) = node.text() else {
            return self.core_at(node, &path, &[]);
        };
        let known = self.cores.keys().map(String::as_str);
        self.find(
            &self.cores,
            known,
            &Named {
                text: name.to_owned(),
                span: node.span,
            },
            ("core", "cores"),
        )
    }

    /// Names of the cores, sorted.
    pub fn core_names(&self) -> impl Iterator<Item = &str> {
        self.cores.keys().map(String::as_str)
    }

    /// A core by name.
    pub fn named(&self, name: &str) -> Option<&Arc<Core>> {
        self.cores.get(name)?.as_ref()
    }

    /// The core written in a mapping that has keys of its own (`beside`), such as a leg's.
    pub fn core_at(&self, node: &'a Node, path: &str, beside: &'static [Key]) -> Option<Arc<Core>> {
        let fields = Fields::new(node, path, CORE_KEYS, self.reader).also(beside);
        let kind = self.shape(&fields)?;
        let fields = kind
            .keys
            .iter()
            .fold(fields, |fields, table| fields.also(table));
        fields.finish();
        let material = self.material(&fields, kind);
        let shape = (kind.read)(&fields)?;
        let material = material?;
        let eddy = eddy(&fields, material.as_deref())?;
        Some(Arc::new(Core {
            path: path.to_owned(),
            shape,
            material,
            eddy,
        }))
    }

    fn shape(&self, fields: &Fields<'a>) -> Option<&'static ShapeKind> {
        let word = fields.word("shape")?;
        SHAPES.iter().find(|kind| kind.word == word)
    }

    /// The material of a core; the outer None where it is wrong.
    #[allow(clippy::option_option)]
    fn material(&self, fields: &Fields<'a>, kind: &ShapeKind) -> Option<Option<Arc<Filling>>> {
        if !fields.has("material") {
            return Some(None);
        }
        if !kind.takes_material {
            let headline = format!("a {} is a coil in air and takes no `material`", kind.word);
            fields.error(
                "material",
                "conflicting-keys",
                headline,
                "nothing to fill",
                None,
            );
            return None;
        }
        let name = fields.name("material")?;
        let known = self.materials.keys().map(String::as_str);
        self.find(&self.materials, known, &name, ("material", "materials"))
            .map(Some)
    }

    /// Looks a name up, or reports it with the nearest known one.
    fn find<'m, T: ?Sized>(
        &self,
        all: &BTreeMap<String, Option<Arc<T>>>,
        known: impl Iterator<Item = &'m str>,
        name: &Named,
        (what, place): (&str, &str),
    ) -> Option<Arc<T>> {
        if let Some(found) = all.get(&name.text) {
            return found.clone();
        }
        let label = match nearest(&name.text, known) {
            Some(near) => format!("did you mean `{near}`?"),
            None => format!("not in `{place}`"),
        };
        let headline = if is_name(&name.text) {
            format!("there is no {what} `{}`", name.text)
        } else {
            format!("{what} takes the name of an entry of `{place}`")
        };
        self.reader
            .sink
            .report(Diagnostic::error("unknown-name", headline).at(name.span, label));
        None
    }
}

/// Whether and how eddy currents are counted; the outer None where it is written wrongly.
#[allow(clippy::option_option)]
fn eddy(fields: &Fields<'_>, material: Option<&Filling>) -> Option<Option<Eddy>> {
    let conducts = material.is_some_and(|filling| filling.losses.conducts());
    // Iron that does not conduct has none: that is no default that anybody need know of.
    let written = fields.has("eddy_currents") || fields.has("lamination");
    if !conducts && !written {
        return Some(None);
    }
    let word = fields.word("eddy_currents")?;
    if (word == "laminated") != fields.has("lamination") {
        let (headline, help) = match word {
            "laminated" => (
                "laminated iron needs `lamination`, the thickness of its sheets".to_owned(),
                "lamination: 0.5 mm",
            ),
            _ => (
                format!("`lamination` has no meaning with `eddy_currents: {word}`"),
                "eddy_currents: laminated",
            ),
        };
        let key = if word == "laminated" {
            "eddy_currents"
        } else {
            "lamination"
        };
        let told = "goes with `eddy_currents: laminated`";
        fields.error(key, "conflicting-keys", headline, told, Some(help));
        return None;
    }
    if word == "none" {
        return Some(None);
    }
    if !conducts {
        let headline = "eddy currents need the `resistivity` of the core's material";
        fields.error(
            "eddy_currents",
            "missing-key",
            headline,
            "its material does not tell it",
            Some("a material takes `resistivity: 0.12 µΩ m`"),
        );
        return None;
    }
    let lamination = if word == "laminated" {
        Some(fields.positive("lamination")?)
    } else {
        None
    };
    Some(Some(Eddy { lamination }))
}

/// True where a mapping is none, or has unknown keys: that has its message, and what is missing may be misspelt.
pub(super) fn told_already(fields: &Fields<'_>, tables: &[&[Key]]) -> bool {
    let known = |word: &str| {
        tables
            .iter()
            .any(|table| table.iter().any(|key| key.name == word))
    };
    let mapping = fields.mapping();
    !matches!(mapping.data, Data::Map(_))
        || mapping.entries().iter().any(|entry| !known(&entry.key))
}

/// A fault of a coil on a core as a message at the element's key.
pub fn diagnostic(fault: &Fault, fields: &Fields<'_>, key: &str) -> Diagnostic {
    Diagnostic::error(fault.word, fault.text.clone())
        .at(fields.span(key), format!("`{}` of this core", fault.key))
        .help(fault.help)
}
