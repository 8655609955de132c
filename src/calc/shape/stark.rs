//! Stark broadening: what the charges of a plasma do to a line.

use std::f64::consts::PI;

use vocabulary::light::constants::{
    BOHR_RADIUS_M, ELECTRON_MASS_KG, ELEMENTARY_CHARGE_C, FINE_STRUCTURE, RYDBERG_PER_CM,
    SPEED_OF_LIGHT_M_PER_S,
};

use super::error::{ShapeError, positive};
use super::pressure::{OuterElectron, PressureWidth, WidthMethod};
use super::widths::wavelength_width_nm;

/// ħ/m_e = α c a₀, m²/s.
const ACTION_OVER_MASS: f64 = FINE_STRUCTURE * SPEED_OF_LIGHT_M_PER_S * BOHR_RADIUS_M;

/// Fits of full width = w (n_e/10²³ m⁻³)^p in nm: (upper n, w, p). Gigosos et al. 2003, from
/// memory: H-alpha full width at half area, H-beta full width at half maximum. For H-alpha both
/// 1.098 and 0.549 nm are found in print; the larger is taken as the full width, since Kepple &
/// Griem 1968 and Lomanowski et al. 2015 (0.046 nm at 10²¹ m⁻³) both agree with it and not with
/// the smaller.
const BALMER: [(u32, f64, f64); 2] = [(3, 1.098, 0.679_65), (4, 4.800, 0.681_16)];
/// Where the simulations were made, m⁻³.
const BALMER_DENSITIES: (f64, f64) = (1e20, 1e25);

/// Fits of FWHM = C n_e^a/T_e^b (nm, m⁻³, eV): (lower n, upper n, C, a, b). Lomanowski et al. 2015,
/// table of line-profile parameters, from memory; checked against the older theory in the tests.
const SERIES_FITS: [(u32, u32, f64, f64, f64); 11] = [
    (2, 5, 1.310e-15, 0.6796, 0.030),
    (2, 6, 3.954e-16, 0.7149, 0.028),
    (2, 7, 6.258e-16, 0.7120, 0.029),
    (2, 8, 7.378e-16, 0.7159, 0.032),
    (2, 9, 8.947e-16, 0.7177, 0.033),
    (3, 4, 1.330e-16, 0.7449, 0.045),
    (3, 5, 6.640e-16, 0.7356, 0.044),
    (3, 6, 2.481e-15, 0.7118, 0.016),
    (3, 7, 3.270e-15, 0.7137, 0.029),
    (3, 8, 4.343e-15, 0.7133, 0.032),
    (3, 9, 5.588e-15, 0.7165, 0.033),
];
/// Where those fits were made, m⁻³.
const SERIES_DENSITIES: (f64, f64) = (1e19, 1e22);

/// Stark width of a line n_upper → n_lower of an atom with one electron and nuclear charge `z`.
///
/// H-alpha and H-beta: simulation fits (1e20–1e25 m⁻³, 0.1–20 eV, 1 σ 5 % and the neglected
/// temperature dependence, together 8 %). Other Balmer and Paschen lines up to n = 9: fits
/// (1e19–1e22 m⁻³,
/// 0.3–30 eV, 15 %). All others and other z: an estimate by the quasi-static scaling
/// Δω = C (ħ/(z m_e)) (n_u² − n_l²) n_e^(2/3), C = 12, or 4 for n_u = n_l + 1 (factors 1.4 and 2).
///
/// # Errors
/// Density (m⁻³) or temperature (eV) not positive; quantum numbers that are no transition.
pub fn hydrogen_stark(
    z: u8,
    (n_lower, n_upper): (u32, u32),
    electron_density_per_m3: f64,
    te_ev: f64,
) -> Result<PressureWidth, ShapeError> {
    let density = positive("the electron density per m³", electron_density_per_m3)?;
    let te_ev = positive("the electron temperature in eV", te_ev)?;
    if z == 0 || n_lower == 0 || n_upper <= n_lower {
        return Err(ShapeError::NoTransition { n_lower, n_upper });
    }
    let within = |(low, high): (f64, f64)| (low..=high).contains(&density);
    let balmer = BALMER.iter().find(|f| n_lower == 2 && f.0 == n_upper);
    if let (1, Some((_, width, power))) = (z, balmer) {
        return Ok(PressureWidth {
            fwhm_nm: width * (density / 1e23).powf(*power),
            uncertainty_factor: 1.08,
            method: WidthMethod::BalmerSimulation,
            inside_validity: within(BALMER_DENSITIES) && (0.1..=20.0).contains(&te_ev),
        });
    }
    let series = SERIES_FITS
        .iter()
        .find(|f| (f.0, f.1) == (n_lower, n_upper));
    if let (1, Some((_, _, c, a, b))) = (z, series) {
        return Ok(PressureWidth {
            fwhm_nm: c * density.powf(*a) / te_ev.powf(*b),
            uncertainty_factor: 1.15,
            method: WidthMethod::SeriesFit,
            inside_validity: within(SERIES_DENSITIES) && (0.3..=30.0).contains(&te_ev),
        });
    }
    Ok(PressureWidth {
        fwhm_nm: quasi_static_fwhm_nm(z, n_lower, n_upper, density),
        uncertainty_factor: if n_upper - n_lower == 1 { 2.0 } else { 1.4 },
        method: WidthMethod::QuasiStatic,
        inside_validity: is_quasi_static(z, n_lower, n_upper, density),
    })
}

