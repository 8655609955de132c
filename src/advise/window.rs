//! `window`: what lies in this window, and what gets in its way?

use vocabulary::atom::Species;
use vocabulary::light::{Air, Medium, SpectralRange, SpectralWidth};
use vocabulary::spectrum::Line;

use super::coverage::{CHANCE_SAID, CHANCE_UNRATED, Coverage};
use super::emission::Conditions;
use super::error::AdviseError;
use super::position::{Placed, placed};
pub use super::scene::REACH_WIDTHS;
use super::scene::Scene;
use super::spectrum::Spectrum;
use super::verdict::{Interference, VerdictRange, Worst};

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
}

/// Answers the question from what is held of each species: lines from at least [`REACH_WIDTHS`]
/// instrument widths around the window.
///
/// # Errors
/// Conditions under which populations or profiles cannot be computed; air beyond its bounds.
pub fn answer(question: &Question, spectra: &[Spectrum]) -> Result<Answer, AdviseError> {
    let scene = Scene::new(spectra, &question.conditions, question.width)?;
    let judge = Judge::new(&scene, question);
    let inside = |nm: f64| question.range.contains_per_cm(1e7 / nm);
    let chosen: Vec<usize> = (0..scene.features.len())
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
    let unrated = judge.unjudged(&question.not_held);
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
            line: line.clone(),
        })
    };
    scene.features[feature]
        .components
        .iter()
        .map(place)
        .collect()
}

/// Judges the features of a scene.
struct Judge<'a, 's> {
    scene: &'a Scene<'s>,
    coverage: Vec<Coverage>,
    /// Species typed of which nothing is held.
    nothing_held: bool,
}

impl<'a, 's> Judge<'a, 's> {
    fn new(scene: &'a Scene<'s>, question: &Question) -> Self {
        let centre = question.range.centre_vacuum_nm();
        let coverage = (0..scene.spectra.len())
            .map(|s| Coverage::at(&scene.spectra[s], &scene.emitters[s], centre))
            .collect();
        Self {
            scene,
            coverage,
            nothing_held: !question.not_held.is_empty(),
        }
    }

    /// Whether a species without knowledge spoils the verdicts of others: it does where its stage
    /// was named, and where no stage of its element is known here.
    fn decides(&self, spectrum: usize) -> bool {
        let this = &self.scene.spectra[spectrum];
        let known = |c: &Coverage| !matches!(c, Coverage::Nothing { .. });
        if known(&self.coverage[spectrum]) || this.amount == 0.0 {
            return false;
        }
        let same_element = |s: &Spectrum| {
            s.species.atomic_number == this.species.atomic_number
                && s.species.isotope == this.species.isotope
        };
        let element_known = self
            .scene
            .spectra
            .iter()
            .zip(&self.coverage)
            .any(|(s, c)| same_element(s) && known(c));
        this.named || !element_known
    }

    fn complete_down_to(&self) -> Vec<(Species, f64)> {
        let known = |(spectrum, coverage): (&Spectrum, &Coverage)| match *coverage {
            Coverage::DownTo { fraction, .. } => Some((spectrum.species, fraction)),
            Coverage::Nothing { .. } => None,
        };
        self.scene
            .spectra
            .iter()
            .zip(&self.coverage)
            .filter_map(known)
            .collect()
    }

    fn unjudged(&self, not_held: &[String]) -> Vec<Unjudged> {
        let mut out: Vec<Unjudged> = not_held
            .iter()
            .map(|typed| Unjudged {
                species: typed.clone(),
                reason: "nothing is held of it".into(),
                decides: true,
            })
            .collect();
        for (index, coverage) in self.coverage.iter().enumerate() {
            let Coverage::Nothing { ground_term } = *coverage else {
                continue;
            };
            let reason = if ground_term {
                "only lines from its ground term are held here"
            } else {
                "no source claims to cover it here"
            };
            out.push(Unjudged {
                species: self.scene.spectra[index].species.to_string(),
                reason: reason.into(),
                decides: self.decides(index),
            });
        }
        out
    }

