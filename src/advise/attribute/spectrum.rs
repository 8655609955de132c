//! Peaks of a measured spectrum.
//!
//! Background by a running median; noise by the median of third differences of every second sample
//! (F. Stoehr et al. 2008, *DER_SNR*, ASP Conf. Ser. 394, 505), widened by counting statistics where
//! the bright parts scatter more; peaks as maxima of the spectrum filtered with the instrument's
//! Gaussian (matched filter, D. O. North 1943, reprinted Proc. IEEE 51, 1016); 1 σ of a position
//! 0.69 √(step · FWHM)/(peak signal to noise) (D. D. Lenz & T. R. Ayres 1992, PASP 104, 1104).

/// A peak of a spectrum.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Found {
    /// Position in the unit of the spectrum.
    pub position: f64,
    /// 1 σ of it.
    pub sigma: f64,
    /// Height above the background.
    pub height: f64,
    /// Height over the noise there.
    pub signal_to_noise: f64,
}

/// A peak stands this many σ of the filtered noise above the background.
pub const THRESHOLD_SIGMA: f64 = 5.0;

/// Noise of one sample: 1.482602/√6 · median |2 yᵢ − yᵢ₋₂ − yᵢ₊₂| (Stoehr et al. 2008, equation 1);
/// zero below five samples.
pub fn noise(values: &[f64]) -> f64 {
    let differences: Vec<f64> = values
        .windows(5)
        .map(|w| (2.0 * w[2] - w[0] - w[4]).abs())
        .collect();
    median(differences).map_or(0.0, |m| 1.482_602 / 6.0_f64.sqrt() * m)
}

/// Finds peaks in samples (position, value) of rising position, `fwhm` in the unit of the position.
pub fn peaks(samples: &[(f64, f64)], fwhm: f64) -> Vec<Found> {
    let count = samples.len();
    if count < 7 {
        return Vec::new();
    }
    let step = (samples[count - 1].0 - samples[0].0) / (count - 1) as f64;
    let values: Vec<f64> = samples.iter().map(|s| s.1).collect();
    let half = ((10.0 * fwhm / step).ceil() as usize).max(7);
    let background = running_median(&values, half);
    let quiet = noise(&values);
    let above: Vec<f64> = values.iter().zip(&background).map(|(v, b)| v - b).collect();
    let kernel = kernel(fwhm / step);
    let filtered = filter(&above, &kernel);
    // Noise of the filtered value, and the height of a peak of the instrument's shape there.
    let gain: f64 = kernel.iter().map(|k| k * k).sum::<f64>().sqrt();
    let shape = filter_peak(&kernel);
    let reach = ((fwhm / step / 2.0).round() as usize).max(1);
    let mut out = Vec::new();
    for i in 1..count - 1 {
        let (low, high) = (i.saturating_sub(reach), (i + reach).min(count - 1));
        let top = filtered[i] > 0.0
            && (low..=high)
                .all(|j| filtered[j] < filtered[i] || (filtered[j] == filtered[i] && j >= i));
        if !top {
            continue;
        }
        let height = filtered[i] / shape;
        // Counting noise grows as the root of the signal over that of the background.
        let level = background[i]
            .abs()
            .max(quiet * quiet)
            .max(f64::MIN_POSITIVE);
        let local = quiet * (1.0 + height.max(0.0) / level).sqrt();
        if filtered[i] < THRESHOLD_SIGMA * quiet * gain || quiet <= 0.0 {
            continue;
        }
        // A ripple on the flank of a strong line is no peak: it must rise above its own noise.
        let dip = |range: std::ops::Range<usize>| {
            range.map(|j| filtered[j]).fold(f64::INFINITY, f64::min)
        };
        let wide = 2 * reach;
        let sides = dip(i.saturating_sub(wide)..i).max(dip(i + 1..(i + wide + 1).min(count)));
        if filtered[i] - sides < 3.0 * local * gain {
            continue;
        }
        let (a, b, c) = (filtered[i - 1], filtered[i], filtered[i + 1]);
        let curve = a - 2.0 * b + c;
        let part = if curve < 0.0 {
            (0.5 * (a - c) / curve).clamp(-0.5, 0.5)
        } else {
            0.0
        };
        let signal_to_noise = height / local;
        out.push(Found {
            position: samples[i].0 + part * step,
            sigma: 0.69 * (step * fwhm).sqrt() / signal_to_noise,
            height,
            signal_to_noise,
        });
    }
    out
}

/// Gaussian of unit sum, FWHM in samples.
fn kernel(fwhm: f64) -> Vec<f64> {
    let sigma = fwhm / (8.0 * std::f64::consts::LN_2).sqrt();
    let half = (3.0 * sigma).ceil().max(1.0) as i32;
    let raw: Vec<f64> = (-half..=half)
        .map(|k| (-0.5 * (f64::from(k) / sigma).powi(2)).exp())
        .collect();
    let sum: f64 = raw.iter().sum();
    raw.iter().map(|r| r / sum).collect()
}

/// Filtered value at the top of a peak of unit height and the kernel's shape.
fn filter_peak(kernel: &[f64]) -> f64 {
    let top = kernel.iter().copied().fold(0.0, f64::max);
    kernel.iter().map(|k| k * k / top).sum()
}

fn filter(values: &[f64], kernel: &[f64]) -> Vec<f64> {
    let half = kernel.len() / 2;
    let last = values.len() - 1;
    (0..values.len())
        .map(|i| {
            kernel
                .iter()
                .enumerate()
                .map(|(k, weight)| weight * values[(i + k).saturating_sub(half).min(last)])
                .sum()
        })
        .collect()
}

/// Median of the samples within `half` of each, taken every quarter of that and joined by lines.
fn running_median(values: &[f64], half: usize) -> Vec<f64> {
    let last = values.len() - 1;
    let stride = (half / 4).max(1);
    let at = |i: usize| {
        let window = values[i.saturating_sub(half)..=(i + half).min(last)].to_vec();
        median(window).unwrap_or(0.0)
    };
    let knots: Vec<(usize, f64)> = (0..=last)
        .step_by(stride)
        .chain([last])
        .map(|i| (i, at(i)))
        .collect();
    (0..=last)
        .map(|i| {
            let k = (i / stride).min(knots.len() - 2);
            let ((x0, y0), (x1, y1)) = (knots[k], knots[k + 1]);
            if x1 == x0 {
                y0
            } else {
                y0 + (y1 - y0) * (i as f64 - x0 as f64) / (x1 - x0) as f64
            }
        })
        .collect()
}

fn median(mut values: Vec<f64>) -> Option<f64> {
    if values.is_empty() {
        return None;
    }
    let middle = values.len() / 2;
    let (_, found, _) = values.select_nth_unstable_by(middle, f64::total_cmp);
    Some(*found)
}
