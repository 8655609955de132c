//! Rydberg-Ritz regularity: along a series the quantum defect is a smooth function of 1/n*^2 (Ritz 1903; Seaton 1983, Rep. Prog.
//! Phys. 46, 167, eq. 2.1), except where another configuration of the same symmetry lies among its members.

use super::support::{Ion, ion};
use std::collections::BTreeMap;

/// Rydberg constant for infinite mass, cm-1 (CODATA 2022); the reduced mass changes n* by less than 7e-5 of it (He) and only smoothly.
const RYDBERG_PER_CM: f64 = 109_737.315_68;

/// First ionisation limits in cm-1 of the ions with a series of four or more members. From memory of the compilations named in each source.toml; He: Drake.
const LIMITS: [(&str, f64, f64); 14] = [
    ("He I", 198_310.666_4, 1.0),
    ("Li I", 43_487.114, 1.0),
    ("Be II", 146_882.86, 2.0),
    ("O I", 109_837.02, 1.0),
    ("Na I", 41_449.451, 1.0),
    ("Mg I", 61_671.05, 1.0),
    ("Mg II", 121_267.64, 2.0),
    ("Al I", 48_278.48, 1.0),
    ("K I", 35_009.814, 1.0),
    ("Ca I", 49_305.924, 1.0),
    ("Ca II", 95_751.87, 2.0),
    ("Rb I", 33_690.81, 1.0),
    ("Cs I", 31_406.467_66, 1.0),
    ("Hg I", 84_184.15, 1.0),
];

/// Series that a doubly excited or core-excited configuration disturbs (common knowledge of the trade, see Seaton 1983), and Li I np
/// whose members from 6p on are old arc values (0.5 cm-1).
const DISTURBED: [(&str, &str); 5] = [
    ("Al I", "d"),
    ("Al I", "p"),
    ("Ca I", "p"),
    ("Mg I", "d"),
    ("Li I", "p"),
];

/// One member: principal quantum number, quantum defect, effective quantum number.
type Member = (u32, f64, f64);

/// Series of one ion: (core and letter, term, J) -> members.
fn series(
    ion: &Ion,
    limit_per_cm: f64,
    charge: f64,
) -> BTreeMap<(String, String, String), Vec<Member>> {
    let mut out: BTreeMap<(String, String, String), Vec<Member>> = BTreeMap::new();
    for level in ion
        .levels
        .iter()
        .filter(|l| !l.term.is_empty() && l.j.is_some())
    {
        let (core, shell) = level
            .configuration
            .rsplit_once(' ')
            .unwrap_or(("", &level.configuration));
        let digits: String = shell.chars().take_while(char::is_ascii_digit).collect();
        let letter = &shell[digits.len()..];
        if let (Ok(n), true) = (
            digits.parse::<u32>(),
            letter.len() == 1 && level.energy_per_cm < limit_per_cm,
        ) {
            let effective = charge * (RYDBERG_PER_CM / (limit_per_cm - level.energy_per_cm)).sqrt();
            let key = (
                format!("{core} {letter}"),
                level.term.clone(),
                level.j.unwrap().to_string(),
            );
            out.entry(key)
                .or_default()
                .push((n, f64::from(n) - effective, effective));
        }
    }
    out.retain(|_, members| members.len() >= 4);
    out
}

/// Largest departure of the quantum defects from a polynomial of `terms` terms in 1/n*^2, least squares.
fn departure(members: &[Member], terms: usize) -> f64 {
    let basis = |m: &Member| {
        (0..terms)
            .map(|p| m.2.powi(-2 * p as i32))
            .collect::<Vec<f64>>()
    };
    let mut matrix = vec![vec![0.0; terms + 1]; terms];
    for member in members {
        let x = basis(member);
        for i in 0..terms {
            for k in 0..terms {
                matrix[i][k] += x[i] * x[k];
            }
            matrix[i][terms] += x[i] * member.1;
        }
    }
    let fit = solve(matrix);
    members
        .iter()
        .map(|m| (m.1 - basis(m).iter().zip(&fit).map(|(x, c)| x * c).sum::<f64>()).abs())
        .fold(0.0, f64::max)
}

/// Gauss-Jordan elimination with pivoting of a small augmented matrix.
fn solve(mut matrix: Vec<Vec<f64>>) -> Vec<f64> {
    let n = matrix.len();
    for column in 0..n {
        let pivot = (column..n)
            .max_by(|a, b| {
                matrix[*a][column]
                    .abs()
                    .total_cmp(&matrix[*b][column].abs())
            })
            .unwrap();
        matrix.swap(column, pivot);
        let row = matrix[column].clone();
        for (index, other) in matrix
            .iter_mut()
            .enumerate()
            .filter(|(index, _)| *index != column)
        {
            let factor = other[column] / row[column];
            assert!(factor.is_finite(), "singular at {index}");
            for (value, above) in other.iter_mut().zip(&row) {
                *value -= factor * above;
            }
        }
    }
    (0..n).map(|i| matrix[i][n] / matrix[i][i]).collect()
}

#[test]
fn quantum_defects_are_smooth() {
    let mut checked = 0;
    for (species, limit, charge) in LIMITS {
        let ion = ion(species);
        for ((orbit, term, j), members) in series(ion, limit, charge) {
            let letter = orbit.rsplit(' ').next().unwrap();
            if DISTURBED.contains(&(species, letter)) {
                continue;
            }
            let off = departure(&members, if members.len() >= 5 { 3 } else { 2 });
            println!(
                "{species} {orbit} {term} {j}: {} members, {off:.5}",
                members.len()
            );
            checked += 1;
            // Two terms in 1/n*^2 leave up to 0.007 where the lowest member penetrates deeply (3d of Ca II);
            // three leave less than 0.0005 in the alkalis and helium. A slip of 1 cm-1 at n* = 7 is 0.0016.
            let allowed = if members.len() >= 5 { 0.0005 } else { 0.007 };
            assert!(off < allowed, "{species} {orbit} {term} {j}: {off}");
        }
    }
    assert!(checked >= 40, "{checked}");
}

/// The disturbed series are truly disturbed: a list that nothing needs would hide slips.
#[test]
fn disturbed_series_are_disturbed() {
    for (species, letter) in DISTURBED {
        let (_, limit, charge) = LIMITS.into_iter().find(|l| l.0 == species).unwrap();
        let ion = ion(species);
        let worst = series(ion, limit, charge)
            .into_iter()
            .filter(|((orbit, _, _), _)| orbit.ends_with(&format!(" {letter}")))
            .map(|(_, members)| departure(&members, if members.len() >= 5 { 3 } else { 2 }))
            .fold(0.0, f64::max);
        assert!(worst > 0.0005, "{species} {letter}: {worst}");
    }
}
