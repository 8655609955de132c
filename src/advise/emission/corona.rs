//! Populations of the corona model: excited by electrons from levels that hold the atoms, decaying
//! by radiation alone.

use vocabulary::light::constants::RYDBERG_PER_CM;

use super::conditions::{Conditions, LevelName, Metastable};
use crate::advise::climb::{levels_at, named_levels, nearest_levels};
use crate::advise::error::AdviseError;
use crate::advise::spectrum::Spectrum;
use crate::calc::plasma::{
    CoronalEmission, CoronalLevel, CoronalLine, Target, coronal_emission, excitation_by_strength,
    excitation_uncertainty_factor, unknown_collision_strength,
};

/// Levels of one species and how electrons populate them.
#[derive(Clone, Debug)]
pub struct Corona {
    /// Levels that hold the atoms, with the fraction in each.
    held: Vec<(usize, f64)>,
    /// By level, what electrons put there; `None` where nothing in the model does, or where
    /// excitation that the model does not know usually does more.
    fed: Vec<Option<Fed>>,
    /// By level, the population that an unknown collision strength would give, m³.
    estimates: Vec<f64>,
    electron_density_per_m3: Option<f64>,
}

/// An excited level.
#[derive(Clone, Copy, Debug)]
struct Fed {
    /// Atoms in it per atom of the species and per electron per m³, m³.
    population_m3: f64,
    /// Relative 1 σ of it.
    relative_sigma: f64,
    /// No allowed transition from a populated level leads there: cascades alone feed it.
    by_cascades: bool,
}

impl Corona {
    /// Populations of a species; `None` where its ground level has no weight.
    ///
    /// # Errors
    /// A metastable level that is not held, or levels that cannot be counted.
    pub fn new(spectrum: &Spectrum, conditions: &Conditions) -> Result<Option<Self>, AdviseError> {
        let metastables: Vec<&Metastable> = conditions
            .details
            .metastables
            .iter()
            .filter(|m| m.species == spectrum.species)
            .collect();
        let shares: Vec<f64> = metastables.iter().map(|m| m.fraction).collect();
        let mut groups = Vec::with_capacity(metastables.len());
        for metastable in &metastables {
            groups.push(levels_of(spectrum, metastable)?);
        }
        let of_plasma = |cause| AdviseError::Plasma {
            species: spectrum.species,
            cause,
        };
        let kt = conditions.kt_per_cm;
        let Some(ground) = ground_term(spectrum, kt) else {
            return Ok(None);
        };
        let model = Model::new(spectrum, ground, groups);
        let base = model.emission(&shares, kt).map_err(of_plasma)?;
        let density = conditions.electron_density_per_m3;
        let most = model.most(kt, density);
        let mut estimates = model.estimates(&shares, kt, &base).map_err(of_plasma)?;
        for (estimate, most) in estimates.iter_mut().zip(&most) {
            *estimate = estimate.min(*most);
        }
        let mut corona = Self {
            held: model.held(&shares),
            estimates,
            fed: Vec::new(),
            electron_density_per_m3: density,
        };
        corona.fed = corona.feeds(&base, spectrum, &most);
        for (index, metastable) in metastables.iter().enumerate() {
            if metastable.relative_sigma > 0.0 {
                let mut more = shares.clone();
                more[index] *= 1.0 + metastable.relative_sigma;
                let moved = model.emission(&more, kt).map_err(of_plasma)?;
                corona.widen(&base, &moved);
            }
        }
        Ok(Some(corona))
    }

    fn feeds(&self, base: &CoronalEmission, spectrum: &Spectrum, most: &[f64]) -> Vec<Option<Fed>> {
        let target = if spectrum.species.charge() == 0 {
            Target::Neutral
        } else {
            Target::Ion
        };
        let factor_sigma = relative_of_factor(excitation_uncertainty_factor(target));
        (0..base.feed_m3_per_s.len())
            .map(|level| {
                let (feed, decay) = (base.feed_m3_per_s[level], base.decay_per_s[level]);
                if feed <= 0.0 || decay <= 0.0 || self.held.iter().any(|h| h.0 == level) {
                    return None;
                }
                let direct = base.direct_m3_per_s[level];
                let cascade = feed - direct;
                // Without an allowed way what the model leaves out counts as an uncertainty; where
                // that is more than the cascades, nothing is known.
                let left_out = if direct > 0.0 {
                    0.0
                } else {
                    self.estimates[level] * decay
                };
                if left_out > feed {
                    return None;
                }
                let sigma = (direct * factor_sigma)
                    .hypot(cascade * factor_sigma)
                    .hypot(left_out);
                Some(Fed {
                    population_m3: (feed / decay).min(most[level]),
                    relative_sigma: sigma / feed,
                    by_cascades: direct == 0.0,
                })
            })
            .collect()
    }

