//! Learning the table: rated lines, weighted least squares, σ from ions left out one by one.

use std::collections::BTreeMap;
use std::path::Path;

use lineclear::calc::prior::{AtomClass, Features, Group, TransitionKind, log10_strength_per_rate};
use lineclear::catalogue::Catalogue;
use lineclear::vocabulary::atom::{Species, limit};
use lineclear::vocabulary::spectrum::{LineKind, RateOrigin};

/// A line whose rate a table gives.
pub struct Rated {
    pub species: Species,
    pub features: Features,
    /// log₁₀ of its strength.
    pub strength: f64,
}

impl Rated {
    /// Distance from what a group says, in σ.
    pub fn deviation(&self, group: &Group) -> f64 {
        (self.strength - group.strength(&self.features)) / group.sigma_dex
    }
}

/// Half of all ions, by a rule that no table changes. Neighbours in charge and in number of
/// electrons fall into different halves.
pub const fn teaches(species: Species) -> bool {
    ((species.atomic_number >> 1) + species.stage).is_multiple_of(2)
}

/// All lines of elements of natural mixture with a published rate and two bound levels.
pub fn rated_lines(path: &Path) -> Vec<Rated> {
    let catalogue = Catalogue::open(path).unwrap();
    let mut out = Vec::new();
    for species in catalogue.species().unwrap() {
        let Some(limit) = limit(species) else {
            continue;
        };
        if species.isotope.is_some() || species.is_one_electron() {
            continue;
        }
        let levels = catalogue.levels(species).unwrap();
        for line in catalogue.lines(species, &levels, 0.0, f64::MAX).unwrap() {
            let published = line.kind == LineKind::Line
                && matches!(
                    line.rate_origin,
                    Some(RateOrigin::Published | RateOrigin::Derived)
                );
            let features = Features::of(&line, limit.energy_per_cm);
            let (Some(features), Some(rate), true) = (features, line.rate_per_s, published) else {
                continue;
            };
            let per_rate = log10_strength_per_rate(&line, features.kind);
            if let Some(per_rate) = per_rate.filter(|_| rate > 0.0) {
                out.push(Rated {
                    species,
                    features,
                    strength: rate.log10() + per_rate,
                });
            }
        }
    }
    out
}

/// A line of middling features.
pub fn typical(kind: TransitionKind) -> Features {
    Features {
        class: AtomClass::OpenP,
        kind,
        log10_share: -0.5,
        log10_n_upper: 0.5,
        log10_n_lower: 0.2,
        log10_z: 1.3,
    }
}

/// Fits a group to lines.
pub fn learn(group: &Group, lines: &[&Rated]) -> Group {
    let mut ions: BTreeMap<Species, Vec<&Rated>> = BTreeMap::new();
    for line in lines {
        ions.entry(line.species).or_default().push(line);
    }
    let mut residuals = Vec::new();
    for (left_out, of) in &ions {
        let others = ions.iter().filter(|(ion, _)| *ion != left_out);
        let fitted = fit(group, others.map(|(_, lines)| lines.as_slice()));
        let weight = (of.len() as f64).powf(-0.5);
        residuals.extend(of.iter().map(|line| {
            (
                (line.strength - fitted.strength(&line.features)).abs(),
                weight,
            )
        }));
    }
    let sigma_dex =
        weighted_quantile(&mut residuals, 0.68).max(0.5 * weighted_quantile(&mut residuals, 0.95));
    Group {
        sigma_dex,
        ..fit(group, ions.values().map(Vec::as_slice))
    }
}

/// Least squares; an ion of n lines weighs √n. A slight pull towards zero keeps coefficients that
/// the lines do not determine in bounds.
fn fit<'l>(group: &Group, ions: impl Iterator<Item = &'l [&'l Rated]>) -> Group {
    const PULL: f64 = 0.1;
    let fitted = Group::fitted(group.kind);
    let n = fitted.len();
    let mut matrix = vec![vec![0.0; n + 1]; n];
    for lines in ions {
        let weight = (lines.len() as f64).powf(-0.5);
        for line in lines {
            let terms = Group::terms(&line.features);
            for row in 0..n {
                for column in 0..n {
                    matrix[row][column] += weight * terms[fitted[row]] * terms[fitted[column]];
                }
                matrix[row][n] += weight * terms[fitted[row]] * line.strength;
            }
        }
    }
    for (row, equation) in matrix.iter_mut().enumerate().skip(1) {
        equation[row] += PULL;
    }
    let mut coefficients = [0.0; 5];
    for (solved, &place) in solve(matrix).into_iter().zip(fitted) {
        coefficients[place] = solved;
    }
    Group {
        coefficients,
        ..*group
    }
}

/// Gaussian elimination of a positive definite system.
fn solve(mut matrix: Vec<Vec<f64>>) -> Vec<f64> {
    let n = matrix.len();
    for pivot in 0..n {
        let row = matrix[pivot].clone();
        for (other, equation) in matrix.iter_mut().enumerate() {
            if other != pivot {
                let factor = equation[pivot] / row[pivot];
                for (cell, from) in equation.iter_mut().zip(&row) {
                    *cell -= factor * from;
                }
            }
        }
    }
    (0..n).map(|i| matrix[i][n] / matrix[i][i]).collect()
}

fn weighted_quantile(values: &mut [(f64, f64)], part: f64) -> f64 {
    values.sort_by(|a, b| a.0.total_cmp(&b.0));
    let total: f64 = values.iter().map(|v| v.1).sum();
    let mut sum = 0.0;
    for &(value, weight) in values.iter() {
        sum += weight;
        if sum >= part * total {
            return value;
        }
    }
    f64::NAN
}

pub fn quantile(values: &mut [f64], part: f64) -> f64 {
    values.sort_by(f64::total_cmp);
    values[(part * (values.len() - 1) as f64) as usize]
}

/// Parts within 1 σ and 2 σ.
pub fn coverage(deviations: &[f64]) -> (f64, f64) {
    let within = |sigma: f64| {
        let count = deviations.iter().filter(|d| d.abs() <= sigma).count();
        count as f64 / deviations.len() as f64
    };
    (within(1.0), within(2.0))
}
