//! Amounts, fractions and populations as they are typed or stand in a file, each with its
//! uncertainty.

use std::path::{Path, PathBuf};

use vocabulary::atom::{Species, SpeciesRequest, Stages, mass_u};
use vocabulary::light::constants::BOLTZMANN_J_PER_K;
use vocabulary::light::{Air, Medium, NumberDensity, SpectralQuantity, Temperature};

use super::CliError;
use crate::advise::{Entry, Gas, LevelName, Metastable};
use crate::calc::shape::polarisability_a0_cubed;

/// What a file of the mix may say.
#[derive(Clone, Debug, Default)]
pub struct MixFile {
    /// Model, electron temperature, electron density, gas temperature, as typed.
    pub model: Option<String>,
    /// Electron temperature, as typed.
    pub te: Option<String>,
    /// Electron density, as typed.
    pub ne: Option<String>,
    /// Gas temperature, as typed.
    pub gas_temperature: Option<String>,
    /// Entries `name = value` of each table.
    pub amounts: Vec<(String, String)>,
    /// Entries of ion fractions.
    pub ion_fractions: Vec<(String, String)>,
    /// Entries of metastable levels.
    pub metastable: Vec<(String, String)>,
    /// Entries of neutral gases.
    pub gas: Vec<(String, String)>,
}

const SINGLE: [&str; 4] = ["model", "te", "ne", "gas_temperature"];
const TABLES: [&str; 4] = ["amounts", "ion_fractions", "metastable", "gas"];

impl MixFile {
    /// Whether a text names a file rather than amounts.
    pub fn is_named(text: &str) -> Option<PathBuf> {
        let path = Path::new(text.trim());
        path.extension()
            .is_some_and(|e| e.eq_ignore_ascii_case("toml"))
            .then(|| path.to_owned())
    }

    /// Reads a file.
    pub fn read(path: &Path) -> Result<Self, CliError> {
        let text = std::fs::read_to_string(path).map_err(|cause| CliError::Unreadable {
            path: path.to_owned(),
            cause,
        })?;
        let bad = |problem: String| CliError::Usage(format!("{}: {problem}", path.display()));
        let table: toml::Table = text.parse().map_err(|e: toml::de::Error| {
            bad(format!(
                "{}; write a table [amounts] with lines such as \"Fe I\" = 0.01",
                e.message().trim()
            ))
        })?;
        let mut out = Self::default();
        for (key, value) in &table {
            let is_known = SINGLE.contains(&key.as_str()) || TABLES.contains(&key.as_str());
            if !is_known {
                return Err(bad(format!(
                    "`{key}` is not known here; a mix has {} and the tables [{}]",
                    SINGLE.join(", "),
                    TABLES.join("], [")
                )));
            }
            match value {
                toml::Value::Table(entries) if TABLES.contains(&key.as_str()) => {
                    let list = out.table(key);
                    for (name, value) in entries {
                        list.push((name.clone(), text_of(value).ok_or_else(|| {
                            bad(format!(
                                "[{key}] {name}: write a number, or a text with its uncertainty or \
                                 unit such as \"0.01±30%\""
                            ))
                        })?));
                    }
                }
                toml::Value::String(text) if SINGLE.contains(&key.as_str()) => {
                    *out.single(key) = Some(text.clone());
                }
                _ if SINGLE.contains(&key.as_str()) => {
                    return Err(bad(format!(
                        "`{key}` takes a text with its unit, such as te = \"3eV\""
                    )));
                }
                _ => {
                    return Err(bad(format!(
                        "`{key}` is a table: write [{key}] above its lines"
                    )));
                }
            }
        }
        if TABLES.iter().all(|t| out.table(t).is_empty())
            && SINGLE.iter().all(|s| out.single(s).is_none())
        {
            return Err(bad(
                "says nothing; write a table [amounts] with lines such as \"Fe I\" = 0.01".into(),
            ));
        }
        if table.contains_key("amounts") && out.amounts.is_empty() {
            return Err(bad(
                "the table [amounts] is empty; write lines such as \"Fe I\" = 0.01, or leave it out"
                    .into(),
            ));
        }
        Ok(out)
    }

