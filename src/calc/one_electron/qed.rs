//! Radiative corrections: self-energy, vacuum polarisation, two and three photons.
//! Every function gives F of E = (α/π) (Zα)⁴/n³ F m_e c², two-loop parts included with their α/π.
//! Formulas: Mohr & Taylor 2000, Rev. Mod. Phys. 72, 351, appendix A; Tiesinga et al. 2021, Rev. Mod.
//! Phys. 93, 025010, section on hydrogen.

use std::f64::consts::{LN_2, PI};

use vocabulary::light::constants::FINE_STRUCTURE;

use super::bethe::bethe_logarithm;
use super::dirac::State;
use super::remainders as table;

/// ζ(3), Apéry's constant.
const ZETA_3: f64 = 1.202_056_903_159_594_2;
/// Anomalous magnetic moment of the electron, coefficients of (α/π)² and (α/π)³ (Petermann 1957;
/// Laporta & Remiddi 1996).
const MOMENT_2: f64 = -0.328_478_965_579;
const MOMENT_3: f64 = 1.181_241_457;

/// A value of F and the part of its 1 σ that all states of one κ share (∝ 1/n³) or have alone.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub(super) struct Shift {
    pub value: f64,
    pub shared: f64,
    pub own: f64,
}

/// What the correction functions need to know.
#[derive(Clone, Copy, Debug)]
pub(super) struct Setting {
    pub state: State,
    pub charge: f64,
    /// Zα.
    pub za: f64,
    /// m_r/m_e.
    pub reduced: f64,
}

impl Setting {
    /// ln[(m_e/m_r) (Zα)⁻²].
    fn logarithm(&self) -> f64 {
        -(self.reduced * self.za * self.za).ln()
    }

    /// Share of the magnetic moment term, with its own mass factor m_e/m_r.
    fn moment(&self) -> f64 {
        if self.state.is_s() {
            0.0
        } else {
            self.state.spin_orbit() / self.reduced
        }
    }
}

/// All radiative corrections together.
pub(super) fn radiative(setting: &Setting) -> Shift {
    let one = self_energy(setting);
    let vacuum = vacuum_polarisation(setting);
    let two = more_photons(setting);
    Shift {
        value: setting.reduced.powi(3) * (one.value + vacuum.value + two.value),
        shared: one.shared.hypot(vacuum.shared).hypot(two.shared),
        own: one.own.hypot(vacuum.own).hypot(two.own),
    }
}

fn self_energy(setting: &Setting) -> Shift {
    let remainder = self_energy_remainder(setting);
    let za2 = setting.za * setting.za;
    Shift {
        value: self_energy_expansion(setting) + za2 * remainder.value,
        shared: za2 * remainder.shared,
        own: za2 * remainder.own,
    }
}

/// A41, A40, A50, A62 and A61 terms.
fn self_energy_expansion(setting: &Setting) -> f64 {
    let Setting { state, za, .. } = *setting;
    let log = setting.logarithm();
    let low = -4.0 / 3.0 * bethe_logarithm(state.n, state.l) - setting.moment() / 2.0;
    let high = za * za * log * coefficient_61(state);
    if !state.is_s() {
        return low + high;
    }
    let a50 = PI * (139.0 / 32.0 - 2.0 * LN_2);
    4.0 / 3.0 * log + low + 10.0 / 9.0 + a50 * za - (za * log).powi(2) + high
}

fn coefficient_61(state: State) -> f64 {
    let n = state.n_value();
    let l = state.l_value();
    if state.is_s() {
        return 4.0 * (harmonic(state.n) - n.ln()) + 28.0 / 3.0 * LN_2
            - 601.0 / 180.0
            - 77.0 / (45.0 * n * n);
    }
    let half = if state.kappa == 1 { 1.0 / 3.0 } else { 0.0 };
    let p = if state.l == 1 {
        (1.0 - 1.0 / (n * n)) * (2.0 / 15.0 + half)
    } else {
        0.0
    };
    let product = (2.0 * l - 1.0) * 2.0 * l * (2.0 * l + 1.0) * (2.0 * l + 2.0) * (2.0 * l + 3.0);
    p + (96.0 * n * n - 32.0 * l * (l + 1.0)) / (3.0 * n * n * product)
}

