//! `attribute`: which species explain a measured list of peaks, with a false-discovery rate.

mod brightness;
mod decoy;
mod evidence;
mod features;
mod matches;
mod room;
mod scale;
pub mod spectrum;

use vocabulary::atom::Species;
use vocabulary::light::{Medium, SpectralWidth};
use vocabulary::spectrum::Line;

use self::evidence::Ranking;
use self::features::templates;
use self::room::Room;
use super::emission::Conditions;
use super::error::AdviseError;
use super::spectrum::Spectrum;

/// Probability from which a species is called present.
pub const PRESENT: f64 = 0.95;
/// Part of the species called present that may be there by chance, as the shifted lists tell.
pub const CHANCE_SPECIES: f64 = 0.05;
/// Probability from which a peak is attributed to its first candidate.
pub const ATTRIBUTED: f64 = 0.5;
/// Part of the peaks that is taken to be of unknown origin, before anything is known.
pub const UNKNOWN_SHARE: f64 = 0.1;
/// Prior of a species that was named, and the largest of any.
pub const LARGEST_PRIOR: f64 = 0.5;
/// Light of a line in second order over that in first. An assumption: gratings differ.
pub const SECOND_ORDER_LIGHT: f64 = 0.05;

/// One measured peak.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Peak {
    /// Vacuum wavelength, nm.
    pub vacuum_nm: f64,
    /// Vacuum wavelength of a line that would show here in second order, nm; `None` where air has
    /// no index for it.
    pub second_order_vacuum_nm: Option<f64>,
    /// 1 σ of the position, nm.
    pub sigma_nm: f64,
    /// Intensity in any unit, above zero.
    pub intensity: Option<f64>,
}

/// A checked question.
#[derive(Clone, Debug)]
pub struct Question {
    /// Medium that positions are shown in.
    pub medium: Medium,
    /// FWHM of the instrument.
    pub width: SpectralWidth,
    /// Conditions to try; the one that fits a species best is taken for it.
    pub grid: Vec<Conditions>,
    /// Largest common shift of the scale, and largest shift by its stretch at the ends, nm.
    pub shift_bound_nm: f64,
    /// How many species are expected in a list; the prior of each is this over those that have a
    /// feature in the range, at most a half. A stage that was named has a half.
    pub species_expected: f64,
}

/// A line that may have made a peak.
#[derive(Clone, Debug)]
pub struct Candidate {
    /// The strongest component.
    pub line: Line,
    /// Components of the feature.
    pub components: usize,
    /// Vacuum wavelength of the feature, nm.
    pub vacuum_nm: f64,
    /// Grating order.
    pub order: u8,
    /// Corrected peak minus feature, nm of the line itself.
    pub offset_nm: f64,
    /// Probability.
    pub probability: f64,
}

/// What a peak is called.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Mark {
    /// One candidate stands out.
    Attributed,
    /// Two species, or two features, of like weight.
    Blend,
    /// Most likely a line in second order.
    SecondOrder,
    /// There are candidates, none likely.
    Doubtful,
    /// No line of any species lies here.
    NoCandidate,
}

/// A peak and what it may be.
#[derive(Clone, Debug)]
pub struct PeakAnswer {
    /// As measured.
    pub peak: Peak,
    /// The most likely first.
    pub candidates: Vec<Candidate>,
    /// What it is called.
    pub mark: Mark,
}

/// A species and what speaks for it.
#[derive(Clone, Debug)]
pub struct SpeciesAnswer {
    /// Which.
    pub species: Species,
    /// Called present.
    pub present: bool,
    /// Logarithm (base 10) of the likelihood ratio of present to absent.
    pub evidence: f64,
    /// Probability that it is present.
    pub probability: f64,
    /// Vacuum wavelengths of strong features with a peak, nm, the strongest first.
    pub matched_nm: Vec<f64>,
    /// Vacuum wavelengths of strong features without one, nm, the strongest first.
    pub missing_nm: Vec<f64>,
    /// Index of the conditions that fit best.
    pub temperature: usize,
    /// Peaks attributed to it.
    pub peaks: usize,
    /// It has a feature in the range of the peaks, so that they can tell of it.
    pub judged: bool,
}

/// Correction of the scale: to be added to a measured position, nm.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Scale {
    /// Shift at the middle of the list, nm.
    pub shift_nm: f64,
    /// Stretch, nm per nm from the middle.
    pub stretch: f64,
    /// Middle of the list, vacuum nm.
    pub middle_nm: f64,
}

