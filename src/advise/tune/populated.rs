//! Which levels hold atoms: those that the temperature fills, and metastable ones.

use std::collections::HashSet;
use std::sync::Arc;

use vocabulary::light::constants::PER_CM_PER_KELVIN;
use vocabulary::spectrum::Level;

use super::decay::dipole_allowed;
use crate::advise::{AdviseError, Spectrum};
use crate::calc::plasma::{Partition, Plasma, partition_function};

/// Part of the atoms from which a level counts as populated.
pub const POPULATED: f64 = 1e-4;
/// A held decay faster than this (s⁻¹) keeps a level from being metastable, whatever its labels say.
const FAST_PER_S: f64 = 1e4;

/// The levels of one species from which a laser can start.
pub struct Populated {
    /// Fraction of the atoms in each level, by number; `None` where no weights are held.
    fractions: Vec<Option<f64>>,
    metastable: HashSet<u32>,
    /// The first level is the ground level (of a single isotope it may not be held).
    grounded: bool,
    /// The partition function misses levels that may count.
    pub lower_bound: bool,
}

impl Populated {
    /// Populations at a temperature (K) by Boltzmann, and metastable levels where asked for.
    ///
    /// # Errors
    /// Populations that cannot be computed.
    pub fn new(
        spectrum: &Spectrum,
        temperature_k: f64,
        with_metastable: bool,
    ) -> Result<Self, AdviseError> {
        let partition = partition(spectrum, temperature_k)?;
        let fraction = |level: &Level| match (&partition, level.g) {
            (Some(partition), Some(weight)) => {
                Some(partition.fraction(level.energy_per_cm, weight))
            }
            _ => None,
        };
        let fractions: Vec<Option<f64>> = spectrum.levels.iter().map(|l| fraction(l)).collect();
        let metastable = if with_metastable {
            metastable(spectrum)
        } else {
            HashSet::new()
        };
        Ok(Self {
            fractions,
            metastable,
            grounded: spectrum
                .levels
                .first()
                .is_some_and(|l| l.energy_per_cm == 0.0),
            lower_bound: partition.is_some_and(|p| p.is_lower_bound()),
        })
    }

    /// Fraction of the atoms in a level.
    pub fn fraction(&self, level: u32) -> Option<f64> {
        self.fractions.get(level as usize).copied().flatten()
    }

    /// Whether a laser can start from a level; the ground level counts without weights too.
    pub fn holds(&self, level: u32) -> bool {
        self.thermally(level) || self.metastable.contains(&level)
    }

    /// Whether the temperature alone fills a level.
    pub fn thermally(&self, level: u32) -> bool {
        self.fraction(level)
            .map_or(self.grounded && level == 0, |f| f >= POPULATED)
    }
}

fn partition(spectrum: &Spectrum, temperature_k: f64) -> Result<Option<Partition>, AdviseError> {
    let weighted: Vec<(f64, f64)> = spectrum
        .levels
        .iter()
        .filter_map(|l| Some((l.energy_per_cm, l.g?)))
        .collect();
    // An isotope of which only excited levels are held (metastable helium) has no populations.
    if weighted.first().is_none_or(|l| l.0 > 0.0) {
        return Ok(None);
    }
    let plasma = Plasma {
        kt_per_cm: temperature_k * PER_CM_PER_KELVIN,
        electron_density_per_m3: None,
    };
    let charge = spectrum.species.charge();
    partition_function(weighted, spectrum.limit_per_cm, charge, plasma)
        .map(Some)
        .map_err(|cause| AdviseError::Plasma {
            species: spectrum.species,
            cause,
        })
}

/// Excited levels whose every lower level is forbidden by parity or J to electric dipole decay.
/// A level whose parity or J is not known is none, nor one of which a fast decay is held.
fn metastable(spectrum: &Spectrum) -> HashSet<u32> {
    let fast: HashSet<u32> = spectrum
        .strengths
        .iter()
        .filter(|s| s.rate_per_s.is_none_or(|r| r > FAST_PER_S))
        .filter_map(|s| s.upper)
        .collect();
    let limit = spectrum.limit_per_cm.unwrap_or(f64::INFINITY);
    let first_is_ground = spectrum
        .levels
        .first()
        .is_some_and(|l| l.energy_per_cm == 0.0);
    let forbidden = |level: &Arc<Level>| {
        spectrum
            .levels
            .iter()
            .take_while(|l| l.energy_per_cm < level.energy_per_cm)
            .all(|l| dipole_allowed(l, level) == Some(false))
    };
    spectrum
        .levels
        .iter()
        .skip(usize::from(first_is_ground))
        .filter(|l| l.energy_per_cm < limit && !fast.contains(&l.number) && forbidden(l))
        .map(|l| l.number)
        .collect()
}
