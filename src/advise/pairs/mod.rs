//! `pairs`: lines whose ratio tells the excitation temperature, and the Boltzmann plot of measured
//! ones.

mod plot;

use vocabulary::atom::Species;
use vocabulary::light::{Medium, SpectralRange, SpectralWidth};
use vocabulary::spectrum::Line;

use super::emission::Conditions;
pub use super::emission::UNSTATED_RATE_SIGMA;
use super::error::AdviseError;
use super::marks::{Survey, Surveyed, survey};
use super::spectrum::Spectrum;
use super::verdict::Verdict;
use super::window::Unjudged;

pub use plot::{Density, Plot, PlotError, Point, StageFit, plot};

/// A checked question.
#[derive(Clone, Debug)]
pub struct Question {
    /// The stage whose excitation is asked for.
    pub species: Species,
    /// Where its lines may lie.
    pub range: SpectralRange,
    /// Medium that positions are shown in.
    pub medium: Medium,
    /// FWHM of the instrument.
    pub width: SpectralWidth,
    /// The light source; its temperature is that at which errors are expected.
    pub conditions: Conditions,
    /// Largest distance of the two lines, nm.
    pub within_nm: Option<f64>,
    /// Relative 1 σ of a measured intensity.
    pub intensity_error: f64,
    /// Weakest line, over the strongest of the species in the range.
    pub weakest: f64,
    /// Asked-for species of which nothing is held.
    pub not_held: Vec<String>,
}

/// A line that may enter a plot.
#[derive(Clone, Debug)]
pub struct Usable {
    /// The feature.
    pub surveyed: Surveyed,
    /// Energy of the upper level above the ground level, cm⁻¹; over several components weighted by
    /// their light, so that d ln I/d(1/kT) = −energy.
    pub upper_energy_per_cm: f64,
    /// Relative 1 σ of its rate.
    pub rate_sigma: f64,
    /// No source states that uncertainty.
    pub rate_unstated: bool,
    /// Light over the strongest usable feature.
    pub relative_light: f64,
}

/// Two lines and what their ratio is worth.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Pair {
    /// Index of the line from the lower upper level.
    pub first: usize,
    /// Index of the other.
    pub second: usize,
    /// Difference of the upper energies, cm⁻¹, above zero.
    pub energy_difference_per_cm: f64,
    /// Distance of the lines, nm.
    pub distance_nm: f64,
    /// Expected relative 1 σ of the temperature.
    pub temperature_relative_error: f64,
}

/// The answer.
#[derive(Clone, Debug)]
pub struct Answer {
    /// Lines that are clear, rated and strong enough, by wavelength.
    pub usable: Vec<Usable>,
    /// Pairs, the best first.
    pub pairs: Vec<Pair>,
    /// A set of lines, the most telling first: indices, and the error of a plot of the lines up to
    /// and including each (from the second on).
    pub set: Vec<(usize, Option<f64>)>,
    /// Features of the species that were left out, with the reason.
    pub left_out: Vec<(Surveyed, LeftOut)>,
    /// Species of the mix that cannot be judged in some part of the range.
    pub unjudged: Vec<Unjudged>,
}

/// Why a feature is not usable.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum LeftOut {
    /// Its verdict.
    NotClear(Verdict),
    /// Other lines of its own species, over its own light.
    OwnSpecies(f64),
    /// A line of its own species without a known rate lies so near, nm.
    OwnUnrated(f64),
    /// Rate or upper level not known.
    NoRate,
    /// Too weak.
    Weak(f64),
}

/// A pair that tells the temperature no better than this is not given.
pub const USELESS: f64 = 1.0;
/// Lines of a set at most.
const SET: usize = 6;

/// Finds pairs. The expected error follows from R = I₁/I₂, d ln R/dT = (E₁ − E₂)/kT² (H. R. Griem
/// 1964, *Plasma Spectroscopy*, chapter 13): σ_T/T = kT/|ΔE| · √(2 σ_I² + σ_A1² + σ_A2²).
///
/// # Errors
/// As `window`.
pub fn answer(question: &Question, spectra: &[Spectrum]) -> Result<Answer, AdviseError> {
    let Survey { features, unjudged } = survey(
        spectra,
        &question.conditions,
        question.width,
        &question.range,
        question.medium,
        &question.not_held,
    )?;
    let own: Vec<Surveyed> = features
        .into_iter()
        .filter(|s| s.feature.species == question.species)
        .collect();
    let strongest = own.iter().filter_map(|s| s.light).fold(0.0, f64::max);
    let (mut usable, mut left_out) = (Vec::new(), Vec::new());
    for surveyed in own {
        match judged(question, &surveyed, strongest) {
            Ok(line) => usable.push(line),
            Err(reason) => left_out.push((surveyed, reason)),
        }
    }
    let pairs = pairs(question, &usable);
    let set = set(question, &usable);
    Ok(Answer {
        usable,
        pairs,
        set,
        left_out,
        unjudged,
    })
}

