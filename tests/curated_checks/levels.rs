//! Levels against physics.

use super::support::{ions, ls, odd_configuration};
use std::collections::HashMap;

/// J is a multiple of one half inside |L - S| .. L + S, g = 2J + 1, the parity of term and configuration agree.
#[test]
fn labels_j_and_g_are_consistent() {
    for ion in ions() {
        for level in &ion.levels {
            let place = format!("{} {level:?}", ion.species);
            if let Some(j) = level.j {
                assert_eq!((2.0 * j).fract(), 0.0, "{place}");
                assert_eq!(level.g, Some(2.0 * j + 1.0), "{place}");
                if let Some((multiplicity, l)) = ls(&level.term) {
                    let (s, l) = (f64::from(multiplicity - 1) / 2.0, l as f64);
                    assert!(
                        j >= (l - s).abs() && j <= l + s && (j - l - s).fract() == 0.0,
                        "{place}"
                    );
                }
            } else {
                assert!(level.g.is_none(), "{place}");
            }
            if let (false, Some(odd)) = (
                level.term.is_empty(),
                odd_configuration(&level.configuration),
            ) {
                assert_eq!(level.term.ends_with('o'), odd, "{place}");
            }
        }
    }
}

/// All J of an ion are whole, or all half-whole: the number of electrons decides.
#[test]
fn j_of_one_ion_are_of_one_kind() {
    for ion in ions() {
        let kinds: std::collections::HashSet<u8> = ion
            .levels
            .iter()
            .filter_map(|l| l.j)
            .map(|j| ((2.0 * j) as u64 % 2) as u8)
            .collect();
        assert_eq!(kinds.len(), 1, "{}", ion.species);
    }
}

/// No level twice: neither the same label and J, nor the same energy (0.05 cm-1) with the same J and parity.
#[test]
fn no_level_twice() {
    for ion in ions() {
        let mut labels: HashMap<(String, String, String), String> = HashMap::new();
        for level in ion
            .levels
            .iter()
            .filter(|l| !l.configuration.is_empty() && !l.term.is_empty())
        {
            let label = (
                level.configuration.clone(),
                level.term.clone(),
                format!("{:?}", level.j),
            );
            let before = labels.insert(label, level.text.clone());
            assert!(
                before.is_none(),
                "{}: {level:?} and {before:?}",
                ion.species
            );
        }
        for (n, a) in ion.levels.iter().enumerate() {
            for b in &ion.levels[n + 1..] {
                let same = (a.energy_per_cm - b.energy_per_cm).abs() < 0.05 && a.j == b.j;
                let parts = (&a.term, &b.term);
                assert!(
                    !same || (parts.0 != parts.1 && !parts.0.is_empty() && !parts.1.is_empty()),
                    "{}: {a:?} {b:?}",
                    ion.species
                );
            }
        }
    }
}

#[test]
fn levels_are_in_order_from_the_ground_level() {
    for ion in ions() {
        assert_eq!(ion.levels[0].energy_per_cm, 0.0, "{}", ion.species);
        assert_eq!(ion.levels[0].uncertainty_per_cm, 0.0, "{}", ion.species);
        assert!(
            ion.levels
                .windows(2)
                .all(|w| w[0].energy_per_cm <= w[1].energy_per_cm),
            "{}",
            ion.species
        );
        assert!(
            ion.levels[1..].iter().all(|l| l.uncertainty_per_cm >= 0.01),
            "{}",
            ion.species
        );
    }
}

/// Ions whose entries name no scale carry at least 0.05 cm-1; Hg I, between two isotopic scales, 0.1.
#[test]
fn ions_without_a_known_scale_are_not_overstated() {
    for ion in ions() {
        let least = match ion.species.as_str() {
            "Ne I" | "Ar II" | "N II" | "O II" | "C III" | "Ti II" | "W I" => 0.05,
            "Hg I" => 0.1,
            _ => continue,
        };
        assert!(
            ion.levels[1..]
                .iter()
                .all(|l| l.uncertainty_per_cm >= least),
            "{}",
            ion.species
        );
    }
}
