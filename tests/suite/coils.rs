//! Coils from pieces of netlist, for the tests of magnetics.

use coilbreak::diag::{Paint, Sink, Sources, draw_all};
use coilbreak::magnetics::{self, Library, WIRE_KEYS, WindingPlan, Wire, WireSpec, Wound};
use coilbreak::netlist::{Fields, Key, Reader, Takes, read_document};

const TOP: &[Key] = &[Key::optional(
    "wire",
    Takes::Map(WIRE_KEYS),
    "the wire of the coil under test",
)];

/// 20 °C [K].
pub const TWENTY: f64 = 293.15;

/// A coil under test: pieces of YAML.
#[derive(Clone, Debug, Default)]
pub struct Coil {
    /// The mapping of a material named `stuff`; empty for none.
    pub material: String,
    /// The keys of a core, without braces; `material: stuff` is added where there is one.
    pub core: String,
    /// The mapping of a wire; empty for none.
    pub wire: String,
    /// Number of turns.
    pub turns: usize,
    /// Temperature [K]; 20 °C where it is 0.
    pub temperature: f64,
}

impl Coil {
    /// A coil on a core without material.
    pub fn in_air(core: impl Into<String>, turns: usize) -> Self {
        Coil {
            core: core.into(),
            turns,
            ..Coil::default()
        }
    }

    /// A coil on a core of this material.
    pub fn on(material: impl Into<String>, core: impl Into<String>, turns: usize) -> Self {
        Coil {
            material: material.into(),
            ..Coil::in_air(core, turns)
        }
    }

    /// The same with a wire.
    pub fn of_wire(self, wire: impl Into<String>) -> Self {
        Coil {
            wire: wire.into(),
            ..self
        }
    }

    /// Reads the pieces as a netlist and derives the coil; any message fails the test.
    pub fn wound(&self) -> Wound {
        self.read(|library, plan, values| {
            let core = library
                .named("c")
                .expect("the core was read without an error");
            let temperature = if self.temperature > 0.0 {
                self.temperature
            } else {
                TWENTY
            };
            core.wound(values, &plan, temperature)
                .unwrap_or_else(|fault| panic!("{fault}"))
        })
    }

    /// The wire alone.
    pub fn wire(&self) -> Wire {
        self.read(|_, plan, _| plan.wire.expect("the coil has a wire"))
    }

    fn read<T>(
        &self,
        end: impl FnOnce(&Library<'_>, WindingPlan, &coilbreak::netlist::Values) -> T,
    ) -> T {
        let text = self.text();
        let mut sources = Sources::new();
        let sink = Sink::new();
        let document = read_document("coil.yaml", text.as_bytes(), &mut sources, &sink);
        let clean = |sink: &Sink| {
            let drawn = draw_all(&sink.sorted(), &sources, Paint::Plain);
            assert!(drawn.is_empty(), "{text}\n{drawn}");
        };
        clean(&sink);
        let document = document.expect("a text without messages has a tree");
        let reader = Reader::new(&sink);
        let top = Fields::new(&document.root, "", TOP, &reader).also(magnetics::KEYS);
        let library = Library::read(&top);
        let spec = top.map("wire").map(|fields| WireSpec::read(&fields));
        top.finish();
        clean(&sink);
        let values = reader.parameters.borrow().nominal();
        let wire = spec.flatten().map(|spec| spec.derive(&values));
        end(
            &library,
            WindingPlan {
                turns: self.turns,
                wire,
            },
            &values,
        )
    }

    fn text(&self) -> String {
        let mut text = String::new();
        let mut core = self.core.clone();
        if !self.material.is_empty() {
            text += &format!("materials:\n  stuff: {}\n", self.material);
            core += ", material: stuff";
        }
        if self.core.is_empty() {
            core =
                "shape: toroid, outer_diameter: 20 mm, inner_diameter: 10 mm, height: 5 mm".into();
        }
        text += &format!("cores:\n  c: {{{core}}}\n");
        if !self.wire.is_empty() {
            text += &format!("wire: {}\n", self.wire);
        }
        text
    }
}
