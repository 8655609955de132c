//! Populations of LTE and the ionisation balance that goes with them.

use vocabulary::atom::Species;

use crate::advise::error::AdviseError;
use crate::advise::spectrum::Spectrum;
use crate::calc::plasma::{Partition, Plasma, Stage, ionisation_balance, partition_function};

/// Levels that can be counted: those with a weight. A species without one has no populations.
pub(super) fn partition(
    spectrum: &Spectrum,
    plasma: Plasma,
) -> Result<Option<Partition>, AdviseError> {
    let weighted: Vec<(f64, f64)> = spectrum
        .levels
        .iter()
        .filter_map(|l| Some((l.energy_per_cm, l.g?)))
        .collect();
    if weighted.is_empty() {
        return Ok(None);
    }
    let charge = spectrum.species.charge();
    partition_function(weighted, spectrum.limit_per_cm, charge, plasma)
        .map(Some)
        .map_err(|cause| AdviseError::Plasma {
            species: spectrum.species,
            cause,
        })
}

/// The part of its element that each species is, by Saha over the stages up to the first whose
/// ionisation energy is not known. A stage beyond counts as absent, unless it was named: then the
/// balance is refused. Stages that are not held count with a partition function of 1.
pub(super) fn fractions(
    spectra: &[Spectrum],
    partitions: &[Option<Partition>],
    kt_per_cm: f64,
    density_per_m3: f64,
) -> Result<Vec<f64>, AdviseError> {
    spectra
        .iter()
        .map(|spectrum| {
            let species = spectrum.species;
            let held = |stage: u8| {
                let same = |s: &Spectrum| s.species == Species { stage, ..species };
                spectra
                    .iter()
                    .position(same)
                    .and_then(|i| partitions[i].as_ref())
            };
            let stages = stages_of(species, held);
            refuse_beyond(spectrum, stages.len())?;
            let all = ionisation_balance(&stages, kt_per_cm, density_per_m3)
                .map_err(|cause| AdviseError::Plasma { species, cause })?;
            Ok(all
                .get(usize::from(species.charge()))
                .copied()
                .unwrap_or(0.0))
        })
        .collect()
}

/// A stage that was named lies beyond the first stage without an ionisation energy, the last of
/// `stages`.
pub(super) fn refuse_beyond(spectrum: &Spectrum, stages: usize) -> Result<(), AdviseError> {
    let species = spectrum.species;
    if spectrum.named && spectrum.amount > 0.0 && usize::from(species.stage) > stages {
        let stage = u8::try_from(stages).unwrap_or(species.stage);
        return Err(AdviseError::NoLimit {
            species: Species { stage, ..species },
        });
    }
    Ok(())
}

/// Stages from the neutral atom up to the first without an ionisation energy, or the bare nucleus.
fn stages_of<'p>(species: Species, held: impl Fn(u8) -> Option<&'p Partition>) -> Vec<Stage> {
    let mut stages = Vec::new();
    for stage in 1..=species.atomic_number {
        let this = Species { stage, ..species };
        let limit_per_cm = match held(stage) {
            Some(partition) => partition.limit_per_cm,
            None => vocabulary::atom::limit(this).map(|l| l.energy_per_cm),
        };
        let partition = held(stage).map_or(1.0, |p| p.value);
        stages.push(Stage {
            partition,
            limit_per_cm,
        });
        if limit_per_cm.is_none() {
            return stages;
        }
    }
    stages.push(Stage {
        partition: 1.0,
        limit_per_cm: None,
    });
    stages
}
