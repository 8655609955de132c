//! Where features and peaks meet.

use super::Peak;
use super::features::Template;

/// Differences beyond this many σ are no match.
pub const REACH_SIGMA: f64 = 4.0;

/// A feature that lies where a peak is.
#[derive(Clone, Copy, Debug)]
pub struct Match {
    /// Index of the template.
    pub template: usize,
    /// Index of the peak.
    pub peak: usize,
    /// Order in which the line is seen: 1 or 2.
    pub order: u8,
    /// Peak minus feature, nm of the line itself.
    pub offset_nm: f64,
    /// 1 σ of it, nm.
    pub sigma_nm: f64,
    /// Normal density of it, per nm of the peak list.
    pub density: f64,
}

/// All matches, those of one template side by side.
pub struct Matches {
    /// All, by template, order and peak.
    pub all: Vec<Match>,
    first: Vec<usize>,
}

impl Matches {
    /// Finds all matches; `shift` (nm) is added to a peak's position. A binary search per feature,
    /// so that the work grows as features × log peaks.
    pub fn new(templates: &[Template<'_>], peaks: &[Peak], shift: impl Fn(f64) -> f64) -> Self {
        let mut all = Vec::new();
        let widest = peaks.iter().map(|p| p.sigma_nm).fold(0.0, f64::max);
        for order in [1_u8, 2] {
            let scale = f64::from(order);
            let mut places: Vec<(f64, usize)> = peaks
                .iter()
                .enumerate()
                .filter_map(|(i, p)| {
                    let nm = if order == 1 {
                        p.vacuum_nm
                    } else {
                        p.second_order_vacuum_nm?
                    };
                    Some((nm + shift(p.vacuum_nm) / scale, i))
                })
                .collect();
            places.sort_by(|a, b| a.0.total_cmp(&b.0));
            for (index, template) in templates.iter().enumerate() {
                let reach = REACH_SIGMA * (widest / scale).hypot(template.sigma_nm);
                let from = places.partition_point(|p| p.0 < template.nm - reach);
                let near = places[from..]
                    .iter()
                    .take_while(|p| p.0 <= template.nm + reach);
                all.extend(near.filter_map(|&(nm, peak)| {
                    let sigma_nm = (peaks[peak].sigma_nm / scale).hypot(template.sigma_nm);
                    let offset_nm = nm - template.nm;
                    let z = offset_nm / sigma_nm;
                    let normal = (-0.5 * z * z).exp() / (2.0 * std::f64::consts::PI).sqrt();
                    (z.abs() <= REACH_SIGMA).then(|| Match {
                        template: index,
                        peak,
                        order,
                        offset_nm,
                        sigma_nm,
                        density: normal / (sigma_nm * scale),
                    })
                }));
            }
        }
        all.sort_by_key(|m| (m.template, m.order, m.peak));
        let mut first = vec![0; templates.len() + 1];
        for m in &all {
            first[m.template + 1] += 1;
        }
        for i in 0..templates.len() {
            first[i + 1] += first[i];
        }
        Self { all, first }
    }

    /// Matches of one template.
    pub fn of(&self, template: usize) -> &[Match] {
        &self.all[self.first[template]..self.first[template + 1]]
    }
}

/// Density of peaks around each, per nm: that of the ten nearest, half with that of the whole list.
pub fn peak_density(peaks: &[Peak], range: (f64, f64)) -> Vec<f64> {
    let count = peaks.len();
    let whole = count as f64 / (range.1 - range.0);
    (0..count)
        .map(|i| {
            let (low, high) = (i.saturating_sub(5), (i + 5).min(count - 1));
            let steps = (high - low) as f64;
            // Peaks at one place do not make a density without bound.
            let least = steps * 2.0 * peaks[i].sigma_nm;
            let width = (peaks[high].vacuum_nm - peaks[low].vacuum_nm).max(least);
            if high > low {
                f64::midpoint(steps / width, whole)
            } else {
                whole
            }
        })
        .collect()
}
