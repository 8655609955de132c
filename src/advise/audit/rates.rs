//! Rates against rates: a common factor, the ratio of weights, more strength than electrons.

use vocabulary::atom::HalfInteger;
use vocabulary::report::{ReportedLine, ReportedSource, Reports};
use vocabulary::spectrum::RateOrigin;

use super::finding::{Finding, Place, Rule};
use crate::advise::median::median;

/// Lines from which a common factor can be told from chance.
const LEAST_LINES: usize = 4;
/// Part of the lines that must show it.
const MOST_OF: f64 = 0.75;
/// How far from the common factor a line may lie, relative.
const FACTOR_WIDTH: f64 = 0.15;
/// Factors up to this are ordinary disagreement of two scales.
const ORDINARY_FACTOR: f64 = 1.5;

pub(super) fn check(of: &Reports, found: &mut Vec<Finding>) {
    let pairs = common_factors(of);
    let mut blamed = Vec::new();
    for pair in &pairs {
        let (a, b) = (pair.first, pair.second);
        let votes = |s: usize| {
            pairs
                .iter()
                .filter(|p| p.first == s || p.second == s)
                .count()
        };
        let guilty = if votes(a) > votes(b) { a } else { b };
        if !blamed.contains(&guilty) {
            blamed.push(guilty);
            found.push(pair.finding(of, guilty));
        }
    }
    for source in &of.sources {
        found.extend(strength_sum(of, source));
    }
}

/// Two sources whose rates differ by one factor.
struct Pair {
    first: usize,
    second: usize,
    /// Second over first; of the weights where `weights` is set.
    factor: f64,
    weights: bool,
    lines: usize,
    of: usize,
}

/// Ratio of two rates of one line, and of its weights.
struct Ratio {
    rates: f64,
    weights: Option<f64>,
}

fn common_factors(of: &Reports) -> Vec<Pair> {
    let mut pairs = Vec::new();
    for first in 0..of.sources.len() {
        for second in first + 1..of.sources.len() {
            let ratios = ratios(of, first, second);
            pairs.extend(
                by_weights(first, second, &ratios).or_else(|| by_one(first, second, &ratios)),
            );
        }
    }
    pairs
}

fn ratios(of: &Reports, first: usize, second: usize) -> Vec<Ratio> {
    let rated = |source: usize, line: &[(usize, usize)]| {
        line.iter()
            .find(|(s, _)| *s == source)
            .map(|&(s, l)| &of.sources[s].lines[l])
            .filter(|l| l.rate_origin != Some(RateOrigin::Derived))
            .and_then(|l| l.rate_per_s.filter(|r| *r > 0.0))
    };
    let weight = |level: Option<usize>| of.levels[level?].j.map(HalfInteger::weight);
    of.lines
        .iter()
        .filter_map(|line| {
            let rates = rated(second, &line.reports)? / rated(first, &line.reports)?;
            let weights = weight(line.lower).zip(weight(line.upper));
            Some(Ratio {
                rates,
                weights: weights.map(|(l, u)| u / l),
            })
        })
        .collect()
}

fn near(ratio: f64, factor: f64, width: f64) -> bool {
    (ratio / factor).ln().abs() <= width
}

fn by_one(first: usize, second: usize, ratios: &[Ratio]) -> Option<Pair> {
    let factor = median(ratios.iter().map(|r| r.rates))?;
    let alike = ratios
        .iter()
        .filter(|r| near(r.rates, factor, FACTOR_WIDTH))
        .count();
    let common = alike >= LEAST_LINES && alike as f64 >= MOST_OF * ratios.len() as f64;
    (common && factor.max(1.0 / factor) > ORDINARY_FACTOR).then_some(Pair {
        first,
        second,
        factor,
        weights: false,
        lines: alike,
        of: ratios.len(),
    })
}

