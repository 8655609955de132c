//! How what a filter lets through changes: with temperature, tilt and drift.

use super::emission::Conditions;
use super::error::AdviseError;
use super::passband::{Passed, Question, View, lights};
use super::target::strongest;
use super::verdict::Verdict;
use crate::calc::filter::{Illumination, Rays, SeenFilter};

/// What the filter gives at one electron temperature.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TemperaturePoint {
    /// k T of the electrons, cm⁻¹.
    pub kt_per_cm: f64,
    /// The target's part of the light of all lines; `None` where there is none.
    pub purity: Option<f64>,
    /// Light of other species over that of the target.
    pub interference_fraction: Option<f64>,
}

/// What the filter gives at one electron density.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct DensityPoint {
    /// Electron density, m⁻³.
    pub electron_density_per_m3: f64,
    /// The target's part of the light of all lines; `None` where there is none.
    pub purity: Option<f64>,
    /// Light of other species over that of the target.
    pub interference_fraction: Option<f64>,
}

/// What the filter gives at one tilt.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TiltPoint {
    /// Tilt, degrees.
    pub tilt_deg: f64,
    /// Where the passband lies, nm.
    pub centre_nm: f64,
    /// Transmission for the target's strongest component.
    pub transmission: Option<f64>,
    /// The target's part of the light of all lines.
    pub purity: Option<f64>,
    /// Light of other species over that of the target.
    pub interference_fraction: Option<f64>,
}

/// Purity at each temperature of the question. The background is left out: it does not follow from
/// the temperature of the electrons.
pub(super) fn temperatures(
    view: &View<'_, '_>,
    passed: &[Passed],
    target: usize,
    question: &Question,
) -> Result<Vec<TemperaturePoint>, AdviseError> {
    let at = |&kt_per_cm: &f64| {
        let conditions = Conditions {
            kt_per_cm,
            ..question.conditions.clone()
        };
        let (purity, interference_fraction) = under(view, passed, target, &conditions)?;
        Ok(TemperaturePoint {
            kt_per_cm,
            purity,
            interference_fraction,
        })
    };
    question.scan_kt_per_cm.iter().map(at).collect()
}

/// Purity and interference fraction under other conditions, widths as they are.
fn under(
    view: &View<'_, '_>,
    passed: &[Passed],
    target: usize,
    conditions: &Conditions,
) -> Result<(Option<f64>, Option<f64>), AdviseError> {
    let light = lights(view.scene, conditions)?;
    let there: Vec<Passed> = (0..passed.len())
        .map(|i| view.passed(i, passed[i].transmission, light[i]))
        .collect();
    let shares = view.shares(&there, target);
    let fraction = (shares.target > 0.0).then(|| shares.others / shares.target);
    Ok((shares.purity(), fraction))
}

/// Purity at each electron density of the question, without background and with line widths as
/// they are.
pub(super) fn densities(
    view: &View<'_, '_>,
    passed: &[Passed],
    target: usize,
    question: &Question,
) -> Result<Vec<DensityPoint>, AdviseError> {
    let at = |&electron_density_per_m3: &f64| {
        let conditions = Conditions {
            electron_density_per_m3: Some(electron_density_per_m3),
            ..question.conditions.clone()
        };
        let (purity, interference_fraction) = under(view, passed, target, &conditions)?;
        Ok(DensityPoint {
            electron_density_per_m3,
            purity,
            interference_fraction,
        })
    };
    question.scan_density_per_m3.iter().map(at).collect()
}

/// Purity and transmission at each tilt of the question that the filter can be tilted to.
pub(super) fn tilts(
    view: &View<'_, '_>,
    target: usize,
    question: &Question,
) -> Result<Vec<TiltPoint>, AdviseError> {
    let main = strongest(view.scene, target);
    let mut out = Vec::new();
    for &tilt_deg in &question.scan_tilt_deg {
        let light = Illumination {
            tilt_deg,
            ..question.light
        };
        let Ok(rays) = Rays::new(light, question.filter.effective_index()) else {
            break;
        };
        let seen = question.filter.behind(&rays, light.warming_k)?;
        let passed = view.at_centres(&seen);
        let shares = view.shares(&passed, target);
        out.push(TiltPoint {
            tilt_deg,
            centre_nm: seen.centre_nm(),
            transmission: passed[main].transmission,
            purity: shares.purity(),
            interference_fraction: (shares.target > 0.0).then(|| shares.others / shares.target),
        });
    }
    Ok(out)
}

/// Steps of a drift, in widths, and how far it is followed.
const STEP_WIDTHS: f64 = 0.025;
const WIDTHS: f64 = 3.0;
const HALVINGS: u32 = 12;

/// How far the passband may move to the blue and to the red before the verdict on the rated lines
/// is another, nm; `None` where it stays within three widths.
pub(super) fn drift(
    view: &View<'_, '_>,
    target: usize,
    seen: &SeenFilter<'_>,
    question: &Question,
) -> (Option<f64>, Option<f64>) {
    let verdict = |by_nm: f64| -> Verdict {
        let passed = view.at_centres(&seen.clone().shifted(by_nm));
        view.shares(&passed, target).verdict()
    };
    let fwhm_nm = question.filter.fwhm_nm();
    let now = verdict(0.0);
    let towards = |sign: f64| -> Option<f64> {
        let steps = (WIDTHS / STEP_WIDTHS).round() as u32;
        let at = |step: u32| sign * f64::from(step) * STEP_WIDTHS * fwhm_nm;
        let first = (1..=steps).find(|&step| verdict(at(step)) != now)?;
        let (mut same, mut other) = (at(first - 1), at(first));
        for _ in 0..HALVINGS {
            let middle = f64::midpoint(same, other);
            if verdict(middle) == now {
                same = middle;
            } else {
                other = middle;
            }
        }
        Some(same.abs())
    };
    (towards(-1.0), towards(1.0))
}
