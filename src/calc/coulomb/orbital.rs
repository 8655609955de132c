//! Orbitals of the Coulomb field at a measured energy.

use super::CoulombError;

/// Step of the grid in x = √ρ; kx ≤ 2.83, so that Numerov's error (kh)⁴/240 is below 3e-9.
pub(super) const STEP: f64 = 0.01;
/// Largest effective quantum number: beyond it the starting value underflows.
const MOST: f64 = 200.0;

/// The decaying Coulomb function of given energy and l, on the grid x = √ρ = √(Z r / a₀).
///
/// Held is `Q(x) = P(ρ) x^(−1/2)`, P being the radial function, normalised so that ∫P² dρ = 1
/// outside the cut-off.
#[derive(Clone, Debug)]
pub struct Orbital {
    /// Effective principal quantum number.
    pub effective: f64,
    /// Orbital angular momentum.
    pub l: u32,
    /// ∫P² dρ outside the cut-off in the normalisation of Bates & Damgaard 1949 (after Hartree
    /// 1927, Proc. Camb. Phil. Soc. 24, 426): 1 for a hydrogenic orbital.
    pub analytic_norm: f64,
    /// Grid index of the first value: inside it the function is cut off.
    pub(super) first: usize,
    pub(super) values: Vec<f64>,
}

/// `ν = Z_c √(R_M / (L − E))`.
///
/// # Errors
/// [`CoulombError::NotBound`] at or above the limit.
pub fn effective_quantum_number(
    core_charge: u32,
    rydberg_per_cm: f64,
    limit_per_cm: f64,
    energy_per_cm: f64,
) -> Result<f64, CoulombError> {
    let binding = limit_per_cm - energy_per_cm;
    let effective = f64::from(core_charge) * (rydberg_per_cm / binding).sqrt();
    if binding > 0.0 && effective.is_finite() {
        return Ok(effective);
    }
    Err(CoulombError::NotBound {
        energy_per_cm,
        limit_per_cm,
    })
}

impl Orbital {
    /// The orbital of effective quantum number ν (l < ν < 200) and l.
    ///
    /// # Errors
    /// [`CoulombError::EffectiveNumber`] outside that range.
    pub fn new(effective: f64, l: u32) -> Result<Self, CoulombError> {
        if !effective.is_finite() || effective <= f64::from(l) + 1e-6 || effective > MOST {
            return Err(CoulombError::EffectiveNumber { effective, l });
        }
        let last = start_index(effective);
        let mut values = vec![0.0; last + 1];
        values[last] = asymptotic(effective, l, last);
        values[last - 1] = asymptotic(effective, l, last - 1);
        let first = inward(effective, l, &mut values);
        values.drain(..first);
        let mut orbital = Self {
            effective,
            l,
            first,
            values,
            analytic_norm: 1.0,
        };
        orbital.analytic_norm = orbital.norm();
        let scale = orbital.analytic_norm.sqrt();
        orbital.values.iter_mut().for_each(|q| *q /= scale);
        Ok(orbital)
    }

    /// ∫P² dρ from the cut-off outwards.
    fn norm(&self) -> f64 {
        let sum: f64 = self
            .values
            .iter()
            .zip(self.first..)
            .map(|(q, index)| (q * index as f64 * STEP).powi(2))
            .sum();
        2.0 * STEP * sum
    }

    /// How far ν lies below l + 1, the least of a hydrogenic orbital; 0 where it does not.
    pub fn depth(&self) -> f64 {
        (f64::from(self.l) + 1.0 - self.effective).max(0.0)
    }

    /// P(ρ) at the grid point nearest to ρ = Z r / a₀, with that ρ; zero outside the grid.
    pub fn nearest(&self, rho: f64) -> (f64, f64) {
        let index = (rho.max(0.0).sqrt() / STEP).round() as usize;
        let x = index as f64 * STEP;
        let q = index
            .checked_sub(self.first)
            .and_then(|at| self.values.get(at));
        (x * x, q.copied().unwrap_or(0.0) * x.sqrt())
    }
}

/// Far enough out for the asymptotic series: its terms then sum without loss.
fn start_index(effective: f64) -> usize {
    let rho = 4.0 * effective * effective + 40.0 * effective + 10.0;
    (rho.sqrt() / STEP).ceil() as usize
}

/// Q at a grid point by the asymptotic series (Bates & Damgaard 1949, section 2).
fn asymptotic(effective: f64, l: u32, index: usize) -> f64 {
    let x = index as f64 * STEP;
    let rho = x * x;
    let square = f64::from(l) * (f64::from(l) + 1.0);
    let mut term = 1.0;
    let mut sum = 1.0;
    for t in 1..400 {
        let t = f64::from(t);
        let down = effective - t;
        let next = term * effective / (2.0 * t * rho) * (square - down * (down + 1.0));
        // The series is asymptotic: it is cut where its terms begin to grow, or vanish.
        if next.abs() > term.abs() && t > effective || next == 0.0 {
            break;
        }
        term = next;
        sum += term;
        if term.abs() < 1e-17 * sum.abs() {
            break;
        }
    }
    let logarithm = effective * (2.0 * rho / effective).ln()
        - rho / effective
        - effective.ln()
        - 0.5 * (ln_gamma(effective + f64::from(l) + 1.0) + ln_gamma(effective - f64::from(l)));
    logarithm.exp() * sum / x.sqrt()
}

/// Numerov's recurrence towards the nucleus, for `Q″ = [((2l + 1)² − ¼)/x² − 8 + 4x²/ν²] Q`.
/// Returns the index where the orbital is cut off: the nucleus, or inside the inner turning
/// point the place where |P| begins to rise again, which only a penetrating orbital does.
fn inward(effective: f64, l: u32, values: &mut [f64]) -> usize {
    let barrier = (2.0 * f64::from(l) + 1.0).powi(2) - 0.25;
    let slope = 4.0 / (effective * effective);
    let curvature = |index: usize| {
        let square = (index as f64 * STEP).powi(2);
        barrier / square - 8.0 + slope * square
    };
    let twelfth = STEP * STEP / 12.0;
    let mut index = values.len() - 2;
    let mut outer = curvature(index + 1);
    let mut here = curvature(index);
    while index > 1 {
        let inner = curvature(index - 1);
        let next = (2.0 * (1.0 + 5.0 * twelfth * here) * values[index]
            - (1.0 - twelfth * outer) * values[index + 1])
            / (1.0 - twelfth * inner);
        let radial = |index: usize, q: f64| q.abs() * (index as f64).sqrt();
        let forbidden = l > 0 && here > 0.0 && here > outer;
        if forbidden && radial(index - 1, next) > radial(index, values[index]) {
            return index;
        }
        index -= 1;
        values[index] = next;
        outer = here;
        here = inner;
    }
    index
}

/// ln Γ(x) for x > 0 by Stirling's series (Abramowitz & Stegun 1964, 6.1.41) after raising x above 15.
pub(super) fn ln_gamma(x: f64) -> f64 {
    let mut shift = 0.0;
    let mut y = x;
    while y < 15.0 {
        shift += y.ln();
        y += 1.0;
    }
    let inverse = 1.0 / (y * y);
    let series =
        (1.0 / 12.0 - inverse * (1.0 / 360.0 - inverse * (1.0 / 1260.0 - inverse / 1680.0))) / y;
    (y - 0.5) * y.ln() - y + 0.5 * (2.0 * std::f64::consts::PI).ln() + series - shift
}
