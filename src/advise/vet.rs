//! `vet`: is this one line clear of the others, and if not, what would help?

use vocabulary::atom::Species;
use vocabulary::light::{Air, Medium, PositionMedium, SpectralWidth};
use vocabulary::spectrum::Line;

use super::emission::Conditions;
use super::error::AdviseError;
use super::feature::numbered;
use super::judge::Judge;
use super::physics::Physics;
use super::position::{Placed, placed, placed_or_vacuum};
use super::pressure::{Pressure, pressure_reach_nm};
use super::resolving::clear_at_resolving_power;
use super::scene::{REACH_WIDTHS, Scene, seen};
use super::spectrum::Spectrum;
use super::sum::Sum;
use super::target::{LEAST_TOLERANCE_NM, Wanted, find, strongest};
use super::verdict::{Interference, Verdict, VerdictRange};
use super::window::{Unjudged, WindowFeature};
use crate::calc::plasma::{absorption_f, line_centre_optical_depth, self_absorption_factor};

/// How far alternatives are looked for, nm to either side.
pub const ALTERNATIVES_NM: f64 = 100.0;
/// Lines this many instrument widths away still count as near.
const NEAR_WIDTHS: f64 = 5.0;
/// Lines of a scan are taken from so many times as far as profiles are followed.
const SCAN_WIDTHS: f64 = 1.5;
/// How many alternatives are named.
const ALTERNATIVES: usize = 5;
/// How many of the brightest lines of the species are judged as alternatives.
const JUDGED: usize = 60;

/// A checked question.
#[derive(Clone, Debug)]
pub struct Question {
    /// The line.
    pub wanted: Wanted,
    /// Medium that positions are shown in.
    pub medium: Medium,
    /// FWHM of the instrument.
    pub width: SpectralWidth,
    /// The light source.
    pub conditions: Conditions,
    /// Asked-for species of which nothing at all is held, as typed.
    pub not_held: Vec<String>,
    /// Atoms of the target's species along the line of sight, m⁻².
    pub column_per_m2: Option<f64>,
    /// k T of the electrons to scan, cm⁻¹.
    pub scan_kt_per_cm: Vec<f64>,
    /// Electron densities to scan, m⁻³.
    pub scan_density_per_m3: Vec<f64>,
}

/// What the interference of the rated lines in first order is under other conditions.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ScanPoint {
    /// k T of the electrons, cm⁻¹.
    pub kt_per_cm: f64,
    /// Electron density, m⁻³.
    pub electron_density_per_m3: Option<f64>,
    /// Light of other species over that of the target; `None` where the target has none.
    pub fraction: Option<f64>,
}

/// What a grating sends to the target's place in a higher order: lines around λ/order.
#[derive(Clone, Debug)]
pub struct Order {
    /// 2 or more.
    pub order: u8,
    /// The species of the question with their lines around λ/order.
    pub spectra: Vec<Spectrum>,
}

/// A line of another species and what it does.
#[derive(Clone, Debug)]
pub struct Interferer {
    /// The line.
    pub line: Line,
    /// Where it is shown.
    pub placed: Placed,
    /// Its position minus that of the target, nm; in a higher order as the grating shows it.
    pub offset_nm: f64,
    /// Its light at the target over that of the target.
    pub fraction: f64,
    /// Relative 1 σ of it.
    pub relative_sigma: f64,
    /// It lies more than two full widths away.
    pub wing: bool,
    /// The order in which a grating sends it there; 1 where it lies there itself.
    pub order: u8,
    /// Lines of one number are components of one feature; numbered as they come.
    pub feature: usize,
}

/// Another line of the target's species.
#[derive(Clone, Debug)]
pub struct Alternative {
    /// Its strongest component.
    pub line: Line,
    /// Where it is shown.
    pub placed: Placed,
    /// Its signal over that of the target; `None` where the target has no rate.
    pub relative_strength: Option<f64>,
    /// How clear it is.
    pub verdict: VerdictRange,
    /// Its interference fraction.
    pub fraction: f64,
}

