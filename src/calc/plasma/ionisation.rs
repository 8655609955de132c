//! Ionisation and recombination by electrons in a thin plasma, and their balance.

use vocabulary::light::constants::{PER_CM_PER_EV, RYDBERG_PER_CM};

use super::error::{PlasmaError, positive};
use super::expint::scaled_e1;

/// Lotz's parameters of one subshell.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Subshell {
    /// Ionisation energy, eV.
    pub binding_ev: f64,
    /// Electrons in it.
    pub electrons: u8,
    /// Cross-section parameters a (1e-18 m² eV²), b, c: `DEFAULT_LOTZ` for ions; `HYDROGEN_LOTZ`.
    pub lotz: (f64, f64, f64),
}

/// a = 4.5e-14 cm² eV², b = c = 0: Lotz's general values, to +40 −30 % for ions of charge 3 and
/// more; for lower stages an upper estimate, 1 σ a factor 2.
pub const DEFAULT_LOTZ: (f64, f64, f64) = (4.5, 0.0, 0.0);
/// Hydrogen: a = 4.0e-14 cm² eV², b = 0.60, c = 0.56; 10 %.
pub const HYDROGEN_LOTZ: (f64, f64, f64) = (4.0, 0.60, 0.56);

impl Subshell {
    /// Cross section (m²) at an electron energy in eV:
    /// a q ln(E/P)/(E P) (1 − b e^(−c (E/P − 1))), 0 below threshold.
    ///
    /// W. Lotz 1967, Z. Phys. 206, 205 (equation 4) and 1968, Z. Phys. 216, 241.
    pub fn cross_section_m2(self, energy_ev: f64) -> f64 {
        let u = energy_ev / self.binding_ev;
        if u <= 1.0 {
            return 0.0;
        }
        let (a, b, c) = self.lotz;
        let damping = 1.0 - b * (-c * (u - 1.0)).exp();
        a * 1e-18 * f64::from(self.electrons) * u.ln() / (energy_ev * self.binding_ev) * damping
    }

    /// Rate coefficient (m³/s) with Maxwellian electrons of k T in cm⁻¹: the cross section
    /// integrated,
    /// 6.69e5 m/s a q/(P √T) (E₁(y) − b e^c y/(y + c) E₁(y + c)), y = P/kT.
    ///
    /// # Errors
    /// Binding energy or k T not positive.
    pub fn ionisation_rate(self, kt_per_cm: f64) -> Result<f64, PlasmaError> {
        let kt_ev = positive("k T in per cm", kt_per_cm)? / PER_CM_PER_EV;
        let binding = positive("the ionisation energy in eV", self.binding_ev)?;
        let (a, b, c) = self.lotz;
        let y = binding / kt_ev;
        // e^(−y) is common to both terms, as b e^c e^(−y−c) = b e^(−y).
        let shape = scaled_e1(y) - b * y / (y + c) * scaled_e1(y + c);
        let front = MEAN_SPEED * a * 1e-18 * f64::from(self.electrons) / (binding * kt_ev.sqrt());
        Ok(front * shape * (-y).exp())
    }
}

/// √(8 eV/(π m_e)), m/s.
const MEAN_SPEED: f64 = 6.692_6e5;

/// Radiative recombination coefficient (m³/s) into all levels of the ion with core charge z and
/// ionisation energy χ: 5.197e-20 z √λ (0.4288 + ½ ln λ + 0.469 λ^(−1/3)), λ = χ/kT.
///
/// M. J. Seaton 1959, MNRAS 119, 81, equation 36, for hydrogen-like ions, 3 % for λ > 0.2 (within λ
/// < 2000); for others χ of the ion itself is taken in it, 1 σ a factor 1.5.
///
/// # Errors
/// χ (cm⁻¹) or k T (cm⁻¹) not positive.
pub fn radiative_recombination(
    core_charge: u8,
    limit_per_cm: f64,
    kt_per_cm: f64,
) -> Result<f64, PlasmaError> {
    let limit = positive("the ionisation energy in per cm", limit_per_cm)?;
    let lambda = limit / positive("k T in per cm", kt_per_cm)?;
    let bracket = 0.4288 + 0.5 * lambda.ln() + 0.469 / lambda.cbrt();
    Ok(5.197e-20 * f64::from(core_charge) * lambda.sqrt() * bracket.max(0.0))
}

