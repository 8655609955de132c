//! Levels against physics.

use super::support::{ions, ls, odd_configuration};
use std::collections::HashMap;

/// Terms whose levels do not follow J. Spin-spin and spin-other-orbit forces outweigh spin-orbit (1s 2p of Li II, 3p 3P of O I, 4p 3P of S I,
/// 2s 2p3 of C I), the coupling is far from LS (Cu II, Ge I, Ir I, Ni I, Pd I, Sn I, Te I: 3P0 lies below 3P1), or neighbours push (b 4F of
/// Cr II, z 5Go of Fe I, b 4D of Fe II, 4Go of Ni II). Both entries have each of them this way.
const IRREGULAR: [&str; 17] = [
    "C I 2s 2p3 3Do",
    "C I 2s 2p3 3Po",
    "Cr II 3d5 b 4F",
    "Cu II 3d9 (2D) 4p 3Do",
    "Cu II 3d9 (2D) 4p 3Fo",
    "Fe I 3d7 (4F) 4p z 5Go",
    "Fe II 3d6 (3D) 4s b 4D",
    "Ge I 4s2 4p (2Po) 4d 3Do",
    "Ir I 5d7 6s2 a 4F",
    "Li II 1s 2p 3Po",
    "Ni I 3d9 (2D) 4p z 3Fo",
    "Ni II 3d8 (3F) 4p 4Go",
    "O I 2s2 2p3 (4So) 3p 3P",
    "Pd I 4d9 (2D) 5p 3Do",
    "S I 3s2 3p3 (4So) 4p 3P",
    "Sn I 5s2 5p (2Po) 5d 3Do",
    "Te I 5s2 5p4 3P",
];

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

/// Fine structure: inside a term in LS coupling the energies rise (or fall) with J without turning, except in the terms listed, where
/// both entries and the paper tables have the same irregular order or the term is mixed.
#[test]
fn intervals_keep_their_order() {
    let mut irregular = Vec::new();
    let mut checked = 0;
    for ion in ions() {
        let mut terms: HashMap<(&str, &str), Vec<(f64, f64)>> = HashMap::new();
        for level in ion
            .levels
            .iter()
            .filter(|l| ls(&l.term).is_some() && !l.configuration.is_empty())
        {
            if let Some(j) = level.j {
                terms
                    .entry((&level.configuration, &level.term))
                    .or_default()
                    .push((j, level.energy_per_cm));
            }
        }
        for ((configuration, term), mut members) in terms {
            members.sort_by(|a, b| a.0.total_cmp(&b.0));
            let signs: Vec<f64> = members
                .windows(2)
                .map(|w| w[1].1 - w[0].1)
                .filter(|d| d.abs() > 0.1)
                .map(f64::signum)
                .collect();
            checked += usize::from(signs.len() >= 2);
            if signs.windows(2).any(|w| w[0] != w[1]) {
                irregular.push(format!("{} {configuration} {term}", ion.species));
            }
        }
    }
    irregular.sort();
    println!("{checked} terms with three or more levels; irregular: {irregular:#?}");
    assert_eq!(irregular, IRREGULAR);
    assert!(checked > 250, "{checked}");
}
