//! What the columns of a self-describing table mean, by the words of its standard: UCDs, units
//! and plain labels. What is not recognised stays unmapped; nothing is guessed from values.

use crate::row::ColumnInfo;
use crate::source::{Cell, Columns, RecordKind};
use crate::unit::{self, ToPerCm, Unit};

/// Columns with a meaning, and those without.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Inferred {
    /// Target → column.
    pub columns: Columns,
    /// Names of the columns that no rule recognises.
    pub unrecognised: Vec<String>,
}

impl Inferred {
    /// What the rows seem to be.
    pub fn records(&self) -> RecordKind {
        let c = &self.columns;
        let lines = c.wavelength.is_some()
            || c.wavenumber.is_some()
            || c.frequency.is_some()
            || c.photon_energy.is_some()
            || c.upper_energy.is_some()
            || c.rate.is_some()
            || c.log_gf.is_some();
        if lines {
            RecordKind::Lines
        } else {
            RecordKind::Levels
        }
    }
}

/// Recognises the columns of a table.
pub fn infer(columns: &[ColumnInfo]) -> Inferred {
    let mut found = Inferred::default();
    for (index, column) in columns.iter().enumerate() {
        let target = target_of(column);
        let slot = target.and_then(|target| found.columns.target(target));
        match slot {
            Some(slot) if slot.is_none() => {
                let cell = Cell {
                    position: Some(index + 1),
                    ..Cell::default()
                };
                *slot = Some(cell);
            }
            _ => found.unrecognised.push(column.name.clone()),
        }
    }
    found
}

/// The target that a column stands for.
pub fn target_of(column: &ColumnInfo) -> Option<&'static str> {
    let name = column.name.trim();
    if let Some(base) = name.strip_prefix("e_") {
        return uncertainty_of(by_label(base, column)?);
    }
    let by_words = column
        .ucd
        .as_deref()
        .and_then(|ucd| by_ucd(ucd, name, column));
    by_words.or_else(|| by_label(name, column))
}

/// The target of the uncertainty of a target.
fn uncertainty_of(target: &str) -> Option<&'static str> {
    Some(match target {
        "wavelength" => "wavelength_uncertainty",
        "wavenumber" => "wavenumber_uncertainty",
        "frequency" => "frequency_uncertainty",
        "photon_energy" => "photon_energy_uncertainty",
        "energy" => "energy_uncertainty",
        "lower_energy" => "lower_energy_uncertainty",
        "upper_energy" => "upper_energy_uncertainty",
        _ => return None,
    })
}

/// UCD 1+ words, the primary one first (IVOA "The UCD1+ controlled vocabulary").
fn by_ucd(ucd: &str, name: &str, column: &ColumnInfo) -> Option<&'static str> {
    let lower = ucd.to_ascii_lowercase();
    let words: Vec<&str> = lower.split(';').map(str::trim).collect();
    let has = |word: &str| words.contains(&word);
    if words.first() == Some(&"stat.error") {
        let rest = words[1..].join(";");
        return uncertainty_of(by_ucd(&rest, name, column)?);
    }
    let end = |lower: &'static str, upper: &'static str, own: &'static str| {
        // An initial state is the lower one in absorption and the upper one in emission, so
        // only a plain word decides.
        let label = name.to_ascii_lowercase();
        if label.contains("low") {
            Some(lower)
        } else if label.contains("up") {
            Some(upper)
        } else if has("phys.atmol.initial") || has("phys.atmol.final") {
            None
        } else {
            Some(own)
        }
    };
    match *words.first()? {
        "em.wl" | "em.wl.central" => Some("wavelength"),
        "em.wavenumber" => Some("wavenumber"),
        "em.freq" => Some("frequency"),
        "phys.energy" if has("phys.atmol.level") => end("lower_energy", "upper_energy", "energy"),
        "em.energy" => Some("photon_energy"),
        "phys.atmol.element" => Some("element"),
        "phys.atmol.ionstage" => Some("stage"),
        "phys.atmol.configuration" => end(
            "lower_configuration",
            "upper_configuration",
            "configuration",
        ),
        "phys.atmol.term" => end("lower_term", "upper_term", "term"),
        "phys.atmol.sweight" => end("lower_g", "upper_g", "g"),
        "phys.atmol.transprob" => Some("rate"),
        "phys.atmol.oscstrength" => Some("oscillator_strength"),
        "phys.atmol.woscstrength" if unit_of(column).is_some_and(|u| u.logarithm) => Some("log_gf"),
        "phys.atmol.woscstrength" => by_label(name, column).or(Some("gf")),
        "spect.line.intensity" => Some("intensity"),
        _ => None,
    }
}

