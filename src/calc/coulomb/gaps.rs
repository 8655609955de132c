//! What the calculator adds to the levels and lines that are held.

use std::collections::BTreeSet;

use super::{
    Active, CorePolarisation, CoulombError, LsState, Orbital, Rate, RateClass, RateModel,
    effective_quantum_number, rate,
};
use crate::calc::series::label::bare_term;
use crate::calc::series::polarisation::{CorePolarisability, LOWEST_L, NonPenetrating};
use crate::calc::series::{
    Core, LabelledLevel, Limit, Prediction, Series, SeriesError, SeriesFit, SeriesInput, SeriesKey,
    fit, group_series, orbital_letter, outer_electron,
};

/// What has to be known of a species.
#[derive(Clone, Debug, PartialEq)]
pub struct Species<'a> {
    /// Element symbol, for the polarisability of the core.
    pub element: &'a str,
    /// Charge that the outer electron sees: the stage, 1 for a neutral atom.
    pub core_charge: u32,
    /// Rydberg constant of the nucleus, cm⁻¹.
    pub rydberg_per_cm: f64,
    /// Ionisation energy, cm⁻¹: the limit of the series on the ground core.
    pub limit_per_cm: f64,
    /// 1 σ of the limit above the ground level, cm⁻¹.
    pub limit_sigma_per_cm: f64,
}

/// A level that the calculator made.
#[derive(Clone, Debug, PartialEq)]
pub struct ComputedLevel {
    /// Configuration, in the form of the members of its series.
    pub configuration: String,
    /// Term.
    pub term: String,
    /// Twice J.
    pub twice_j: u16,
    /// Orbital angular momentum of the outer electron.
    pub l: u32,
    /// Energy, quantum defect, uncertainty and method.
    pub prediction: Prediction,
}

impl ComputedLevel {
    /// The level as the grouping and [`predict_lines`] take it.
    pub fn labelled(&self) -> LabelledLevel<'_> {
        LabelledLevel {
            energy_per_cm: self.prediction.energy_per_cm,
            uncertainty_per_cm: self.prediction.uncertainty_per_cm,
            configuration: &self.configuration,
            term: &self.term,
            twice_j: self.twice_j,
        }
    }
}

/// One series of a species: its fit, or why there is none, and the levels that were missing.
#[derive(Clone, Debug, PartialEq)]
pub struct PredictedSeries {
    /// Core, l, term and J.
    pub key: SeriesKey,
    /// The fit, where levels are held; `None` for series made from the polarisation of the core.
    pub fit: Option<Result<SeriesFit, SeriesError>>,
    /// Levels up to the n asked for that are not held.
    pub levels: Vec<ComputedLevel>,
}

/// Largest l of the series that the polarisation of the core makes.
const MOST_L: u32 = 6;

