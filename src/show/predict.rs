//! The answer of `predict`.

use serde_json::{Value, json};
use vocabulary::atom::Species;

use super::line::medium_word;
use super::number::{plus_minus, rate, with_uncertainty};
use super::sheet::{Align, Column, Context, Sheet};
use crate::advise::Placed;
use crate::advise::predict::{Answer, LevelLifetime, PredictedLevel, PredictedLine};

const LEVEL_COLUMNS: [Column; 8] = [
    Column::whole("level", Align::Left),
    Column::whole("energy\ncm⁻¹", Align::Right),
    Column::whole("below limit\ncm⁻¹", Align::Right),
    Column::whole("defect", Align::Right),
    Column::whole("lifetime", Align::Right),
    Column::whole("in black body", Align::Right),
    Column::whole("ν⁷/Z⁴\na₀³", Align::Right),
    Column::whole("method", Align::Left),
];

const LINE_COLUMNS: [Column; 6] = [
    Column::whole("line", Align::Left),
    Column::whole("position\nnm", Align::Right),
    Column::whole("in", Align::Left),
    Column::whole("wavenumber\ncm⁻¹", Align::Right),
    Column::whole("rate\ns⁻¹", Align::Right),
    Column::wrapped("method", Align::Left),
];

/// Builds the sheet: lines where lines were asked for, else levels; JSON holds both.
pub fn predict(answer: &Answer, species: Species, lines_first: bool, context: Context) -> Sheet {
    let mut notes = answer.basis.clone();
    notes.extend(context.source_notes());
    let mut object = context.object(&notes);
    object.insert("species".into(), json!(species.to_string()));
    object.insert("series".into(), json!(answer.series));
    object.insert("series_limit_per_cm".into(), json!(answer.limit_per_cm));
    let limit_sigma = answer.limit_uncertainty_per_cm;
    object.insert("series_limit_uncertainty_per_cm".into(), json!(limit_sigma));
    let limit_nm = answer.limit_line.map(|placed| placed.wavelength_nm);
    object.insert("series_limit_nm".into(), json!(limit_nm));
    let levels = answer.levels.iter().map(level_object).collect();
    object.insert("levels".into(), Value::Array(levels));
    let lines = answer.lines.iter().map(line_object).collect();
    object.insert("lines".into(), Value::Array(lines));
    let (columns, rows) = if lines_first {
        (
            LINE_COLUMNS.to_vec(),
            answer.lines.iter().map(line_row).collect(),
        )
    } else {
        (
            LEVEL_COLUMNS.to_vec(),
            (answer.levels.iter())
                .map(|level| level_row(level, limit_sigma))
                .collect(),
        )
    };
    Sheet {
        headline: headline(answer, species, lines_first),
        columns,
        rows,
        notes,
        object,
        list: if lines_first { "lines" } else { "levels" },
    }
}

fn headline(answer: &Answer, species: Species, lines_first: bool) -> Vec<String> {
    let count = if lines_first {
        format!("{} lines", answer.lines.len())
    } else {
        format!("{} levels", answer.levels.len())
    };
    let limit = with_uncertainty(answer.limit_per_cm, answer.limit_uncertainty_per_cm);
    let mut out = vec![format!(
        "{species}, {}: {count}; limit {limit} cm⁻¹.",
        answer.series
    )];
    if let Some(placed) = answer.limit_line {
        let medium = medium_word(placed.medium);
        let nm = with_uncertainty(placed.wavelength_nm, placed.uncertainty_nm.max(1e-6));
        out.push(format!("The lines end at {nm} nm in {medium}."));
    }
    out
}

