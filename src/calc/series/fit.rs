//! The weighted Rydberg–Ritz fit.

use super::linear::{Matrix, dot, times};
use super::ritz::{NeglectedTerms, Ritz};
use super::solve::{Datum, Solution, best_order};
use super::{Core, Limit, Member, SeriesError, SeriesInput};

/// Most Ritz terms that are tried: δ₀, δ₂, δ₄, δ₆.
pub const MOST_TERMS: usize = 4;
/// Pull (in σ of its prediction from the other members) from which a member counts as perturbed.
pub const PERTURBED_PULL: f64 = 5.0;
/// Members that must be left after a perturbed one is set aside.
const LEAST_TO_JUDGE: usize = 4;
/// Largest ratio of a higher Ritz term to the largest lower one, both at the lowest member, of
/// a regular series.
const REGULAR_RATIO: f64 = 1.5;
/// Ritz terms below this, at the lowest member, say nothing about regularity.
const NEGLIGIBLE_TERM: f64 = 0.04;
/// Largest scatter of the defects of a regular series, and for a rigid core the most that a
/// member may miss the curve by, beyond 3 σ of its energy.
const MOST_SCATTER: f64 = 0.005;

/// A fitted series.
#[derive(Clone, Debug, PartialEq)]
pub struct SeriesFit {
    /// Orbital angular momentum of the outer electron.
    pub l: u32,
    /// δ₀, δ₂, δ₄, …, as many as the information criterion chose.
    pub coefficients: Vec<f64>,
    /// Covariance of the coefficients and, in its last row and column, the limit (cm⁻¹),
    /// scale factor included.
    pub covariance: Vec<Vec<f64>>,
    /// The limit as fitted, cm⁻¹.
    pub limit_per_cm: f64,
    /// 1 σ of the limit, cm⁻¹.
    pub limit_sigma_per_cm: f64,
    /// Principal quantum numbers of the members used.
    pub used: Vec<u32>,
    /// Members set aside as perturbed, with their pull in σ.
    pub perturbed: Vec<(u32, f64)>,
    /// Σ of squared residuals over σ², members used and the fixed limit.
    pub chi_squared: f64,
    /// Members used (one more with a fixed limit) less parameters.
    pub degrees_of_freedom: usize,
    /// Factor on the fit's σ: √(χ²/ν) where the fit misses its data, else 1.
    pub scale_factor: f64,
    /// Scatter of the defects about the Ritz curve (1 σ), for a soft core: what the levels of
    /// other configurations do to single members. It is part of every prediction.
    pub defect_scatter: f64,
    /// By how much the fitted limit lies above the limit given, cm⁻¹, where that is beyond 2 σ of
    /// the fit; else 0. Either the levels stand on another scale than the limit, or the curve
    /// does not reach so far: predictions beyond the last member carry it.
    pub limit_offset_per_cm: f64,
    /// Schwarz's criterion χ² + Σ ln σ² + k ln N (Schwarz 1978, Ann. Stat. 6, 461) for each number of
    /// terms tried, beginning with one.
    pub information: Vec<f64>,
    /// Most that a member of a rigid core misses the curve by beyond 3 σ of its energy, as a defect.
    pub(super) worst_slip: f64,
    pub(super) ritz: Ritz,
    pub(super) scaled_covariance: Matrix,
    pub(super) weights: Vec<(f64, f64)>,
    pub(super) neglected: NeglectedTerms,
}

/// Fits a series with the tuned size of the neglected terms.
///
/// Energies in cm⁻¹. A rigid core needs two members with a fixed limit, a soft one four; a
/// fitted limit needs four and five.
///
/// # Errors
/// [`SeriesError`]: bad numbers, repeated n, l ≥ n, a member above the limit, too few members, a
/// perturbed series, no convergence.
pub fn fit(input: &SeriesInput) -> Result<SeriesFit, SeriesError> {
    fit_with(input, NeglectedTerms::of_series(input.core, input.l))
}