/// Fits every series of a species and predicts its missing levels up to `most_n`.
///
/// Series on excited or split cores, with too few members or perturbed ones carry the reason
/// and no levels. Where an alkali-like ion holds nothing of a series with l from 3 to 6, it is made from
/// the polarisation of the core. The result depends on the levels alone, not on their order.
pub fn predict_series(
    levels: &[LabelledLevel<'_>],
    species: &Species<'_>,
    most_n: u32,
) -> Vec<PredictedSeries> {
    predict_scaled_series(levels, &[], species, most_n)
}

/// [`predict_series`] of levels whose tables have uncertain scales: `scales_per_cm` holds, for each
/// level, by how much its table as a whole may be off the ground level (1 σ, cm⁻¹; none counts as
/// 0). A series is fitted to a limit that is as uncertain against its own members, and no other
/// series feels it.
pub fn predict_scaled_series(
    levels: &[LabelledLevel<'_>],
    scales_per_cm: &[f64],
    species: &Species<'_>,
    most_n: u32,
) -> Vec<PredictedSeries> {
    let groups = group_series(levels);
    let mut found: Vec<PredictedSeries> = groups
        .iter()
        .map(|series| {
            let scale_per_cm = scale_of(&series.key, levels, scales_per_cm);
            let against = Species {
                limit_sigma_per_cm: species.limit_sigma_per_cm.hypot(scale_per_cm),
                ..species.clone()
            };
            from_members(series, &against, most_n)
        })
        .collect();
    found.extend(non_penetrating(&groups, species, most_n));
    found
}

/// The widest scale among the members of a series; the ground level is on every scale.
fn scale_of(key: &SeriesKey, levels: &[LabelledLevel<'_>], scales_per_cm: &[f64]) -> f64 {
    let is_member = |level: &LabelledLevel<'_>| {
        outer_electron(level.configuration).is_some_and(|outer| {
            outer.core == key.core
                && outer.l == key.l
                && level.twice_j == key.twice_j
                && bare_term(level.term) == key.term
        })
    };
    (levels.iter().zip(scales_per_cm))
        .filter(|(level, _)| level.energy_per_cm != 0.0 && is_member(level))
        .map(|(_, scale)| *scale)
        .fold(0.0, f64::max)
}

fn from_members(series: &Series, species: &Species<'_>, most_n: u32) -> PredictedSeries {
    let fitted = series
        .core_on_ground()
        .and_then(|core| fit(&input(series, species, core)));
    let levels = match &fitted {
        Ok(fit) => missing(series, fit, most_n),
        Err(_) => Vec::new(),
    };
    PredictedSeries {
        key: series.key.clone(),
        fit: Some(fitted),
        levels,
    }
}

fn input(series: &Series, species: &Species<'_>, core: Core) -> SeriesInput {
    SeriesInput {
        core_charge: species.core_charge,
        rydberg_per_cm: species.rydberg_per_cm,
        l: series.key.l,
        core,
        limit: Limit::Fixed {
            per_cm: species.limit_per_cm,
            sigma_per_cm: species.limit_sigma_per_cm,
        },
        members: series.members.clone(),
    }
}

fn missing(series: &Series, fit: &SeriesFit, most_n: u32) -> Vec<ComputedLevel> {
    let held: BTreeSet<u32> = series
        .members
        .iter()
        .map(|member| member.n)
        .chain(series.equivalent.iter().chain(&series.contested).copied())
        .collect();
    let lowest = fit.used.first().copied().unwrap_or(u32::MAX);
    (lowest..=most_n)
        .filter(|n| !held.contains(n))
        .filter_map(|n| Some(computed(&series.key, fit.predict(n).ok()?)))
        .collect()
}

fn computed(key: &SeriesKey, prediction: Prediction) -> ComputedLevel {
    let letter = orbital_letter(key.l).unwrap_or('?');
    ComputedLevel {
        configuration: format!("{} {}{letter}", key.core, prediction.n)
            .trim()
            .to_owned(),
        term: key.term.clone(),
        twice_j: key.twice_j,
        l: key.l,
        prediction,
    }
}

/// Series with l ≥ 3 of which nothing is held, for one electron outside a rigid core in a ¹S state.
fn non_penetrating(groups: &[Series], species: &Species<'_>, most_n: u32) -> Vec<PredictedSeries> {
    let core = groups.iter().find(|series| {
        series.core_on_ground() == Ok(Core::Rigid) && series.key.term.starts_with('2')
    });
    let known = CorePolarisability::of_core(species.element, species.core_charge);
    let (Some(core), Some(polarisability)) = (core, known) else {
        return Vec::new();
    };
    let model = NonPenetrating {
        core_charge: species.core_charge,
        rydberg_per_cm: species.rydberg_per_cm,
        limit_per_cm: species.limit_per_cm,
        limit_sigma_per_cm: species.limit_sigma_per_cm,
        core: polarisability,
    };
    (LOWEST_L..=MOST_L)
        .flat_map(|l| [2 * l - 1, 2 * l + 1].map(|twice_j| (l, twice_j)))
        .map(|(l, twice_j)| doublet_key(&core.key.core, l, twice_j))
        .filter(|key| groups.iter().all(|series| series.key != *key))
        .map(|key| PredictedSeries {
            levels: (key.l + 1..=most_n)
                .filter_map(|n| model.level(n, key.l, Some(u32::from(key.twice_j))).ok())
                .map(|prediction| computed(&key, prediction))
                .collect(),
            key,
            fit: None,
        })
        .collect()
}

fn doublet_key(core: &str, l: u32, twice_j: u32) -> SeriesKey {
    let letter = orbital_letter(l).unwrap_or('?').to_ascii_uppercase();
    let parity = if l.is_multiple_of(2) { "" } else { "o" };
    SeriesKey {
        core: core.to_owned(),
        l,
        term: format!("2{letter}{parity}"),
        twice_j: twice_j as u16,
    }
}

/// A level with its distance to the limit of its series.
///
/// The distance of a predicted member is that of its fit: the fitted limit may differ from the one
/// held elsewhere, by little, but high members are bound by little too.
#[derive(Clone, Debug, PartialEq)]
pub struct BoundLevel<'a> {
    /// The level.
    pub level: LabelledLevel<'a>,
    /// Distance to the limit, cm⁻¹.
    pub binding_per_cm: f64,
}

impl<'a> BoundLevel<'a> {
    /// A level below the ionisation energy of the species.
    pub fn of_species(level: LabelledLevel<'a>, species: &Species<'_>) -> Self {
        Self {
            binding_per_cm: species.limit_per_cm - level.energy_per_cm,
            level,
        }
    }
}

/// A line that the calculator made, between two of the levels given.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ComputedLine {
    /// Index of the lower level.
    pub lower: usize,
    /// Index of the upper level.
    pub upper: usize,
    /// The rate with its uncertainty, its integral, and the wavenumber that follows from the
    /// distances to the limit.
    pub rate: Rate,
}

