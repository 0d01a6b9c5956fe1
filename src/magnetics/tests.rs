//! Whole pieces of netlist: right ones give their coils, wrong ones their messages at the place of the fault.

use super::*;
use crate::netlist::expected::differences;
use crate::netlist::{Fields, Key, Need, Takes, Values};

const COIL: &[Key] = &[
    Key::required("core", Takes::Name("core"), "the coil's core"),
    Key::required("turns", Takes::Count, "number of turns"),
    Key::optional("wire", Takes::Map(WIRE_KEYS), "the coil's wire"),
];
const TOP: &[Key] = &[Key::optional(
    "coil",
    Takes::Map(COIL),
    "the coil under test",
)];

/// Reads a netlist with one coil, compares its messages with those in its comments, and hands on what was made.
#[track_caller]
fn read(text: &str, then: impl FnOnce(&Core, &WindingPlan, Values)) {
    let found = differences(text, |document, reader| {
        let top = Fields::new(&document.root, "", TOP, reader).also(KEYS);
        top.finish();
        let library = Library::read(&top);
        let Some(coil) = top.map("coil") else { return };
        coil.finish();
        let core = library.core(&coil, "core");
        let spec = coil.map("wire").and_then(|wire| WireSpec::read(&wire));
        let turns = coil.count("turns");
        if reader.sink.has_errors() {
            return;
        }
        let values = reader.parameters.borrow().nominal();
        let wire = spec.map(|spec| spec.derive(&values));
        let plan = WindingPlan {
            turns: turns.expect("no error was told"),
            wire,
        };
        let core = core.expect("no error was told");
        match core.wound(&values, &plan, 298.15) {
            Ok(_) => then(&core, &plan, values),
            Err(fault) => reader
                .sink
                .report(library::diagnostic(&fault, &coil, "core")),
        }
    });
    assert!(found.is_empty(), "{text}\n{}", found.join("\n"));
}

/// A netlist whose messages are all that matters.
#[track_caller]
fn faulty(text: &str) {
    assert!(
        text.contains("# error["),
        "a faulty netlist tells its error"
    );
    read(text, |_, _, _| {});
}

#[test]
fn a_value_written_once_is_one_variable_for_all_users() {
    let text = "
materials:
  iron: {initial_permeability: 3000 ± 20 %, saturation: 1.5 T}
cores:
  one: {shape: effective, length: 60 mm, area: 50 mm², gap: 0.15 mm ± 0.05 mm, material: iron}
  two: {shape: toroid, outer_diameter: 20 mm, inner_diameter: 10 mm, height: 5 mm, material: iron}
coil: {core: one, turns: 4000}
";
    differences(text, |document, reader| {
        let top = Fields::new(&document.root, "", TOP, reader).also(KEYS);
        let library = Library::read(&top);
        let mut values = reader.parameters.borrow().nominal();
        let plan = WindingPlan {
            turns: 100,
            wire: None,
        };
        let inductance = |name: &str, values: &Values| {
            let core = library.named(name).expect("both were read");
            core.wound(values, &plan, 298.15)
                .expect("both are sound")
                .linkage
                .inductance_at_zero()
        };
        let before = (inductance("one", &values), inductance("two", &values));
        let path = |path: &str| {
            reader
                .parameters
                .borrow()
                .find(path)
                .expect("the path is known")
        };
        values.set(path("materials.iron.initial_permeability"), 1500.0);
        let after = (inductance("one", &values), inductance("two", &values));
        assert!(
            (after.1 / before.1 - 0.5).abs() < 1e-12,
            "the ring follows its material"
        );
        assert!(
            after.0 < before.0 && after.0 > 0.8 * before.0,
            "the gap holds most of the other"
        );
        values.set(path("cores.one.gap"), 0.2e-3);
        assert!(inductance("one", &values) < after.0 && inductance("two", &values) == after.1);
    });
}

