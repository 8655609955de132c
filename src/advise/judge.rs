//! Judging features: what others put where a feature is, and what nobody can know.

use vocabulary::atom::Species;
use vocabulary::light::{Air, Medium, PositionMedium};

use super::coverage::Coverage;
use super::error::AdviseError;
use super::position::placed_or_vacuum;
use super::scene::Scene;
use super::spectrum::Spectrum;
use super::sum::Sum;
use super::unlisted::{Knowledge, say_unlisted};
use super::unrated::Unrated;
use super::verdict::{Interference, VerdictRange, Worst};
use super::window::{Unjudged, WindowFeature};

/// How many lines are named in one sentence.
const NAMED: usize = 4;
/// From this chance on, lines without a rate that may change a verdict are named.
const CHANCE_NAMED: f64 = 0.01;

/// Judges the features of a scene.
pub(super) struct Judge<'a, 's> {
    scene: &'a Scene<'s>,
    known: Knowledge<'a, 's>,
    /// Species typed of which nothing is held.
    nothing_held: bool,
}

impl<'a, 's> Judge<'a, 's> {
    /// `centre_nm` (vacuum) is where the scope of the sources is looked up.
    pub(super) fn new(scene: &'a Scene<'s>, centre_nm: f64, nothing_held: bool) -> Self {
        Self {
            scene,
            known: Knowledge::new(scene, centre_nm),
            nothing_held,
        }
    }

    pub(super) fn complete_down_to(&self) -> Vec<(Species, f64)> {
        let known = |(spectrum, coverage): (&Spectrum, &Coverage)| match *coverage {
            Coverage::DownTo { fraction, .. } => Some((spectrum.species, fraction)),
            Coverage::Nothing { .. } => None,
        };
        self.scene
            .spectra
            .iter()
            .zip(self.known.at_centre().iter())
            .filter_map(known)
            .collect()
    }

