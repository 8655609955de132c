//! `passband`: what does a filter let through, and how pure is the line behind it?

use vocabulary::atom::Species;
use vocabulary::light::{Air, Medium, SpectralWidth};
use vocabulary::spectrum::Line;

use super::background::{Background, background};
use super::emission::{Conditions, emitters};
use super::error::AdviseError;
use super::feature::numbered;
use super::judge::Judge;
use super::physics::Physics;
use super::position::{Placed, placed, placed_or_vacuum};
use super::scan::{self, DensityPoint, TemperaturePoint, TiltPoint};
use super::scene::Scene;
use super::spectrum::Spectrum;
use super::sum::Sum;
use super::target::{Wanted, find, strongest};
use super::unrated::Unrated;
use super::verdict::{Interference, Verdict, VerdictRange};
use super::window::Unjudged;
use crate::calc::filter::{Detector, Filter, Illumination, Rays, SeenFilter};

/// A target is outside the passband where less than this part of the peak comes through.
const OUTSIDE: f64 = 1e-2;
/// How far from the typed position the target may lie, nm.
pub(super) const MEANT_NM: f64 = 0.1;
/// Lines closer than this many widths to the centre are averaged over their own profile.
const AVERAGED_WIDTHS: f64 = 5.0;
/// How many lines are named as spoiling most.
pub const SPOILERS: usize = 5;

/// A checked question.
#[derive(Clone, Debug)]
pub struct Question {
    /// The filter.
    pub filter: Filter,
    /// How light meets it.
    pub light: Illumination,
    /// What counts the light behind it.
    pub detector: Detector,
    /// Medium that positions are shown in.
    pub medium: Medium,
    /// The light source.
    pub conditions: Conditions,
    /// The line that the filter is for; `None`: the one with the most light behind it.
    pub target: Option<Wanted>,
    /// Light that comes from no line.
    pub background: Background,
    /// k T of the electrons to scan, cm⁻¹.
    pub scan_kt_per_cm: Vec<f64>,
    /// Electron densities to scan, m⁻³.
    pub scan_density_per_m3: Vec<f64>,
    /// Tilts to scan, degrees.
    pub scan_tilt_deg: Vec<f64>,
    /// Asked-for species of which nothing at all is held, as typed.
    pub not_held: Vec<String>,
}

/// A line behind the filter.
#[derive(Clone, Debug)]
pub struct PassbandLine {
    /// The line.
    pub line: Line,
    /// Where it is shown.
    pub placed: Placed,
    /// Transmission of the filter over the line's own profile; `None` where the filter is not known.
    pub transmission: Option<f64>,
    /// Part of all light behind filter and detector, background included; `None` where the line or
    /// the filter there is not rated.
    pub light_fraction: Option<f64>,
    /// Median of its part by a prior, where its light is not known but bounded.
    pub prior_light_fraction: Option<f64>,
    /// It belongs to the target.
    pub is_target: bool,
    /// Lines of one number are components of one feature, a multiplet whose components lie closer
    /// together than the filter is wide; numbered as they come.
    pub feature: usize,
}

/// The line that the filter is for.
#[derive(Clone, Debug)]
pub struct Target {
    /// Its strongest component.
    pub line: Line,
    /// Where that is shown.
    pub placed: Placed,
    /// Transmission of the filter for it.
    pub transmission: f64,
    /// Its part of all light behind filter and detector.
    pub purity: Option<f64>,
    /// Light of other species over its own.
    pub interference: Option<Interference>,
    /// Light of other features of its own species over its own.
    pub own_species_fraction: Option<f64>,
    /// The verdict.
    pub verdict: VerdictRange,
    /// What else must be said.
    pub remarks: Vec<String>,
    /// Chance that lines whose light is not known but bounded change the verdict; `None` where
    /// there are none.
    pub prior_chance: Option<f64>,
    /// Chance that an unlisted line interferes.
    pub unlisted_chance: f64,
    /// How far the passband may drift to the blue and to the red before the verdict changes, nm;
    /// `None` where it does not within three widths.
    pub drift_nm: (Option<f64>, Option<f64>),
}

/// The answer.
#[derive(Clone, Debug)]
pub struct Answer {
    /// Where the passband lies in this light, nm.
    pub seen_centre_nm: f64,
    /// The target; `None` where no rated line passes.
    pub target: Option<Target>,
    /// Lines with light behind the filter, and unrated ones where it transmits; the brightest first.
    pub lines: Vec<PassbandLine>,
    /// Part of the light behind the filter that comes from no line, where its strength is known.
    pub background_fraction: Option<f64>,
    /// Purity against electron temperature.
    pub scan: Vec<TemperaturePoint>,
    /// Purity against electron density.
    pub density_scan: Vec<DensityPoint>,
    /// Purity and transmission against tilt.
    pub tilts: Vec<TiltPoint>,
    /// Species that cannot be judged.
    pub unrated: Vec<Unjudged>,
    /// Species whose partition function is a lower bound.
    pub lower_bounds: Vec<Species>,
    /// What the answer rests on.
    pub physics: Physics,
}