    fn table(&mut self, key: &str) -> &mut Vec<(String, String)> {
        match key {
            "ion_fractions" => &mut self.ion_fractions,
            "metastable" => &mut self.metastable,
            "gas" => &mut self.gas,
            _ => &mut self.amounts,
        }
    }

    fn single(&mut self, key: &str) -> &mut Option<String> {
        match key {
            "model" => &mut self.model,
            "ne" => &mut self.ne,
            "gas_temperature" => &mut self.gas_temperature,
            _ => &mut self.te,
        }
    }
}

fn text_of(value: &toml::Value) -> Option<String> {
    match value {
        toml::Value::String(text) => Some(text.clone()),
        toml::Value::Integer(number) => Some(number.to_string()),
        toml::Value::Float(number) => Some(number.to_string()),
        _ => None,
    }
}

/// `name = value` entries of a typed list.
pub fn listed(option: &str, text: &str, example: &str) -> Result<Vec<(String, String)>, CliError> {
    text.split(',')
        .map(|entry| {
            let parts = entry.rsplit_once('=');
            parts
                .map(|(name, value)| (name.trim().to_owned(), value.trim().to_owned()))
                .ok_or_else(|| {
                    CliError::Usage(format!(
                        "{option}: `{}`: no value behind `=`; write {example}",
                        entry.trim()
                    ))
                })
        })
        .collect()
}

/// `0.01`, `0.01±30%`, `0.01±0.003`, with `+-` for `±`: a value and its relative 1 σ.
fn uncertain(text: &str) -> Result<(f64, f64), &'static str> {
    let text = text.trim();
    let parts = text.split_once('±').or_else(|| text.split_once("+-"));
    let (value, sigma) = match parts {
        Some((value, sigma)) => (value.trim(), Some(sigma.trim())),
        None => (text, None),
    };
    let number = |t: &str| t.parse::<f64>().ok().filter(|v| v.is_finite());
    let value = number(value).ok_or("the amount is no number")?;
    let Some(sigma) = sigma else {
        return Ok((value, 0.0));
    };
    let relative = match sigma.strip_suffix('%') {
        Some(percent) => number(percent.trim()).map(|p| p / 100.0),
        None => number(sigma).map(|s| if value == 0.0 { s } else { s / value.abs() }),
    };
    match relative {
        Some(relative) if relative >= 0.0 => Ok((value, relative)),
        _ => Err("the uncertainty behind ± is no number from 0 upwards"),
    }
}

/// Amounts: zero or above, not all zero.
pub fn amounts(entries: &[(String, String)]) -> Result<Vec<Entry>, CliError> {
    let mut out = Vec::with_capacity(entries.len());
    for (name, text) in entries {
        let bad = |problem| CliError::Mix {
            entry: format!("{name}={text}"),
            problem,
        };
        let request: SpeciesRequest = name.parse()?;
        let (value, relative_sigma) = uncertain(text).map_err(bad)?;
        if value < 0.0 {
            return Err(bad("an amount is zero or above"));
        }
        if out.iter().any(|e: &Entry| e.request == request) {
            return Err(bad("the species stands twice"));
        }
        out.push(Entry {
            request,
            value,
            relative_sigma,
        });
    }
    if !out.is_empty() && out.iter().all(|e| e.value == 0.0) {
        let all: Vec<String> = entries.iter().map(|(n, t)| format!("{n}={t}")).collect();
        return Err(CliError::Mix {
            entry: all.join(","),
            problem: "all amounts are zero",
        });
    }
    Ok(out)
}

