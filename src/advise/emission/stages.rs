//! How an element spreads over its stages of ionisation, and how well that is known.

use vocabulary::atom::Species;

use super::conditions::Entry;
use super::lte::refuse_beyond;
use crate::advise::error::AdviseError;
use crate::advise::spectrum::Spectrum;
use crate::calc::plasma::{CoreTransition, Target, absorption_f, coronal_balance, stage_rates};
use vocabulary::light::constants::PER_CM_PER_EV;

/// The part of its element that a species is.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Share {
    /// The part, 0 to 1.
    pub fraction: f64,
    /// What it hangs on: number of a variable, and ln of the part for 1 σ of it.
    pub variables: Vec<(usize, f64)>,
    /// Recombination into it or out of it lacks its dielectronic part.
    pub lacks_dielectronic: bool,
}

/// Parts that the user gives: of an element of which a stage is given, all other stages count as
/// absent. `None` for species of other elements. Variables are the entries, numbered from `first`.
pub fn given(spectra: &[Spectrum], entries: &[Entry], first: usize) -> Vec<Option<Share>> {
    let share = |spectrum: &Spectrum| {
        let species = spectrum.species;
        if let Some(index) = Entry::of(species, entries) {
            let entry = entries[index];
            return Some(Share {
                fraction: entry.value,
                variables: sigma_of(first + index, entry.relative_sigma),
                lacks_dielectronic: false,
            });
        }
        let same_element = |e: &&Entry| {
            (e.request.atomic_number, e.request.isotope) == (species.atomic_number, species.isotope)
        };
        entries.iter().find(same_element).map(|_| Share::default())
    };
    spectra.iter().map(share).collect()
}

/// One variable with the ln of a relative 1 σ; none where that is zero.
pub fn sigma_of(variable: usize, relative_sigma: f64) -> Vec<(usize, f64)> {
    if relative_sigma > 0.0 {
        vec![(variable, relative_sigma.powi(2).ln_1p().sqrt())]
    } else {
        Vec::new()
    }
}

/// Parts by the rates of ionisation and recombination ([`stage_rates`]), over the stages up to the
/// first whose ionisation energy is not known. A stage beyond counts as absent, unless it was
/// named: then the balance is refused. Each ratio of neighbouring stages is a variable, numbered
/// from `first`, elements one after the other.
///
/// # Errors
/// A named stage beyond the last that can be balanced; rates that cannot be computed.
pub fn coronal(
    spectra: &[Spectrum],
    kt_per_cm: f64,
    first: usize,
) -> Result<Vec<Share>, AdviseError> {
    let mut elements: Vec<(Species, Balance)> = Vec::new();
    let mut out = Vec::with_capacity(spectra.len());
    let mut next = first;
    for spectrum in spectra {
        let neutral = Species {
            stage: 1,
            ..spectrum.species
        };
        let known = elements.iter().position(|e| e.0 == neutral);
        let index = match known {
            Some(index) => index,
            None => {
                let balance = Balance::new(neutral, spectra, kt_per_cm, next)?;
                next += balance.ln_sigmas.len();
                elements.push((neutral, balance));
                elements.len() - 1
            }
        };
        let balance = &elements[index].1;
        refuse_beyond(spectrum, balance.fractions.len())?;
        out.push(balance.share(usize::from(spectrum.species.charge())));
    }
    Ok(out)
}

/// The balance of one element.
struct Balance {
    fractions: Vec<f64>,
    /// ln of the factor within which each ratio of neighbouring stages is known.
    ln_sigmas: Vec<f64>,
    lacks: Vec<bool>,
    first: usize,
}

impl Balance {
    fn new(
        neutral: Species,
        spectra: &[Spectrum],
        kt_per_cm: f64,
        first: usize,
    ) -> Result<Self, AdviseError> {
        let (mut rates, mut ln_sigmas, mut lacks) = (Vec::new(), Vec::new(), Vec::new());
        for stage in 1..=neutral.atomic_number {
            let species = Species { stage, ..neutral };
            let Some(limit) = vocabulary::atom::limit(species) else {
                break;
            };
            let above = Species {
                stage: stage.saturating_add(1),
                ..neutral
            };
            let next = spectra.iter().find(|s| s.species == above);
            let core = next.map(core_transitions).unwrap_or_default();
            let rate = stage_rates(species, limit.energy_per_cm, &core, kt_per_cm)
                .map_err(|cause| AdviseError::Plasma { species, cause })?;
            rates.push((rate.ionisation_m3_per_s, rate.recombination_m3_per_s));
            ln_sigmas.push(rate.ratio_uncertainty_factor.ln());
            lacks.push(rate.lacks_dielectronic);
        }
        let fractions = coronal_balance(&rates).map_err(|cause| AdviseError::Plasma {
            species: neutral,
            cause,
        })?;
        Ok(Self {
            fractions,
            ln_sigmas,
            lacks,
            first,
        })
    }

    /// ∂ ln f_k/∂ ln r_j is 1 for j < k, less the part of the element beyond ratio j.
    fn share(&self, charge: usize) -> Share {
        let Some(&fraction) = self.fractions.get(charge) else {
            return Share::default();
        };
        let variables = (0..self.ln_sigmas.len()).map(|j| {
            let beyond: f64 = self.fractions[j + 1..].iter().sum();
            let slope = f64::from(u8::from(charge > j)) - beyond;
            (self.first + j, slope * self.ln_sigmas[j])
        });
        let lacks = |j: Option<usize>| j.and_then(|j| self.lacks.get(j)).is_some_and(|l| *l);
        Share {
            fraction,
            variables: variables.filter(|v| v.1 != 0.0).collect(),
            lacks_dielectronic: lacks(charge.checked_sub(1)) || lacks(Some(charge)),
        }
    }
}

/// Dipole-allowed transitions from the ground level, through which the ion can capture electrons.
fn core_transitions(spectrum: &Spectrum) -> Vec<CoreTransition> {
    let Some(ground) = spectrum.levels.first() else {
        return Vec::new();
    };
    let transition = |s: &vocabulary::spectrum::Strength| {
        if s.lower? != ground.number {
            return None;
        }
        let upper = spectrum.levels.get(s.upper? as usize)?;
        Target::of_levels(ground, upper)?;
        let bound = spectrum
            .limit_per_cm
            .is_none_or(|l| upper.energy_per_cm < l);
        let energy = upper.energy_per_cm - ground.energy_per_cm;
        (bound && energy > 0.0).then_some(CoreTransition {
            energy_ev: energy / PER_CM_PER_EV,
            absorption_f: absorption_f(s.rate_per_s?, upper.g?, ground.g?, energy),
        })
    };
    spectrum.strengths.iter().filter_map(transition).collect()
}
