//! Judging features: what others put where a feature is, and what nobody can know.

use std::cell::RefCell;
use std::collections::HashMap;
use std::rc::Rc;

use vocabulary::atom::Species;
use vocabulary::light::{Air, Medium};

use super::coverage::{CHANCE_SAID, CHANCE_UNRATED, Coverage};
use super::error::AdviseError;
use super::position::placed;
use super::scene::{REACH_WIDTHS, Scene};
use super::spectrum::Spectrum;
use super::unrated::Unrated;
use super::verdict::{Interference, VerdictRange, Worst};
use super::window::{Unjudged, WindowFeature};

/// From this chance on, lines without a rate that may change a verdict are named.
const CHANCE_NAMED: f64 = 0.01;

/// Species whose unlisted lines are this likely against those of the first are named beside it.
const LIKELY: f64 = 1.0 / 3.0;
/// How many are named.
const NAMED: usize = 3;

/// Features this near to the centre (as a fraction of it) share its coverage; others share that of a
/// place twice as far apart from the next.
const SHARED: f64 = 0.01;

/// Neutral atoms and first ions: a source that shows the one may well show the other.
const ARC_STAGES: std::ops::RangeInclusive<u8> = 1..=2;

/// Judges the features of a scene.
pub(super) struct Judge<'a, 's> {
    scene: &'a Scene<'s>,
    centre_nm: f64,
    /// What is known at the centre, species by species.
    coverage: Rc<[Coverage]>,
    /// The same at other places, by their number.
    elsewhere: RefCell<HashMap<i64, Rc<[Coverage]>>>,
    /// Species typed of which nothing is held.
    nothing_held: bool,
}

impl<'a, 's> Judge<'a, 's> {
    /// `centre_nm` (vacuum) is where the scope of the sources is looked up.
    pub(super) fn new(scene: &'a Scene<'s>, centre_nm: f64, nothing_held: bool) -> Self {
        Self {
            scene,
            centre_nm,
            coverage: coverage(scene, centre_nm),
            elsewhere: RefCell::default(),
            nothing_held,
        }
    }

    /// What is known around a place.
    fn coverage_at(&self, nm: f64) -> Rc<[Coverage]> {
        let step = (nm / self.centre_nm).ln() / (2.0 * SHARED);
        let place = step.round();
        if place == 0.0 || !place.is_finite() {
            return self.coverage.clone();
        }
        let there = || coverage(self.scene, self.centre_nm * (place * 2.0 * SHARED).exp());
        let mut elsewhere = self.elsewhere.borrow_mut();
        elsewhere.entry(place as i64).or_insert_with(there).clone()
    }

    /// Whether a species without knowledge spoils the verdicts of others: it does where its stage
    /// was named, and where no stage of its element is known here.
    fn decides(&self, coverage: &[Coverage], spectrum: usize) -> bool {
        let this = &self.scene.spectra[spectrum];
        if coverage[spectrum].is_known() || this.amount == 0.0 {
            return false;
        }
        let element_known = self.siblings(coverage, spectrum).next().is_some();
        this.named || !element_known
    }