/// [`fit`] with another size of the neglected terms.
///
/// # Errors
/// As [`fit`].
pub fn fit_with(input: &SeriesInput, neglected: NeglectedTerms) -> Result<SeriesFit, SeriesError> {
    let mut members = input.checked()?;
    let mut perturbed = Vec::new();
    // At most a quarter of the members may be set aside; more makes the series perturbed.
    let may_leave = members.len() / 4;
    let mut found = best_order(input, &members, neglected)?;
    while members.len() > LEAST_TO_JUDGE && suspicious(&found) {
        let Some((index, pull)) = worst(input, &members, neglected) else {
            break;
        };
        if pull < PERTURBED_PULL {
            break;
        }
        perturbed.push((members[index].n, pull));
        if perturbed.len() > may_leave {
            return Err(SeriesError::Perturbed {
                members: perturbed.iter().map(|(n, _)| *n).collect(),
                misfit: pull,
            });
        }
        members.remove(index);
        found = best_order(input, &members, neglected)?;
    }
    perturbed.sort_by_key(|(n, _)| *n);
    found.perturbed = perturbed;
    regular(&found)?;
    Ok(found)
}

/// Whether single members are worth a look: χ² above ν + 4 √(2ν), or scatter of a soft core.
fn suspicious(fit: &SeriesFit) -> bool {
    let freedom = fit.degrees_of_freedom as f64;
    fit.defect_scatter > 0.0 || fit.chi_squared > freedom + 4.0 * (2.0 * freedom).sqrt()
}

/// A regular series has Ritz terms that fall off, or are small altogether, and little scatter.
fn regular(fit: &SeriesFit) -> Result<(), SeriesError> {
    let terms = &fit.ritz.scaled;
    let refuse = |misfit| {
        Err(SeriesError::Perturbed {
            members: fit.used.clone(),
            misfit,
        })
    };
    for k in 2..terms.len() {
        let lower = terms[1..k]
            .iter()
            .fold(NEGLIGIBLE_TERM, |m, c| c.abs().max(m));
        let ratio = terms[k].abs() / lower;
        if ratio > REGULAR_RATIO {
            return refuse(ratio);
        }
    }
    let scatter = fit.defect_scatter.max(fit.worst_slip);
    if scatter > MOST_SCATTER {
        return refuse(scatter / MOST_SCATTER);
    }
    Ok(())
}

/// The member that its neighbours predict worst, with its pull.
fn worst(
    input: &SeriesInput,
    members: &[Member],
    neglected: NeglectedTerms,
) -> Option<(usize, f64)> {
    (0..members.len())
        .filter_map(|index| {
            let mut others = members.to_vec();
            let left_out = others.remove(index);
            let fit = best_order(input, &others, neglected).ok()?;
            let sigma = fit
                .uncertainty_per_cm(f64::from(left_out.n))
                .hypot(left_out.uncertainty_per_cm);
            let missed = left_out.energy_per_cm - fit.ritz.energy_per_cm(f64::from(left_out.n));
            Some((index, missed.abs() / sigma))
        })
        .max_by(|a, b| a.1.total_cmp(&b.1))
}

pub(super) fn assemble(
    input: &SeriesInput,
    members: &[Member],
    neglected: NeglectedTerms,
    information: Vec<f64>,
    solution: Solution,
) -> SeriesFit {
    let Solution {
        ritz,
        covariance,
        chi_squared,
        scatter,
        data: used,
        ..
    } = solution;
    let data = members.len() + usize::from(matches!(input.limit, Limit::Fixed { .. }));
    let degrees_of_freedom = data.saturating_sub(ritz.scaled.len() + 1);
    let scale_factor = match degrees_of_freedom {
        0 => 1.0,
        _ if input.core == Core::Soft => 1.0,
        freedom => (chi_squared / freedom as f64).sqrt().max(1.0),
    };
    let worst_slip = match input.core {
        Core::Rigid => used.iter().map(|d| slip(&ritz, d)).fold(0.0, f64::max),
        Core::Soft => 0.0,
    };
    let (coefficients, published) = unscaled(&ritz, &covariance, scale_factor);
    let limit_index = coefficients.len();
    let limit_sigma = published[limit_index][limit_index].sqrt();
    let limit_offset_per_cm = match input.limit {
        Limit::Fixed { per_cm, .. } => Some(ritz.limit_per_cm - per_cm),
        Limit::Fitted { .. } => None,
    }
    .filter(|offset| offset.abs() > 2.0 * limit_sigma)
    .unwrap_or(0.0);
    SeriesFit {
        l: input.l,
        limit_per_cm: ritz.limit_per_cm,
        limit_sigma_per_cm: limit_sigma.hypot(limit_offset_per_cm),
        limit_offset_per_cm,
        coefficients,
        covariance: published,
        used: members.iter().map(|member| member.n).collect(),
        perturbed: Vec::new(),
        chi_squared,
        degrees_of_freedom,
        scale_factor,
        information,
        weights: used
            .iter()
            .map(|datum| (datum.n, datum.sigma_per_cm.powi(-2)))
            .collect(),
        defect_scatter: scatter,
        worst_slip,
        ritz,
        scaled_covariance: covariance,
        neglected,
    }
}