    /// Adds what another population of a metastable level changes.
    fn widen(&mut self, base: &CoronalEmission, moved: &CoronalEmission) {
        for (level, fed) in self.fed.iter_mut().enumerate() {
            if let Some(fed) = fed {
                let change = moved.feed_m3_per_s[level] / base.feed_m3_per_s[level] - 1.0;
                fed.relative_sigma = fed.relative_sigma.hypot(change);
            }
        }
    }

    /// Population of a level per electron per m³, m³; of one that holds the atoms where the
    /// electron density is known.
    pub fn population_m3(&self, level: u32) -> Option<f64> {
        let index = level as usize;
        if let Some(held) = self.held.iter().find(|h| h.0 == index) {
            return Some(held.1 / self.electron_density_per_m3?);
        }
        Some(self.fed.get(index)?.as_ref()?.population_m3)
    }

    /// The part of the atoms in a level, where known.
    pub fn fraction(&self, level: u32) -> Option<f64> {
        let held = self.held.iter().find(|h| h.0 == level as usize);
        match held {
            Some(held) => Some(held.1),
            None => Some(self.population_m3(level)? * self.electron_density_per_m3?),
        }
    }

    /// Relative 1 σ of the population of a level.
    pub fn relative_sigma(&self, level: u32) -> f64 {
        let fed = self.fed.get(level as usize).and_then(Option::as_ref);
        fed.map_or(0.0, |f| f.relative_sigma)
    }

    /// Whether only cascades feed a level.
    pub fn is_fed_by_cascades(&self, level: u32) -> bool {
        let fed = self.fed.get(level as usize).and_then(Option::as_ref);
        fed.is_some_and(|f| f.by_cascades)
    }

    /// The population (m³) that an unknown collision strength would give to a level which nothing
    /// in the model feeds, or cascades less than that would; `None` for any other.
    pub fn estimate_m3(&self, level: u32) -> Option<f64> {
        let index = level as usize;
        let free = self.fed.get(index)?.is_none() && !self.held.iter().any(|h| h.0 == index);
        Some(self.estimates[index]).filter(|e| free && *e > 0.0)
    }
}

/// The relative 1 σ of a log-normal whose 1 σ is a factor: √(e^(ln² f) − 1).
pub(super) fn relative_of_factor(factor: f64) -> f64 {
    factor.ln().powi(2).exp_m1().sqrt()
}

/// Effective quantum number up to which a usual collision strength holds.
const FIRST_EXCITED: f64 = 2.0;

/// Levels with the part of their group's atoms that each holds.
type Group = Vec<(usize, f64)>;

/// Levels of the ground term, populated by weight and Boltzmann.
fn ground_term(spectrum: &Spectrum, kt_per_cm: f64) -> Option<Group> {
    let ground = spectrum.levels.first()?;
    let same_term = |level: &vocabulary::spectrum::Level| {
        level.number == ground.number
            || (ground.term.is_some()
                && (&level.term, &level.configuration) == (&ground.term, &ground.configuration))
    };
    let weighted: Group = spectrum
        .levels
        .iter()
        .enumerate()
        .filter(|(_, level)| same_term(level))
        .filter_map(|(i, l)| Some((i, l.g? * (-l.energy_per_cm / kt_per_cm).exp())))
        .collect();
    (!weighted.is_empty()).then(|| shared(weighted))
}

/// Levels of a metastable's name, by weight.
fn levels_of(spectrum: &Spectrum, metastable: &Metastable) -> Result<Group, AdviseError> {
    let (found, typed, energy) = match &metastable.level {
        LevelName::Label(label) => (named_levels(&spectrum.levels, label), label.clone(), None),
        LevelName::Energy(energy) => (
            levels_at(&spectrum.levels, *energy),
            format!("{energy} cm⁻¹"),
            Some(*energy),
        ),
    };
    let weighted: Group = found
        .iter()
        .filter_map(|l| Some((l.number as usize, l.g?)))
        .collect();
    if weighted.is_empty() {
        return Err(AdviseError::NoSuchLevel {
            species: spectrum.species,
            nearest: nearest_levels(&spectrum.levels, &typed, energy),
            typed,
        });
    }
    Ok(shared(weighted))
}

fn shared(mut weighted: Group) -> Group {
    let total: f64 = weighted.iter().map(|w| w.1).sum();
    for level in &mut weighted {
        level.1 /= total;
    }
    weighted
}

/// What the corona model needs of a species.
struct Model {
    levels: Vec<CoronalLevel>,
    lines: Vec<CoronalLine>,
    ground: Group,
    metastables: Vec<Group>,
    charge: u8,
    limit_per_cm: Option<f64>,
}

