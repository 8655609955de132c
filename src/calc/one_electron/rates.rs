//! Electric-dipole rates, oscillator strengths and lifetimes of one-electron systems.
//!
//! Nonrelativistic (Bethe & Salpeter 1957, sections 59–66), with the reduced mass and the dipole charge of
//! the nucleus; shares of the fine-structure components by 6j coefficients in closed form. What is left
//! out is of relative order (Zα)²; see [`rate_relative_uncertainty`].

use std::f64::consts::PI;

use vocabulary::atom::HalfInteger;
use vocabulary::light::constants::{FINE_STRUCTURE, RYDBERG_PER_CM, SPEED_OF_LIGHT_M_PER_S};

use super::error::OneElectronError;
use super::levels::{OneElectronLevel, check_fine_n, level_index, levels};
use super::nucleus::Nucleus;
use super::radial::ShellPair;

/// Two-photon rate of 2s of an ion of charge 1, s⁻¹ (Goldman & Drake 1981, Phys. Rev. A 24, 183).
const TWO_PHOTON_PER_S: f64 = 8.229_43;

/// One electric-dipole line between levels of different n.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct OneElectronLine {
    /// Place of the lower level in the list of [`levels`].
    pub lower: usize,
    /// Place of the upper level.
    pub upper: usize,
    /// Vacuum wavenumber, cm⁻¹.
    pub wavenumber_per_cm: f64,
    /// 1 σ of the wavenumber, cm⁻¹.
    pub uncertainty_per_cm: f64,
    /// Spontaneous emission rate, s⁻¹.
    pub rate_per_s: f64,
    /// 1 σ of the rate over the rate.
    pub rate_relative_uncertainty: f64,
}

/// Relative 1 σ of the rates: 1.5 (Zα)², at least 1e-4. Rates of Dirac wave functions with retardation differ by at most
/// 3 (Zα)² for n ≤ 4 and Z ≤ 26, four fifths of them by less than (Zα)².
pub fn rate_relative_uncertainty(nucleus: &Nucleus) -> f64 {
    (1.5 * (nucleus.charge() * FINE_STRUCTURE).powi(2)).max(1e-4)
}

/// Every J-resolved line between levels up to n = `n_max` (at most 50), in order of upper then lower n.
pub fn lines(nucleus: &Nucleus, n_max: u32) -> Result<Vec<OneElectronLine>, OneElectronError> {
    let levels = levels(nucleus, n_max)?;
    lines_between(nucleus, &levels, n_max)
}

/// The same from levels already at hand: `levels` is what [`levels`] gave for this nucleus and `n_max`.
pub fn lines_between(
    nucleus: &Nucleus,
    levels: &[OneElectronLevel],
    n_max: u32,
) -> Result<Vec<OneElectronLine>, OneElectronError> {
    check_fine_n(n_max)?;
    let mut all = Vec::new();
    let mut pair = ShellPair::default();
    for upper in 2..=n_max {
        for lower in 1..upper {
            pair.fill(upper, lower)?;
            shell_lines(nucleus, levels, &pair, &mut all);
        }
    }
    Ok(all)
}

fn shell_lines(
    nucleus: &Nucleus,
    levels: &[OneElectronLevel],
    pair: &ShellPair,
    all: &mut Vec<OneElectronLine>,
) {
    let doubt = rate_relative_uncertainty(nucleus);
    let scale = rate_scale(nucleus, pair.upper(), pair.lower());
    for (l_upper, l_lower) in orbital_pairs(pair.upper(), pair.lower()) {
        let rate =
            scale * orbital_factor(l_upper, l_lower) * pair.integral(l_upper, l_lower).powi(2);
        for (from, to, share) in component_shares(l_upper, l_lower) {
            let upper = level_index(pair.upper(), l_upper, from);
            let lower = level_index(pair.lower(), l_lower, to);
            let (wavenumber_per_cm, uncertainty_per_cm) = levels[upper].above(&levels[lower]);
            all.push(OneElectronLine {
                lower,
                upper,
                wavenumber_per_cm,
                uncertainty_per_cm,
                rate_per_s: rate * share,
                rate_relative_uncertainty: doubt,
            });
        }
    }
}

/// All (l_upper, l_lower) that a dipole allows between two shells.
fn orbital_pairs(upper: u32, lower: u32) -> impl Iterator<Item = (u32, u32)> {
    (0..lower).flat_map(move |l| {
        let below = l.checked_sub(1).map(|less| (less, l));
        let above = (l + 1 < upper).then_some((l + 1, l));
        below.into_iter().chain(above)
    })
}

