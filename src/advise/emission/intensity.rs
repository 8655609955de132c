//! Intensities of lines that the user gives.

use vocabulary::spectrum::{Level, Line, Strength};

use super::conditions::GivenIntensity;
use crate::advise::error::AdviseError;
use crate::advise::spectrum::Spectrum;

/// A given intensity stands for the lines of its species within this distance, nm.
pub const MEANT_NM: f64 = 0.1;

/// How the light of a species is set by given intensities.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Scaled {
    /// Light of lines that are given: wavenumber (cm⁻¹), light, relative 1 σ.
    lines: Vec<(f64, f64, f64)>,
    /// What the others' LTE light is multiplied by.
    pub factor: f64,
    /// Relative 1 σ of that.
    pub relative_sigma: f64,
}

impl Scaled {
    /// Light and relative 1 σ of a line that is given.
    pub fn of(&self, line: &Line) -> Option<(f64, f64)> {
        self.of_wavenumber(line.wavenumber_per_cm)
    }

    /// As [`Scaled::of`], by wavenumber, cm⁻¹.
    pub fn of_wavenumber(&self, wavenumber_per_cm: f64) -> Option<(f64, f64)> {
        let at = self
            .lines
            .partition_point(|l| l.0 < wavenumber_per_cm * (1.0 - 1e-12));
        let found = self.lines.get(at)?;
        ((found.0 / wavenumber_per_cm - 1.0).abs() < 1e-12).then_some((found.1, found.2))
    }

    /// Sets the light of a species: its lines within [`MEANT_NM`] of a given one share its
    /// intensity as in LTE; all others follow in LTE from the mean (of the logarithms) of what the
    /// given ones say, uncertain by their own uncertainty and their scatter.
    ///
    /// # Errors
    /// A given line of which no rated line is held there.
    pub fn new(
        spectrum: &Spectrum,
        given: &[&GivenIntensity],
        light: impl Fn(&Strength, &Level) -> Option<f64>,
    ) -> Result<Self, AdviseError> {
        let rated: Vec<(f64, f64)> = spectrum
            .strengths
            .iter()
            .filter_map(|s| {
                let upper = spectrum.levels.get(s.upper? as usize)?;
                Some((s.wavenumber_per_cm, light(s, upper)?))
            })
            .filter(|(_, light)| *light > 0.0)
            .collect();
        let mut members: Vec<Vec<(f64, f64)>> = vec![Vec::new(); given.len()];
        for &(wavenumber, light) in &rated {
            let distance = |g: &&GivenIntensity| (g.vacuum_nm - 1e7 / wavenumber).abs();
            let nearest = (0..given.len())
                .min_by(|&a, &b| distance(&given[a]).total_cmp(&distance(&given[b])));
            if let Some(index) = nearest.filter(|&i| distance(&given[i]) <= MEANT_NM) {
                members[index].push((wavenumber, light));
            }
        }
        let mut out = Self::default();
        let mut ratios: Vec<(f64, f64)> = Vec::new();
        for (one, members) in given.iter().zip(&members) {
            let total: f64 = members.iter().map(|m| m.1).sum();
            if total <= 0.0 {
                return Err(not_held(one, &rated));
            }
            let ratio = one.intensity / total;
            out.lines.extend(
                members
                    .iter()
                    .map(|m| (m.0, m.1 * ratio, one.relative_sigma)),
            );
            if ratio > 0.0 {
                ratios.push((ratio.ln(), one.relative_sigma));
            }
        }
        out.lines.sort_by(|a, b| a.0.total_cmp(&b.0));
        out.scale(&ratios);
        Ok(out)
    }

    fn scale(&mut self, ratios: &[(f64, f64)]) {
        if ratios.is_empty() {
            return;
        }
        let count = ratios.len() as f64;
        let mean = ratios.iter().map(|r| r.0).sum::<f64>() / count;
        let scatter = ratios.iter().map(|r| (r.0 - mean).powi(2)).sum::<f64>() / count.max(2.0);
        let own = ratios.iter().map(|r| r.1.powi(2)).sum::<f64>() / (count * count);
        self.factor = mean.exp();
        self.relative_sigma = (scatter + own).exp_m1().sqrt();
    }
}

fn not_held(one: &GivenIntensity, rated: &[(f64, f64)]) -> AdviseError {
    let mut near: Vec<f64> = rated.iter().map(|r| 1e7 / r.0).collect();
    let distance = |nm: f64| (nm - one.vacuum_nm).abs();
    near.sort_by(|a, b| distance(*a).total_cmp(&distance(*b)));
    let offered = near.iter().take(3);
    AdviseError::NoSuchLine {
        wanted: one.typed.clone(),
        reach_nm: MEANT_NM,
        nearest: offered
            .map(|nm| format!("{} {nm:.3} nm (vacuum)", one.species))
            .collect(),
    }
}
