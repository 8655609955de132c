//! Broadening by neutral atoms: van der Waals and resonance.

use std::f64::consts::PI;

use vocabulary::light::constants::{
    ATOMIC_MASS_UNIT_KG, BOHR_RADIUS_M, BOLTZMANN_J_PER_K, FINE_STRUCTURE, SPEED_OF_LIGHT_M_PER_S,
};

use super::error::{ShapeError, not_negative, positive};
use super::pressure::{OuterElectron, PressureWidth, WidthMethod};
use super::widths::wavelength_width_nm;

/// The neutral gas that a line is broadened by.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Perturbers {
    /// Number density, m⁻³.
    pub density_per_m3: f64,
    /// Temperature, K.
    pub temperature_k: f64,
    /// Mass of one atom or molecule, u.
    pub mass_u: f64,
    /// Dipole polarisability of one, a₀³ ([`polarisability_a0_cubed`]).
    pub polarisability_a0_cubed: f64,
}

/// Van der Waals width of a line by neutral perturbers: an estimate.
///
/// Interaction −C₆/r⁶ with C₆ from the polarisability of the perturber and ⟨r²⟩ of both levels
/// (Unsöld 1955): Δω = ΔC₆/r⁶, ΔC₆ = α c α_p |⟨r²⟩_u − ⟨r²⟩_l|. Impact approximation with straight
/// paths (E. Lindholm 1945, Ark. Mat. Astron. Fys. 32A, 17; Foley 1946): FWHM Δω = 8.08 ΔC₆^(2/5)
/// v^(3/5) N, v the mean relative speed √(8kT/πμ). Measured widths are up to 2 times larger: 1 σ a
/// factor 1.6. Valid for ions too, and where collisions do not overlap (below some 10²⁶ m⁻³).
///
/// # Errors
/// Wavelength (vacuum, nm), mass (u), temperature (K), density or a binding energy not positive.
pub fn van_der_waals(
    wavelength_nm: f64,
    upper: OuterElectron,
    lower: OuterElectron,
    emitter_mass_u: f64,
    gas: Perturbers,
) -> Result<PressureWidth, ShapeError> {
    let wavelength_nm = positive("the wavelength in nm", wavelength_nm)?;
    let density = positive("the gas density per m³", gas.density_per_m3)?;
    let temperature_k = positive("the gas temperature in K", gas.temperature_k)?;
    let emitter = positive("the atomic mass in u", emitter_mass_u)?;
    let partner = positive("the mass of the gas atoms in u", gas.mass_u)?;
    let polarisability = positive("the polarisability in a0³", gas.polarisability_a0_cubed)?;
    let radii = (upper.mean_square_radius()? - lower.mean_square_radius()?).abs();
    let c6_m6_per_s =
        FINE_STRUCTURE * SPEED_OF_LIGHT_M_PER_S * BOHR_RADIUS_M.powi(5) * polarisability * radii;
    let reduced_kg = ATOMIC_MASS_UNIT_KG * emitter * partner / (emitter + partner);
    let speed = (8.0 * BOLTZMANN_J_PER_K * temperature_k / (PI * reduced_kg)).sqrt();
    let angular = 8.08 * c6_m6_per_s.powf(0.4) * speed.powf(0.6) * density;
    Ok(PressureWidth {
        fwhm_nm: wavelength_width_nm(wavelength_nm, angular / (2.0 * PI)),
        uncertainty_factor: 1.6,
        method: WidthMethod::VanDerWaals,
        inside_validity: density < 1e26,
    })
}

/// A resonance line that shares a level with the broadened line.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ResonanceLine {
    /// Vacuum wavelength, nm.
    pub wavelength_nm: f64,
    /// Absorption oscillator strength.
    pub absorption_f: f64,
    /// Statistical weight of the ground level.
    pub ground_weight: f64,
    /// Statistical weight of the level that both lines share.
    pub shared_weight: f64,
}

/// Resonance width of a line one of whose levels is the upper level of a resonance line of the
/// same kind of atom, `density_per_m3` of which are in the ground level.
///
/// FWHM Δω = 3.84 π √(g_ground/g_shared) (e²/(4π ε₀ m_e ω_R)) f N (A. W. Ali & H. R. Griem 1965,
/// Phys. Rev. 140, A1044, with erratum 144, 366; from memory). 1 σ 15 %. Independent of
/// temperature.
///
/// # Errors
/// A wavelength (nm), weight or density that is not positive, or a negative oscillator strength.
pub fn resonance_width(
    wavelength_nm: f64,
    line: ResonanceLine,
    density_per_m3: f64,
) -> Result<PressureWidth, ShapeError> {
    let wavelength_nm = positive("the wavelength in nm", wavelength_nm)?;
    let shared_nm = positive(
        "the wavelength of the resonance line in nm",
        line.wavelength_nm,
    )?;
    let f = not_negative("the oscillator strength", line.absorption_f)?;
    let ground = positive("the weight of the ground level", line.ground_weight)?;
    let shared = positive("the weight of the shared level", line.shared_weight)?;
    let density = positive("the atom density per m³", density_per_m3)?;
    // e²/(4π ε₀ m_e) = α² c² a₀.
    let strength = (FINE_STRUCTURE * SPEED_OF_LIGHT_M_PER_S).powi(2) * BOHR_RADIUS_M;
    let resonance_per_s = 2.0 * PI * SPEED_OF_LIGHT_M_PER_S * 1e9 / shared_nm;
    let angular = 3.84 * PI * (ground / shared).sqrt() * strength / resonance_per_s * f * density;
    Ok(PressureWidth {
        fwhm_nm: wavelength_width_nm(wavelength_nm, angular / (2.0 * PI)),
        uncertainty_factor: 1.15,
        method: WidthMethod::Resonance,
        inside_validity: density < 1e26,
    })
}

/// Static dipole polarisability of a free atom in its ground state, a₀³ (1 a₀³ = 0.148185e-30 m³).
///
/// P. Schwerdtfeger & J. K. Nagle 2019, Mol. Phys. 117, 1200, from memory, to 2 %. `None` where
/// none is held.
pub fn polarisability_a0_cubed(atomic_number: u8) -> Option<f64> {
    Some(match atomic_number {
        1 => 4.5,
        2 => 1.383,
        3 => 164.1,
        6 => 11.3,
        7 => 7.4,
        8 => 5.3,
        10 => 2.66,
        11 => 162.7,
        12 => 71.2,
        18 => 11.08,
        19 => 289.7,
        20 => 160.8,
        30 => 38.7,
        36 => 16.78,
        37 => 319.8,
        48 => 46.0,
        54 => 27.3,
        55 => 400.9,
        80 => 33.9,
        _ => return None,
    })
}