/// What the plasma may take back of the light.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SelfAbsorption {
    /// The lower level belongs to the ground term.
    pub resonance: bool,
    /// Optical depth at line centre and the part of the light that comes out of a uniform column.
    pub depth_and_left: Option<(f64, f64)>,
}

/// The answer.
#[derive(Clone, Debug)]
pub struct Answer {
    /// Strongest component of the target.
    pub line: Line,
    /// Where it is shown.
    pub placed: Placed,
    /// How many components the instrument sees as the target.
    pub components: usize,
    /// The target as the instrument sees it; interference and verdict without higher orders.
    pub feature: WindowFeature,
    /// Interference with higher orders, where the target is rated.
    pub interference: Option<Interference>,
    /// The verdict with higher orders.
    pub verdict: VerdictRange,
    /// Other lines, the worst first.
    pub interferers: Vec<Interferer>,
    /// Smallest resolving power from which on the line is clear; `None` where none is.
    pub clear_at_resolving_power: Option<f64>,
    /// Clear lines of the same species, the strongest first.
    pub alternatives: Vec<Alternative>,
    /// How many lines of the species were judged as alternatives.
    pub judged_alternatives: usize,
    /// What the plasma may take back.
    pub self_absorption: SelfAbsorption,
    /// Species that cannot be judged.
    pub unrated: Vec<Unjudged>,
    /// Species whose partition function is a lower bound.
    pub lower_bounds: Vec<Species>,
    /// What the answer rests on.
    pub physics: Physics,
    /// What pressure does to the line.
    pub pressure: Pressure,
    /// Interference by electron temperature.
    pub scan: Vec<ScanPoint>,
    /// Interference by electron density.
    pub density_scan: Vec<ScanPoint>,
}

/// Answers the question from what is held of each species: lines from at least
/// [`ALTERNATIVES_NM`] and [`REACH_WIDTHS`] instrument widths around the target, and for each higher
/// order lines from as many widths around λ/order.
///
/// # Errors
/// A line that is not held; conditions under which populations or profiles cannot be computed.
pub fn answer(
    question: &Question,
    spectra: &[Spectrum],
    orders: &[Order],
) -> Result<Answer, AdviseError> {
    let air = Air::standard();
    let scene = Scene::new(spectra, &question.conditions, question.width)?;
    let wanted = &question.wanted;
    let reach_nm = (question.width.at_nm(wanted.vacuum_nm)).max(LEAST_TOLERANCE_NM);
    let index = find(&scene, wanted, reach_nm, question.medium, air)?;
    let nothing_held = !question.not_held.is_empty();
    let judge = Judge::new(&scene, scene.features[index].nm, nothing_held);
    let feature = judge.feature(index, 0.0, question.medium, air)?;
    let mut interferers = first_order(&scene, &judge, index, question.medium, air)?;
    for order in orders {
        interferers.extend(higher_order(&scene, index, order, question, air)?);
    }
    interferers.sort_by(|a, b| b.fraction.total_cmp(&a.fraction));
    let features: Vec<(u8, usize)> = interferers.iter().map(|i| (i.order, i.feature)).collect();
    for (one, number) in interferers.iter_mut().zip(numbered(&features)) {
        one.feature = number;
    }
    let interference = scene.features[index]
        .signal
        .filter(|s| *s > 0.0)
        .map(|_| total(&scene, index, &interferers, judge.own_pressure_sigma(index)));
    let verdict = match interference {
        Some(i) if feature.verdict != VerdictRange::UNRATED => i.verdict(),
        _ => VerdictRange::UNRATED,
    };
    let (alternatives, judged_alternatives) = alternatives(&scene, index, question, air)?;
    let emission = &scene.emissions[strongest(&scene, index)];
    Ok(Answer {
        line: emission.line.clone(),
        placed: place(emission.line, question.medium, air)?,
        components: scene.features[index].components.len(),
        clear_at_resolving_power: clear_at_resolving_power(&scene, index)?,
        self_absorption: self_absorption(&scene, index, question.column_per_m2)?,
        unrated: judge.unjudged(&question.not_held, Some(scene.features[index].spectrum)),
        lower_bounds: lower_bounds(&scene, index, &interferers),
        physics: physics(&scene, index, question),
        pressure: emission.pressure,
        scan: scan(question, spectra, temperatures(question))?,
        density_scan: scan(question, spectra, densities(question))?,
        feature,
        interference,
        verdict,
        interferers,
        alternatives,
        judged_alternatives,
    })
}