/// (upper stretched, lower stretched, share) of the fine-structure components of one l → l' transition,
/// the share being the part of the upper level's rate: (2l+1)(2j'+1) {l' j' ½; j l 1}², in closed form.
fn component_shares(l_upper: u32, l_lower: u32) -> impl Iterator<Item = (bool, bool, f64)> {
    let l = f64::from(l_upper);
    let shares = if l_upper > l_lower {
        // j = l + ½ ends on l − ½ only; j = l − ½ on both.
        let minor = 1.0 / (l * (2.0 * l - 1.0));
        if l_lower == 0 {
            [(true, true, 1.0), (false, true, 1.0), (false, false, 0.0)]
        } else {
            [
                (true, true, 1.0),
                (false, true, minor),
                (false, false, 1.0 - minor),
            ]
        }
    } else {
        let minor = 1.0 / ((l + 1.0) * (2.0 * l + 3.0));
        if l_upper == 0 {
            let third = 1.0 / 3.0;
            [
                (true, false, third),
                (true, true, 1.0 - third),
                (false, false, 0.0),
            ]
        } else {
            [
                (true, false, minor),
                (true, true, 1.0 - minor),
                (false, false, 1.0),
            ]
        }
    };
    shares.into_iter().filter(|component| component.2 > 0.0)
}

/// max(l, l')/(2l + 1): the angular factor of the rate of an upper l.
fn orbital_factor(l_upper: u32, l_lower: u32) -> f64 {
    f64::from(l_upper.max(l_lower)) / (2.0 * f64::from(l_upper) + 1.0)
}

/// Energy of the gross transition, hartree of Z = 1 and infinite mass.
fn gross_hartree(upper: u32, lower: u32) -> f64 {
    let (n, m) = (f64::from(upper), f64::from(lower));
    0.5 * (n - m) * (n + m) / (n * n * m * m)
}

/// Rate per squared radial integral (a₀², Z = 1) and unit angular factor, s⁻¹: (4/3) α³ ω³ in atomic units,
/// times Z⁴, the reduced mass and the square of the dipole charge.
fn rate_scale(nucleus: &Nucleus, upper: u32, lower: u32) -> f64 {
    let atomic_per_s = 4.0 * PI * RYDBERG_PER_CM * 100.0 * SPEED_OF_LIGHT_M_PER_S;
    4.0 / 3.0
        * FINE_STRUCTURE.powi(3)
        * atomic_per_s
        * gross_hartree(upper, lower).powi(3)
        * nucleus.charge().powi(4)
        * nucleus.reduced_mass()
        * nucleus.dipole_charge().powi(2)
}

/// Rate n l → n' l', summed over j' (the same for both j), s⁻¹; n' < n ≤ 400, 0 where |l − l'| ≠ 1.
pub fn orbital_rate(
    nucleus: &Nucleus,
    upper: (u32, u32),
    lower: (u32, u32),
) -> Result<f64, OneElectronError> {
    let pair = checked_pair(upper, lower)?;
    Ok(rate_scale(nucleus, upper.0, lower.0)
        * orbital_factor(upper.1, lower.1)
        * pair.integral(upper.1, lower.1).powi(2))
}

/// Rate of one fine-structure component (n, l, j) → (n', l', j'), s⁻¹.
pub fn component_rate(
    nucleus: &Nucleus,
    upper: (u32, u32, HalfInteger),
    lower: (u32, u32, HalfInteger),
) -> Result<f64, OneElectronError> {
    let from = stretched(upper.1, upper.2)?;
    let to = stretched(lower.1, lower.2)?;
    let rate = orbital_rate(nucleus, (upper.0, upper.1), (lower.0, lower.1))?;
    if upper.1.abs_diff(lower.1) != 1 {
        return Ok(0.0);
    }
    let share = component_shares(upper.1, lower.1)
        .find(|component| (component.0, component.1) == (from, to))
        .map_or(0.0, |component| component.2);
    Ok(rate * share)
}

/// Mean rate n → n', all l of the upper shell weighted alike per state, s⁻¹.
pub fn shell_rate(nucleus: &Nucleus, upper: u32, lower: u32) -> Result<f64, OneElectronError> {
    let pair = ShellPair::new(upper, lower)?;
    let strength: f64 = orbital_pairs(upper, lower)
        .map(|(l, l_lower)| f64::from(l.max(l_lower)) * pair.integral(l, l_lower).powi(2))
        .sum();
    Ok(rate_scale(nucleus, upper, lower) * strength / f64::from(upper * upper))
}

