//! The bundled tables: every row, checksums, counts, and values of the world outside.

use std::collections::BTreeMap;

use sha2::{Digest, Sha256};
use vocabulary::atom::{
    LimitUncertainty, MassKind, Species, element, element_by_symbol, elements, isotope, isotopes,
    limit, limit_reports, mass_u,
};
use vocabulary::light::constants::{ELECTRON_MASS_U, RYDBERG_PER_CM};

use crate::support::{assert_relative, number, path, rows};

fn species(text: &str) -> Species {
    text.parse().unwrap()
}

#[test]
fn tables_have_their_checksums_and_rows() {
    let text = std::fs::read_to_string(path("data/elements/source.toml")).unwrap();
    let declared: toml::Table = text.parse().unwrap();
    let tables = declared["table"].as_array().unwrap();
    assert_eq!(tables.len(), 5);
    for table in tables {
        let file = format!("data/elements/{}", table["file"].as_str().unwrap());
        let content = std::fs::read(path(&file)).unwrap();
        let digest: String = Sha256::digest(&content)
            .iter()
            .map(|byte| format!("{byte:02x}"))
            .collect();
        assert_eq!(digest, table["sha256"].as_str().unwrap(), "{file}");
        let count = i64::try_from(rows(&file).len()).unwrap();
        assert_eq!(count, table["rows"].as_integer().unwrap(), "{file}");
    }
}

#[test]
fn every_row_of_the_elements_is_held() {
    let table = rows("data/elements/elements.csv");
    assert_eq!((table.len(), elements().len()), (118, 118));
    for (row, held) in table.iter().zip(elements()) {
        assert_eq!(row[0], held.atomic_number.to_string());
        assert_eq!((row[1].as_str(), row[2].as_str()), (held.symbol, held.name));
        assert!(number(&row[3]) == held.mass_u);
        assert_eq!(row[4].is_empty(), held.mass_uncertainty_u.is_none());
        assert_eq!(element(held.atomic_number), Some(held));
        assert_eq!(element_by_symbol(held.symbol), Some(held));
    }
    assert!(element(0).is_none() && element(119).is_none() && element_by_symbol("fe").is_none());
    assert_eq!(element_by_symbol("Cs").unwrap().name, "Caesium");
    assert_eq!(
        element_by_symbol("H").unwrap().mass_kind,
        MassKind::Conventional
    );
    assert_eq!(
        element_by_symbol("Fe").unwrap().mass_kind,
        MassKind::Standard
    );
    assert_eq!(
        element_by_symbol("Tc").unwrap().mass_kind,
        MassKind::LongestLived
    );
}

#[test]
fn every_row_of_the_isotopes_is_held() {
    let table = rows("data/elements/isotopes.csv");
    assert_eq!(table.len(), 3557);
    let held: Vec<_> = (1..=118).flat_map(isotopes).collect();
    assert_eq!(held.len(), table.len());
    for (row, held) in table.iter().zip(&held) {
        assert_eq!(row[0], held.atomic_number.to_string());
        assert_eq!(row[1], held.mass_number.to_string());
        assert!(number(&row[2]) == held.mass_u);
        assert_eq!(row[4].is_empty(), held.abundance.is_none());
        // A mass is the mass number to within 0.2 u (common practice: the mass defect).
        assert!(
            (held.mass_u - f64::from(held.mass_number)).abs() < 0.25,
            "{row:?}"
        );
    }
    assert_eq!(isotopes(0).count() + isotopes(119).count(), 0);
}

#[test]
fn abundances_sum_to_one_and_give_the_standard_mass() {
    let mut checked = 0;
    for element in elements() {
        let natural: Vec<_> = isotopes(element.atomic_number)
            .filter_map(|i| Some((i.mass_u, i.abundance?)))
            .collect();
        let sum: f64 = natural.iter().map(|(_, share)| share).sum();
        if natural.is_empty() || element.mass_kind == MassKind::LongestLived {
            continue;
        }
        assert!((sum - 1.0).abs() < 2e-4, "{}: {sum}", element.symbol);
        let mean: f64 = natural.iter().map(|(mass, share)| mass * share).sum();
        // The two come from different compilations. Their natural variation is up to 1e-3, and
        // 4e-3 for lithium, whose standard mass is the interval 6.938 to 6.997 (common practice).
        let variation = if element.symbol == "Li" { 5e-3 } else { 1e-3 };
        assert_relative(mean / sum, element.mass_u, variation, element.symbol);
        checked += 1;
    }
    assert_eq!(checked, 84, "81 stable elements, Bi, Th and U");
}