    /// What is known of stages of the same element that are covered.
    fn siblings<'c>(
        &self,
        coverage: &'c [Coverage],
        spectrum: usize,
    ) -> impl Iterator<Item = &'c Coverage> {
        let this = self.scene.spectra[spectrum].species;
        let same_element = move |s: &Spectrum| {
            s.species.atomic_number == this.atomic_number && s.species.isotope == this.isotope
        };
        let spectra = self.scene.spectra;
        (spectra.iter().zip(coverage))
            .filter(move |(s, c)| same_element(s) && c.is_known())
            .map(|(_, c)| c)
    }

    /// Whether a species without knowledge that does not decide is taken to lie as dense as what is
    /// held of its element.
    fn stands_in(&self, spectrum: usize) -> bool {
        ARC_STAGES.contains(&self.scene.spectra[spectrum].species.stage)
    }

    /// Expected number of unlisted lines of such a species.
    fn stand_in(&self, coverage: &[Coverage], spectrum: usize, width_nm: f64) -> f64 {
        if !self.stands_in(spectrum) {
            return 0.0;
        }
        let own = coverage[spectrum].unlisted_per_nm();
        let densest = self
            .siblings(coverage, spectrum)
            .map(Coverage::unlisted_per_nm)
            .fold(own, f64::max);
        densest * width_nm
    }

    pub(super) fn complete_down_to(&self) -> Vec<(Species, f64)> {
        let known = |(spectrum, coverage): (&Spectrum, &Coverage)| match *coverage {
            Coverage::DownTo { fraction, .. } => Some((spectrum.species, fraction)),
            Coverage::Nothing { .. } => None,
        };
        self.scene
            .spectra
            .iter()
            .zip(self.coverage.iter())
            .filter_map(known)
            .collect()
    }

    pub(super) fn unjudged(&self, not_held: &[String]) -> Vec<Unjudged> {
        let mut out: Vec<Unjudged> = not_held
            .iter()
            .map(|typed| Unjudged {
                species: typed.clone(),
                reason: "nothing is held of it".into(),
                counted: false,
                decides: true,
            })
            .collect();
        for (index, coverage) in self.coverage.iter().enumerate() {
            let Coverage::Nothing { ground_term, .. } = *coverage else {
                continue;
            };
            let decides = self.decides(&self.coverage, index);
            let reason = if ground_term {
                "only lines from its ground term are held here"
            } else {
                "no source claims to cover it here"
            };
            out.push(Unjudged {
                species: self.scene.spectra[index].species.to_string(),
                reason: reason.into(),
                counted: !decides && self.stands_in(index),
                decides,
            });
        }
        out
    }

    pub(super) fn feature(
        &self,
        index: usize,
        total: f64,
        medium: Medium,
        air: &Air,
    ) -> Result<WindowFeature, AdviseError> {
        let feature = &self.scene.features[index];
        let sigma = feature
            .components
            .iter()
            .map(|&c| self.scene.emissions[c].line.wavenumber_uncertainty_per_cm)
            .fold(f64::INFINITY, f64::min);
        let (rate_per_s, rate_relative_uncertainty) = self.mean_rate(index);
        let mut out = WindowFeature {
            species: self.scene.spectra[feature.spectrum].species,
            placed: placed(1e7 / feature.nm, sigma, medium, air)?,
            components: Vec::new(),
            rate_per_s,
            rate_relative_uncertainty,
            light_fraction: feature.light.filter(|_| total > 0.0).map(|l| l / total),
            interference: None,
            own_species_fraction: None,
            verdict: VerdictRange::UNRATED,
            remarks: Vec::new(),
            worst: None,
            worst_placed: None,
            unlisted_chance: 0.0,
            prior_chance: None,
        };
        self.interfere(index, &mut out);
        out.worst_placed = out
            .worst
            .as_ref()
            .map(|w| placed(1e7 / w.vacuum_nm, 0.0, medium, air))
            .transpose()?;
        Ok(out)
    }

    /// Σ g A / Σ g over the rated components, each upper level counted once.
    fn mean_rate(&self, index: usize) -> (Option<f64>, Option<f64>) {
        let mut uppers: Vec<(u32, f64)> = Vec::new();
        let (mut sum, mut variance, mut stated) = (0.0, 0.0, true);
        for &component in &self.scene.features[index].components {
            let line = self.scene.emissions[component].line;
            let Some((rate, upper)) = line.rate_per_s.zip(line.upper.as_ref()) else {
                continue;
            };
            let Some(g) = upper.g else { continue };
            if !uppers.iter().any(|(number, _)| *number == upper.number) {
                uppers.push((upper.number, g));
            }
            sum += g * rate;
            match line.rate_relative_uncertainty {
                Some(relative) => variance += (g * rate * relative).powi(2),
                None => stated = false,
            }
        }
        let weight: f64 = uppers.iter().map(|(_, g)| g).sum();
        if weight <= 0.0 || sum <= 0.0 {
            return (None, None);
        }
        (Some(sum / weight), stated.then(|| variance.sqrt() / sum))
    }

    /// Sums what others put where the target is, and what nobody can know.
    fn interfere(&self, index: usize, out: &mut WindowFeature) {
        let target = &self.scene.features[index];
        let Some(signal) = target.signal.filter(|s| *s > 0.0) else {
            out.remarks.push("its own rate is not known".into());
            return;
        };
        let width_nm = self.scene.width.at_nm(target.nm);
        let mut sum = Sum::default();
        for part in self.parts(index, signal) {
            if part.own {
                sum.own += part.fraction;
                continue;
            }
            sum.add(part.fraction, part.relative_sigma);
            if part.fraction > out.worst.as_ref().map_or(0.0, |w| w.fraction) {
                let emission = &self.scene.emissions[part.emission];
                out.worst = Some(Worst {
                    species: self.scene.spectra[emission.spectrum].species,
                    vacuum_nm: emission.nm,
                    fraction: part.fraction,
                    wing: part.offset_nm.abs() > 2.0 * width_nm,
                });
            }
        }
        out.own_species_fraction = Some(sum.own);
        let interference = sum.interference(target.signal_sigma);
        out.interference = Some(interference);
        out.verdict = interference.verdict();
        let reach_nm = REACH_WIDTHS * width_nm;
        let unrated = Unrated::around(self.scene, index, reach_nm, interference.fraction);
        self.rateless(&unrated, out);
        self.unknowns(index, out);
    }

    /// What each rated line outside a feature adds to its signal, lines by wavelength.
    pub(super) fn parts(&self, index: usize, signal: f64) -> Vec<Part> {
        let target = &self.scene.features[index];
        let width_nm = self.scene.width.at_nm(target.nm);
        let around = self.scene.around(target.nm, REACH_WIDTHS * width_nm);
        let part = |i: usize| {
            let emission = &self.scene.emissions[i];
            let offset_nm = emission.nm - target.nm;
            let light = emission.light.filter(|_| emission.feature != index)?;
            Some(Part {
                emission: i,
                offset_nm,
                fraction: light * emission.profile.density(offset_nm) / signal,
                relative_sigma: emission
                    .light_sigma
                    .hypot(self.shift_sigma(index, i, width_nm)),
                own: emission.spectrum == target.spectrum,
            })
        };
        around.filter_map(part).collect()
    }

    /// Relative 1 σ of an overlap from the uncertainty of the distance: half the difference of the
    /// overlaps one σ nearer and farther, over the overlap.
    fn shift_sigma(&self, target: usize, other: usize, width_nm: f64) -> f64 {
        let target = &self.scene.features[target];
        let other = &self.scene.emissions[other];
        let own = target
            .components
            .iter()
            .map(|&c| self.scene.emissions[c].sigma_nm)
            .fold(f64::INFINITY, f64::min);
        let sigma = own.hypot(other.sigma_nm);
        if sigma < 1e-3 * width_nm {
            return 0.0;
        }
        let offset = other.nm - target.nm;
        let [near, at, far] =
            [offset - sigma, offset, offset + sigma].map(|o| other.profile.density(o));
        if at > 0.0 {
            (near - far).abs() / (2.0 * at)
        } else {
            0.0
        }
    }

    /// Lines without a rate make the verdict `unrated` where nothing bounds them, or where the
    /// bound leaves more than a small chance that they change it.
    fn rateless(&self, unrated: &Unrated, out: &mut WindowFeature) {
        out.prior_chance = unrated.chance;
        if unrated.decides() {
            out.verdict = VerdictRange::UNRATED;
        }
        let name = |index: usize| {
            let emission = &self.scene.emissions[index];
            let species = self.scene.spectra[emission.spectrum].species;
            format!("{species} {:.3} nm", emission.nm)
        };
        if !unrated.unbounded.is_empty() {
            let names: Vec<String> = unrated.unbounded.iter().map(|&i| name(i)).collect();
            out.remarks.push(format!(
                "no rate is known for {} (vacuum)",
                names.join(", ")
            ));
        }
        if let (Some(chance), Some(&(first, ..))) = (unrated.chance, unrated.bounded.first())
            && chance >= CHANCE_NAMED
        {
            out.remarks.push(format!(
                "{:.0} % chance (prior for unknown rates) that lines without a rate change the \
                 verdict, first {} (vacuum)",
                100.0 * chance,
                name(first)
            ));
        }
    }

    /// What is missing makes the verdict `unrated`, or is said beside it.
    fn unknowns(&self, index: usize, out: &mut WindowFeature) {
        let target = &self.scene.features[index];
        let light = target.light.unwrap_or(0.0);
        let width_nm = self.scene.width.at_nm(target.nm);
        let mut expected: Vec<(f64, Species)> = Vec::new();
        let mut blind: Vec<Species> = Vec::new();
        let coverage = self.coverage_at(target.nm);
        for (s, known) in coverage.iter().enumerate() {
            if s == target.spectrum || self.scene.spectra[s].amount == 0.0 {
                continue;
            }
            let number = match known.expected_unlisted(light, width_nm) {
                Some(number) => number,
                None if self.decides(&coverage, s) => {
                    out.verdict = VerdictRange::UNRATED;
                    blind.push(self.scene.spectra[s].species);
                    continue;
                }
                None => self.stand_in(&coverage, s, width_nm),
            };
            expected.push((number, self.scene.spectra[s].species));
        }
        if let Some(first) = blind.first() {
            let more = blind.len() - 1;
            let others = if more > 0 {
                format!(" (nor {more} more)")
            } else {
                String::new()
            };
            out.remarks
                .push(format!("{first} cannot be judged here{others}"));
        }
        if self.nothing_held {
            out.verdict = VerdictRange::UNRATED;
            out.remarks
                .push("nothing is held of a species that was asked for".into());
        }
        expected.sort_by(|a, b| b.0.total_cmp(&a.0));
        unlisted(&expected, out);
    }
}

