//! What can be wrong with the description of a plasma.

use thiserror::Error;

/// Conditions or levels that no population can be computed from.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum PlasmaError {
    /// A quantity that must be finite and positive is not.
    #[error("{quantity} is {value}: it must be a positive number")]
    NotPositive {
        /// What was given, in words with its unit.
        quantity: &'static str,
        /// The value.
        value: f64,
    },
    /// A level energy or weight that is no number, or negative.
    #[error(
        "a level of {energy_per_cm} per cm with weight {weight} cannot be counted: the energy must \
         be zero or positive and the weight positive"
    )]
    BadLevel {
        /// Its energy, cm⁻¹.
        energy_per_cm: f64,
        /// Its statistical weight.
        weight: f64,
    },
    /// No level below the series limit: nothing to be populated.
    #[error(
        "no bound level is held{}: without levels there is no partition function",
        below(*.limit_per_cm)
    )]
    NoLevels {
        /// The (lowered) series limit, cm⁻¹.
        limit_per_cm: Option<f64>,
    },
    /// A line between levels that are not there, or not in order.
    #[error(
        "the line from level {upper} to level {lower} cannot be used: both levels must exist with \
         positive weights, the upper one above the lower, and its rate must not be negative"
    )]
    BadTransition {
        /// Index of the lower level.
        lower: usize,
        /// Index of the upper level.
        upper: usize,
    },
    /// A number of ionisation limits that does not fit the number of stages.
    #[error("stage {stage} has no ionisation energy: give it, or leave the stages above it out")]
    NoLimit {
        /// Number of the stage in the list, from 1.
        stage: usize,
    },
}

fn below(limit_per_cm: Option<f64>) -> String {
    limit_per_cm.map_or_else(String::new, |limit| {
        format!(" below the series limit of {limit:.0} per cm")
    })
}

/// `value` if it is finite and positive.
pub(crate) fn positive(quantity: &'static str, value: f64) -> Result<f64, PlasmaError> {
    if value.is_finite() && value > 0.0 {
        Ok(value)
    } else {
        Err(PlasmaError::NotPositive { quantity, value })
    }
}
