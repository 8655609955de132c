//! What charges and neutral atoms around an atom do to the width of its lines.

use vocabulary::atom::Configuration;
use vocabulary::light::constants::PER_CM_PER_EV;
use vocabulary::spectrum::{Level, Line};

use super::emission::Conditions;
use super::spectrum::Spectrum;
use crate::calc::shape::{
    OuterElectron, Perturbers, PressureWidth, ShapeError, hydrogen_stark, polarisability_a0_cubed,
    quadratic_stark, van_der_waals,
};

/// Pressure widths of one line.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Pressure {
    /// By electrons and ions; `None` where no electron density is given, or where the levels do
    /// not tell it.
    pub stark: Option<PressureWidth>,
    /// By neutral atoms; `None` where no gas is given, or where the levels do not tell it.
    pub van_der_waals: Option<PressureWidth>,
    /// A width was asked for that cannot be given.
    pub is_missing: bool,
}

impl Pressure {
    /// Pressure widths of a line under these conditions.
    ///
    /// # Errors
    /// Conditions that no width can be computed from.
    pub fn of(
        spectrum: &Spectrum,
        line: &Line,
        conditions: &Conditions,
    ) -> Result<Self, ShapeError> {
        let density = conditions.electron_density_per_m3;
        let gas = &conditions.details.gas;
        let mut out = Self::default();
        if density.is_none() && gas.is_empty() {
            return Ok(out);
        }
        let te_ev = conditions.kt_per_cm / PER_CM_PER_EV;
        let electrons = electrons(spectrum, line);
        if let Some(density) = density {
            out.stark = match (shells(line), electrons) {
                (Some(shells), _) => {
                    let z = spectrum.species.atomic_number;
                    Some(hydrogen_stark(z, shells, density, te_ev)?)
                }
                (None, Some((upper, lower))) => {
                    let nm = 1e7 / line.wavenumber_per_cm;
                    Some(quadratic_stark(nm, upper, lower, density, te_ev)?)
                }
                (None, None) => None,
            };
            out.is_missing |= out.stark.is_none();
        }
        if !gas.is_empty() {
            out.van_der_waals = match electrons {
                Some(pair) => by_gas(spectrum, line, pair, conditions)?,
                None => None,
            };
            out.is_missing |= out.van_der_waals.is_none();
        }
        Ok(out)
    }

    /// The sum of the widths (FWHM, Lorentzian), nm.
    pub fn fwhm_nm(&self) -> f64 {
        self.parts().map(|w| w.fwhm_nm).sum()
    }

    /// The sum of the widths if each were larger by its 1 σ.
    pub fn upper_fwhm_nm(&self) -> f64 {
        self.parts().map(|w| w.fwhm_nm * w.uncertainty_factor).sum()
    }

    /// The widths that are there.
    pub fn parts(&self) -> impl Iterator<Item = PressureWidth> {
        self.stark.into_iter().chain(self.van_der_waals)
    }
}

/// How far off a line may lie and still reach a target by the widths that pressure gives under
/// these conditions, nm: [`super::REACH_WIDTHS`] times the width of H-beta (Gigosos et al. 2003),
/// one of the widest lines, at most of 20 nm. 0 without pressure.
pub fn pressure_reach_nm(conditions: &Conditions) -> f64 {
    let stark = conditions
        .electron_density_per_m3
        .map_or(0.0, |n| 4.8 * (n / 1e23).powf(0.681_16));
    // 0.1 nm is more than neutral gas does below some bar.
    let gas = f64::from(u8::from(!conditions.details.gas.is_empty()));
    super::REACH_WIDTHS * stark.max(gas * 0.1).min(20.0)
}

/// Lower and upper principal quantum number of a line of a one-electron atom.
fn shells(line: &Line) -> Option<(u32, u32)> {
    if !line.species.is_one_electron() {
        return None;
    }
    let shell = |level: &Level| {
        let configuration = Configuration::parse(level.configuration.as_deref()?)?;
        Some(u32::from(configuration.outer_electron()?.n))
    };
    let pair = (
        shell(line.lower.as_deref()?)?,
        shell(line.upper.as_deref()?)?,
    );
    (pair.0 < pair.1).then_some(pair)
}

/// Outer electrons of the upper and the lower level.
fn electrons(spectrum: &Spectrum, line: &Line) -> Option<(OuterElectron, OuterElectron)> {
    let limit = spectrum.limit_per_cm?;
    Some((
        OuterElectron::of_level(line.upper.as_deref()?, limit)?,
        OuterElectron::of_level(line.lower.as_deref()?, limit)?,
    ))
}

fn by_gas(
    spectrum: &Spectrum,
    line: &Line,
    (upper, lower): (OuterElectron, OuterElectron),
    conditions: &Conditions,
) -> Result<Option<PressureWidth>, ShapeError> {
    let mut sum: Option<PressureWidth> = None;
    for gas in &conditions.details.gas {
        let Some(polarisability) = polarisability_a0_cubed(gas.atomic_number) else {
            return Ok(None);
        };
        let perturbers = Perturbers {
            density_per_m3: gas.density_per_m3,
            temperature_k: conditions.gas_temperature_k,
            mass_u: gas.mass_u,
            polarisability_a0_cubed: polarisability,
        };
        let nm = 1e7 / line.wavenumber_per_cm;
        let one = van_der_waals(nm, upper, lower, spectrum.mass_u, perturbers)?;
        sum = Some(match sum {
            None => one,
            Some(before) => PressureWidth {
                fwhm_nm: before.fwhm_nm + one.fwhm_nm,
                inside_validity: before.inside_validity && one.inside_validity,
                ..before
            },
        });
    }
    Ok(sum)
}