fn temperatures(question: &Question) -> impl Iterator<Item = Conditions> + '_ {
    question.scan_kt_per_cm.iter().map(|&kt_per_cm| Conditions {
        kt_per_cm,
        ..question.conditions.clone()
    })
}

fn densities(question: &Question) -> impl Iterator<Item = Conditions> + '_ {
    let densities = question.scan_density_per_m3.iter();
    densities.map(|&density| Conditions {
        electron_density_per_m3: Some(density),
        ..question.conditions.clone()
    })
}

/// The interference under each of these conditions, widths included.
fn scan(
    question: &Question,
    spectra: &[Spectrum],
    all: impl Iterator<Item = Conditions>,
) -> Result<Vec<ScanPoint>, AdviseError> {
    let wanted = &question.wanted;
    let width_nm = question.width.at_nm(wanted.vacuum_nm);
    let air = Air::standard();
    let mut near: Option<Vec<Spectrum>> = None;
    let mut out = Vec::new();
    for conditions in all {
        let near = near.get_or_insert_with(|| {
            let reach_nm = SCAN_WIDTHS * REACH_WIDTHS * width_nm + pressure_reach_nm(&conditions);
            let counts =
                |l: &&Line| (1e7 / l.wavenumber_per_cm - wanted.vacuum_nm).abs() <= reach_nm;
            let cut = |s: &Spectrum| Spectrum {
                lines: s.lines.iter().filter(counts).cloned().collect(),
                ..s.clone()
            };
            spectra.iter().map(cut).collect()
        });
        let scene = Scene::new(near, &conditions, question.width)?;
        let tolerance_nm = width_nm.max(LEAST_TOLERANCE_NM);
        let index = find(&scene, wanted, tolerance_nm, question.medium, air)?;
        let signal = scene.features[index].signal.filter(|s| *s > 0.0);
        let judge = Judge::new(&scene, scene.features[index].nm, false);
        let others = |signal: f64| -> f64 {
            let parts = judge.parts(index, signal).into_iter();
            parts.filter(|p| !p.own).map(|p| p.fraction).sum()
        };
        out.push(ScanPoint {
            kt_per_cm: conditions.kt_per_cm,
            electron_density_per_m3: conditions.electron_density_per_m3,
            fraction: signal.map(others),
        });
    }
    Ok(out)
}

fn place(line: &Line, medium: Medium, air: &Air) -> Result<Placed, AdviseError> {
    let (position, sigma) = (line.wavenumber_per_cm, line.wavenumber_uncertainty_per_cm);
    Ok(placed_or_vacuum(position, sigma, medium, air)?)
}

fn total(
    scene: &Scene<'_>,
    index: usize,
    interferers: &[Interferer],
    pressure_sigma: f64,
) -> Interference {
    let target = &scene.features[index];
    let mut sum = Sum::default();
    for one in interferers {
        let same = |s: &Spectrum| s.species == one.line.species;
        // The species of higher orders are those of the question.
        let spectrum = scene.spectra.iter().position(same);
        sum.add(
            spectrum.unwrap_or(target.spectrum),
            one.fraction,
            one.relative_sigma,
        );
    }
    let target_sigma = target.signal_sigma.hypot(pressure_sigma);
    sum.interference(scene, target.spectrum, target_sigma)
}

