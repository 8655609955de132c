//! A line and its levels, as JSON and as cells of a table.

use serde_json::{Map, Value, json};
use vocabulary::light::PositionMedium;
use vocabulary::spectrum::{Level, Line, LineKind, PositionOrigin, RateOrigin};

use super::number::{in_table, plus_minus, rate};
use crate::advise::{Placed, VerdictRange, Worst};

/// `air` or `vacuum`.
pub(super) const fn medium_word(medium: PositionMedium) -> &'static str {
    match medium {
        PositionMedium::Air => "air",
        PositionMedium::Vacuum => "vacuum",
    }
}

/// `measured`, `ritz` or `computed`.
pub(super) const fn position_word(origin: PositionOrigin) -> &'static str {
    match origin {
        PositionOrigin::Measured => "measured",
        PositionOrigin::Ritz => "ritz",
        PositionOrigin::Computed => "computed",
    }
}

/// `published`, `derived`, `computed` or `prior`.
pub(super) const fn rate_word(origin: RateOrigin) -> &'static str {
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
        LineKind::Ritz => "ritz",
    }
}

/// The stable keys of a level.
pub(super) fn level_object(level: &Level) -> Value {
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
    put(
        "wavenumber_uncertainty_per_cm",
        json!(line.wavenumber_uncertainty_per_cm),
    );
    put(
        "lower",
        line.lower.as_deref().map_or(Value::Null, level_object),
    );
    put(
        "upper",
        line.upper.as_deref().map_or(Value::Null, level_object),
    );
    put("rate_per_s", json!(line.rate_per_s));
    put(
        "rate_relative_uncertainty",
        json!(line.rate_relative_uncertainty),
    );
    put(
        "position_origin",
        json!(position_word(line.position_origin)),
    );
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

/// `587.5621(3)`; the medium behind it where the table's heading does not say it.
pub(super) fn position_cell(placed: &Placed, name_medium: bool) -> String {
    let position = in_table(placed.wavelength_nm, placed.uncertainty_nm);
    if name_medium {
        format!("{position}\n{}", medium_word(placed.medium))
    } else {
        position
    }
}

/// `1s 2p 3Po 2 → 1s 3d 3D 3`; `?` for a level that is not known. Core shells that both ends share
/// are left out.
pub(super) fn transition_cell(line: &Line) -> String {
    transition(line, true)
}

/// The transition without J.
pub(super) fn multiplet_cell(line: &Line) -> String {
    transition(line, false)
}

/// Two levels as [`transition_cell`] writes them.
pub(super) fn transition_of(lower: &Level, upper: &Level) -> String {
    between(Some(lower), Some(upper), true)
}

/// One level: `3d 2D 3/2`.
pub(super) fn level_name(level: &Level) -> String {
    level_cell(Some(level), &outer_shells(Some(level)).join(" "), true)
}

fn transition(line: &Line, with_j: bool) -> String {
    between(line.lower.as_deref(), line.upper.as_deref(), with_j)
}

/// Shells of a level without the closed ones at the beginning.
fn outer_shells(level: Option<&Level>) -> Vec<String> {
    let text = level.and_then(|l| l.configuration.clone());
    let mut shells: Vec<String> = text
        .iter()
        .flat_map(|t| t.split_whitespace())
        .map(str::to_owned)
        .collect();
    let closed = shells.iter().take_while(|s| is_closed(s)).count();
    shells.drain(..closed.min(shells.len().saturating_sub(1)));
    // The term of a closed core says nothing.
    if closed > 0 && shells.len() > 1 && shells[0] == "(1S)" {
        shells.remove(0);
    }
    shells
}

fn between(lower: Option<&Level>, upper: Option<&Level>, with_j: bool) -> String {
    let (mut from, mut to) = (outer_shells(lower), outer_shells(upper));
    while from.len() > 1 && to.len() > 1 && from[0] == to[0] {
        from.remove(0);
        to.remove(0);
    }
    format!(
        "{} →\n{}",
        level_cell(lower, &from.join(" "), with_j),
        level_cell(upper, &to.join(" "), with_j)
    )
}

fn is_closed(shell: &str) -> bool {
    ["s2", "p6", "d10", "f14"].iter().any(|full| {
        shell
            .strip_suffix(full)
            .is_some_and(|n| !n.is_empty() && n.bytes().all(|b| b.is_ascii_digit()))
    })
}

fn level_cell(level: Option<&Level>, configuration: &str, with_j: bool) -> String {
    let Some(level) = level else {
        return "?".into();
    };
    let j = level
        .j
        .filter(|_| with_j)
        .map(|j| j.to_string())
        .unwrap_or_default();
    let parts = [configuration, level.term.as_deref().unwrap_or_default(), &j];
    let known: Vec<&str> = parts.into_iter().filter(|p| !p.is_empty()).collect();
    if known.is_empty() {
        format!("{:.0} cm⁻¹", level.energy_per_cm)
    } else {
        known.join(" ")
    }
}

/// `7.07e7 ±1 %`, `?` where no rate is known.
pub(super) fn rate_cell(rate_per_s: Option<f64>, relative_uncertainty: Option<f64>) -> String {
    match rate_per_s {
        Some(value) => format!("{}{}", rate(value), plus_minus(relative_uncertainty)),
        None => "not known".into(),
    }
}
