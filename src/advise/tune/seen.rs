//! What a laser with a linewidth of its own sees of a line.

use super::strength::{self, Dipole};
use super::{Question, Strengths};
use crate::calc::shape::ShapeError;

/// A line as a laser of finite linewidth sees it.
///
/// The laser's line is taken as a Lorentzian, as white frequency noise makes it: its width adds to
/// the natural one (two Lorentzians folded), and both are then folded with the Doppler profile.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Seen {
    /// Place of the laser in the list.
    pub laser: usize,
    /// Its linewidth (FWHM), MHz.
    pub linewidth_mhz: f64,
    /// Mean cross-section of atoms at rest at line centre, cm².
    pub natural_cross_section_cm2: Option<f64>,
    /// Mean cross-section of the gas at line centre, cm².
    pub doppler_cross_section_cm2: Option<f64>,
    /// Intensity that saturates a two-level atom, mW/cm²: that of narrow light × (1 + laser
    /// width / natural width).
    pub saturation_mw_per_cm2: Option<f64>,
    /// What the cell absorbs of its weak light.
    pub absorbed: Option<Absorbed>,
}

/// The line itself, as far as it is known.
pub(super) struct Narrow {
    pub dipole: Option<Dipole>,
    pub natural_hz: Option<f64>,
    pub saturation_mw_per_cm2: Option<f64>,
    pub mass_u: f64,
    /// Absorbing atoms, cm⁻³.
    pub absorbers_per_cm3: Option<f64>,
    /// Hyperfine components, where known: share of the strength, distance in MHz.
    pub components: Vec<(f64, f64)>,
}

/// Absorption of weak light by the cell.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Absorbed {
    /// Part that is absorbed.
    pub fraction: f64,
    /// Where, in MHz from the centre of gravity: at the strongest point of the hyperfine
    /// structure; `None` at line centre, where no structure is known or was asked for.
    pub offset_mhz: Option<f64>,
}

/// What the cell absorbs of weak light whose line adds to the Lorentzian part (FWHM, Hz).
pub(super) fn absorbed(
    question: &Question,
    line: &Narrow,
    lorentzian_hz: Option<f64>,
) -> Result<Option<Absorbed>, ShapeError> {
    let (Some(absorbers), Some(dipole)) = (line.absorbers_per_cm3, &line.dipole) else {
        return Ok(None);
    };
    let (temperature_k, width_hz) = (question.temperature_k, lorentzian_hz.unwrap_or(0.0));
    let strongest = strength::strongest_point(
        dipole,
        &line.components,
        temperature_k,
        line.mass_u,
        width_hz,
    )?;
    let (cross_section_cm2, offset_mhz) = match strongest {
        Some((cross_section, offset)) => (cross_section, Some(offset)),
        None => (
            dipole.doppler_cross_section_cm2(temperature_k, line.mass_u, width_hz)?,
            None,
        ),
    };
    Ok(Some(Absorbed {
        fraction: strength::absorbed_fraction(absorbers, cross_section_cm2, question.cell_cm),
        offset_mhz,
    }))
}

/// What each of the lasers that reach a line and have a linewidth sees of it.
pub(super) fn seen(
    question: &Question,
    lasers: &[usize],
    line: &Narrow,
) -> Result<Vec<Seen>, ShapeError> {
    let with_width = |&laser: &usize| Some((laser, question.lasers[laser].linewidth_mhz?));
    let of_laser = |(laser, linewidth_mhz): (usize, f64)| {
        let both_hz = line.natural_hz.map(|hz| hz + 1e6 * linewidth_mhz);
        let strengths = match &line.dipole {
            Some(dipole) => Some(strengths(question, dipole, both_hz, line.mass_u)?),
            None => None,
        };
        Ok(Seen {
            laser,
            linewidth_mhz,
            natural_cross_section_cm2: strengths.and_then(|s| s.natural_cross_section_cm2),
            doppler_cross_section_cm2: strengths.map(|s| s.doppler_cross_section_cm2),
            saturation_mw_per_cm2: line
                .saturation_mw_per_cm2
                .zip(line.natural_hz.zip(both_hz))
                .map(|(narrow, (natural, both))| narrow * both / natural),
            absorbed: absorbed(question, line, both_hz)?,
        })
    };
    lasers.iter().filter_map(with_width).map(of_laser).collect()
}

/// Strengths of a line whose Lorentzian part has this width (FWHM, Hz).
pub(super) fn strengths(
    question: &Question,
    dipole: &Dipole,
    lorentzian_hz: Option<f64>,
    mass_u: f64,
) -> Result<Strengths, ShapeError> {
    Ok(Strengths {
        oscillator_strength: dipole.oscillator_strength(),
        natural_cross_section_cm2: lorentzian_hz.map(|hz| dipole.natural_cross_section_cm2(hz)),
        doppler_cross_section_cm2: dipole.doppler_cross_section_cm2(
            question.temperature_k,
            mass_u,
            lorentzian_hz.unwrap_or(0.0),
        )?,
    })
}