/// Absorption oscillator strength n' l' → n l of the fixed-nucleus problem (the same for every Z; sums to 1 over
/// all l, n and the continuum); negative downwards.
pub fn oscillator_strength(from: (u32, u32), to: (u32, u32)) -> Result<f64, OneElectronError> {
    let (upper, lower, sign) = if to.0 > from.0 {
        (to, from, 1.0)
    } else {
        (from, to, -1.0)
    };
    let pair = checked_pair(upper, lower)?;
    let strength = f64::from(upper.1.max(lower.1)) * pair.integral(upper.1, lower.1).powi(2);
    let weight = 2.0 * f64::from(from.1) + 1.0;
    Ok(sign * 2.0 / 3.0 * gross_hartree(upper.0, lower.0) * strength / weight)
}

/// Mean absorption oscillator strength n' → n of whole shells, n' < n.
pub fn shell_oscillator_strength(lower: u32, upper: u32) -> Result<f64, OneElectronError> {
    let pair = ShellPair::new(upper, lower)?;
    let strength: f64 = orbital_pairs(upper, lower)
        .map(|(l, l_lower)| f64::from(l.max(l_lower)) * pair.integral(l, l_lower).powi(2))
        .sum();
    Ok(2.0 / 3.0 * gross_hartree(upper, lower) * strength / f64::from(lower * lower))
}

/// Total radiative decay rate of n l, s⁻¹ (the same for both j but in 2p and 2s, to relative (Zα)²); 0 for 1s.
/// 2s decays by two photons and by magnetic dipole radiation.
pub fn decay_rate(nucleus: &Nucleus, n: u32, l: u32) -> Result<f64, OneElectronError> {
    if l >= n {
        return Err(OneElectronError::OrbitalNumber { n, l });
    }
    if (n, l) == (2, 0) {
        return Ok(two_photon_rate(nucleus) + magnetic_rate(nucleus));
    }
    let mut total = 0.0;
    for lower in 1..n {
        let pair = ShellPair::new(n, lower)?;
        let scale = rate_scale(nucleus, n, lower);
        for l_lower in [l.checked_sub(1), Some(l + 1)].into_iter().flatten() {
            let integral = pair.integral(l, l_lower);
            total += scale * orbital_factor(l, l_lower) * integral * integral;
        }
    }
    Ok(total)
}

/// Radiative lifetime of n l, s; `None` for the ground level.
pub fn lifetime_s(nucleus: &Nucleus, n: u32, l: u32) -> Result<Option<f64>, OneElectronError> {
    let rate = decay_rate(nucleus, n, l)?;
    Ok((rate > 0.0).then(|| 1.0 / rate))
}

/// Two-photon decay 2s → 1s, s⁻¹: 8.22943 Z⁶ (1 + 3.9448 (Zα)² − 2.040 (Zα)⁴)/(1 + 4.6019 (Zα)²) (Goldman & Drake
/// 1981), times the reduced mass; to 1e-3.
pub fn two_photon_rate(nucleus: &Nucleus) -> f64 {
    let za2 = (nucleus.charge() * FINE_STRUCTURE).powi(2);
    let relativistic = (1.0 + 3.9448 * za2 - 2.040 * za2 * za2) / (1.0 + 4.6019 * za2);
    TWO_PHOTON_PER_S * nucleus.charge().powi(6) * relativistic * nucleus.reduced_mass()
}

/// Magnetic-dipole decay 2s → 1s to leading order, s⁻¹: α (Zα)¹⁰ m c²/(972 ħ) (Drake 1971, Phys. Rev. A 3, 908);
/// relative error of order (Zα)².
pub fn magnetic_rate(nucleus: &Nucleus) -> f64 {
    let atomic_per_s = 4.0 * PI * RYDBERG_PER_CM * 100.0 * SPEED_OF_LIGHT_M_PER_S;
    atomic_per_s * FINE_STRUCTURE.powi(9) * nucleus.charge().powi(10) / 972.0
}

fn checked_pair(upper: (u32, u32), lower: (u32, u32)) -> Result<ShellPair, OneElectronError> {
    for (n, l) in [upper, lower] {
        if l >= n {
            return Err(OneElectronError::OrbitalNumber { n, l });
        }
    }
    ShellPair::new(upper.0, lower.0)
}

fn stretched(l: u32, j: HalfInteger) -> Result<bool, OneElectronError> {
    let twice = u32::from(j.twice());
    if twice == 2 * l + 1 {
        Ok(true)
    } else if l > 0 && twice == 2 * l - 1 {
        Ok(false)
    } else {
        Err(OneElectronError::TotalNumber { l, j })
    }
}
