//! What a laser sees of a line: oscillator strength, cross-sections, saturation, recoil.

use std::f64::consts::PI;

use vocabulary::light::constants::{ATOMIC_MASS_UNIT_KG, PLANCK_J_S, SPEED_OF_LIGHT_M_PER_S};

use crate::calc::plasma::absorption_f;
use crate::calc::shape::{FWHM_PER_SIGMA, LineWidths, ShapeError, Voigt, doppler_sigma_relative};

/// Metres per nanometre.
const M_PER_NM: f64 = 1e-9;
/// cm² per m².
const CM2_PER_M2: f64 = 1e4;

/// What the numbers are made from.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Dipole {
    /// Vacuum wavelength, nm.
    pub vacuum_nm: f64,
    /// Rate of the line, s⁻¹.
    pub rate_per_s: f64,
    /// Weight of the lower level.
    pub lower_weight: f64,
    /// Weight of the upper level.
    pub upper_weight: f64,
}

impl Dipole {
    /// Absorption oscillator strength, averaged over the states of the lower level.
    pub fn oscillator_strength(&self) -> f64 {
        absorption_f(
            self.rate_per_s,
            self.upper_weight,
            self.lower_weight,
            1e7 / self.vacuum_nm,
        )
    }

    /// Integral of the absorption cross-section over frequency, m² Hz:
    /// (g_u/g_l) λ² A/8π (Einstein's detailed balance; e.g. Hilborn 1982, Am. J. Phys. 50, 982).
    pub fn integrated_m2_hz(&self) -> f64 {
        let wavelength_m = self.vacuum_nm * M_PER_NM;
        self.upper_weight / self.lower_weight * wavelength_m.powi(2) * self.rate_per_s / (8.0 * PI)
    }

    /// Peak cross-section of atoms at rest, cm², for unpolarised atoms and light: a Lorentzian of
    /// this natural FWHM (Hz); (g_u/g_l) λ²/2π where the line is the only decay.
    pub fn natural_cross_section_cm2(&self, natural_fwhm_hz: f64) -> f64 {
        self.integrated_m2_hz() * 2.0 / (PI * natural_fwhm_hz) * CM2_PER_M2
    }

    /// Peak cross-section of a gas, cm²: the Voigt profile of Doppler and natural widths.
    ///
    /// # Errors
    /// A temperature (K) or mass (u) that is not positive.
    pub fn doppler_cross_section_cm2(
        &self,
        temperature_k: f64,
        mass_u: f64,
        natural_fwhm_hz: f64,
    ) -> Result<f64, ShapeError> {
        let widths = LineWidths::new(self.vacuum_nm, temperature_k, mass_u, natural_fwhm_hz)?;
        let per_nm = Voigt::new(widths)?.peak();
        let nm_per_hz = self.vacuum_nm.powi(2) * M_PER_NM / SPEED_OF_LIGHT_M_PER_S;
        Ok(self.integrated_m2_hz() * per_nm * nm_per_hz * CM2_PER_M2)
    }
}

/// Points between two neighbouring components at which the strongest is looked for: with components
/// a Doppler width apart the peak is found to 1e-3 of itself.
const POINTS_BETWEEN: u32 = 16;

/// Where the sum of Voigt profiles, one for each component of a line (share of its strength, distance
/// in MHz from its centre of gravity), is largest.
///
/// Returns the cross-section of the gas there (cm²) and the distance (MHz); `None` without components.
///
/// # Errors
/// A temperature (K) or mass (u) that is not positive.
pub fn strongest_point(
    dipole: &Dipole,
    components: &[(f64, f64)],
    temperature_k: f64,
    mass_u: f64,
    lorentzian_fwhm_hz: f64,
) -> Result<Option<(f64, f64)>, ShapeError> {
    let nm = dipole.vacuum_nm;
    let voigt = Voigt::new(LineWidths::new(
        nm,
        temperature_k,
        mass_u,
        lorentzian_fwhm_hz,
    )?)?;
    let nm_per_hz = nm.powi(2) * M_PER_NM / SPEED_OF_LIGHT_M_PER_S;
    let at = |offset_mhz: f64| {
        let part = |(share, place): &(f64, f64)| {
            share * voigt.density((offset_mhz - place) * 1e6 * nm_per_hz)
        };
        components.iter().map(part).sum::<f64>()
    };
    let mut places: Vec<f64> = components.iter().map(|(_, place)| *place).collect();
    places.sort_by(f64::total_cmp);
    let between = places.windows(2).flat_map(|pair| {
        let step = (pair[1] - pair[0]) / f64::from(POINTS_BETWEEN);
        let from = pair[0];
        (0..POINTS_BETWEEN).map(move |k| from + step * f64::from(k))
    });
    let strongest = between
        .chain(places.last().copied())
        .map(|offset_mhz| (at(offset_mhz), offset_mhz))
        .max_by(|a, b| a.0.total_cmp(&b.0));
    let area = dipole.integrated_m2_hz() * nm_per_hz * CM2_PER_M2;
    Ok(strongest.map(|(density, offset_mhz)| (area * density, offset_mhz)))
}

/// FWHM of the Doppler profile, MHz.
///
/// # Errors
/// A temperature (K) or mass (u) that is not positive.
pub fn doppler_width_mhz(
    vacuum_nm: f64,
    temperature_k: f64,
    mass_u: f64,
) -> Result<f64, ShapeError> {
    let frequency_mhz = SPEED_OF_LIGHT_M_PER_S / (vacuum_nm * M_PER_NM) / 1e6;
    Ok(FWHM_PER_SIGMA * doppler_sigma_relative(temperature_k, mass_u)? * frequency_mhz)
}

/// Saturation intensity of a two-level atom, mW/cm²: π h c Γ/(3 λ³), Γ being the decay rate of
/// the upper level (s⁻¹) (Metcalf & van der Straten 1999, *Laser Cooling and Trapping*, equation
/// 2.24c). Polarised light on the strongest Zeeman component; other components need more.
pub fn saturation_mw_per_cm2(vacuum_nm: f64, decay_per_s: f64) -> f64 {
    let wavelength_m = vacuum_nm * M_PER_NM;
    let w_per_m2 =
        PI * PLANCK_J_S * SPEED_OF_LIGHT_M_PER_S * decay_per_s / (3.0 * wavelength_m.powi(3));
    0.1 * w_per_m2
}

/// Velocity that one photon gives an atom at rest, cm/s: h/(m λ).
pub fn recoil_cm_per_s(vacuum_nm: f64, mass_u: f64) -> f64 {
    100.0 * PLANCK_J_S / (mass_u * ATOMIC_MASS_UNIT_KG * vacuum_nm * M_PER_NM)
}

/// Part of weak light at line centre that a cell absorbs (Beer–Lambert): density of absorbing
/// atoms in cm⁻³, cross-section in cm², length in cm.
pub fn absorbed_fraction(absorbers_per_cm3: f64, cross_section_cm2: f64, length_cm: f64) -> f64 {
    -(-absorbers_per_cm3 * cross_section_cm2 * length_cm).exp_m1()
}
