//! From pixels to wavelengths: a polynomial through marks, wrong entries rejected.
//!
//! Least median of squares over small samples (P. J. Rousseeuw 1984, J. Am. Stat. Assoc. 79, 871),
//! then least squares over the entries within 2.5 robust standard deviations (Rousseeuw & Leroy
//! 1987, *Robust Regression and Outlier Detection*, chapter 5), repeated until the choice stays.

use super::polynomial::{Polynomial, PolynomialError, weighted};
use super::{Answer, Candidate, Refusal};

/// Entries farther than this many robust standard deviations are rejected (Rousseeuw & Leroy 1987).
const CUT: f64 = 2.5;
/// Samples drawn at most; all are drawn where there are fewer.
const SAMPLES: usize = 3000;

/// One measured entry.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Entry {
    /// Place on the detector, in pixels or another unit of its own.
    pub pixel: f64,
    /// Vacuum wavelength that it is taken to have, nm.
    pub vacuum_nm: f64,
}

/// What became of an entry.
#[derive(Clone, Debug, PartialEq)]
pub enum EntryState {
    /// In the fit: measured minus fitted, nm.
    Used {
        /// Index into the candidates.
        candidate: usize,
        /// Vacuum wavelength of the mark minus that of the fit, nm.
        residual_nm: f64,
    },
    /// Rejected as an outlier.
    Outlier {
        /// Index into the candidates.
        candidate: usize,
        /// As above.
        residual_nm: f64,
        /// In robust standard deviations.
        deviations: f64,
    },
    /// The nearest feature of the lamp is no mark.
    NoMark {
        /// Index into the candidates.
        candidate: usize,
        /// Why it is none.
        refusal: Refusal,
    },
    /// No feature of the lamp lies near.
    Nothing {
        /// Distance to the nearest, nm.
        nearest_nm: Option<f64>,
    },
    /// Another entry names the same mark and lies nearer to it.
    Second {
        /// Index into the candidates.
        candidate: usize,
    },
}

/// Entries and the marks that they mean.
#[derive(Clone, Debug)]
pub struct Pairing {
    entries: Vec<Entry>,
    found: Vec<Result<usize, EntryState>>,
}

/// A fitted dispersion.
#[derive(Clone, Debug)]
pub struct Dispersion {
    /// Vacuum wavelength in nm over the pixel.
    pub polynomial: Polynomial,
    /// Order of the polynomial.
    pub order: usize,
    /// What became of each entry, in the order given.
    pub entries: Vec<(Entry, EntryState)>,
    /// Root of the mean square residual of the used entries, nm.
    pub rms_nm: f64,
    /// Standard deviation of one entry, nm: root of Σ r²/(n − coefficients); `None` where every
    /// degree of freedom is used up.
    pub sigma_nm: Option<f64>,
    /// The ends: pixel, wavelength there, 1 σ of the curve there.
    pub ends: [(f64, f64, Option<f64>); 2],
}

/// Why no dispersion can be fitted.
#[derive(Clone, Copy, Debug, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum DispersionError {
    /// Too few entries are marks.
    #[error(
        "{marks} of {entries} entries are marks, and order {order} needs at least {needed}; lower \
         --order, or allow more marks with --weakest, --position-bound or another --fwhm"
    )]
    FewMarks {
        /// Marks among the entries.
        marks: usize,
        /// Entries.
        entries: usize,
        /// Order asked for.
        order: usize,
        /// Marks needed.
        needed: usize,
    },
    /// The fit itself.
    #[error(transparent)]
    Polynomial(#[from] PolynomialError),
}

impl Pairing {
    /// Finds the feature that each entry means: the strongest within `reach_nm`. Where it was only
    /// outshone in its part of the span, or weak, it is a mark all the same: it was measured.
    pub fn new(entries: &[Entry], answer: &Answer, reach_nm: f64) -> Self {
        let mut found: Vec<Result<usize, EntryState>> = entries
            .iter()
            .map(|e| meant(e, &answer.candidates, reach_nm))
            .collect();
        let distance = |e: usize, c: usize| {
            let at = answer.candidates[c].surveyed.feature.placed.vacuum_nm;
            (entries[e].vacuum_nm - at).abs()
        };
        let mut holder: std::collections::HashMap<usize, usize> = std::collections::HashMap::new();
        for entry in 0..entries.len() {
            let Ok(candidate) = found[entry] else {
                continue;
            };
            let loser = match holder.get(&candidate).copied() {
                Some(before) if distance(before, candidate) <= distance(entry, candidate) => entry,
                Some(before) => {
                    holder.insert(candidate, entry);
                    before
                }
                None => {
                    holder.insert(candidate, entry);
                    continue;
                }
            };
            found[loser] = Err(EntryState::Second { candidate });
        }
        Self {
            entries: entries.to_vec(),
            found,
        }
    }
}