/// Parts of an element, by stage: 0 to 1, together at most 1.
pub fn ion_fractions(entries: &[(String, String)]) -> Result<Vec<Entry>, CliError> {
    let mut out = Vec::with_capacity(entries.len());
    for (name, text) in entries {
        let request: SpeciesRequest = name.parse()?;
        let bad = |problem: &str| {
            CliError::Usage(format!(
                "ion fractions: `{name}={text}`: {problem}; write `C I=0.2,C II=0.8`"
            ))
        };
        if request.single().is_none() {
            return Err(bad("names no single stage"));
        }
        let (value, relative_sigma) =
            uncertain(text).map_err(|_| bad("is no number with an uncertainty"))?;
        if !(0.0..=1.0).contains(&value) {
            return Err(bad("a part of an element lies between 0 and 1"));
        }
        if out.iter().any(|e: &Entry| e.request == request) {
            return Err(bad("the stage stands twice"));
        }
        out.push(Entry {
            request,
            value,
            relative_sigma,
        });
    }
    check_sums(&out, "")?;
    Ok(out)
}

/// Parts of one element sum to at most 1; `place` begins the message.
pub fn check_sums(entries: &[Entry], place: &str) -> Result<(), CliError> {
    let same = |a: &Entry, b: &Entry| {
        (a.request.atomic_number, a.request.isotope) == (b.request.atomic_number, b.request.isotope)
    };
    for entry in entries {
        let sum: f64 = entries
            .iter()
            .filter(|e| same(entry, e))
            .map(|e| e.value)
            .sum();
        // Rounded parts may exceed 1 a little.
        if sum > 1.005 {
            let element = SpeciesRequest {
                stages: Stages::All,
                ..entry.request
            };
            return Err(CliError::Usage(format!(
                "{place}ion fractions of {element} add up to {sum:.3}; the parts of one element are at \
                 most 1 together"
            )));
        }
        if sum == 0.0 {
            let element = SpeciesRequest {
                stages: Stages::All,
                ..entry.request
            };
            return Err(CliError::Usage(format!(
                "{place}ion fractions of {element} are all zero; give its amount as zero to leave it out"
            )));
        }
    }
    Ok(())
}

/// Populations of metastable levels: `He I 2s 3S=1e-5`.
pub fn metastables(entries: &[(String, String)]) -> Result<Vec<Metastable>, CliError> {
    let mut out: Vec<Metastable> = Vec::with_capacity(entries.len());
    for (name, text) in entries {
        let bad = |problem: &str| {
            CliError::Usage(format!(
                "metastable levels: `{name}={text}`: {problem}; write \"He I 2s 3S=1e-5±50%\""
            ))
        };
        let (species, level) = level_name(name)
            .ok_or_else(|| bad("names no species in one stage with a level behind it"))?;
        let (fraction, relative_sigma) =
            uncertain(text).map_err(|_| bad("is no number with an uncertainty"))?;
        if !(fraction > 0.0 && fraction < 1.0) {
            return Err(bad("the part of the atoms in it lies between 0 and 1"));
        }
        let sum: f64 = out
            .iter()
            .filter(|m| m.species == species)
            .map(|m| m.fraction)
            .sum();
        if sum + fraction >= 1.0 {
            return Err(bad("nothing is left for the ground term"));
        }
        out.push(Metastable {
            species,
            level,
            fraction,
            relative_sigma,
        });
    }
    Ok(out)
}

/// `He I 2s 3S`, `He I 159856cm-1`: the longest beginning that is a species in one stage.
fn level_name(name: &str) -> Option<(Species, LevelName)> {
    let words: Vec<&str> = name.split_whitespace().collect();
    for split in (1..words.len()).rev() {
        let species = words[..split].join(" ").parse::<SpeciesRequest>();
        let Some(species) = species.ok().and_then(SpeciesRequest::single) else {
            continue;
        };
        let rest = words[split..].join(" ");
        let energy = rest
            .parse::<SpectralQuantity>()
            .ok()
            .filter(|q| !q.unit_assumed)
            .and_then(|q| q.wavenumber_per_cm(Medium::Vacuum, Air::standard()).ok());
        let level = energy.map_or(LevelName::Label(rest), LevelName::Energy);
        return Some((species, level));
    }
    None
}