impl Model {
    fn new(spectrum: &Spectrum, ground: Group, metastables: Vec<Group>) -> Self {
        let levels: Vec<CoronalLevel> = spectrum
            .levels
            .iter()
            .map(|l| CoronalLevel {
                energy_per_cm: l.energy_per_cm,
                weight: l.g.unwrap_or(0.0),
            })
            .collect();
        let holds = |level: usize| {
            let mut groups = std::iter::once(&ground).chain(&metastables);
            groups.any(|g| g.iter().any(|h| h.0 == level))
        };
        let bound = |energy: f64| spectrum.limit_per_cm.is_none_or(|limit| energy < limit);
        let line = |s: &vocabulary::spectrum::Strength| {
            let (lower, upper) = (s.lower? as usize, s.upper? as usize);
            let (low, high) = (levels.get(lower)?, levels.get(upper)?);
            let sound = low.weight > 0.0
                && high.weight > 0.0
                && high.energy_per_cm > low.energy_per_cm
                && bound(high.energy_per_cm);
            let excitation = holds(lower)
                .then(|| Target::of_levels(&spectrum.levels[lower], &spectrum.levels[upper]))
                .flatten();
            sound.then_some(CoronalLine {
                lower,
                upper,
                rate_per_s: s.rate_per_s?,
                excitation,
            })
        };
        Self {
            lines: spectrum.strengths.iter().filter_map(line).collect(),
            levels,
            ground,
            metastables,
            charge: spectrum.species.charge(),
            limit_per_cm: spectrum.limit_per_cm,
        }
    }

    /// Levels that hold the atoms; `shares` are the fractions of the metastable groups.
    fn held(&self, shares: &[f64]) -> Group {
        let rest = (1.0 - shares.iter().sum::<f64>()).max(0.0);
        let groups = std::iter::once((&self.ground, rest))
            .chain(self.metastables.iter().zip(shares.iter().copied()));
        groups
            .flat_map(|(group, share)| {
                group
                    .iter()
                    .map(move |&(level, part)| (level, part * share))
            })
            .collect()
    }

    fn emission(
        &self,
        shares: &[f64],
        kt_per_cm: f64,
    ) -> Result<CoronalEmission, crate::calc::plasma::PlasmaError> {
        coronal_emission(&self.levels, &self.lines, &self.held(shares), kt_per_cm)
    }

    /// By level, the population (m³) beyond which collisions would take atoms out as fast as they
    /// bring them: that of LTE at the electron density; without one there is no bound.
    fn most(&self, kt_per_cm: f64, density_per_m3: Option<f64>) -> Vec<f64> {
        let Some(density) = density_per_m3 else {
            return vec![f64::INFINITY; self.levels.len()];
        };
        let weight = |l: &CoronalLevel| l.weight * (-l.energy_per_cm / kt_per_cm).exp();
        let ground: f64 = self.ground.iter().map(|h| weight(&self.levels[h.0])).sum();
        let bound = |l: &CoronalLevel| weight(l) / ground / density;
        self.levels.iter().map(bound).collect()
    }

    /// The usual collision strength into a level: along a series it falls as n*⁻³, as all
    /// strengths do.
    fn usual_strength(&self, level: usize) -> f64 {
        let strength = unknown_collision_strength(self.charge);
        let Some(limit) = self.limit_per_cm else {
            return strength;
        };
        let binding = (limit - self.levels[level].energy_per_cm).max(1.0);
        let core = f64::from(self.charge) + 1.0;
        let n = core * (RYDBERG_PER_CM / binding).sqrt();
        strength * (FIRST_EXCITED / n).powi(3).min(1.0)
    }

    /// By level, the population (m³) that a collision strength of the usual size would give.
    fn estimates(
        &self,
        shares: &[f64],
        kt_per_cm: f64,
        base: &CoronalEmission,
    ) -> Result<Vec<f64>, crate::calc::plasma::PlasmaError> {
        let rest = (1.0 - shares.iter().sum::<f64>()).max(0.0);
        let groups: Vec<(f64, f64, f64)> = std::iter::once((&self.ground, rest))
            .chain(self.metastables.iter().zip(shares.iter().copied()))
            .map(|(group, share)| {
                let weight = group.iter().map(|h| self.levels[h.0].weight).sum();
                let energy = group
                    .first()
                    .map_or(0.0, |h| self.levels[h.0].energy_per_cm);
                (energy, weight, share)
            })
            .collect();
        let mut out = vec![0.0; self.levels.len()];
        for (level, decay) in base.decay_per_s.iter().enumerate() {
            if *decay <= 0.0 {
                continue;
            }
            for &(from, weight, share) in &groups {
                let energy = self.levels[level].energy_per_cm - from;
                if energy > 0.0 && share > 0.0 {
                    let strength = self.usual_strength(level);
                    let rate = excitation_by_strength(energy, strength, weight, kt_per_cm)?;
                    out[level] += share * rate / decay;
                }
            }
        }
        Ok(out)
    }
}