#[test]
fn an_inductance_factor_keeps_its_spread_through_its_corners() {
    let text = "
materials:
  ferrite: {initial_permeability: 2300 ± 20 %, saturation: 0.45 T}
cores:
  pair: {shape: e_pair, width: 25 mm, height: 12.5 mm, depth: 7 mm, window_depth: 8.5 mm, window_width: 17.5 mm,
         leg_width: 7.5 mm, inductance_factor: 160 nH ± 3 %, material: ferrite}
coil: {core: pair, turns: 10}
";
    let mut corners = 0;
    let found = differences(text, |document, reader| {
        let top = Fields::new(&document.root, "", TOP, reader).also(KEYS);
        let library = Library::read(&top);
        let core = library.named("pair").expect("it was read");
        let plan = WindingPlan {
            turns: 10,
            wire: None,
        };
        let parameters = reader.parameters.borrow();
        let find = |path: &str| {
            let value = parameters.find(path).expect("the path is known");
            (value, parameters.get(value).spread)
        };
        let (factor, spread) = find("cores.pair.inductance_factor");
        assert!(
            (spread.0 / 155.2e-9 - 1.0).abs() < 1e-12 && (spread.1 / 164.8e-9 - 1.0).abs() < 1e-12
        );
        let (permeability, range) = find("materials.ferrite.initial_permeability");
        let mut gaps = Vec::new();
        for wanted in [spread.0, spread.1] {
            for softness in [range.0, range.1] {
                let mut values = parameters.nominal();
                values.set(factor, wanted);
                values.set(permeability, softness);
                let wound = core.wound(&values, &plan, 298.15).expect("it is sound");
                // The maker's promise holds whatever the material does: the gap follows.
                let reached = wound.linkage.inductance_at_zero() / 100.0;
                assert!((reached / wanted - 1.0).abs() < 1e-12);
                gaps.push(wound.geometry.gaps[0].length);
                corners += 1;
            }
        }
        assert!(gaps[0] > gaps[2] && gaps[0] < gaps[1]);
    });
    assert!(found.is_empty(), "{found:?}");
    assert_eq!(corners, 4);
}

#[test]
fn a_core_may_be_written_in_place_and_a_material_left_out() {
    let text = "
coil: {core: {shape: solenoid, mean_diameter: 10 mm, length: 20 mm}, turns: 100}
";
    read(text, |core, plan, values| {
        assert_eq!(core.path, "coil.core");
        let wound = core.wound(&values, plan, 298.15).expect("it was just made");
        assert!(wound.linkage.path().known_to().is_none() && wound.resistance.is_none());
    });
}