    fn feature(
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
        let mut unrated_near = Vec::new();
        for i in self.scene.around(target.nm, REACH_WIDTHS * width_nm) {
            let emission = &self.scene.emissions[i];
            if emission.feature == index {
                continue;
            }
            let own = emission.spectrum == target.spectrum;
            let offset_nm = emission.nm - target.nm;
            let Some(light) = emission.light else {
                let present = self.scene.spectra[emission.spectrum].amount > 0.0;
                if !own && present && offset_nm.abs() <= width_nm {
                    unrated_near.push(emission);
                }
                continue;
            };
            let part = light * emission.profile.density(offset_nm) / signal;
            if own {
                sum.own += part;
                continue;
            }
            let relative = emission
                .light_sigma
                .hypot(self.shift_sigma(index, i, width_nm));
            sum.add(part, relative);
            if part > out.worst.as_ref().map_or(0.0, |w| w.fraction) {
                out.worst = Some(Worst {
                    species: self.scene.spectra[emission.spectrum].species,
                    vacuum_nm: emission.nm,
                    fraction: part,
                    wing: offset_nm.abs() > 2.0 * width_nm,
                });
            }
        }
        out.own_species_fraction = Some(sum.own);
        let interference = sum.interference(target.signal_sigma);
        out.interference = Some(interference);
        out.verdict = interference.verdict();
        self.unknowns(index, &unrated_near, out);
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

    /// What is missing makes the verdict `unrated`, or is said beside it.
    fn unknowns(
        &self,
        index: usize,
        unrated_near: &[&super::scene::Emission<'_>],
        out: &mut WindowFeature,
    ) {
        let target = &self.scene.features[index];
        if !unrated_near.is_empty() {
            let names: Vec<String> = unrated_near
                .iter()
                .map(|e| format!("{} {:.3} nm", self.scene.spectra[e.spectrum].species, e.nm))
                .collect();
            out.verdict = VerdictRange::UNRATED;
            out.remarks.push(format!(
                "no rate is known for {} (vacuum)",
                names.join(", ")
            ));
        }
        let light = target.light.unwrap_or(0.0);
        let width_nm = self.scene.width.at_nm(target.nm);
        let mut expected = 0.0;
        let mut likeliest = (0.0, target.spectrum);
        let mut blind: Vec<Species> = Vec::new();
        for (s, coverage) in self.coverage.iter().enumerate() {
            if s == target.spectrum || self.scene.spectra[s].amount == 0.0 {
                continue;
            }
            match coverage.expected_unlisted(light, width_nm) {
                Some(number) => {
                    expected += number;
                    if number > likeliest.0 {
                        likeliest = (number, s);
                    }
                }
                None if self.decides(s) => {
                    out.verdict = VerdictRange::UNRATED;
                    blind.push(self.scene.spectra[s].species);
                }
                None => {}
            }
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
        let species = self.scene.spectra[likeliest.1].species;
        self.chance(1.0 - (-expected).exp(), species, out);
    }

    fn chance(&self, chance: f64, likeliest: Species, out: &mut WindowFeature) {
        out.unlisted_chance = chance;
        let said = format!(
            "{:.0} % chance that an unlisted line interferes, most likely of {likeliest}",
            100.0 * chance
        );
        if chance > CHANCE_UNRATED {
            out.verdict = VerdictRange::UNRATED;
            out.remarks.push(said);
        } else if chance >= CHANCE_SAID {
            out.remarks.push(said);
        }
    }
}

/// Interference in the making.
#[derive(Default)]
struct Sum {
    other: f64,
    variance: f64,
    own: f64,
}

impl Sum {
    fn add(&mut self, part: f64, relative_uncertainty: f64) {
        self.other += part;
        self.variance += (part * relative_uncertainty).powi(2);
    }

    fn interference(&self, target_sigma: f64) -> Interference {
        let own = if self.other > 0.0 {
            self.variance.sqrt() / self.other
        } else {
            0.0
        };
        Interference::new(self.other, own.hypot(target_sigma))
    }
}
