//! Levels of a non-penetrating electron (l ≥ 3) from the polarisation of its core, for series
//! of which nothing is held.
//!
//! The core is polarised by the field of the outer electron, which lowers the level by
//! `α_d R ⟨r⁻⁴⟩ + α_q R ⟨r⁻⁶⟩` with the radii in a₀ and the polarisabilities in a₀³ and a₀⁵
//! (Born & Heisenberg 1924, Z. Phys. 23, 388; Mayer & Mayer 1933, Phys. Rev. 43, 605),
//! the expectation values being hydrogenic (Bockasten 1974, Phys. Rev. A 9, 1087). The fine structure is that
//! of one electron in the field of the core charge (Bethe & Salpeter 1957, eq. 13.9).

use vocabulary::light::constants::FINE_STRUCTURE;

use super::{Prediction, PredictionMethod, SeriesError};

/// Lowest l at which the model is used: d electrons enter the core of all but the lightest.
pub const LOWEST_L: u32 = 3;

/// Static polarisabilities of a core.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CorePolarisability {
    /// Dipole, a₀³.
    pub dipole_a0_3: f64,
    /// 1 σ of the dipole, a₀³.
    pub dipole_sigma_a0_3: f64,
    /// Quadrupole, a₀⁵.
    pub quadrupole_a0_5: f64,
    /// 1 σ of the quadrupole, a₀⁵.
    pub quadrupole_sigma_a0_5: f64,
}

/// Dipole and quadrupole polarisabilities of closed-shell cores, by element symbol and charge of
/// the core, in a₀³ and a₀⁵.
///
/// Random-phase values of Johnson, Kolb & Huang 1983 (At. Data Nucl. Data Tables 28, 333), from
/// memory; He⁺ is exact (9/2 and 15, over Z⁴ and Z⁶: Dalgarno & Lewis 1955, Proc. R. Soc. A 233, 70).
const CORES: [(&str, u32, f64, f64); 15] = [
    ("He", 1, 0.281_25, 0.234_375),
    ("Li", 1, 0.1894, 0.1122),
    ("Na", 1, 0.9457, 1.521),
    ("K", 1, 5.457, 16.27),
    ("Rb", 1, 9.076, 35.41),
    ("Cs", 1, 15.81, 86.4),
    ("Fr", 1, 20.4, 127.0),
    ("Be", 2, 0.0518, 0.0153),
    ("Mg", 2, 0.4698, 0.518),
    ("Ca", 2, 3.254, 6.936),
    ("Sr", 2, 5.813, 17.15),
    ("Ba", 2, 10.61, 46.0),
    ("Ra", 2, 13.7, 67.0),
    ("Al", 3, 0.2649, 0.220),
    ("Zn", 2, 2.296, 6.0),
];

impl CorePolarisability {
    /// The polarisability of a core that is in the table; `None` for others.
    ///
    /// σ: 4 % of the dipole (the random-phase value against measured ones), and the whole of the
    /// quadrupole term, since the reaction of the core lags behind the electron (van Vleck &
    /// Whitelaw 1933, Phys. Rev. 44, 551) and that correction has its order.
    pub fn of_core(element: &str, core_charge: u32) -> Option<Self> {
        CORES
            .iter()
            .find(|(symbol, charge, ..)| *symbol == element && *charge == core_charge)
            .map(|(_, _, dipole, quadrupole)| Self {
                dipole_a0_3: *dipole,
                dipole_sigma_a0_3: 0.04 * dipole,
                quadrupole_a0_5: *quadrupole,
                quadrupole_sigma_a0_5: *quadrupole,
            })
    }
}

/// `⟨r⁻⁴⟩` of a hydrogenic orbital in a₀⁻⁴, l ≥ 1 (Bockasten 1974).
pub fn inverse_fourth_power(core_charge: u32, n: u32, l: u32) -> f64 {
    let (z, n, l) = (f64::from(core_charge), f64::from(n), f64::from(l));
    let below = 2.0 * n.powi(5) * (l - 0.5) * l * (l + 0.5) * (l + 1.0) * (l + 1.5);
    z.powi(4) * (3.0 * n * n - l * (l + 1.0)) / below
}

