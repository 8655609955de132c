//! What every answer states beside its rows: conditions, assumptions, sources.

use serde_json::{Map, Value, json};
use vocabulary::light::Medium;
use vocabulary::spectrum::Line;

use super::CliError;
use super::options::Checked;
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
        conditions: conditions(checked),
        assumed: checked.assumed.clone(),
        ..Context::default()
    };
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
    Ok(context)
}

/// The light source under its stable keys.
fn conditions(checked: &Checked) -> Map<String, Value> {
    let mut out = Map::new();
    let mut put = |key: &str, value: Value| out.insert(key.to_owned(), value);
    let model = format!("{:?}", checked.conditions.model).to_lowercase();
    put("model", json!(model));
    put("electron_temperature_ev", json!(checked.te.ev()));
    put(
        "electron_density_per_m3",
        json!(checked.conditions.electron_density_per_m3),
    );
    put("gas_temperature_k", json!(checked.gas.kelvin()));
    put(
        "air",
        json!("Ciddor 1996, 15 °C, 101325 Pa, dry, 450 ppm CO2"),
    );
    let amounts: Map<String, Value> = checked
        .amounts
        .iter()
        .map(|(species, a)| (species.to_string(), json!(a)))
        .collect();
    put("mix", Value::Object(amounts));
    out
}
