//! Coils as JSON: the `coils` of `check`, `coil` and `run`; SI units throughout.

use crate::magnetics::MovingGap;
use crate::magnetics::fringing::BAND;
use crate::report::json::{Object, table};
use crate::run::CoilReport;
use serde_json::Value;

/// One object per coil, by name.
pub fn coils(reports: &[CoilReport]) -> Value {
    table(
        reports
            .iter()
            .map(|report| (report.name.clone(), coil(report))),
    )
}

fn coil(coil: &CoilReport) -> Value {
    let curve = coil.curve.iter().map(|point| {
        Object::new()
            .number("current", point.current)
            .number("flux_linkage", point.flux_linkage)
            .number("inductance", point.inductance)
            .number("flux_density", point.flux_density)
    });
    let geometry = &coil.geometry;
    Object::new()
        .number("turns", coil.turns)
        .number("inductance_at_zero", coil.inductance_at_zero)
        .optional("current_at_70_percent", coil.current_at_70_percent)
        .number("resistance", coil.resistance)
        .optional("time_constant", coil.time_constant)
        .optional("operating_current", coil.operating_current)
        .optional("stored_energy", coil.stored_energy)
        .value("path", path(coil))
        .optional("mean_turn", geometry.mean_turn)
        .optional("window_area", geometry.window.map(|window| window.area))
        .value("fringing", fringing(coil))
        .list("gaps", gaps(coil))
        .value(
            "moving_gap",
            geometry.moving.as_ref().map_or(Value::Null, moving),
        )
        .optional("peak_flux_density", coil.peak_flux_density)
        .list("curve", curve)
        .value("copper", super::copper::json(coil))
        .into()
}

fn path(coil: &CoilReport) -> Object {
    let geometry = &coil.geometry;
    Object::new()
        .number("length", geometry.length)
        .number("area", geometry.area)
        .number("smallest_area", geometry.minimum_area)
        .number("volume", geometry.volume)
}

fn fringing(coil: &CoilReport) -> Value {
    let Some(fringing) = &coil.geometry.fringing else {
        return Value::Null;
    };
    Object::new()
        .text("rule", Some(fringing.rule))
        .number("factor", fringing.factor)
        .optional("band", (fringing.rule != "none").then_some(BAND))
        .text("source", Some(fringing.source))
        .into()
}

fn gaps(coil: &CoilReport) -> Vec<Object> {
    let gaps = coil.geometry.gaps.iter();
    gaps.map(|gap| {
        let fringing = gap.fringing.as_ref();
        Object::new()
            .text("place", Some(gap.place))
            .number("length", gap.length)
            .number("area", gap.area)
            .optional("factor", fringing.map(|fringing| fringing.factor))
    })
    .collect()
}

fn moving(gap: &MovingGap) -> Value {
    Object::new()
        .number("area", gap.area)
        .number("gap", gap.gap)
        .number("residual_gap", gap.residual)
        .number("leakage", gap.leakage)
        .into()
}
