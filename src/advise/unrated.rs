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

/// Light of a line that is not known but bounded: log-normal.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PriorLight {
    /// The prior of its rate, where that is not known.
    pub rate: Option<Prior>,
    /// Median of its relative light.
    pub light: f64,
    /// 1 σ of it, decades.
    pub sigma_dex: f64,
}

/// Light that a line may have whose rate is not known, or whose upper level nothing in the model
/// excites; `None` where its light is known, where no prior bounds it, or where its species has no
/// scale because none of its lines is rated.
pub fn prior_light(
    line: &Line,
    limit_per_cm: Option<f64>,
    emitter: &Emitter,
) -> Option<PriorLight> {
    if emitter.light(line).is_some() {
        return None;
    }
    let rate = match line.rate_per_s {
        Some(_) => None,
        None => Some(prior::prior(line, limit_per_cm?)?),
    };
    let rate_per_s = line.rate_per_s.or(rate.map(|p| p.median_rate_per_s()))?;
    let (light, unfed_sigma) = match emitter.light_at_rate(line, rate_per_s) {
        Some(light) => (light, 0.0),
        None => emitter.unfed_light(line, rate_per_s)?,
    };
    Some(PriorLight {
        rate,
        light,
        sigma_dex: unfed_sigma.hypot(rate.map_or(0.0, |p| p.sigma_dex)),
    })
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
    pub fn around(scene: &Scene<'_>, feature: usize, fraction: f64) -> Self {
        let target = &scene.features[feature];
        let Some(signal) = target.signal.filter(|s| *s > 0.0) else {
            return Self::default();
        };
        let width_nm = scene.width.at_nm(target.nm);
        let seen = |index: usize| {
            let emission = &scene.emissions[index];
            let offset_nm = emission.nm - target.nm;
            let part = emission.profile.density(offset_nm) / signal;
            (part, offset_nm.abs() <= width_nm)
        };
        let near = scene.reaching(target.nm, width_nm);
        Self::among(scene, target.spectrum, near, fraction, seen)
    }

    /// Lines of other species than that of the target, of which `seen` tells how much a unit of
    /// their light adds to the interference fraction, and whether a line that nothing bounds
    /// counts there.
    pub fn among(
        scene: &Scene<'_>,
        target_spectrum: usize,
        lines: impl Iterator<Item = usize>,
        fraction: f64,
        seen: impl Fn(usize) -> (f64, bool),
    ) -> Self {
        let room = room(fraction);
        let mut out = Self::default();
        for index in lines {
            let emission = &scene.emissions[index];
            let present = !scene.emitters[emission.spectrum].is_absent;
            if emission.light.is_some() || emission.spectrum == target_spectrum || !present {
                continue;
            }
            let (part, counts) = seen(index);
            match emission.prior {
                Some(p) => {
                    let median = p.light * part;
                    // Where no border is left to cross, lines are still listed as bounded.
                    let least = room.unwrap_or(1.0) * 10_f64.powf(-NEGLIGIBLE_SIGMAS * p.sigma_dex);
                    if median > least {
                        out.bounded.push((index, median, p.sigma_dex));
                    }
                }
                // Lines that no table lists are held together with the prior alone.
                None if emission.line.is_unlisted_and_unrated() => {}
                None if counts && !is_too_weak(scene, index, part, room) => {
                    out.unbounded.push(index);
                }
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

/// Whether a line could not change the verdict were it as bright as the brightest rated line of its
/// species; a tenth of what is left is kept in hand.
fn is_too_weak(scene: &Scene<'_>, index: usize, part: f64, room: Option<f64>) -> bool {
    let spectrum = scene.emissions[index].spectrum;
    let brightest =
        scene.emitters[spectrum].strongest(&scene.spectra[spectrum], 0.0, f64::INFINITY);
    brightest > 0.0 && brightest * part < 0.1 * room.unwrap_or(1.0)
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