fn level_row(level: &PredictedLevel, limit_sigma_per_cm: f64) -> Vec<String> {
    let sigma = level.uncertainty_per_cm;
    // A level that is measured knows nothing of the limit; one that is computed hangs on it.
    let measured = level.method == "given" || level.method.starts_with("held");
    let below = if measured {
        sigma.hypot(limit_sigma_per_cm)
    } else {
        sigma
    };
    vec![
        level.label.clone(),
        with_uncertainty(level.energy_per_cm, sigma),
        with_uncertainty(level.binding_per_cm, below),
        format!("{:.5}", level.quantum_defect),
        lifetime_cell(level.lifetime),
        lifetime_cell(level.black_body_lifetime),
        format!("{:.1e}", level.polarisability_scale_a0_3),
        level.method.clone(),
    ]
}

fn line_row(line: &PredictedLine) -> Vec<String> {
    let (nm, medium) = line.placed.map_or((String::new(), ""), |placed: Placed| {
        let cell = with_uncertainty(placed.wavelength_nm, placed.uncertainty_nm);
        (cell, medium_word(placed.medium))
    });
    let rates = plus_minus(Some(line.rate_relative_uncertainty));
    vec![
        format!("{} → {}", line.upper, line.lower),
        nm,
        medium.to_owned(),
        with_uncertainty(line.wavenumber_per_cm, line.uncertainty_per_cm),
        format!("{}{rates}", rate(line.rate_per_s)),
        line.method.to_owned(),
    ]
}

/// `26.20 ns ±3%`, four significant digits.
fn lifetime_cell(lifetime: Option<LevelLifetime>) -> String {
    lifetime.map_or_else(String::new, |lifetime| {
        let (value, unit) = scaled(lifetime.seconds);
        let decimals = (3.0 - value.log10().floor()).clamp(0.0, 3.0) as usize;
        let sigma = plus_minus(Some(lifetime.relative_uncertainty));
        format!("{value:.decimals$} {unit}{sigma}")
    })
}

fn scaled(seconds: f64) -> (f64, &'static str) {
    const UNITS: [(f64, &str); 5] = [
        (1.0, "s"),
        (1e-3, "ms"),
        (1e-6, "µs"),
        (1e-9, "ns"),
        (1e-12, "ps"),
    ];
    let unit = UNITS
        .iter()
        .find(|(size, _)| seconds >= *size)
        .unwrap_or(&UNITS[4]);
    (seconds / unit.0, unit.1)
}

fn level_object(level: &PredictedLevel) -> Value {
    let ns = |lifetime: Option<LevelLifetime>| lifetime.map(|l| l.seconds * 1e9);
    let relative = |lifetime: Option<LevelLifetime>| lifetime.map(|l| l.relative_uncertainty);
    json!({
        "n": level.n,
        "l": level.l,
        "j": level.j.map(|j| j.to_string()),
        "label": level.label,
        "energy_per_cm": level.energy_per_cm,
        "binding_per_cm": level.binding_per_cm,
        "quantum_defect": level.quantum_defect,
        "uncertainty_per_cm": level.uncertainty_per_cm,
        "method": level.method,
        "lifetime_ns": ns(level.lifetime),
        "lifetime_relative_uncertainty": relative(level.lifetime),
        "black_body_lifetime_ns": ns(level.black_body_lifetime),
        "black_body_lifetime_relative_uncertainty": relative(level.black_body_lifetime),
        "polarisability_scale_a0_3": level.polarisability_scale_a0_3,
    })
}

fn line_object(line: &PredictedLine) -> Value {
    json!({
        "n": line.n,
        "upper": line.upper,
        "lower": line.lower,
        "wavelength_nm": line.placed.map(|p| p.wavelength_nm),
        "medium": line.placed.map(|p| medium_word(p.medium)),
        "vacuum_wavelength_nm": 1e7 / line.wavenumber_per_cm,
        "wavenumber_per_cm": line.wavenumber_per_cm,
        "wavenumber_uncertainty_per_cm": line.uncertainty_per_cm,
        "rate_per_s": line.rate_per_s,
        "rate_relative_uncertainty": line.rate_relative_uncertainty,
        "method": line.method,
    })
}