#[test]
fn masses_of_species_are_those_of_published_tables() {
    // AME2020 (Wang et al. 2021, Chin. Phys. C 45, 030003), from memory.
    for (name, mass) in [
        ("H1", 1.007_825_031_9),
        ("D I", 2.014_101_777_8),
        ("T I", 3.016_049_281_3),
        ("4He I", 4.002_603_254_1),
        ("6Li I", 6.015_122_887),
        ("198Hg I", 197.966_769_2),
    ] {
        let species = if name == "H1" {
            species("1H I")
        } else {
            species(name)
        };
        assert_relative(mass_u(species).unwrap(), mass, 1e-9, name);
    }
    let iron = mass_u(species("Fe I")).unwrap();
    assert_relative(iron, 55.845, 1e-12, "Fe");
    assert_relative(
        mass_u(species("Fe III")).unwrap(),
        iron - 2.0 * ELECTRON_MASS_U,
        1e-14,
        "Fe III",
    );
    let unknown = Species {
        isotope: Some(500),
        ..species("Fe I")
    };
    assert_eq!(mass_u(unknown), None);
    assert_eq!(isotope(26, 500), None);
}

#[test]
fn the_counts_of_limits_are_reached() {
    let table = rows("data/elements/limits.csv");
    let count = |source: &str| table.iter().filter(|row| row[6] == source).count();
    assert_eq!(count("limits-curated"), 266);
    // Headers of both tables, one per species and value: natural species of stages I-VI and D I
    // are 337; 12 of stage VII, 7 of single isotopes (3He, 4He, 10B, 11B, 40Ar), and a second
    // value for U I make 357.
    let older: Vec<_> = table
        .iter()
        .filter(|row| row[6] != "limits-curated")
        .collect();
    assert_eq!(older.len(), 357);
    let natural = |row: &&&Vec<String>| row[1].is_empty() || row[0] == "H";
    let mut natural: Vec<_> = older
        .iter()
        .filter(natural)
        .map(|r| (&r[0], &r[1], &r[2]))
        .collect();
    natural.dedup();
    let high = natural.iter().filter(|(.., stage)| *stage == "7").count();
    assert_eq!((natural.len() - high, high), (337, 12));
}

#[test]
fn newer_and_older_limits_differ_as_counted() {
    let table = rows("data/elements/limits.csv");
    let key = |row: &Vec<String>| (row[0].clone(), row[2].clone());
    let newer: BTreeMap<_, _> = table
        .iter()
        .filter(|row| row[6] == "limits-curated")
        .map(|row| (key(row), number(&row[3])))
        .collect();
    let mut older = BTreeMap::new();
    for row in table
        .iter()
        .filter(|row| row[6] != "limits-curated" && row[1].is_empty())
    {
        older.entry(key(row)).or_insert_with(|| number(&row[3]));
    }
    let gaps: Vec<f64> = newer
        .iter()
        .filter_map(|(key, value)| Some((value - older.get(key)?).abs()))
        .collect();
    let within = |bound: f64| gaps.iter().filter(|&&gap| gap <= bound).count();
    assert_eq!((gaps.len(), within(1.0), within(10.0)), (221, 150, 172));
    // 49 species beyond 10 cm-1; U I stands twice, since its headers contradict each other.
    let listed = rows("data/elements/limits-differences.csv");
    assert_eq!(listed.len(), 50);
    assert!(listed.iter().all(|row| number(&row[7]).abs() > 10.0));
    assert_eq!(listed.iter().filter(|row| row[0] == "U").count(), 2);
}