/// Rates converted from f or gf with the wrong weight differ by g_u / g_l, line by line.
fn by_weights(first: usize, second: usize, ratios: &[Ratio]) -> Option<Pair> {
    let unequal: Vec<(f64, f64)> = ratios
        .iter()
        .filter_map(|r| Some((r.rates, r.weights?)))
        .filter(|(_, w)| (w - 1.0).abs() > 0.05)
        .collect();
    let distinct = |w: f64| {
        unequal
            .iter()
            .any(|(_, other)| (other / w).ln().abs() > 0.2)
    };
    [1.0, -1.0].into_iter().find_map(|power: f64| {
        let alike = unequal
            .iter()
            .filter(|(rates, w)| near(*rates, w.powf(power), 0.03))
            .count();
        let common = alike >= LEAST_LINES && alike as f64 >= MOST_OF * unequal.len() as f64;
        // One ratio of weights alone could as well be one common factor.
        (common && distinct(unequal[0].1)).then_some(Pair {
            first,
            second,
            factor: power,
            weights: true,
            lines: alike,
            of: unequal.len(),
        })
    })
}

impl Pair {
    fn finding(&self, of: &Reports, guilty: usize) -> Finding {
        let other = if guilty == self.first {
            self.second
        } else {
            self.first
        };
        let key = |s: usize| of.sources[s].key.to_string();
        let forward = guilty == self.second;
        let factor = if forward {
            self.factor
        } else {
            1.0 / self.factor
        };
        let (rule, size, unit, what) = if self.weights {
            let words = if forward == (self.factor > 0.0) {
                "upper over lower"
            } else {
                "lower over upper"
            };
            let what = format!(
                "its rates are those of {} times the weights, {words}, for {} of {} lines: f or gf \
                 was converted with the weight of the wrong level",
                key(other),
                self.lines,
                self.of
            );
            (Rule::WeightFactor, 1.0, "weight ratio", what)
        } else {
            let what = format!(
                "its rates are {factor:.2} times those of {} for {} of {} lines: find the factor \
                 that one of the two has put in (unit, weight, sum over components)",
                key(other),
                self.lines,
                self.of
            );
            (Rule::RateScale, factor, "times", what)
        };
        Finding {
            rule,
            species: of.species,
            source: key(guilty),
            place: Place::whole(format!("{}, {} rates", of.species, self.lines)),
            size,
            unit,
            advice: what,
        }
    }
}

/// f = 1.4992 cm²/s · (g_u/g_l) A / σ² (Cowan 1981, ch. 14; CODATA 2022 constants).
const STRENGTH_CM2_PER_S: f64 = 1.499_194;

/// The oscillator strengths of all lines from the ground level add up to at most the number of
/// electrons (Thomas, Reiche and Kuhn; Kuhn 1925, Z. Phys. 33, 408).
fn strength_sum(of: &Reports, source: &ReportedSource) -> Option<Finding> {
    let electrons = f64::from(of.species.atomic_number + 1 - of.species.stage);
    let strength = |line: &ReportedLine| {
        let (lower, upper) = source.ends(line)?;
        let (wavenumber, _) = source.position(line)?;
        let weights = upper.j?.weight() / lower.j?.weight();
        (lower.energy_per_cm == 0.0)
            .then_some(STRENGTH_CM2_PER_S * weights * line.rate_per_s? / wavenumber.powi(2))
    };
    let mut seen = std::collections::BTreeSet::new();
    let sum: f64 = source
        .lines
        .iter()
        .filter(|l| seen.insert((l.lower, l.upper)))
        .filter_map(strength)
        .sum();
    (sum > 1.1 * electrons).then(|| Finding {
        rule: Rule::StrengthSum,
        species: of.species,
        source: source.key.to_string(),
        place: Place::whole(format!("{}, rates from the ground level", of.species)),
        size: sum / electrons,
        unit: "times",
        advice: format!(
            "their oscillator strengths add up to {sum:.2}, and there are {electrons} electrons: \
             look for a factor in the rates"
        ),
    })
}
