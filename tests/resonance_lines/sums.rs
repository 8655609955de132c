//! The bytes and the inner sums of the tables.

use std::collections::HashMap;

use sha2::{Digest, Sha256};

use super::tables::{Row, close, folder, half, number, table};

#[test]
fn the_tables_are_those_that_the_description_names() {
    let text = std::fs::read_to_string(folder().join("source.toml")).unwrap();
    let source: toml::Table = text.parse().unwrap();
    let tables = source["table"].as_array().unwrap();
    assert_eq!(tables.len(), 2);
    for described in tables {
        let file = described["file"].as_str().unwrap();
        let bytes = std::fs::read(folder().join(file)).unwrap();
        let hash: String = Sha256::digest(&bytes)
            .iter()
            .map(|byte| format!("{byte:02x}"))
            .collect();
        assert_eq!(hash, described["sha256"].as_str().unwrap(), "{file}");
        let rows = i64::try_from(table(file).len()).unwrap();
        assert_eq!(rows, described["rows"].as_integer().unwrap(), "{file}");
    }
}

#[test]
fn every_value_names_its_paper_and_has_a_sound_uncertainty() {
    let mut seen = 0;
    for (name, sigma) in [
        ("frequencies.csv", "uncertainty_mhz"),
        ("isotope_shifts.csv", "uncertainty_mhz"),
        ("hyperfine.csv", "a_uncertainty_mhz"),
        ("lifetimes.csv", "uncertainty_ns"),
        ("branching.csv", "uncertainty"),
        ("anchors.csv", "uncertainty_per_cm"),
    ] {
        for row in table(name) {
            assert!(row["source"].len() >= 10, "{name}: {row:?}");
            let sigma = number(&row, sigma);
            // Zero where a value is exact by definition (Cs) or a branch is the only one.
            let exact = row["species"] == "133Cs I" || name == "branching.csv";
            assert!(sigma > 0.0 || (exact && sigma == 0.0), "{name}: {row:?}");
            seen += 1;
        }
    }
    assert!(seen >= 200, "{seen} rows");
}

/// The recipe adds in decimal arithmetic; here every line is the difference of its levels again, in floats.
#[test]
fn every_line_is_the_difference_of_its_levels() {
    let lines = table("lines.csv");
    assert!(lines.len() >= 76);
    for row in &lines {
        let wavelength_nm = number(row, "wavelength_nm");
        let difference = number(row, "upper_energy_per_cm") - number(row, "lower_energy_per_cm");
        let sigma = number(row, "wavelength_uncertainty_nm") / wavelength_nm * difference;
        // Both are printed finer than the σ of the line but for He I, whose levels hang on a wide anchor (1e-7).
        let tolerance = 0.05 * sigma + 2e-7;
        close(
            &format!("{row:?}"),
            1e7 / wavelength_nm,
            difference,
            tolerance,
        );
        assert_eq!(row["medium"], "vacuum");
        assert_eq!(row["kind"], "isotope");
    }
}

/// Given frequencies against the lines, by c/ν alone.
#[test]
fn every_centroid_frequency_is_found_in_the_lines() {
    let lines = table("lines.csv");
    let mut found = 0;
    for row in table("frequencies.csv") {
        let ends = |other: &&Row| {
            ["configuration", "term", "j"].iter().all(|part| {
                row[&format!("lower_{part}")] == other[&format!("lower_{part}")]
                    && row[&format!("upper_{part}")] == other[&format!("upper_{part}")]
            })
        };
        let odd = |side: &str| row[&format!("{side}_term")].ends_with('o');
        let (low, high) = (half(&row["lower_j"]), half(&row["upper_j"]));
        let dipole = odd("lower") != odd("upper") && (low - high).abs() <= 1.0 && low + high > 0.0;
        let mut same = lines
            .iter()
            .filter(|line| line["species"] == row["species"])
            .filter(ends);
        let line = same.next();
        assert_eq!(line.is_some(), dipole, "{row:?}");
        if let Some(line) = line.filter(|_| row["centroid_or_component"] == "centroid") {
            let frequency_mhz = 299_792_458e3 / number(line, "wavelength_nm");
            let given = number(&row, "frequency_mhz");
            // The wavelength is printed to a hundredth of its σ; one part in 1e15 is f64.
            close(
                &format!("{row:?}"),
                frequency_mhz,
                given,
                0.02 * number(&row, "uncertainty_mhz") + 1e-15 * given,
            );
            found += 1;
        }
    }
    assert!(found >= 35, "{found} centroids");
}

/// Rates are lifetimes shared out: the branches of one level sum to no more than one. Tolerance: branches of Ca II are
/// measured to 3e-4, each by itself.
#[test]
fn branching_fractions_sum_to_one_at_most() {
    let mut sums: HashMap<String, f64> = HashMap::new();
    for row in table("branching.csv") {
        let level = format!(
            "{} {} {} {}",
            row["species"], row["upper_configuration"], row["upper_term"], row["upper_j"]
        );
        *sums.entry(level).or_default() += number(&row, "fraction");
    }
    for (level, sum) in sums {
        assert!(sum > 0.0 && sum <= 1.0 + 3e-4, "{level}: {sum}");
    }
}
