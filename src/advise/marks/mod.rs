//! `marks`: lines of a lamp that an instrument may be calibrated on, and the calibration itself.

mod dispersion;
mod polynomial;
mod survey;

use vocabulary::light::{Medium, SpectralRange, SpectralWidth};
use vocabulary::spectrum::Line;

use super::emission::Conditions;
use super::error::AdviseError;
use super::spectrum::Spectrum;
use super::verdict::Verdict;
use super::window::Unjudged;

pub use dispersion::{Dispersion, DispersionError, Entry, EntryState, Pairing, fit};
pub use polynomial::{Polynomial, PolynomialError, weighted};
pub use survey::{Survey, Surveyed, survey};

/// Light of the lamp's own other lines, over that of the mark, above which it is no mark: as for
/// the verdict `clear`.
pub const OWN_LIGHT_ALLOWED: f64 = 0.01;

/// A checked question.
#[derive(Clone, Debug)]
pub struct Question {
    /// The span to be calibrated.
    pub range: SpectralRange,
    /// Medium that positions are shown in.
    pub medium: Medium,
    /// FWHM of the instrument.
    pub width: SpectralWidth,
    /// The lamp.
    pub conditions: Conditions,
    /// Largest 1 σ of a mark's position, nm.
    pub position_bound_nm: f64,
    /// Weakest light of a mark, over the strongest feature of its species in the span.
    pub weakest: f64,
    /// Into how many parts of equal width the span is cut; the strongest mark of each is chosen.
    /// `None` keeps all marks.
    pub parts: Option<usize>,
    /// Asked-for species of which nothing is held.
    pub not_held: Vec<String>,
}

/// Why a feature of the lamp is no mark.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Refusal {
    /// Its own rate is not known, so nothing can be called weak beside it.
    NoRate,
    /// Its verdict is not `clear`.
    NotClear(Verdict),
    /// Other features of its own species lie under it: their light over its own.
    OwnSpecies(f64),
    /// A line of its own species without a known rate lies so near, nm.
    OwnUnrated(f64),
    /// Its position is not known well enough: 1 σ, nm.
    Uncertain(f64),
    /// It is too weak: its light over the strongest of its species.
    Weak(f64),
    /// Both levels have the same parity: a forbidden line, too slow for the pressure of a lamp.
    Forbidden,
    /// A mark, but a stronger one lies in the same part of the span.
    Outshone,
}

/// A feature of the lamp with what speaks against it.
#[derive(Clone, Debug)]
pub struct Candidate {
    /// The feature.
    pub surveyed: Surveyed,
    /// Light over the strongest feature of its species in the span.
    pub relative_light: Option<f64>,
    /// Why it is no mark; `None` for a mark.
    pub refusal: Option<Refusal>,
}

/// The answer.
#[derive(Clone, Debug)]
pub struct Answer {
    /// All features of the lamp in the span, by wavelength.
    pub candidates: Vec<Candidate>,
    /// Widest stretch of the span without a mark, vacuum nm.
    pub widest_gap_nm: Option<(f64, f64)>,
    /// Species that cannot be judged in some part of the span.
    pub unjudged: Vec<Unjudged>,
}

impl Answer {
    /// The marks, by wavelength.
    pub fn marks(&self) -> impl Iterator<Item = &Candidate> {
        self.candidates.iter().filter(|c| c.refusal.is_none())
    }
}

/// Finds the marks of a lamp.
///
/// # Errors
/// As `window`.
pub fn answer(question: &Question, spectra: &[Spectrum]) -> Result<Answer, AdviseError> {
    let Survey {
        features: surveyed,
        unjudged,
    } = survey(
        spectra,
        &question.conditions,
        question.width,
        &question.range,
        question.medium,
        &question.not_held,
    )?;
    let strongest = |species| {
        surveyed
            .iter()
            .filter(|s| s.feature.species == species)
            .filter_map(|s| s.light)
            .fold(0.0, f64::max)
    };
    let mut candidates: Vec<Candidate> = surveyed
        .iter()
        .map(|s| {
            let best = strongest(s.feature.species);
            let relative_light = s.light.filter(|_| best > 0.0).map(|l| l / best);
            Candidate {
                refusal: refusal(question, s, relative_light),
                relative_light,
                surveyed: s.clone(),
            }
        })
        .collect();
    if let Some(parts) = question.parts {
        spread(&mut candidates, &question.range, parts);
    }
    let widest_gap_nm = widest_gap(&candidates, &question.range);
    Ok(Answer {
        candidates,
        widest_gap_nm,
        unjudged,
    })
}

fn refusal(question: &Question, surveyed: &Surveyed, light: Option<f64>) -> Option<Refusal> {
    let feature = &surveyed.feature;
    if surveyed.lines.iter().all(is_forbidden) {
        return Some(Refusal::Forbidden);
    }
    if light.is_none() {
        return Some(Refusal::NoRate);
    }
    if feature.verdict.central != Verdict::Clear {
        return Some(Refusal::NotClear(feature.verdict.central));
    }
    let own = feature.own_species_fraction.unwrap_or(f64::INFINITY);
    if own >= OWN_LIGHT_ALLOWED {
        return Some(Refusal::OwnSpecies(own));
    }
    if let Some(nm) = surveyed.unrated_neighbour_nm {
        return Some(Refusal::OwnUnrated(nm));
    }
    let sigma = feature.placed.uncertainty_nm;
    if !(sigma > 0.0 && sigma <= question.position_bound_nm) {
        return Some(Refusal::Uncertain(sigma));
    }
    match light {
        Some(light) if light >= question.weakest => None,
        light => Some(Refusal::Weak(light.unwrap_or(0.0))),
    }
}

/// Levels of one parity: no electric dipole line.
fn is_forbidden(line: &Line) -> bool {
    let parity = |level: &Option<std::sync::Arc<vocabulary::spectrum::Level>>| {
        level.as_ref().and_then(|l| l.parity)
    };
    parity(&line.lower)
        .zip(parity(&line.upper))
        .is_some_and(|(lower, upper)| lower == upper)
}

/// Keeps the strongest mark of each part of the span.
fn spread(candidates: &mut [Candidate], range: &SpectralRange, parts: usize) {
    let part = |nm: f64| {
        let place = (nm - range.vacuum_low_nm) / range.width_nm() * parts as f64;
        (place.max(0.0) as usize).min(parts.saturating_sub(1))
    };
    let mut best: Vec<Option<usize>> = vec![None; parts];
    let order: Vec<usize> = (0..candidates.len())
        .filter(|&i| candidates[i].refusal.is_none())
        .collect();
    for index in order {
        let place = part(candidates[index].surveyed.feature.placed.vacuum_nm);
        let light = |i: usize| candidates[i].relative_light.unwrap_or(0.0);
        let loser = match best[place] {
            Some(before) if light(before) >= light(index) => Some(index),
            before => {
                best[place] = Some(index);
                before
            }
        };
        if let Some(loser) = loser {
            candidates[loser].refusal = Some(Refusal::Outshone);
        }
    }
}

fn widest_gap(candidates: &[Candidate], range: &SpectralRange) -> Option<(f64, f64)> {
    let mut places: Vec<f64> = candidates
        .iter()
        .filter(|c| c.refusal.is_none())
        .map(|c| c.surveyed.feature.placed.vacuum_nm)
        .collect();
    if places.is_empty() {
        return None;
    }
    places.insert(0, range.vacuum_low_nm);
    places.push(range.vacuum_high_nm);
    places
        .windows(2)
        .map(|w| (w[0], w[1]))
        .max_by(|a, b| (a.1 - a.0).total_cmp(&(b.1 - b.0)))
}