/// G_SE: what the expansion leaves out, per (Zα)².
fn self_energy_remainder(setting: &Setting) -> Shift {
    let state = setting.state;
    match (state.l, state.kappa) {
        (0, _) => s_remainder(setting),
        (1, 1) => p_remainder(setting, true),
        (1, _) => p_remainder(setting, false),
        (l, kappa) => Shift {
            value: small_remainder(state.n, l, kappa),
            shared: 0.0,
            own: 0.005 + (0.3 * setting.za).min(0.2) / f64::from(l * l),
        },
    }
}

fn s_remainder(setting: &Setting) -> Shift {
    let n = setting.state.n;
    let hydrogen = table::over_n(&table::HYDROGEN_S, n);
    let base = tabulated(setting, n.min(2), true);
    let step = hydrogen - table::over_n(&table::HYDROGEN_S, n.min(2));
    Shift {
        value: base + step,
        shared: table_doubt(setting),
        own: if n <= 2 { 0.001 } else { 0.05 } + if n <= 2 { 0.0 } else { 0.5 * setting.za },
    }
}

/// nP: the 2P table, and the n-dependence of hydrogen, a + b/n² through the known 2P and 4P.
fn p_remainder(setting: &Setting, half: bool) -> Shift {
    let n = setting.state.n_value();
    let slope = if half { 1.016 } else { 0.653_3 };
    let base = tabulated(setting, 2, half);
    Shift {
        value: base + slope * (1.0 / (n * n) - 0.25),
        shared: 0.3 * table_doubt(setting),
        own: if setting.state.n == 2 {
            0.001
        } else {
            0.02 + 0.3 * setting.za
        },
    }
}

/// 1 σ of an interpolated remainder: at Z = 1 that of the adjustment; elsewhere ±1e-3 (±5e-3 above Z = 85) of the
/// remembered F, whose weight falls from Z = 10 to Z = 1, and the interpolation's, from the differences of the table.
fn table_doubt(setting: &Setting) -> f64 {
    let f = if setting.charge > 85.0 { 5e-3 } else { 1e-3 };
    let node = setting.za.max(10.0 * FINE_STRUCTURE);
    let weight = ((setting.charge - 1.0) / 9.0).min(1.0);
    let between = match setting.charge {
        charge if charge < 1.5 => 0.001,
        charge if charge < 10.0 => 0.1,
        charge if charge < 20.0 => 0.03,
        _ => 0.005,
    };
    (weight * f / (node * node)).hypot(between)
}

/// The table of one lowest state: 1s, 2s (n = 1, 2 with `half` and l = 0), 2p1/2, 2p3/2.
fn tabulated(setting: &Setting, n: u32, half: bool) -> f64 {
    let state = State { n, ..setting.state };
    let (values, hydrogen) = match (state.l, n, half) {
        (0, 1, _) => (&table::SELF_ENERGY_ONE_S, -30.290_24),
        (0, _, _) => (&table::SELF_ENERGY_TWO_S, -31.185_15),
        (_, _, true) => (&table::SELF_ENERGY_TWO_P_HALF, -0.973_50),
        _ => (&table::SELF_ENERGY_TWO_P_THREE_HALVES, -0.486_50),
    };
    let mut row: table::Row = [hydrogen; 12];
    for (i, value) in values.iter().enumerate() {
        let charge = table::NODES[i + 1];
        let za = charge * FINE_STRUCTURE;
        let point = Setting {
            state,
            charge,
            za,
            reduced: 1.0,
        };
        row[i + 1] = (value - self_energy_expansion(&point)) / (za * za);
    }
    table::over_charge(&row, setting.charge)
}

/// A60 of D and F states (Jentschura, Le Bigot, Mohr, Indelicato & Soff 2003, Phys. Rev. Lett. 90,
/// 163001; from memory), 0 beyond; the most that it moves hydrogen is 0.1 kHz.
fn small_remainder(n: u32, l: u32, kappa: i32) -> f64 {
    match (l, kappa > 0) {
        (2, true) => table::over_n(
            &[
                (3.0, 0.005_55),
                (5.0, 0.006_15),
                (8.0, 0.007_94),
                (12.0, 0.009_13),
            ],
            n,
        ),
        (2, false) => table::over_n(
            &[
                (3.0, 0.027_61),
                (4.0, 0.031_63),
                (6.0, 0.034_17),
                (12.0, 0.035_12),
            ],
            n,
        ),
        (3, true) => 0.002_4,
        (3, false) => 0.007_6,
        _ => 0.0,
    }
}