/// Answers the question from what is held of each species: lines wherever the filter may transmit.
///
/// # Errors
/// A target that is not held or lies outside the passband; rays that the filter reflects totally;
/// conditions under which populations, profiles or a background cannot be computed.
pub fn answer(question: &Question, spectra: &[Spectrum]) -> Result<Answer, AdviseError> {
    let width = SpectralWidth::from_nm(question.filter.fwhm_nm());
    let scene = Scene::new(spectra, &question.conditions, width)?;
    let rays = Rays::new(question.light, question.filter.effective_index())?;
    let seen = question.filter.behind(&rays, question.light.warming_k)?;
    let view = View::new(&scene, question)?;
    let passed = view.averaged(&seen)?;
    let target = target_feature(&view, &passed, question, &seen)?;
    let from_lines: f64 = passed.iter().filter_map(|p| p.light).sum();
    let background = background(question, &view, &seen, target, &passed)?;
    let all = from_lines + background.unwrap_or(0.0);
    Ok(Answer {
        seen_centre_nm: seen.centre_nm(),
        lines: lines(&view, &passed, target, all, question.medium)?,
        background_fraction: background.filter(|_| all > 0.0).map(|b| b / all),
        scan: match target {
            Some(t) => scan::temperatures(&view, &passed, t, question)?,
            None => Vec::new(),
        },
        density_scan: match target {
            Some(t) => scan::densities(&view, &passed, t, question)?,
            None => Vec::new(),
        },
        tilts: match target {
            Some(t) => scan::tilts(&view, t, question)?,
            None => Vec::new(),
        },
        unrated: Judge::new(&scene, seen.centre_nm(), !question.not_held.is_empty()).unjudged(
            &question.not_held,
            target.map(|t| scene.features[t].spectrum),
        ),
        lower_bounds: lower_bounds(&view, &passed, all),
        physics: Physics::of(
            &scene,
            question.conditions.model,
            plays_a_part(&passed, all, question.filter.peak()),
        ),
        target: target
            .map(|t| judged(&view, &passed, t, all, question, &seen))
            .transpose()?,
    })
}

/// What came through of one line.
#[derive(Clone, Copy, Debug)]
pub(super) struct Passed {
    /// Transmission of the filter.
    pub transmission: Option<f64>,
    /// Light behind filter and detector, in the unit of the scene.
    pub light: Option<f64>,
}

/// The scene as filter and detector meet it.
pub(super) struct View<'a, 's> {
    pub scene: &'a Scene<'s>,
    /// Wavelength of each emission in the medium that filters are specified for, nm.
    pub wavelengths_nm: Vec<f64>,
    /// Response of the detector to each emission; `None` where it was not measured.
    pub responses: Vec<Option<f64>>,
    fwhm_nm: f64,
}

impl<'a, 's> View<'a, 's> {
    pub(super) fn new(scene: &'a Scene<'s>, question: &Question) -> Result<Self, AdviseError> {
        let air = Air::standard();
        let place = |nm: f64| Ok(placed(1e7 / nm, 0.0, Medium::Auto, air)?.wavelength_nm);
        Ok(Self {
            wavelengths_nm: scene
                .emissions
                .iter()
                .map(|e| place(e.nm))
                .collect::<Result<_, AdviseError>>()?,
            responses: scene
                .emissions
                .iter()
                .map(|e| question.detector.response(e.nm))
                .collect(),
            fwhm_nm: question.filter.fwhm_nm(),
            scene,
        })
    }

    /// Lines through the filter, each averaged over its own profile.
    fn averaged(&self, seen: &SeenFilter<'_>) -> Result<Vec<Passed>, AdviseError> {
        let centre = seen.centre_nm();
        (0..self.scene.emissions.len())
            .map(|i| {
                let at = self.wavelengths_nm[i];
                let emission = &self.scene.emissions[i];
                let near = (at - centre).abs() <= AVERAGED_WIDTHS * self.fwhm_nm;
                let transmission = if near {
                    let mean = seen.line_transmission(at, emission.widths);
                    mean.map_err(|cause| AdviseError::Shape {
                        species: emission.line.species,
                        cause,
                    })?
                } else {
                    seen.transmission(at)
                };
                Ok(self.passed(i, transmission, emission.light))
            })
            .collect()
    }

