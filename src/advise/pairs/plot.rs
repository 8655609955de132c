//! Boltzmann plots: excitation temperature, and electron density from two stages.
//!
//! ln(I λ/(g A)) = C − E/kT for the power I of optically thin lines of one stage in LTE (H. R. Griem
//! 1964, *Plasma Spectroscopy*, chapter 13); ln(I/(g A)) where photons are counted. Straight lines
//! of one common slope and one C per stage, by least squares. Where two neighbouring stages are
//! there, C₂ − C₁ = ln(n₂U₁/(n₁U₂)) and the Saha equation give
//! n_e = 2 (2π m kT/h²)^(3/2) e^(−χ/kT) e^(C₁ − C₂); the partition functions cancel. χ is that of
//! the free atom; its lowering is left out.

use std::f64::consts::PI;

use vocabulary::atom::Species;
use vocabulary::light::constants::{
    ELECTRON_MASS_KG, ELEMENTARY_CHARGE_C, KELVIN_PER_EV, PLANCK_J_S,
};

/// One measured line.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Point {
    /// Whose.
    pub species: Species,
    /// ln(I λ/(g A)), or ln(I/(g A)) for photons; the unit only moves C, but must be one for all.
    pub log_population: f64,
    /// 1 σ of it: relative uncertainties of intensity, response and rate together.
    pub sigma: f64,
    /// Energy of the upper level above the ground level of its species, eV.
    pub upper_energy_ev: f64,
}

/// Why there is no plot.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum PlotError {
    /// Too few lines.
    #[error(
        "{points} lines of {stages} stages do not give a temperature; at least two lines of one \
         stage are needed, from upper levels of different energy"
    )]
    FewPoints {
        /// Lines there.
        points: usize,
        /// Stages there.
        stages: usize,
    },
    /// Intensities that rise with energy.
    #[error(
        "the populations do not fall with energy (slope {slope_per_ev:+.3} per eV), so there is no \
         temperature; check the intensities, their response correction and the lines"
    )]
    NoTemperature {
        /// Fitted slope, 1/eV.
        slope_per_ev: f64,
    },
    /// Stages of several elements.
    #[error("lines of {one} and {other} do not belong into one plot; give one element at a time")]
    Elements {
        /// One.
        one: Species,
        /// The other.
        other: Species,
    },
}

/// The intercept of one stage.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct StageFit {
    /// Whose.
    pub species: Species,
    /// C, dimensionless.
    pub intercept: f64,
    /// Lines used.
    pub used: usize,
}

/// Electron density from two stages.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Density {
    /// Lower stage.
    pub lower: Species,
    /// Its ionisation energy, eV.
    pub limit_ev: f64,
    /// Electron density, m⁻³.
    pub electron_density_per_m3: f64,
    /// 1 σ of its natural logarithm.
    pub relative_uncertainty: f64,
}

/// A fitted plot.
#[derive(Clone, Debug, PartialEq)]
pub struct Plot {
    /// Excitation temperature, K.
    pub temperature_k: f64,
    /// 1 σ of it by the uncertainties given, K.
    pub uncertainty_k: f64,
    /// As above, widened by √(χ²/ν) where that exceeds 1, K.
    pub widened_uncertainty_k: f64,
    /// χ² of the lines used.
    pub chi_squared: f64,
    /// Degrees of freedom ν.
    pub degrees_of_freedom: usize,
    /// Stages, by charge.
    pub stages: Vec<StageFit>,
    /// Residual of each point in its σ, and whether it was used.
    pub residuals: Vec<(f64, bool)>,
    /// Electron densities of neighbouring stages.
    pub densities: Vec<Density>,
}

/// A point whose modified z score exceeds this is an outlier (B. Iglewicz & D. C. Hoaglin 1993,
/// *How to Detect and Handle Outliers*, ASQC): 0.6745 |r − median|/MAD.
const OUTLIER: f64 = 3.5;
/// No point is called an outlier among fewer free ones, nor when it fits within 3 of its σ.
const FEWEST_FREE: usize = 2;
const FITS_SIGMA: f64 = 3.0;