impl Scale {
    fn at(&self, nm: f64) -> f64 {
        self.shift_nm + self.stretch * (nm - self.middle_nm)
    }
}

/// The answer.
#[derive(Clone, Debug)]
pub struct Answer {
    /// All peaks, by wavelength.
    pub peaks: Vec<PeakAnswer>,
    /// Species with evidence for them, the strongest first; all of them that were judged follow.
    pub species: Vec<SpeciesAnswer>,
    /// Fitted correction of the scale.
    pub scale: Scale,
    /// Part of the attributed peaks whose first candidate is expected to be wrong; `None` where none
    /// is attributed.
    pub false_discovery_rate: Option<f64>,
    /// Part of the peaks of a shifted list that the species found here would claim by chance.
    pub chance_match: f64,
    /// Species that a shifted list is said to show, on average.
    pub chance_species: f64,
    /// Shifted lists that were tried.
    pub decoys: usize,
    /// Prior probability of a species that was not named.
    pub prior: f64,
}

/// Attributes peaks; they are sorted here.
///
/// # Errors
/// Populations that cannot be computed.
pub fn answer(
    question: &Question,
    peaks: &[Peak],
    spectra: &[Spectrum],
) -> Result<Answer, AdviseError> {
    let mut peaks = peaks.to_vec();
    peaks.sort_by(|a, b| a.vacuum_nm.total_cmp(&b.vacuum_nm));
    let templates = templates(spectra, &question.grid, question.width)?;
    let range = range(&peaks, question);
    let ranking = Ranking::new(&templates, spectra.len(), question.grid.len(), range);
    let judged = (0..spectra.len()).filter(|&s| ranking.is_judged(s)).count();
    let prior = (question.species_expected / judged.max(1) as f64).min(LARGEST_PRIOR);
    let mut room = Room {
        ranking,
        log_prior: spectra.iter().map(|s| log_prior(s, prior)).collect(),
        templates,
        range,
        question,
    };
    let mut scale = room.coarse(&peaks);
    let mut found = room.find(&peaks, scale);
    for _ in 0..2 {
        let next = room.refined(&peaks, &found, scale);
        if next == scale {
            break;
        }
        scale = next;
        found = room.find(&peaks, scale);
    }
    let mut decoys = decoy::judge(&room, &peaks, &found, scale);
    let barred = decoys.barred(&found.evidence, &room.log_prior);
    if !barred.is_empty() {
        for species in barred {
            room.log_prior[species] = f64::NEG_INFINITY;
        }
        found = room.find(&peaks, scale);
        decoys = decoy::judge(&room, &peaks, &found, scale);
    }
    let answers: Vec<PeakAnswer> = peaks
        .iter()
        .zip(&found.candidates)
        .map(|(peak, list)| room.peak(*peak, list))
        .collect();
    let false_discovery_rate =
        decoy::false_discovery_rate(&answers, decoys.chance_match_unattributed);
    Ok(Answer {
        species: room.species(spectra, &found, &answers),
        peaks: answers,
        scale,
        false_discovery_rate,
        chance_match: decoys.chance_match,
        chance_species: decoys.chance_species,
        decoys: decoys.count,
        prior,
    })
}

fn range(peaks: &[Peak], question: &Question) -> (f64, f64) {
    let low = peaks.first().map_or(0.0, |p| p.vacuum_nm);
    let high = peaks.last().map_or(0.0, |p| p.vacuum_nm);
    // A line may lie beyond the outermost peak by the width, or by what the peak is uncertain.
    let sigma = peaks.iter().map(|p| p.sigma_nm).fold(0.0, f64::max);
    let margin = question.width.at_nm(high).max(2.0 * sigma).max(1e-9);
    (low - margin, high + margin)
}

/// Prior odds; an isotope is a tenth as likely as its natural mixture, a stage that was named as
/// likely as not, and none where the amount in the mix is zero.
fn log_prior(spectrum: &Spectrum, prior: f64) -> f64 {
    let prior = if spectrum.named { LARGEST_PRIOR } else { prior };
    let isotope = if spectrum.species.isotope.is_some() && !spectrum.named {
        0.1
    } else {
        1.0
    };
    let prior = (prior * isotope * spectrum.amount.min(1.0)).clamp(0.0, 0.99);
    (prior / (1.0 - prior)).ln()
}

impl PeakAnswer {
    /// The candidate that the peak is attributed to.
    pub fn attributed(&self) -> Option<&Candidate> {
        self.candidates
            .first()
            .filter(|c| c.probability >= ATTRIBUTED)
    }
}