/// Labels that papers use, whatever their case and marks.
const LABELS: [(&str, &str); 62] = [
    ("species", "species"),
    ("ion", "species"),
    ("spectrum", "species"),
    ("element", "element"),
    ("elem", "element"),
    ("el", "element"),
    ("stage", "stage"),
    ("ionstage", "stage"),
    ("charge", "charge"),
    ("isotope", "isotope"),
    ("energy", "energy"),
    ("level", "energy"),
    ("configuration", "configuration"),
    ("config", "configuration"),
    ("conf", "configuration"),
    ("term", "term"),
    ("j", "j"),
    ("g", "g"),
    ("kind", "kind"),
    ("wavelength", "wavelength"),
    ("wave", "wavelength"),
    ("lambda", "wavelength"),
    ("lam", "wavelength"),
    ("wl", "wavelength"),
    ("wavenumber", "wavenumber"),
    ("wn", "wavenumber"),
    ("frequency", "frequency"),
    ("freq", "frequency"),
    ("elow", "lower_energy"),
    ("elower", "lower_energy"),
    ("lowerenergy", "lower_energy"),
    ("ep", "lower_energy"),
    ("exppot", "lower_energy"),
    ("expot", "lower_energy"),
    ("eup", "upper_energy"),
    ("eupp", "upper_energy"),
    ("eupper", "upper_energy"),
    ("upperenergy", "upper_energy"),
    ("jlow", "lower_j"),
    ("jlower", "lower_j"),
    ("jup", "upper_j"),
    ("jupp", "upper_j"),
    ("jupper", "upper_j"),
    ("glow", "lower_g"),
    ("glower", "lower_g"),
    ("gup", "upper_g"),
    ("gupp", "upper_g"),
    ("gupper", "upper_g"),
    ("clow", "lower_configuration"),
    ("lowerconfig", "lower_configuration"),
    ("cup", "upper_configuration"),
    ("upperconfig", "upper_configuration"),
    ("tlow", "lower_term"),
    ("lowerterm", "lower_term"),
    ("tup", "upper_term"),
    ("upperterm", "upper_term"),
    ("loggf", "log_gf"),
    ("gf", "gf"),
    ("osc", "oscillator_strength"),
    ("transprob", "rate"),
    ("int", "intensity"),
    ("intensity", "intensity"),
];

fn by_label(name: &str, column: &ColumnInfo) -> Option<&'static str> {
    let lower = name.to_ascii_lowercase();
    let target = exact_target(&lower).or_else(|| {
        let plain: String = lower.chars().filter(char::is_ascii_alphanumeric).collect();
        let found = LABELS.iter().find(|(label, _)| *label == plain);
        found.map(|(_, target)| *target)
    })?;
    fits_unit(target, column).then_some(target)
}

/// A target under its own name, with or without its unit behind it.
fn exact_target(name: &str) -> Option<&'static str> {
    let bare = ["_per_cm", "_per_s", "_nm"]
        .iter()
        .find_map(|end| name.strip_suffix(end));
    let name = match name {
        "rate_relative_uncertainty" => "rate_uncertainty",
        other => bare.unwrap_or(other),
    };
    Columns::target_name(name)
}

fn unit_of(column: &ColumnInfo) -> Option<Unit> {
    unit::parse(column.unit.as_deref()?, column.dialect).ok()
}

/// A stated unit must be one of the quantity, or the label means something else.
fn fits_unit(target: &str, column: &ColumnInfo) -> bool {
    if column
        .unit
        .as_deref()
        .is_none_or(|unit| unit.trim().is_empty())
    {
        return true;
    }
    let Some(unit) = unit_of(column) else {
        return !needs_unit(target);
    };
    match target {
        "wavelength" | "wavelength_uncertainty" => unit.is_length(),
        "rate" => unit.to_per_s().is_some(),
        _ if needs_unit(target) => matches!(unit.to_per_cm(), Some(ToPerCm::Times(_))),
        _ => true,
    }
}

fn needs_unit(target: &str) -> bool {
    target == "rate"
        || target.contains("energy")
        || ["wavelength", "wavenumber", "frequency"]
            .iter()
            .any(|q| target.starts_with(q))
}
