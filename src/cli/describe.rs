//! What every answer states beside its rows: conditions, assumptions, sources.

use serde_json::{Map, Value, json};
use vocabulary::atom::SpeciesRequest;
use vocabulary::light::{Medium, Temperature};
use vocabulary::spectrum::Line;

use super::CliError;
use super::options::Checked;
use crate::advise::Conditions;
use crate::catalogue::Catalogue;
use crate::show::Context;

/// The context of an answer about lines, with the sources of those lines.
pub fn context<'l>(
    command: &'static str,
    catalogue: &Catalogue,
    medium: Medium,
    checked: &Checked,
    lines: impl Iterator<Item = &'l Line> + Clone,
) -> Result<Context, CliError> {
    let mut context = Context {
        command,
        medium: medium.to_string(),
        conditions: conditions(
            &checked.conditions,
            checked.te,
            checked.gas,
            &checked.amounts,
        ),
        assumed: checked.assumed.clone(),
        ..Context::default()
    };
    context.conditions.insert(
        "instrument".into(),
        json!(checked.conditions.details.instrument.word()),
    );
    cite(&mut context, catalogue, lines)?;
    Ok(context)
}

/// Adds the sources of lines.
pub fn cite<'l>(
    context: &mut Context,
    catalogue: &Catalogue,
    lines: impl Iterator<Item = &'l Line> + Clone,
) -> Result<(), CliError> {
    let used = |key: &str| {
        lines
            .clone()
            .any(|l| &*l.position_source == key || l.rate_source.as_deref() == Some(key))
    };
    for (key, citation, licence) in catalogue.citations()? {
        if used(&key) {
            context.sources.insert(key, (citation, licence));
        }
    }
    Ok(())
}

/// The light source under its stable keys.
pub fn conditions(
    source: &Conditions,
    te: Temperature,
    gas: Temperature,
    amounts: &[(SpeciesRequest, f64)],
) -> Map<String, Value> {
    let mut out = Map::new();
    let mut put = |key: &str, value: Value| out.insert(key.to_owned(), value);
    let model = format!("{:?}", source.model).to_lowercase();
    put("model", json!(model));
    put("electron_temperature_ev", json!(te.ev()));
    put(
        "electron_density_per_m3",
        json!(source.electron_density_per_m3),
    );
    put("gas_temperature_k", json!(gas.kelvin()));
    put(
        "air",
        json!("Ciddor 1996, 15 °C, 101325 Pa, dry, 450 ppm CO2"),
    );
    let amounts: Map<String, Value> = amounts
        .iter()
        .map(|(species, a)| (species.to_string(), json!(a)))
        .collect();
    put("mix", Value::Object(amounts));
    for (key, value) in details(source) {
        put(key, value);
    }
    out
}

/// What only some questions say, under its stable keys.
fn details(source: &Conditions) -> Vec<(&'static str, Value)> {
    let details = &source.details;
    let entries = |list: &[crate::advise::Entry]| -> Value {
        list.iter()
            .map(|e| {
                json!({
                    "species": e.request.to_string(),
                    "value": e.value,
                    "relative_uncertainty": e.relative_sigma,
                })
            })
            .collect()
    };
    let mut out = Vec::new();
    if details.amounts.iter().any(|e| e.relative_sigma > 0.0) {
        out.push(("amounts", entries(&details.amounts)));
    }
    if !details.ion_fractions.is_empty() {
        out.push(("ion_fractions", entries(&details.ion_fractions)));
    }
    if !details.metastables.is_empty() {
        let levels = details.metastables.iter().map(|m| {
            let level = match &m.level {
                crate::advise::LevelName::Label(label) => label.clone(),
                crate::advise::LevelName::Energy(energy) => format!("{energy} cm-1"),
            };
            json!({
                "species": m.species.to_string(),
                "level": level,
                "value": m.fraction,
                "relative_uncertainty": m.relative_sigma,
            })
        });
        out.push(("metastable", levels.collect()));
    }
    if !details.intensities.is_empty() {
        let lines = details.intensities.iter().map(|g| {
            json!({
                "species": g.species.to_string(),
                "vacuum_wavelength_nm": g.vacuum_nm,
                "intensity": g.intensity,
                "relative_uncertainty": g.relative_sigma,
            })
        });
        out.push(("intensities", lines.collect()));
    }
    if !details.gas.is_empty() {
        let gases = details.gas.iter().map(|g| {
            json!({
                "atomic_number": g.atomic_number,
                "density_per_m3": g.density_per_m3,
            })
        });
        out.push(("gas", gases.collect()));
    }
    out
}
