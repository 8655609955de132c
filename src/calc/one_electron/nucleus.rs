//! Nuclei: charge, mass, charge radius.

use vocabulary::light::constants::ELECTRON_MASS_U;

use super::error::OneElectronError;

/// Heaviest charge that the model takes; Zα stays well below 1.
pub const HIGHEST_ATOMIC_NUMBER: u8 = 110;

/// Electron rest energy, eV (CODATA 2022).
const ELECTRON_REST_EV: f64 = 510_998.950_69;

/// A nucleus as the one-electron model needs it. Made by [`Nucleus::new`],
/// [`Nucleus::from_atomic_mass`] or one of the constants, so that its values are sound.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Nucleus {
    pub(super) atomic_number: u8,
    pub(super) mass_electrons: f64,
    pub(super) mass_relative_uncertainty: f64,
    pub(super) radius_fm: f64,
    pub(super) radius_uncertainty_fm: f64,
    pub(super) polarisation_khz: f64,
    pub(super) polarisation_uncertainty_khz: f64,
}

impl Nucleus {
    /// The proton. Masses here: nuclear mass over electron mass, CODATA 2022 (Mohr, Newell, Taylor &
    /// Tiesinga 2025, Rev. Mod. Phys. 97, 025002); radii of p, d, α: the same.
    pub const PROTON: Self = Self::known(
        1,
        (1_836.152_673_426, 1.7e-11),
        (0.840_75, 0.000_64),
        (-0.070, 0.04),
    );
    /// The deuteron; polarisation shift of 1S −21.4 kHz (Tiesinga et al. 2021; from memory).
    pub const DEUTERON: Self = Self::known(
        1,
        (3_670.482_967_655, 1.7e-11),
        (2.127_78, 0.000_27),
        (-21.37, 1.0),
    );
    /// The triton; radius of Angeli & Marinova 2013, At. Data Nucl. Data Tables 99, 69.
    pub const TRITON: Self = Self::known(
        1,
        (5_496.921_535_51, 3.8e-11),
        (1.759_1, 0.036_3),
        (0.0, 2.0),
    );
    /// The helion, ³He nucleus; radius of Angeli & Marinova 2013.
    pub const HELION: Self = Self::known(
        2,
        (5_495.885_279_84, 2.9e-11),
        (1.966_1, 0.003_0),
        (-55.0, 20.0),
    );
    /// The α particle, ⁴He nucleus.
    pub const ALPHA: Self = Self::known(
        2,
        (7_294.299_541_71, 2.4e-11),
        (1.678_5, 0.002_1),
        (-28.0, 10.0),
    );

    const fn known(
        atomic_number: u8,
        mass: (f64, f64),
        radius: (f64, f64),
        polarisation: (f64, f64),
    ) -> Self {
        Self {
            atomic_number,
            mass_electrons: mass.0,
            mass_relative_uncertainty: mass.1,
            radius_fm: radius.0,
            radius_uncertainty_fm: radius.1,
            polarisation_khz: polarisation.0,
            polarisation_uncertainty_khz: polarisation.1,
        }
    }

    /// A nucleus of charge 1–110 and a mass in electron masses, with the relative 1 σ of that mass. The
    /// charge radius is [`typical_radius_fm`] of the mass number until [`Nucleus::with_radius`] gives one.
    pub fn new(
        atomic_number: u8,
        mass_electrons: f64,
        mass_relative_uncertainty: f64,
    ) -> Result<Self, OneElectronError> {
        if !(1..=HIGHEST_ATOMIC_NUMBER).contains(&atomic_number) {
            return Err(OneElectronError::AtomicNumber { atomic_number });
        }
        sound("mass (electron masses)", mass_electrons, 1.0)?;
        sound("mass uncertainty", mass_relative_uncertainty, 0.0)?;
        let (radius_fm, radius_uncertainty_fm) =
            typical_radius_fm((mass_electrons * ELECTRON_MASS_U).round().max(1.0));
        let light = f64::from(atomic_number).powi(4) * 2.0;
        Ok(Self {
            atomic_number,
            mass_electrons,
            mass_relative_uncertainty,
            radius_fm,
            radius_uncertainty_fm,
            polarisation_khz: 0.0,
            polarisation_uncertainty_khz: light,
        })
    }