#[test]
fn values_that_a_study_sets_out_of_range_are_refused_and_do_not_stall() {
    let text = "
materials:
  iron: {initial_permeability: 3000, saturation: 1.5 T, resistivity: 0.1 µΩ m,
         steinmetz: {factor: 3 W/m³, frequency_exponent: 1.3, flux_exponent: 2}}
cores:
  leg: {shape: effective, length: 60 mm, area: 50 mm², gap: 1 mm, material: iron}
  ring: {shape: toroid, outer_diameter: 20 mm, inner_diameter: 10 mm, height: 5 mm, gap: 1 mm, material: iron}
  sheet: {shape: solenoid, mean_diameter: 10 mm, length: 20 mm}
  thick: {shape: solenoid, inner_diameter: 8 mm, outer_diameter: 10 mm, length: 20 mm}
  turns: {shape: solenoid, inner_diameter: 8 mm, layers: 2, axial_pitch: 0.5 mm, radial_pitch: 0.5 mm}
  pair: {shape: e_pair, width: 40 mm, height: 20 mm, depth: 12 mm, window_depth: 14 mm, window_width: 28 mm,
         leg_width: 12 mm, gap: 0.3 mm, spacer: 0.1 mm, material: iron}
  frame: {shape: u_pair, width: 30 mm, height: 20 mm, depth: 10 mm, window_depth: 12 mm, window_width: 12 mm,
          inductance_factor: 200 nH, material: iron}
  pot: {shape: pot, diameter: 22 mm, height: 7 mm, window_depth: 5 mm, window_diameter: 18 mm, leg_diameter: 9 mm,
        hole_diameter: 3 mm, slot_width: 2 mm, gap: [0.1 mm, 0.1 mm], material: iron}
  magnet: {shape: yoke, core_diameter: 8 mm, core_length: 25 mm, frame_width: 16 mm, frame_thickness: 2 mm,
           frame_distance: 12 mm, armature_thickness: 2 mm, gap: 0.6 mm, leakage: 20 nH, material: iron}
  rod: {shape: rod, diameter: 8 mm, length: 40 mm, winding_length: 30 mm, winding_diameter: 10 mm, material: iron}
  slug: {shape: solenoid, mean_diameter: 10 mm, length: 20 mm, core_diameter: 8 mm, core_length: 25 mm, material: iron}
coil: {core: leg, turns: 30, wire: {diameter: 0.4 mm}}
";
    let mut refused = 0;
    let found = differences(text, |document, reader| {
        let top = Fields::new(&document.root, "", TOP, reader).also(KEYS);
        let library = Library::read(&top);
        let nominal = reader.parameters.borrow().nominal();
        let plan = WindingPlan {
            turns: 30,
            wire: Some(Wire::round(0.4e-3, None)),
        };
        for name in [
            "leg", "ring", "sheet", "thick", "turns", "pair", "frame", "pot", "magnet", "rod",
            "slug",
        ] {
            let core = library.named(name).expect("it was read");
            assert!(core.wound(&nominal, &plan, 298.15).is_ok(), "{name}");
            for (value, parameter) in reader.parameters.borrow().iter() {
                if !parameter.path.starts_with(&format!("cores.{name}.")) {
                    continue;
                }
                for wrong in [-1.0, 0.0, -1e-9, 1e300] {
                    let mut values = nominal.clone();
                    values.set(value, wrong);
                    if let Err(fault) = core.wound(&values, &plan, 298.15) {
                        refused += 1;
                        assert!(!fault.text.is_empty());
                    }
                }
            }
        }
        for figure in ["resistivity", "steinmetz.factor", "steinmetz.flux_exponent"] {
            let mut values = nominal.clone();
            let path = format!("materials.iron.{figure}");
            values.set(reader.parameters.borrow().find(&path).expect("read"), -1.0);
            let core = library.named("leg").expect("it was read");
            assert!(core.losses(&nominal).is_ok() && core.losses(&values).is_err());
        }
        for wrong in [-1.0, 0.0, 1.0] {
            let mut values = nominal.clone();
            values.set(
                reader
                    .parameters
                    .borrow()
                    .find("materials.iron.initial_permeability")
                    .expect("read"),
                wrong,
            );
            let core = library.named("leg").expect("it was read");
            assert!(core.wound(&values, &plan, 298.15).is_err(), "{wrong}");
        }
    });
    assert!(found.is_empty(), "{found:?}");
    assert!(refused > 150, "{refused} refused");
}

#[test]
fn misspelt_and_missing_words_of_cores_are_told() {
    faulty(
        "
materials:
  iron: {initial_permeability: 3000, saturation: 1.5 T}
cores:
  # error[unknown-key]: did you mean `length`
  one: {shape: effective, lenght: 60 mm, area: 50 mm², material: iron}
  # error[unknown-word]: did you mean `toroid`
  two: {shape: torroid}
  # error[missing-key]: cores.three needs `shape`
  three: {length: 60 mm}
  # error[unknown-name]: did you mean `iron`
  four: {shape: effective, length: 60 mm, area: 50 mm², material: irn}
  # error[wrong-dimension]: gap takes m, got 0.3 mF, a capacitance
  five: {shape: effective, length: 60 mm, area: 50 mm², gap: 0.3 mF}
  # error[missing-key]: `core_diameter` needs `core_length` beside it
  six: {shape: solenoid, mean_diameter: 8 mm, length: 20 mm, core_diameter: 6 mm}
# error[unknown-name]: did you mean `one`
coil: {core: onee, turns: 3}
",
    );
}

#[test]
fn a_core_that_was_refused_is_no_second_error() {
    faulty(
        "
materials:
  # error[missing-key]: materials.iron needs one of curve, saturation
  iron: {}
cores:
  one: {shape: effective, length: 60 mm, area: 50 mm², material: iron}
coil: {core: one, turns: 3}
",
    );
}

