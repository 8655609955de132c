//! The table of permitted resonance lines of 1996 against its kept original, its traps, and its own physics.
//!
//! Source: D. A. Verner, E. M. Verner, G. J. Ferland 1996, ADNDT 64, 1, table 1.

#![allow(clippy::unwrap_used)] // a panic here is the report

mod tables_support;

use std::collections::{BTreeMap, BTreeSet};

use tables_support::{
    Row, bytes, check_manifest, close, latin1, number, optional, rate_from_f, rows, sha256,
};

const KEY: &str = "verner1996";
const STAGES: &str = "I II III IV V VI VII VIII IX X XI XII XIII XIV XV XVI XVII XVIII XIX XX XXI XXII XXIII XXIV XXV XXVI";

/// One component row: ion of the heading above it, then the words of the row.
struct Component {
    place: usize,
    species: String,
    terms: (String, String),
    wavelength_angstrom: String,
    energies: (f64, f64),
    weights: (String, String),
    rate: f64,
    f: f64,
}

/// What the original holds: components and the number of multiplet rows with their printed counts.
fn printed() -> (Vec<Component>, Vec<(usize, usize)>) {
    let text = latin1(&bytes(KEY, "original.txt"));
    let (mut components, mut multiplets) = (Vec::new(), Vec::new());
    let (mut species, mut terms) = (String::new(), (String::new(), String::new()));
    for (index, line) in text.lines().enumerate() {
        if !line.starts_with(' ') {
            let stage: usize = line[2..5].trim().parse().unwrap();
            species = format!(
                "{} {}",
                line[..2].trim(),
                STAGES.split(' ').nth(stage - 1).unwrap()
            );
            let pair = line[38..46].split_once('-').unwrap();
            terms = (pair.0.trim().to_owned(), pair.1.trim().to_owned());
            multiplets.push((index + 1, line[112..].trim().parse().unwrap()));
            continue;
        }
        let word: Vec<&str> = line.split_whitespace().collect();
        assert_eq!(word.len(), 7, "line {}", index + 1);
        components.push(Component {
            place: index + 1,
            species: species.clone(),
            terms: terms.clone(),
            wavelength_angstrom: word[0].to_owned(),
            energies: (word[1].parse().unwrap(), word[2].parse().unwrap()),
            weights: (word[3].to_owned(), word[4].to_owned()),
            rate: word[5].parse().unwrap(),
            f: word[6].parse().unwrap(),
        });
    }
    (components, multiplets)
}

fn by_place() -> BTreeMap<usize, Row> {
    let lines = rows(KEY, "lines.csv");
    lines
        .into_iter()
        .map(|r| (r["row"].parse().unwrap(), r))
        .collect()
}

#[test]
fn manifest_has_the_right_checksums_and_rows() {
    check_manifest(KEY);
    assert_eq!(
        sha256(KEY, "original.txt"),
        "4cdf66c0aab373fc4f49d2b59deb2111752f29caa97d516fb7306d70bb6f6055"
    );
}

#[test]
fn all_rows_are_entered_or_counted_as_skipped() {
    let (components, multiplets) = printed();
    let lines = by_place();
    assert_eq!(components.len() + multiplets.len(), 8285);
    assert_eq!(multiplets.len(), 1877);
    assert_eq!(lines.len(), 5971);
    let mut unplaced = 0;
    for c in &components {
        let Some(row) = lines.get(&c.place) else {
            unplaced += 1;
            assert_eq!(c.wavelength_angstrom.parse::<f64>().unwrap(), 0.0);
            continue;
        };
        assert_eq!(row["species"], c.species, "line {}", c.place);
        let wavelength = c.wavelength_angstrom.parse::<f64>().unwrap() / 10.0;
        // The decimal point moves one place; 1e-12 is the rounding of the division.
        assert!(
            close(number(row, "wavelength_nm"), wavelength, 1e-12),
            "{row:?}"
        );
        assert_eq!(number(row, "lower_energy_per_cm"), c.energies.0, "{row:?}");
        assert_eq!(number(row, "upper_energy_per_cm"), c.energies.1, "{row:?}");
        assert_eq!(
            (&row["lower_g"], &row["upper_g"]),
            (&c.weights.0, &c.weights.1),
            "{row:?}"
        );
        assert_eq!(number(row, "oscillator_strength"), c.f, "{row:?}");
        assert_eq!(row["lower_term"], c.terms.0, "{row:?}");
        assert!(
            row["upper_term"] == c.terms.1 || matches!(c.species.as_str(), "Ne I" | "Ar I"),
            "{row:?}"
        );
        let wanted = (c.place != 2141).then_some(c.rate);
        assert_eq!(optional(row, "rate_per_s"), wanted, "{row:?}");
    }
    assert_eq!(unplaced, 437);
}

#[test]
fn each_multiplet_row_is_followed_by_the_components_it_counts() {
    // A multiplet with one component is printed twice; taking both would double the line.
    let (components, multiplets) = printed();
    let places: BTreeSet<_> = components.iter().map(|c| c.place).collect();
    let heads: BTreeSet<_> = multiplets.iter().map(|m| m.0).collect();
    for &(place, count) in &multiplets {
        assert!(
            (place + 1..=place + count).all(|p| places.contains(&p)),
            "line {place}"
        );
        assert!(!places.contains(&(place + count + 1)), "line {place}");
    }
    assert!(
        rows(KEY, "lines.csv")
            .iter()
            .all(|r| !heads.contains(&r["row"].parse().unwrap()))
    );
    assert!(multiplets.iter().filter(|m| m.1 == 1).count() > 300);
}

