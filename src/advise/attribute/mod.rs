//! `attribute`: which species explain a measured list of peaks, with a false-discovery rate.

mod decoy;
mod evidence;
mod features;
mod matches;
pub mod spectrum;

use vocabulary::atom::Species;
use vocabulary::light::{Medium, SpectralWidth};
use vocabulary::spectrum::Line;

use self::evidence::{Case, Evidence, Ranking};
use self::features::{Template, templates};
use self::matches::{Match, Matches, peak_density};
use super::emission::Conditions;
use super::error::AdviseError;
use super::spectrum::Spectrum;

/// Probability from which a species is called present.
pub const PRESENT: f64 = 0.95;
/// Probability from which a peak is attributed to its first candidate.
pub const ATTRIBUTED: f64 = 0.5;
/// Part of the peaks that is taken to be of unknown origin, before anything is known.
pub const UNKNOWN_SHARE: f64 = 0.1;
/// Light of a line in second order over that in first. An assumption: gratings differ.
pub const SECOND_ORDER_LIGHT: f64 = 0.05;
/// Chance that a line of unknown rate is seen in second order.
const SECOND_ORDER_UNRATED: f64 = 0.02;
/// 1 σ of ln(intensity) about what the rates say: rates, sensitivity and populations are off.
const LOG_INTENSITY_SIGMA: f64 = 1.5;
/// Candidates listed per peak at most.
const CANDIDATES: usize = 5;

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
    /// Prior probability that a species is present.
    pub prior: f64,
    /// Fewest matched features of a species that is called present.
    pub fewest_matched: usize,
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
    let room = Room {
        ranking: Ranking::new(&templates, spectra.len(), question.grid.len(), range),
        log_prior: spectra
            .iter()
            .map(|s| log_prior(s, question.prior))
            .collect(),
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
    let decoys = decoy::judge(&room, &peaks, &found, scale);
    let answers: Vec<PeakAnswer> = peaks
        .iter()
        .zip(&found.candidates)
        .map(|(peak, list)| room.peak(*peak, list))
        .collect();
    let false_discovery_rate = decoy::false_discovery_rate(&answers, decoys.chance_match);
    Ok(Answer {
        species: room.species(spectra, &found, &answers),
        peaks: answers,
        scale,
        false_discovery_rate,
        chance_match: decoys.chance_match,
        chance_species: decoys.chance_species,
        decoys: decoys.count,
    })
}

fn range(peaks: &[Peak], question: &Question) -> (f64, f64) {
    let low = peaks.first().map_or(0.0, |p| p.vacuum_nm);
    let high = peaks.last().map_or(0.0, |p| p.vacuum_nm);
    let margin = question.width.at_nm(high).max(1e-9);
    (low - margin, high + margin)
}

/// Prior odds; an isotope is a tenth as likely as its natural mixture, and none where the amount in
/// the mix is zero.
fn log_prior(spectrum: &Spectrum, prior: f64) -> f64 {
    let isotope = if spectrum.species.isotope.is_some() && !spectrum.named {
        0.1
    } else {
        1.0
    };
    let prior = (prior * isotope * spectrum.amount.min(1.0)).clamp(0.0, 0.99);
    (prior / (1.0 - prior)).ln()
}

/// What stays the same for all lists of peaks.
struct Room<'a> {
    ranking: Ranking,
    log_prior: Vec<f64>,
    templates: Vec<Template<'a>>,
    range: (f64, f64),
    question: &'a Question,
}

/// What was found in one list.
struct Found {
    evidence: Vec<Evidence>,
    /// Per peak: match and probability, the most likely first.
    candidates: Vec<Vec<(Match, f64)>>,
}