/// `⟨r⁻⁶⟩` of a hydrogenic orbital in a₀⁻⁶, l ≥ 2 (Bockasten 1974).
pub fn inverse_sixth_power(core_charge: u32, n: u32, l: u32) -> f64 {
    let (z, n, l) = (f64::from(core_charge), f64::from(n), f64::from(l));
    let above = 35.0 * n.powi(4) - 5.0 * n * n * (6.0 * l * (l + 1.0) - 5.0)
        + 3.0 * (l - 1.0) * l * (l + 1.0) * (l + 2.0);
    let inner = (l - 1.5) * (l - 1.0) * (l - 0.5) * l * (l + 0.5);
    let outer = (l + 1.0) * (l + 1.5) * (l + 2.0) * (l + 2.5);
    z.powi(6) * above / (8.0 * n.powi(7) * inner * outer)
}

/// What a non-penetrating level is predicted from.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct NonPenetrating {
    /// Charge that the outer electron sees.
    pub core_charge: u32,
    /// Rydberg constant of the nucleus, cm⁻¹.
    pub rydberg_per_cm: f64,
    /// Series limit, cm⁻¹.
    pub limit_per_cm: f64,
    /// 1 σ of the limit, cm⁻¹.
    pub limit_sigma_per_cm: f64,
    /// Polarisability of the core.
    pub core: CorePolarisability,
}

impl NonPenetrating {
    /// The level n, l; with `twice_j` its fine structure, without it the mean of the doublet.
    ///
    /// # Errors
    /// [`SeriesError::AngularMomentum`] for l ≥ n, [`SeriesError::Penetrating`] for l < 3.
    pub fn level(&self, n: u32, l: u32, twice_j: Option<u32>) -> Result<Prediction, SeriesError> {
        if l >= n {
            return Err(SeriesError::AngularMomentum { n, l });
        }
        if l < LOWEST_L {
            return Err(SeriesError::Penetrating {
                l,
                lowest: LOWEST_L,
            });
        }
        let fourth = self.rydberg_per_cm * inverse_fourth_power(self.core_charge, n, l);
        let sixth = self.rydberg_per_cm * inverse_sixth_power(self.core_charge, n, l);
        let dipole = self.core.dipole_a0_3 * fourth;
        let quadrupole = self.core.quadrupole_a0_5 * sixth;
        let fine = self.fine_structure_per_cm(n, l, twice_j);
        let strength = f64::from(self.core_charge).powi(2) * self.rydberg_per_cm;
        let binding_per_cm = strength / f64::from(n).powi(2) + fine + dipole + quadrupole;
        let left_out = (self.core.dipole_sigma_a0_3 * fourth)
            .hypot(self.core.quadrupole_sigma_a0_5 * sixth)
            .hypot(if twice_j.is_none() { fine } else { 0.0 });
        Ok(Prediction {
            n,
            energy_per_cm: self.limit_per_cm - binding_per_cm,
            binding_per_cm,
            quantum_defect: f64::from(n) - (strength / binding_per_cm).sqrt(),
            uncertainty_per_cm: left_out.hypot(self.limit_sigma_per_cm),
            extrapolated: true,
            method: PredictionMethod::CorePolarisation,
        })
    }

    /// Lowering of the level by relativity and spin–orbit coupling, cm⁻¹.
    fn fine_structure_per_cm(&self, n: u32, l: u32, twice_j: Option<u32>) -> f64 {
        let (z, n) = (f64::from(self.core_charge), f64::from(n));
        // The mean over j, weighted with 2j + 1, has l + ½ in the place of j + ½.
        let place = twice_j.map_or(f64::from(l) + 0.5, |twice| (f64::from(twice) + 1.0) / 2.0);
        self.rydberg_per_cm * FINE_STRUCTURE.powi(2) * z.powi(4) / n.powi(4) * (n / place - 0.75)
    }
}
