//! Everything that emits in and around a window, ready to be compared: the common ground of all
//! interference answers.

use std::ops::Range;

use vocabulary::light::SpectralWidth;
use vocabulary::spectrum::Line;

use super::emission::{Conditions, Emitter, InstrumentForm, emitters};
use super::error::AdviseError;
use super::feature;
use super::pressure::Pressure;
use super::spectrum::Spectrum;
use super::unrated::{PriorLight, prior_light};
use crate::calc::shape::{LineWidths, Profile, ShapeError, natural_fwhm_hz};

/// Pressure widths below this part of the instrument width are no source of uncertainty.
const NO_PRESSURE: f64 = 1e-3;
/// How far profiles are followed, in instrument widths, or in pressure widths where those are
/// larger.
pub const REACH_WIDTHS: f64 = 20.0;

/// One line of the scene.
pub struct Emission<'s> {
    /// Index of its spectrum.
    pub spectrum: usize,
    /// The line.
    pub line: &'s Line,
    /// Vacuum wavelength, nm.
    pub nm: f64,
    /// 1 σ of it, nm.
    pub sigma_nm: f64,
    /// Relative light; `None` where it cannot be rated.
    pub light: Option<f64>,
    /// Relative 1 σ of the light, from rate and excitation; not what the whole species shares.
    pub light_sigma: f64,
    /// What a prior says of its light, where that is not known and one is to be had.
    pub prior: Option<PriorLight>,
    /// Doppler and Lorentzian widths of the line itself, pressure included.
    pub widths: LineWidths,
    /// What pressure adds to them.
    pub pressure: Pressure,
    /// Profile as the instrument sees it.
    pub profile: Profile,
    /// Index of its feature.
    pub feature: usize,
}

/// One feature of the scene.
pub struct Feature {
    /// Index of its spectrum.
    pub spectrum: usize,
    /// Its components, indices into [`Scene::emissions`], by wavelength.
    pub components: Vec<usize>,
    /// Vacuum wavelength, weighted by light where rated, nm.
    pub nm: f64,
    /// Light of its rated components; `None` where none is rated.
    pub light: Option<f64>,
    /// Signal of an instrument centred on it, per nm; `None` where none is rated.
    pub signal: Option<f64>,
    /// Relative 1 σ of the signal.
    pub signal_sigma: f64,
}

/// Lines of all species around a window, their light and their profiles.
pub struct Scene<'s> {
    /// What is held of each species.
    pub spectra: &'s [Spectrum],
    /// The light of each species.
    pub emitters: Vec<Emitter>,
    /// Lines by wavelength.
    pub emissions: Vec<Emission<'s>>,
    /// Features by the wavelength of their first component.
    pub features: Vec<Feature>,
    /// FWHM of the instrument.
    pub width: SpectralWidth,
    /// Form of its response.
    pub form: InstrumentForm,
    /// Largest pressure width (FWHM), nm.
    widest_nm: f64,
}

impl<'s> Scene<'s> {
    /// Sets the scene.
    ///
    /// # Errors
    /// Conditions under which populations or profiles cannot be computed.
    pub fn new(
        spectra: &'s [Spectrum],
        conditions: &Conditions,
        width: SpectralWidth,
    ) -> Result<Self, AdviseError> {
        let emitters = emitters(spectra, conditions)?;
        let form = &conditions.details.instrument;
        let mut emissions = Vec::new();
        for (index, spectrum) in spectra.iter().enumerate() {
            let decays = spectrum.decay_rates();
            for line in &spectrum.lines {
                let nm = 1e7 / line.wavenumber_per_cm;
                let of_shape = |cause| AdviseError::Shape {
                    species: spectrum.species,
                    cause,
                };
                let pressure = Pressure::of(spectrum, line, conditions).map_err(of_shape)?;
                let widths = widths(spectrum, line, &decays, conditions)
                    .map_err(of_shape)?
                    .with_lorentz(pressure.fwhm_nm());
                let profile = seen(widths, form, width.at_nm(nm)).map_err(of_shape)?;
                emissions.push(Emission {
                    spectrum: index,
                    line,
                    nm,
                    sigma_nm: nm * line.wavenumber_uncertainty_per_cm / line.wavenumber_per_cm,
                    light: emitters[index].light(line),
                    prior: prior_light(line, spectrum.limit_per_cm, &emitters[index]),
                    light_sigma: emitters[index].light_sigma(line),
                    widths,
                    pressure,
                    profile,
                    feature: 0,
                });
            }
        }
        emissions.sort_by(|a, b| a.nm.total_cmp(&b.nm).then(a.spectrum.cmp(&b.spectrum)));
        let features = features(&mut emissions, width);
        let widths = emissions.iter().map(|e| e.pressure.fwhm_nm());
        let widest_nm = widths.fold(0.0, f64::max);
        Ok(Self {
            spectra,
            emitters,
            emissions,
            features,
            width,
            form: form.clone(),
            widest_nm,
        })
    }