impl<'a> Room<'a> {
    fn case<'c>(&'c self, matches: &'c Matches, density: &'c [f64]) -> Case<'c> {
        Case {
            templates: &self.templates,
            ranking: &self.ranking,
            matches,
            density,
            log_prior: &self.log_prior,
            question: self.question,
        }
    }

    fn find(&self, peaks: &[Peak], scale: Scale) -> Found {
        let matches = Matches::new(&self.templates, peaks, |nm| scale.at(nm));
        let density = peak_density(peaks, self.range);
        let case = self.case(&matches, &density);
        let (evidence, claimed) = case.species();
        let candidates = self.candidates(&case, peaks, &evidence, &claimed);
        Found {
            evidence,
            candidates,
        }
    }

    /// Probabilities of what each peak is: expected numbers per nm of peaks of each feature at that
    /// place, against those of unknown origin.
    fn candidates(
        &self,
        case: &Case<'_>,
        peaks: &[Peak],
        evidence: &[Evidence],
        claimed: &[f64],
    ) -> Vec<Vec<(Match, f64)>> {
        let unexplained =
            claimed.iter().map(|c| 1.0 - c).sum::<f64>() / claimed.len().max(1) as f64;
        let unknown = unexplained.max(UNKNOWN_SHARE);
        let brightness = self.brightness(case, peaks, evidence);
        let mut weights: Vec<Vec<(Match, f64)>> = vec![Vec::new(); peaks.len()];
        for m in &case.matches.all {
            let species = self.templates[m.template].spectrum;
            let of = &evidence[species];
            let mut shown = case.shown(m.template, of) * of.probability;
            if !of.present {
                shown *= 0.5 * of.probability;
            }
            if m.order == 2 {
                shown = if of.present {
                    self.shown_in_second_order(m, of)
                } else {
                    0.0
                };
            }
            let fits = brightness.fits(self, m, peaks[m.peak].intensity, of);
            let weight = shown * m.density * fits;
            if weight > 0.0 {
                weights[m.peak].push((*m, weight));
            }
        }
        for (i, list) in weights.iter_mut().enumerate() {
            let total: f64 = list.iter().map(|c| c.1).sum::<f64>() + unknown * case.density[i];
            for candidate in list.iter_mut() {
                candidate.1 /= total;
                let of = &evidence[self.templates[candidate.0.template].spectrum];
                if !of.present {
                    // Nothing is attributed to a species that is not called present.
                    candidate.1 = candidate.1.min(of.probability).min(0.98 * ATTRIBUTED);
                }
            }
            list.sort_by(|a, b| b.1.total_cmp(&a.1).then(a.0.template.cmp(&b.0.template)));
            list.truncate(CANDIDATES);
        }
        weights
    }

    fn shown_in_second_order(&self, m: &Match, of: &Evidence) -> f64 {
        let Some(light) = &self.templates[m.template].light else {
            return SECOND_ORDER_UNRATED;
        };
        let light = light[of.temperature];
        let second = SECOND_ORDER_LIGHT * light;
        if second > 0.0 {
            second / (second + of.weakest)
        } else {
            0.0
        }
    }

    /// How bright each species is in the list: the median of ln(intensity/light) of its matches.
    fn brightness(&self, case: &Case<'_>, peaks: &[Peak], evidence: &[Evidence]) -> Brightness {
        let logs: Vec<f64> = peaks
            .iter()
            .filter_map(|p| p.intensity.map(f64::ln))
            .collect();
        let mean = logs.iter().sum::<f64>() / logs.len().max(1) as f64;
        let spread =
            logs.iter().map(|l| (l - mean).powi(2)).sum::<f64>() / logs.len().max(1) as f64;
        let of = |e: &Evidence| {
            let mut ratios: Vec<f64> = e
                .matched
                .iter()
                .filter_map(|&t| {
                    let light = self.templates[t].light.as_ref()?[e.temperature];
                    let nearest = case
                        .matches
                        .of(t)
                        .iter()
                        .filter(|m| m.order == 1)
                        .max_by(|a, b| a.density.total_cmp(&b.density))?;
                    Some(peaks[nearest.peak].intensity?.ln() - light.ln())
                })
                .collect();
            ratios.sort_by(f64::total_cmp);
            (ratios.len() >= 2).then(|| ratios[ratios.len() / 2])
        };
        Brightness {
            species: evidence.iter().map(of).collect(),
            mean,
            sigma: spread.sqrt().max(LOG_INTENSITY_SIGMA),
        }
    }

    /// The shift at which most speaks for species, on a grid of half a σ within the bound.
    fn coarse(&self, peaks: &[Peak]) -> Scale {
        let middle_nm = f64::midpoint(self.range.0, self.range.1);
        let bound = self.question.shift_bound_nm;
        let mut sigmas: Vec<f64> = peaks.iter().map(|p| p.sigma_nm).collect();
        sigmas.sort_by(f64::total_cmp);
        let step = sigmas
            .get(sigmas.len() / 2)
            .copied()
            .unwrap_or(bound)
            .max(bound / 50.0);
        let mut best = (
            f64::NEG_INFINITY,
            Scale {
                middle_nm,
                ..Scale::default()
            },
        );
        if bound <= step {
            return best.1;
        }
        let density = peak_density(peaks, self.range);
        let steps = (bound / step).floor() as i32;
        for k in -steps..=steps {
            let scale = Scale {
                shift_nm: f64::from(k) * step,
                ..best.1
            };
            let matches = Matches::new(&self.templates, peaks, |nm| scale.at(nm));
            let (evidence, _) = self.case(&matches, &density).species();
            // A shift of nothing is the likeliest beforehand: Gaussian of half the bound.
            let prior = -0.5 * (2.0 * scale.shift_nm / bound).powi(2);
            let score: f64 = evidence
                .iter()
                .filter(|e| e.present)
                .map(|e| e.log_ratio)
                .sum::<f64>()
                + prior;
            if score > best.0 {
                best = (score, scale);
            }
        }
        best.1
    }

    /// Shift and stretch by weighted least squares over attributed peaks, held near zero by the
    /// bound (as by a measurement of zero with 1 σ of half the bound), and cut at it.
    fn refined(&self, peaks: &[Peak], found: &Found, scale: Scale) -> Scale {
        let half = (self.range.1 - self.range.0) / 2.0;
        let hold = (2.0 / self.question.shift_bound_nm).powi(2);
        let mut sums = [hold, 0.0, hold, 0.0, 0.0];
        for (peak, list) in peaks.iter().zip(&found.candidates) {
            let Some((m, probability)) =
                list.first().filter(|c| c.1 >= ATTRIBUTED && c.0.order == 1)
            else {
                continue;
            };
            let u = (peak.vacuum_nm - scale.middle_nm) / half;
            let weight = probability / m.sigma_nm.powi(2);
            // What must be added in all: what was added less what is left.
            let wanted = scale.at(peak.vacuum_nm) - m.offset_nm;
            sums[0] += weight;
            sums[1] += weight * u;
            sums[2] += weight * u * u;
            sums[3] += weight * wanted;
            sums[4] += weight * wanted * u;
        }
        let [a, b, c, d, e] = sums;
        let determinant = a * c - b * b;
        let bound = self.question.shift_bound_nm;
        if determinant.is_nan() || determinant <= 0.0 {
            return scale;
        }
        Scale {
            shift_nm: ((c * d - b * e) / determinant).clamp(-bound, bound),
            stretch: ((a * e - b * d) / determinant).clamp(-bound, bound) / half,
            ..scale
        }
    }

    fn peak(&self, peak: Peak, list: &[(Match, f64)]) -> PeakAnswer {
        let candidates: Vec<Candidate> = list
            .iter()
            .map(|(m, probability)| {
                let template = &self.templates[m.template];
                Candidate {
                    line: template.line.clone(),
                    components: template.components,
                    vacuum_nm: template.nm,
                    order: m.order,
                    offset_nm: m.offset_nm,
                    probability: *probability,
                }
            })
            .collect();
        PeakAnswer {
            mark: mark(&candidates),
            peak,
            candidates,
        }
    }

    fn species(
        &self,
        spectra: &[Spectrum],
        found: &Found,
        answers: &[PeakAnswer],
    ) -> Vec<SpeciesAnswer> {
        let nm = |list: &[usize]| list.iter().map(|&t| self.templates[t].nm).collect();
        let mut peaks = std::collections::HashMap::new();
        for candidate in answers.iter().filter_map(PeakAnswer::attributed) {
            *peaks.entry(candidate.line.species).or_insert(0_usize) += 1;
        }
        let mut out: Vec<SpeciesAnswer> = spectra
            .iter()
            .zip(&found.evidence)
            .map(|(spectrum, e)| SpeciesAnswer {
                species: spectrum.species,
                present: e.present,
                evidence: e.log_ratio / std::f64::consts::LN_10,
                probability: e.probability,
                matched_nm: nm(&e.matched),
                missing_nm: nm(&e.missing),
                temperature: e.temperature,
                peaks: peaks.get(&spectrum.species).copied().unwrap_or(0),
            })
            .collect();
        out.sort_by(|a, b| {
            b.present
                .cmp(&a.present)
                .then(b.evidence.total_cmp(&a.evidence))
        });
        out
    }
}