#[test]
fn levels_are_those_of_the_lines() {
    let lines = by_place();
    let (components, _) = printed();
    let wanted: BTreeSet<_> = components
        .iter()
        .filter(|c| lines.contains_key(&c.place))
        .flat_map(|c| {
            let lower = (
                c.species.clone(),
                c.energies.0.to_bits(),
                c.weights.0.clone(),
            );
            [
                lower,
                (
                    c.species.clone(),
                    c.energies.1.to_bits(),
                    c.weights.1.clone(),
                ),
            ]
        })
        .collect();
    let levels = rows(KEY, "levels.csv");
    let key = |r: &Row| {
        (
            r["species"].clone(),
            number(r, "energy_per_cm").to_bits(),
            r["g"].clone(),
        )
    };
    assert_eq!(levels.len(), 3927);
    assert!(levels.iter().map(key).collect::<BTreeSet<_>>() == wanted);
    assert_eq!(
        levels
            .iter()
            .map(|r| &r["species"])
            .collect::<BTreeSet<_>>()
            .len(),
        185
    );
}

#[test]
fn padding_zeros_are_no_digits() {
    let lines = by_place();
    // `26.0700` Å with energies in thousands: one unit of the last digit is 0.01 Å = 0.001 nm.
    let iron = lines
        .values()
        .find(|r| r["wavelength_nm"] == "2.60700")
        .unwrap();
    assert!(number(iron, "wavelength_uncertainty_nm") >= 0.001);
    for row in lines.values() {
        let wavelength = number(row, "wavelength_nm");
        let floor = if wavelength < 2.0 { 5e-4 } else { 1e-5 };
        // The floor is written with two digits, rounded up: never below, up to 10 % above.
        assert!(
            number(row, "wavelength_uncertainty_nm") >= floor * wavelength * (1.0 - 1e-9),
            "{row:?}"
        );
    }
    let beryllium_like = rows(KEY, "levels.csv");
    let level = beryllium_like
        .iter()
        .find(|r| r["energy_per_cm"] == "1657980")
        .unwrap();
    assert!(number(level, "uncertainty_per_cm") >= 16.5); // 1e-5 of the energy beats the printed 10
}

#[test]
fn weights_become_j_and_allow_the_transition() {
    for row in rows(KEY, "lines.csv") {
        for (g, j) in [("lower_g", "lower_j"), ("upper_g", "upper_j")] {
            assert_eq!(number(&row, g), 2.0 * number(&row, j) + 1.0, "{row:?}");
        }
        let (low, high) = (number(&row, "lower_j"), number(&row, "upper_j"));
        assert!(
            (low - high).abs() <= 1.0 && low + high > 0.0,
            "ΔJ of {row:?}"
        );
        assert_ne!(
            row["lower_term"].ends_with('o'),
            row["upper_term"].ends_with('o'),
            "{row:?}"
        );
        assert_eq!(
            (row["kind"].as_str(), row["medium"].as_str()),
            ("line", "vacuum")
        );
    }
}

#[test]
fn positions_are_the_differences_of_the_levels() {
    let mut apart = 0;
    for row in rows(KEY, "lines.csv") {
        let gap = number(&row, "upper_energy_per_cm") - number(&row, "lower_energy_per_cm");
        let difference = (1e7 / gap - number(&row, "wavelength_nm")).abs();
        assert!(
            difference <= number(&row, "wavelength_uncertainty_nm"),
            "{row:?}"
        );
        apart += usize::from(row["from_levels"] == "false");
    }
    assert_eq!(apart, 21); // printed to more digits than their energies support
}

#[test]
fn rates_and_oscillator_strengths_agree_in_all_rows_but_one() {
    let (components, _) = printed();
    let mut contradictions = Vec::new();
    for c in components
        .iter()
        .filter(|c| c.wavelength_angstrom.parse::<f64>().unwrap() > 0.0)
    {
        let weights: (f64, f64) = (c.weights.0.parse().unwrap(), c.weights.1.parse().unwrap());
        let from_f = rate_from_f(c.energies.1 - c.energies.0, weights.0, weights.1, c.f);
        // Three printed digits each (0.5 % at worst), energies to three digits in a few ions (2 × 0.5 %).
        if !close(c.rate, from_f, 0.02) {
            contradictions.push((c.place, c.species.as_str(), c.rate / from_f));
        }
    }
    // Ne I 73.59 nm: f = 0.149 wants A = 6.1e8 s⁻¹, the row prints half of it.
    assert_eq!(contradictions.len(), 1, "{contradictions:?}");
    assert!(contradictions[0].0 == 2141 && (contradictions[0].2 - 0.51).abs() < 0.01);
}

#[test]
fn hydrogen_like_rates_scale_as_the_fourth_power_of_the_nuclear_charge() {
    // Bethe & Salpeter 1957, section 63: A ∝ Z⁴, f independent of Z, for one-electron ions.
    let lines = rows(KEY, "lines.csv");
    let lyman = |species: &str| {
        let of = lines
            .iter()
            .filter(|r| r["species"] == species && r["upper_configuration"] == "2p");
        of.map(|r| number(r, "oscillator_strength")).sum::<f64>()
    };
    for species in ["H I", "He II", "C VI", "O VIII", "Ne X"] {
        // f(1s–2p) = 0.4162 (Bethe & Salpeter 1957, table 13); three printed digits per component.
        assert!(
            (lyman(species) - 0.4162).abs() < 0.003,
            "{species}: {}",
            lyman(species)
        );
    }
}
