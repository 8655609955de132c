//! Rates against lifetimes: what leaves a level can be no more than its lifetime allows, and no less
//! where every way out is rated.

use vocabulary::atom::{HalfInteger, Species, Term};
use vocabulary::report::{ConcludedLevel, Reports};

use super::finding::{Finding, Place, Rule};
use crate::advise::tune::bears_name;

/// Findings begin at so many σ of rates and lifetime together.
const SIGMAS: f64 = 3.0;
/// Relative 1 σ of a rate for which none is stated.
const UNSTATED_SIGMA: f64 = 0.5;

/// A lifetime that a paper reports.
#[derive(Clone, Debug, PartialEq)]
pub struct Lifetime {
    /// Whose level.
    pub species: Species,
    /// Its configuration, without closed inner shells.
    pub configuration: String,
    /// Its term.
    pub term: String,
    /// Its J.
    pub j: HalfInteger,
    /// Lifetime, ns.
    pub lifetime_ns: f64,
    /// 1 σ, ns.
    pub uncertainty_ns: f64,
    /// The paper.
    pub paper: String,
}

impl Lifetime {
    /// Decay rate with its 1 σ, s⁻¹.
    fn rate_per_s(&self) -> (f64, f64) {
        let rate = 1e9 / self.lifetime_ns;
        (rate, rate * self.uncertainty_ns / self.lifetime_ns)
    }

    /// The level that it is about, where exactly one fits.
    fn level(&self, of: &Reports) -> Option<usize> {
        let fits = |l: &ConcludedLevel| {
            let label = (l.configuration.as_deref(), l.term.as_deref(), l.j);
            bears_name(label, &self.configuration, &self.term, self.j)
        };
        let mut fitting = (0..of.levels.len()).filter(|&l| fits(&of.levels[l]));
        let first = fitting.next()?;
        fitting.next().is_none().then_some(first)
    }
}

/// Compares sums of rates with lifetimes, source by source; how many sums were compared.
pub(super) fn check(of: &Reports, lifetimes: &[Lifetime], found: &mut Vec<Finding>) -> usize {
    let mut compared = 0;
    for lifetime in lifetimes.iter().filter(|l| l.species == of.species) {
        let Some(level) = lifetime.level(of) else {
            continue;
        };
        for source in 0..of.sources.len() {
            if let Some(sum) = Sum::of(of, source, level) {
                compared += 1;
                found.extend(sum.finding(of, source, level, lifetime));
            }
        }
    }
    compared
}

/// What one source says of the decays of a level.
struct Sum {
    rate_per_s: f64,
    variance: f64,
    lines: usize,
    /// Every level that an electric dipole line could end on has its rated line.
    complete: bool,
}

impl Sum {
    fn of(of: &Reports, source: usize, level: usize) -> Option<Self> {
        let mut sum = Self {
            rate_per_s: 0.0,
            variance: 0.0,
            lines: 0,
            complete: false,
        };
        let mut ends = Vec::new();
        for line in of.lines.iter().filter(|l| l.upper == Some(level)) {
            let mut reports = line.reports.iter().filter(|(s, _)| *s == source);
            let report = reports.next().map(|&(s, r)| &of.sources[s].lines[r]);
            let Some((rate, report)) = report.and_then(|r| Some((r.rate_per_s?, r))) else {
                continue;
            };
            let sigma = report.rate_relative_uncertainty.unwrap_or(UNSTATED_SIGMA);
            sum.rate_per_s += rate;
            sum.variance += (rate * sigma).powi(2);
            sum.lines += 1;
            ends.extend(line.lower);
        }
        sum.complete =
            ways_out(of, level).is_some_and(|ways| ways.iter().all(|w| ends.contains(w)));
        (sum.lines > 0).then_some(sum)
    }

    fn finding(
        &self,
        of: &Reports,
        source: usize,
        level: usize,
        lifetime: &Lifetime,
    ) -> Option<Finding> {
        let (allowed, sigma) = lifetime.rate_per_s();
        let off = (self.rate_per_s - allowed) / sigma.hypot(self.variance.sqrt());
        let words = if off > SIGMAS {
            "more than"
        } else if off < -SIGMAS && self.complete {
            "less than, with every way out rated,"
        } else {
            return None;
        };
        let level = &of.levels[level];
        let j = level
            .j
            .map_or_else(String::new, |j| format!(" J={}", j.value()));
        let plural = if self.lines == 1 { "rate" } else { "rates" };
        Some(Finding {
            rule: Rule::Lifetime,
            species: of.species,
            source: of.sources[source].key.to_string(),
            place: Place::whole(format!("{} level {}{j}", of.species, level.energy_per_cm)),
            size: self.rate_per_s / allowed,
            unit: "times",
            advice: format!(
                "its {} {plural} out of this level add up to {:.3e} s-1, {words} the lifetime of {} \
                 ± {} ns allows ({}): look for a factor, or for a line that is too strong or missing",
                self.lines,
                self.rate_per_s,
                lifetime.lifetime_ns,
                lifetime.uncertainty_ns,
                lifetime.paper
            ),
        })
    }
}

/// Lower levels that an electric dipole line could end on; `None` where parity or J of one is not
/// known.
fn ways_out(of: &Reports, level: usize) -> Option<Vec<usize>> {
    let parity = |l: &ConcludedLevel| Term::parse(l.term.as_deref()?).parity();
    let upper = &of.levels[level];
    let (own, j) = (parity(upper)?, upper.j?);
    let mut ways = Vec::new();
    for (number, lower) in of.levels.iter().enumerate() {
        if lower.energy_per_cm >= upper.energy_per_cm {
            continue;
        }
        let (other, lower_j) = (parity(lower)?, lower.j?);
        let step = j.twice().abs_diff(lower_j.twice());
        if other != own && step <= 2 && j.twice() + lower_j.twice() >= 2 {
            ways.push(number);
        }
    }
    Some(ways)
}
