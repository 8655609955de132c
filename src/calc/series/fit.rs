//! The weighted Rydberg–Ritz fit.

use super::input::LEAST_SIGMA_PER_CM;
use super::linear::{Matrix, dot, inverse, times};
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
/// Largest scatter of the defects of a regular series.
const MOST_SCATTER: f64 = 0.005;
/// Rounds in which the scatter is adjusted.
const SCATTER_ROUNDS: usize = 8;
/// Iterations after which a fit counts as failed; regular series need four to eight.
const MOST_ITERATIONS: usize = 40;

/// Size of the Ritz terms that a fit leaves out, at its lowest member: the next term has the
/// standard deviation `ratio` × the last kept (or `constant_share` × min(|δ₀|, `constant_cap`)
/// when δ₀ alone was kept), never below `floor`; each further one is smaller by `ratio`.
///
/// The values were tuned on the first half of the series of `tests/series_withheld.rs`.
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
    /// The tuned sizes.
    pub fn of_core(core: Core) -> Self {
        Self {
            ratio: match core {
                Core::Rigid => 0.25,
                Core::Soft => 0.5,
            },
            floor: 2e-6,
            constant_share: 0.3,
            constant_cap: 0.2,
            unseen_scatter: match core {
                Core::Rigid => 0.0,
                Core::Soft => 5e-4,
            },
        }
    }

    /// Standard deviation of term `index` (0 is δ₀) at the lowest member, after a fit of `kept`.
    fn deviation(&self, kept: &[f64], index: usize) -> f64 {
        let last = kept.len() - 1;
        let first_left_out = if last == 0 {
            self.constant_share * kept[0].abs().min(self.constant_cap)
        } else {
            let lower = if last > 1 { kept[last - 1].abs() * self.ratio } else { 0.0 };
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
    fn expansion(&self, n: f64) -> f64 {
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
        let x = self.expansion(n);
        let stiffness = self.stiffness_per_cm(n);
        let mut power = 1.0;
        let mut through_scale = 0.0;
        let mut gradient = Vec::with_capacity(self.scaled.len() + 1);
        for (k, c) in self.scaled.iter().enumerate() {
            gradient.push(stiffness * power);
            through_scale += k as f64 * c * power;
            power *= x;
        }
        // x itself moves with c₀: dx/dc₀ = 2x/(n − c₀).
        gradient[0] += stiffness * through_scale * 2.0 / (n - self.scaled[0]);
        gradient.push(1.0);
        gradient
    }

    /// Change of the energy with a term that was left out.
    pub fn neglected(&self, n: f64, index: usize) -> f64 {
        self.stiffness_per_cm(n) * self.expansion(n).powi(index as i32)
    }
}

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
    /// Schwarz's criterion χ² + Σ ln σ² + k ln N (Schwarz 1978, Ann. Stat. 6, 461) for each number of
    /// terms tried, beginning with one.
    pub information: Vec<f64>,
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
    fit_with(input, NeglectedTerms::of_core(input.core))
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
        let lower = terms[1..k].iter().fold(NEGLIGIBLE_TERM, |m, c| c.abs().max(m));
        let ratio = terms[k].abs() / lower;
        if ratio > REGULAR_RATIO {
            return refuse(ratio);
        }
    }
    if fit.defect_scatter > MOST_SCATTER {
        return refuse(fit.defect_scatter / MOST_SCATTER);
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

/// A member with the σ that the fit gives it.
#[derive(Clone, Copy, Debug)]
struct Datum {
    n: f64,
    energy_per_cm: f64,
    sigma_per_cm: f64,
}

/// A solution of one order.
struct Solution {
    schwarz: f64,
    ritz: Ritz,
    covariance: Matrix,
    chi_squared: f64,
    scatter: f64,
    data: Vec<Datum>,
}

/// Members needed, and members that must be left over beyond the Ritz terms.
fn demands(input: &SeriesInput, members: usize) -> (usize, usize) {
    match (input.core, input.limit) {
        (Core::Rigid, Limit::Fixed { .. }) => (2, usize::from(members > 3)),
        (Core::Rigid, Limit::Fitted { .. }) => (4, 2),
        (Core::Soft, Limit::Fixed { .. }) => (4, 2),
        (Core::Soft, Limit::Fitted { .. }) => (5, 3),
    }
}

/// The order that Schwarz's criterion prefers.
fn best_order(
    input: &SeriesInput,
    members: &[Member],
    neglected: NeglectedTerms,
) -> Result<SeriesFit, SeriesError> {
    let (needed, spare) = demands(input, members.len());
    if members.len() < needed {
        return Err(SeriesError::TooFewMembers {
            held: members.len(),
            needed,
        });
    }
    let most = (members.len() - spare).min(MOST_TERMS);
    let solutions: Vec<Solution> = (1..=most)
        .map_while(|terms| solve_order(input, members, terms))
        .collect();
    let information = solutions.iter().map(|solution| solution.schwarz).collect();
    let best = solutions
        .into_iter()
        .min_by(|a, b| a.schwarz.total_cmp(&b.schwarz))
        .ok_or(SeriesError::NoConvergence {
            members: members.len(),
        })?;
    Ok(assemble(input, members, neglected, information, best))
}

/// Solves one order; for a soft core with the scatter of the defects that makes χ² = ν.
fn solve_order(input: &SeriesInput, members: &[Member], terms: usize) -> Option<Solution> {
    let data_count = members.len() + usize::from(matches!(input.limit, Limit::Fixed { .. }));
    let freedom = data_count.saturating_sub(terms + 1) as f64;
    let mut start = first_guess(input, members, terms)?;
    let mut scatter = 0.0;
    for _ in 0..SCATTER_ROUNDS {
        let data = weighted(members, &start, scatter);
        let (ritz, covariance, chi_squared) = converge(input, &data, start)?;
        let excess = (chi_squared / freedom.max(1.0)).sqrt();
        let settled = input.core == Core::Rigid || (excess < 1.02 && scatter == 0.0);
        if settled || (excess - 1.0).abs() < 0.02 {
            return Some(finish(members, scatter, (ritz, covariance, chi_squared, data)));
        }
        scatter = if scatter == 0.0 {
            largest_residual(&data, &ritz)
        } else {
            scatter * excess.clamp(0.1, 10.0)
        };
        start = ritz;
    }
    let data = weighted(members, &start, scatter);
    let (ritz, covariance, chi_squared) = converge(input, &data, start)?;
    Some(finish(members, scatter, (ritz, covariance, chi_squared, data)))
}

fn finish(
    members: &[Member],
    scatter: f64,
    (ritz, covariance, chi_squared, data): (Ritz, Matrix, f64, Vec<Datum>),
) -> Solution {
    // Without scatter Σ ln σ² is the same for every order, and drops out.
    let spread: f64 = data
        .iter()
        .zip(members)
        .map(|(datum, member)| 2.0 * (datum.sigma_per_cm / sigma_per_cm(member)).ln())
        .sum();
    Solution {
        schwarz: chi_squared + spread + ritz.scaled.len() as f64 * (members.len() as f64).ln(),
        ritz,
        covariance,
        chi_squared,
        scatter,
        data,
    }
}

fn weighted(members: &[Member], ritz: &Ritz, scatter: f64) -> Vec<Datum> {
    members
        .iter()
        .map(|member| {
            let n = f64::from(member.n);
            Datum {
                n,
                energy_per_cm: member.energy_per_cm,
                sigma_per_cm: sigma_per_cm(member).hypot(ritz.stiffness_per_cm(n) * scatter),
            }
        })
        .collect()
}

fn largest_residual(data: &[Datum], ritz: &Ritz) -> f64 {
    data.iter()
        .map(|datum| {
            let missed = datum.energy_per_cm - ritz.energy_per_cm(datum.n);
            (missed / ritz.stiffness_per_cm(datum.n)).abs()
        })
        .fold(1e-9, f64::max)
}

/// Where the iteration starts: an unweighted polynomial through the defects that the given
/// limit yields, in powers of the reduced binding.
fn first_guess(input: &SeriesInput, members: &[Member], terms: usize) -> Option<Ritz> {
    let limit_per_cm = input.limit.given_per_cm();
    let strength_per_cm = input.strength_per_cm();
    let defects: Vec<(f64, f64)> = members
        .iter()
        .map(|member| {
            let n = f64::from(member.n);
            let binding = limit_per_cm - member.energy_per_cm;
            (n, n - (strength_per_cm / binding).sqrt())
        })
        .collect();
    let (lowest, first) = *defects.first()?;
    let last = defects.last()?.1;
    let mut ritz = Ritz {
        scaled: vec![last; 1],
        scale: (lowest - first).powi(2),
        limit_per_cm,
        strength_per_cm,
    };
    let mut normal = vec![vec![0.0; terms]; terms];
    let mut right = vec![0.0; terms];
    for (n, defect) in &defects {
        let x = ritz.expansion(*n);
        for i in 0..terms {
            right[i] += x.powi(i as i32) * defect;
            for j in 0..terms {
                normal[i][j] += x.powi((i + j) as i32);
            }
        }
    }
    ritz.scaled = times(&inverse(&normal)?, &right);
    Some(ritz)
}

/// Gauss–Newton iteration with step halving; returns the solution, its covariance and χ².
fn converge(
    input: &SeriesInput,
    data: &[Datum],
    mut ritz: Ritz,
) -> Option<(Ritz, Matrix, f64)> {
    let mut chi_squared = misfit(input, data, &ritz);
    for _ in 0..MOST_ITERATIONS {
        let (normal, right) = normal_equations(input, data, &ritz);
        let covariance = inverse(&normal)?;
        let step = times(&covariance, &right);
        let expected = dot(&step, &right);
        if expected < 1e-7 * (1.0 + chi_squared) {
            return Some((ritz, covariance, chi_squared));
        }
        let (next, value) = damped(input, data, &ritz, &step, chi_squared)?;
        ritz = next;
        chi_squared = value;
    }
    None
}

/// The first of the steps 1, ½, ¼ … that lowers χ².
fn damped(
    input: &SeriesInput,
    data: &[Datum],
    ritz: &Ritz,
    step: &[f64],
    before: f64,
) -> Option<(Ritz, f64)> {
    let mut share = 1.0;
    for _ in 0..30 {
        let mut next = ritz.clone();
        for (term, change) in next.scaled.iter_mut().zip(step) {
            *term += share * change;
        }
        next.limit_per_cm += share * step[step.len() - 1];
        let value = misfit(input, data, &next);
        // Rounding of the energies moves χ² by about 1e-10 N even at the minimum.
        if value.is_finite() && value <= before * (1.0 + 1e-12) + 1e-8 {
            return Some((next, value));
        }
        share *= 0.5;
    }
    None
}

fn sigma_per_cm(member: &Member) -> f64 {
    member.uncertainty_per_cm.max(LEAST_SIGMA_PER_CM)
}

fn misfit(input: &SeriesInput, data: &[Datum], ritz: &Ritz) -> f64 {
    let levels: f64 = data
        .iter()
        .map(|datum| {
            let model = ritz.energy_per_cm(datum.n);
            ((datum.energy_per_cm - model) / datum.sigma_per_cm).powi(2)
        })
        .sum();
    levels + limit_pull(input, ritz).powi(2)
}

fn limit_pull(input: &SeriesInput, ritz: &Ritz) -> f64 {
    match input.limit {
        Limit::Fixed { per_cm, sigma_per_cm } => {
            (per_cm - ritz.limit_per_cm) / sigma_per_cm.max(LEAST_SIGMA_PER_CM)
        }
        Limit::Fitted { .. } => 0.0,
    }
}

fn normal_equations(input: &SeriesInput, data: &[Datum], ritz: &Ritz) -> (Matrix, Vec<f64>) {
    let size = ritz.scaled.len() + 1;
    let mut normal = vec![vec![0.0; size]; size];
    let mut right = vec![0.0; size];
    for datum in data {
        let gradient = ritz.gradient(datum.n);
        let weight = datum.sigma_per_cm.powi(-2);
        let residual = datum.energy_per_cm - ritz.energy_per_cm(datum.n);
        for i in 0..size {
            right[i] += weight * gradient[i] * residual;
            for j in 0..size {
                normal[i][j] += weight * gradient[i] * gradient[j];
            }
        }
    }
    if let Limit::Fixed { sigma_per_cm, .. } = input.limit {
        let sigma = sigma_per_cm.max(LEAST_SIGMA_PER_CM);
        normal[size - 1][size - 1] += sigma.powi(-2);
        right[size - 1] += limit_pull(input, ritz) / sigma;
    }
    (normal, right)
}

fn assemble(
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
    let (coefficients, published) = unscaled(&ritz, &covariance, scale_factor);
    let limit_index = coefficients.len();
    SeriesFit {
        l: input.l,
        limit_per_cm: ritz.limit_per_cm,
        limit_sigma_per_cm: published[limit_index][limit_index].sqrt(),
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
        ritz,
        scaled_covariance: covariance,
        neglected,
    }
}

/// Coefficients of `(n − δ₀)^(−2k)` and their covariance with the limit.
fn unscaled(ritz: &Ritz, covariance: &Matrix, scale_factor: f64) -> (Vec<f64>, Matrix) {
    let terms = ritz.scaled.len();
    let unit = |k: usize| if k < terms { ritz.scale.powi(k as i32) } else { 1.0 };
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

    /// 1 σ of the energy predicted at n, cm⁻¹: fit, scale factor and neglected terms.
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
        (fitted + left_out + irregular).sqrt()
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
