//! What the levels of a line tell about its rate.

use std::cell::RefCell;
use std::collections::HashMap;

use vocabulary::atom::{DipoleClass, HalfInteger, Species, Term, dipole_class};
use vocabulary::light::constants::RYDBERG_PER_CM;
use vocabulary::spectrum::{Level, Line};

use crate::calc::angular::multiplet_share;

/// Kinds of ions by their open shell.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum AtomClass {
    /// One or two electrons outside closed shells.
    Few,
    /// An open p shell.
    OpenP,
    /// An open d shell.
    OpenD,
    /// An open f shell.
    OpenF,
}

impl AtomClass {
    /// The class of a species, from its number of electrons; in the sixth row the 4f shell is
    /// taken to be full from Z = 70 on, in the seventh 5f from Z = 102.
    pub fn of(species: Species) -> Self {
        let electrons = species.atomic_number + 1 - species.stage.min(species.atomic_number);
        // The seventh row repeats the sixth, 32 electrons further on.
        if electrons > 86 {
            return Self::long_row(species.atomic_number - 32, electrons - 32 - 54);
        }
        match electrons {
            0..=2 => Self::Few,
            3..=10 => Self::short_row(electrons - 2),
            11..=18 => Self::short_row(electrons - 10),
            19..=36 => Self::middle_row(electrons - 18),
            37..=54 => Self::middle_row(electrons - 36),
            _ => Self::long_row(species.atomic_number, electrons - 54),
        }
    }

    const fn short_row(valence: u8) -> Self {
        match valence {
            0..=2 => Self::Few,
            _ => Self::OpenP,
        }
    }

    const fn middle_row(valence: u8) -> Self {
        match valence {
            0..=2 | 11 | 12 => Self::Few,
            3..=10 => Self::OpenD,
            _ => Self::OpenP,
        }
    }

    const fn long_row(atomic_number: u8, valence: u8) -> Self {
        match (atomic_number, valence) {
            (70.., 15..) => Self::middle_row(valence - 14),
            (..=56, _) => Self::Few,
            (57, _) => Self::OpenD,
            _ => Self::OpenF,
        }
    }
}

/// How a line stands to the selection rules.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum TransitionKind {
    /// Electric dipole, allowed in LS coupling.
    Allowed,
    /// Electric dipole with a change of spin.
    Intercombination,
    /// Electric dipole, forbidden by L alone.
    OrbitalForbidden,
    /// Electric dipole between levels without LS terms.
    NoLsTerms,
    /// No electric dipole line: one parity, or J forbids it.
    OneParity,
}

/// What a prior is made from.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Features {
    /// Kind of ion.
    pub class: AtomClass,
    /// Kind of line.
    pub kind: TransitionKind,
    /// log₁₀ of the share of the component in its LS multiplet; zero where there is none.
    pub log10_share: f64,
    /// log₁₀ of the effective quantum number of the upper level.
    pub log10_n_upper: f64,
    /// log₁₀ of the effective quantum number of the lower level.
    pub log10_n_lower: f64,
    /// log₁₀ of the nuclear charge.
    pub log10_z: f64,
}

impl Features {
    /// Features of a line of an ion with this limit (cm⁻¹); see [`super::prior`] for `None`.
    pub fn of(line: &Line, limit_per_cm: f64) -> Option<Self> {
        let (lower, upper) = (line.lower.as_deref()?, line.upper.as_deref()?);
        let effective = |level: &Level| {
            let binding = limit_per_cm - level.energy_per_cm;
            let charge = f64::from(line.species.stage);
            (binding > 0.0).then(|| (charge * (RYDBERG_PER_CM / binding).sqrt()).log10())
        };
        let (kind, share) = kind(lower, upper)?;
        Some(Self {
            class: AtomClass::of(line.species),
            kind,
            log10_share: share.log10(),
            log10_n_upper: effective(upper)?,
            log10_n_lower: effective(lower)?,
            log10_z: f64::from(line.species.atomic_number).log10(),
        })
    }
}

