//! How much light each line emits, relative to the others, under stated conditions.
//!
//! All models are optically thin. The light of a line is its power: population of the upper level
//! times rate times photon energy. Inside a species the populations are those of LTE at the
//! electron temperature, each bound level weighted by the Planck–Larkin factor, or those of the
//! corona model.

mod conditions;
mod corona;
mod intensity;
mod lte;
mod stages;

use vocabulary::spectrum::{Level, Line, Strength};

pub use conditions::{
    Conditions, Details, EmissionModel, Entry, Gas, GivenIntensity, InstrumentForm, LevelName,
    Metastable,
};
use corona::{Corona, relative_of_factor};
use intensity::Scaled;
use stages::Share;

use super::error::AdviseError;
use super::spectrum::Spectrum;
use crate::calc::plasma::{Partition, Plasma, UNKNOWN_STRENGTH_SIGMA_DEX};

/// Band in which a visible source is scaled, vacuum nm.
const VISIBLE_NM: std::ops::RangeInclusive<f64> = 200.0..=1000.0;
/// Rates below this are those of lines that no electric dipole allows, or nearly so, s⁻¹.
const FORBIDDEN_BELOW_PER_S: f64 = 1e3;
/// Relative 1 σ of a rate for which none is stated.
pub const UNSTATED_RATE_SIGMA: f64 = 0.5;

/// Relative light of the lines of one species.
#[derive(Clone, Debug)]
pub struct Emitter {
    populations: Populations,
    factor: f64,
    given: Option<Scaled>,
    /// What all its light hangs on: number of a variable, and ln of the light for 1 σ of it.
    /// Species may share variables.
    pub variables: Vec<(usize, f64)>,
    /// Its part of the element lacks dielectronic recombination.
    pub lacks_dielectronic: bool,
    /// There is none of it: amount zero, or a stage that is not there.
    pub is_absent: bool,
}

#[derive(Clone, Debug)]
enum Populations {
    Unknown,
    /// LTE, with the part of the atoms in each level by number (NaN without a weight).
    Thermal(Partition, Vec<f64>),
    Corona(Corona),
}

impl Emitter {
    /// Relative light of a line, any one unit for all species; `None` where its rate or upper
    /// level is not known, or where nothing in the model populates that.
    pub fn light(&self, line: &Line) -> Option<f64> {
        if let Some((light, _)) = self.given.as_ref().and_then(|g| g.of(line)) {
            return Some(light);
        }
        let upper = line.upper.as_ref()?;
        self.power(line.wavenumber_per_cm, line.rate_per_s?, upper)
    }

    /// Relative 1 σ of the light of a line from its rate, its excitation or its given intensity;
    /// what all lines of the species share is not in it.
    pub fn light_sigma(&self, line: &Line) -> f64 {
        let rate = line
            .rate_relative_uncertainty
            .unwrap_or(UNSTATED_RATE_SIGMA);
        let upper = || line.upper.as_ref().map_or(u32::MAX, |u| u.number);
        match (&self.given, &self.populations) {
            (Some(given), _) => match given.of(line) {
                Some((_, sigma)) => sigma,
                None => rate.hypot(given.relative_sigma),
            },
            (None, Populations::Corona(corona)) => rate.hypot(corona.relative_sigma(upper())),
            _ => rate,
        }
    }

    /// Relative light that a line would have at a rate (s⁻¹); `None` where its upper level is not
    /// known or not populated, or where no line of its species is rated and its scale is not known.
    pub fn light_at_rate(&self, line: &Line, rate_per_s: f64) -> Option<f64> {
        let upper = line.upper.as_ref()?;
        self.power(line.wavenumber_per_cm, rate_per_s, upper)
            .filter(|light| *light > 0.0)
    }

    /// Light that a line of this rate (s⁻¹) would have if its upper level, which nothing in the
    /// model feeds, were excited by a collision strength of the usual size, and its σ in decades;
    /// `None` for any other line.
    pub fn unfed_light(&self, line: &Line, rate_per_s: f64) -> Option<(f64, f64)> {
        let Populations::Corona(corona) = &self.populations else {
            return None;
        };
        let population = corona.estimate_m3(line.upper.as_ref()?.number)?;
        let light = self.factor * population * rate_per_s * line.wavenumber_per_cm;
        (light > 0.0).then_some((light, UNKNOWN_STRENGTH_SIGMA_DEX))
    }

    /// Whether a line has a rate but nothing in the model excites it.
    pub fn is_unfed(&self, line: &Line) -> bool {
        matches!(self.populations, Populations::Corona(_))
            && line.rate_per_s.is_some()
            && self.light(line).is_none()
    }