/// FWHM (nm) from the linear Stark effect of the mean ion field:
/// Δω = C (ħ/(z m_e)) (n_u² − n_l²) n_e^(2/3), singly charged perturbers.
///
/// The scaling is that of Griem 1974; C = 12 is the mean of what the fits for H-beta, H-gamma and
/// H-delta imply (10.4–12.8), C = 4 for lines with n_u = n_l + 1, whose strong undisplaced
/// components keep them narrow (3.9 for H-alpha). Independent of temperature.
fn quasi_static_fwhm_nm(z: u8, n_lower: u32, n_upper: u32, density_per_m3: f64) -> f64 {
    let (lower, upper) = (f64::from(n_lower).powi(2), f64::from(n_upper).powi(2));
    let constant = if n_upper - n_lower == 1 { 4.0 } else { 12.0 };
    let charge = f64::from(z);
    let angular =
        constant * ACTION_OVER_MASS / charge * (upper - lower) * density_per_m3.cbrt().powi(2);
    let wavenumber_per_cm = RYDBERG_PER_CM * charge * charge * (1.0 / lower - 1.0 / upper);
    wavelength_width_nm(1e7 / wavenumber_per_cm, angular / (2.0 * PI))
}

/// Whether the ions disturb the level one at a time: below the density where the series ends at
/// n_upper (D. R. Inglis & E. Teller 1939, Astrophys. J. 90, 439: lg n_e(cm⁻³) = 23.26 − 7.5 lg n,
/// + 4.5 lg z).
fn is_quasi_static(z: u8, n_lower: u32, n_upper: u32, density_per_m3: f64) -> bool {
    let log_limit = 29.26 - 7.5 * f64::from(n_upper).log10() + 4.5 * f64::from(z).log10();
    n_lower >= 1 && density_per_m3.log10() < log_limit
}

/// Quadratic Stark width of a line of an atom or ion with several electrons: an estimate.
///
/// Electron impacts in the semiempirical approximation with all perturbing levels summed (Griem
/// 1968, eq. 9): Δω = n_e (8π/3) (ħ/m)² √(2m/(π kT)) (π/√3) (⟨r²⟩_u g_u + ⟨r²⟩_l g_l)/a₀²,
/// effective Gaunt factor g = 0.2 near threshold, growing when 3kT/2 exceeds twice the distance to
/// the next shell, 2 z² R/n*³. As ⟨r²⟩ grows with n*⁴, so does the width (Unsöld). Ions are
/// neglected, so are shifts. 1 σ: a factor 1.6 for ions, 2 for neutral atoms.
///
/// # Errors
/// Wavelength (vacuum, nm), density (m⁻³), temperature (eV) or a binding energy not positive.
pub fn quadratic_stark(
    wavelength_nm: f64,
    upper: OuterElectron,
    lower: OuterElectron,
    electron_density_per_m3: f64,
    te_ev: f64,
) -> Result<PressureWidth, ShapeError> {
    let wavelength_nm = positive("the wavelength in nm", wavelength_nm)?;
    let density = positive("the electron density per m³", electron_density_per_m3)?;
    let te_ev = positive("the electron temperature in eV", te_ev)?;
    let radii = weighted_radius(upper, te_ev)? + weighted_radius(lower, te_ev)?;
    let kt_j = te_ev * ELEMENTARY_CHARGE_C;
    let mean_inverse_speed = (2.0 * ELECTRON_MASS_KG / (PI * kt_j)).sqrt();
    let area_rate = 8.0 * PI / 3.0 * ACTION_OVER_MASS.powi(2) * mean_inverse_speed;
    let angular = density * area_rate * (PI / 3_f64.sqrt()) * radii;
    Ok(PressureWidth {
        fwhm_nm: wavelength_width_nm(wavelength_nm, angular / (2.0 * PI)),
        uncertainty_factor: if upper.core_charge == 1 { 2.0 } else { 1.6 },
        method: WidthMethod::ElectronImpact,
        inside_validity: impacts_are_apart(upper, density)?,
    })
}

/// ⟨r²⟩ g of one level.
fn weighted_radius(electron: OuterElectron, te_ev: f64) -> Result<f64, ShapeError> {
    let n = electron.effective_n()?;
    let z = f64::from(electron.core_charge);
    let shell_ev = 2.0 * z * z * 13.605_693 / n.powi(3);
    Ok(electron.mean_square_radius()? * effective_gaunt(1.5 * te_ev / shell_ev))
}

/// Effective Gaunt factor of electron impact against energy over threshold: H. van Regemorter 1962,
/// Astrophys. J. 136, 906, as tabulated by Griem 1968; straight lines in ln x.
fn effective_gaunt(energy_over_threshold: f64) -> f64 {
    const TABLE: [(f64, f64); 6] = [
        (2.0, 0.20),
        (3.0, 0.24),
        (5.0, 0.33),
        (10.0, 0.56),
        (30.0, 0.98),
        (100.0, 1.33),
    ];
    let last = TABLE[TABLE.len() - 1];
    if energy_over_threshold >= last.0 {
        // Bethe's logarithm: √3/(2π) ln x.
        return last.1 + 3_f64.sqrt() / (2.0 * PI) * (energy_over_threshold / last.0).ln();
    }
    TABLE
        .windows(2)
        .find(|pair| energy_over_threshold < pair[1].0)
        .map_or(last.1, |pair| {
            let ((x0, g0), (x1, g1)) = (pair[0], pair[1]);
            let t = ((energy_over_threshold.max(x0)) / x0).ln() / (x1 / x0).ln();
            g0 + t * (g1 - g0)
        })
}

/// Whether the orbit is much smaller than the distance between electrons: r < (4π n_e/3)^(−1/3)/3.
fn impacts_are_apart(upper: OuterElectron, density_per_m3: f64) -> Result<bool, ShapeError> {
    let radius_m = upper.mean_square_radius()?.sqrt() * BOHR_RADIUS_M;
    Ok(3.0 * radius_m < (4.0 * PI * density_per_m3 / 3.0).cbrt().recip())
}