/// The kind of a transition, and the share of the component in its multiplet (1 where the line
/// has none).
fn kind(lower: &Level, upper: &Level) -> Option<(TransitionKind, f64)> {
    let (j_lower, j_upper) = (lower.j?, upper.j?);
    if lower.parity.is_some() && lower.parity == upper.parity {
        return Some((TransitionKind::OneParity, 1.0));
    }
    let term = |level: &Level| level.term.as_deref().map(Term::parse);
    let (Some(a), Some(b)) = (term(lower), term(upper)) else {
        return Some((TransitionKind::NoLsTerms, 1.0));
    };
    Some(
        match dipole_class((&a, Some(j_lower)), (&b, Some(j_upper))) {
            Some(DipoleClass::Allowed) => match share((&a, j_lower), (&b, j_upper)) {
                Some(share) if share > 0.0 => (TransitionKind::Allowed, share),
                _ => (TransitionKind::NoLsTerms, 1.0),
            },
            Some(DipoleClass::Intercombination) => (TransitionKind::Intercombination, 1.0),
            Some(DipoleClass::OrbitalForbidden) => (TransitionKind::OrbitalForbidden, 1.0),
            Some(DipoleClass::ParityForbidden | DipoleClass::MomentumForbidden) => {
                (TransitionKind::OneParity, 1.0)
            }
            None => (TransitionKind::NoLsTerms, 1.0),
        },
    )
}

fn share(lower: (&Term, HalfInteger), upper: (&Term, HalfInteger)) -> Option<f64> {
    let orbital = |term: &Term| match *term {
        Term::Ls { l, .. } => Some(HalfInteger::from_twice(2 * u16::from(l))),
        _ => None,
    };
    let Term::Ls { multiplicity, .. } = *lower.0 else {
        return None;
    };
    let spin = HalfInteger::from_twice(u16::from(multiplicity).checked_sub(1)?);
    let ends = [lower, upper].map(|(term, j)| orbital(term).map(|l| (l, j)));
    Some(remembered(spin, ends[0]?, ends[1]?))
}

/// Spin, then L and J of both ends.
type Component = [HalfInteger; 5];

/// [`multiplet_share`], each component worked out once: exact symbols are slow, and a window may
/// hold thousands of lines of a few hundred kinds.
fn remembered(
    spin: HalfInteger,
    lower: (HalfInteger, HalfInteger),
    upper: (HalfInteger, HalfInteger),
) -> f64 {
    thread_local! {
        static SHARES: RefCell<HashMap<Component, f64>> = RefCell::default();
    }
    let key = [spin, lower.0, lower.1, upper.0, upper.1];
    SHARES.with_borrow_mut(|shares| {
        *shares
            .entry(key)
            .or_insert_with(|| multiplet_share(spin, lower, upper))
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn classes_follow_the_periodic_table() {
        // Ground configurations: common practice.
        for (z, stage, class) in [
            (2, 1, AtomClass::Few),
            (11, 1, AtomClass::Few),
            (12, 1, AtomClass::Few),
            (10, 1, AtomClass::OpenP),
            (18, 2, AtomClass::OpenP),
            (26, 1, AtomClass::OpenD),
            (26, 2, AtomClass::OpenD),
            (29, 1, AtomClass::Few),
            (30, 1, AtomClass::Few),
            (36, 1, AtomClass::OpenP),
            (57, 1, AtomClass::OpenD),
            (58, 2, AtomClass::OpenF),
            (63, 2, AtomClass::OpenF),
            (70, 1, AtomClass::Few),
            (74, 1, AtomClass::OpenD),
            (79, 1, AtomClass::Few),
            (80, 1, AtomClass::Few),
            (82, 1, AtomClass::OpenP),
            (92, 1, AtomClass::OpenF),
            (88, 2, AtomClass::Few),
        ] {
            assert_eq!(AtomClass::of(Species::new(z, stage)), class, "{z} {stage}");
        }
    }
}
