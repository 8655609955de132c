//! The Rydberg series of the bundled tables, for the tests of the fit.

#![allow(clippy::unwrap_used, reason = "a panic in a test is the report")]
#![allow(dead_code, reason = "each test uses its part")]

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

use lineclear::calc::series::{
    Core, LabelledLevel, Limit, Member, SeriesInput, SeriesKey, group_series,
};
use lineclear::vocabulary::light::constants::{ELECTRON_MASS_U, RYDBERG_PER_CM};

/// A series that one source holds.
pub struct Held {
    /// `Rb I 4p6 s 2S 1/2`: species, core, l, term, J.
    pub name: String,
    pub core: Core,
    pub core_charge: u32,
    pub rydberg_per_cm: f64,
    pub l: u32,
    pub limit: Limit,
    pub members: Vec<Member>,
}

impl Held {
    /// The fit's input with the first `count` members.
    pub fn input(&self, count: usize) -> SeriesInput {
        SeriesInput {
            core_charge: self.core_charge,
            rydberg_per_cm: self.rydberg_per_cm,
            l: self.l,
            core: self.core,
            limit: self.limit,
            members: self.members[..count].to_vec(),
        }
    }
}

pub fn data() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("data")
}

pub type Row = BTreeMap<String, String>;

pub fn rows(path: &Path) -> Vec<Row> {
    let mut reader = csv::Reader::from_path(path).unwrap();
    let header: Vec<String> = reader
        .headers()
        .unwrap()
        .iter()
        .map(str::to_owned)
        .collect();
    reader
        .records()
        .map(|record| {
            let record = record.unwrap();
            header
                .iter()
                .cloned()
                .zip(record.iter().map(str::to_owned))
                .collect()
        })
        .collect()
}

/// Limits and their σ, cm⁻¹, by element and stage: the first one that is not refused.
pub fn limits() -> BTreeMap<(String, u32), (f64, f64)> {
    let mut limits = BTreeMap::new();
    for row in rows(&data().join("elements/limits.csv")) {
        let kept = row["isotope"].is_empty() && row["refused"].is_empty();
        if let (true, Ok(limit)) = (kept, row["limit_per_cm"].parse::<f64>()) {
            let sigma = row["uncertainty_per_cm"].parse().unwrap_or(1.0);
            limits
                .entry((row["element"].clone(), row["stage"].parse().unwrap()))
                .or_insert((limit, sigma));
        }
    }
    limits
}

pub fn masses() -> BTreeMap<String, f64> {
    rows(&data().join("elements/elements.csv"))
        .into_iter()
        .filter_map(|row| Some((row["symbol"].clone(), row["standard_mass_u"].parse().ok()?)))
        .collect()
}

pub fn stage_number(roman: &str) -> Option<u32> {
    let known = ["I", "II", "III", "IV", "V", "VI", "VII", "VIII"];
    known
        .iter()
        .position(|r| *r == roman)
        .map(|at| at as u32 + 1)
}

/// Scale uncertainty of the levels that a source declares, cm⁻¹.
pub fn scale_uncertainty(folder: &Path) -> f64 {
    let text = std::fs::read_to_string(folder.join("source.toml")).unwrap();
    text.lines()
        .find_map(|line| line.strip_prefix("level_scale_uncertainty_per_cm = "))
        .map_or(0.0, |value| value.trim().parse().unwrap())
}

/// Every folder with levels: those entered by hand, and the two tables of resonance lines.
pub fn folders() -> Vec<PathBuf> {
    let mut folders: Vec<PathBuf> = std::fs::read_dir(data())
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .filter(|path| {
            let name = path.file_name().unwrap().to_string_lossy().into_owned();
            (name.starts_with("curated-") || name.starts_with("morton"))
                && path.join("levels.csv").exists()
        })
        .collect();
    folders.sort();
    folders
}

/// Cores as the sources write them, brought to one form: inner closed shells and the term of
/// a closed shell dropped (`4s2 4p6 (1S)` → `4p6`, bare alkali labels → their closed shell).
pub fn one_form(element: &str, core: &str) -> String {
    let bare = match element {
        "Li" | "Be" if core.is_empty() => "1s2",
        "Na" | "Mg" if core.is_empty() => "2p6",
        "K" | "Ca" if core.is_empty() => "3p6",
        _ => core,
    };
    let bare = bare.strip_suffix(" (1S)").unwrap_or(bare);
    let mut shells: Vec<&str> = bare.split(' ').collect();
    while shells.len() > 1
        && !shells[1].starts_with('(')
        && ["s2", "p6", "d10"]
            .iter()
            .any(|full| shells[0].ends_with(full))
    {
        shells.remove(0);
    }
    shells.join(" ")
}

/// All series with a single limit, one per name: of two sources the one with more members.
pub fn all_series() -> Vec<Held> {
    let (limits, masses) = (limits(), masses());
    let mut found: BTreeMap<String, Held> = BTreeMap::new();
    for folder in folders() {
        let scale = scale_uncertainty(&folder);
        let mut by_species: BTreeMap<String, Vec<Row>> = BTreeMap::new();
        for row in rows(&folder.join("levels.csv")) {
            by_species
                .entry(row["species"].clone())
                .or_default()
                .push(row);
        }
        for (species, rows) in &by_species {
            let Some((element, roman)) = species.split_once(' ') else {
                continue;
            };
            let stage = stage_number(roman).unwrap_or(0);
            let (Some((limit, sigma)), Some(mass)) = (
                limits.get(&(element.to_owned(), stage)),
                masses.get(element),
            ) else {
                continue;
            };
            for series in group_series(&labelled(rows)) {
                let Ok(core) = series.core_on_ground() else {
                    continue;
                };
                let form = one_form(element, &series.key.core);
                let held = Held {
                    name: name(species, &form, &series.key),
                    core: if form == series.key.core {
                        core
                    } else {
                        Core::of_label(&form)
                    },
                    core_charge: stage,
                    rydberg_per_cm: RYDBERG_PER_CM / (1.0 + ELECTRON_MASS_U / mass),
                    l: series.key.l,
                    limit: Limit::Fixed {
                        per_cm: *limit,
                        // The limit comes from elsewhere: its scale and theirs may differ.
                        sigma_per_cm: sigma.hypot(scale),
                    },
                    members: series.members,
                };
                let better = found
                    .get(&held.name)
                    .is_none_or(|known| known.members.len() < held.members.len());
                if better && element != "H" {
                    found.insert(held.name.clone(), held);
                }
            }
        }
    }
    found.into_values().collect()
}

fn name(species: &str, core: &str, key: &SeriesKey) -> String {
    let letter = lineclear::calc::series::orbital_letter(key.l).unwrap();
    let j = lineclear::vocabulary::atom::HalfInteger::from_twice(key.twice_j);
    format!("{species} {core} {letter} {} {j}", key.term)
}

pub fn labelled(rows: &[Row]) -> Vec<LabelledLevel<'_>> {
    rows.iter()
        .filter_map(|row| {
            Some(LabelledLevel {
                energy_per_cm: row["energy_per_cm"].parse().ok()?,
                uncertainty_per_cm: row["uncertainty_per_cm"].parse().ok()?,
                configuration: &row["configuration"],
                term: &row["term"],
                twice_j: (2.0 * row["j"].parse::<f64>().ok()?) as u16,
            })
        })
        .collect()
}
