//! How bright each species is in a list, and whether a peak's intensity fits.

use super::evidence::{Case, Evidence};
use super::matches::Match;
use super::room::Room;
use super::{Peak, SECOND_ORDER_LIGHT};

/// 1 σ of ln(intensity) about what the rates say: rates, sensitivity and populations are off.
const LOG_INTENSITY_SIGMA: f64 = 1.5;

/// How bright species are in the list, and how bright its peaks are.
pub(super) struct Brightness {
    species: Vec<Option<f64>>,
    mean: f64,
    sigma: f64,
}

impl Brightness {
    /// How bright each species is in the list: the median of ln(intensity/light) of its matches.
    pub fn new(room: &Room<'_>, case: &Case<'_>, peaks: &[Peak], evidence: &[Evidence]) -> Self {
        let logs: Vec<f64> = peaks
            .iter()
            .filter_map(|p| p.intensity.map(f64::ln))
            .collect();
        let mean = logs.iter().sum::<f64>() / logs.len().max(1) as f64;
        let spread =
            logs.iter().map(|l| (l - mean).powi(2)).sum::<f64>() / logs.len().max(1) as f64;
        let of = |e: &Evidence| {
            let mut ratios: Vec<f64> = e
                .matched
                .iter()
                .filter_map(|&t| {
                    let light = room.templates[t].light.as_ref()?[e.temperature];
                    let nearest = case
                        .matches
                        .of(t)
                        .iter()
                        .filter(|m| m.order == 1)
                        .max_by(|a, b| a.density.total_cmp(&b.density))?;
                    Some(peaks[nearest.peak].intensity?.ln() - light.ln())
                })
                .collect();
            ratios.sort_by(f64::total_cmp);
            (ratios.len() >= 2).then(|| ratios[ratios.len() / 2])
        };
        Self {
            species: evidence.iter().map(of).collect(),
            mean,
            sigma: spread.sqrt().max(LOG_INTENSITY_SIGMA),
        }
    }

    /// Density of the intensity that the species says, over that of all peaks.
    pub fn fits(&self, room: &Room<'_>, m: &Match, intensity: Option<f64>, of: &Evidence) -> f64 {
        let template = &room.templates[m.template];
        let expected = self.species[template.spectrum].zip(template.light.as_ref());
        let (Some(intensity), Some((log, light))) = (intensity, expected) else {
            return 1.0;
        };
        let mut expected = log + light[of.temperature].ln();
        if m.order == 2 {
            expected += SECOND_ORDER_LIGHT.ln();
        }
        let normal = |x: f64, sigma: f64| (-0.5 * (x / sigma).powi(2)).exp() / sigma;
        let own = normal(intensity.ln() - expected, LOG_INTENSITY_SIGMA);
        let all = normal(intensity.ln() - self.mean, self.sigma);
        // A rate may be quite wrong: one in twenty says nothing.
        0.95 * own / all.max(f64::MIN_POSITIVE) + 0.05
    }
}
