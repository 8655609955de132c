//! Angular factors in LS coupling, and rates from line strengths.

use vocabulary::atom::HalfInteger;
use vocabulary::light::constants::{BOHR_RADIUS_M, FINE_STRUCTURE, SPEED_OF_LIGHT_M_PER_S};

use super::CoulombError;
use crate::calc::angular::six_j;
use crate::calc::series::label::{bare_term, parents, shell};
use crate::calc::series::orbital_number;

/// A level in LS coupling: `(core L_c S_c) l, L S J`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct LsState {
    /// Twice the spin of the core term.
    pub twice_core_s: u16,
    /// L of the core term.
    pub core_l: u16,
    /// Orbital angular momentum of the jumping electron.
    pub l: u16,
    /// Twice S.
    pub twice_s: u16,
    /// L.
    pub total_l: u16,
    /// Twice J.
    pub twice_j: u16,
}

impl LsState {
    /// Reads a state from its labels: core `3d6 (5D)`, l of the outer electron, term `5Fo`, twice J.
    ///
    /// # Errors
    /// [`CoulombError::Label`] where the core has no one LS term or the term is not an LS term.
    pub fn from_labels(core: &str, l: u32, term: &str, twice_j: u16) -> Result<Self, CoulombError> {
        let refuse = || CoulombError::Label {
            label: format!("{core} {term}").trim().to_owned(),
        };
        let (twice_core_s, core_l) = core_term(core).ok_or_else(refuse)?;
        let (twice_s, total_l) = ls_term(bare_term(term)).ok_or_else(refuse)?;
        let state = Self {
            twice_core_s,
            core_l,
            l: l.try_into().map_err(|_| refuse())?,
            twice_s,
            total_l,
            twice_j,
        };
        state.check().map_err(|_| refuse())?;
        Ok(state)
    }

    fn check(&self) -> Result<(), CoulombError> {
        let triangle = |a: u16, b: u16, c: u16| c <= a + b && a <= b + c && b <= a + c;
        let holds = triangle(2 * self.core_l, 2 * self.l, 2 * self.total_l)
            && triangle(self.twice_core_s, 1, self.twice_s)
            && (self.twice_core_s + 1 + self.twice_s).is_multiple_of(2)
            && triangle(2 * self.total_l, self.twice_s, self.twice_j)
            && (self.twice_s + self.twice_j).is_multiple_of(2);
        if holds {
            return Ok(());
        }
        Err(CoulombError::Forbidden {
            rule: "the core, l, L, S and J of a level do not couple",
        })
    }
}

/// The factor that turns the squared radial integral (a₀²) into the line strength (e² a₀²):
/// `(2J+1)(2J′+1) {L J S; J′ L′ 1}² (2L+1)(2L′+1) {l L L_c; L′ l′ 1}² l_>`
/// (Cowan 1981, *The Theory of Atomic Structure and Spectra*, chapter 14).
///
/// Symmetric in the two levels; summed over J and J′ and over L and L′ it gives
/// `(2S+1)(2L_c+1) l_>` per spin of the core.
///
/// # Errors
/// [`CoulombError::Forbidden`] where a selection rule or a coupling fails.
pub fn line_strength_factor(one: &LsState, two: &LsState) -> Result<f64, CoulombError> {
    one.check()?;
    two.check()?;
    let rule = if one.twice_s != two.twice_s {
        Some("the spin changes")
    } else if one.core_l != two.core_l || one.twice_core_s != two.twice_core_s {
        Some("the term of the core changes")
    } else if one.l.abs_diff(two.l) != 1 {
        Some("l changes by other than one")
    } else if one.total_l.abs_diff(two.total_l) > 1 || one.total_l + two.total_l == 0 {
        Some("L changes by more than one, or 0 to 0")
    } else if one.twice_j.abs_diff(two.twice_j) > 2 || one.twice_j + two.twice_j == 0 {
        Some("J changes by more than one, or 0 to 0")
    } else {
        None
    };
    if let Some(rule) = rule {
        return Err(CoulombError::Forbidden { rule });
    }
    let h = HalfInteger::from_twice;
    let whole = |l: u16| h(2 * l);
    let line = six_j([
        whole(one.total_l),
        h(one.twice_j),
        h(one.twice_s),
        h(two.twice_j),
        whole(two.total_l),
        whole(1),
    ]);
    let multiplet = six_j([
        whole(one.l),
        whole(one.total_l),
        whole(one.core_l),
        whole(two.total_l),
        whole(two.l),
        whole(1),
    ]);
    let weights = h(one.twice_j).weight() * h(two.twice_j).weight();
    let orbital = whole(one.total_l).weight() * whole(two.total_l).weight();
    Ok(weights * line * line * orbital * multiplet * multiplet * f64::from(one.l.max(two.l)))
}

/// Spontaneous emission rate, s⁻¹, of a line of wavenumber σ (cm⁻¹) and strength S (e² a₀²) from an
/// upper level of weight g: `A = (32/3) π³ α c a₀² σ³ S / g` (Cowan 1981, equation 14.33).
pub fn rate_per_s(wavenumber_per_cm: f64, strength_e2_a0_2: f64, upper_weight: f64) -> f64 {
    rate_scale(wavenumber_per_cm) * strength_e2_a0_2 / upper_weight
}

/// Line strength, e² a₀², of a line whose rate is known; the inverse of [`rate_per_s`].
pub fn strength_e2_a0_2(wavenumber_per_cm: f64, rate_per_s: f64, upper_weight: f64) -> f64 {
    rate_per_s * upper_weight / rate_scale(wavenumber_per_cm)
}

fn rate_scale(wavenumber_per_cm: f64) -> f64 {
    let cube = (100.0 * wavenumber_per_cm).powi(3) * std::f64::consts::PI.powi(3);
    32.0 / 3.0 * FINE_STRUCTURE * SPEED_OF_LIGHT_M_PER_S * BOHR_RADIUS_M.powi(2) * cube
}

/// Twice S and L of `3Po`; `None` for pair-coupling labels and others.
fn ls_term(text: &str) -> Option<(u16, u16)> {
    let text = text.strip_suffix('o').unwrap_or(text);
    let letter_at = text.find(|c: char| !c.is_ascii_digit())?;
    let multiplicity: u16 = text[..letter_at].parse().ok()?;
    let letter = text[letter_at..].chars().next()?;
    let alone = text.len() == letter_at + letter.len_utf8() && letter.is_ascii_uppercase();
    let l = orbital_number(letter.to_ascii_lowercase())?;
    (alone && multiplicity > 0).then_some((multiplicity - 1, l as u16))
}

/// Twice S and L of a core: its last parent term, or that of a shell that has only one.
fn core_term(core: &str) -> Option<(u16, u16)> {
    if let Some(parent) = parents(core).last() {
        return ls_term(bare_term(parent));
    }
    let Some((_, l, occupancy)) = core.split_whitespace().last().and_then(shell) else {
        return core.trim().is_empty().then_some((0, 0));
    };
    let full = 4 * l + 2;
    match occupancy {
        q if q == full => Some((0, 0)),
        q if q == 1 || q + 1 == full => Some((1, l as u16)),
        _ => None,
    }
}
