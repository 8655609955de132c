//! Dirac energies of a point nucleus and their recoil corrections of order (Zα)⁴ m/M.
//! Formulas: Mohr & Taylor 2000, Rev. Mod. Phys. 72, 351, appendix A; Tiesinga, Mohr, Newell & Taylor
//! 2021, Rev. Mod. Phys. 93, 025010, section on hydrogen. Natural units of m_e c² here.

/// One bound state: n, l and the Dirac quantum number κ (−(l+1) for j = l+½, l for j = l−½).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub(super) struct State {
    pub n: u32,
    pub l: u32,
    pub kappa: i32,
}

impl State {
    /// The state n, l with j = l + ½ (`stretched`) or l − ½.
    pub fn new(n: u32, l: u32, stretched: bool) -> Self {
        let l_signed = l as i32;
        let kappa = if stretched || l == 0 {
            -(l_signed + 1)
        } else {
            l_signed
        };
        Self { n, l, kappa }
    }

    pub fn n_value(self) -> f64 {
        f64::from(self.n)
    }

    pub fn l_value(self) -> f64 {
        f64::from(self.l)
    }

    pub fn kappa_value(self) -> f64 {
        f64::from(self.kappa)
    }

    pub fn is_s(self) -> bool {
        self.l == 0
    }

    /// Twice j.
    pub fn twice_j(self) -> u16 {
        (2 * self.kappa.unsigned_abs() - 1) as u16
    }

    /// 1/(κ (2l + 1)): the spin–orbit factor of several corrections.
    pub fn spin_orbit(self) -> f64 {
        1.0 / (self.kappa_value() * (2.0 * self.l_value() + 1.0))
    }
}

/// f(n, j) − 1: Dirac energy less the rest energy, in m c², without cancellation.
pub(super) fn dirac_energy(state: State, za: f64) -> f64 {
    let k = state.kappa_value().abs();
    let gamma = (k * k - za * za).sqrt();
    let defect = za * za / (k + gamma);
    let x = (za / (state.n_value() - defect)).powi(2);
    let root = (1.0 + x).sqrt();
    -x / (root * (1.0 + root))
}

/// Energy of electron and nucleus less both rest energies, in m_e c²: Dirac with the reduced mass and the
/// (Zα)⁴ recoil terms. `mass` is m_N/m_e.
pub(super) fn with_recoil(state: State, za: f64, mass: f64) -> f64 {
    let reduced = mass / (1.0 + mass);
    let dirac = dirac_energy(state, za);
    let kinetic = -dirac * dirac * reduced * reduced / (2.0 * (1.0 + mass));
    let n3 = state.n_value().powi(3);
    let spin = if state.is_s() {
        0.0
    } else {
        state.spin_orbit() * za.powi(4) * reduced.powi(3) / (2.0 * n3 * mass * mass)
    };
    dirac * reduced + kinetic + spin
}

/// |ψ|² near a point nucleus, relative to other n of the same κ = ±1: the coefficient of r^(2γ−2).
/// From the closed-form Dirac wave functions (Bethe & Salpeter 1957, section 14).
pub(super) fn origin_density(n: u32, kappa: i32, za: f64) -> f64 {
    let k = f64::from(kappa);
    let gamma = (k * k - za * za).sqrt();
    let nr = n - kappa.unsigned_abs();
    let nr_value = f64::from(nr);
    let apparent = ((nr_value + gamma).powi(2) + za * za).sqrt();
    let energy = (nr_value + gamma) / apparent;
    // Γ(2γ + nr + 1) / (nr! Γ(2γ + 1))
    let ratio: f64 = (1..=nr)
        .map(|i| (2.0 * gamma + f64::from(i)) / f64::from(i))
        .product();
    let large = (1.0 + energy) * (apparent - k - nr_value).powi(2);
    let small = (1.0 - energy) * (apparent - k + nr_value).powi(2);
    (2.0 * za / apparent).powf(2.0 * gamma + 1.0) * ratio * (large + small)
        / (apparent * (apparent - k))
}

#[cfg(test)]
mod tests {
    use vocabulary::light::constants::FINE_STRUCTURE;

    use super::*;

    /// Against mpmath at 50 digits (`dirac.py`). Tolerance: a few roundings of one square root each.
    #[test]
    fn energies_match_arbitrary_precision() {
        let table = include_str!("../../../tests/reference/one_electron/dirac.csv");
        let mut rows = 0;
        for row in table.lines().skip(1) {
            let cells: Vec<f64> = row.split(',').map(|c| c.parse().unwrap()).collect();
            let (n, twice_j) = (cells[1] as u32, cells[2] as u32);
            let state = State::new(n, (twice_j - 1) / 2, true);
            let ours =
                -dirac_energy(state, cells[0] * FINE_STRUCTURE) * 2.0 / FINE_STRUCTURE.powi(2);
            let error = (ours / cells[3] - 1.0).abs();
            assert!(error < 2e-15, "{row}: {error:e}");
            rows += 1;
        }
        assert_eq!(rows, 144);
    }

    /// Near a light nucleus |ψ|² of nS goes as 1/n³ (Bethe & Salpeter 1957, section 3); (Zα)² ≈ 5e-5 corrects.
    #[test]
    fn density_at_a_light_nucleus_falls_with_the_cube_of_n() {
        for n in 2..=50 {
            let ratio =
                origin_density(n, -1, FINE_STRUCTURE) / origin_density(1, -1, FINE_STRUCTURE);
            let error = (ratio * f64::from(n).powi(3) - 1.0).abs();
            assert!(error < 5e-4, "n = {n}: {error:e}");
        }
    }

    /// The closed form against Shabaev 1993 (the fits used for nuclear sizes) for the ratio 2s/1s of the size
    /// shift: two ways to one number. He claims 0.2 % for each.
    #[test]
    fn density_ratio_agrees_with_the_size_shift_of_two_s() {
        for charge in [10.0, 30.0, 54.0, 82.0, 92.0] {
            let za = charge * FINE_STRUCTURE;
            let gamma = (1.0 - za * za).sqrt();
            let one = 1.0 + za * za * (1.380 - 0.162 * za + 1.612 * za * za);
            let two = 1.0 + za * za * (1.508 + 0.215 * za + 1.332 * za * za);
            let fitted = two / one * 0.5 * 0.5_f64.powf(2.0 * gamma);
            let exact = origin_density(2, -1, za) / origin_density(1, -1, za);
            let error = (fitted / exact - 1.0).abs();
            assert!(error < 5e-3, "Z = {charge}: {error:e}");
        }
    }
}