#[test]
fn materials_out_of_range_or_told_twice_are_refused() {
    faulty(
        "
materials:
  # error[out-of-range]: initial_permeability must be above 1
  a: {initial_permeability: 1, saturation: 1.5 T}
  # error[out-of-range]: initial_permeability must be above 1
  b: {initial_permeability: 1.2 ± 20 %, saturation: 1.5 T}
  # error[out-of-range]: saturation must be above zero
  c: {initial_permeability: 100, saturation: 0 T}
  # error[missing-key]: needs `initial_permeability`
  d: {saturation: 1 T}
  # error[conflicting-keys]: leaves no room for `saturation`
  e: {curve: [[10 A/m, 0.1 T]], saturation: 1 T}
  # error[out-of-range]: initial_permeability must be 1 or more
  f: {initial_permeability: 0.5}
  # error[bad-curve]: temperatures of saturation must rise
  g: {initial_permeability: 100, saturation: [[100 °C, 0.3 T], [25 °C, 0.4 T]]}
  # error[bad-curve]: a pair is [25 °C, 0.45 T]
  h: {initial_permeability: 100, saturation: [[100 °C, 0.3 T, 2]]}
  # error[bad-curve]: needs a row
  i: {initial_permeability: 100, saturation: []}
  # error[wrong-dimension]: T
  j: {initial_permeability: 100, saturation: 400 A/m}
  # error[wrong-type]: takes
  k: {initial_permeability: 100, saturation: {at: 3 T}}
  # error[unknown-key]: did you mean `initial_permeability`
  l: {initial_permeabilty: 100}
  # error[wrong-type]: keys here are initial_permeability, saturation ...
  m: 3
",
    );
}

#[test]
fn losses_are_read_into_the_core() {
    let text = "
materials:
  ferrite: {initial_permeability: 2300, saturation: 0.45 T, resistivity: 5 Ω m,
            steinmetz: {factor: 1.2 W/m³, frequency_exponent: 1.45, flux_exponent: 2.6}}
cores:
  ring: {shape: toroid, outer_diameter: 20 mm, inner_diameter: 10 mm, height: 5 mm, material: ferrite}
coil: {core: ring, turns: 10}
";
    read(text, |core, _, values| {
        let losses = core.losses(&values).expect("it was just read");
        assert_eq!(losses.resistivity, Some(5.0));
        let steinmetz = losses.steinmetz.expect("it is written");
        assert_eq!(
            (
                steinmetz.factor,
                steinmetz.frequency_exponent,
                steinmetz.flux_exponent
            ),
            (1.2, 1.45, 2.6)
        );
    });
    read(
        "
coil: {core: {shape: solenoid, mean_diameter: 10 mm, length: 20 mm}, turns: 100}
",
        |core, _, values| {
            assert_eq!(core.losses(&values), Ok(Losses::default()));
        },
    );
}

#[test]
fn losses_out_of_range_or_half_written_are_refused() {
    faulty(
        "
materials:
  # error[out-of-range]: resistivity must be above zero
  a: {initial_permeability: 100, resistivity: 0 Ω m}
  # error[wrong-dimension]: resistivity takes Ω m
  b: {initial_permeability: 100, resistivity: 5 Ω}
  # error[missing-key]: needs `factor`
  c: {initial_permeability: 100, steinmetz: {frequency_exponent: 1.4, flux_exponent: 2.5}}
  # error[out-of-range]: factor must be above zero
  d: {initial_permeability: 100, steinmetz: {factor: 0 W/m³, frequency_exponent: 1.4, flux_exponent: 2.5}}
  # error[missing-unit]: factor takes W/m³
  e: {initial_permeability: 100, steinmetz: {factor: 3, frequency_exponent: 1.4, flux_exponent: 2.5}}
  # error[out-of-range]: frequency_exponent must be between 1 and 3
  f: {initial_permeability: 100, steinmetz: {factor: 1 W/m³, frequency_exponent: 0.4, flux_exponent: 2.5}}
  # error[out-of-range]: flux_exponent must be between 1 and 4
  g: {initial_permeability: 100, steinmetz: {factor: 1 W/m³, frequency_exponent: 1.4, flux_exponent: 25}}
  # error[wrong-type]: steinmetz takes a mapping
  h: {initial_permeability: 100, steinmetz: 3}
  # error[unknown-key]: did you mean `flux_exponent`
  i: {initial_permeability: 100, steinmetz: {factor: 1 W/m³, frequency_exponent: 1.4, flux_exponant: 2}}
  # error[missing-key]: needs one of curve, saturation
  j: {resistivity: 5 Ω m}
",
    );
}