/// Fits the plot; the ionisation energies (eV) come from `limit_ev`. Outliers are left out one at a
/// time, the worst first, while at least two degrees of freedom stay.
///
/// # Errors
/// Too few lines, several elements, or no temperature above zero.
pub fn plot(
    points: &[Point],
    limit_ev: impl Fn(Species) -> Option<f64>,
) -> Result<Plot, PlotError> {
    let mut species: Vec<Species> = points.iter().map(|p| p.species).collect();
    species.sort_by_key(|s| (s.atomic_number, s.isotope, s.stage));
    species.dedup();
    let stranger = species
        .iter()
        .find(|s| s.atomic_number != species[0].atomic_number || s.isotope != species[0].isotope);
    if let Some(&other) = stranger {
        return Err(PlotError::Elements {
            one: species[0],
            other,
        });
    }
    let mut used = vec![true; points.len()];
    let mut fit = Fit::new(points, &used, &species)?;
    while let Some(worst) = fit.outlier(points, &used, &species) {
        used[worst] = false;
        match Fit::new(points, &used, &species) {
            Ok(next) => fit = next,
            Err(_) => {
                used[worst] = true;
                break;
            }
        }
    }
    fit.finished(points, &used, &species, limit_ev)
}

/// y = C_s − b E with the covariance of (b, C₁, C₂ …).
struct Fit {
    slope: f64,
    intercepts: Vec<f64>,
    /// Variance of b.
    slope_variance: f64,
    /// Weighted mean energy and total weight of each stage.
    means: Vec<(f64, f64)>,
}

impl Fit {
    fn new(points: &[Point], used: &[bool], species: &[Species]) -> Result<Self, PlotError> {
        let few = || PlotError::FewPoints {
            points: points.len(),
            stages: species.len(),
        };
        let mut means = Vec::with_capacity(species.len());
        let (mut spread, mut cross) = (0.0, 0.0);
        let mut centres = Vec::with_capacity(species.len());
        for &stage in species {
            let of = || {
                let here = |(p, u): &(&Point, &bool)| **u && p.species == stage;
                points
                    .iter()
                    .zip(used)
                    .filter(here)
                    .map(|(p, _)| (p, p.sigma.powi(-2)))
            };
            let weight: f64 = of().map(|(_, w)| w).sum();
            if weight <= 0.0 {
                return Err(few());
            }
            let energy = of().map(|(p, w)| w * p.upper_energy_ev).sum::<f64>() / weight;
            let log = of().map(|(p, w)| w * p.log_population).sum::<f64>() / weight;
            spread += of()
                .map(|(p, w)| w * (p.upper_energy_ev - energy).powi(2))
                .sum::<f64>();
            cross += of()
                .map(|(p, w)| w * (p.upper_energy_ev - energy) * (p.log_population - log))
                .sum::<f64>();
            means.push((energy, weight));
            centres.push(log);
        }
        // Levels within 1 meV of each other give no slope.
        let total: f64 = means.iter().map(|m| m.1).sum();
        if spread.is_nan() || spread <= total * 1e-6 {
            return Err(few());
        }
        let slope = -cross / spread;
        let intercepts = means
            .iter()
            .zip(&centres)
            .map(|((e, _), log)| log + slope * e)
            .collect();
        Ok(Self {
            slope,
            intercepts,
            slope_variance: 1.0 / spread,
            means,
        })
    }

    fn residual(&self, point: &Point, species: &[Species]) -> f64 {
        let stage = species
            .iter()
            .position(|s| *s == point.species)
            .unwrap_or(0);
        let line = self.intercepts[stage] - self.slope * point.upper_energy_ev;
        (point.log_population - line) / point.sigma
    }

    fn free(&self, used: &[bool]) -> usize {
        let count = used.iter().filter(|u| **u).count();
        count.saturating_sub(1 + self.intercepts.len())
    }

