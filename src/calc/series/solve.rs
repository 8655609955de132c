//! Least squares of one order, and the choice among orders.

use super::fit::{MOST_TERMS, assemble};
use super::input::LEAST_SIGMA_PER_CM;
use super::linear::{Matrix, dot, inverse, times};
use super::ritz::{NeglectedTerms, Ritz};
use super::{Core, Limit, Member, SeriesError, SeriesFit, SeriesInput};

/// Rounds in which the scatter is adjusted.
const SCATTER_ROUNDS: usize = 8;
/// Iterations after which a fit counts as failed; regular series need four to eight.
const MOST_ITERATIONS: usize = 40;

/// A member with the σ that the fit gives it.
#[derive(Clone, Copy, Debug)]
pub(super) struct Datum {
    pub n: f64,
    pub energy_per_cm: f64,
    pub sigma_per_cm: f64,
}

/// A solution of one order.
pub(super) struct Solution {
    pub schwarz: f64,
    pub ritz: Ritz,
    pub covariance: Matrix,
    pub chi_squared: f64,
    pub scatter: f64,
    pub data: Vec<Datum>,
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
pub(super) fn best_order(
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
            return Some(finish(
                members,
                scatter,
                (ritz, covariance, chi_squared, data),
            ));
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
    Some(finish(
        members,
        scatter,
        (ritz, covariance, chi_squared, data),
    ))
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
        let powers: Vec<f64> = (0..terms).map(|k| x.powi(k as i32)).collect();
        accumulate(&mut normal, &mut right, &powers, 1.0, *defect);
    }
    ritz.scaled = times(&inverse(&normal)?, &right);
    Some(ritz)
}

/// Gauss–Newton iteration with step halving; returns the solution, its covariance and χ².
fn converge(input: &SeriesInput, data: &[Datum], mut ritz: Ritz) -> Option<(Ritz, Matrix, f64)> {
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
        Limit::Fixed {
            per_cm,
            sigma_per_cm,
        } => (per_cm - ritz.limit_per_cm) / sigma_per_cm.max(LEAST_SIGMA_PER_CM),
        Limit::Fitted { .. } => 0.0,
    }
}

fn normal_equations(input: &SeriesInput, data: &[Datum], ritz: &Ritz) -> (Matrix, Vec<f64>) {
    let size = ritz.scaled.len() + 1;
    let mut normal = vec![vec![0.0; size]; size];
    let mut right = vec![0.0; size];
    let mut gradient = Vec::with_capacity(size);
    for datum in data {
        ritz.gradient_into(datum.n, &mut gradient);
        let weight = datum.sigma_per_cm.powi(-2);
        let residual = datum.energy_per_cm - ritz.energy_per_cm(datum.n);
        accumulate(&mut normal, &mut right, &gradient, weight, residual);
    }
    if let Limit::Fixed { sigma_per_cm, .. } = input.limit {
        let sigma = sigma_per_cm.max(LEAST_SIGMA_PER_CM);
        normal[size - 1][size - 1] += sigma.powi(-2);
        right[size - 1] += limit_pull(input, ritz) / sigma;
    }
    (normal, right)
}

/// Adds one datum to the normal equations.
fn accumulate(
    normal: &mut Matrix,
    right: &mut [f64],
    gradient: &[f64],
    weight: f64,
    residual: f64,
) {
    for ((row, sum), slope) in normal.iter_mut().zip(right).zip(gradient) {
        *sum += weight * slope * residual;
        for (cell, other) in row.iter_mut().zip(gradient) {
            *cell += weight * slope * other;
        }
    }
}
