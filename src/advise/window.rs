//! `window`: what lies in this window, and what gets in its way?

use vocabulary::atom::Species;
use vocabulary::light::{Air, Medium, SpectralRange, SpectralWidth};
use vocabulary::spectrum::Line;

use super::emission::Conditions;
use super::error::AdviseError;
use super::judge::Judge;
use super::physics::Physics;
use super::position::{Placed, placed};
pub use super::scene::REACH_WIDTHS;
use super::scene::Scene;
use super::spectrum::Spectrum;
use super::verdict::{Interference, VerdictRange, Worst};
use crate::calc::prior::Prior;

/// Lines below this part of the light in the window need no word on their width or excitation.
const BRIGHT: f64 = 1e-6;

/// A checked question.
#[derive(Clone, Debug)]
pub struct Question {
    /// The window.
    pub range: SpectralRange,
    /// Medium that positions are shown in.
    pub medium: Medium,
    /// FWHM of the instrument.
    pub width: SpectralWidth,
    /// The light source.
    pub conditions: Conditions,
    /// Asked-for species of which nothing at all is held, as typed.
    pub not_held: Vec<String>,
}

/// A line of the answer.
#[derive(Clone, Debug)]
pub struct WindowLine {
    /// The line.
    pub line: Line,
    /// Where it is shown.
    pub placed: Placed,
    /// Index of its feature.
    pub feature: usize,
    /// Part of all rated light in the window.
    pub light_fraction: Option<f64>,
    /// What the prior for unknown rates says of its rate, where none is known.
    pub prior: Option<Prior>,
    /// Median of its light by that prior, as a part of all rated light in the window.
    pub prior_light_fraction: Option<f64>,
}

/// A feature of the answer.
#[derive(Clone, Debug)]
pub struct WindowFeature {
    /// Whose.
    pub species: Species,
    /// Where it is shown: the light-weighted position.
    pub placed: Placed,
    /// Indices of its lines.
    pub components: Vec<usize>,
    /// Mean decay rate over its upper levels in its components, s⁻¹: Σ g A / Σ g; for one
    /// component its rate.
    pub rate_per_s: Option<f64>,
    /// Relative 1 σ of it, where all parts have one.
    pub rate_relative_uncertainty: Option<f64>,
    /// Part of all rated light in the window.
    pub light_fraction: Option<f64>,
    /// Light of other species at this place over its own.
    pub interference: Option<Interference>,
    /// Light of other features of its own species at this place over its own.
    pub own_species_fraction: Option<f64>,
    /// The verdict.
    pub verdict: VerdictRange,
    /// Why it is unrated, or what else must be said.
    pub remarks: Vec<String>,
    /// The worst line of another species.
    pub worst: Option<Worst>,
    /// Where that line is shown.
    pub worst_placed: Option<Placed>,
    /// Chance that an unlisted line interferes.
    pub unlisted_chance: f64,
    /// Chance that lines without a rate, bounded by the prior for unknown rates, change the
    /// verdict; `None` where there are none.
    pub prior_chance: Option<f64>,
}

/// A species that cannot be judged, and why.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Unjudged {
    /// Species, or what was typed where nothing is held.
    pub species: String,
    /// What is missing.
    pub reason: String,
    /// Verdicts of others are `unrated` because of it.
    pub decides: bool,
    /// It does not decide, but its unlisted lines are counted as if they lay as dense as those of
    /// the stage of its element that is covered.
    pub counted: bool,
}

/// The answer.
#[derive(Clone, Debug)]
pub struct Answer {
    /// All components in the window, by wavelength.
    pub lines: Vec<WindowLine>,
    /// All features in the window, by wavelength.
    pub features: Vec<WindowFeature>,
    /// Species that cannot be judged.
    pub unrated: Vec<Unjudged>,
    /// Species covered here, and the part of their strongest line down to which they are.
    pub complete_down_to: Vec<(Species, f64)>,
    /// Species whose partition function is a lower bound.
    pub lower_bounds: Vec<Species>,
    /// Lines without a stated rate uncertainty were used.
    pub unstated_rates: bool,
    /// A position in air needed an extrapolated index.
    pub air_extrapolated: bool,
    /// What the answer rests on.
    pub physics: Physics,
}

/// Light below which a line that no table lists is not shown unless asked for, as a part of that of the
/// brightest feature, by the prior for unknown rates.
pub const FAINT: f64 = 1e-3;

impl Answer {
    /// Whether a feature is made of lines alone that no table lists and nobody rates: they follow
    /// from levels.
    pub fn is_unlisted(&self, feature: &WindowFeature) -> bool {
        (feature.components.iter()).all(|&l| self.lines[l].line.is_unlisted_and_unrated())
    }

