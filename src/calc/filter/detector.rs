//! Detectors: how strongly they answer to light of a wavelength.

use vocabulary::light::photoelectric_threshold_nm;

use super::curve::SpectralCurve;
use super::error::{FilterError, inside};

/// A detector: a response curve, a photocathode's threshold, both or neither (even response).
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Detector {
    curve: Option<SpectralCurve>,
    threshold_nm: Option<f64>,
}

impl Detector {
    /// With a response curve.
    pub fn with_curve(mut self, curve: SpectralCurve) -> Self {
        self.curve = Some(curve);
        self
    }

    /// With a photocathode of this work function (eV): light of longer vacuum wavelength than h c/W
    /// frees no electrons (A. Einstein 1905, Ann. Phys. 322, 132). The sharp edge is that of a cold
    /// metal.
    ///
    /// # Errors
    /// A work function outside 0.1–20 eV.
    pub fn with_work_function(mut self, work_function_ev: f64) -> Result<Self, FilterError> {
        let work = inside(
            "the work function in eV",
            work_function_ev,
            (0.1, 20.0),
            "between 0.1 and 20",
        )?;
        self.threshold_nm = Some(photoelectric_threshold_nm(work));
        Ok(self)
    }

    /// Longest wavelength that it sees, nm, where a photocathode sets one.
    pub fn threshold_nm(&self) -> Option<f64> {
        self.threshold_nm
    }

    /// Response at a vacuum wavelength (nm), at most 1; `None` where its curve was not measured.
    pub fn response(&self, vacuum_nm: f64) -> Option<f64> {
        if self.threshold_nm.is_some_and(|limit| vacuum_nm > limit) {
            return Some(0.0);
        }
        match &self.curve {
            Some(curve) => curve.at(vacuum_nm),
            None => Some(1.0),
        }
    }
}