    /// Lines through the filter, each at its centre: quick, for searches.
    pub(super) fn at_centres(&self, seen: &SeenFilter<'_>) -> Vec<Passed> {
        (0..self.scene.emissions.len())
            .map(|i| {
                let transmission = seen.transmission(self.wavelengths_nm[i]);
                self.passed(i, transmission, self.scene.emissions[i].light)
            })
            .collect()
    }

    pub(super) fn passed(
        &self,
        index: usize,
        transmission: Option<f64>,
        light: Option<f64>,
    ) -> Passed {
        let behind = |t: f64| Some(light? * t * self.responses[index]?);
        Passed {
            transmission,
            light: transmission.and_then(behind),
        }
    }

    /// Light of a target, of other features of its species, and of other species.
    pub(super) fn shares(&self, passed: &[Passed], target: usize) -> Shares {
        let own = self.scene.features[target].spectrum;
        let mut shares = Shares::default();
        for (emission, passed) in self.scene.emissions.iter().zip(passed) {
            let light = passed.light.unwrap_or(0.0);
            if emission.feature == target {
                shares.target += light;
            } else if emission.spectrum == own {
                shares.own += light;
            } else {
                shares.others += light;
            }
        }
        shares
    }
}

/// Light by where it comes from.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub(super) struct Shares {
    pub target: f64,
    pub own: f64,
    pub others: f64,
}

impl Shares {
    /// The target's part of the light of all lines.
    pub(super) fn purity(self) -> Option<f64> {
        let all = self.target + self.own + self.others;
        (all > 0.0).then(|| self.target / all)
    }

    /// What the interference says.
    pub(super) fn verdict(self) -> Verdict {
        Verdict::of(self.others / self.target)
    }
}

fn target_feature(
    view: &View<'_, '_>,
    passed: &[Passed],
    question: &Question,
    seen: &SeenFilter<'_>,
) -> Result<Option<usize>, AdviseError> {
    let scene = view.scene;
    let Some(wanted) = &question.target else {
        let mut light = vec![0.0; scene.features.len()];
        for (emission, passed) in scene.emissions.iter().zip(passed) {
            light[emission.feature] += passed.light.unwrap_or(0.0);
        }
        let brightest = (0..light.len()).max_by(|&a, &b| light[a].total_cmp(&light[b]));
        return Ok(brightest.filter(|&f| light[f] > 0.0));
    };
    let target = find(scene, wanted, MEANT_NM, question.medium, Air::standard())?;
    let peak = question.filter.peak();
    let through = passed[strongest(scene, target)].transmission.unwrap_or(0.0);
    if through < OUTSIDE * peak {
        return Err(AdviseError::OutsidePassband {
            wanted: wanted.typed.clone(),
            line_nm: view.wavelengths_nm[strongest(scene, target)],
            centre_nm: seen.centre_nm(),
            fwhm_nm: question.filter.fwhm_nm(),
        });
    }
    Ok(Some(target))
}

fn lines(
    view: &View<'_, '_>,
    passed: &[Passed],
    target: Option<usize>,
    all: f64,
    medium: Medium,
) -> Result<Vec<PassbandLine>, AdviseError> {
    let scene = view.scene;
    let mut out = Vec::new();
    for (index, (emission, passed)) in scene.emissions.iter().zip(passed).enumerate() {
        let present = !scene.emitters[emission.spectrum].is_absent;
        let transmits = passed.transmission.is_some_and(|t| t > 0.0);
        if !present || !transmits || passed.light == Some(0.0) {
            continue;
        }
        let (at, sigma) = (
            emission.line.wavenumber_per_cm,
            emission.line.wavenumber_uncertainty_per_cm,
        );
        out.push(PassbandLine {
            placed: placed_or_vacuum(at, sigma, medium, Air::standard())?,
            line: emission.line.clone(),
            transmission: passed.transmission,
            light_fraction: passed.light.filter(|_| all > 0.0).map(|l| l / all),
            prior_light_fraction: view
                .passed(index, passed.transmission, emission.prior.map(|p| p.light))
                .light
                .filter(|_| all > 0.0)
                .map(|l| l / all),
            is_target: Some(emission.feature) == target,
            feature: emission.feature,
        });
    }
    out.sort_by(|a, b| {
        let light = |l: &PassbandLine| l.light_fraction.unwrap_or(-1.0);
        light(b)
            .total_cmp(&light(a))
            .then(a.placed.vacuum_nm.total_cmp(&b.placed.vacuum_nm))
    });
    let features: Vec<usize> = out.iter().map(|l: &PassbandLine| l.feature).collect();
    for (line, number) in out.iter_mut().zip(numbered(&features)) {
        line.feature = number;
    }
    Ok(out)
}

