//! The common shift and stretch of the positions of a list.

use super::matches::{Matches, peak_density};
use super::room::{Found, Room};
use super::{ATTRIBUTED, Peak, Scale};

impl Room<'_> {
    /// The shift at which most speaks for species, on a grid of one σ within the bound.
    pub fn coarse(&self, peaks: &[Peak]) -> Scale {
        let middle_nm = f64::midpoint(self.range.0, self.range.1);
        let bound = self.question.shift_bound_nm;
        let mut sigmas: Vec<f64> = peaks.iter().map(|p| p.sigma_nm).collect();
        sigmas.sort_by(f64::total_cmp);
        let step = sigmas
            .get(sigmas.len() / 2)
            .copied()
            .unwrap_or(bound)
            .max(bound / 50.0);
        let mut best = (
            f64::NEG_INFINITY,
            Scale {
                middle_nm,
                ..Scale::default()
            },
        );
        if bound <= step {
            return best.1;
        }
        let density = peak_density(peaks, self.range);
        let steps = (bound / step).floor() as i32;
        for k in -steps..=steps {
            let scale = Scale {
                shift_nm: f64::from(k) * step,
                ..best.1
            };
            let matches = Matches::new(&self.templates, peaks, |nm| scale.at(nm));
            let (evidence, _) = self.case(&matches, &density).species();
            // A shift of nothing is the likeliest beforehand: Gaussian of half the bound.
            let prior = -0.5 * (2.0 * scale.shift_nm / bound).powi(2);
            let score: f64 = evidence
                .iter()
                .filter(|e| e.present)
                .map(|e| e.log_ratio)
                .sum::<f64>()
                + prior;
            if score > best.0 {
                best = (score, scale);
            }
        }
        best.1
    }

    /// Shift and stretch by weighted least squares over attributed peaks, held near zero by the
    /// bound (as by a measurement of zero with 1 σ of half the bound), and cut at it.
    pub fn refined(&self, peaks: &[Peak], found: &Found, scale: Scale) -> Scale {
        let half = (self.range.1 - self.range.0) / 2.0;
        let hold = (2.0 / self.question.shift_bound_nm).powi(2);
        let mut sums = [hold, 0.0, hold, 0.0, 0.0];
        for (peak, list) in peaks.iter().zip(&found.candidates) {
            let Some((m, probability)) =
                list.first().filter(|c| c.1 >= ATTRIBUTED && c.0.order == 1)
            else {
                continue;
            };
            let u = (peak.vacuum_nm - scale.middle_nm) / half;
            let weight = probability / m.sigma_nm.powi(2);
            // What must be added in all: what was added less what is left.
            let wanted = scale.at(peak.vacuum_nm) - m.offset_nm;
            sums[0] += weight;
            sums[1] += weight * u;
            sums[2] += weight * u * u;
            sums[3] += weight * wanted;
            sums[4] += weight * wanted * u;
        }
        let [a, b, c, d, e] = sums;
        let determinant = a * c - b * b;
        let bound = self.question.shift_bound_nm;
        if determinant.is_nan() || determinant <= 0.0 {
            return scale;
        }
        Scale {
            shift_nm: ((c * d - b * e) / determinant).clamp(-bound, bound),
            stretch: ((a * e - b * d) / determinant).clamp(-bound, bound) / half,
            ..scale
        }
    }
}
