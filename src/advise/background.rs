//! Light behind a filter that comes from no line: hot surfaces and the free–free continuum.

use std::f64::consts::PI;

use vocabulary::light::constants::{PLANCK_J_S, SPEED_OF_LIGHT_M_PER_S};
use vocabulary::light::thermal::radiance_w_per_m2_sr_nm;
use vocabulary::light::{Air, Medium};

use super::error::AdviseError;
use super::passband::{Passed, Question, View};
use super::position::placed;
use crate::calc::filter::SeenFilter;
use crate::calc::plasma::free_free_w_per_m3_sr_nm;

/// Sources of a background, and what makes their strength comparable with that of the lines.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Background {
    /// A hot surface in view: temperature (K) and emissivity (0–1).
    pub hot: Option<(f64, f64)>,
    /// The free–free continuum of the plasma counts (singly charged ions, as many as electrons).
    pub free_free: bool,
    /// Length of the plasma along the line of sight, m.
    pub path_m: Option<f64>,
    /// What sets the scale of the lines.
    pub scale: Option<Scale>,
    /// Where the filter transmits, nm: background is counted from here to there.
    pub reach_nm: (f64, f64),
}

/// What sets the scale of the lines.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Scale {
    /// Radiance of the target before the filter, W m⁻² sr⁻¹.
    TargetRadiance(f64),
    /// Density of a species of amount 1, m⁻³, along the path.
    Density(f64),
}

/// Points of the integral over the passband and over the rest.
const POINTS: u32 = 2000;
/// Widths to either side that count as the passband.
const NEAR_WIDTHS: f64 = 5.0;

/// Light of the background behind filter and detector, in the unit of the lines; `None` where none
/// is asked for or nothing sets a scale.
pub(super) fn background(
    question: &Question,
    view: &View<'_, '_>,
    seen: &SeenFilter<'_>,
    target: Option<usize>,
    passed: &[Passed],
) -> Result<Option<f64>, AdviseError> {
    let background = question.background;
    if background.hot.is_none() && !background.free_free {
        return Ok(None);
    }
    let Some(radiance_per_light) = scale(question, view, target, passed) else {
        return Ok(None);
    };
    let (low, high) = background.reach_nm;
    let (centre, near) = (seen.centre_nm(), NEAR_WIDTHS * question.filter.fwhm_nm());
    let borders = [
        low,
        (centre - near).max(low),
        (centre + near).min(high),
        high,
    ];
    let mut radiance = 0.0;
    for pair in borders.windows(2) {
        radiance += integral(question, seen, pair[0], pair[1])?;
    }
    Ok(Some(radiance / radiance_per_light))
}

/// W m⁻² sr⁻¹ before the filter that one unit of light of the scene stands for.
fn scale(
    question: &Question,
    view: &View<'_, '_>,
    target: Option<usize>,
    passed: &[Passed],
) -> Option<f64> {
    match question.background.scale? {
        Scale::TargetRadiance(radiance) => {
            let light: f64 = view.scene.features[target?]
                .components
                .iter()
                .filter(|&&c| passed[c].light.is_some())
                .filter_map(|&c| view.scene.emissions[c].light)
                .sum();
            (light > 0.0).then(|| radiance / light)
        }
        // Light is population × rate (s⁻¹) × wavenumber (cm⁻¹) per atom.
        Scale::Density(per_m3) => {
            let photon_j_cm = PLANCK_J_S * SPEED_OF_LIGHT_M_PER_S * 100.0;
            Some(per_m3 * question.background.path_m? * photon_j_cm / (4.0 * PI))
        }
    }
}

/// W m⁻² sr⁻¹ of the background behind filter and detector between two wavelengths (nm), by the
/// trapezium rule.
fn integral(
    question: &Question,
    seen: &SeenFilter<'_>,
    from_nm: f64,
    to_nm: f64,
) -> Result<f64, AdviseError> {
    if to_nm <= from_nm {
        return Ok(0.0);
    }
    let step = (to_nm - from_nm) / f64::from(POINTS);
    let mut sum = 0.0;
    for point in 0..=POINTS {
        let nm = from_nm + step * f64::from(point);
        let Some(transmission) = seen.transmission(nm) else {
            continue;
        };
        let vacuum_nm = vacuum(nm);
        let Some(response) = question.detector.response(vacuum_nm) else {
            continue;
        };
        let weight = if point == 0 || point == POINTS {
            0.5
        } else {
            1.0
        };
        sum += weight * transmission * response * radiance(question, vacuum_nm)?;
    }
    Ok(sum * step)
}

/// The vacuum wavelength of one that a filter maker gives, nm.
fn vacuum(nm: f64) -> f64 {
    let shifted = placed(1e7 / nm, 0.0, Medium::Auto, Air::standard());
    shifted.map_or(nm, |p| nm * nm / p.wavelength_nm)
}

/// W m⁻² sr⁻¹ nm⁻¹.
fn radiance(question: &Question, vacuum_nm: f64) -> Result<f64, AdviseError> {
    let background = question.background;
    let mut radiance = 0.0;
    if let Some((kelvin, emissivity)) = background.hot {
        radiance += emissivity * radiance_w_per_m2_sr_nm(vacuum_nm, kelvin);
    }
    let density = question.conditions.electron_density_per_m3;
    if let (true, Some(path), Some(ne)) = (background.free_free, background.path_m, density) {
        let kt = question.conditions.kt_per_cm;
        radiance += path * free_free_w_per_m3_sr_nm(vacuum_nm, kt, 1, ne, ne)?;
    }
    Ok(radiance)
}
