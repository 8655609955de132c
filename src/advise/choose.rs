//! `passband choose`: which filter isolates a line best?

use vocabulary::light::{Air, SpectralWidth};

use super::error::AdviseError;
use super::passband::{self, Question as PassbandQuestion, View};
use super::scene::Scene;
use super::spectrum::Spectrum;
use super::target::find;
use super::verdict::Verdict;
use crate::calc::filter::{Filter, Illumination, Rays, SeenFilter};

/// A filter that can be had.
#[derive(Clone, Debug)]
pub struct Offered {
    /// What it is called, where it comes from a list.
    pub name: Option<String>,
    /// The filter.
    pub filter: Filter,
}

/// A checked question.
#[derive(Clone, Debug)]
pub struct Question {
    /// Target (which must be given), light source, beam, detector; its filter, scans and background
    /// serve the answer about the best filter.
    pub passband: PassbandQuestion,
    /// Filters for each tilt (degrees) that they may be used at.
    pub candidates: Vec<(f64, Vec<Offered>)>,
    /// How far the passband may wander to either side, nm: the worst of both ends and the middle
    /// counts.
    pub wander_nm: f64,
}

/// A filter at a tilt, and what it gives at its worst within the wander.
#[derive(Clone, Debug)]
pub struct Choice {
    /// The filter.
    pub offered: Offered,
    /// Tilt, degrees.
    pub tilt_deg: f64,
    /// Mean transmission for the light of the target.
    pub transmission: f64,
    /// The target's part of the light of all lines.
    pub purity: f64,
    /// Light of other species over that of the target.
    pub interference_fraction: f64,
    /// No other candidate is both purer and brighter.
    pub on_front: bool,
}

impl Choice {
    /// What is made largest.
    pub fn score(&self) -> f64 {
        self.purity * self.transmission
    }

    /// What the rated lines say.
    pub fn verdict(&self) -> Verdict {
        Verdict::of(self.interference_fraction)
    }
}

/// The answer.
#[derive(Clone, Debug)]
pub struct Answer {
    /// All that the best filter lets through; `None` where no candidate transmits the target.
    pub best: Option<(Choice, PassbandQuestion, passband::Answer)>,
    /// The best, and candidates that no other beats in purity and transmission both; the brightest
    /// first.
    pub candidates: Vec<Choice>,
    /// How many were tried.
    pub tried: usize,
}

/// Scores this close to the best count as equal: then the smaller tilt wins, then the wider filter.
const EQUAL: f64 = 5e-3;
/// Lines this weak beside the target are left out of the search.
const NEGLIGIBLE: f64 = 1e-8;

/// Answers the question from what is held of each species.
///
/// # Errors
/// A target that is not held or has no rate; rays that filters reflect totally; conditions under
/// which populations or profiles cannot be computed.
pub fn answer(question: &Question, spectra: &[Spectrum]) -> Result<Answer, AdviseError> {
    let passband = &question.passband;
    let widest = question
        .candidates
        .iter()
        .flat_map(|(_, offered)| offered)
        .map(|o| o.filter.fwhm_nm())
        .fold(0.0, f64::max);
    // Features as the narrowest of the usual filters sees them would split multiplets; the widest
    // would swallow neighbours: the geometric middle of both.
    let narrowest = question
        .candidates
        .iter()
        .flat_map(|(_, offered)| offered)
        .map(|o| o.filter.fwhm_nm())
        .fold(f64::INFINITY, f64::min);
    let width = SpectralWidth::from_nm((widest * narrowest).sqrt().max(f64::MIN_POSITIVE));
    let scene = Scene::new(spectra, &passband.conditions, width)?;
    let Some(wanted) = &passband.target else {
        return Ok(Answer {
            best: None,
            candidates: Vec::new(),
            tried: 0,
        });
    };
    let target = find(
        &scene,
        wanted,
        passband::MEANT_NM,
        passband.medium,
        Air::standard(),
    )?;
    let view = View::new(&scene, passband)?;
    let field = Field::new(&view, target);
    if field.target_light() <= 0.0 {
        return Err(AdviseError::TargetUnrated {
            wanted: wanted.typed.clone(),
        });
    }
    let (choices, tried) = all_choices(question, &field)?;
    let candidates = front_and_best(choices);
    let best = match best_of(&candidates) {
        None => None,
        Some(choice) => Some(in_full(question, choice, spectra)?),
    };
    Ok(Answer {
        best,
        candidates,
        tried,
    })
}

/// Everything about one choice.
fn in_full(
    question: &Question,
    choice: &Choice,
    spectra: &[Spectrum],
) -> Result<(Choice, PassbandQuestion, passband::Answer), AdviseError> {
    let full = PassbandQuestion {
        filter: choice.offered.filter.clone(),
        light: Illumination {
            tilt_deg: choice.tilt_deg,
            ..question.passband.light
        },
        ..question.passband.clone()
    };
    let answer = passband::answer(&full, spectra)?;
    Ok((choice.clone(), full, answer))
}

