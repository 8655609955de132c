//! Two sources side by side: which lines both have, how their positions and rates compare.
//!
//! Reports of one line are those that the catalogue joined. Where two sources differ so much that
//! their lines did not join, lines that the index of air brings together are paired as well.

use std::collections::HashMap;

use vocabulary::atom::Species;
use vocabulary::light::Air;
use vocabulary::report::{ReportedLine, ReportedSource, Reports};

use super::median::{median, spread};

/// A line that both sources have; ratios and differences are the second against the first.
#[derive(Clone, Debug, PartialEq)]
pub struct Pair {
    /// Whose.
    pub species: Species,
    /// Position in the first source, cm⁻¹.
    pub wavenumber_per_cm: f64,
    /// Position of the second less that of the first, cm⁻¹.
    pub offset_per_cm: f64,
    /// Combined 1 σ of the offset, cm⁻¹.
    pub offset_uncertainty_per_cm: f64,
    /// Rate of the first, s⁻¹.
    pub rate_per_s: Option<f64>,
    /// Rate of the second over that of the first.
    pub rate_ratio: Option<f64>,
    /// Rows of the two tables.
    pub rows: (u64, u64),
}

impl Pair {
    /// Vacuum wavelength in the first source, nm.
    pub fn vacuum_nm(&self) -> f64 {
        1e7 / self.wavenumber_per_cm
    }

    /// Offset as a wavelength, nm: positive where the second source has the longer one.
    pub fn offset_nm(&self) -> f64 {
        1e7 / (self.wavenumber_per_cm + self.offset_per_cm) - self.vacuum_nm()
    }

    /// Offset in units of its σ.
    pub fn pull(&self) -> f64 {
        self.offset_per_cm / self.offset_uncertainty_per_cm.max(f64::MIN_POSITIVE)
    }

    /// Factor between the rates, never below 1.
    pub fn rate_factor(&self) -> Option<f64> {
        self.rate_ratio.map(|r| r.max(1.0 / r))
    }
}

/// How a set of pairs compares.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Comparison {
    /// Lines in both.
    pub both: usize,
    /// Lines only in the first.
    pub only_first: usize,
    /// Lines only in the second.
    pub only_second: usize,
    /// Median offset, nm.
    pub offset_nm: Option<f64>,
    /// Robust spread of the offsets (1 σ), nm.
    pub offset_spread_nm: Option<f64>,
    /// Pairs beyond 3 combined σ.
    pub beyond_three_sigma: usize,
    /// Pairs with a rate in both.
    pub rated: usize,
    /// Median of the rate ratio.
    pub rate_ratio: Option<f64>,
    /// Robust spread of the rate ratio (1 σ), dex.
    pub rate_spread_dex: Option<f64>,
    /// Pairs whose rates differ by more than 25 %.
    pub beyond_quarter: usize,
}

/// Rate ratios of lines of like strength.
#[derive(Clone, Debug, PartialEq)]
pub struct Decade {
    /// Rates of the first source from 10^this up to ten times as much, s⁻¹.
    pub exponent: i32,
    /// Pairs.
    pub lines: usize,
    /// Median ratio.
    pub rate_ratio: f64,
    /// Robust spread, dex.
    pub rate_spread_dex: f64,
}

/// What the offsets look like as a whole.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Trend {
    /// Too few lines to tell.
    TooFew,
    /// No offset that most lines share.
    None,
    /// The second source has wavelengths in air where the first has vacuum.
    SecondInAir,
    /// The first source has wavelengths in air where the second has vacuum.
    FirstInAir,
    /// All wavelengths differ by one fraction of themselves (a calibration).
    Relative(f64),
    /// All wavelengths differ by one length, nm (a zero point).
    Constant(f64),
    /// All wavenumbers differ by one amount, cm⁻¹ (a ground level or a scale).
    ConstantPerCm(f64),
}

/// The answer.
#[derive(Clone, Debug, PartialEq)]
pub struct Contrast {
    /// Keys of the two sources.
    pub keys: (String, String),
    /// Per species that at least one of them has lines of.
    pub species: Vec<(Species, Comparison)>,
    /// All together.
    pub total: Comparison,
    /// By strength.
    pub decades: Vec<Decade>,
    /// What the offsets look like.
    pub trend: Trend,
    /// The ten pairs that lie furthest apart, in σ.
    pub worst_positions: Vec<Pair>,
    /// The ten pairs whose rates differ most.
    pub worst_rates: Vec<Pair>,
}

/// How many of the worst are kept.
const WORST: usize = 10;

/// Compares two sources over all species.
pub fn contrast(reports: &[Reports], first: &str, second: &str) -> Contrast {
    let mut all = Vec::new();
    let mut species = Vec::new();
    let mut only = (0, 0);
    for of in reports {
        let at = |key: &str| of.sources.iter().position(|s| *s.key == *key);
        let sides = (at(first), at(second));
        if sides == (None, None) {
            continue;
        }
        let (pairs, alone) = pairs_of(of, sides.0, sides.1);
        if pairs.is_empty() && alone == (0, 0) {
            continue;
        }
        only = (only.0 + alone.0, only.1 + alone.1);
        species.push((of.species, comparison(&pairs, alone)));
        all.extend(pairs);
    }
    Contrast {
        keys: (first.to_owned(), second.to_owned()),
        total: comparison(&all, only),
        species,
        decades: decades(&all),
        trend: trend(&all),
        worst_positions: worst(&all, |p| Some(p.pull().abs())),
        worst_rates: worst(&all, |p| p.rate_factor().map(f64::ln)),
    }
}

