//! Finding the line that somebody means.

use vocabulary::atom::{Species, SpeciesRequest};
use vocabulary::light::{Air, Medium};

use super::error::AdviseError;
use super::position::placed_or_vacuum;
use super::scene::Scene;

/// How far from the typed position a line may lie, nm, where the instrument is narrower.
pub(super) const LEAST_TOLERANCE_NM: f64 = 0.05;
/// How many lines are offered where none is found.
const OFFERED: usize = 3;

/// A line as somebody names it.
#[derive(Clone, Debug)]
pub struct Wanted {
    /// Whose; `None`: of any species of the question.
    pub request: Option<SpeciesRequest>,
    /// Where, vacuum nm.
    pub vacuum_nm: f64,
    /// As it was typed.
    pub typed: String,
}

impl Wanted {
    fn means(&self, species: Species) -> bool {
        self.request.is_none_or(|r| r.matches(species))
    }
}

/// The feature that is meant: of a named species the one with the line nearest to the position;
/// else the brightest within reach.
///
/// # Errors
/// No line in reach: the nearest ones are offered.
pub(super) fn find(
    scene: &Scene<'_>,
    wanted: &Wanted,
    reach_nm: f64,
    medium: Medium,
    air: &Air,
) -> Result<usize, AdviseError> {
    let near = scene
        .around(wanted.vacuum_nm, reach_nm)
        .filter(|&i| wanted.means(scene.spectra[scene.emissions[i].spectrum].species));
    let distance = |i: usize| (scene.emissions[i].nm - wanted.vacuum_nm).abs();
    let light = |i: usize| scene.emissions[i].light.unwrap_or(-1.0);
    let found = if wanted.request.is_some() {
        near.min_by(|&a, &b| distance(a).total_cmp(&distance(b)))
    } else {
        near.max_by(|&a, &b| {
            light(a)
                .total_cmp(&light(b))
                .then(distance(b).total_cmp(&distance(a)))
        })
    };
    match found {
        Some(emission) => Ok(scene.emissions[emission].feature),
        None => Err(AdviseError::NoSuchLine {
            wanted: wanted.typed.clone(),
            reach_nm,
            nearest: nearest(scene, wanted, medium, air)?,
        }),
    }
}

/// The nearest lines that are held, in words: `He I 587.562 nm (air)`.
fn nearest(
    scene: &Scene<'_>,
    wanted: &Wanted,
    medium: Medium,
    air: &Air,
) -> Result<Vec<String>, AdviseError> {
    let mut all: Vec<(f64, Species)> = scene
        .spectra
        .iter()
        .filter(|s| wanted.means(s.species))
        .flat_map(|s| {
            s.strengths
                .iter()
                .map(|l| (1e7 / l.wavenumber_per_cm, s.species))
        })
        .collect();
    all.sort_by(|a, b| {
        let distance = |nm: f64| (nm - wanted.vacuum_nm).abs();
        distance(a.0).total_cmp(&distance(b.0))
    });
    let mut words: Vec<String> = Vec::new();
    for (nm, species) in all {
        let at = placed_or_vacuum(1e7 / nm, 0.0, medium, air)?;
        let word = format!("{species} {:.3} nm ({})", at.wavelength_nm, at.medium);
        if !words.contains(&word) {
            words.push(word);
        }
        if words.len() == OFFERED {
            break;
        }
    }
    Ok(words)
}

/// The brightest component of a feature, an index into the scene's emissions.
pub(super) fn strongest(scene: &Scene<'_>, feature: usize) -> usize {
    let components = &scene.features[feature].components;
    let light = |i: usize| scene.emissions[i].light.unwrap_or(-1.0);
    components
        .iter()
        .copied()
        .max_by(|&a, &b| light(a).total_cmp(&light(b)).then(b.cmp(&a)))
        .unwrap_or(components[0])
}