#[test]
fn every_row_of_the_limits_is_held_or_refused() {
    let table = rows("data/elements/limits.csv");
    let mut refused = Vec::new();
    for row in &table {
        let species = Species {
            atomic_number: element_by_symbol(&row[0]).unwrap().atomic_number,
            stage: row[2].parse().unwrap(),
            isotope: row[1].parse().ok(),
        };
        let held = limit_reports(species)
            .any(|l| l.energy_per_cm == number(&row[3]) && l.source == row[6]);
        assert_eq!(held, row[8].is_empty(), "{row:?}");
        assert!(
            number(&row[4]) > 0.0 && number(&row[3]) > number(&row[4]),
            "{row:?}"
        );
        if !held {
            refused.push(species.to_string());
        }
    }
    // Pd IV 250500 is below Pd III, Pr IV 31440 has lost a digit.
    assert_eq!(refused, ["Pd IV", "Pr IV"]);
    assert_eq!(limit(species("Pr IV")), None);
}

#[test]
fn limits_rise_with_the_stage() {
    let mut checked = 0;
    for element in elements() {
        let stages = 1..=element.atomic_number;
        let limits: Vec<f64> = stages
            .filter_map(|stage| limit(Species::new(element.atomic_number, stage)))
            .map(|limit| limit.energy_per_cm)
            .collect();
        assert!(limits.is_sorted(), "{}: {limits:?}", element.symbol);
        checked += limits.len();
    }
    // 266 of the newer set, and of the 348 older ones of natural species the 127 that it lacks
    // less the two refused.
    assert_eq!(checked, 391);
}

#[test]
fn the_newer_limit_leads_and_the_older_fills_in() {
    assert_eq!(limit(species("Kr III")).unwrap().source, "limits-curated");
    assert_eq!(limit_reports(species("Kr III")).count(), 2);
    let carbon = limit(species("C II")).unwrap();
    assert_eq!(carbon.source, "morton2003");
    assert_relative(carbon.energy_per_cm, 196_664.7, 1e-12, "Morton 2003, C II");
    assert_eq!(carbon.uncertainty_origin, LimitUncertainty::LastDigit);
    assert_eq!(
        limit(species("I III")).unwrap().uncertainty_origin,
        LimitUncertainty::Doubtful
    );
    assert_eq!(limit(species("Og I")), None);
}

#[test]
fn limits_are_those_of_handbooks() {
    // Common practice: ionisation energies that handbooks print in eV; half a printed digit.
    for (name, ev, digit) in [
        ("H I", 13.598_43, 1e-5),
        ("He I", 24.587_39, 1e-5),
        ("He II", 54.417_8, 1e-4),
        ("Li I", 5.391_7, 1e-4),
        ("C I", 11.260, 1e-3),
        ("Ne I", 21.564_5, 1e-4),
        ("Na I", 5.139_1, 1e-4),
        ("Ar I", 15.759_6, 1e-4),
        ("K I", 4.340_7, 1e-4),
        ("Fe I", 7.902, 1e-3),
        ("Rb I", 4.177_1, 1e-4),
        ("Cs I", 3.893_9, 1e-4),
        ("Hg I", 10.437_5, 1e-4),
        ("W I", 7.864, 1e-3),
    ] {
        let found = limit(species(name)).unwrap().energy_per_cm / 8_065.543_937;
        assert!((found - ev).abs() <= digit, "{name}: {found}");
    }
}

#[test]
fn limits_of_isotopes_scale_with_the_reduced_mass() {
    // R∞ / (1 + m/M) sets hydrogen apart from deuterium (common practice); the levels' own
    // relativistic and radiative shifts are the same to 1e-8.
    let reduced = |mass: f64| RYDBERG_PER_CM / (1.0 + ELECTRON_MASS_U / (mass - ELECTRON_MASS_U));
    let hydrogen = limit(species("H I")).unwrap().energy_per_cm;
    let deuterium = limit(species("D I")).unwrap();
    assert_eq!(deuterium.source, "morton2003");
    let expected = hydrogen * reduced(2.014_101_777_8) / reduced(1.007_825_031_9);
    assert_relative(deuterium.energy_per_cm, expected, 1e-8, "D I");
    let tritium = limit(species("T I")).unwrap().energy_per_cm;
    let expected = hydrogen * reduced(3.016_049_281_3) / reduced(1.007_825_031_9);
    assert_relative(tritium, expected, 1e-8, "T I");
    let lithium = limit(species("6Li I")).unwrap();
    let natural = limit(species("Li I")).unwrap();
    assert!(lithium.energy_per_cm == natural.energy_per_cm);
    assert!(lithium.uncertainty_per_cm > natural.uncertainty_per_cm);
}
