//! One-electron species: every fine-structure level and line up to a highest n.

use std::sync::Arc;

use vocabulary::atom::Species;
use vocabulary::spectrum::{LineKind, RateOrigin};

use crate::calc::one_electron::{
    Nucleus, OneElectronError, OneElectronLevel, OneElectronLine, levels, lines_between,
};
use crate::catalogue::reconcile::{Label, LevelReport, LineReport, RankedSource, SourceReports};

/// Highest nuclear charge in the catalogue; heavier ions are computed when asked for.
const HIGHEST_CHARGE: u8 = 30;
/// Highest charge of the longer list.
const LIGHT_CHARGE: u8 = 8;

/// Highest n held of a species; `None` for those that are not filled. Isotopes are filled where
/// the trade names them as species of their own, D and T.
pub(super) fn highest_n(species: Species) -> Option<u32> {
    let named = match species.isotope {
        None => true,
        Some(mass_number) => species.atomic_number == 1 && matches!(mass_number, 2 | 3),
    };
    if !species.is_one_electron() || !named {
        return None;
    }
    match species.atomic_number {
        1..=LIGHT_CHARGE => Some(20),
        ..=HIGHEST_CHARGE => Some(10),
        _ => None,
    }
}

/// All species that are filled, whether or not a table reports them.
pub(super) fn species() -> impl Iterator<Item = Species> {
    let isotopes = [2, 3].map(|mass_number| Species {
        isotope: Some(mass_number),
        ..Species::new(1, 1)
    });
    (1..=HIGHEST_CHARGE)
        .map(|charge| Species::new(charge, charge))
        .chain(isotopes)
}

/// Levels and lines of a species; `None` where it is not filled.
pub(super) fn reports(species: Species, source: &RankedSource) -> Option<SourceReports> {
    let highest = highest_n(species)?;
    // Every filled species has a known mass and an n in range: a test computes all of them.
    compute(species, highest, source).ok()
}

fn compute(
    species: Species,
    highest: u32,
    source: &RankedSource,
) -> Result<SourceReports, OneElectronError> {
    let nucleus = Nucleus::of(species)?;
    let held = levels(&nucleus, highest)?;
    let lines = lines_between(&nucleus, &held, highest)?;
    Ok(SourceReports {
        source: source.clone(),
        levels: held.iter().map(level).collect(),
        lines: lines.iter().map(line).collect(),
    })
}

fn level(level: &OneElectronLevel) -> LevelReport {
    LevelReport {
        energy_per_cm: level.energy_per_cm,
        uncertainty_per_cm: level.uncertainty_per_cm,
        label: Label {
            configuration: Some(Arc::from(level.configuration())),
            term: Some(Arc::from(level.term())),
        },
        twice_j: Some(level.j.twice()),
        g: None,
        computed: true,
        own_row: false,
    }
}

fn line(line: &OneElectronLine) -> LineReport {
    LineReport {
        wavenumber_per_cm: Some(line.wavenumber_per_cm),
        uncertainty_per_cm: Some(line.uncertainty_per_cm),
        from_levels: true,
        lower: Some(line.lower),
        upper: Some(line.upper),
        lower_twice_j: None,
        upper_twice_j: None,
        rate_per_s: Some(line.rate_per_s),
        rate_relative_uncertainty: Some(line.rate_relative_uncertainty),
        rate_origin: Some(RateOrigin::Computed),
        kind: LineKind::Line,
        computed: true,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::catalogue::reconcile::SourceKind;

    fn source() -> RankedSource {
        RankedSource {
            id: 1,
            key: Arc::from("computed"),
            kind: SourceKind::Computed,
            scale_per_cm: 0.0,
            scale_relative: 0.0,
        }
    }

    #[test]
    fn every_filled_species_can_be_computed() {
        let mut count = 0;
        for species in species() {
            let highest = highest_n(species).unwrap();
            let filled = compute(species, highest, &source()).unwrap();
            // n² orbitals less the ns, doubled, plus the ns: 2 n² − n levels of one shell set.
            let per_shell = |n: u32| 2 * n - 1;
            let levels: u32 = (1..=highest).map(per_shell).sum();
            assert_eq!(filled.levels.len(), levels as usize, "{species}");
            count += 1;
        }
        assert_eq!(count, 32);
    }

    #[test]
    fn other_species_are_left_alone() {
        let helium_3 = Species {
            isotope: Some(3),
            ..Species::new(2, 2)
        };
        for species in [Species::new(2, 1), Species::new(31, 31), helium_3] {
            assert!(reports(species, &source()).is_none(), "{species}");
        }
    }
}
