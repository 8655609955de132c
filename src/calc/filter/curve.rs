//! Measured curves over wavelength: transmission of a filter, response of a detector.

use super::error::FilterError;

/// What the values of a curve mean.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum CurveUnit {
    /// 0 to 1.
    Fraction,
    /// 0 to 100.
    Percent,
    /// Any scale; the highest value is taken as 1.
    Relative,
}

/// Steps wider than this many median steps are gaps.
const GAP: f64 = 10.0;
/// Noise about zero that is read as zero, as a fraction of the highest value.
const NOISE: f64 = 0.01;

/// A curve over wavelength (nm), checked: straight lines between points, unknown outside them.
#[derive(Clone, Debug, PartialEq)]
pub struct SpectralCurve {
    points: Vec<(f64, f64)>,
    negative_points: usize,
    looks_like_fraction: bool,
}

impl SpectralCurve {
    /// From (wavelength in nm, value). Wavelengths rise or fall throughout, without gaps: no step
    /// is wider than ten times the median step. Values lie between 0 and 1 (or 100 %); negative
    /// ones down to 1 % of the highest are noise and read as zero.
    ///
    /// # Errors
    /// Fewer than two points, wavelengths out of order, gaps, values outside their range or not
    /// numbers.
    pub fn new(points: &[(f64, f64)], unit: CurveUnit) -> Result<Self, FilterError> {
        if points.len() < 2 {
            return Err(FilterError::FewPoints {
                points: points.len(),
            });
        }
        check_order(points)?;
        let highest = points.iter().map(|p| p.1).fold(0.0, f64::max);
        check_values(points, unit, highest)?;
        let scale = match unit {
            CurveUnit::Fraction => 1.0,
            CurveUnit::Percent => 100.0,
            CurveUnit::Relative => highest,
        };
        let mut scaled: Vec<(f64, f64)> = points
            .iter()
            .map(|&(nm, value)| (nm, value.max(0.0) / scale))
            .collect();
        if scaled[0].0 > scaled[1].0 {
            scaled.reverse();
        }
        check_gaps(&scaled)?;
        Ok(Self {
            points: scaled,
            negative_points: points.iter().filter(|p| p.1 < 0.0).count(),
            looks_like_fraction: unit == CurveUnit::Percent && highest <= 1.0,
        })
    }

    /// Value at a wavelength (nm), 0 to 1; `None` outside the measured range.
    pub fn at(&self, wavelength_nm: f64) -> Option<f64> {
        let (first, last) = self.range_nm();
        if !(first..=last).contains(&wavelength_nm) {
            return None;
        }
        let above = self.points.partition_point(|p| p.0 <= wavelength_nm);
        let above = above.clamp(1, self.points.len() - 1);
        let ((x0, y0), (x1, y1)) = (self.points[above - 1], self.points[above]);
        Some(y0 + (y1 - y0) * (wavelength_nm - x0) / (x1 - x0))
    }

    /// First and last wavelength, nm.
    pub fn range_nm(&self) -> (f64, f64) {
        (self.points[0].0, self.points[self.points.len() - 1].0)
    }

    /// The highest point: wavelength in nm, and value.
    pub fn peak(&self) -> (f64, f64) {
        self.points.iter().copied().fold(
            self.points[0],
            |best, p| if p.1 > best.1 { p } else { best },
        )
    }

    /// Where the curve first and last passes half of its highest value, nm.
    pub fn half_points_nm(&self) -> (f64, f64) {
        let half = self.peak().1 / 2.0;
        let cross = |outer: Option<&(f64, f64)>, inner: (f64, f64)| match outer {
            Some(o) if inner.1 > o.1 => {
                inner.0 + (o.0 - inner.0) * (inner.1 - half) / (inner.1 - o.1)
            }
            _ => inner.0,
        };
        let first = self.points.iter().position(|p| p.1 >= half).unwrap_or(0);
        let last = self.points.iter().rposition(|p| p.1 >= half).unwrap_or(0);
        let before = first.checked_sub(1).and_then(|i| self.points.get(i));
        (
            cross(before, self.points[first]),
            cross(self.points.get(last + 1), self.points[last]),
        )
    }

    /// How many negative values were read as zero.
    pub fn negative_points(&self) -> usize {
        self.negative_points
    }

    /// Whether it was given in percent though no value exceeds 1: an answer should ask.
    pub fn looks_like_fraction(&self) -> bool {
        self.looks_like_fraction
    }
}

fn check_order(points: &[(f64, f64)]) -> Result<(), FilterError> {
    let falling = points[0].0 > points[1].0;
    for (index, &(wavelength_nm, _)) in points.iter().enumerate() {
        let ordered = index == 0 || {
            let before = points[index - 1].0;
            if falling {
                wavelength_nm < before
            } else {
                wavelength_nm > before
            }
        };
        if !ordered || !wavelength_nm.is_finite() || wavelength_nm <= 0.0 {
            return Err(FilterError::NotInOrder {
                point: index + 1,
                wavelength_nm,
            });
        }
    }
    Ok(())
}

fn check_values(points: &[(f64, f64)], unit: CurveUnit, highest: f64) -> Result<(), FilterError> {
    let lowest = -NOISE * highest;
    for (index, &(wavelength_nm, value)) in points.iter().enumerate() {
        let advice = match unit {
            _ if !value.is_finite() => "give a number",
            _ if value < lowest => "values must not be negative beyond noise of 1 % of the highest",
            CurveUnit::Percent if value > 100.0 => "percent must not exceed 100",
            CurveUnit::Fraction if value > 1.0 && highest <= 100.0 => {
                "fractions must not exceed 1; if the curve is in percent, say so"
            }
            CurveUnit::Fraction if value > 1.0 => "fractions must not exceed 1",
            _ => continue,
        };
        return Err(FilterError::BadValue {
            point: index + 1,
            wavelength_nm,
            value,
            advice,
        });
    }
    if highest > 0.0 {
        return Ok(());
    }
    Err(FilterError::BadValue {
        point: 1,
        wavelength_nm: points[0].0,
        value: points[0].1,
        advice: "the whole curve is zero; at least one value must be positive",
    })
}

fn check_gaps(points: &[(f64, f64)]) -> Result<(), FilterError> {
    let mut steps: Vec<f64> = points.windows(2).map(|p| p[1].0 - p[0].0).collect();
    steps.sort_by(f64::total_cmp);
    let usual_step_nm = steps[steps.len() / 2];
    let gap = points
        .windows(2)
        .find(|p| p[1].0 - p[0].0 > GAP * usual_step_nm * (1.0 + 1e-9));
    match gap {
        None => Ok(()),
        Some(pair) => Err(FilterError::Gap {
            from_nm: pair[0].0,
            to_nm: pair[1].0,
            usual_step_nm,
        }),
    }
}
