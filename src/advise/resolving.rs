//! From which resolving power on a line is clear.

use super::error::AdviseError;
use super::scene::{Scene, seen};
use super::target::strongest;
use super::verdict::Verdict;
use crate::calc::shape::Profile;

/// The widest instrument that is tried, nm.
const WIDEST_NM: f64 = 5.0;
/// The narrowest, as a part of the line's own width: beyond it nothing changes.
const NARROWEST: f64 = 0.02;
/// Widths tried, evenly in their logarithm.
const STEPS: u32 = 48;
/// Halvings between two of them.
const HALVINGS: u32 = 12;

/// The smallest resolving power λ/FWHM (Gaussian instrument) from which on the interference of the
/// rated lines of other species stays below the limit of `clear`; `None` where it does not however
/// fine the instrument is, or where the target has no rate. The lower end is that of an instrument
/// of 5 nm. Higher orders of a grating are left out.
///
/// # Errors
/// Widths from which no profile can be made.
pub(super) fn clear_at_resolving_power(
    scene: &Scene<'_>,
    target: usize,
) -> Result<Option<f64>, AdviseError> {
    let feature = &scene.features[target];
    if feature.signal.is_none_or(|s| s <= 0.0) {
        return Ok(None);
    }
    let own = scene.emissions[strongest(scene, target)].widths.largest();
    let narrowest = (NARROWEST * own).max(1e-7 * feature.nm);
    let width = |step: u32| {
        let part = f64::from(step) / f64::from(STEPS);
        narrowest * (WIDEST_NM / narrowest).powf(part)
    };
    let is_clear = |width_nm: f64| -> Result<bool, AdviseError> {
        Ok(Verdict::of(interference_at(scene, target, width_nm)?) == Verdict::Clear)
    };
    let mut clear = None;
    for step in 0..=STEPS {
        if !is_clear(width(step))? {
            break;
        }
        clear = Some(step);
    }
    let Some(step) = clear else {
        return Ok(None);
    };
    let (mut clear_nm, mut not_nm) = (width(step), width(step + 1));
    if step < STEPS {
        for _ in 0..HALVINGS {
            let middle = (clear_nm * not_nm).sqrt();
            if is_clear(middle)? {
                clear_nm = middle;
            } else {
                not_nm = middle;
            }
        }
    }
    Ok(Some(feature.nm / clear_nm))
}

/// Interference fraction of a target seen at another instrument width (nm). The instrument is set
/// to where the target's own components are brightest.
fn interference_at(scene: &Scene<'_>, target: usize, width_nm: f64) -> Result<f64, AdviseError> {
    let feature = &scene.features[target];
    let profile = |i: usize| -> Result<Profile, AdviseError> {
        let emission = &scene.emissions[i];
        seen(emission.widths, &scene.form, width_nm).map_err(|cause| AdviseError::Shape {
            species: emission.line.species,
            cause,
        })
    };
    let mut own = Vec::with_capacity(feature.components.len());
    for &i in &feature.components {
        if let Some(light) = scene.emissions[i].light {
            own.push((scene.emissions[i].nm, light, profile(i)?));
        }
    }
    let signal_at = |nm: f64| -> f64 {
        own.iter()
            .map(|(at, light, profile)| light * profile.density(at - nm))
            .sum()
    };
    let places = own.iter().map(|o| o.0).chain([feature.nm]);
    let (centre, signal) = places
        .map(|nm| (nm, signal_at(nm)))
        .max_by(|a, b| a.1.total_cmp(&b.1))
        .unwrap_or((feature.nm, 0.0));
    let reach_nm = width_nm.max(scene.width.at_nm(feature.nm));
    let mut other = 0.0;
    for i in scene.reaching(centre, reach_nm) {
        let emission = &scene.emissions[i];
        if let Some(light) = emission
            .light
            .filter(|_| emission.spectrum != feature.spectrum)
        {
            other += light * profile(i)?.density(emission.nm - centre);
        }
    }
    Ok(other / signal)
}