    /// Whether cascades alone populate the upper level of a line.
    pub fn is_fed_by_cascades(&self, line: &Line) -> bool {
        match (&self.populations, &line.upper) {
            (Populations::Corona(corona), Some(upper)) => corona.is_fed_by_cascades(upper.number),
            _ => false,
        }
    }

    fn of_strength(&self, spectrum: &Spectrum, strength: &Strength) -> Option<f64> {
        if let Some(given) = &self.given
            && let Some((light, _)) = given.of_wavenumber(strength.wavenumber_per_cm)
        {
            return Some(light);
        }
        let upper = spectrum.levels.get(strength.upper? as usize)?;
        self.power(strength.wavenumber_per_cm, strength.rate_per_s?, upper)
    }

    fn power(&self, wavenumber: f64, rate: f64, upper: &Level) -> Option<f64> {
        let population = match &self.populations {
            Populations::Unknown => return None,
            Populations::Thermal(_, parts) => known(parts, upper)?,
            Populations::Corona(corona) => corona.population_m3(upper.number)?,
        };
        Some(self.factor * population * rate * wavenumber)
    }

    /// Light of the strongest rated line in a band (vacuum nm); zero where none is rated.
    pub fn strongest(&self, spectrum: &Spectrum, from_nm: f64, to_nm: f64) -> f64 {
        self.strongest_from_rate(spectrum, 0.0, (from_nm, to_nm))
    }

    /// As [`Emitter::strongest`], of the lines whose rate is at least this (s⁻¹).
    fn strongest_from_rate(
        &self,
        spectrum: &Spectrum,
        least_rate_per_s: f64,
        (from_nm, to_nm): (f64, f64),
    ) -> f64 {
        let counts = |s: &&Strength| {
            (from_nm..=to_nm).contains(&(1e7 / s.wavenumber_per_cm))
                && s.rate_per_s.is_some_and(|rate| rate >= least_rate_per_s)
        };
        spectrum
            .strengths
            .iter()
            .filter(counts)
            .filter_map(|s| self.of_strength(spectrum, s))
            .fold(0.0, f64::max)
    }

    /// Part of the atoms of the species that is in a level; `None` where it is not known.
    pub fn population(&self, level: &Level) -> Option<f64> {
        match &self.populations {
            Populations::Unknown => None,
            Populations::Thermal(_, parts) => known(parts, level),
            Populations::Corona(corona) => corona.fraction(level.number),
        }
    }

    /// Whether levels that are not held may raise the partition function by more than 1 %.
    pub fn is_lower_bound(&self) -> bool {
        match &self.populations {
            Populations::Thermal(p, _) => p.is_lower_bound(),
            _ => false,
        }
    }
}

/// The part of the atoms in a level, where it is known.
fn known(parts: &[f64], level: &Level) -> Option<f64> {
    let part = parts.get(level.number as usize).copied();
    part.filter(|p| !p.is_nan())
}

/// Relative 1 σ of a ratio of light from what whole species share: of the light of species with
/// these parts of the numerator over that of another, each with the variables of its emitter.
pub fn shared_sigma(parts: &[(&Emitter, f64)], over: &Emitter) -> f64 {
    let mut slopes: std::collections::BTreeMap<usize, f64> = std::collections::BTreeMap::new();
    let terms = parts.iter().copied().chain([(over, -1.0)]);
    for (emitter, part) in terms {
        for &(variable, ln_sigma) in &emitter.variables {
            *slopes.entry(variable).or_default() += part * ln_sigma;
        }
    }
    let variance: f64 = slopes.values().map(|s| s * s).sum();
    relative_of_factor(variance.sqrt().exp())
}

/// An emitter per spectrum.
///
/// # Errors
/// Populations that cannot be computed, an ionisation balance without ionisation energies, levels
/// or lines of the user that are not held.
pub fn emitters(
    spectra: &[Spectrum],
    conditions: &Conditions,
) -> Result<Vec<Emitter>, AdviseError> {
    let plasma = Plasma {
        kt_per_cm: conditions.kt_per_cm,
        electron_density_per_m3: conditions.electron_density_per_m3,
    };
    let corona = conditions.model == EmissionModel::Coronal;
    let mut partitions = Vec::with_capacity(spectra.len());
    for spectrum in spectra {
        partitions.push(if corona {
            None
        } else {
            lte::partition(spectrum, plasma)?
        });
    }
    let shares = shares(spectra, &partitions, conditions)?;
    let mut out = Vec::with_capacity(spectra.len());
    for ((spectrum, partition), share) in spectra.iter().zip(partitions).zip(shares) {
        let populations = match partition {
            Some(partition) => {
                let part = |l: &std::sync::Arc<Level>| {
                    l.g.map_or(f64::NAN, |g| partition.fraction(l.energy_per_cm, g))
                };
                let parts = spectrum.levels.iter().map(part).collect();
                Populations::Thermal(partition, parts)
            }
            None if corona => {
                Corona::new(spectrum, conditions)?.map_or(Populations::Unknown, Populations::Corona)
            }
            None => Populations::Unknown,
        };
        let mut emitter = Emitter {
            populations,
            factor: 1.0,
            given: None,
            variables: share.variables,
            lacks_dielectronic: share.lacks_dielectronic,
            is_absent: spectrum.amount == 0.0 || share.fraction == 0.0,
        };
        match conditions.model {
            EmissionModel::Visible => {
                emitter.factor = {
                    let far = conditions.details.far_ultraviolet;
                    visible_factor(spectrum, &emitter, far)
                }
            }
            EmissionModel::Given if !conditions.details.intensities.is_empty() => {
                scale(spectrum, conditions, &mut emitter)?;
            }
            _ => emitter.factor = spectrum.amount * share.fraction,
        }
        let amounts = &conditions.details.amounts;
        if let Some(entry) = Entry::of(spectrum.species, amounts) {
            let sigma = amounts[entry].relative_sigma;
            emitter.variables.extend(stages::sigma_of(entry, sigma));
        }
        out.push(emitter);
    }
    Ok(out)
}