/// Uehling and Wichmann–Kroll terms, with the muonic and hadronic loops.
fn vacuum_polarisation(setting: &Setting) -> Shift {
    let Setting {
        state, za, charge, ..
    } = *setting;
    let za2 = za * za;
    let rows: &[table::Row] = match state.kappa {
        -1 => &table::UEHLING_S_HALF,
        1 => &table::UEHLING_P_HALF,
        -2 => &table::UEHLING_P_THREE_HALVES,
        _ => {
            return Shift {
                own: 0.02 * za2 * za2,
                ..Shift::default()
            };
        }
    };
    let uehling = za2 * over_states(rows, state, charge);
    if !state.is_s() {
        return Shift {
            value: uehling,
            shared: 0.0,
            own: 0.05 * za2 * za2,
        };
    }
    let low = -4.0 / 15.0 + 5.0 * PI / 48.0 * za - 2.0 / 15.0 * za2 * -(za2.ln());
    // Muon (1/206.768)² of the electron's loop, hadrons 0.671 of the muon's.
    let heavy = -4.0 / 15.0 * 1.671 / 206.768_283_f64.powi(2);
    let many = wichmann_kroll(za);
    Shift {
        value: low + uehling + heavy + za2 * many,
        shared: za2 * za * 0.02,
        own: 0.02 * za2 * za,
    }
}

/// Higher orders of vacuum polarisation for S states, per (Zα)²: 19/45 − π²/27 at Zα → 0 with slope
/// π (1/16 − 31 π²/2880) (Mohr & Taylor 2000), levelling off at what 1s of uranium shows, +5.0 eV (Mohr,
/// Plunien & Soff 1998, Phys. Rep. 293, 227; from memory).
fn wichmann_kroll(za: f64) -> f64 {
    let limit = 19.0 / 45.0 - PI * PI / 27.0;
    let slope = PI * (1.0 / 16.0 - 31.0 * PI * PI / 2880.0);
    let heavy = 0.046;
    heavy + (limit - heavy) * (slope * za / (limit - heavy)).exp()
}

/// A table over n: exact for the rows held, beyond them extended linearly in 1/n.
fn over_states(rows: &[table::Row], state: State, charge: f64) -> f64 {
    let lowest = state.l + 1;
    let row = |n: u32| table::over_charge(&rows[(n - lowest) as usize], charge);
    if state.n <= 5 {
        return row(state.n);
    }
    table::over_n(&[(4.0, row(4)), (5.0, row(5))], state.n)
}

/// Two- and three-photon corrections, as F (with α/π, (α/π)²).
fn more_photons(setting: &Setting) -> Shift {
    let order = FINE_STRUCTURE / PI;
    if !setting.state.is_s() {
        return orbital_photons(setting, order);
    }
    let za = setting.za;
    let b40 = 1.5 * PI * PI * LN_2 - 10.0 * PI * PI / 27.0 - 2179.0 / 648.0 - 2.25 * ZETA_3;
    let rest = two_loop_rest(setting);
    // The expansion in Zα fails above Z ≈ 40: damped so that 1s of uranium gets its two-loop shift of
    // −1.6 eV (Yerokhin, Indelicato & Shabaev 2006, Phys. Rev. Lett. 97, 253004; from memory).
    let damped = rest / (1.0 + 24.0 * za.powi(3));
    let doubt = 10.0 * za * za / (1.0 + 24.0 * za.powi(3)) + 0.1 * (rest - damped).abs();
    Shift {
        value: order * (b40 + damped) + order * order * 0.417_5,
        shared: order * doubt + order * order * 1.0,
        own: order * 0.1 * doubt,
    }
}

