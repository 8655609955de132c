//! An independent reading of the Morton tables: by the column where each word starts.

use std::collections::BTreeMap;

use super::{Row, bytes, latin1, rows};

/// One data row of the original, read by the position of its words.
#[derive(Debug, Clone)]
pub struct Printed {
    pub place: usize,
    pub ion: String,
    pub isotope: bool,
    pub mean: bool,
    pub vacuum_angstrom: String,
    pub air_angstrom: Option<f64>,
    pub lower: String,
    pub upper: String,
    pub lower_g: u32,
    pub upper_g: u32,
    pub flag: Option<String>,
    pub rate: Option<f64>,
    pub f: Option<f64>,
    pub error_dex: Option<f64>,
}

/// `13C II  2s2…`, `24MgII 3s…`, `I  I   5s…` → (isotope, ion); `None` for everything that heads no ion.
fn ion_heading(line: &str) -> Option<(bool, String)> {
    let digits: String = line.chars().take_while(char::is_ascii_digit).collect();
    let rest = &line[digits.len()..];
    let mut letters = rest.chars();
    let first = letters.next().filter(char::is_ascii_uppercase)?;
    let second = letters.next().filter(char::is_ascii_lowercase);
    let element: String = std::iter::once(first).chain(second).collect();
    let after = rest[element.len()..].trim_start();
    let stage: String = after.chars().take_while(|c| "IVX".contains(*c)).collect();
    let tail = &after[stage.len()..];
    let heads =
        !stage.is_empty() && tail.starts_with(' ') && !line.contains("Z =") && !line.contains("Z=");
    (heads && (line.contains("J") || line.contains("IP =")))
        .then(|| (!digits.is_empty(), format!("{digits}{element} {stage}")))
}

/// Words of a line with the column where each starts.
fn words(line: &str) -> Vec<(usize, String)> {
    let chars: Vec<char> = line.chars().collect();
    let mut found = Vec::new();
    let mut at = 0;
    while at < chars.len() {
        if chars[at] == ' ' {
            at += 1;
            continue;
        }
        let end = (at..chars.len())
            .find(|&i| chars[i] == ' ')
            .unwrap_or(chars.len());
        found.push((at, chars[at..end].iter().collect()));
        at = end;
    }
    found
}

/// A printed number; a decimal comma and a stray final point are mended.
pub fn mended(text: &str) -> f64 {
    let text = text.replace(',', ".");
    text.trim_end_matches('.')
        .parse()
        .unwrap_or_else(|_| panic!("`{text}` is no number"))
}

/// A data row, or `None`: a row has its two weights as whole numbers after two energies.
fn data_row(place: usize, line: &str, ion: &(bool, String)) -> Option<Printed> {
    let mean = line.starts_with("Mlt");
    let found: Vec<_> = words(line)
        .into_iter()
        .filter(|w| !w.1.starts_with("Mlt") && w.1 != "Mean")
        .collect();
    let vacuum = found
        .iter()
        .position(|w| (18..22).contains(&w.0) && w.1.contains('.'))?;
    let lower = found
        .get(vacuum + 1)
        .filter(|w| w.1.contains('.') && w.0 < 38)?;
    let upper = found
        .get(vacuum + 2)
        .filter(|w| w.1.contains('.') && (38..43).contains(&w.0))?;
    let mut next = vacuum + 3;
    let flag = (found[next].0 < 51).then(|| found[next].1.clone());
    next += usize::from(flag.is_some());
    let pick = |from: usize, to: usize| {
        found[next + 2..]
            .iter()
            .find(|w| (from..to).contains(&w.0))
            .map(|w| mended(&w.1))
    };
    Some(Printed {
        place,
        ion: ion.1.clone(),
        isotope: ion.0,
        mean,
        vacuum_angstrom: found[vacuum].1.clone(),
        air_angstrom: (vacuum == 1).then(|| mended(&found[0].1)),
        lower: lower.1.clone(),
        upper: upper.1.clone(),
        lower_g: found[next].1.parse().unwrap(),
        upper_g: found[next + 1].1.parse().unwrap(),
        flag,
        rate: pick(57, 68),
        f: pick(78, 88),
        error_dex: pick(103, 120),
    })
}

/// All data rows of one table.
pub fn printed(key: &str) -> Vec<Printed> {
    let text = latin1(&bytes(key, "original.dat"));
    let mut ion = (false, String::new());
    let mut out = Vec::new();
    for (index, line) in text.split('\n').enumerate() {
        if let Some(row) = (index > 12)
            .then(|| data_row(index + 1, line, &ion))
            .flatten()
        {
            out.push(row);
        } else if let Some(found) = ion_heading(line) {
            ion = found;
        }
    }
    out
}

/// Rows by their line number in the original.
pub fn by_place(key: &str, file: &str) -> BTreeMap<usize, Row> {
    rows(key, file)
        .into_iter()
        .map(|r| (r["row"].parse().unwrap(), r))
        .collect()
}

/// All entered rows, those of isotopes included.
pub fn entered(key: &str) -> BTreeMap<usize, Row> {
    let mut all = by_place(key, "lines.csv");
    if key == "morton2003" {
        all.extend(by_place(key, "isotopes.csv"));
    }
    all
}

/// Weights of two rows that the recipe corrects, each with its reason in `source.toml`.
pub fn corrected_weight(key: &str, row: &Printed) -> String {
    match (key, row.place) {
        ("morton2000", 2232) => "3".into(),
        ("morton2000", 3573) => String::new(),
        _ => row.upper_g.to_string(),
    }
}
