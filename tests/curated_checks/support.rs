//! Reads the curated folders with nothing but a CSV reader, so that the checks do not lean on the importers.

use std::collections::HashMap;
use std::path::{Path, PathBuf};
use std::sync::OnceLock;

/// One bundled level.
#[derive(Clone, Debug)]
pub struct Level {
    pub text: String,
    pub energy_per_cm: f64,
    pub uncertainty_per_cm: f64,
    pub configuration: String,
    pub term: String,
    pub j: Option<f64>,
    pub g: Option<f64>,
}

/// One bundled line.
#[derive(Clone, Debug)]
pub struct Line {
    pub kind: String,
    pub wavelength_nm: f64,
    pub medium: String,
    pub uncertainty_nm: f64,
    pub lower: (String, String),
    pub upper: (String, String),
    pub rate_per_s: Option<f64>,
    pub rate_uncertainty: Option<f64>,
    pub rate_origin: String,
    pub row: String,
}

/// One ion: its folder and tables.
#[derive(Clone, Debug)]
pub struct Ion {
    pub folder: PathBuf,
    pub species: String,
    pub levels: Vec<Level>,
    pub lines: Vec<Line>,
    /// Rows of entered_lines.csv.
    pub entered_lines: Vec<HashMap<String, String>>,
    /// Rows of later_lines.csv, where there is one.
    pub later_lines: Vec<HashMap<String, String>>,
    /// Rows of second_lines.csv, where there is one.
    pub second_lines: Vec<HashMap<String, String>>,
}

impl Ion {
    /// The level that a line end names by energy text and J.
    pub fn level(&self, end: &(String, String)) -> Option<&Level> {
        let j = end.1.parse::<f64>().ok();
        self.levels.iter().find(|l| l.text == end.0 && l.j == j)
    }

    /// The kept row that a bundled line comes from; `None` for a component that follows from its multiplet.
    pub fn kept_row(&self, line: &Line) -> Option<&HashMap<String, String>> {
        let (table, number) = match line.row.split_once(' ') {
            Some(("later", number)) => (&self.later_lines, number),
            Some(("second", number)) => (&self.second_lines, number),
            _ => (&self.entered_lines, line.row.as_str()),
        };
        number.parse::<usize>().ok().map(|n| &table[n - 1])
    }

    /// The row of a second entry that rates a line which the first entry left without a rate.
    pub fn second_rate(&self, line: &Line) -> Option<f64> {
        let row = self.second_lines.iter().find(|row| {
            line.lower.0 == row["lower_energy_per_cm"] && line.upper.0 == row["upper_energy_per_cm"]
        })?;
        row["rate_per_s"].parse().ok()
    }

    /// Vacuum wavenumber that a line's levels give, cm⁻¹.
    pub fn ritz_per_cm(&self, line: &Line) -> f64 {
        self.level(&line.upper).unwrap().energy_per_cm
            - self.level(&line.lower).unwrap().energy_per_cm
    }

    /// 1 σ of it.
    pub fn ritz_uncertainty_per_cm(&self, line: &Line) -> f64 {
        let sigma = |end| self.level(end).unwrap().uncertainty_per_cm;
        f64::hypot(sigma(&line.upper), sigma(&line.lower))
    }
}

/// The data folder of this checkout.
pub fn data() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("data")
}

/// All curated ions, in order of their folders.
pub fn ions() -> &'static [Ion] {
    static IONS: OnceLock<Vec<Ion>> = OnceLock::new();
    IONS.get_or_init(|| {
        let entries = std::fs::read_dir(data()).unwrap();
        let mut folders: Vec<PathBuf> = entries
            .map(|entry| entry.unwrap().path())
            .filter(|path| {
                path.file_name()
                    .unwrap()
                    .to_string_lossy()
                    .starts_with("curated-")
            })
            .collect();
        folders.sort();
        folders.iter().map(|folder| read_ion(folder)).collect()
    })
}

/// One ion by its name.
pub fn ion(species: &str) -> &'static Ion {
    ions().iter().find(|ion| ion.species == species).unwrap()
}