fn judged(question: &Question, surveyed: &Surveyed, strongest: f64) -> Result<Usable, LeftOut> {
    let feature = &surveyed.feature;
    let light = surveyed
        .light
        .filter(|l| *l > 0.0 && strongest > 0.0)
        .ok_or(LeftOut::NoRate)?;
    if feature.verdict.central != Verdict::Clear {
        return Err(LeftOut::NotClear(feature.verdict.central));
    }
    match feature.own_species_fraction {
        Some(own) if own < super::marks::OWN_LIGHT_ALLOWED => {}
        own => return Err(LeftOut::OwnSpecies(own.unwrap_or(f64::INFINITY))),
    }
    if let Some(nm) = surveyed.unrated_neighbour_nm {
        return Err(LeftOut::OwnUnrated(nm));
    }
    let relative_light = light / strongest;
    if relative_light < question.weakest {
        return Err(LeftOut::Weak(relative_light));
    }
    let energy = mean_energy(&surveyed.lines, question.conditions.kt_per_cm);
    Ok(Usable {
        upper_energy_per_cm: energy.ok_or(LeftOut::NoRate)?,
        rate_sigma: feature
            .rate_relative_uncertainty
            .unwrap_or(UNSTATED_RATE_SIGMA),
        rate_unstated: feature.rate_relative_uncertainty.is_none(),
        relative_light,
        surveyed: surveyed.clone(),
    })
}

/// Upper energy weighted by light, cm⁻¹.
fn mean_energy(lines: &[Line], kt_per_cm: f64) -> Option<f64> {
    let parts: Vec<(f64, f64)> = lines
        .iter()
        .filter_map(|l| {
            let upper = l.upper.as_ref()?;
            Some((
                l.rate_per_s? * upper.g? * l.wavenumber_per_cm,
                upper.energy_per_cm,
            ))
        })
        .collect();
    let lowest = parts.iter().map(|p| p.1).fold(f64::INFINITY, f64::min);
    let light = |p: &(f64, f64)| p.0 * (-(p.1 - lowest) / kt_per_cm).exp();
    let total: f64 = parts.iter().map(light).sum();
    (total > 0.0).then(|| parts.iter().map(|p| light(p) * p.1).sum::<f64>() / total)
}

/// Relative variance of the intensity over the rate of a line.
fn variance(question: &Question, line: &Usable) -> f64 {
    question.intensity_error.powi(2) + line.rate_sigma.powi(2)
}

fn pairs(question: &Question, usable: &[Usable]) -> Vec<Pair> {
    let nm = |i: usize| usable[i].surveyed.feature.placed.vacuum_nm;
    let kt = question.conditions.kt_per_cm;
    let mut out = Vec::new();
    for one in 0..usable.len() {
        for other in one + 1..usable.len() {
            let distance_nm = nm(other) - nm(one);
            if question
                .within_nm
                .is_some_and(|within| distance_nm > within)
            {
                break;
            }
            let [a, b] = [&usable[one], &usable[other]];
            let difference = b.upper_energy_per_cm - a.upper_energy_per_cm;
            if difference == 0.0 {
                continue;
            }
            let sigma = (variance(question, a) + variance(question, b)).sqrt();
            let (first, second) = if difference > 0.0 {
                (one, other)
            } else {
                (other, one)
            };
            let temperature_relative_error = kt / difference.abs() * sigma;
            if temperature_relative_error >= USELESS {
                continue;
            }
            out.push(Pair {
                first,
                second,
                energy_difference_per_cm: difference.abs(),
                distance_nm,
                temperature_relative_error,
            });
        }
    }
    out.sort_by(|a, b| {
        a.temperature_relative_error
            .total_cmp(&b.temperature_relative_error)
    });
    out
}

/// σ_T/T of a Boltzmann plot of these lines: kT/√(Σ w (E − Ē)²), w being one over the variance
/// (straight line by least squares).
fn plot_error(question: &Question, usable: &[Usable], chosen: &[usize]) -> f64 {
    let point = |&i: &usize| {
        (
            1.0 / variance(question, &usable[i]),
            usable[i].upper_energy_per_cm,
        )
    };
    let weight: f64 = chosen.iter().map(|i| point(i).0).sum();
    let mean = chosen.iter().map(point).map(|(w, e)| w * e).sum::<f64>() / weight;
    let spread: f64 = chosen
        .iter()
        .map(point)
        .map(|(w, e)| w * (e - mean).powi(2))
        .sum();
    question.conditions.kt_per_cm / spread.sqrt()
}

/// Begins with the best pair at any distance, then adds the line that lowers the error most.
fn set(question: &Question, usable: &[Usable]) -> Vec<(usize, Option<f64>)> {
    let anywhere = Question {
        within_nm: None,
        ..question.clone()
    };
    let Some(best) = pairs(&anywhere, usable).first().copied() else {
        return Vec::new();
    };
    let mut chosen = vec![best.first, best.second];
    let mut out = vec![
        (best.first, None),
        (best.second, Some(plot_error(question, usable, &chosen))),
    ];
    while out.len() < SET {
        let with = |i: usize| {
            let mut more = chosen.clone();
            more.push(i);
            plot_error(question, usable, &more)
        };
        let next = (0..usable.len())
            .filter(|i| !chosen.contains(i))
            .map(|i| (i, with(i)))
            .min_by(|a, b| a.1.total_cmp(&b.1));
        let Some((index, error)) = next else { break };
        chosen.push(index);
        out.push((index, Some(error)));
    }
    out
}