/// Says the chance that an unlisted line interferes, from the expected numbers of each species, the
/// largest first.
fn unlisted(expected: &[(f64, Species)], out: &mut WindowFeature) {
    let all: f64 = expected.iter().map(|(number, _)| number).sum();
    let chance = 1.0 - (-all).exp();
    out.unlisted_chance = chance;
    let likeliest = expected.first().map_or(0.0, |e| e.0);
    let names: Vec<String> = (expected.iter())
        .filter(|e| e.0 >= LIKELY * likeliest)
        .take(NAMED)
        .map(|e| e.1.to_string())
        .collect();
    let said = format!(
        "{:.0} % chance that an unlisted line interferes, most likely of {}",
        100.0 * chance,
        either(&names)
    );
    if chance > CHANCE_UNRATED {
        out.verdict = VerdictRange::UNRATED;
        out.remarks.push(said);
    } else if chance >= CHANCE_SAID {
        out.remarks.push(said);
    }
}

/// `A`, `A or B`, `A, B or C`.
fn either(names: &[String]) -> String {
    match names {
        [before @ .., last] if !before.is_empty() => format!("{} or {last}", before.join(", ")),
        _ => names.concat(),
    }
}

fn coverage(scene: &Scene<'_>, nm: f64) -> Rc<[Coverage]> {
    (scene.spectra.iter().zip(&scene.emitters))
        .map(|(spectrum, emitter)| Coverage::at(spectrum, emitter, nm))
        .collect()
}

/// What one line adds to the signal of a feature.
#[derive(Clone, Copy, Debug)]
pub(super) struct Part {
    /// Index of the line in the scene.
    pub emission: usize,
    /// Its position minus that of the feature, nm.
    pub offset_nm: f64,
    /// Its light at the feature over the light of the feature.
    pub fraction: f64,
    /// Relative 1 σ of its light there.
    pub relative_sigma: f64,
    /// It is of the species of the feature.
    pub own: bool,
}

/// Interference in the making.
#[derive(Default)]
pub(super) struct Sum {
    /// Fraction of other species.
    pub other: f64,
    variance: f64,
    /// Fraction of other features of the same species.
    pub own: f64,
}

impl Sum {
    pub(super) fn add(&mut self, part: f64, relative_uncertainty: f64) {
        self.other += part;
        self.variance += (part * relative_uncertainty).powi(2);
    }

    pub(super) fn interference(&self, target_sigma: f64) -> Interference {
        let own = if self.other > 0.0 {
            self.variance.sqrt() / self.other
        } else {
            0.0
        };
        Interference::new(self.other, own.hypot(target_sigma))
    }
}