/// Of the target and of lines near enough to matter.
fn physics(scene: &Scene<'_>, index: usize, question: &Question) -> Physics {
    let target = &scene.features[index];
    let near_nm = scene.width.at_nm(target.nm) * NEAR_WIDTHS;
    let around = scene.around(target.nm, near_nm);
    let own = target.components.iter().copied();
    Physics::of(scene, question.conditions.model, own.chain(around))
}

fn lower_bounds(scene: &Scene<'_>, index: usize, interferers: &[Interferer]) -> Vec<Species> {
    let plays_a_part = |s: usize| {
        s == scene.features[index].spectrum
            || interferers
                .iter()
                .any(|i| i.line.species == scene.spectra[s].species && i.fraction > 1e-5)
    };
    (0..scene.spectra.len())
        .filter(|&s| plays_a_part(s) && scene.emitters[s].is_lower_bound())
        .map(|s| scene.spectra[s].species)
        .collect()
}

fn first_order(
    scene: &Scene<'_>,
    judge: &Judge<'_, '_>,
    index: usize,
    medium: Medium,
    air: &Air,
) -> Result<Vec<Interferer>, AdviseError> {
    let target = &scene.features[index];
    let Some(signal) = target.signal.filter(|s| *s > 0.0) else {
        return Ok(Vec::new());
    };
    let width_nm = scene.width.at_nm(target.nm);
    let others = judge.parts(index, signal).into_iter();
    others
        .filter(|part| !part.own && part.fraction > 0.0)
        .map(|part| {
            let line = scene.emissions[part.emission].line;
            Ok(Interferer {
                line: line.clone(),
                placed: place(line, medium, air)?,
                offset_nm: part.offset_nm,
                fraction: part.fraction,
                relative_sigma: part.relative_sigma,
                wing: part.offset_nm.abs() > 2.0 * width_nm,
                order: 1,
                feature: scene.emissions[part.emission].feature,
            })
        })
        .collect()
}

/// Lines that a grating sends to the place of the target in a higher order. A line at λ' shows at
/// order × λ', its own widths stretched alike; the grating is taken to be as efficient there as in
/// first order, with nothing in front that sorts orders: an upper estimate.
fn higher_order(
    scene: &Scene<'_>,
    index: usize,
    order: &Order,
    question: &Question,
    air: &Air,
) -> Result<Vec<Interferer>, AdviseError> {
    let target = &scene.features[index];
    let Some(signal) = target.signal.filter(|s| *s > 0.0) else {
        return Ok(Vec::new());
    };
    let times = f64::from(order.order);
    let width_nm = scene.width.at_nm(target.nm);
    let ghosts = Scene::new(&order.spectra, &question.conditions, question.width)?;
    let mut out = Vec::new();
    for emission in &ghosts.emissions {
        let at = place(emission.line, question.medium, air)?;
        let offset_nm = times * seen_from(&at, &question.medium, target.nm, air)?
            - target_wavelength(question.medium, target.nm, air)?;
        let Some(light) = emission
            .light
            .filter(|_| offset_nm.abs() <= REACH_WIDTHS * width_nm)
        else {
            continue;
        };
        let mut widths = emission.widths;
        widths.sigma_nm *= times;
        widths.hwhm_nm *= times;
        let profile = seen(widths, &scene.form, width_nm).map_err(|cause| AdviseError::Shape {
            species: emission.line.species,
            cause,
        })?;
        out.push(Interferer {
            line: emission.line.clone(),
            placed: at,
            offset_nm,
            fraction: light * profile.density(offset_nm) / signal,
            relative_sigma: emission.light_sigma,
            wing: offset_nm.abs() > 2.0 * width_nm,
            order: order.order,
            feature: emission.feature,
        });
    }
    out.retain(|i| i.fraction > 0.0);
    Ok(out)
}

