//! The answer of `convert`.

use serde_json::{Map, Value, json};
use vocabulary::light::{Conversion, Medium, PositionMedium};

use super::sheet::{Align, Column, Context, Sheet};

const COLUMNS: [Column; 3] = [
    Column::whole("quantity", Align::Left),
    Column::whole("value", Align::Right),
    Column::whole("unit", Align::Left),
];

/// One position in every form.
pub fn convert(typed: &str, conversion: &Conversion, medium: Medium) -> Sheet {
    let notes = notes(conversion);
    let context = Context {
        command: "convert",
        medium: medium.to_string(),
        conditions: [(
            "air".to_owned(),
            json!("Ciddor 1996, 15 °C, 101325 Pa, dry, 450 ppm CO2"),
        )]
        .into_iter()
        .collect(),
        ..Context::default()
    };
    let position = position(typed, conversion);
    let mut object = context.object(&notes);
    object.extend(position.clone());
    object.insert(
        "positions".into(),
        Value::Array(vec![Value::Object(position)]),
    );
    Sheet {
        headline: vec![headline(typed, conversion)],
        columns: COLUMNS.to_vec(),
        rows: rows(conversion),
        notes,
        object,
        list: "positions",
    }
}

fn headline(typed: &str, conversion: &Conversion) -> String {
    let unit = if conversion.unit_assumed {
        " nm (no unit was typed)"
    } else {
        ""
    };
    match conversion.read_in {
        Some(PositionMedium::Air) => format!("{typed}{unit}, read in air:"),
        Some(PositionMedium::Vacuum) => format!("{typed}{unit}, read in vacuum:"),
        None => format!("{typed}{unit}:"),
    }
}

fn rows(conversion: &Conversion) -> Vec<Vec<String>> {
    let row = |name: &str, value: String, unit: &str| vec![name.into(), value, unit.into()];
    vec![
        row(
            "vacuum wavelength",
            ten_digits(conversion.vacuum_wavelength_nm),
            "nm",
        ),
        row(
            "air wavelength",
            conversion
                .air_wavelength_nm
                .map_or_else(|| "–".into(), ten_digits),
            "nm",
        ),
        row(
            "wavenumber",
            ten_digits(conversion.wavenumber_per_cm),
            "cm⁻¹",
        ),
        row("frequency", ten_digits(conversion.frequency_thz), "THz"),
        row("photon energy", ten_digits(conversion.energy_ev), "eV"),
        row(
            "photon momentum",
            format!("{:.9e}", conversion.momentum_kg_m_per_s),
            "kg m/s",
        ),
    ]
}

/// Ten significant digits; powers of ten where the number is out of the ordinary.
fn ten_digits(value: f64) -> String {
    let digits_before = value.abs().log10().floor() as i32 + 1;
    if !(-3..=10).contains(&digits_before) {
        return format!("{value:.9e}");
    }
    let decimals = usize::try_from(10 - digits_before).unwrap_or(0);
    format!("{value:.decimals$}")
}

fn notes(conversion: &Conversion) -> Vec<String> {
    let mut notes = Vec::new();
    match conversion.air_wavelength_nm {
        None => notes.push(
            "No wavelength in air: the index of air is known from 185 to 2500 nm only.".to_owned(),
        ),
        Some(_) if conversion.air_extrapolated => notes
            .push("The index of air is extrapolated here (published for 300–1690 nm).".to_owned()),
        Some(_) => {}
    }
    notes.push(
        "Air: Ciddor 1996, 15 °C, 101 325 Pa, dry, 450 ppm CO₂ (index good to 2 to 5 parts in 1e8). \
         The other forms follow without error from one another (h, c and e are exact since 2019); \
         ten digits are shown, however few were typed."
            .to_owned(),
    );
    notes
}

fn position(typed: &str, conversion: &Conversion) -> Map<String, Value> {
    let mut out = Map::new();
    let mut put = |key: &str, value: Value| out.insert(key.to_owned(), value);
    put("quantity", json!(typed));
    put(
        "read_in",
        json!(conversion.read_in.map(|medium| medium.to_string())),
    );
    put(
        "vacuum_wavelength_nm",
        json!(conversion.vacuum_wavelength_nm),
    );
    put("air_wavelength_nm", json!(conversion.air_wavelength_nm));
    put("wavenumber_per_cm", json!(conversion.wavenumber_per_cm));
    put("frequency_thz", json!(conversion.frequency_thz));
    put("energy_ev", json!(conversion.energy_ev));
    put("momentum_kg_m_per_s", json!(conversion.momentum_kg_m_per_s));
    out
}
