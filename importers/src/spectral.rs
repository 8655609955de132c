//! Spectral quantities as tables state them, turned into vacuum wavenumbers.

use vocabulary::light::constants::{
    AVOGADRO_PER_MOL, BOLTZMANN_J_PER_K, ELECTRON_MASS_KG, ELEMENTARY_CHARGE_C, PLANCK_J_S,
    SPEED_OF_LIGHT_M_PER_S, VACUUM_PERMITTIVITY_F_PER_M,
};

/// Rate of spontaneous emission for f = 1, equal weights and 1 cm⁻¹, s⁻¹:
/// 2π e² σ² / (ε₀ m c) (Hilborn 1982, Am. J. Phys. 50, 982, table 1), 0.667 0 with σ in cm⁻¹.
pub const RATE_PER_OSCILLATOR_STRENGTH: f64 =
    2.0e4 * std::f64::consts::PI * ELEMENTARY_CHARGE_C * ELEMENTARY_CHARGE_C
        / (VACUUM_PERMITTIVITY_F_PER_M * ELECTRON_MASS_KG * SPEED_OF_LIGHT_M_PER_S);

/// J for a wavenumber of 1 cm⁻¹.
pub const JOULE_PER_PER_CM: f64 = 100.0 * PLANCK_J_S * SPEED_OF_LIGHT_M_PER_S;
/// Wavenumber of an energy of 1 kJ/mol per molecule, cm⁻¹.
pub const PER_CM_PER_KJ_PER_MOL: f64 = 1000.0 / AVOGADRO_PER_MOL / JOULE_PER_PER_CM;
/// Wavenumber of k · 1 K, cm⁻¹.
pub const PER_CM_PER_KELVIN: f64 = BOLTZMANN_J_PER_K / JOULE_PER_PER_CM;

/// The rate of spontaneous emission from the weighted absorption oscillator strength `gf`,
/// A = C σ² g f / g_u. **Units:** cm⁻¹ in, s⁻¹ out.
pub fn rate_per_s(gf: f64, upper_weight: f64, wavenumber_per_cm: f64) -> f64 {
    RATE_PER_OSCILLATOR_STRENGTH * wavenumber_per_cm * wavenumber_per_cm * gf / upper_weight
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_factor_is_that_of_the_trade() {
        // 6.6702e15 / λ(Å)² (common practice), which is 0.66702 σ² with σ in cm⁻¹.
        assert!((RATE_PER_OSCILLATOR_STRENGTH - 0.667_025).abs() < 2e-6);
    }

    #[test]
    fn lyman_alpha_rate_from_its_oscillator_strength() {
        // f = 0.41641 and A(2p–1s) = 6.2649e8 s⁻¹ (Bethe & Salpeter 1957, § 63: f and A of 1s–2p
        // 0.4162 and 6.25e8, given there to three figures); g = 2 and 6, σ = 82 259.1 cm⁻¹.
        let rate = rate_per_s(2.0 * 0.4162, 6.0, 82_259.1);
        assert!((rate / 6.25e8 - 1.0).abs() < 5e-3, "{rate}");
    }
}
