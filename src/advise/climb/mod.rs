//! The answer of `climb`: step-wise excitation through real levels within given laser ranges.

mod route;
mod series;
mod target;

use std::sync::Arc;

use vocabulary::atom::Species;
use vocabulary::spectrum::{Level, PositionOrigin, RateOrigin};

pub use series::{
    HIGHEST_N, Joint, RydbergLevel, RydbergSeries, one_electron_series, read_series, series_of,
};
pub use target::{Target, levels_at, named_levels, nearest_levels};

use super::Spectrum;
use super::tune::{Laser, LaserError, Populated};

/// Most steps of a route.
pub const MOST_STEPS: usize = 3;

/// What is asked.
#[derive(Clone, Debug)]
pub struct Question {
    /// Light sources; each drives one step at most.
    pub lasers: Vec<Laser>,
    /// Where the routes end.
    pub target: Target,
    /// The target as typed.
    pub typed_target: String,
    /// Temperature of the gas, K.
    pub temperature_k: f64,
    /// Start from metastable levels too.
    pub metastable: bool,
}

/// A line of another species that is close to a step.
#[derive(Clone, Debug, PartialEq)]
pub struct Coincidence {
    /// Whose.
    pub species: Species,
    /// Distance, cm⁻¹; positive where it lies above the step.
    pub offset_per_cm: f64,
}

/// Where a step ends.
#[derive(Clone, Debug, PartialEq)]
pub enum StepEnd {
    /// A held level.
    Level(Arc<Level>),
    /// Members of a Rydberg series, with the vacuum wavenumber (cm⁻¹) of the step to each.
    Rydberg {
        /// Term of the series.
        term: String,
        /// Orbital momentum.
        l: u32,
        /// J, as written.
        j: String,
        /// Member and wavenumber.
        members: Vec<(RydbergLevel, f64)>,
    },
    /// Above the series limit.
    Continuum {
        /// Energy of the electron at the two ends of what the laser reaches, eV.
        excess_ev: (f64, f64),
        /// Vacuum wavenumber that just reaches the limit, cm⁻¹.
        threshold_per_cm: f64,
    },
}

/// One step of a route.
#[derive(Clone, Debug, PartialEq)]
pub struct Step {
    /// The laser that drives it.
    pub laser: usize,
    /// Where it begins.
    pub from: Arc<Level>,
    /// Where it ends.
    pub end: StepEnd,
    /// Vacuum wavenumber and its 1 σ, cm⁻¹: of the line, of the lowest member of a series, or of the
    /// least photon of the laser that ionises.
    pub wavenumber_per_cm: (f64, f64),
    /// Rate of the line, s⁻¹.
    pub rate_per_s: Option<f64>,
    /// Where the rate comes from.
    pub rate_origin: Option<RateOrigin>,
    /// Absorption oscillator strength; of a series that of the lowest member reached.
    pub oscillator_strength: Option<f64>,
    /// 1 σ of rate and oscillator strength over themselves.
    pub strength_relative_uncertainty: Option<f64>,
    /// The oscillator strength was scaled as n*⁻³ from a member with a held rate.
    pub scaled: bool,
    /// Distance from the middle of the laser's range, as a fraction of half the range; 0 to 1.
    pub mismatch: f64,
    /// Lines of other species close by.
    pub coincidences: Vec<Coincidence>,
    /// Sources of position and rate.
    pub sources: Vec<Arc<str>>,
    /// How the position came about.
    pub position_origin: PositionOrigin,
}

/// A way up.
#[derive(Clone, Debug, PartialEq)]
pub struct Route {
    /// Its steps.
    pub steps: Vec<Step>,
    /// Product over the steps of f (1 − mismatch²/2); a last step into the continuum counts by its
    /// mismatch alone. `None` where a strength is not known.
    pub score: Option<f64>,
}

/// How far the lasers lead where no route ends at the target.
#[derive(Clone, Debug, PartialEq)]
pub struct Short {
    /// Excited levels that are reached, by energy.
    pub reached: Vec<Arc<Level>>,
    /// The step to the target that comes nearest to one of the ranges: where it begins, and the
    /// least or only vacuum wavenumber that it takes, cm⁻¹.
    pub missing: Option<(Arc<Level>, f64)>,
}

/// The answer.
#[derive(Clone, Debug, Default)]
pub struct Answer {
    /// Routes, the best first; those with an unknown strength last.
    pub routes: Vec<Route>,
    /// Where there is no route: how far the lasers lead.
    pub short: Option<Short>,
}

/// Answers the question from a spectrum with all its lines, and the spectra of other species with
/// their lines in the laser ranges.
///
/// # Errors
/// A series that cannot be computed, a missing limit, ranges in which no line lies.
pub fn answer(
    question: &Question,
    spectrum: &Spectrum,
    others: &[Spectrum],
) -> Result<Answer, LaserError> {
    let populated = Populated::new(spectrum, question.temperature_k, question.metastable)?;
    let search = route::Search::new(question, spectrum, &populated)?;
    let mut routes = search.routes();
    if routes.is_empty() && !search.any_first_step() {
        return Err(LaserError::NoOverlap {
            species: spectrum.species,
            nearest: search.nearest_first_step(),
        });
    }
    let absorbers = route::absorbers(question, others)?;
    for step in routes.iter_mut().flat_map(|r| &mut r.steps) {
        step.coincidences = route::coincidences(step, &absorbers, question, spectrum.mass_u);
    }
    routes.sort_by(|a, b| b.score.unwrap_or(-1.0).total_cmp(&a.score.unwrap_or(-1.0)));
    let short = routes.is_empty().then(|| search.short());
    Ok(Answer { routes, short })
}
