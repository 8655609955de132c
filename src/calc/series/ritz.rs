//! The Ritz expansion, its derivatives, and the size of the terms that a fit leaves out.

use super::Core;

/// Size of the Ritz terms that a fit leaves out, at its lowest member: the next term has the
/// standard deviation `ratio` × the last kept (or `constant_share` × min(|δ₀|, `constant_cap`)
/// when δ₀ alone was kept), never below `floor`; each further one is smaller by `ratio`.
///
/// The values were tuned on the half of the series that `tests/reference/series/halves.csv` calls
/// `tuned`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct NeglectedTerms {
    /// Ratio of successive terms.
    pub ratio: f64,
    /// Least standard deviation of the defect.
    pub floor: f64,
    /// Share of δ₀ that the second term may have.
    pub constant_share: f64,
    /// Where that share stops to grow.
    pub constant_cap: f64,
    /// Scatter of the defect that levels of other configurations may bring about beyond the
    /// members held.
    pub unseen_scatter: f64,
}

impl NeglectedTerms {
    /// The tuned sizes for a core and the l of the outer electron.
    ///
    /// A d electron meets a centrifugal barrier at the edge of the core, and its defect turns
    /// over within a few n where it begins to enter (the collapse of nd in Ca⁺ or Cs); s and p
    /// electrons are inside at every n, and f and higher ones outside.
    pub fn of_series(core: Core, l: u32) -> Self {
        Self {
            ratio: match (core, l) {
                (Core::Rigid, 2) => 0.5,
                (Core::Rigid, _) => 0.15,
                (Core::Soft, _) => 0.3,
            },
            floor: 2e-6,
            constant_share: 0.3,
            constant_cap: 0.2,
            unseen_scatter: match core {
                Core::Rigid => 0.0,
                Core::Soft => 2e-4,
            },
        }
    }

    /// Standard deviation of term `index` (0 is δ₀) at the lowest member, after a fit of `kept`.
    pub(super) fn deviation(&self, kept: &[f64], index: usize) -> f64 {
        let last = kept.len() - 1;
        let first_left_out = if last == 0 {
            self.constant_share * kept[0].abs().min(self.constant_cap)
        } else {
            let lower = if last > 1 {
                kept[last - 1].abs() * self.ratio
            } else {
                0.0
            };
            self.ratio * kept[last].abs().max(lower)
        };
        first_left_out.max(self.floor) * self.ratio.powi((index - kept.len()) as i32)
    }
}

/// Ritz expansion with terms scaled to the lowest member: `δ(n) = Σ c_k (s/(n − c₀)²)^k`.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Ritz {
    pub scaled: Vec<f64>,
    pub scale: f64,
    pub limit_per_cm: f64,
    pub strength_per_cm: f64,
}

impl Ritz {
    pub fn expansion(&self, n: f64) -> f64 {
        self.scale / (n - self.scaled[0]).powi(2)
    }

    pub fn defect(&self, n: f64) -> f64 {
        let x = self.expansion(n);
        self.scaled.iter().rev().fold(0.0, |sum, c| sum * x + c)
    }

    pub fn energy_per_cm(&self, n: f64) -> f64 {
        self.limit_per_cm - self.strength_per_cm / (n - self.defect(n)).powi(2)
    }

    /// dE/dδ at n, cm⁻¹.
    pub fn stiffness_per_cm(&self, n: f64) -> f64 {
        -2.0 * self.strength_per_cm / (n - self.defect(n)).powi(3)
    }

    /// Change of the energy with each scaled term and with the limit.
    pub fn gradient(&self, n: f64) -> Vec<f64> {
        let mut gradient = Vec::with_capacity(self.scaled.len() + 1);
        self.gradient_into(n, &mut gradient);
        gradient
    }

    /// As [`Ritz::gradient`], in place of what a buffer held.
    pub fn gradient_into(&self, n: f64, gradient: &mut Vec<f64>) {
        let x = self.expansion(n);
        let stiffness = self.stiffness_per_cm(n);
        let mut power = 1.0;
        let mut through_scale = 0.0;
        gradient.clear();
        for (k, c) in self.scaled.iter().enumerate() {
            gradient.push(stiffness * power);
            through_scale += k as f64 * c * power;
            power *= x;
        }
        // x itself moves with c₀: dx/dc₀ = 2x/(n − c₀).
        gradient[0] += stiffness * through_scale * 2.0 / (n - self.scaled[0]);
        gradient.push(1.0);
    }

    /// Change of the energy with a term that was left out.
    pub fn neglected(&self, n: f64, index: usize) -> f64 {
        self.stiffness_per_cm(n) * self.expansion(n).powi(index as i32)
    }
}
