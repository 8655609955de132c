//! Lines without a rate: what the prior allows them to be.

use vocabulary::spectrum::Line;

use super::emission::Emitter;
use super::scene::Scene;
use super::verdict::Verdict;
use crate::calc::prior::{self, Prior, chance_above};

/// A verdict stands where the chance that lines without a rate change it is not above this.
pub const CHANCE_CHANGED: f64 = 0.05;
/// Below this chance of the whole, a single line's part need not be counted.
const NEGLIGIBLE_SIGMAS: f64 = 5.0;

/// Light of a line by the prior for its rate.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PriorLight {
    /// The prior of the rate.
    pub prior: Prior,
    /// Median of its relative light.
    pub light: f64,
}

/// Light that a line without a rate may have; `None` where it has a rate, where no prior bounds
/// it, or where its species has no scale because none of its lines is rated.
pub fn prior_light(
    line: &Line,
    limit_per_cm: Option<f64>,
    emitter: &Emitter,
) -> Option<PriorLight> {
    if line.rate_per_s.is_some() {
        return None;
    }
    let prior = prior::prior(line, limit_per_cm?)?;
    let light = emitter.light_at_rate(line, prior.median_rate_per_s())?;
    (light > 0.0).then_some(PriorLight { prior, light })
}

/// What lines without a rate may do to one feature.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Unrated {
    /// Lines within an instrument width that nothing bounds (indices into the scene).
    pub unbounded: Vec<usize>,
    /// Lines that a prior bounds, as (index, median of its fraction, σ in decades), the likeliest
    /// to disturb first.
    pub bounded: Vec<(usize, f64, f64)>,
    /// Chance that the bounded ones together change the verdict; `None` where there are none.
    pub chance: Option<f64>,
}

impl Unrated {
    /// Lines of other species around a feature of this signal, whose rated interference fraction
    /// is known.
    pub fn around(scene: &Scene<'_>, feature: usize, reach_nm: f64, fraction: f64) -> Self {
        let target = &scene.features[feature];
        let Some(signal) = target.signal.filter(|s| *s > 0.0) else {
            return Self::default();
        };
        let width_nm = scene.width.at_nm(target.nm);
        let room = room(fraction);
        let mut out = Self::default();
        for index in scene.around(target.nm, reach_nm) {
            let emission = &scene.emissions[index];
            let present = scene.spectra[emission.spectrum].amount > 0.0;
            if emission.light.is_some() || emission.spectrum == target.spectrum || !present {
                continue;
            }
            let offset_nm = emission.nm - target.nm;
            match emission.prior {
                Some(p) => {
                    let median = p.light * emission.profile.density(offset_nm) / signal;
                    let sigma = p.prior.sigma_dex;
                    // Where no border is left to cross, lines are still listed as bounded.
                    let least = room.unwrap_or(1.0) * 10_f64.powf(-NEGLIGIBLE_SIGMAS * sigma);
                    if median > least {
                        out.bounded.push((index, median, sigma));
                    }
                }
                None if offset_nm.abs() <= width_nm => out.unbounded.push(index),
                None => {}
            }
        }
        out.settle(room);
        out
    }

    fn settle(&mut self, room: Option<f64>) {
        if self.bounded.is_empty() {
            return;
        }
        let likely = |&(_, median, sigma): &(usize, f64, f64)| {
            (room.unwrap_or(1.0) / median).log10() / sigma
        };
        self.bounded
            .sort_by(|a, b| likely(a).total_cmp(&likely(b)).then(a.0.cmp(&b.0)));
        let parts: Vec<(f64, f64)> = self.bounded.iter().map(|&(_, m, s)| (m, s)).collect();
        self.chance = Some(room.map_or(0.0, |room| chance_above(&parts, room)));
    }

    /// Whether no verdict can be given on account of them.
    pub fn decides(&self) -> bool {
        !self.unbounded.is_empty() || self.chance.is_some_and(|c| c > CHANCE_CHANGED)
    }
}

/// How much a fraction may grow before its verdict changes; `None` for one that cannot get worse.
fn room(fraction: f64) -> Option<f64> {
    let border = match Verdict::of(fraction) {
        Verdict::Clear => 0.01,
        Verdict::Tinged => 0.1,
        Verdict::Blended => 0.5,
        Verdict::Swamped | Verdict::Unrated => return None,
    };
    Some(border - fraction)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn room_is_what_is_left_to_the_next_border() {
        for (fraction, left) in [(0.0, 0.01), (0.004, 0.006), (0.02, 0.08), (0.3, 0.2)] {
            // Differences of decimal fractions: rounding only.
            assert!((room(fraction).unwrap() - left).abs() < 1e-15, "{fraction}");
        }
        assert_eq!(room(0.5), None);
        assert_eq!(room(f64::NAN), None);
    }

    #[test]
    fn likeliest_line_comes_first_and_many_weak_ones_add_up() {
        let mut few = Unrated {
            bounded: vec![(3, 1e-4, 0.5), (1, 1e-3, 0.5)],
            ..Unrated::default()
        };
        few.settle(Some(0.01));
        assert_eq!(few.bounded[0].0, 1);
        assert!(!few.decides());
        let mut many = Unrated {
            bounded: (0..40).map(|i| (i, 1e-3, 0.5)).collect(),
            ..Unrated::default()
        };
        many.settle(Some(0.01));
        assert!(many.decides());
        many.settle(None);
        assert!(!many.decides());
    }
}
