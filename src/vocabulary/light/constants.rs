//! Fundamental constants: CODATA 2022 (Mohr, Newell, Taylor & Tiesinga 2025,
//! Rev. Mod. Phys. 97, 025002). Exact values are those of the SI.

/// The adjustment that the measured constants are taken from.
pub const CODATA_YEAR: u16 = 2022;
/// Speed of light in vacuum, m/s (exact).
pub const SPEED_OF_LIGHT_M_PER_S: f64 = 299_792_458.0;
/// Planck constant, J s (exact).
pub const PLANCK_J_S: f64 = 6.626_070_15e-34;
/// Elementary charge, C (exact).
pub const ELEMENTARY_CHARGE_C: f64 = 1.602_176_634e-19;
/// Boltzmann constant, J/K (exact).
pub const BOLTZMANN_J_PER_K: f64 = 1.380_649e-23;
/// Avogadro constant, 1/mol (exact).
pub const AVOGADRO_PER_MOL: f64 = 6.022_140_76e23;
/// Rydberg constant for an infinite nuclear mass, cm⁻¹; 1 σ = 1.2e-7 cm⁻¹.
pub const RYDBERG_PER_CM: f64 = 109_737.315_681_57;
/// Fine-structure constant; 1 σ = 1.1e-12.
pub const FINE_STRUCTURE: f64 = 7.297_352_564_3e-3;
/// Bohr radius, m; 1 σ = 8.2e-21 m.
pub const BOHR_RADIUS_M: f64 = 5.291_772_105_44e-11;
/// Electron mass, kg; 1 σ = 2.8e-40 kg.
pub const ELECTRON_MASS_KG: f64 = 9.109_383_713_9e-31;
/// Electron mass in unified atomic mass units; 1 σ = 9.7e-15 u.
pub const ELECTRON_MASS_U: f64 = 5.485_799_090_441e-4;
/// Unified atomic mass unit, kg; 1 σ = 5.2e-37 kg.
pub const ATOMIC_MASS_UNIT_KG: f64 = 1.660_539_068_92e-27;
/// Vacuum electric permittivity, F/m; 1 σ = 1.4e-21 F/m.
pub const VACUUM_PERMITTIVITY_F_PER_M: f64 = 8.854_187_818_8e-12;

/// Wavenumber of a photon of 1 eV, cm⁻¹: e / (h c) / 100.
pub const PER_CM_PER_EV: f64 = ELEMENTARY_CHARGE_C / (PLANCK_J_S * SPEED_OF_LIGHT_M_PER_S) / 100.0;
/// Wavenumber of the thermal energy k · 1 K, cm⁻¹.
pub const PER_CM_PER_KELVIN: f64 =
    BOLTZMANN_J_PER_K / (PLANCK_J_S * SPEED_OF_LIGHT_M_PER_S) / 100.0;
/// Temperature whose thermal energy k T is 1 eV, kelvin.
pub const KELVIN_PER_EV: f64 = ELEMENTARY_CHARGE_C / BOLTZMANN_J_PER_K;
