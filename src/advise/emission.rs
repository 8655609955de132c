//! How much light each line emits, relative to the others, under stated conditions.
//!
//! All models are optically thin. The light of a line is its power: population of the upper level
//! times rate times photon energy. Inside a species the populations are those of LTE at the
//! electron temperature, each bound level weighted by the Planck–Larkin factor.

use vocabulary::atom::Species;
use vocabulary::spectrum::{Level, Line, Strength};

use super::error::AdviseError;
use super::spectrum::Spectrum;
use crate::calc::plasma::{Partition, Plasma, Stage, ionisation_balance, partition_function};

/// How the light of different species compares.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum EmissionModel {
    /// Each species of the mix is seen: its strongest rated line between 200 and 1000 nm (else
    /// anywhere) has the strength of its amount.
    Visible,
    /// One temperature and real amounts; ionisation by Saha where the electron density is given.
    Lte,
}

/// What the light source is like, and the instrument that looks at it.
#[derive(Clone, Debug, PartialEq)]
pub struct Conditions {
    /// How species compare.
    pub model: EmissionModel,
    /// k T of the electrons, cm⁻¹.
    pub kt_per_cm: f64,
    /// Electron density, m⁻³, where given.
    pub electron_density_per_m3: Option<f64>,
    /// Temperature of the atoms, K.
    pub gas_temperature_k: f64,
}

/// Band in which a visible source is scaled, vacuum nm.
const VISIBLE_NM: std::ops::RangeInclusive<f64> = 200.0..=1000.0;

/// Relative light of the lines of one species.
#[derive(Clone, Debug)]
pub struct Emitter {
    partition: Option<Partition>,
    factor: f64,
}

impl Emitter {
    /// Relative light of a line, any one unit for all species; `None` where its rate or upper
    /// level is not known.
    pub fn light(&self, line: &Line) -> Option<f64> {
        let upper = line.upper.as_ref()?;
        self.power(
            line.wavenumber_per_cm,
            line.rate_per_s?,
            upper.energy_per_cm,
            upper.g?,
        )
    }

    /// Relative light that a line would have at a rate (s⁻¹); `None` where its upper level is not
    /// known, or where no line of its species is rated and its scale is not known.
    pub fn light_at_rate(&self, line: &Line, rate_per_s: f64) -> Option<f64> {
        let upper = line.upper.as_ref()?;
        self.power(
            line.wavenumber_per_cm,
            rate_per_s,
            upper.energy_per_cm,
            upper.g?,
        )
        .filter(|light| *light > 0.0)
    }

    fn of_strength(&self, spectrum: &Spectrum, strength: &Strength) -> Option<f64> {
        let upper = spectrum.levels.get(strength.upper? as usize)?;
        self.power(
            strength.wavenumber_per_cm,
            strength.rate_per_s?,
            upper.energy_per_cm,
            upper.g?,
        )
    }

    fn power(&self, wavenumber: f64, rate: f64, upper_energy: f64, upper_g: f64) -> Option<f64> {
        let population = self.partition.as_ref()?.fraction(upper_energy, upper_g);
        Some(self.factor * population * rate * wavenumber)
    }

    /// Light of the strongest rated line in a band (vacuum nm); zero where none is rated.
    pub fn strongest(&self, spectrum: &Spectrum, from_nm: f64, to_nm: f64) -> f64 {
        let inside = |s: &&Strength| (from_nm..=to_nm).contains(&(1e7 / s.wavenumber_per_cm));
        spectrum
            .strengths
            .iter()
            .filter(inside)
            .filter_map(|s| self.of_strength(spectrum, s))
            .fold(0.0, f64::max)
    }

    /// Part of the atoms of the species that is in a level, in LTE; `None` without its weight.
    pub fn population(&self, level: &Level) -> Option<f64> {
        Some(
            self.partition
                .as_ref()?
                .fraction(level.energy_per_cm, level.g?),
        )
    }

    /// Whether levels that are not held may raise the partition function by more than 1 %.
    pub fn is_lower_bound(&self) -> bool {
        self.partition
            .as_ref()
            .is_some_and(Partition::is_lower_bound)
    }
}

/// An emitter per spectrum.
///
/// # Errors
/// Populations that cannot be computed, or an ionisation balance without ionisation energies.
pub fn emitters(
    spectra: &[Spectrum],
    conditions: &Conditions,
) -> Result<Vec<Emitter>, AdviseError> {
    let plasma = Plasma {
        kt_per_cm: conditions.kt_per_cm,
        electron_density_per_m3: conditions.electron_density_per_m3,
    };
    let partitions = spectra
        .iter()
        .map(|s| partition(s, plasma))
        .collect::<Result<Vec<_>, _>>()?;
    let balanced = match (conditions.model, conditions.electron_density_per_m3) {
        (EmissionModel::Lte, Some(density)) => Some(fractions(
            spectra,
            &partitions,
            conditions.kt_per_cm,
            density,
        )?),
        _ => None,
    };
    let mut out = Vec::with_capacity(spectra.len());
    for (index, (spectrum, partition)) in spectra.iter().zip(partitions).enumerate() {
        let mut emitter = Emitter {
            partition,
            factor: 1.0,
        };
        emitter.factor = match (&conditions.model, &balanced) {
            (EmissionModel::Visible, _) => visible_factor(spectrum, &emitter),
            (EmissionModel::Lte, None) => spectrum.amount,
            (EmissionModel::Lte, Some(fractions)) => spectrum.amount * fractions[index],
        };
        out.push(emitter);
    }
    Ok(out)
}

/// Levels that can be counted: those with a weight. A species without one has no populations.
fn partition(spectrum: &Spectrum, plasma: Plasma) -> Result<Option<Partition>, AdviseError> {
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

fn visible_factor(spectrum: &Spectrum, emitter: &Emitter) -> f64 {
    let seen = match emitter.strongest(spectrum, *VISIBLE_NM.start(), *VISIBLE_NM.end()) {
        s if s > 0.0 => s,
        _ => emitter.strongest(spectrum, 0.0, f64::INFINITY),
    };
    if seen > 0.0 {
        spectrum.amount / seen
    } else {
        0.0
    }
}

/// The part of its element that each species is, by Saha over the stages up to the first whose
/// ionisation energy is not known. A stage beyond counts as absent, unless it was named: then the
/// balance is refused. Stages that are not held count with a partition function of 1.
fn fractions(
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
            if spectrum.named && usize::from(species.stage) > stages.len() {
                let stage = u8::try_from(stages.len()).unwrap_or(species.stage);
                return Err(AdviseError::NoLimit {
                    species: Species { stage, ..species },
                });
            }
            let all = ionisation_balance(&stages, kt_per_cm, density_per_m3)
                .map_err(|cause| AdviseError::Plasma { species, cause })?;
            Ok(all
                .get(usize::from(species.charge()))
                .copied()
                .unwrap_or(0.0))
        })
        .collect()
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