/// The part of its element that each species is, where the model asks for it.
fn shares(
    spectra: &[Spectrum],
    partitions: &[Option<Partition>],
    conditions: &Conditions,
) -> Result<Vec<Share>, AdviseError> {
    let details = &conditions.details;
    let all = |fraction: f64| Share {
        fraction,
        ..Share::default()
    };
    // Variables: amounts, then ion fractions, then ratios of stages.
    let first = details.amounts.len();
    let given = stages::given(spectra, &details.ion_fractions, first);
    let whole = || vec![all(1.0); spectra.len()];
    let balanced: Vec<Share> = match (conditions.model, conditions.electron_density_per_m3) {
        (EmissionModel::Lte, Some(density)) => {
            let kt = conditions.kt_per_cm;
            let parts = lte::fractions(spectra, partitions, kt, density)?;
            parts.into_iter().map(all).collect()
        }
        (EmissionModel::Coronal, _) => {
            let first = first + details.ion_fractions.len();
            stages::coronal(spectra, conditions.kt_per_cm, first)?
        }
        (EmissionModel::Given, _) if details.intensities.is_empty() => {
            for (spectrum, given) in spectra.iter().zip(&given) {
                if given.is_none() && spectrum.amount > 0.0 {
                    let species = spectrum.species;
                    return Err(AdviseError::NothingGiven { species });
                }
            }
            whole()
        }
        _ => whole(),
    };
    let chosen = given.into_iter().zip(balanced);
    Ok(chosen.map(|(g, b)| g.unwrap_or(b)).collect())
}

/// Sets the light of a species by the intensities that are given of it. Another stage than those
/// of which one is given counts as absent.
fn scale(
    spectrum: &Spectrum,
    conditions: &Conditions,
    emitter: &mut Emitter,
) -> Result<(), AdviseError> {
    let species = spectrum.species;
    let all = &conditions.details.intensities;
    let own: Vec<&GivenIntensity> = all.iter().filter(|g| g.species == species).collect();
    let same_element = |g: &GivenIntensity| {
        (g.species.atomic_number, g.species.isotope) == (species.atomic_number, species.isotope)
    };
    if spectrum.amount == 0.0 || (own.is_empty() && all.iter().any(same_element)) {
        emitter.factor = 0.0;
        emitter.is_absent = true;
        return Ok(());
    }
    if own.is_empty() {
        return Err(AdviseError::NothingGiven { species });
    }
    let scaled = Scaled::new(spectrum, &own, |s, upper| {
        emitter.power(s.wavenumber_per_cm, s.rate_per_s?, upper)
    })?;
    emitter.factor = scaled.factor;
    emitter.given = Some(scaled);
    Ok(())
}

/// A forbidden line makes no species visible: it scales one only where no other line is rated.
fn visible_factor(spectrum: &Spectrum, emitter: &Emitter, far_ultraviolet: bool) -> f64 {
    let everywhere = (0.0, f64::INFINITY);
    let band = if far_ultraviolet {
        (0.0, *VISIBLE_NM.start())
    } else {
        VISIBLE_NM.into_inner()
    };
    let least_rates = [FORBIDDEN_BELOW_PER_S, 0.0];
    let seen = least_rates
        .into_iter()
        .flat_map(|rate| [(rate, band), (rate, everywhere)])
        .map(|(rate, band)| emitter.strongest_from_rate(spectrum, rate, band))
        .find(|light| *light > 0.0)
        .unwrap_or(0.0);
    if seen > 0.0 {
        spectrum.amount / seen
    } else {
        0.0
    }
}