    fn outlier(&self, points: &[Point], used: &[bool], species: &[Species]) -> Option<usize> {
        if self.free(used) < FEWEST_FREE + 1 {
            return None;
        }
        let here: Vec<(usize, f64)> = (0..points.len())
            .filter(|&i| used[i])
            .map(|i| (i, self.residual(&points[i], species)))
            .collect();
        let middle = median(here.iter().map(|r| r.1).collect());
        let spread = median(here.iter().map(|r| (r.1 - middle).abs()).collect());
        let (worst, residual) = here
            .iter()
            .copied()
            .max_by(|a, b| (a.1 - middle).abs().total_cmp(&(b.1 - middle).abs()))?;
        let score = 0.6745 * (residual - middle).abs() / spread;
        (score > OUTLIER && residual.abs() > FITS_SIGMA).then_some(worst)
    }

    fn finished(
        &self,
        points: &[Point],
        used: &[bool],
        species: &[Species],
        limit_ev: impl Fn(Species) -> Option<f64>,
    ) -> Result<Plot, PlotError> {
        if self.slope.is_nan() || self.slope <= 0.0 {
            return Err(PlotError::NoTemperature {
                slope_per_ev: -self.slope,
            });
        }
        let residuals: Vec<(f64, bool)> = points
            .iter()
            .zip(used)
            .map(|(p, u)| (self.residual(p, species), *u))
            .collect();
        let chi_squared: f64 = residuals.iter().filter(|r| r.1).map(|r| r.0 * r.0).sum();
        let degrees_of_freedom = self.free(used);
        let temperature_k = KELVIN_PER_EV / self.slope;
        let uncertainty_k = temperature_k * self.slope_variance.sqrt() / self.slope;
        let widen = match degrees_of_freedom {
            0 => 1.0,
            free => (chi_squared / free as f64).sqrt().max(1.0),
        };
        let count = |stage: Species| {
            points
                .iter()
                .zip(used)
                .filter(|(p, u)| **u && p.species == stage)
                .count()
        };
        Ok(Plot {
            temperature_k,
            uncertainty_k,
            widened_uncertainty_k: uncertainty_k * widen,
            chi_squared,
            degrees_of_freedom,
            stages: species
                .iter()
                .zip(&self.intercepts)
                .map(|(&species, &intercept)| StageFit {
                    species,
                    intercept,
                    used: count(species),
                })
                .collect(),
            densities: self.densities(species, widen, limit_ev),
            residuals,
        })
    }

    /// Saha between neighbouring stages. With C_s = ȳ_s + b Ē_s the logarithm of the density depends
    /// on b by −1.5/b − χ + Ē₁ − Ē₂, and on ȳ₁, ȳ₂ by ±1; these three are not correlated.
    fn densities(
        &self,
        species: &[Species],
        widen: f64,
        limit_ev: impl Fn(Species) -> Option<f64>,
    ) -> Vec<Density> {
        let mut out = Vec::new();
        for i in 1..species.len() {
            let lower = species[i - 1];
            let limit_ev = match limit_ev(lower) {
                Some(limit) if species[i].stage == lower.stage + 1 => limit,
                _ => continue,
            };
            let kt_j = ELEMENTARY_CHARGE_C / self.slope;
            let inverse_square = 2.0 * PI * ELECTRON_MASS_KG * kt_j / (PLANCK_J_S * PLANCK_J_S);
            let log = 2.0_f64.ln() + 1.5 * inverse_square.ln() - limit_ev * self.slope
                + self.intercepts[i - 1]
                - self.intercepts[i];
            let (one, other) = (self.means[i - 1], self.means[i]);
            let by_slope = -1.5 / self.slope - limit_ev + one.0 - other.0;
            let variance = by_slope.powi(2) * self.slope_variance + 1.0 / one.1 + 1.0 / other.1;
            out.push(Density {
                lower,
                limit_ev,
                electron_density_per_m3: log.exp(),
                relative_uncertainty: widen * variance.sqrt(),
            });
        }
        out
    }
}

fn median(mut values: Vec<f64>) -> f64 {
    if values.is_empty() {
        return f64::NAN;
    }
    values.sort_by(f64::total_cmp);
    let middle = values.len() / 2;
    if values.len() % 2 == 1 {
        values[middle]
    } else {
        f64::midpoint(values[middle - 1], values[middle])
    }
}