/// Lines of which at least 1e-5 of all light comes, or that come through unrated.
fn plays_a_part(passed: &[Passed], all: f64, peak: f64) -> impl Iterator<Item = usize> {
    (0..passed.len()).filter(move |&i| match passed[i].light {
        Some(light) => light > 1e-5 * all,
        None => passed[i].transmission.is_some_and(|t| t >= OUTSIDE * peak),
    })
}

fn lower_bounds(view: &View<'_, '_>, passed: &[Passed], all: f64) -> Vec<Species> {
    let scene = view.scene;
    let mut light = vec![0.0; scene.spectra.len()];
    for (emission, passed) in scene.emissions.iter().zip(passed) {
        light[emission.spectrum] += passed.light.unwrap_or(0.0);
    }
    (0..scene.spectra.len())
        .filter(|&s| light[s] > 1e-5 * all && scene.emitters[s].is_lower_bound())
        .map(|s| scene.spectra[s].species)
        .collect()
}

fn judged(
    view: &View<'_, '_>,
    passed: &[Passed],
    target: usize,
    all: f64,
    question: &Question,
    seen: &SeenFilter<'_>,
) -> Result<Target, AdviseError> {
    let scene = view.scene;
    let air = Air::standard();
    let judge = Judge::new(scene, seen.centre_nm(), !question.not_held.is_empty());
    let shares = view.shares(passed, target);
    let interference = (shares.target > 0.0).then(|| interference(view, passed, target, shares));
    let main = strongest(scene, target);
    let unrated = unrated(view, passed, target, shares, question.filter.peak());
    let known = judge.filtered(target, question.medium, air, interference, &unrated)?;
    let line = scene.emissions[main].line;
    let (at, sigma) = (line.wavenumber_per_cm, line.wavenumber_uncertainty_per_cm);
    let mut remarks = known.remarks;
    match view.responses[main] {
        Some(r) if r <= 0.0 => remarks.insert(0, "the detector does not see it".into()),
        None => remarks.insert(0, "the detector is not known there".into()),
        Some(_) => {}
    }
    Ok(Target {
        placed: placed_or_vacuum(at, sigma, question.medium, air)?,
        line: line.clone(),
        transmission: passed[main].transmission.unwrap_or(0.0),
        purity: (all > 0.0 && shares.target > 0.0).then(|| shares.target / all),
        interference,
        own_species_fraction: interference.map(|_| shares.own / shares.target),
        verdict: known.verdict,
        prior_chance: known.prior_chance,
        unlisted_chance: known.unlisted_chance,
        remarks,
        drift_nm: interference.map_or((None, None), |_| scan::drift(view, target, seen, question)),
    })
}

/// What lines whose light is not known may do behind the filter. One that nothing bounds counts
/// where at least [`OUTSIDE`] of the peak comes through.
fn unrated(
    view: &View<'_, '_>,
    passed: &[Passed],
    target: usize,
    shares: Shares,
    peak: f64,
) -> Unrated {
    let own = view.scene.features[target].spectrum;
    if shares.target <= 0.0 {
        return Unrated::default();
    }
    // Where the response of the detector is not known it may be as good as anywhere.
    let best = view
        .responses
        .iter()
        .flatten()
        .fold(0.0_f64, |a, &r| a.max(r));
    let seen = |index: usize| {
        let through = passed[index].transmission.unwrap_or(0.0);
        let response = view.responses[index].unwrap_or(best);
        let counts = through >= OUTSIDE * peak && response > 0.0;
        (through * response / shares.target, counts)
    };
    let all = 0..passed.len();
    Unrated::among(view.scene, own, all, shares.others / shares.target, seen)
}

/// Light of other species over that of the target, with what the uncertainty of the rates makes of
/// it.
fn interference(
    view: &View<'_, '_>,
    passed: &[Passed],
    target: usize,
    shares: Shares,
) -> Interference {
    let own = view.scene.features[target].spectrum;
    let (mut sum, mut variance) = (Sum::default(), 0.0);
    for (emission, passed) in view.scene.emissions.iter().zip(passed) {
        let part = passed.light.unwrap_or(0.0) / shares.target;
        if emission.feature == target {
            variance += (part * emission.light_sigma).powi(2);
        } else if emission.spectrum != own {
            sum.add(emission.spectrum, part, emission.light_sigma);
        }
    }
    sum.interference(view.scene, own, variance.sqrt())
}

/// Light of every emission under other conditions.
pub(super) fn lights(
    scene: &Scene<'_>,
    conditions: &Conditions,
) -> Result<Vec<Option<f64>>, AdviseError> {
    let emitters = emitters(scene.spectra, conditions)?;
    let light = |e: &super::scene::Emission<'_>| emitters[e.spectrum].light(e.line);
    Ok(scene.emissions.iter().map(light).collect())
}
