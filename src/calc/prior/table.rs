//! The coefficients, as `tests/prior.rs` learns them from the bundled tables.

use super::features::{AtomClass, Features, TransitionKind};

/// Lines of like kind: log₁₀ of their strength is Σ coefficient · feature, with a normal spread.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Group {
    /// Kind of line.
    pub kind: TransitionKind,
    /// Kind of ion; `None` where the rated lines are too few to part them.
    pub class: Option<AtomClass>,
    /// Constant, share in the multiplet, upper and lower effective quantum number, nuclear charge
    /// (all but the constant as log₁₀).
    pub coefficients: [f64; 5],
    /// 1 σ of log₁₀ strength.
    pub sigma_dex: f64,
}

impl Group {
    /// What the coefficients multiply.
    pub const fn terms(features: &Features) -> [f64; 5] {
        [
            1.0,
            features.log10_share,
            features.log10_n_upper,
            features.log10_n_lower,
            features.log10_z,
        ]
    }

    /// log₁₀ of the median strength.
    pub fn strength(&self, features: &Features) -> f64 {
        let terms = Self::terms(features);
        self.coefficients
            .iter()
            .zip(terms)
            .map(|(c, t)| c * t)
            .sum()
    }

    /// Which coefficients are fitted; the others stay zero.
    pub const fn fitted(kind: TransitionKind) -> &'static [usize] {
        match kind {
            TransitionKind::Allowed => &[0, 1, 2, 3],
            TransitionKind::Intercombination => &[0, 4],
            TransitionKind::NoLsTerms => &[0, 2],
            TransitionKind::OrbitalForbidden | TransitionKind::OneParity => &[0],
        }
    }
}

const fn group(
    kind: TransitionKind,
    class: Option<AtomClass>,
    coefficients: [f64; 5],
    sigma_dex: f64,
) -> Group {
    Group {
        kind,
        class,
        coefficients,
        sigma_dex,
    }
}

use AtomClass::{Few, OpenD, OpenF, OpenP};
use TransitionKind::{Allowed, Intercombination, NoLsTerms, OneParity, OrbitalForbidden};

/// All groups.
#[rustfmt::skip]
pub const GROUPS: [Group; 8] = [
    group(Allowed, Some(Few), [0.76, 0.53, -4.74, 3.33, 0.0], 0.84),
    group(Allowed, Some(OpenP), [0.34, 0.74, -2.42, 1.96, 0.0], 0.58),
    group(Allowed, Some(OpenD), [0.35, 0.91, -1.51, 0.50, 0.0], 0.77),
    group(Allowed, Some(OpenF), [-1.26, 0.21, 1.13, 1.06, 0.0], 0.94),
    group(Intercombination, None, [-6.40, 0.0, 0.0, 0.0, 2.62], 1.27),
    group(OrbitalForbidden, None, [-2.00, 0.0, 0.0, 0.0, 0.0], 1.00),
    group(NoLsTerms, None, [-0.32, 0.0, -1.75, 0.0, 0.0], 0.85),
    group(OneParity, None, [-14.35, 0.0, 0.0, 0.0, 0.0], 2.62),
];
