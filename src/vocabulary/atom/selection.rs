//! Selection rules of electric dipole radiation (common practice; e.g. Cowan, *The Theory of
//! Atomic Structure and Spectra*, 1981, ch. 14).

use super::{HalfInteger, Term};

/// How a transition stands to the rules of electric dipole radiation. The rules on parity and J
/// are strict; those on S and L hold as far as LS coupling does.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum DipoleClass {
    /// All rules hold.
    Allowed,
    /// Parity and J hold, S changes: an intercombination line.
    Intercombination,
    /// Parity, J and S hold, L does not: |ΔL| > 1 or S–S.
    OrbitalForbidden,
    /// ΔJ is not 0 or ±1, or both J are 0.
    MomentumForbidden,
    /// Both levels have the same parity.
    ParityForbidden,
}

/// Class of the transition between two levels in LS coupling; the order of the levels is of no
/// account. A missing J passes the rule on J. `None` where a term is not an LS term, though the
/// strict rules are applied to any term that shows its parity.
pub fn dipole_class(
    one: (&Term, Option<HalfInteger>),
    other: (&Term, Option<HalfInteger>),
) -> Option<DipoleClass> {
    let (parity_one, parity_other) = (one.0.parity()?, other.0.parity()?);
    if parity_one == parity_other {
        return Some(DipoleClass::ParityForbidden);
    }
    if let (Some(a), Some(b)) = (one.1, other.1)
        && !triangle(a.twice(), b.twice())
    {
        return Some(DipoleClass::MomentumForbidden);
    }
    let (Some((s_one, l_one)), Some((s_other, l_other))) = (ls(one.0), ls(other.0)) else {
        return None;
    };
    if s_one != s_other {
        Some(DipoleClass::Intercombination)
    } else if triangle(2 * u16::from(l_one), 2 * u16::from(l_other)) {
        Some(DipoleClass::Allowed)
    } else {
        Some(DipoleClass::OrbitalForbidden)
    }
}

/// Whether a magnetic dipole transition is allowed by the strict rules: same parity, ΔJ = 0 or ±1,
/// not 0–0. `None` where a term does not show its parity.
pub fn magnetic_dipole_allowed(
    one: (&Term, HalfInteger),
    other: (&Term, HalfInteger),
) -> Option<bool> {
    Some(one.0.parity()? == other.0.parity()? && triangle(one.1.twice(), other.1.twice()))
}

/// Whether an electric quadrupole transition is allowed by the strict rules: same parity,
/// |ΔJ| ≤ 2 ≤ J + J′. `None` where a term does not show its parity.
pub fn electric_quadrupole_allowed(
    one: (&Term, HalfInteger),
    other: (&Term, HalfInteger),
) -> Option<bool> {
    let same_parity = one.0.parity()? == other.0.parity()?;
    Some(same_parity && photon_triangle(one.1.twice(), other.1.twice(), 2))
}

/// Whether two momenta (given twice) and a photon's one unit can form a triangle.
fn triangle(twice_a: u16, twice_b: u16) -> bool {
    photon_triangle(twice_a, twice_b, 1)
}

/// The same for a photon that carries `units` of momentum.
fn photon_triangle(twice_a: u16, twice_b: u16, units: u16) -> bool {
    let step = twice_a.abs_diff(twice_b);
    let sum = twice_a.saturating_add(twice_b);
    step.is_multiple_of(2) && step <= 2 * units && sum >= 2 * units
}

fn ls(term: &Term) -> Option<(u8, u8)> {
    match *term {
        Term::Ls {
            multiplicity, l, ..
        } => Some((multiplicity, l)),
        _ => None,
    }
}
