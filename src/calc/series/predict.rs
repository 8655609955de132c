//! Levels predicted from a fitted series.

use super::{SeriesError, SeriesFit};

/// How a level was predicted.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum PredictionMethod {
    /// Rydberg–Ritz fit to the members of its series.
    RitzFit,
    /// Polarisation of the core by a non-penetrating electron.
    CorePolarisation,
}

/// A predicted level.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Prediction {
    /// Principal quantum number.
    pub n: u32,
    /// Energy above the ground level, cm⁻¹.
    pub energy_per_cm: f64,
    /// Distance to the series limit, cm⁻¹.
    pub binding_per_cm: f64,
    /// Quantum defect.
    pub quantum_defect: f64,
    /// 1 σ of the energy, cm⁻¹.
    pub uncertainty_per_cm: f64,
    /// Whether n lies outside the members that were fitted.
    pub extrapolated: bool,
    /// How it was made.
    pub method: PredictionMethod,
}

impl SeriesFit {
    /// The level of principal quantum number n, from the lowest member upwards.
    ///
    /// # Errors
    /// [`SeriesError::AngularMomentum`] for n ≤ l, [`SeriesError::BelowLowest`] below the lowest
    /// member used.
    pub fn predict(&self, n: u32) -> Result<Prediction, SeriesError> {
        if n <= self.l {
            return Err(SeriesError::AngularMomentum { n, l: self.l });
        }
        let lowest = self.used.first().copied().unwrap_or(u32::MAX);
        if n < lowest {
            return Err(SeriesError::BelowLowest { n, lowest });
        }
        let at = f64::from(n);
        let energy_per_cm = self.ritz.energy_per_cm(at);
        Ok(Prediction {
            n,
            energy_per_cm,
            binding_per_cm: self.limit_per_cm - energy_per_cm,
            quantum_defect: self.defect(at),
            uncertainty_per_cm: self.uncertainty_per_cm(at),
            extrapolated: self.used.last().is_none_or(|highest| n > *highest),
            method: PredictionMethod::RitzFit,
        })
    }
}
