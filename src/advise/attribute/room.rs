//! One catalogue's features against one list of peaks: species, then candidates of each peak.

use std::collections::HashMap;

use super::brightness::Brightness;
use super::evidence::{Case, Evidence, Ranking};
use super::features::Template;
use super::matches::{Match, Matches, peak_density};
use super::{ATTRIBUTED, Candidate, Mark, Peak, PeakAnswer, Question, Scale, SpeciesAnswer};
use super::{SECOND_ORDER_LIGHT, UNKNOWN_SHARE};
use crate::advise::spectrum::Spectrum;

/// A line less likely than this is no candidate.
const WORTH_NAMING: f64 = 1e-4;
/// Candidates listed per peak at most.
const CANDIDATES: usize = 5;

/// What stays the same for all lists of peaks.
pub(super) struct Room<'a> {
    pub ranking: Ranking,
    pub log_prior: Vec<f64>,
    pub templates: Vec<Template<'a>>,
    pub range: (f64, f64),
    pub question: &'a Question,
}

/// What was found in one list.
pub(super) struct Found {
    pub evidence: Vec<Evidence>,
    /// How bright its species are.
    pub brightness: Brightness,
    /// Per peak: match and probability, the most likely first.
    pub candidates: Vec<Vec<(Match, f64)>>,
}

impl<'a> Room<'a> {
    pub fn case<'c>(&'c self, matches: &'c Matches, density: &'c [f64]) -> Case<'c> {
        Case {
            templates: &self.templates,
            ranking: &self.ranking,
            matches,
            density,
            log_prior: &self.log_prior,
        }
    }

    pub fn find(&self, peaks: &[Peak], scale: Scale) -> Found {
        let matches = Matches::new(&self.templates, peaks, |nm| scale.at(nm));
        let density = peak_density(peaks, self.range);
        let case = self.case(&matches, &density);
        let (evidence, claimed) = case.species();
        let brightness = Brightness::new(self, &case, peaks, &evidence);
        let candidates = self.candidates(&case, peaks, &evidence, &claimed, &brightness);
        Found {
            evidence,
            brightness,
            candidates,
        }
    }

    /// Probabilities of what each peak is: expected numbers per nm of peaks of each feature at that
    /// place, against those of unknown origin.
    pub fn candidates(
        &self,
        case: &Case<'_>,
        peaks: &[Peak],
        evidence: &[Evidence],
        claimed: &[f64],
        brightness: &Brightness,
    ) -> Vec<Vec<(Match, f64)>> {
        let unexplained =
            claimed.iter().map(|c| 1.0 - c).sum::<f64>() / claimed.len().max(1) as f64;
        let unknown = unexplained.max(UNKNOWN_SHARE);
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
                    self.shown_in_second_order(case, m, of)
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
            list.retain(|c| c.1 >= WORTH_NAMING);
            list.sort_by(|a, b| b.1.total_cmp(&a.1).then(a.0.template.cmp(&b.0.template)));
            list.truncate(CANDIDATES);
        }
        weights
    }

    fn shown_in_second_order(&self, case: &Case<'_>, m: &Match, of: &Evidence) -> f64 {
        let Some(light) = &self.templates[m.template].light else {
            return SECOND_ORDER_LIGHT * case.shown(m.template, of);
        };
        let light = light[of.temperature];
        let second = SECOND_ORDER_LIGHT * light;
        if second > 0.0 {
            second / (second + of.weakest)
        } else {
            0.0
        }
    }

    pub fn peak(&self, peak: Peak, list: &[(Match, f64)]) -> PeakAnswer {
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

    pub fn species(
        &self,
        spectra: &[Spectrum],
        found: &Found,
        answers: &[PeakAnswer],
    ) -> Vec<SpeciesAnswer> {
        let nm = |list: &[usize]| list.iter().map(|&t| self.templates[t].nm).collect();
        let mut peaks = HashMap::new();
        for candidate in answers.iter().filter_map(PeakAnswer::attributed) {
            *peaks.entry(candidate.line.species).or_insert(0_usize) += 1;
        }
        let mut out: Vec<SpeciesAnswer> = spectra
            .iter()
            .zip(&found.evidence)
            .enumerate()
            .map(|(index, (spectrum, e))| SpeciesAnswer {
                judged: self.ranking.is_judged(index),
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