fn read_ion(folder: &Path) -> Ion {
    let levels = rows(&folder.join("levels.csv"));
    let lines = rows(&folder.join("lines.csv"));
    Ion {
        species: levels[0]["species"].clone(),
        folder: folder.to_path_buf(),
        levels: levels.iter().map(level).collect(),
        lines: lines.iter().map(line).collect(),
        entered_lines: rows(&folder.join("entered_lines.csv")),
        later_lines: rows_if_there(&folder.join("later_lines.csv")),
        second_lines: rows_if_there(&folder.join("second_lines.csv")),
    }
}

/// The same of a file that need not be there.
pub fn rows_if_there(path: &Path) -> Vec<HashMap<String, String>> {
    if path.is_file() {
        rows(path)
    } else {
        Vec::new()
    }
}

/// A CSV file as maps from column name to text.
pub fn rows(path: &Path) -> Vec<HashMap<String, String>> {
    let mut reader =
        csv::Reader::from_path(path).unwrap_or_else(|e| panic!("{}: {e}", path.display()));
    reader
        .deserialize()
        .map(|row| row.unwrap_or_else(|e| panic!("{}: {e}", path.display())))
        .collect()
}

fn number(text: &str) -> f64 {
    let value: f64 = text
        .parse()
        .unwrap_or_else(|_| panic!("not a number: {text}"));
    assert!(value.is_finite(), "not finite: {text}");
    value
}

fn optional(text: &str) -> Option<f64> {
    (!text.is_empty()).then(|| number(text))
}

fn level(row: &HashMap<String, String>) -> Level {
    Level {
        text: row["energy_per_cm"].clone(),
        energy_per_cm: number(&row["energy_per_cm"]),
        uncertainty_per_cm: number(&row["uncertainty_per_cm"]),
        configuration: row["configuration"].clone(),
        term: row["term"].clone(),
        j: optional(&row["j"]),
        g: optional(&row["g"]),
    }
}

fn line(row: &HashMap<String, String>) -> Line {
    let end = |side: &str| {
        (
            row[&format!("{side}_energy_per_cm")].clone(),
            row[&format!("{side}_j")].clone(),
        )
    };
    Line {
        kind: row["kind"].clone(),
        wavelength_nm: number(&row["wavelength_nm"]),
        medium: row["medium"].clone(),
        uncertainty_nm: number(&row["wavelength_uncertainty_nm"]),
        lower: end("lower"),
        upper: end("upper"),
        rate_per_s: optional(&row["rate_per_s"]),
        rate_uncertainty: optional(&row["rate_relative_uncertainty"]),
        rate_origin: row["rate_origin"].clone(),
        row: row["row"].clone(),
    }
}

/// Wavelength in standard air, nm, valid above 185 nm: Peck & Reeder 1972, J. Opt. Soc. Am. 62, 958, eq. 2.
pub fn air_nm(vacuum_nm: f64) -> f64 {
    let s2 = (1e3 / vacuum_nm).powi(2);
    vacuum_nm / (1.0 + 1e-8 * (8060.51 + 2_480_990.0 / (132.274 - s2) + 17_455.7 / (39.32957 - s2)))
}

/// Parity that the shells of a configuration give: the sum of l over all electrons; `None` where it cannot be read.
pub fn odd_configuration(configuration: &str) -> Option<bool> {
    let mut total = 0;
    let mut seen = false;
    for word in configuration
        .split(' ')
        .filter(|word| !word.starts_with('('))
    {
        let mut chars = word.chars();
        chars.next().filter(char::is_ascii_digit)?;
        let l = "spdfgh".find(chars.next()?)?;
        let count = chars.as_str();
        total += l * if count.is_empty() {
            1
        } else {
            count.parse::<usize>().ok()?
        };
        seen = true;
    }
    seen.then_some(total % 2 == 1)
}

/// Parity of a level, from its term or else its configuration.
pub fn odd(level: &Level) -> Option<bool> {
    if level.term.is_empty() {
        odd_configuration(&level.configuration)
    } else {
        Some(level.term.ends_with('o'))
    }
}

/// Multiplicity and L of a term in LS coupling.
pub fn ls(term: &str) -> Option<(u32, usize)> {
    let symbol = term.split(' ').next_back()?;
    let digits: String = symbol.chars().take_while(char::is_ascii_digit).collect();
    let rest: Vec<char> = symbol[digits.len()..].chars().collect();
    let l = "SPDFGHIKLMNOQ".find(*rest.first()?)?;
    (rest.len() == 1 || rest[1..] == ['o']).then_some((digits.parse().ok()?, l))
}