/// [`predict_bound_lines`] of levels whose limit is the ionisation energy of the species.
pub fn predict_lines(levels: &[LabelledLevel<'_>], species: &Species<'_>) -> Vec<ComputedLine> {
    let levels: Vec<BoundLevel<'_>> = (levels.iter())
        .map(|level| BoundLevel::of_species(level.clone(), species))
        .collect();
    predict_bound_lines(&levels, species)
}

/// Rates of all lines between the levels that the Coulomb approximation covers: one electron
/// outside the ground core, ΔS = 0, in LS coupling, both orbitals outside the core.
///
/// Levels and pairs that it does not cover are passed over; [`line_between`] says why for one pair.
/// The lines come in the order of their levels.
pub fn predict_bound_lines(levels: &[BoundLevel<'_>], species: &Species<'_>) -> Vec<ComputedLine> {
    let labelled: Vec<LabelledLevel<'_>> = levels.iter().map(|bound| bound.level.clone()).collect();
    let grounds: BTreeSet<String> = group_series(&labelled)
        .into_iter()
        .filter(|series| series.ground_core)
        .map(|series| series.key.core)
        .collect();
    let active: Vec<Option<Candidate>> = levels
        .iter()
        .map(|level| {
            candidate(level, species)
                .ok()
                .filter(|c| grounds.contains(&c.core))
        })
        .collect();
    let polarisation = CorePolarisability::of_core(species.element, species.core_charge)
        .map(|core| CorePolarisation::new(core.dipole_a0_3));
    let mut lines = Vec::new();
    for (upper, high) in active.iter().enumerate() {
        for (lower, low) in active.iter().enumerate() {
            let (Some(high), Some(low)) = (high, low) else {
                continue;
            };
            if let Ok(rate) = between(high, low, species.core_charge, polarisation) {
                lines.push(ComputedLine { lower, upper, rate });
            }
        }
    }
    lines
}

struct Candidate {
    core: String,
    active: Active,
}

fn candidate(bound: &BoundLevel<'_>, species: &Species<'_>) -> Result<Candidate, CoulombError> {
    let level = &bound.level;
    let outer = outer_electron(level.configuration).ok_or_else(|| CoulombError::Label {
        label: level.configuration.to_owned(),
    })?;
    // Of equivalent electrons only s² is simple: its coefficient of parentage is 1.
    if outer.occupancy > 2 || (outer.occupancy == 2 && outer.l > 0) {
        return Err(CoulombError::Equivalent {
            configuration: level.configuration.to_owned(),
            occupancy: outer.occupancy,
        });
    }
    let effective = effective_quantum_number(
        species.core_charge,
        species.rydberg_per_cm,
        level.energy_per_cm + bound.binding_per_cm,
        level.energy_per_cm,
    )?;
    Ok(Candidate {
        active: Active {
            // Of two levels near their limits only the distances tell how far they are apart.
            energy_per_cm: -bound.binding_per_cm,
            state: LsState::from_labels(&outer.core, outer.l, level.term, level.twice_j)?,
            orbital: Orbital::new(effective, outer.l)?,
            occupancy: outer.occupancy,
        },
        core: outer.core,
    })
}

fn between(
    high: &Candidate,
    low: &Candidate,
    core_charge: u32,
    polarisation: Option<CorePolarisation>,
) -> Result<Rate, CoulombError> {
    let (a, b) = (&high.active, &low.active);
    if a.orbital.l.abs_diff(b.orbital.l) != 1 || a.energy_per_cm <= b.energy_per_cm {
        return Err(CoulombError::Forbidden {
            rule: "l changes by other than one, or the upper level is the lower one",
        });
    }
    if high.core != low.core {
        return Err(CoulombError::CoreChanges {
            upper: high.core.clone(),
            lower: low.core.clone(),
        });
    }
    let class = RateClass::of_jump(&high.core, a.orbital.l, b.orbital.l)?;
    rate(core_charge, a, b, polarisation, RateModel::of_class(class))
}

/// Rate of the line between two levels whose limit is the ionisation energy of the species, or
/// why there is none.
///
/// # Errors
/// As [`bound_line_between`].
pub fn line_between(
    upper: &LabelledLevel<'_>,
    lower: &LabelledLevel<'_>,
    species: &Species<'_>,
) -> Result<Rate, CoulombError> {
    let [upper, lower] = [upper, lower].map(|level| BoundLevel::of_species(level.clone(), species));
    bound_line_between(&upper, &lower, species)
}

/// Rate of the line between two levels, or why there is none.
///
/// # Errors
/// [`CoulombError`]: labels that show no single electron in LS coupling, cores that differ or are open, a
/// selection rule, an orbital inside the core.
pub fn bound_line_between(
    upper: &BoundLevel<'_>,
    lower: &BoundLevel<'_>,
    species: &Species<'_>,
) -> Result<Rate, CoulombError> {
    let polarisation = CorePolarisability::of_core(species.element, species.core_charge)
        .map(|core| CorePolarisation::new(core.dipole_a0_3));
    let (high, low) = (candidate(upper, species)?, candidate(lower, species)?);
    between(&high, &low, species.core_charge, polarisation)
}
