//! Light that does not meet a filter head on.

use std::sync::Arc;

use super::error::{FilterError, inside};

/// How light meets a filter.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Illumination {
    /// Angle between the chief ray and the filter's normal, degrees.
    pub tilt_deg: f64,
    /// f-number of the beam, `None` when collimated. Its rays fill a cone of half angle
    /// asin(1/(2 F)) evenly.
    pub f_number: Option<f64>,
    /// Filter temperature minus the one that its centre is given for, K.
    pub warming_k: f64,
}

/// λ(θ)/λ(0) = √(1 − (sin θ/n)²) of an interference filter of effective index n.
///
/// P. H. Lissberger & W. L. Wilcock 1959, J. Opt. Soc. Am. 49, 126; good to about 20°–30°: beyond,
/// the two polarisations part and the band widens, which is not modelled.
///
/// # Errors
/// An index that is not between 0.5 and 10; an angle that is negative or beyond total reflection.
pub fn tilt_ratio(angle_deg: f64, effective_index: f64) -> Result<f64, FilterError> {
    let index = inside(
        "the effective index",
        effective_index,
        (0.5, 10.0),
        "between 0.5 and 10",
    )?;
    let angle = inside(
        "the angle in degrees",
        angle_deg,
        (0.0, f64::MAX),
        "at 0 or above",
    )?;
    let limit_deg = index.min(1.0).asin().to_degrees();
    if angle >= limit_deg {
        return Err(FilterError::BeyondTotalReflection {
            angle_deg,
            limit_deg,
        });
    }
    let sine = angle.to_radians().sin() / index;
    Ok((1.0 - sine * sine).sqrt())
}

/// Rays that stand for a cone.
const RAYS: usize = 48;
/// Rings and sectors of a tilted cone before they are sorted into `RAYS` groups.
const RINGS: usize = 48;
const SECTORS: usize = 64;

/// The rays of an illumination as one effective index shifts them. Making them for a tilted cone
/// costs some 100 µs: a search over many filters makes them once.
#[derive(Clone, Debug, PartialEq)]
pub struct Rays {
    /// λ(θ)/λ(0) of rays of equal weight, rising.
    pub(super) ratios: Arc<[f64]>,
}

impl Rays {
    /// The rays of a tilt and f-number (`warming_k` plays no part).
    ///
    /// # Errors
    /// An index outside 0.5–10, an f-number of 0.5 or less, an angle that is negative or beyond
    /// total reflection.
    pub fn new(light: Illumination, effective_index: f64) -> Result<Self, FilterError> {
        let half_angle_deg = match light.f_number {
            None => 0.0,
            Some(f) => {
                let f = inside("the f-number", f, (0.500_001, f64::MAX), "above 0.5")?;
                (0.5 / f).asin().to_degrees()
            }
        };
        // The steepest ray decides whether the formula holds for all.
        tilt_ratio(light.tilt_deg + half_angle_deg, effective_index)?;
        let ratios = if half_angle_deg == 0.0 {
            vec![tilt_ratio(light.tilt_deg, effective_index)?]
        } else {
            let mut ratios = cone(
                light.tilt_deg.to_radians(),
                half_angle_deg.to_radians(),
                effective_index,
            );
            ratios.sort_by(f64::total_cmp);
            ratios
        };
        Ok(Self {
            ratios: ratios.into(),
        })
    }

    /// Mean of the ratios: where the passband's centre of gravity goes.
    pub fn mean_ratio(&self) -> f64 {
        self.ratios.iter().sum::<f64>() / self.ratios.len() as f64
    }

    /// The rays, or their mean alone where they differ by less than `tolerance` (relative).
    pub(super) fn merged(&self, tolerance: f64) -> Arc<[f64]> {
        let spread = self.ratios[self.ratios.len() - 1] - self.ratios[0];
        if spread < tolerance {
            Arc::from([self.mean_ratio()])
        } else {
            Arc::clone(&self.ratios)
        }
    }
}

/// Ratios over a cone around a ray at `tilt` (radians), of even radiance in solid angle.
fn cone(tilt: f64, half_angle: f64, index: f64) -> Vec<f64> {
    let ratio = |cosine: f64| (1.0 - (1.0 - cosine * cosine) / (index * index)).sqrt();
    let depth = 1.0 - half_angle.cos();
    // Equal steps in cos α are equal solid angles.
    let ring = |k: usize, of: usize| 1.0 - depth * (k as f64 + 0.5) / of as f64;
    if tilt == 0.0 {
        return (0..RAYS).map(|k| ratio(ring(k, RAYS))).collect();
    }
    let mut all = Vec::with_capacity(RINGS * SECTORS);
    for k in 0..RINGS {
        let cosine = ring(k, RINGS);
        let sine = (1.0 - cosine * cosine).sqrt();
        for sector in 0..SECTORS {
            let azimuth = std::f64::consts::PI * (sector as f64 + 0.5) / SECTORS as f64;
            all.push(ratio(
                cosine * tilt.cos() - sine * tilt.sin() * azimuth.cos(),
            ));
        }
    }
    all.sort_by(f64::total_cmp);
    let group = all.len() / RAYS;
    all.chunks(group)
        .map(|rays| rays.iter().sum::<f64>() / rays.len() as f64)
        .collect()
}
