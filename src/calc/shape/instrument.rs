//! What a spectrometer or filter instrument makes of a line of no width.

use super::error::{ShapeError, positive};
use super::widths::FWHM_PER_SIGMA;

/// An instrument response, always taken with unit area.
#[derive(Clone, Debug, PartialEq)]
pub enum Instrument {
    /// A Gaussian.
    Gaussian {
        /// Full width at half maximum, nm.
        fwhm_nm: f64,
    },
    /// Equal entrance and exit slits: a triangle of half base `fwhm_nm`.
    Triangular {
        /// Full width at half maximum, nm.
        fwhm_nm: f64,
    },
    /// A wide slit, or a pixel: constant over `width_nm`, zero outside.
    Rectangular {
        /// Full width, nm.
        width_nm: f64,
    },
    /// A measured response.
    Measured(ResponseCurve),
}

impl Instrument {
    /// Its full width at half maximum, nm.
    pub fn fwhm_nm(&self) -> f64 {
        match self {
            Self::Gaussian { fwhm_nm } | Self::Triangular { fwhm_nm } => *fwhm_nm,
            Self::Rectangular { width_nm } => *width_nm,
            Self::Measured(curve) => curve.fwhm_nm(),
        }
    }

    /// An instrument whose width was checked.
    ///
    /// # Errors
    /// A width that is not positive and finite.
    pub fn checked(self) -> Result<Self, ShapeError> {
        match &self {
            Self::Gaussian { fwhm_nm } | Self::Triangular { fwhm_nm } => {
                positive("the instrument width in nm", *fwhm_nm)?;
            }
            Self::Rectangular { width_nm } => {
                positive("the slit width in nm", *width_nm)?;
            }
            Self::Measured(_) => {}
        }
        Ok(self)
    }

    /// Response per nm at an offset from the centre, nm.
    pub fn density(&self, offset_nm: f64) -> f64 {
        match self {
            Self::Gaussian { fwhm_nm } => {
                let t = offset_nm * FWHM_PER_SIGMA / fwhm_nm;
                (-t * t / 2.0).exp() * FWHM_PER_SIGMA
                    / (fwhm_nm * (2.0 * std::f64::consts::PI).sqrt())
            }
            Self::Triangular { fwhm_nm } => (1.0 - offset_nm.abs() / fwhm_nm).max(0.0) / fwhm_nm,
            Self::Rectangular { width_nm } => {
                f64::from(u8::from(offset_nm.abs() <= width_nm / 2.0)) / width_nm
            }
            Self::Measured(curve) => curve.density(offset_nm),
        }
    }

    /// The response as straight pieces, (offset, density) at their ends; `None` for a Gaussian.
    pub(super) fn pieces(&self) -> Option<Vec<(f64, f64)>> {
        match self {
            Self::Gaussian { .. } => None,
            Self::Triangular { fwhm_nm: w } => Some(vec![(-w, 0.0), (0.0, 1.0 / w), (*w, 0.0)]),
            Self::Rectangular { width_nm: w } => {
                Some(vec![(-w / 2.0, 1.0 / w), (w / 2.0, 1.0 / w)])
            }
            Self::Measured(curve) => Some(curve.points.clone()),
        }
    }
}

/// A measured instrument response: straight lines between points, zero outside, scaled to unit
/// area.
#[derive(Clone, Debug, PartialEq)]
pub struct ResponseCurve {
    points: Vec<(f64, f64)>,
}

impl ResponseCurve {
    /// From (offset in nm, response in any unit), offsets rising, responses not negative.
    /// Offset 0 is where the instrument is set to.
    ///
    /// # Errors
    /// Fewer than two points, offsets that do not rise, a negative response, no area.
    pub fn new(points: &[(f64, f64)]) -> Result<Self, ShapeError> {
        if points.len() < 2 {
            return Err(ShapeError::FewPoints {
                points: points.len(),
            });
        }
        for (index, &(position_nm, value)) in points.iter().enumerate() {
            let rising = index == 0 || position_nm > points[index - 1].0;
            let point = index + 1;
            if !rising || !position_nm.is_finite() {
                return Err(ShapeError::NotRising { point, position_nm });
            }
            if !value.is_finite() || value < 0.0 {
                return Err(ShapeError::BadResponse { point, value });
            }
        }
        let area: f64 = points
            .windows(2)
            .map(|pair| (pair[1].0 - pair[0].0) * f64::midpoint(pair[0].1, pair[1].1))
            .sum();
        if area <= 0.0 {
            return Err(ShapeError::NoArea);
        }
        let points = points.iter().map(|&(x, y)| (x, y / area)).collect();
        Ok(Self { points })
    }

    /// The same form, offsets multiplied by a factor above zero; the area stays 1.
    pub fn stretched(&self, factor: f64) -> Self {
        let points = self.points.iter();
        Self {
            points: points.map(|&(x, y)| (x * factor, y / factor)).collect(),
        }
    }

    /// Response per nm at an offset, nm.
    pub fn density(&self, offset_nm: f64) -> f64 {
        let above = self.points.partition_point(|&(x, _)| x <= offset_nm);
        if above == 0 || (above == self.points.len() && offset_nm > self.points[above - 1].0) {
            return 0.0;
        }
        let (a, b) = (
            self.points[above - 1],
            self.points[above.min(self.points.len() - 1)],
        );
        if b.0 > a.0 {
            a.1 + (b.1 - a.1) * (offset_nm - a.0) / (b.0 - a.0)
        } else {
            a.1
        }
    }

    /// Distance between the outermost points at half of the highest response, nm.
    pub fn fwhm_nm(&self) -> f64 {
        let half = self.points.iter().map(|p| p.1).fold(0.0, f64::max) / 2.0;
        let first = self.points.iter().position(|p| p.1 >= half).unwrap_or(0);
        let last = self.points.iter().rposition(|p| p.1 >= half).unwrap_or(0);
        let crossing = |inside: (f64, f64), outside: Option<&(f64, f64)>| match outside {
            Some(o) if inside.1 > o.1 => {
                inside.0 + (o.0 - inside.0) * (inside.1 - half) / (inside.1 - o.1)
            }
            _ => inside.0,
        };
        let before = first.checked_sub(1).and_then(|i| self.points.get(i));
        crossing(self.points[last], self.points.get(last + 1))
            - crossing(self.points[first], before)
    }
}