    /// Emissions that are followed to a position seen at an instrument width, nm: those within
    /// [`REACH_WIDTHS`] of it, or of their own pressure width.
    pub fn reaching(&self, nm: f64, width_nm: f64) -> impl Iterator<Item = usize> + '_ {
        let near = self.around(nm, REACH_WIDTHS * width_nm.max(self.widest_nm));
        near.filter(move |&i| {
            let emission = &self.emissions[i];
            let own_nm = width_nm.max(emission.pressure.fwhm_nm());
            (emission.nm - nm).abs() <= REACH_WIDTHS * own_nm
        })
    }

    /// Relative 1 σ of what a line puts at an offset (nm) from it, as its pressure width is not
    /// known exactly; 0 where pressure hardly counts.
    pub fn pressure_sigma(&self, emission: &Emission<'_>, offset_nm: f64) -> f64 {
        let added_nm = emission.pressure.fwhm_nm();
        let width_nm = self.width.at_nm(emission.nm);
        if added_nm < NO_PRESSURE * width_nm {
            return 0.0;
        }
        let wider = emission.pressure.upper_fwhm_nm();
        let by = |fwhm_nm: f64| {
            let widths = emission.widths.with_lorentz(fwhm_nm - added_nm);
            seen(widths, &self.form, width_nm).map(|p| p.density(offset_nm))
        };
        let at = emission.profile.density(offset_nm);
        match (by(wider), by(added_nm * added_nm / wider)) {
            (Ok(wide), Ok(narrow)) if at > 0.0 => (wide - narrow).abs() / (2.0 * at),
            _ => 0.0,
        }
    }

    /// Emissions whose wavelength lies within `reach_nm` of a position.
    pub fn around(&self, nm: f64, reach_nm: f64) -> Range<usize> {
        let from = self.emissions.partition_point(|e| e.nm < nm - reach_nm);
        let to = self.emissions.partition_point(|e| e.nm <= nm + reach_nm);
        from..to
    }
}

/// Doppler and natural width of a line.
fn widths(
    spectrum: &Spectrum,
    line: &Line,
    decays: &[f64],
    conditions: &Conditions,
) -> Result<LineWidths, ShapeError> {
    let decay = |level: &Option<std::sync::Arc<vocabulary::spectrum::Level>>| {
        level
            .as_ref()
            .and_then(|l| decays.get(l.number as usize))
            .copied()
            .unwrap_or(0.0)
    };
    let nm = 1e7 / line.wavenumber_per_cm;
    let natural = natural_fwhm_hz(decay(&line.upper), decay(&line.lower))?;
    LineWidths::new(nm, conditions.gas_temperature_k, spectrum.mass_u, natural)
}

/// A line through an instrument.
pub(super) fn seen(
    widths: LineWidths,
    form: &InstrumentForm,
    fwhm_nm: f64,
) -> Result<Profile, ShapeError> {
    Profile::new(widths, Some(&form.of_width(fwhm_nm)))
}

fn features(emissions: &mut [Emission<'_>], width: SpectralWidth) -> Vec<Feature> {
    let lines: Vec<(f64, &Line)> = emissions.iter().map(|e| (e.nm, e.line)).collect();
    let groups = feature::group(&lines, |nm| width.at_nm(nm));
    let features: Vec<Feature> = groups
        .into_iter()
        .map(|components| seen_as_one(emissions, components))
        .collect();
    for (index, feature) in features.iter().enumerate() {
        for &component in &feature.components {
            emissions[component].feature = index;
        }
    }
    features
}

fn seen_as_one(emissions: &[Emission<'_>], components: Vec<usize>) -> Feature {
    let of = || components.iter().map(|&i| &emissions[i]);
    let rated = || of().filter_map(|e| e.light.map(|light| (light, e)));
    let light: f64 = rated().map(|(light, _)| light).sum();
    let is_rated = rated().next().is_some();
    let nm = if light > 0.0 {
        rated().map(|(light, e)| light * e.nm).sum::<f64>() / light
    } else {
        of().map(|e| e.nm).sum::<f64>() / components.len() as f64
    };
    let parts: Vec<(f64, f64)> = rated()
        .map(|(light, e)| (light * e.profile.density(e.nm - nm), e.light_sigma))
        .collect();
    let signal: f64 = parts.iter().map(|(part, _)| part).sum();
    let variance: f64 = parts
        .iter()
        .map(|(part, sigma)| (part * sigma).powi(2))
        .sum();
    Feature {
        spectrum: emissions[components[0]].spectrum,
        nm,
        light: is_rated.then_some(light),
        signal: is_rated.then_some(signal),
        signal_sigma: if signal > 0.0 {
            variance.sqrt() / signal
        } else {
            0.0
        },
        components,
    }
}