    /// Whether a feature is unlisted and, by the prior for unknown rates, below [`FAINT`] of the
    /// brightest.
    pub fn is_faint(&self, feature: &WindowFeature) -> bool {
        let prior = |f: &WindowFeature| -> Option<f64> {
            let parts = f.components.iter().map(|&l| &self.lines[l]);
            parts.map(|l| l.prior_light_fraction).sum()
        };
        let brightest = (self.features.iter())
            .filter_map(|f| f.light_fraction)
            .fold(0.0, f64::max);
        self.is_unlisted(feature) && prior(feature).is_some_and(|light| light < FAINT * brightest)
    }
}

/// Answers the question from what is held of each species: lines from at least [`REACH_WIDTHS`]
/// instrument widths around the window.
///
/// # Errors
/// Conditions under which populations or profiles cannot be computed; air beyond its bounds.
pub fn answer(question: &Question, spectra: &[Spectrum]) -> Result<Answer, AdviseError> {
    let scene = Scene::new(spectra, &question.conditions, question.width)?;
    let judge = Judge::new(
        &scene,
        question.range.centre_vacuum_nm(),
        !question.not_held.is_empty(),
    );
    let inside = |nm: f64| question.range.contains_per_cm(1e7 / nm);
    let is_there = |&f: &usize| !scene.emitters[scene.features[f].spectrum].is_absent;
    let chosen: Vec<usize> = (0..scene.features.len())
        .filter(is_there)
        .filter(|&f| {
            scene.features[f]
                .components
                .iter()
                .any(|&c| inside(scene.emissions[c].nm))
        })
        .collect();
    let total: f64 = chosen.iter().filter_map(|&f| scene.features[f].light).sum();
    let air = Air::standard();
    let mut features = Vec::with_capacity(chosen.len());
    let mut lines = Vec::new();
    for &index in &chosen {
        let feature = judge.feature(index, total, question.medium, air)?;
        let position = features.len();
        lines.extend(components(
            &scene,
            index,
            position,
            total,
            question.medium,
            air,
        )?);
        features.push(feature);
    }
    in_order(&mut features, &mut lines);
    let unrated = judge.unjudged(&question.not_held, None);
    let bright = |&&c: &&usize| scene.emissions[c].light.is_none_or(|l| l >= BRIGHT * total);
    let components = chosen.iter().flat_map(|&f| &scene.features[f].components);
    let components = components.filter(bright);
    let physics = Physics::of(&scene, question.conditions.model, components.copied());
    let emits = |s: usize| chosen.iter().any(|&f| scene.features[f].spectrum == s);
    Ok(Answer {
        unrated,
        complete_down_to: judge.complete_down_to(),
        lower_bounds: (0..spectra.len())
            .filter(|&s| emits(s) && scene.emitters[s].is_lower_bound())
            .map(|s| spectra[s].species)
            .collect(),
        unstated_rates: lines.iter().any(|l: &WindowLine| {
            l.line.rate_per_s.is_some() && l.line.rate_relative_uncertainty.is_none()
        }),
        physics,
        air_extrapolated: lines.iter().any(|l| l.placed.extrapolated),
        lines,
        features,
    })
}

/// Features by wavelength, lines by wavelength, their indices set accordingly.
fn in_order(features: &mut Vec<WindowFeature>, lines: &mut [WindowLine]) {
    let mut order: Vec<usize> = (0..features.len()).collect();
    order.sort_by(|&a, &b| {
        features[a]
            .placed
            .vacuum_nm
            .total_cmp(&features[b].placed.vacuum_nm)
    });
    let mut rank = vec![0; order.len()];
    for (new, &old) in order.iter().enumerate() {
        rank[old] = new;
    }
    for line in lines.iter_mut() {
        line.feature = rank[line.feature];
    }
    lines.sort_by(|a, b| {
        a.placed
            .vacuum_nm
            .total_cmp(&b.placed.vacuum_nm)
            .then(a.feature.cmp(&b.feature))
    });
    let mut old: Vec<Option<WindowFeature>> = features.drain(..).map(Some).collect();
    features.extend(order.iter().filter_map(|&i| old[i].take()));
    for (index, feature) in features.iter_mut().enumerate() {
        feature.components = (0..lines.len())
            .filter(|&l| lines[l].feature == index)
            .collect();
    }
}

fn components(
    scene: &Scene<'_>,
    feature: usize,
    position: usize,
    total: f64,
    medium: Medium,
    air: &Air,
) -> Result<Vec<WindowLine>, AdviseError> {
    let place = |&index: &usize| {
        let emission = &scene.emissions[index];
        let line = emission.line;
        Ok(WindowLine {
            placed: placed(
                line.wavenumber_per_cm,
                line.wavenumber_uncertainty_per_cm,
                medium,
                air,
            )?,
            feature: position,
            light_fraction: emission.light.filter(|_| total > 0.0).map(|l| l / total),
            prior: emission.prior.and_then(|p| p.rate),
            prior_light_fraction: emission
                .prior
                .filter(|_| total > 0.0)
                .map(|p| p.light / total),
            line: line.clone(),
        })
    };
    scene.features[feature]
        .components
        .iter()
        .map(place)
        .collect()
}