fn meant(entry: &Entry, candidates: &[Candidate], reach_nm: f64) -> Result<usize, EntryState> {
    let at = |c: &Candidate| c.surveyed.feature.placed.vacuum_nm;
    let above = candidates.partition_point(|c| at(c) < entry.vacuum_nm);
    let near = |i: &usize| (at(&candidates[*i]) - entry.vacuum_nm).abs();
    let light = |i: &usize| candidates[*i].surveyed.light.unwrap_or(0.0);
    let within: Vec<usize> = (0..above)
        .rev()
        .take_while(|i| near(i) <= reach_nm)
        .chain((above..candidates.len()).take_while(|i| near(i) <= reach_nm))
        .collect();
    // The strongest feature within reach is what the detector shows there.
    let best = within.into_iter().max_by(|a, b| {
        light(a)
            .total_cmp(&light(b))
            .then(near(b).total_cmp(&near(a)))
    });
    let Some(best) = best else {
        let nearest_nm = [above.checked_sub(1), Some(above)]
            .into_iter()
            .flatten()
            .filter(|&i| i < candidates.len())
            .map(|i| near(&i))
            .min_by(f64::total_cmp);
        return Err(EntryState::Nothing { nearest_nm });
    };
    match candidates[best].refusal {
        None | Some(Refusal::Outshone | Refusal::Weak(_)) => Ok(best),
        Some(refusal) => Err(EntryState::NoMark {
            candidate: best,
            refusal,
        }),
    }
}

/// Fits a polynomial of this order to the marks; `ends` are the pixels at which the error of the
/// curve is wanted (else the outermost entries).
///
/// # Errors
/// Too few marks.
pub fn fit(
    pairing: &Pairing,
    answer: &Answer,
    order: usize,
    ends: Option<(f64, f64)>,
) -> Result<Dispersion, DispersionError> {
    let points: Vec<(f64, f64, usize)> = pairing
        .found
        .iter()
        .enumerate()
        .filter_map(|(e, f)| {
            let candidate = *f.as_ref().ok()?;
            let mark_nm = answer.candidates[candidate]
                .surveyed
                .feature
                .placed
                .vacuum_nm;
            Some((pairing.entries[e].pixel, mark_nm, e))
        })
        .collect();
    let needed = order + 2;
    if points.len() < needed {
        return Err(DispersionError::FewMarks {
            marks: points.len(),
            entries: pairing.entries.len(),
            order,
            needed,
        });
    }
    let plain: Vec<(f64, f64)> = points.iter().map(|p| (p.0, p.1)).collect();
    let (polynomial, scale_nm, used) = robust(&plain, order)?;
    let residual = |i: usize| plain[i].1 - polynomial.at(plain[i].0);
    let square: f64 = (0..plain.len())
        .filter(|&i| used[i])
        .map(|i| residual(i).powi(2))
        .sum();
    let count = used.iter().filter(|u| **u).count();
    let free = count.saturating_sub(order + 1);
    let sigma_nm = (free > 0).then(|| (square / free as f64).sqrt());
    let mut states: Vec<EntryState> = Vec::with_capacity(pairing.entries.len());
    let mut point = 0;
    for found in &pairing.found {
        states.push(match found {
            Err(state) => state.clone(),
            Ok(candidate) => {
                let (candidate, residual_nm) = (*candidate, residual(point));
                point += 1;
                if used[point - 1] {
                    EntryState::Used {
                        candidate,
                        residual_nm,
                    }
                } else {
                    let deviations = residual_nm.abs() / scale_nm.max(f64::MIN_POSITIVE);
                    EntryState::Outlier {
                        candidate,
                        residual_nm,
                        deviations,
                    }
                }
            }
        });
    }
    let pixels = pairing.entries.iter().map(|e| e.pixel);
    let (low, high) = ends.unwrap_or_else(|| {
        (
            pixels.clone().fold(f64::INFINITY, f64::min),
            pixels.fold(f64::NEG_INFINITY, f64::max),
        )
    });
    let end = |x: f64| {
        let error = sigma_nm.map(|s| s * polynomial.variance_at(x).sqrt());
        (x, polynomial.at(x), error)
    };
    Ok(Dispersion {
        ends: [end(low), end(high)],
        rms_nm: (square / count.max(1) as f64).sqrt(),
        sigma_nm,
        order,
        entries: pairing.entries.iter().copied().zip(states).collect(),
        polynomial,
    })
}