impl PeakAnswer {
    /// The candidate that the peak is attributed to.
    pub fn attributed(&self) -> Option<&Candidate> {
        self.candidates
            .first()
            .filter(|c| c.probability >= ATTRIBUTED)
    }
}

fn mark(candidates: &[Candidate]) -> Mark {
    let Some(first) = candidates.first() else {
        return Mark::NoCandidate;
    };
    let second = candidates.get(1).map_or(0.0, |c| c.probability);
    if first.probability + second >= ATTRIBUTED && second > 0.5 * first.probability {
        return Mark::Blend;
    }
    match first.order {
        _ if first.probability < ATTRIBUTED => Mark::Doubtful,
        2 => Mark::SecondOrder,
        _ => Mark::Attributed,
    }
}

/// How bright species are in the list, and how bright its peaks are.
struct Brightness {
    species: Vec<Option<f64>>,
    mean: f64,
    sigma: f64,
}

impl Brightness {
    /// Density of the intensity that the species says, over that of all peaks.
    fn fits(&self, room: &Room<'_>, m: &Match, intensity: Option<f64>, of: &Evidence) -> f64 {
        let template = &room.templates[m.template];
        let expected = self.species[template.spectrum].zip(template.light.as_ref());
        let (Some(intensity), Some((log, light))) = (intensity, expected) else {
            return 1.0;
        };
        let mut expected = log + light[of.temperature].ln();
        if m.order == 2 {
            expected += SECOND_ORDER_LIGHT.ln();
        }
        let normal = |x: f64, sigma: f64| (-0.5 * (x / sigma).powi(2)).exp() / sigma;
        let own = normal(intensity.ln() - expected, LOG_INTENSITY_SIGMA);
        let all = normal(intensity.ln() - self.mean, self.sigma);
        // A rate may be quite wrong: one in twenty says nothing.
        0.95 * own / all.max(f64::MIN_POSITIVE) + 0.05
    }
}
