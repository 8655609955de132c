//! The table of revised oscillator strengths of 2017 against its kept original, its traps, and its own physics.
//!
//! Source: F. H. Cashman et al. 2017, ApJS 230, 8, table 1.

#![allow(clippy::unwrap_used)] // a panic here is the report

mod tables_support;

use std::collections::{BTreeMap, BTreeSet};

use tables_support::{
    Row, bytes, check_manifest, close, latin1, manifest, number, optional, rate_from_f, rows,
    sha256,
};

const KEY: &str = "cashman2017";

/// The twelve cells of each data line (a comma never stands inside one), with its line number.
fn printed() -> Vec<(usize, Vec<String>)> {
    let text = latin1(&bytes(KEY, "original.txt"));
    text.lines()
        .enumerate()
        .filter(|(_, line)| line.starts_with(|c: char| c.is_ascii_digit()))
        .map(|(index, line)| {
            (
                index + 1,
                line.trim_end().split(',').map(str::to_owned).collect(),
            )
        })
        .collect()
}

fn by_place() -> BTreeMap<usize, Row> {
    let lines = rows(KEY, "lines.csv");
    lines
        .into_iter()
        .map(|r| (r["row"].parse().unwrap(), r))
        .collect()
}

/// `CI_1139p8` → `C I`.
fn species(name: &str) -> String {
    let ion = name.split('_').next().unwrap();
    let stage = ion.find(['I', 'V', 'X']).filter(|&at| at > 0).unwrap();
    format!("{} {}", &ion[..stage], &ion[stage..])
}

/// What the note in the table's own head says, in per cent; the lowest grade is "greater than 50 %".
fn sigma_of_grade(grade: &str) -> Option<f64> {
    let table = [
        ("AAA", 0.003),
        ("AA", 0.01),
        ("A+", 0.02),
        ("A", 0.03),
        ("A'", 0.03),
        ("B+", 0.07),
        ("B", 0.10),
        ("C+", 0.18),
        ("C", 0.25),
        ("D+", 0.40),
        ("D", 0.50),
        ("E", 1.0),
    ];
    table.iter().find(|g| g.0 == grade).map(|g| g.1)
}

#[test]
fn manifest_has_the_right_checksum_and_rows() {
    check_manifest(KEY);
    assert_eq!(
        sha256(KEY, "original.txt"),
        "4f4a4cd5a5a77e541b3dbd7a170970dad60f4649e78bb4597a01244f5245843c"
    );
}

#[test]
fn all_rows_equal_the_printed_rows() {
    let lines = by_place();
    let printed = printed();
    assert_eq!((printed.len(), lines.len()), (575, 574));
    for (place, cell) in &printed {
        let Some(row) = lines.get(place) else {
            continue;
        };
        assert_eq!(row["species"], species(&cell[1]), "{cell:?}");
        // The decimal point moves one place; 1e-12 is the rounding of the division.
        assert!(
            close(
                number(row, "wavelength_nm") * 10.0,
                cell[5].parse().unwrap(),
                1e-12
            ),
            "{cell:?}"
        );
        assert_eq!(
            (&row["lower_g"], &row["upper_g"]),
            (&cell[6], &cell[7]),
            "{cell:?}"
        );
        assert_eq!(row["oscillator_strength"], cell[8], "{cell:?}");
        assert_eq!(row["rate_reference"], cell[11], "{cell:?}");
        for (g, j) in [("lower_g", "lower_j"), ("upper_g", "upper_j")] {
            assert_eq!(number(row, g), 2.0 * number(row, j) + 1.0, "{cell:?}");
        }
        let wanted = if *place == 566 {
            Some(1.0)
        } else {
            sigma_of_grade(&cell[10])
        };
        assert_eq!(
            optional(row, "rate_relative_uncertainty"),
            wanted,
            "{cell:?}"
        );
        let gap = 1e7 / number(row, "wavelength_nm");
        let f: f64 = cell[8].parse().unwrap();
        let rate = rate_from_f(gap, number(row, "lower_g"), number(row, "upper_g"), f);
        // Four digits are written: 5e-4.
        assert!(close(number(row, "rate_per_s"), rate, 6e-4), "{cell:?}");
    }
    assert_eq!(
        lines
            .values()
            .map(|r| &r["species"])
            .collect::<BTreeSet<_>>()
            .len(),
        70
    );
}

#[test]
fn the_row_that_contradicts_itself_is_refused_and_reported() {
    let lines = by_place();
    let refused: Vec<_> = printed()
        .into_iter()
        .filter(|p| !lines.contains_key(&p.0))
        .collect();
    assert_eq!(refused.len(), 1);
    assert_eq!(
        (
            refused[0].0,
            refused[0].1[0].as_str(),
            refused[0].1[1].as_str()
        ),
        (264, "20", "TiI_5175")
    );
    assert!(
        manifest(KEY)["notes"]
            .to_string()
            .contains("line 264: refused")
    );
}