#[test]
fn a_curve_that_breaks_the_rules_names_its_row() {
    faulty(
        "
materials:
  # error[bad-curve]: row 3 of curve must have more field strength
  a: {curve: [[0 A/m, 0 T], [10 A/m, 0.1 T], [9 A/m, 0.2 T]]}
  # error[bad-curve]: row 2 of curve rises by less than mu0
  b: {curve: [[10 A/m, 0.1 T], [20 A/m, 0.1 T]]}
  # error[bad-curve]: starts at [0 A/m, 0 T]
  c: {curve: [[0 A/m, 0.1 T], [20 A/m, 0.2 T]]}
  # error[bad-curve]: at least one point
  d: {curve: []}
  # error[wrong-length]: a pair is [x, y]
  e: {curve: [[10 A/m]]}
  # error[wrong-dimension]: curve takes A/m, got 0.1 T
  # error[wrong-dimension]: curve takes T, got 10 A/m
  f: {curve: [[0.1 T, 10 A/m]]}
  g:
    curve:
      - [10 A/m, 0.1 T]
      # error[bad-curve]: row 2 of curve
      - [20 A/m, 0.05 T]
",
    );
}

#[test]
fn rings_and_fringing_without_their_dimensions_are_refused() {
    faulty(
        "
cores:
  # error[out-of-range]: inner_diameter must be smaller than outer_diameter
  a: {shape: toroid, outer_diameter: 10 mm, inner_diameter: 20 mm, height: 5 mm}
  # error[out-of-range]: not with the spreads of both
  b: {shape: toroid, outer_diameter: 10.5 mm, inner_diameter: 10 mm ± 10 %, height: 5 mm}
  # error[out-of-range]: gap must be shorter than the inner circle
  c: {shape: toroid, outer_diameter: 20 mm, inner_diameter: 10 mm, height: 5 mm, gap: 40 mm}
  # error[missing-key]: fringing by muehlethaler needs the leg's section
  d: {shape: effective, length: 60 mm, area: 50 mm², gap: 1 mm, fringing: muehlethaler, window_height: 20 mm}
  # error[missing-key]: fringing by mclyman needs a height
  e: {shape: effective, length: 60 mm, area: 50 mm², gap: 1 mm, fringing: mclyman}
  # error[conflicting-keys]: a leg is either round
  f: {shape: effective, length: 60 mm, area: 50 mm², leg_width: 1 mm, leg_diameter: 1 mm}
  # error[missing-key]: needs `leg_depth`
  g: {shape: effective, length: 60 mm, area: 50 mm², leg_width: 1 mm}
  # error[out-of-range]: minimum_area must not exceed area
  h: {shape: effective, length: 60 mm, area: 50 mm², minimum_area: 60 mm²}
  # error[out-of-range]: gap must be zero or more
  i: {shape: effective, length: 60 mm, area: 50 mm², gap: -1 mm}
  # error[unknown-word]: fringing is one of none, mclyman, area_increase, muehlethaler
  j: {shape: effective, length: 60 mm, area: 50 mm², fringing: some}
",
    );
}

#[test]
fn solenoids_are_told_in_one_way() {
    faulty(
        "
materials:
  iron: {initial_permeability: 3000}
cores:
  # error[conflicting-keys]: either `mean_diameter` or
  a: {shape: solenoid, mean_diameter: 10 mm, inner_diameter: 8 mm, length: 10 mm}
  # error[missing-key]: needs `outer_diameter`
  b: {shape: solenoid, inner_diameter: 8 mm, length: 10 mm}
  # error[missing-key]: needs `mean_diameter` (one layer)
  c: {shape: solenoid, length: 10 mm}
  # error[missing-key]: needs `length`
  d: {shape: solenoid, mean_diameter: 10 mm}
  # error[conflicting-keys]: axial_pitch belongs to a coil with `layers`
  e: {shape: solenoid, mean_diameter: 10 mm, length: 10 mm, axial_pitch: 1 mm}
  # error[conflicting-keys]: takes no `material`
  f: {shape: solenoid, mean_diameter: 10 mm, length: 10 mm, material: iron}
  # error[missing-key]: needs `inner_diameter`
  g: {shape: solenoid, layers: 3}
  # error[out-of-range]: inner_diameter must be smaller
  h: {shape: solenoid, inner_diameter: 8 mm, outer_diameter: 8 mm, length: 10 mm}
  # error[out-of-range]: core_diameter must not exceed inner_diameter
  i: {shape: solenoid, inner_diameter: 8 mm, outer_diameter: 10 mm, length: 10 mm, core_diameter: 9 mm, core_length: 9 mm}
  # error[out-of-range]: winding_diameter must not be below the rod's diameter
  j: {shape: rod, diameter: 8 mm, length: 40 mm, winding_diameter: 7 mm}
",
    );
}

