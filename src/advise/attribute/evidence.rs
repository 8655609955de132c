//! Which species a list of peaks speaks for.
//!
//! Features of one species in the range are taken from the strongest down. A present species
//! shows each of the first k with probability d, an absent one only by chance, so that
//! ln L(k) = Σ ln((1 − d) + d ((1 − c) N(δ)/ρ + c)), N being the normal density of the position
//! difference, ρ the density of peaks there and c the probability that the peak is that of a species
//! already found: it then says nothing (Bayes; the sum is a likelihood ratio). The largest over k is
//! the evidence, less ln(k + 1) for the choice of k; over temperatures likewise. Species are taken
//! one after the other, the strongest evidence first.

use super::features::Template;
use super::matches::Matches;
use super::{LARGEST_PRIOR, PRESENT};

/// Chance that a present species shows a feature at least as strong as its weakest counted one. A
/// choice: peak lists leave out blended lines, and rates are off.
const SHOWN: f64 = 0.6;
/// The same for features of which no rate is known, at most …
const SHOWN_UNRATED: f64 = 0.05;
/// … and so many of them in all: of lines that follow from levels alone hardly one is seen, and a
/// species with thousands of them must not be found on their account.
const SHOWN_UNRATED_IN_ALL: f64 = 2.0;
/// Fewest matched features of a species that nobody named, among many: one alone is chance.
const FEWEST_MATCHED: usize = 2;
/// Beyond this loss nothing can make good what is missing.
const GIVE_UP: f64 = -40.0;

/// What is known of one species.
#[derive(Clone, Debug, Default)]
pub struct Evidence {
    /// Logarithm of the likelihood ratio of present to absent.
    pub log_ratio: f64,
    /// Probability that it is present.
    pub probability: f64,
    /// Found present.
    pub present: bool,
    /// Index of the temperature that fits best.
    pub temperature: usize,
    /// Light of the weakest feature that counted, else of the strongest.
    pub weakest: f64,
    /// Templates that counted and are matched, the strongest first.
    pub matched: Vec<usize>,
    /// Templates that counted and have no peak, the strongest first.
    pub missing: Vec<usize>,
}

/// Features of each species that lie in the range of the peaks, by light, per temperature.
pub struct Ranking {
    ranked: Vec<Vec<Vec<usize>>>,
    unrated: Vec<Vec<usize>>,
}

impl Ranking {
    /// Ranks the features between two wavelengths (vacuum nm).
    pub fn new(
        templates: &[Template<'_>],
        spectra: usize,
        temperatures: usize,
        range: (f64, f64),
    ) -> Self {
        let mut rated = vec![Vec::new(); spectra];
        let mut unrated = vec![Vec::new(); spectra];
        for (index, template) in templates.iter().enumerate() {
            if template.nm < range.0 || template.nm > range.1 {
                continue;
            }
            match template.light {
                Some(_) => rated[template.spectrum].push(index),
                None => unrated[template.spectrum].push(index),
            }
        }
        let light = |i: usize, t: usize| templates[i].light.as_ref().map_or(0.0, |l| l[t]);
        let by_light = |of: &Vec<usize>, t: usize| -> Vec<usize> {
            let mut order: Vec<(f64, usize)> = of.iter().map(|&i| (light(i, t), i)).collect();
            order.sort_by(|a, b| b.0.total_cmp(&a.0).then(a.1.cmp(&b.1)));
            order
                .into_iter()
                .filter(|(l, _)| *l > 0.0)
                .map(|(_, i)| i)
                .collect()
        };
        let ranked = rated
            .iter()
            .map(|of| (0..temperatures).map(|t| by_light(of, t)).collect())
            .collect();
        Self { ranked, unrated }
    }

    /// Whether a species has a feature in the range.
    pub fn is_judged(&self, species: usize) -> bool {
        let rated = self.ranked[species].first().is_some_and(|r| !r.is_empty());
        rated || !self.unrated[species].is_empty()
    }

    fn all(&self, species: usize, temperature: usize) -> impl Iterator<Item = usize> {
        let ranked = self.ranked[species].get(temperature).into_iter().flatten();
        ranked.chain(&self.unrated[species]).copied()
    }
}

/// All that the choice of species needs.
pub struct Case<'a> {
    /// Features.
    pub templates: &'a [Template<'a>],
    /// Features in range, ranked.
    pub ranking: &'a Ranking,
    /// Where features and peaks meet.
    pub matches: &'a Matches,
    /// Density of peaks, 1/nm.
    pub density: &'a [f64],
    /// Logarithm of the prior odds of each species.
    pub log_prior: &'a [f64],
}