fn target_wavelength(medium: Medium, nm: f64, air: &Air) -> Result<f64, AdviseError> {
    Ok(placed(1e7 / nm, 0.0, medium, air)?.wavelength_nm)
}

/// Wavelength of a line in the medium of the target: a grating in air multiplies wavelengths in
/// air. Where the line lies too far in the ultraviolet for that, its vacuum wavelength stands.
fn seen_from(at: &Placed, medium: &Medium, nm: f64, air: &Air) -> Result<f64, AdviseError> {
    let target = placed(1e7 / nm, 0.0, *medium, air)?.medium;
    Ok(match target {
        PositionMedium::Vacuum => at.vacuum_nm,
        PositionMedium::Air => at.wavelength_nm,
    })
}

/// Clear lines of the target's species, the strongest first, and how many were judged.
fn alternatives(
    scene: &Scene<'_>,
    index: usize,
    question: &Question,
    air: &Air,
) -> Result<(Vec<Alternative>, usize), AdviseError> {
    let target = &scene.features[index];
    let mut candidates: Vec<(usize, f64)> = (0..scene.features.len())
        .filter(|&f| f != index && scene.features[f].spectrum == target.spectrum)
        .filter(|&f| (scene.features[f].nm - target.nm).abs() <= ALTERNATIVES_NM)
        .filter_map(|f| Some((f, scene.features[f].signal.filter(|s| *s > 0.0)?)))
        .collect();
    candidates.sort_by(|a, b| b.1.total_cmp(&a.1));
    candidates.truncate(JUDGED);
    let mut out = Vec::new();
    let mut judged = 0;
    for (candidate, signal) in candidates {
        if out.len() == ALTERNATIVES {
            break;
        }
        judged += 1;
        let nothing_held = !question.not_held.is_empty();
        let judge = Judge::new(scene, scene.features[candidate].nm, nothing_held);
        let feature = judge.feature(candidate, 0.0, question.medium, air)?;
        if feature.verdict.central != Verdict::Clear {
            continue;
        }
        let line = scene.emissions[strongest(scene, candidate)].line;
        out.push(Alternative {
            line: line.clone(),
            placed: place(line, question.medium, air)?,
            relative_strength: target.signal.filter(|s| *s > 0.0).map(|s| signal / s),
            verdict: feature.verdict,
            fraction: feature.interference.map_or(0.0, |i| i.fraction),
        });
    }
    Ok((out, judged))
}

fn self_absorption(
    scene: &Scene<'_>,
    index: usize,
    column_per_m2: Option<f64>,
) -> Result<SelfAbsorption, AdviseError> {
    let emission = &scene.emissions[strongest(scene, index)];
    let spectrum = &scene.spectra[emission.spectrum];
    let ground = spectrum.levels.first();
    let resonance = emission
        .line
        .lower
        .as_deref()
        .zip(ground)
        .is_some_and(|(lower, ground)| {
            let same_term = lower.term.is_some()
                && (&lower.term, &lower.configuration) == (&ground.term, &ground.configuration);
            lower.number == ground.number || same_term
        });
    let known = || {
        let (lower, upper) = (
            emission.line.lower.as_deref()?,
            emission.line.upper.as_deref()?,
        );
        let population = scene.emitters[emission.spectrum].population(lower)?;
        let sigma = emission.line.wavenumber_per_cm;
        let f = absorption_f(emission.line.rate_per_s?, upper.g?, lower.g?, sigma);
        Some(column_per_m2? * population * f)
    };
    let depth_and_left = known()
        .map(|column_f| {
            let depth = line_centre_optical_depth(column_f, 1.0, emission.nm, emission.widths)?;
            Ok((depth, self_absorption_factor(depth, emission.widths)?))
        })
        .transpose()
        .map_err(|cause| AdviseError::Shape {
            species: spectrum.species,
            cause,
        })?;
    Ok(SelfAbsorption {
        resonance,
        depth_and_left,
    })
}