    /// A nucleus from the mass of the neutral atom, unified mass units, and its 1 σ. The electrons and
    /// their binding, 14.4381 Z^2.39 + 1.55468e-6 Z^5.35 eV (Lunney, Pearson & Thibault 2003, Rev. Mod.
    /// Phys. 75, 1021, equation A4; H and He as measured), are taken off; that formula's own error stays below 1e-9 of the mass.
    pub fn from_atomic_mass(
        atomic_number: u8,
        atomic_mass_u: f64,
        uncertainty_u: f64,
    ) -> Result<Self, OneElectronError> {
        sound("atomic mass (u)", atomic_mass_u, 0.5)?;
        sound("atomic mass uncertainty (u)", uncertainty_u, 0.0)?;
        let charge = f64::from(atomic_number);
        let binding_ev = match atomic_number {
            1 => 13.598,
            2 => 79.005,
            _ => 14.438_1 * charge.powf(2.39) + 1.554_68e-6 * charge.powf(5.35),
        };
        let mass_electrons =
            atomic_mass_u / ELECTRON_MASS_U - charge + binding_ev / ELECTRON_REST_EV;
        Self::new(
            atomic_number,
            mass_electrons,
            (uncertainty_u / atomic_mass_u).hypot(1e-10),
        )
    }

    /// The same nucleus with a root-mean-square charge radius and its 1 σ, femtometres.
    pub fn with_radius(
        self,
        radius_fm: f64,
        radius_uncertainty_fm: f64,
    ) -> Result<Self, OneElectronError> {
        sound("charge radius (fm)", radius_fm, 0.0)?;
        sound("charge radius uncertainty (fm)", radius_uncertainty_fm, 0.0)?;
        Ok(Self {
            radius_fm,
            radius_uncertainty_fm,
            ..self
        })
    }

    /// Nuclear charge Z.
    pub const fn atomic_number(&self) -> u8 {
        self.atomic_number
    }

    /// Z as a number.
    pub fn charge(&self) -> f64 {
        f64::from(self.atomic_number)
    }

    /// Mass number, from the mass.
    pub fn mass_number(&self) -> u32 {
        (self.mass_electrons * ELECTRON_MASS_U).round() as u32
    }

    /// Nuclear mass over electron mass.
    pub const fn mass_electrons(&self) -> f64 {
        self.mass_electrons
    }

    /// Root-mean-square charge radius, femtometres.
    pub const fn radius_fm(&self) -> f64 {
        self.radius_fm
    }

    /// Reduced mass over electron mass.
    pub fn reduced_mass(&self) -> f64 {
        self.mass_electrons / (1.0 + self.mass_electrons)
    }

    /// Charge by which the relative motion couples to light, in units of e: (m_N + Z m_e)/(m_N + m_e)
    /// (Bethe & Salpeter 1957, section 59); 1 for a neutral atom.
    pub fn dipole_charge(&self) -> f64 {
        (self.mass_electrons + self.charge()) / (self.mass_electrons + 1.0)
    }
}

/// Typical charge radius and its 1 σ, femtometres, for a mass number: 0.836 A^(1/3) + 0.570 (Johnson &
/// Soff 1985, At. Data Nucl. Data Tables 33, 405, for A > 9); lighter nuclei scatter more.
pub fn typical_radius_fm(mass_number: f64) -> (f64, f64) {
    let radius = 0.836 * mass_number.cbrt() + 0.570;
    let spread = if mass_number > 9.5 { 0.05 } else { 0.3 };
    (radius, spread)
}

fn sound(quantity: &'static str, value: f64, lowest: f64) -> Result<(), OneElectronError> {
    if value.is_finite() && value >= lowest {
        Ok(())
    } else {
        Err(OneElectronError::Nucleus { quantity, value })
    }
}