/// Pairs of one species, and how many lines only one side has.
fn pairs_of(
    of: &Reports,
    first: Option<usize>,
    second: Option<usize>,
) -> (Vec<Pair>, (usize, usize)) {
    let lines = |side: Option<usize>| side.map_or(&[][..], |s| &of.sources[s].lines);
    let (Some(a), Some(b)) = (first, second) else {
        return (Vec::new(), (lines(first).len(), lines(second).len()));
    };
    let (one, other) = (&of.sources[a], &of.sources[b]);
    let mut by_line: HashMap<usize, Vec<usize>> = HashMap::new();
    for (at, line) in other.lines.iter().enumerate().rev() {
        if let Some(joined) = line.joined {
            by_line.entry(joined).or_default().push(at);
        }
    }
    let mut used = vec![false; other.lines.len()];
    let mut pairs = Vec::new();
    let mut alone = Vec::new();
    for line in &one.lines {
        let partner = line
            .joined
            .and_then(|joined| by_line.get_mut(&joined)?.pop());
        match partner.and_then(|i| Some((i, pair(of, (one, line), (other, &other.lines[i]))?))) {
            Some((i, pair)) => {
                used[i] = true;
                pairs.push(pair);
            }
            None => alone.push(line),
        }
    }
    let left: Vec<&ReportedLine> = other
        .lines
        .iter()
        .zip(&used)
        .filter_map(|(line, used)| (!used).then_some(line))
        .collect();
    let shifted = through_air(of, (one, &alone), (other, &left));
    let counts = (alone.len() - shifted.len(), left.len() - shifted.len());
    pairs.extend(shifted);
    (pairs, counts)
}

/// Lines of two sources that meet once the index of air is applied to one of them; none unless
/// most of the smaller side does.
fn through_air(
    of: &Reports,
    (one, alone): (&ReportedSource, &[&ReportedLine]),
    (other, left): (&ReportedSource, &[&ReportedLine]),
) -> Vec<Pair> {
    let paired = |sign: i32| -> Vec<Pair> {
        let mut used = vec![false; left.len()];
        let mut pairs = Vec::new();
        for line in alone {
            let Some(pair) = left.iter().enumerate().find_map(|(i, partner)| {
                let pair = pair(of, (one, line), (other, partner))?;
                let index = Air::standard().index(pair.vacuum_nm()).ok()?.index;
                let expected = pair.wavenumber_per_cm * (index.powi(sign) - 1.0);
                let near =
                    (pair.offset_per_cm - expected).abs() <= 3.0 * pair.offset_uncertainty_per_cm;
                (near && !std::mem::replace(&mut used[i], true)).then_some(pair)
            }) else {
                continue;
            };
            pairs.push(pair);
        }
        pairs
    };
    let (in_air, in_vacuum) = (paired(1), paired(-1));
    let more = if in_air.len() >= in_vacuum.len() {
        in_air
    } else {
        in_vacuum
    };
    let smaller = alone.len().min(left.len()) as f64;
    if more.len() >= LEAST_FOR_A_TREND && more.len() as f64 >= MOST_OF * smaller {
        more
    } else {
        Vec::new()
    }
}

type Side<'r> = (&'r ReportedSource, &'r ReportedLine);

fn pair(of: &Reports, first: Side<'_>, second: Side<'_>) -> Option<Pair> {
    let (w1, u1) = first
        .0
        .position(first.1)
        .or_else(|| concluded(of, first.1))?;
    let (w2, u2) = second.0.position(second.1).unwrap_or((w1, u1));
    let rates = first.1.rate_per_s.zip(second.1.rate_per_s);
    Some(Pair {
        species: of.species,
        wavenumber_per_cm: w1,
        offset_per_cm: w2 - w1,
        offset_uncertainty_per_cm: u1.hypot(u2),
        rate_per_s: first.1.rate_per_s,
        rate_ratio: rates
            .filter(|(a, b)| *a > 0.0 && *b > 0.0)
            .map(|(a, b)| b / a),
        rows: (first.1.row, second.1.row),
    })
}

/// Where a source that gives rates alone has its line.
fn concluded(of: &Reports, line: &ReportedLine) -> Option<(f64, f64)> {
    let line = &of.lines[line.joined?];
    Some((line.wavenumber_per_cm, line.uncertainty_per_cm))
}