/// How far a member lies off the curve beyond 3 σ of its energy, as a defect.
fn slip(ritz: &Ritz, datum: &Datum) -> f64 {
    let missed = (datum.energy_per_cm - ritz.energy_per_cm(datum.n)).abs();
    (missed - 3.0 * datum.sigma_per_cm).max(0.0) / ritz.stiffness_per_cm(datum.n).abs()
}

/// Coefficients of `(n − δ₀)^(−2k)` and their covariance with the limit.
fn unscaled(ritz: &Ritz, covariance: &Matrix, scale_factor: f64) -> (Vec<f64>, Matrix) {
    let terms = ritz.scaled.len();
    let unit = |k: usize| {
        if k < terms {
            ritz.scale.powi(k as i32)
        } else {
            1.0
        }
    };
    let coefficients = (0..terms).map(|k| ritz.scaled[k] * unit(k)).collect();
    let published = (0..=terms)
        .map(|i| {
            (0..=terms)
                .map(|j| covariance[i][j] * unit(i) * unit(j) * scale_factor.powi(2))
                .collect()
        })
        .collect();
    (coefficients, published)
}

impl SeriesFit {
    /// Quantum defect at n (any n above the defect).
    pub fn defect(&self, n: f64) -> f64 {
        self.ritz.defect(n)
    }

    /// 1 σ of the energy predicted at n, cm⁻¹: fit, scale factor, neglected terms and, beyond the
    /// last member, what separates the fitted limit from the limit given. A defect that keeps the
    /// last member N in place takes (N*/n*)³ of that away.
    pub fn uncertainty_per_cm(&self, n: f64) -> f64 {
        let gradient = self.ritz.gradient(n);
        let spread = dot(&gradient, &times(&self.scaled_covariance, &gradient));
        let fitted = spread.max(0.0) * self.scale_factor.powi(2);
        let terms = self.ritz.scaled.len();
        let left_out: f64 = (terms..terms + 2)
            .map(|index| {
                let deviation = self.neglected.deviation(&self.ritz.scaled, index);
                (deviation * self.response(n, index, &gradient)).powi(2)
            })
            .sum();
        // A scatter known from ν members only: Student's t has ν/(ν − 2) times its variance, and
        // 1 + 2/ν is that for large ν.
        let few = 1.0 + 2.0 / self.degrees_of_freedom.max(1) as f64;
        let scatter = (few * self.defect_scatter).max(self.neglected.unseen_scatter);
        let irregular = (scatter * self.ritz.stiffness_per_cm(n)).powi(2);
        let last = self.used.last().map_or(n, |last| f64::from(*last));
        let kept = ((last - self.defect(last)) / (n - self.defect(n))).powi(3);
        let beyond = (self.limit_offset_per_cm * (1.0 - kept).max(0.0)).powi(2);
        (fitted + left_out + irregular + beyond).sqrt()
    }

    /// 1 σ of δ₀, neglected terms included (the covariance leaves them out).
    pub fn leading_defect_sigma(&self) -> f64 {
        let terms = self.ritz.scaled.len();
        let left_out: f64 = (terms..terms + 2)
            .map(|index| {
                let deviation = self.neglected.deviation(&self.ritz.scaled, index);
                (deviation * self.absorbed(index)[0]).powi(2)
            })
            .sum();
        (self.covariance[0][0] + left_out).sqrt()
    }

    /// Change of the fitted parameters that a unit of a neglected term brings about.
    fn absorbed(&self, index: usize) -> Vec<f64> {
        let mut pull = vec![0.0; self.ritz.scaled.len() + 1];
        for (member_n, weight) in &self.weights {
            let shift = self.ritz.neglected(*member_n, index);
            for (sum, slope) in pull.iter_mut().zip(self.ritz.gradient(*member_n)) {
                *sum += weight * slope * shift;
            }
        }
        times(&self.scaled_covariance, &pull)
    }

    /// What a unit of a neglected term changes at n, once the fit has absorbed what it can.
    fn response(&self, n: f64, index: usize, gradient: &[f64]) -> f64 {
        let absorbed = dot(gradient, &self.absorbed(index));
        self.ritz.neglected(n, index) - absorbed
    }
}
