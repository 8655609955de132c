//! What all pressure widths have in common: a width, how well it is known, and how it came about.

use super::error::{ShapeError, positive};
use vocabulary::atom::Configuration;
use vocabulary::light::constants::RYDBERG_PER_CM;
use vocabulary::spectrum::Level;

/// How a pressure width was obtained.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum WidthMethod {
    /// Fit to computer simulations of H-alpha or H-beta.
    BalmerSimulation,
    /// Fit to model-microfield calculations of Balmer and Paschen lines.
    SeriesFit,
    /// Quasi-static scaling for one-electron atoms: an estimate.
    QuasiStatic,
    /// Semiempirical electron impacts on any other atom: an estimate.
    ElectronImpact,
    /// Van der Waals interaction with neutral atoms: an estimate.
    VanDerWaals,
    /// Exchange of excitation with atoms of the same kind.
    Resonance,
}

impl WidthMethod {
    /// The paper it is taken from.
    pub const fn citation(self) -> &'static str {
        match self {
            Self::BalmerSimulation => {
                "Gigosos, González & Cardeñoso 2003, Spectrochim. Acta B 58, 1489"
            }
            Self::SeriesFit => "Lomanowski et al. 2015, Nucl. Fusion 55, 123028",
            Self::QuasiStatic => "Griem 1974, Spectral Line Broadening by Plasmas",
            Self::ElectronImpact => "Griem 1968, Phys. Rev. 165, 258",
            Self::VanDerWaals => {
                "Unsöld 1955, Physik der Sternatmosphären; Foley 1946, Phys. Rev. 69, 616"
            }
            Self::Resonance => "Ali & Griem 1965, Phys. Rev. 140, A1044",
        }
    }

    /// Whether an answer must call the width an estimate.
    pub const fn is_estimate(self) -> bool {
        matches!(
            self,
            Self::QuasiStatic | Self::ElectronImpact | Self::VanDerWaals
        )
    }
}

/// A pressure width of a line.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PressureWidth {
    /// Full width at half maximum (at half area for H-alpha), nm.
    pub fwhm_nm: f64,
    /// 1 σ as a factor: the width lies between value/factor and value · factor.
    pub uncertainty_factor: f64,
    /// How it was obtained.
    pub method: WidthMethod,
    /// Whether density and temperature lie where the source states its validity.
    pub inside_validity: bool,
}

/// The outer electron of a level, in the field of a core of charge z.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct OuterElectron {
    /// Distance of the level to its series limit, cm⁻¹.
    pub binding_per_cm: f64,
    /// Orbital angular momentum l.
    pub l: u32,
    /// Charge of the core that it sees: 1 for a neutral atom
    /// ([`vocabulary::atom::Species::core_charge`]).
    pub core_charge: u8,
}

impl OuterElectron {
    /// The outer electron of a level of a species with this series limit (cm⁻¹ above its ground
    /// level): the last one of its configuration. `None` where the level has no readable
    /// configuration, or lies above the limit.
    pub fn of_level(level: &Level, limit_per_cm: f64) -> Option<Self> {
        let binding_per_cm = limit_per_cm - level.energy_per_cm;
        let configuration = Configuration::parse(level.configuration.as_deref()?)?;
        Some(Self {
            binding_per_cm: (binding_per_cm > 0.0).then_some(binding_per_cm)?,
            l: u32::from(configuration.outer_electron()?.l),
            core_charge: level.species.core_charge(),
        })
    }

    /// Effective principal quantum number n* = z √(R/B).
    ///
    /// # Errors
    /// A binding energy that is not positive: the level lies above its series limit.
    pub fn effective_n(self) -> Result<f64, ShapeError> {
        let binding = positive(
            "the binding energy of the level in per cm",
            self.binding_per_cm,
        )?;
        Ok(f64::from(self.core_charge) * (RYDBERG_PER_CM / binding).sqrt())
    }

    /// Mean square radius ⟨r²⟩ over a₀²: n*²/(2 z²) (5 n*² + 1 − 3 l (l + 1)).
    ///
    /// Exact for hydrogen (H. A. Bethe & E. E. Salpeter 1957, eq. 3.26); with n* the Coulomb
    /// approximation of D. R. Bates & A. Damgaard 1949, good to some ten per cent when n* > l + ½.
    /// Grows as n*⁴.
    ///
    /// # Errors
    /// As [`OuterElectron::effective_n`].
    pub fn mean_square_radius(self) -> Result<f64, ShapeError> {
        let n2 = self.effective_n()?.powi(2);
        let l = f64::from(self.l);
        let z2 = f64::from(self.core_charge).powi(2);
        // A penetrating orbit with n* < l + ½ would give nonsense: never below n*⁴/z² of a circular
        // one.
        let bracket = (5.0 * n2 + 1.0 - 3.0 * l * (l + 1.0)).max(2.0 * n2);
        Ok(n2 / (2.0 * z2) * bracket)
    }
}