fn comparison(pairs: &[Pair], (only_first, only_second): (usize, usize)) -> Comparison {
    let offsets = pairs.iter().map(Pair::offset_nm);
    let logs = pairs.iter().filter_map(|p| p.rate_ratio).map(f64::log10);
    Comparison {
        both: pairs.len(),
        only_first,
        only_second,
        offset_nm: median(offsets.clone()),
        offset_spread_nm: spread(offsets),
        beyond_three_sigma: pairs.iter().filter(|p| p.pull().abs() > 3.0).count(),
        rated: logs.clone().count(),
        rate_ratio: median(logs.clone()).map(|m| 10f64.powf(m)),
        rate_spread_dex: spread(logs),
        beyond_quarter: pairs
            .iter()
            .filter(|p| p.rate_factor().is_some_and(|f| f > 1.25))
            .count(),
    }
}

fn decades(pairs: &[Pair]) -> Vec<Decade> {
    let mut by: std::collections::BTreeMap<i32, Vec<f64>> = std::collections::BTreeMap::new();
    for pair in pairs {
        if let Some((rate, ratio)) = pair.rate_per_s.zip(pair.rate_ratio) {
            by.entry(rate.log10().floor() as i32)
                .or_default()
                .push(ratio.log10());
        }
    }
    by.into_iter()
        .rev()
        .filter_map(|(exponent, logs)| {
            Some(Decade {
                exponent,
                lines: logs.len(),
                rate_ratio: 10f64.powf(median(logs.iter().copied())?),
                rate_spread_dex: spread(logs.iter().copied())?,
            })
        })
        .collect()
}

fn worst(pairs: &[Pair], size: impl Fn(&Pair) -> Option<f64>) -> Vec<Pair> {
    let mut sized: Vec<(f64, &Pair)> = pairs
        .iter()
        .filter_map(|p| Some((size(p)?, p)))
        .filter(|(s, _)| *s > 0.0)
        .collect();
    sized.sort_by(|a, b| b.0.total_cmp(&a.0).then(a.1.rows.cmp(&b.1.rows)));
    sized.truncate(WORST);
    sized.into_iter().map(|(_, p)| p.clone()).collect()
}

/// Pairs from which a trend can be told.
const LEAST_FOR_A_TREND: usize = 4;
/// Part of the pairs that must follow it.
const MOST_OF: f64 = 0.7;

/// What an offset (cm⁻¹) is proportional to.
type Shape = fn(&Pair) -> Option<f64>;

/// A shape and what its scale means.
type Kind = (Shape, fn(f64) -> Trend);

fn refractivity(pair: &Pair) -> Option<f64> {
    let index = Air::standard().index(pair.vacuum_nm()).ok()?;
    Some(index.index - 1.0)
}

/// One cause that explains most offsets: the index of air, a factor, a length, a wavenumber. Of
/// several that do, the first, which says most.
fn trend(pairs: &[Pair]) -> Trend {
    if pairs.len() < LEAST_FOR_A_TREND {
        return Trend::TooFew;
    }
    let kinds: [Kind; 4] = [
        // The wavenumber of an air wavelength taken for vacuum is too large by σ (n − 1).
        (
            |p| refractivity(p).map(|r| r * p.wavenumber_per_cm),
            |scale| match scale {
                s if (s - 1.0).abs() < 0.15 => Trend::SecondInAir,
                s if (s + 1.0).abs() < 0.15 => Trend::FirstInAir,
                _ => Trend::None,
            },
        ),
        (|p| Some(p.wavenumber_per_cm), |s| Trend::Relative(-s)),
        (|_| Some(1.0), Trend::ConstantPerCm),
        (
            |p| Some(-1e-7 * p.wavenumber_per_cm.powi(2)),
            Trend::Constant,
        ),
    ];
    let found = kinds
        .into_iter()
        .filter_map(|(shape, name)| follow(pairs, shape).map(|(share, s)| (share, name(s))))
        .filter(|(_, trend)| *trend != Trend::None);
    found
        .reduce(|best, next| if next.0 > best.0 + 0.05 { next } else { best })
        .map_or(Trend::None, |(_, trend)| trend)
}

/// The factor on a shape that most offsets follow within 3 σ, and which part of them; `None`
/// where the factor does not stand out of its scatter (5 σ of the median) or is small against
/// the uncertainty of single lines.
fn follow(pairs: &[Pair], shape: Shape) -> Option<(f64, f64)> {
    let shaped: Vec<(&Pair, f64)> = pairs.iter().filter_map(|p| Some((p, shape(p)?))).collect();
    if shaped.len() < LEAST_FOR_A_TREND {
        return None;
    }
    let all = shaped.len() as f64;
    let factors = shaped.iter().map(|(p, s)| p.offset_per_cm / s);
    let scale = median(factors.clone())?;
    let error = spread(factors)? / all.sqrt();
    let pull = median(
        shaped
            .iter()
            .map(|(p, s)| (scale * s).abs() / p.offset_uncertainty_per_cm.max(1e-9)),
    )?;
    let real = scale.abs() > 5.0 * error && pull > 0.5;
    let near = |(p, s): &&(&Pair, f64)| {
        (p.offset_per_cm - scale * s).abs() <= 3.0 * p.offset_uncertainty_per_cm
    };
    let share = shaped.iter().filter(near).count() as f64 / all;
    (real && share >= MOST_OF).then_some((share, scale))
}