#[test]
fn layers_need_a_round_wire_that_fits() {
    faulty(
        "
cores:
  a: {shape: solenoid, inner_diameter: 8 mm, layers: 3}
# error[missing-wire]: needs the coil's round `wire`
coil: {core: a, turns: 30}
",
    );
    faulty(
        "
cores:
  a: {shape: solenoid, inner_diameter: 8 mm, layers: 3}
# error[missing-wire]: wire: {diameter: 0.2 mm}
coil: {core: a, turns: 30, wire: {foil: {thickness: 0.1 mm, width: 5 mm}}}
",
    );
    faulty(
        "
cores:
  a: {shape: solenoid, inner_diameter: 8 mm, layers: 3, axial_pitch: 0.3 mm}
# error[out-of-range]: overlap
coil: {core: a, turns: 30, wire: {diameter: 0.4 mm}}
",
    );
}

#[test]
fn wires_out_of_range_or_told_twice_are_refused() {
    let wire = |tag: &str, wire: &str| {
        let text = format!(
            "
cores:
  a: {{shape: solenoid, mean_diameter: 8 mm, length: 30 mm}}
coil:
  core: a
  turns: 30
  # error{tag}
  wire: {wire}
"
        );
        faulty(&text);
    };
    wire(
        "[missing-key]: needs one of gauge, diameter, litz, foil",
        "{}",
    );
    wire(
        "[conflicting-keys]: got gauge and diameter",
        "{gauge: 32 AWG, diameter: 0.2 mm}",
    );
    wire(
        "[bad-number]: gauge takes a wire gauge such as",
        "{gauge: 32}",
    );
    wire(
        "[bad-number]: between 4/0 AWG and 56 AWG",
        "{gauge: 77 AWG}",
    );
    wire(
        "[out-of-range]: diameter must be above zero",
        "{diameter: 0 mm}",
    );
    wire(
        "[out-of-range]: outer_diameter must not be below",
        "{diameter: 0.2 mm, outer_diameter: 0.1 mm}",
    );
    wire(
        "[conflicting-keys]: a foil has no",
        "{foil: {thickness: 0.1 mm, width: 5 mm}, outer_diameter: 1 mm}",
    );
    wire(
        "[missing-key]: needs `strands`",
        "{litz: {strand_diameter: 0.1 mm}}",
    );
    wire("[unknown-key]: did you mean `gauge`", "{guage: 32 AWG}");
    wire("[wrong-type]: wire takes a mapping", "32 AWG");
}

#[test]
fn every_table_is_complete_and_without_repeats() {
    let mut tables: Vec<(String, Vec<&Key>)> = Vec::new();
    for kind in shapes::SHAPES {
        let keys = kind
            .keys
            .iter()
            .flat_map(|table| table.iter())
            .chain(library::CORE_KEYS);
        tables.push((kind.word.into(), keys.collect()));
    }
    for kind in materials::MATERIALS {
        assert!(
            kind.keys.iter().any(|key| key.name == kind.told_by),
            "{}",
            kind.word
        );
        tables.push((kind.word.into(), kind.keys.iter().collect()));
    }
    tables.push(("losses".into(), materials::losses::KEYS.iter().collect()));
    tables.push((
        "steinmetz".into(),
        materials::losses::STEINMETZ.iter().collect(),
    ));
    tables.push(("wire".into(), WIRE_KEYS.iter().collect()));
    for (word, keys) in tables {
        let mut names: Vec<&str> = keys.iter().map(|key| key.name).collect();
        assert!(keys.iter().all(|key| !key.about.is_empty()), "{word}");
        names.sort_unstable();
        names.dedup();
        assert_eq!(names.len(), keys.len(), "{word} lists a key twice");
        for key in keys {
            if let (Need::Default(text), Takes::Word(words)) = (key.need, key.takes) {
                assert!(words.contains(&text), "{word}: {text}");
            }
        }
    }
}
