//! What can be wrong with the description of a filter or a detector.

use thiserror::Error;

/// A filter, curve or illumination that no transmission can be computed from.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum FilterError {
    /// A quantity outside the values that it can have.
    #[error("{quantity} is {value}: it must lie {allowed}")]
    OutOfRange {
        /// What was given, in words with its unit.
        quantity: &'static str,
        /// The value.
        value: f64,
        /// The allowed values, in words.
        allowed: &'static str,
    },
    /// A curve needs at least two points.
    #[error("the curve has {points} points: it needs at least 2")]
    FewPoints {
        /// How many there are.
        points: usize,
    },
    /// Wavelengths neither rise nor fall throughout.
    #[error(
        "point {point} of the curve, at {wavelength_nm} nm, breaks the order of wavelengths: sort \
         the curve and keep one value per wavelength"
    )]
    NotInOrder {
        /// Number of the point, from 1.
        point: usize,
        /// Its wavelength, nm.
        wavelength_nm: f64,
    },
    /// A value that is no transmission.
    #[error("point {point} of the curve, at {wavelength_nm} nm, is {value}: {advice}")]
    BadValue {
        /// Number of the point, from 1.
        point: usize,
        /// Its wavelength, nm.
        wavelength_nm: f64,
        /// What was given.
        value: f64,
        /// What to do.
        advice: &'static str,
    },
    /// A curve that leaves out a stretch.
    #[error(
        "the curve has a gap from {from_nm} to {to_nm} nm where its points are usually \
         {usual_step_nm:.3} nm apart: fill it, or split the curve there"
    )]
    Gap {
        /// Last point before it, nm.
        from_nm: f64,
        /// First point after it, nm.
        to_nm: f64,
        /// Median distance of neighbours, nm.
        usual_step_nm: f64,
    },
    /// Rays that the filter reflects totally, or that do not reach it.
    #[error(
        "rays at up to {angle_deg:.1}° lie beyond total reflection at {limit_deg:.1}°: tilt less, or \
         use a slower beam"
    )]
    BeyondTotalReflection {
        /// Largest angle of incidence, degrees.
        angle_deg: f64,
        /// Where the formula ends, degrees.
        limit_deg: f64,
    },
}

/// `value` if it is finite and inside `low..=high` (`allowed` says so in words).
pub(super) fn inside(
    quantity: &'static str,
    value: f64,
    (low, high): (f64, f64),
    allowed: &'static str,
) -> Result<f64, FilterError> {
    if value.is_finite() && (low..=high).contains(&value) {
        Ok(value)
    } else {
        Err(FilterError::OutOfRange {
            quantity,
            value,
            allowed,
        })
    }
}
