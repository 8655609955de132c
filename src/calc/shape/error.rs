//! What can be wrong with a line shape.

use thiserror::Error;

/// A width, temperature or response curve that no line shape can be made of.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum ShapeError {
    /// A quantity that must be finite and positive is not.
    #[error("{quantity} is {value}: it must be a positive number")]
    NotPositive {
        /// What was given, in words with its unit.
        quantity: &'static str,
        /// The value.
        value: f64,
    },
    /// A quantity that must be finite and not negative is not.
    #[error("{quantity} is {value}: it must be zero or a positive number")]
    Negative {
        /// What was given, in words with its unit.
        quantity: &'static str,
        /// The value.
        value: f64,
    },
    /// Neither the line nor the instrument has a width.
    #[error(
        "the line has no width: give an instrument width, a gas temperature or a pressure width"
    )]
    NoWidth,
    /// Quantum numbers between which no line lies.
    #[error("n = {n_upper} to n = {n_lower} is no emission line: the upper n must be larger")]
    NoTransition {
        /// Lower principal quantum number.
        n_lower: u32,
        /// Upper principal quantum number.
        n_upper: u32,
    },
    /// A response curve needs at least two points.
    #[error("the response curve has {points} points: it needs at least 2")]
    FewPoints {
        /// How many there are.
        points: usize,
    },
    /// The abscissa of a response curve must rise.
    #[error(
        "point {point} of the response curve, at {position_nm} nm, does not lie above the one \
         before it: sort the curve by wavelength and keep one value per wavelength"
    )]
    NotRising {
        /// Number of the point, from 1.
        point: usize,
        /// Where it lies, nm.
        position_nm: f64,
    },
    /// A response is negative or no number.
    #[error("point {point} of the response curve is {value}: responses must be zero or positive")]
    BadResponse {
        /// Number of the point, from 1.
        point: usize,
        /// What was given.
        value: f64,
    },
    /// A response curve without area.
    #[error("the response curve is zero everywhere: at least one response must be positive")]
    NoArea,
}

/// `value` if it is finite and positive.
pub(crate) fn positive(quantity: &'static str, value: f64) -> Result<f64, ShapeError> {
    if value.is_finite() && value > 0.0 {
        Ok(value)
    } else {
        Err(ShapeError::NotPositive { quantity, value })
    }
}

/// `value` if it is finite and not negative.
pub(crate) fn not_negative(quantity: &'static str, value: f64) -> Result<f64, ShapeError> {
    if value.is_finite() && value >= 0.0 {
        Ok(value)
    } else {
        Err(ShapeError::Negative { quantity, value })
    }
}