/// Radiative recombination coefficient (m³/s) into the shell n of a hydrogen-like ion:
/// 5.197e-20 z √λ (x/n) ∫ g(u) e^(−x u)/(1 + u) du, x = λ/n², with the bound–free Gaunt factor of D. H. Menzel & C. L. Pekeris 1935
/// as expanded in Seaton 1959, equations 13–18. 3 % (the expansion's first terms).
///
/// # Errors
/// n = 0, or k T not positive.
pub fn recombination_into_shell(
    core_charge: u8,
    n: u32,
    kt_per_cm: f64,
) -> Result<f64, PlasmaError> {
    let n = positive("the principal quantum number", f64::from(n))?;
    let kt = positive("k T in per cm", kt_per_cm)?;
    let z = f64::from(core_charge);
    let lambda = RYDBERG_PER_CM * z * z / kt;
    let x = lambda / (n * n);
    let gaunt = |u: f64| {
        let (first, second) = (
            (n * (u + 1.0)).powf(-2.0 / 3.0),
            (n * (u + 1.0)).powf(-4.0 / 3.0),
        );
        1.0 + 0.1728 * first * (u - 1.0) - 0.0496 * second * (u * u + 4.0 / 3.0 * u + 1.0)
    };
    // u = s/(1 − s) maps the whole range to 0..1; beyond x u = 700 nothing is left.
    let f = |s: f64| {
        let u = s / (1.0 - s);
        gaunt(u) * (-x * u).exp() / (1.0 + u) / ((1.0 - s) * (1.0 - s))
    };
    let border = |k: u32| f64::from(k) / 8.0 * (1.0 - 1e-12);
    let integral: f64 = (0..8)
        .map(|k| crate::calc::shape::integrate(&f, border(k), border(k + 1), 1e-9))
        .sum();
    Ok(5.197e-20 * z * lambda.sqrt() * x / n * integral)
}

/// A resonance transition of the recombining ion, through which an electron can be captured.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CoreTransition {
    /// Excitation energy, eV.
    pub energy_ev: f64,
    /// Absorption oscillator strength.
    pub absorption_f: f64,
}

/// Dielectronic recombination coefficient (m³/s) of an ion of charge z through its resonance
/// transitions:
/// 3.0e-9 T^(−3/2) B Σ f A(x) e^(−Ē/kT), T in K, B = √(z (z+1)⁵/(z² + 13.4)),
/// A = √x/(1 + 0.105 x + 0.015 x²), x = E/((z + 1) 13.6 eV), Ē = E/(1 + 0.015 z³/(z + 1)²).
///
/// A. Burgess 1965, Astrophys. J. 141, 1588. For 1 ≤ z ≤ 20, x > 0.05 and densities low enough that
/// captured electrons are not torn off again (below about 1e16 m⁻³; above it is an upper bound); 1
/// σ a factor 2. 0 without transitions.
///
/// # Errors
/// k T not positive; a transition without a positive energy.
pub fn dielectronic_recombination(
    charge: u8,
    transitions: &[CoreTransition],
    kt_per_cm: f64,
) -> Result<f64, PlasmaError> {
    let kt_ev = positive("k T in per cm", kt_per_cm)? / PER_CM_PER_EV;
    let z = f64::from(charge);
    let front = (z * (z + 1.0).powi(5) / (z * z + 13.4)).sqrt();
    let mut sum = 0.0;
    for transition in transitions {
        let energy = positive(
            "the energy of a core transition in eV",
            transition.energy_ev,
        )?;
        let x = energy / ((z + 1.0) * 13.605_693);
        let a = x.sqrt() / (1.0 + 0.105 * x + 0.015 * x * x);
        let mean = energy / (1.0 + 0.015 * z.powi(3) / (z + 1.0).powi(2));
        sum += transition.absorption_f * a * (-mean / kt_ev).exp();
    }
    let temperature_k = kt_ev * vocabulary::light::constants::KELVIN_PER_EV;
    Ok(3.0e-9 * temperature_k.powf(-1.5) * front * sum)
}

/// Fractions of an element in each stage, from pairs of rate coefficients (ionisation k → k + 1,
/// recombination k + 1 → k), in any one unit: n₊/n = S/α. Sums to 1. Independent of density.
///
/// # Errors
/// A rate that is negative or no number, a recombination rate of zero.
pub fn coronal_balance(rates: &[(f64, f64)]) -> Result<Vec<f64>, PlasmaError> {
    let mut logs = vec![0.0];
    let mut log = 0.0;
    for &(up, down) in rates {
        positive("a recombination rate", down)?;
        if !up.is_finite() || up < 0.0 {
            return Err(PlasmaError::NotPositive {
                quantity: "an ionisation rate",
                value: up,
            });
        }
        log += (up / down).ln();
        logs.push(log);
    }
    Ok(super::saha::fractions(&logs))
}