/// Lines that matter: wavelength (nm), light at the detector without filter, and whose they are.
struct Field {
    lines: Vec<(f64, f64, Owner)>,
}

#[derive(Clone, Copy, PartialEq)]
enum Owner {
    Target,
    Own,
    Other,
}

impl Field {
    fn new(view: &View<'_, '_>, target: usize) -> Self {
        let scene = view.scene;
        let own = scene.features[target].spectrum;
        let mut lines: Vec<(f64, f64, Owner)> = Vec::new();
        for (i, emission) in scene.emissions.iter().enumerate() {
            let Some(light) = emission.light.zip(view.responses[i]).map(|(l, r)| l * r) else {
                continue;
            };
            let owner = if emission.feature == target {
                Owner::Target
            } else if emission.spectrum == own {
                Owner::Own
            } else {
                Owner::Other
            };
            lines.push((view.wavelengths_nm[i], light, owner));
        }
        let mut field = Self { lines };
        let least = NEGLIGIBLE * field.target_light();
        field.lines.retain(|l| l.1 > least);
        field
    }

    fn target_light(&self) -> f64 {
        let own = self.lines.iter().filter(|l| l.2 == Owner::Target);
        own.map(|l| l.1).sum()
    }

    /// Transmission of the target, purity, interference; `None` where the target does not pass.
    fn through(&self, seen: &SeenFilter<'_>) -> Option<(f64, f64, f64)> {
        let (mut target, mut own, mut other) = (0.0, 0.0, 0.0);
        for &(nm, light, owner) in &self.lines {
            let passed = light * seen.transmission(nm).unwrap_or(0.0);
            match owner {
                Owner::Target => target += passed,
                Owner::Own => own += passed,
                Owner::Other => other += passed,
            }
        }
        (target > 0.0).then(|| {
            (
                target / self.target_light(),
                target / (target + own + other),
                other / target,
            )
        })
    }
}

fn all_choices(question: &Question, field: &Field) -> Result<(Vec<Choice>, usize), AdviseError> {
    let mut choices = Vec::new();
    let mut tried = 0;
    for (tilt_deg, offered) in &question.candidates {
        let light = Illumination {
            tilt_deg: *tilt_deg,
            ..question.passband.light
        };
        let Some(first) = offered.first() else {
            continue;
        };
        let rays = Rays::new(light, first.filter.effective_index())?;
        for offer in offered {
            tried += 1;
            let seen = offer.filter.behind(&rays, light.warming_k)?;
            let Some((transmission, purity, interference_fraction)) =
                worst(field, &seen, question.wander_nm)
            else {
                continue;
            };
            choices.push(Choice {
                offered: offer.clone(),
                tilt_deg: *tilt_deg,
                transmission,
                purity,
                interference_fraction,
                on_front: false,
            });
        }
    }
    Ok((choices, tried))
}

/// The worst of each figure with the passband at both ends of its wander and in the middle.
fn worst(field: &Field, seen: &SeenFilter<'_>, wander_nm: f64) -> Option<(f64, f64, f64)> {
    let mut out = field.through(seen)?;
    if wander_nm > 0.0 {
        for by_nm in [-wander_nm, wander_nm] {
            let there = field.through(&seen.clone().shifted(by_nm))?;
            out = (out.0.min(there.0), out.1.min(there.1), out.2.max(there.2));
        }
    }
    Some(out)
}

/// Candidates that are not beaten in purity and transmission both, and the best; the brightest
/// first.
fn front_and_best(mut choices: Vec<Choice>) -> Vec<Choice> {
    choices.sort_by(|a, b| {
        (b.transmission.total_cmp(&a.transmission))
            .then(b.purity.total_cmp(&a.purity))
            .then(a.tilt_deg.total_cmp(&b.tilt_deg))
            .then(
                b.offered
                    .filter
                    .fwhm_nm()
                    .total_cmp(&a.offered.filter.fwhm_nm()),
            )
    });
    let mut purest = f64::NEG_INFINITY;
    for choice in &mut choices {
        if choice.purity > purest {
            purest = choice.purity;
            choice.on_front = true;
        }
    }
    let best = best_of(&choices).cloned();
    choices.retain(|c| c.on_front);
    if let Some(best) = best.filter(|b| !b.on_front) {
        let at = choices.partition_point(|c| c.transmission >= best.transmission);
        choices.insert(at, best);
    }
    choices
}

/// The largest product of purity and transmission; among like ones the smaller tilt, then the wider
/// filter.
pub fn best_of(choices: &[Choice]) -> Option<&Choice> {
    let top = choices.iter().map(Choice::score).fold(0.0, f64::max);
    choices
        .iter()
        .filter(|c| c.score() >= top * (1.0 - EQUAL))
        .min_by(|a, b| {
            (a.tilt_deg.total_cmp(&b.tilt_deg))
                .then(
                    b.offered
                        .filter
                        .fwhm_nm()
                        .total_cmp(&a.offered.filter.fwhm_nm()),
                )
                .then(b.score().total_cmp(&a.score()))
        })
}