/// The fit, the robust scale, and which points it used.
fn robust(
    points: &[(f64, f64)],
    order: usize,
) -> Result<(Polynomial, f64, Vec<bool>), PolynomialError> {
    let mut best: Option<(f64, Polynomial)> = None;
    for sample in samples(points.len(), order + 1) {
        let chosen: Vec<(f64, f64, f64)> = sample
            .iter()
            .map(|&i| (points[i].0, points[i].1, 1.0))
            .collect();
        let Ok(trial) = weighted(&chosen, order) else {
            continue;
        };
        let mut squares: Vec<f64> = points
            .iter()
            .map(|p| (p.1 - trial.at(p.0)).powi(2))
            .collect();
        // Half of the points and the coefficients, as Rousseeuw 1984 counts them.
        let middle = ((points.len() + order + 2) / 2).min(points.len()) - 1;
        let (_, median, _) = squares.select_nth_unstable_by(middle, f64::total_cmp);
        if best.as_ref().is_none_or(|(least, _)| *median < *least) {
            best = Some((*median, trial));
        }
    }
    let (median, mut curve) = best.ok_or(PolynomialError::Degenerate)?;
    let free = points.len().saturating_sub(order + 1).max(1) as f64;
    let floor = 1e-9 * points.iter().map(|p| p.1.abs()).fold(0.0, f64::max);
    let mut scale = (1.4826 * (1.0 + 5.0 / free) * median.sqrt()).max(floor);
    let mut used = vec![false; points.len()];
    for _ in 0..20 {
        let now: Vec<bool> = points
            .iter()
            .map(|p| (p.1 - curve.at(p.0)).abs() <= CUT * scale)
            .collect();
        if now == used {
            break;
        }
        let kept: Vec<(f64, f64, f64)> = points
            .iter()
            .zip(&now)
            .filter(|(_, keep)| **keep)
            .map(|(p, _)| (p.0, p.1, 1.0))
            .collect();
        let Ok(next) = weighted(&kept, order) else {
            break;
        };
        let square: f64 = kept.iter().map(|p| (p.1 - next.at(p.0)).powi(2)).sum();
        let free = kept.len().saturating_sub(order + 1);
        if free > 0 {
            scale = (square / free as f64).sqrt().max(floor);
        }
        curve = next;
        used = now;
    }
    Ok((curve, scale, used))
}

/// Samples of `size` out of `count` points: all of them in order where they are few, else a fixed
/// sequence of pseudo-random ones (64-bit linear congruential generator of Knuth, TAOCP 2, 3.3.4).
fn samples(count: usize, size: usize) -> Vec<Vec<usize>> {
    let all = (0..size).fold(1.0, |p, k| p * (count - k) as f64 / (k + 1) as f64);
    let mut out = Vec::new();
    if all <= SAMPLES as f64 {
        let mut sample: Vec<usize> = (0..size).collect();
        loop {
            out.push(sample.clone());
            let Some(place) = (0..size).rev().find(|&k| sample[k] < count - size + k) else {
                return out;
            };
            sample[place] += 1;
            for k in place + 1..size {
                sample[k] = sample[k - 1] + 1;
            }
        }
    }
    let mut state: u64 = 1;
    while out.len() < SAMPLES {
        let mut sample: Vec<usize> = Vec::with_capacity(size);
        while sample.len() < size {
            state = state
                .wrapping_mul(6_364_136_223_846_793_005)
                .wrapping_add(1_442_695_040_888_963_407);
            let index = ((state >> 33) as usize) % count;
            if !sample.contains(&index) {
                sample.push(index);
            }
        }
        out.push(sample);
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn two_wrong_of_ten_are_found() {
        let mut points: Vec<(f64, f64)> = (0..10)
            .map(|i| f64::from(i) * 50.0)
            .map(|x| (x, 400.0 + 0.1 * x + 1e-3 * (x * 7.0).sin()))
            .collect();
        points[2].1 += 0.6;
        points[7].1 -= 0.4;
        let (_, _, used) = robust(&points, 1).unwrap();
        assert!(!used[2] && !used[7], "{used:?}");
        assert!(used.iter().filter(|u| **u).count() >= 7, "{used:?}");
    }

    #[test]
    fn all_samples_are_drawn_where_few() {
        assert_eq!(samples(5, 3).len(), 10);
        assert_eq!(samples(40, 4).len(), SAMPLES);
    }
}
