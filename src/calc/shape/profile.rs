//! A line as an instrument sees it.

use super::error::ShapeError;
use super::instrument::Instrument;
use super::quadrature::integrate;
use super::voigt::Voigt;
use super::widths::{FWHM_PER_SIGMA, LineWidths};

/// Accuracy of the convolution as a fraction of the highest density that can occur.
const CONVOLUTION_ERROR: f64 = 1e-8;
/// Where the line core ends, in its larger width, outwards: panels of the convolution.
const CORE: [f64; 6] = [0.5, 2.0, 6.0, 20.0, 100.0, 1000.0];

/// The signal of an instrument of response R (unit area) from a line of unit area and profile φ
/// that lies at `offset` from where the instrument is set:
/// (R * φ)(offset) = ∫ R(v) φ(offset − v) dv, per nm.
///
/// With a Gaussian instrument this is a Voigt profile (variances add); with any other the integral
/// over the support of R is taken numerically, to 1e-8 of its largest possible value.
#[derive(Clone, Debug)]
pub struct Profile {
    kind: Kind,
}

#[derive(Clone, Debug)]
enum Kind {
    /// Line and Gaussian instrument (or no instrument) together.
    Voigt(Voigt),
    /// A line without width: the instrument itself.
    Bare(Instrument),
    /// A broadened line seen through straight pieces of response.
    Blurred {
        line: Voigt,
        pieces: Vec<(f64, f64)>,
        ceiling: f64,
    },
}

impl Profile {
    /// The profile of a line of these widths seen by an instrument (`None`: as it is).
    ///
    /// # Errors
    /// Widths that are negative or not finite, or no width at all.
    pub fn new(widths: LineWidths, instrument: Option<&Instrument>) -> Result<Self, ShapeError> {
        let line = match Voigt::new(widths) {
            Ok(line) => Some(line),
            Err(ShapeError::NoWidth) => None,
            Err(error) => return Err(error),
        };
        let instrument = instrument.cloned().map(Instrument::checked).transpose()?;
        let kind = match (line, instrument) {
            (None, None) => return Err(ShapeError::NoWidth),
            (Some(line), None) => Kind::Voigt(line),
            (_, Some(Instrument::Gaussian { fwhm_nm })) => {
                Kind::Voigt(Voigt::new(widths.with_gaussian(fwhm_nm / FWHM_PER_SIGMA))?)
            }
            (None, Some(instrument)) => Kind::Bare(instrument),
            (Some(line), Some(instrument)) => blurred(line, &instrument),
        };
        Ok(Self { kind })
    }

    /// Density per nm at an offset (nm): the line's position minus where the instrument is set.
    pub fn density(&self, offset_nm: f64) -> f64 {
        match &self.kind {
            Kind::Voigt(voigt) => voigt.density(offset_nm),
            Kind::Bare(instrument) => instrument.density(offset_nm),
            Kind::Blurred {
                line,
                pieces,
                ceiling,
            } => convolve(line, pieces, *ceiling, offset_nm),
        }
    }

    /// Density per nm with the instrument set to the line.
    pub fn centre(&self) -> f64 {
        self.density(0.0)
    }

    /// Density at an offset as a fraction of that at the centre.
    pub fn relative(&self, offset_nm: f64) -> f64 {
        self.density(offset_nm) / self.centre()
    }
}

fn blurred(line: Voigt, instrument: &Instrument) -> Kind {
    let pieces = instrument.pieces().unwrap_or_default();
    let height = pieces.iter().map(|p| p.1).fold(0.0, f64::max);
    // |R * φ| is bounded by the larger value of either, each having unit area.
    let ceiling = height.min(line.peak());
    Kind::Blurred {
        line,
        pieces,
        ceiling,
    }
}

fn convolve(line: &Voigt, pieces: &[(f64, f64)], ceiling: f64, offset: f64) -> f64 {
    let scale = line.widths().largest();
    let support = pieces[pieces.len() - 1].0 - pieces[0].0;
    let tolerance_per_nm = CONVOLUTION_ERROR * ceiling / support;
    let mut total = 0.0;
    for pair in pieces.windows(2) {
        let [(from, low), (to, high)] = [pair[0], pair[1]];
        if low == 0.0 && high == 0.0 {
            continue;
        }
        let slope = (high - low) / (to - from);
        let f = |v: f64| (low + slope * (v - from)) * line.density(offset - v);
        let mut start = from;
        for edge in edges(offset, scale, from, to) {
            total += integrate(&f, start, edge, tolerance_per_nm * (edge - start));
            start = edge;
        }
    }
    total
}

/// The panel borders after `from` up to and with `to`: around the line core where it lies inside.
fn edges(centre: f64, scale: f64, from: f64, to: f64) -> impl Iterator<Item = f64> {
    let below = CORE.iter().rev().map(move |k| centre - k * scale);
    let above = CORE.iter().map(move |k| centre + k * scale);
    below
        .chain([centre])
        .chain(above)
        .filter(move |&edge| edge > from && edge < to)
        .chain([to])
}

/// What a second line adds at the target: its signal with the instrument (response R) centred on
/// the target, over the target's own signal there, both lines emitting the same:
/// (R * φ_other)(offset) / (R * φ_target)(0).
///
/// `offset_nm` is the other line's position minus that of the target (nm); its sign matters only
/// for a response that is not symmetric. Multiply by the ratio of the emissions to get an
/// interference fraction.
pub fn overlap(target: &Profile, other: &Profile, offset_nm: f64) -> f64 {
    other.density(offset_nm) / target.centre()
}