    /// Species that cannot be judged; that of the target, where there is one, need not be.
    pub(super) fn unjudged(&self, not_held: &[String], target: Option<usize>) -> Vec<Unjudged> {
        let mut out: Vec<Unjudged> = not_held
            .iter()
            .map(|typed| Unjudged {
                species: typed.clone(),
                reason: "nothing is held of it".into(),
                counted: false,
                decides: true,
            })
            .collect();
        for (index, coverage) in self.known.at_centre().iter().enumerate() {
            let Coverage::Nothing { ground_term, .. } = *coverage else {
                continue;
            };
            if self.scene.emitters[index].is_absent || Some(index) == target {
                continue;
            }
            let decides = self.known.decides(self.known.at_centre(), index);
            let reason = if ground_term {
                "only lines from its ground term are held here"
            } else {
                "no source claims to cover it here"
            };
            out.push(Unjudged {
                species: self.scene.spectra[index].species.to_string(),
                reason: reason.into(),
                counted: !decides && self.known.stands_in(index),
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
        let mut out = self.unjudged_feature(index, total, medium, air)?;
        self.interfere(index, &mut out);
        out.worst_placed = out
            .worst
            .as_ref()
            .map(|w| placed_or_vacuum(1e7 / w.vacuum_nm, 0.0, medium, air))
            .transpose()?;
        Ok(out)
    }

    /// Judges a feature behind a filter: `interference` is what the rated lines do there, and
    /// `unrated` what the others may do.
    pub(super) fn filtered(
        &self,
        index: usize,
        medium: Medium,
        air: &Air,
        interference: Option<Interference>,
        unrated: &Unrated,
    ) -> Result<WindowFeature, AdviseError> {
        let mut out = self.unjudged_feature(index, 0.0, medium, air)?;
        let Some(interference) = interference else {
            if self.scene.features[index].light.is_none_or(|l| l <= 0.0) {
                out.remarks.push(self.why_unknown(index).into());
            }
            return Ok(out);
        };
        out.interference = Some(interference);
        out.verdict = interference.verdict();
        self.rateless(unrated, &mut out);
        self.unknowns(index, &mut out);
        Ok(out)
    }

    fn unjudged_feature(
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
        Ok(WindowFeature {
            species: self.scene.spectra[feature.spectrum].species,
            placed: placed_or_vacuum(1e7 / feature.nm, sigma, medium, air)?,
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
        })
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
            out.remarks.push(self.why_unknown(index).into());
            return;
        };
        let width_nm = self.scene.width.at_nm(target.nm);
        let mut sum = Sum::default();
        for part in self.parts(index, signal) {
            if part.own {
                sum.own += part.fraction;
                continue;
            }
            let of = self.scene.emissions[part.emission].spectrum;
            sum.add(of, part.fraction, part.relative_sigma);
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
        let target_sigma = target.signal_sigma.hypot(self.own_pressure_sigma(index));
        let interference = sum.interference(self.scene, target.spectrum, target_sigma);
        out.interference = Some(interference);
        out.verdict = interference.verdict();
        let unrated = Unrated::around(self.scene, index, interference.fraction);
        self.rateless(&unrated, out);
        self.unknowns(index, out);
    }

    /// Why the light of a feature is not known.
    fn why_unknown(&self, index: usize) -> &'static str {
        let target = &self.scene.features[index];
        let emitter = &self.scene.emitters[target.spectrum];
        let mut lines = target
            .components
            .iter()
            .map(|&c| self.scene.emissions[c].line);
        if emitter.is_absent {
            "there is none of its species"
        } else if target.light.is_some() {
            "it emits nothing under these conditions"
        } else if lines.any(|l| emitter.is_unfed(l)) {
            "no excitation of it is known (none is dipole-allowed from the ground term, and cascades \
             bring little); the population of a metastable level may help (--metastable)"
        } else {
            "its own rate is not known"
        }
    }

    /// Relative 1 σ of a feature's own signal from pressure widths that are not known exactly.
    pub(super) fn own_pressure_sigma(&self, index: usize) -> f64 {
        let target = &self.scene.features[index];
        let sigma = |&c: &usize| {
            let emission = &self.scene.emissions[c];
            self.scene.pressure_sigma(emission, emission.nm - target.nm)
        };
        target.components.iter().map(sigma).fold(0.0, f64::max)
    }

    /// What each rated line outside a feature adds to its signal, lines by wavelength.
    pub(super) fn parts(&self, index: usize, signal: f64) -> Vec<Part> {
        let target = &self.scene.features[index];
        let width_nm = self.scene.width.at_nm(target.nm);
        let around = self.scene.reaching(target.nm, width_nm);
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
                    .hypot(self.shift_sigma(index, i, width_nm))
                    .hypot(self.scene.pressure_sigma(emission, offset_nm)),
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
        let medium = out.placed.medium;
        let name = |index: usize| self.name(index, medium);
        let (unfed, rateless): (Vec<usize>, Vec<usize>) =
            unrated.unbounded.iter().partition(|&&i| {
                let emission = &self.scene.emissions[i];
                self.scene.emitters[emission.spectrum].is_unfed(emission.line)
            });
        let names = |lines: Vec<usize>| {
            let mut words: Vec<String> = lines.iter().take(NAMED).map(|&i| name(i)).collect();
            if lines.len() > NAMED {
                words.push(format!("{} more", lines.len() - NAMED));
            }
            words.join(", ")
        };
        if !rateless.is_empty() {
            out.remarks
                .push(format!("no rate is known for {}", names(rateless)));
        }
        if !unfed.is_empty() {
            out.remarks
                .push(format!("no excitation is known of {}", names(unfed)));
        }
        if let (Some(chance), Some(&(first, ..))) = (unrated.chance, unrated.bounded.first())
            && chance >= CHANCE_NAMED
        {
            out.remarks.push(format!(
                "{:.0} % chance ({}) that {} change the verdict, first {}",
                100.0 * chance,
                self.prior_words(first).0,
                self.prior_words(first).1,
                name(first)
            ));
        }
    }

    /// A line in words: its wavelength in the medium of the target, or with its own named.
    fn name(&self, index: usize, medium: PositionMedium) -> String {
        let emission = &self.scene.emissions[index];
        let species = self.scene.spectra[emission.spectrum].species;
        let wavenumber = 1e7 / emission.nm;
        let own = match medium {
            PositionMedium::Air => Medium::Air,
            PositionMedium::Vacuum => Medium::Vacuum,
        };
        match placed_or_vacuum(wavenumber, 0.0, own, Air::standard()) {
            Ok(at) if at.medium == medium => format!("{species} {:.3} nm", at.wavelength_nm),
            _ => format!("{species} {:.3} nm (vacuum)", emission.nm),
        }
    }

    /// What bounds a line, and what such lines lack.
    fn prior_words(&self, index: usize) -> (&'static str, &'static str) {
        let emission = &self.scene.emissions[index];
        if emission.line.rate_per_s.is_some() {
            (
                "usual collision strengths",
                "lines without a known excitation",
            )
        } else {
            ("prior for unknown rates", "lines without a rate")
        }
    }

    /// What is missing makes the verdict `unrated`, or is said beside it.
    fn unknowns(&self, index: usize, out: &mut WindowFeature) {
        let target = &self.scene.features[index];
        let light = target.light.unwrap_or(0.0);
        let width_nm = self.scene.width.at_nm(target.nm);
        let mut expected: Vec<(f64, Species)> = Vec::new();
        let mut blind: Vec<Species> = Vec::new();
        let coverage = self.known.at(target.nm);
        for (s, known) in coverage.iter().enumerate() {
            if s == target.spectrum || self.scene.emitters[s].is_absent {
                continue;
            }
            let number = match known.expected_unlisted(light, width_nm) {
                Some(number) => number,
                None if self.known.decides(&coverage, s) => {
                    out.verdict = VerdictRange::UNRATED;
                    blind.push(self.scene.spectra[s].species);
                    continue;
                }
                None => self.known.stand_in(&coverage, s, width_nm),
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
        say_unlisted(&expected, out);
    }
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