const PASCAL: [(&str, f64); 8] = [
    ("kPa", 1e3),
    ("hPa", 1e2),
    ("Pa", 1.0),
    ("mbar", 1e2),
    ("bar", 1e5),
    ("atm", 101_325.0),
    ("mTorr", 101.325 / 760.0),
    ("Torr", 101_325.0 / 760.0),
];

/// Neutral gases: `Ar=1bar`, `He=1e22m-3`.
pub fn gas(entries: &[(String, String)], temperature: Temperature) -> Result<Vec<Gas>, CliError> {
    let mut out = Vec::with_capacity(entries.len());
    for (name, text) in entries {
        let bad = |problem: &str| {
            CliError::Usage(format!(
                "--gas: `{name}={text}`: {problem}; write Ar=1bar or Ar=2e25m-3"
            ))
        };
        let request: SpeciesRequest = name.parse()?;
        let species = Species {
            atomic_number: request.atomic_number,
            stage: 1,
            isotope: request.isotope,
        };
        if request.stages != Stages::All && request.single() != Some(species) {
            return Err(bad("a neutral gas is meant"));
        }
        if polarisability_a0_cubed(species.atomic_number).is_none() {
            let held: Vec<String> = (1..=118)
                .filter(|&z| polarisability_a0_cubed(z).is_some())
                .map(|z| Species::new(z, 1).to_string().replace(" I", ""))
                .collect();
            return Err(bad(&format!(
                "the polarisability of its atoms is not known here (it is of {})",
                held.join(", ")
            )));
        }
        let pressure = PASCAL
            .iter()
            .find_map(|(unit, size)| Some((text.trim().strip_suffix(unit)?, size)));
        let density_per_m3 = match pressure {
            Some((number, size)) => match number.trim().parse::<f64>() {
                Ok(value) if value > 0.0 && value.is_finite() => {
                    value * size / (BOLTZMANN_J_PER_K * temperature.kelvin())
                }
                _ => return Err(bad("a pressure is a number above zero with its unit")),
            },
            None => text.parse::<NumberDensity>()?.per_m3(),
        };
        out.push(Gas {
            atomic_number: species.atomic_number,
            mass_u: mass_u(species).unwrap_or(2.0 * f64::from(species.atomic_number)),
            density_per_m3,
        });
    }
    Ok(out)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_value_carries_its_uncertainty_in_each_spelling() {
        for (text, value, sigma) in [
            ("0.01", 0.01, 0.0),
            ("0.01±30%", 0.01, 0.3),
            ("0.01 +- 30 %", 0.01, 0.3),
            ("0.01±0.003", 0.01, 0.3),
            ("1e-3+-2e-4", 1e-3, 0.2),
            ("2e-3±5%", 2e-3, 0.05),
        ] {
            let (read, relative) = uncertain(text).unwrap();
            // Decimal fractions: rounding only.
            assert!((read - value).abs() < 1e-15, "{text}");
            assert!((relative - sigma).abs() < 1e-12, "{text}: {relative}");
        }
        for text in ["", "x", "1±", "1±-2%", "1±x%", "NaN", "1±NaN", "inf"] {
            assert!(uncertain(text).is_err(), "{text}");
        }
    }

    #[test]
    fn a_level_is_read_behind_its_species() {
        let read = |text: &str| level_name(text);
        let helium: Species = "He I".parse().unwrap();
        assert_eq!(
            read("He I 2s 3S"),
            Some((helium, LevelName::Label("2s 3S".into())))
        );
        assert_eq!(
            read("HeI 2s 3S 1"),
            Some((helium, LevelName::Label("2s 3S 1".into())))
        );
        assert!(matches!(
            read("He I 159856cm-1"),
            Some((_, LevelName::Energy(e))) if (e - 159_856.0).abs() < 1e-6
        ));
        assert_eq!(read("He I"), None);
        assert_eq!(read("2s 3S"), None);
    }
}
