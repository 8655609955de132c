//! What the laser trade knows of its cooling lines, against the resonance-line tables: natural width 1/(2πτ), saturation
//! intensity π h c Γ/(3 λ³) of a two-level atom (Metcalf and van der Straten 1999, chapter 2), recoil velocity h/(m λ).

use std::f64::consts::PI;
use std::path::PathBuf;

use super::printed::{Row, number, table};
use vocabulary::atom::{Species, mass_u};

/// Exact by the definition of the SI: J s, m/s.
const PLANCK: f64 = 6.626_070_15e-34;
const LIGHT: f64 = 299_792_458.0;
/// Atomic mass constant, kg (CODATA 2022).
const MASS_UNIT: f64 = 1.660_539_068_92e-27;

fn resonance_line(species: &str, vacuum_nm: f64) -> Row {
    let path = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("data/resonance-lines/lines.csv");
    let mut reader = csv::Reader::from_path(path).unwrap();
    let mut found = reader
        .deserialize::<Row>()
        .map(Result::unwrap)
        .filter(|row| {
            row["species"] == species && (number(row, "wavelength_nm") - vacuum_nm).abs() < 0.002
        });
    let row = found.next();
    assert!(found.next().is_none(), "{species} {vacuum_nm} stands twice");
    row.unwrap_or_else(|| panic!("{species} {vacuum_nm} nm is not held"))
}

/// Within 2 of the printed uncertainties, which include rounding; NaN fails.
fn close(row: &Row, column: &str, sigma: &str, value: f64) {
    let (printed, sigma) = (number(row, column), number(row, sigma));
    assert!(
        (value - printed).abs() <= 2.0 * sigma,
        "{} {column}: {value} against {printed} ± {sigma}",
        row["species"]
    );
}

#[test]
fn cooling_lines_have_their_width_saturation_and_recoil() {
    let rows = table("laser_lines.csv");
    assert!(rows.len() >= 13);
    for row in &rows {
        let line = resonance_line(&row["species"], number(row, "vacuum_nm"));
        let rate_per_s = number(&line, "rate_per_s");
        let metres = 1e-9 * number(&line, "wavelength_nm");
        let species: Species = row["species"].parse().unwrap();
        let kilograms = MASS_UNIT * mass_u(species).unwrap();
        let width_mhz = 1e-6 * rate_per_s / (2.0 * PI);
        let saturation_w_per_m2 = PI * PLANCK * LIGHT * rate_per_s / (3.0 * metres.powi(3));
        let recoil_m_per_s = PLANCK / (kilograms * metres);
        close(row, "natural_width_mhz", "width_uncertainty_mhz", width_mhz);
        let saturation_mw_per_cm2 = 0.1 * saturation_w_per_m2;
        let sigma = "saturation_uncertainty_mw_per_cm2";
        close(row, "saturation_mw_per_cm2", sigma, saturation_mw_per_cm2);
        let sigma = "recoil_uncertainty_cm_per_s";
        close(row, "recoil_cm_per_s", sigma, 100.0 * recoil_m_per_s);
    }
}

/// `7/10`, or a whole number.
fn fraction(text: &str) -> f64 {
    match text.split_once('/') {
        Some((over, under)) => over.parse::<f64>().unwrap() / under.parse::<f64>().unwrap(),
        None => text.parse().unwrap(),
    }
}

/// The hyperfine components of a line that start from one F share its strength: they sum to one. And the components that
/// end in one F' sum, weighted by 2F + 1, to (2F' + 1)(2J + 1)/(2J' + 1) (Condon and Shortley 1935, the sum rules of §9.2).
#[test]
fn printed_hyperfine_shares_keep_both_sum_rules() {
    let rows = table("hyperfine_strengths.csv");
    let of = |species: &str, upper_j: &str, side: &str, f: &str| -> f64 {
        rows.iter()
            .filter(|row| row["species"] == species && row["upper_j"] == upper_j && row[side] == f)
            .map(|row| {
                let weight = 2.0 * number(row, "lower_f") + 1.0;
                fraction(&row["share"]) * if side == "upper_f" { weight } else { 1.0 }
            })
            .sum()
    };
    let mut checked = 0;
    for row in &rows {
        let (species, upper_j) = (row["species"].as_str(), row["upper_j"].as_str());
        let from = of(species, upper_j, "lower_f", &row["lower_f"]);
        assert!((from - 1.0).abs() < 1e-12, "{row:?}: {from}");
        // 85Rb is printed from its upper F alone.
        if species != "85Rb I" {
            let weights = [fraction(&row["lower_j"]), fraction(upper_j)].map(|j| 2.0 * j + 1.0);
            let expected = (2.0 * number(row, "upper_f") + 1.0) * weights[0] / weights[1];
            let into = of(species, upper_j, "upper_f", &row["upper_f"]);
            assert!(
                (into - expected).abs() < 1e-12,
                "{row:?}: {into} {expected}"
            );
            checked += 1;
        }
    }
    assert_eq!(checked, 20);
}