#[test]
fn labels_lose_their_marks_and_keep_their_meaning() {
    let lines = by_place();
    let label = |place: usize, end: &str| {
        let row = &lines[&place];
        (
            row[&format!("{end}_configuration")].clone(),
            row[&format!("{end}_term")].clone(),
            row[&format!("{end}_j")].clone(),
        )
    };
    let is = |place, end: &str, config: &str, term: &str, j: &str| {
        assert_eq!(
            label(place, end),
            (config.to_owned(), term.to_owned(), j.to_owned()),
            "line {place}"
        );
    };
    is(34, "upper", "2s2 2p 3s", "3Po", "1"); // `2s^2^2p3s ^3^P^o^_1_`
    is(63, "upper", "2s2 2p2 (3P) 3s", "4P", "0.5"); // `2s^2^2p^2^(^3^P)3s ^4^P_1/2_`
    is(586, "upper", "4s2 4p5 (2P3/2) 5s", "2[3/2]o", "1"); // `…(^2^P_3/2_)5s ^2^[3/2]^o^_1_`
    is(339, "lower", "3p6 3d5", "a 6S", "2.5");
}

#[test]
fn damaged_j_follow_from_the_weights() {
    let lines = by_place();
    assert_eq!(lines[&179]["upper_j"], "1"); // printed `_1` without its end
    assert_eq!(lines[&338]["upper_j"], "3.5"); // printed `_7_` beside g = 8
    assert_eq!(lines[&395]["upper_j"], "3"); // printed `_3-`
    let notes = manifest(KEY)["notes"].to_string();
    for place in [179, 338, 395] {
        assert!(
            notes.contains(&format!("line {place}: the J of")),
            "{place}"
        );
    }
}

#[test]
fn rows_without_a_grade_have_no_uncertainty() {
    let printed = printed();
    assert_eq!(printed.iter().filter(|p| p.1[10].is_empty()).count(), 138);
    assert_eq!(printed.iter().filter(|p| p.1[10] == "A'").count(), 1);
    let lines = by_place();
    // One ungraded row has its σ from the contradiction of its f and log gf (line 566).
    let without = lines
        .values()
        .filter(|r| r["rate_relative_uncertainty"].is_empty())
        .count();
    assert_eq!(without, 137);
    let unknown = printed
        .iter()
        .filter(|p| !p.1[10].is_empty() && sigma_of_grade(&p.1[10]).is_none());
    assert_eq!(unknown.count(), 0);
}

#[test]
fn f_and_log_gf_agree_in_all_rows_but_one() {
    let mut apart = Vec::new();
    for (place, cell) in printed() {
        let (g, f, log_gf): (f64, f64, f64) = (
            cell[6].parse().unwrap(),
            cell[8].parse().unwrap(),
            cell[9].parse().unwrap(),
        );
        // log gf is printed to 0.1 dex in places (Fe II): half a unit, and f to two digits.
        let difference = (g * f).log10() - log_gf;
        if difference.is_nan() || difference.abs() >= 0.07 {
            apart.push((place, difference));
        }
    }
    // Ga I 221.9 nm: log 2 = 0.301.
    assert_eq!(apart.len(), 1, "{apart:?}");
    assert!(apart[0].0 == 566 && (apart[0].1 + 0.301).abs() < 0.005);
}

#[test]
fn transitions_obey_the_selection_rules() {
    for row in rows(KEY, "lines.csv") {
        let (low, high) = (number(&row, "lower_j"), number(&row, "upper_j"));
        assert!(
            (low - high).abs() <= 1.0 && low + high > 0.0,
            "ΔJ of {row:?}"
        );
        if !row["lower_term"].is_empty() && !row["upper_term"].is_empty() {
            assert_ne!(
                row["lower_term"].ends_with('o'),
                row["upper_term"].ends_with('o'),
                "{row:?}"
            );
        }
    }
}

#[test]
fn wavelengths_identify_lines_of_the_morton_tables() {
    // Two independent tables: the wavelength of a rate, within its σ, names a line of Morton 2000 or 2003.
    let mut morton: BTreeMap<String, Vec<Row>> = BTreeMap::new();
    for key in ["morton2003", "morton2000"] {
        for row in rows(key, "lines.csv") {
            morton.entry(row["species"].clone()).or_default().push(row);
        }
    }
    let (mut held, mut within) = (0, 0);
    for row in rows(KEY, "lines.csv") {
        let wavelength = number(&row, "wavelength_nm");
        let near = morton
            .get(&row["species"])
            .into_iter()
            .flatten()
            .filter(|m| m["upper_g"] == row["upper_g"]);
        let best = near
            .map(|m| (number(m, "wavelength_nm") - wavelength).abs())
            .fold(f64::INFINITY, f64::min);
        if best < 0.02 {
            held += 1;
            within += usize::from(best <= 3.0 * number(&row, "wavelength_uncertainty_nm"));
        }
    }
    assert!(held > 500, "{held}");
    assert!(within * 100 >= held * 97, "{within} of {held}");
}
