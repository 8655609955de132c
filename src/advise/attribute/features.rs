//! What each species could show: its features with their light at several temperatures.

use vocabulary::light::SpectralWidth;
use vocabulary::spectrum::Line;

use crate::advise::emission::{Conditions, emitters};
use crate::advise::error::AdviseError;
use crate::advise::feature;
use crate::advise::spectrum::Spectrum;

/// A feature that a peak may be.
#[derive(Clone, Debug)]
pub struct Template<'s> {
    /// Index of its spectrum.
    pub spectrum: usize,
    /// Its strongest rated component, else its first.
    pub line: &'s Line,
    /// How many components it has.
    pub components: usize,
    /// Vacuum wavelength weighted by light, nm.
    pub nm: f64,
    /// 1 σ of it, nm.
    pub sigma_nm: f64,
    /// Light at each temperature of the grid; `None` where no component is rated.
    pub light: Option<Vec<f64>>,
}

/// Features of all spectra, by wavelength; `grid` are the conditions at which light is wanted.
///
/// # Errors
/// Populations that cannot be computed.
pub fn templates<'s>(
    spectra: &'s [Spectrum],
    grid: &[Conditions],
    width: SpectralWidth,
) -> Result<Vec<Template<'s>>, AdviseError> {
    let mut light_of = Vec::with_capacity(grid.len());
    for conditions in grid {
        light_of.push(emitters(spectra, conditions)?);
    }
    let mut out = Vec::new();
    for (index, spectrum) in spectra.iter().enumerate() {
        let lines: Vec<(f64, &Line)> = spectrum
            .lines
            .iter()
            .map(|l| (1e7 / l.wavenumber_per_cm, l))
            .collect();
        for group in feature::group(&lines, |nm| width.at_nm(nm)) {
            let light: Vec<Vec<Option<f64>>> = group
                .iter()
                .map(|&i| {
                    light_of
                        .iter()
                        .map(|e| e[index].light(lines[i].1))
                        .collect()
                })
                .collect();
            out.push(template(index, &group, &lines, &light, grid.len()));
        }
    }
    out.sort_by(|a, b| a.nm.total_cmp(&b.nm));
    Ok(out)
}

fn template<'s>(
    spectrum: usize,
    group: &[usize],
    lines: &[(f64, &'s Line)],
    light: &[Vec<Option<f64>>],
    grid: usize,
) -> Template<'s> {
    let sum = |t: usize| light.iter().filter_map(|l| l[t]).sum::<f64>();
    let rated = light.iter().any(|l| l.iter().any(Option::is_some));
    // The middle of the grid weights components; inside a multiplet temperature hardly matters.
    let middle = grid / 2;
    let weight = |k: usize| light[k].get(middle).copied().flatten().unwrap_or(0.0);
    let total: f64 = (0..group.len()).map(weight).sum();
    let nm = if total > 0.0 {
        (0..group.len())
            .map(|k| weight(k) * lines[group[k]].0)
            .sum::<f64>()
            / total
    } else {
        group.iter().map(|&i| lines[i].0).sum::<f64>() / group.len() as f64
    };
    let strongest =
        (0..group.len()).max_by(|&a, &b| weight(a).total_cmp(&weight(b)).then(b.cmp(&a)));
    let line = lines[group[strongest.unwrap_or(0)]].1;
    Template {
        spectrum,
        line,
        components: group.len(),
        nm,
        sigma_nm: nm * line.wavenumber_uncertainty_per_cm / line.wavenumber_per_cm,
        light: rated.then(|| (0..grid).map(sum).collect()),
    }
}