impl Case<'_> {
    /// Finds the species that are present; also gives how far each peak is accounted for.
    pub fn species(&self) -> (Vec<Evidence>, Vec<f64>) {
        let count = self.log_prior.len();
        let mut claimed = vec![0.0; self.density.len()];
        let mut weight = vec![0.0; self.density.len()];
        let mut out: Vec<Evidence> = (0..count).map(|s| self.evidence(s, &claimed)).collect();
        loop {
            let odds = |s: usize| out[s].log_ratio + self.log_prior[s];
            let best = (0..count)
                .filter(|&s| !out[s].present && self.passes(s, &out[s]))
                .max_by(|&a, &b| odds(a).total_cmp(&odds(b)).then(b.cmp(&a)));
            let Some(best) = best else { break };
            out[best].present = true;
            let touched = self.claim(best, &out[best], &mut weight, &mut claimed);
            for s in self.species_at(&touched) {
                if !out[s].present {
                    out[s] = self.evidence(s, &claimed);
                }
            }
        }
        (out, claimed)
    }

    fn passes(&self, species: usize, evidence: &Evidence) -> bool {
        let even = (LARGEST_PRIOR / (1.0 - LARGEST_PRIOR)).ln();
        let fewest = if self.log_prior[species] < even {
            FEWEST_MATCHED
        } else {
            1
        };
        evidence.probability >= PRESENT && evidence.matched.len() >= fewest
    }

    /// Chance that a feature of unknown rate of a present species is seen.
    fn shown_unrated(&self, species: usize) -> f64 {
        let count = self.ranking.unrated[species].len().max(1) as f64;
        SHOWN_UNRATED.min(SHOWN_UNRATED_IN_ALL / count)
    }

    /// Species with a feature at any of these peaks.
    fn species_at(&self, touched: &[bool]) -> Vec<usize> {
        let mut hit = vec![false; self.log_prior.len()];
        for m in self
            .matches
            .all
            .iter()
            .filter(|m| m.order == 1 && touched[m.peak])
        {
            hit[self.templates[m.template].spectrum] = true;
        }
        (0..hit.len()).filter(|&s| hit[s]).collect()
    }

    /// Adds a species to what accounts for the peaks; tells which it touches.
    fn claim(
        &self,
        species: usize,
        evidence: &Evidence,
        weight: &mut [f64],
        claimed: &mut [f64],
    ) -> Vec<bool> {
        let mut touched = vec![false; claimed.len()];
        for template in self.ranking.all(species, evidence.temperature) {
            let shown = self.shown(template, evidence);
            for m in self.matches.of(template).iter().filter(|m| m.order == 1) {
                weight[m.peak] += shown * m.density;
                touched[m.peak] = true;
            }
        }
        for (i, _) in touched.iter().enumerate().filter(|(_, touched)| **touched) {
            claimed[i] = weight[i] / (weight[i] + super::UNKNOWN_SHARE * self.density[i]);
        }
        touched
    }

    /// Chance that a feature of a present species is seen: L/(L + light of the weakest counted).
    pub fn shown(&self, template: usize, evidence: &Evidence) -> f64 {
        let Some(light) = &self.templates[template].light else {
            return self.shown_unrated(self.templates[template].spectrum);
        };
        let light = light[evidence.temperature];
        if light > 0.0 {
            light / (light + evidence.weakest)
        } else {
            0.0
        }
    }

    fn evidence(&self, species: usize, claimed: &[f64]) -> Evidence {
        let rankings = &self.ranking.ranked[species];
        let mut best = if rankings.first().is_some_and(|r| !r.is_empty()) {
            (0..rankings.len())
                .map(|t| self.along(&rankings[t], t, SHOWN, claimed))
                .max_by(|a, b| a.log_ratio.total_cmp(&b.log_ratio))
                .unwrap_or_default()
        } else {
            let shown = self.shown_unrated(species);
            self.along(&self.ranking.unrated[species], 0, shown, claimed)
        };
        let odds = best.log_ratio + self.log_prior[species];
        best.probability = 1.0 / (1.0 + (-odds).exp());
        best
    }

    /// The largest of the sums over the first k features.
    fn along(&self, ranked: &[usize], temperature: usize, shown: f64, claimed: &[f64]) -> Evidence {
        let mut used: Vec<usize> = Vec::new();
        let (mut sum, mut best, mut until) = (0.0, 0.0, 0);
        let mut states: Vec<(usize, bool)> = Vec::new();
        for (k, &template) in ranked.iter().enumerate() {
            let first_order = self.matches.of(template).iter().filter(|m| m.order == 1);
            let nearest = first_order.max_by(|a, b| a.density.total_cmp(&b.density));
            let mut is_matched = false;
            let factor = nearest.map_or(0.0, |m| {
                let taken = if used.contains(&m.peak) {
                    1.0
                } else {
                    claimed[m.peak]
                };
                used.push(m.peak);
                is_matched = taken < 0.5;
                (1.0 - taken) * m.density / self.density[m.peak] + taken
            });
            sum += ((1.0 - shown) + shown * factor).ln();
            if nearest.is_none() || is_matched {
                states.push((template, is_matched));
            }
            let judged = sum - ((k + 2) as f64).ln();
            if judged > best {
                (best, until) = (judged, states.len());
            }
            if sum < GIVE_UP {
                break;
            }
        }
        let counted = &states[..until];
        let weakest = counted
            .iter()
            .filter_map(|(i, _)| self.templates[*i].light.as_ref().map(|l| l[temperature]))
            .fold(f64::INFINITY, f64::min);
        let strongest = ranked
            .first()
            .and_then(|&i| self.templates[i].light.as_ref())
            .map_or(f64::INFINITY, |l| l[temperature]);
        let of = |wanted: bool| {
            counted
                .iter()
                .filter(|s| s.1 == wanted)
                .map(|s| s.0)
                .collect()
        };
        Evidence {
            log_ratio: if until > 0 {
                best
            } else {
                sum.clamp(GIVE_UP, 0.0)
            },
            probability: 0.0,
            present: false,
            temperature,
            // Where none counted the strongest alone may be seen.
            weakest: if weakest.is_finite() {
                weakest
            } else {
                strongest
            },
            matched: of(true),
            missing: of(false),
        }
    }
}
