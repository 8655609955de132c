//! A line and its levels, as JSON and as cells of a table.

use serde_json::{Map, Value, json};
use vocabulary::light::PositionMedium;
use vocabulary::spectrum::{Level, Line, LineKind, PositionOrigin, RateOrigin};

use super::number::{plus_minus, rate, with_uncertainty};
use crate::advise::{Placed, VerdictRange, Worst};

/// `air` or `vacuum`.
pub(super) const fn medium_word(medium: PositionMedium) -> &'static str {
    match medium {
        PositionMedium::Air => "air",
        PositionMedium::Vacuum => "vacuum",
    }
}

const fn position_word(origin: PositionOrigin) -> &'static str {
    match origin {
        PositionOrigin::Measured => "measured",
        PositionOrigin::Ritz => "ritz",
        PositionOrigin::Computed => "computed",
    }
}

const fn rate_word(origin: RateOrigin) -> &'static str {
    match origin {
        RateOrigin::Published => "published",
        RateOrigin::Derived => "derived",
        RateOrigin::Computed => "computed",
        RateOrigin::Prior => "prior",
    }
}

const fn kind_word(kind: LineKind) -> &'static str {
    match kind {
        LineKind::Line => "line",
        LineKind::Mean => "mean",
        LineKind::Blend => "blend",
        LineKind::Isotope => "isotope",
    }
}

fn level_object(level: &Level) -> Value {
    json!({
        "energy_per_cm": level.energy_per_cm,
        "energy_uncertainty_per_cm": level.energy_uncertainty_per_cm,
        "configuration": level.configuration.as_deref(),
        "term": level.term.as_deref(),
        "j": level.j.map(|j| j.to_string()),
        "g": level.g,
        "source": &*level.source,
    })
}

/// The stable keys of a line.
pub(super) fn line_object(line: &Line, placed: &Placed) -> Map<String, Value> {
    let mut object = Map::new();
    let mut put = |key: &str, value: Value| object.insert(key.to_owned(), value);
    put("species", json!(line.species.to_string()));
    put("wavelength_nm", json!(placed.wavelength_nm));
    put("wavelength_uncertainty_nm", json!(placed.uncertainty_nm));
    put("medium", json!(medium_word(placed.medium)));
    put("vacuum_wavelength_nm", json!(placed.vacuum_nm));
    put("wavenumber_per_cm", json!(line.wavenumber_per_cm));
    put("wavenumber_uncertainty_per_cm", json!(line.wavenumber_uncertainty_per_cm));
    put("lower", line.lower.as_deref().map_or(Value::Null, level_object));
    put("upper", line.upper.as_deref().map_or(Value::Null, level_object));
    put("rate_per_s", json!(line.rate_per_s));
    put("rate_relative_uncertainty", json!(line.rate_relative_uncertainty));
    put("position_origin", json!(position_word(line.position_origin)));
    put("rate_origin", json!(line.rate_origin.map(rate_word)));
    put("position_source", json!(&*line.position_source));
    put("rate_source", json!(line.rate_source.as_deref()));
    put("kind", json!(kind_word(line.kind)));
    object
}

/// The stable keys of a verdict with the worst interferer.
pub(super) fn put_verdict(
    object: &mut Map<String, Value>,
    verdict: VerdictRange,
    worst: Option<&Worst>,
) {
    object.insert("verdict".into(), json!(verdict.central.word()));
    object.insert("verdict_range".into(), json!(verdict.to_string()));
    let worst = worst.map(|w| {
        json!({
            "species": w.species.to_string(),
            "wavelength_nm": w.vacuum_nm,
            "medium": "vacuum",
            "interference_fraction": w.fraction,
        })
    });
    object.insert("worst".into(), worst.unwrap_or(Value::Null));
}

/// `587.5621(3) air`.
pub(super) fn position_cell(placed: &Placed) -> String {
    let medium = medium_word(placed.medium);
    format!("{} {medium}", with_uncertainty(placed.wavelength_nm, placed.uncertainty_nm))
}

/// `1s 2p 3Po 2 → 1s 3d 3D 3`; `?` for a level that is not known.
pub(super) fn transition_cell(line: &Line) -> String {
    format!("{} → {}", level_cell(line.lower.as_deref()), level_cell(line.upper.as_deref()))
}

fn level_cell(level: Option<&Level>) -> String {
    let Some(level) = level else { return "?".into() };
    let j = level.j.map(|j| j.to_string());
    let parts = [level.configuration.as_deref(), level.term.as_deref(), j.as_deref()];
    let known: Vec<&str> = parts.into_iter().flatten().collect();
    if known.is_empty() { format!("{:.0}", level.energy_per_cm) } else { known.join(" ") }
}

/// `7.07e7 ±1 %`, `?` where no rate is known.
pub(super) fn rate_cell(rate_per_s: Option<f64>, relative_uncertainty: Option<f64>) -> String {
    match rate_per_s {
        Some(value) => format!("{}{}", rate(value), plus_minus(relative_uncertainty)),
        None => "not known".into(),
    }
}