/// B50, B63, B62, B61, B60 terms of S states.
fn two_loop_rest(setting: &Setting) -> f64 {
    let Setting { state, za, .. } = *setting;
    let n = state.n_value();
    let log = setting.logarithm();
    // ψ(n) + γ = H(n−1)
    let psi = harmonic(state.n) - 1.0 / n;
    let b62 = 16.0 / 9.0 * (71.0 / 60.0 - LN_2 + psi - n.ln() - 1.0 / n + 0.25 / (n * n));
    let b61 = table::over_n(&table::TWO_LOOP_B61, state.n);
    let b60 = table::over_n(&table::TWO_LOOP_B60, state.n);
    let cube = -8.0 / 27.0 * log.powi(3);
    -21.554_47 * za + za * za * (cube + b62 * log * log + b61 * log + b60)
}

/// States with l ≥ 1: the magnetic moment, and B62 of P states.
fn orbital_photons(setting: &Setting, order: f64) -> Shift {
    let Setting { state, za, .. } = *setting;
    let n = state.n_value();
    let p = if state.l == 1 {
        4.0 / 27.0 * (1.0 - 1.0 / (n * n)) * (za * setting.logarithm()).powi(2)
    } else {
        0.0
    };
    Shift {
        value: -setting.moment() * order * (MOMENT_2 + order * MOMENT_3) + order * p,
        shared: 0.0,
        own: order * (p.abs() + 3.0 * za * za / f64::from(state.l.pow(3))),
    }
}

/// H(n) = 1 + 1/2 + … + 1/n.
pub(super) fn harmonic(n: u32) -> f64 {
    (1..=n).map(|i| 1.0 / f64::from(i)).sum()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn setting(n: u32, l: u32, stretched: bool, charge: f64) -> Setting {
        Setting {
            state: State::new(n, l, stretched),
            charge,
            za: charge * FINE_STRUCTURE,
            reduced: 1.0,
        }
    }

    /// He⁺: G_SE(2α) of 1S −29.770 967, of 2P1/2 −0.949 40, of 2P3/2 −0.470 50 (Jentschura & Mohr, tables of the
    /// CODATA adjustments; from memory), against our interpolation and its 1 σ.
    #[test]
    fn remainder_of_helium_lies_inside_its_doubt() {
        for (n, l, stretched, published) in [
            (1, 0, true, -29.770_967),
            (2, 1, false, -0.949_40),
            (2, 1, true, -0.470_50),
        ] {
            let remainder = self_energy_remainder(&setting(n, l, stretched, 2.0));
            let error = (remainder.value - published).abs();
            assert!(error < 2.0 * remainder.shared, "{n} {l}: {error}");
        }
    }

    /// F of 1s at the nodes is what Mohr gives; of 3s he and Kim (1992, Phys. Rev. A 45, 2727) show that
    /// it stays within a few per cent of 2s up to uranium.
    #[test]
    fn self_energy_returns_the_table_and_carries_on_smoothly() {
        for (i, published) in table::SELF_ENERGY_ONE_S.iter().enumerate() {
            let ours = self_energy(&setting(1, 0, true, table::NODES[i + 1])).value;
            assert!(
                (ours - published).abs() < 1e-12,
                "Z = {}",
                table::NODES[i + 1]
            );
        }
        for charge in [20.0, 50.0, 92.0] {
            let two = self_energy(&setting(2, 0, true, charge)).value;
            let three = self_energy(&setting(3, 0, true, charge)).value;
            assert!(
                (three / two - 1.0).abs() < 0.05,
                "Z = {charge}: {two} {three}"
            );
        }
    }

    /// Uehling shift of 1S in hydrogen: G_VP(1) = −0.618 724, of 2P1/2 −0.064 006 (Tiesinga et al. 2021; from memory).
    #[test]
    fn uehling_remainders_match_the_adjustment() {
        let s = over_states(&table::UEHLING_S_HALF, State::new(1, 0, true), 1.0);
        let p = over_states(&table::UEHLING_P_HALF, State::new(2, 1, false), 1.0);
        let twelve = over_states(&table::UEHLING_S_HALF, State::new(12, 0, true), 1.0);
        assert!((s + 0.618_724).abs() < 1e-6, "{s}");
        assert!((p + 0.064_006).abs() < 1e-6, "{p}");
        // Beyond n = 5 it is extended; G_VP(12S) = −0.769 151.
        assert!((twelve + 0.769_151).abs() < 0.02, "{twelve}");
    }
}
