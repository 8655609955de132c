//! Filters, beams and detectors as they are typed.

use std::path::{Path, PathBuf};

use clap::Args;
use vocabulary::light::{Air, Medium, SpectralKind, SpectralQuantity, SpectralWidth, Temperature};

use super::CliError;
use super::table_file::TableFile;
use crate::advise::placed;
use crate::calc::filter::{
    Blocking, CurveUnit, Detector, Filter, FilterError, Illumination, Shape, SpectralCurve,
};

/// The form of a filter beside centre and width, the beam and the detector.
#[derive(Args, Debug)]
pub struct OpticsOptions {
    /// Number of cavities of an interference filter [default: 2]
    #[arg(long, value_name = "N", conflicts_with = "shape")]
    cavities: Option<u8>,
    /// Form of the passband instead of that of cavities
    #[arg(long, value_enum, value_name = "SHAPE")]
    shape: Option<ShapeName>,
    /// Highest transmission, 0.6 or 60% [default: 0.6]
    #[arg(long, value_name = "PART", allow_hyphen_values = true)]
    peak: Option<String>,
    /// Optical density outside the passband: 4 means that 1e-4 leaks
    #[arg(long, value_name = "OD", allow_hyphen_values = true)]
    blocking: Option<f64>,
    /// Shortest wavelength that is blocked [default: 200nm]
    #[arg(long, value_name = "WAVELENGTH", requires = "blocking")]
    blocking_from: Option<String>,
    /// Longest wavelength that is blocked [default: 1100nm]
    #[arg(long, value_name = "WAVELENGTH", requires = "blocking")]
    blocking_to: Option<String>,
    /// Effective index of the filter, which tilt and cone go by [default: 2.0]
    #[arg(long, value_name = "INDEX", allow_hyphen_values = true)]
    index: Option<f64>,
    /// f-number of the beam at the filter [default: collimated]
    #[arg(long, value_name = "NUMBER", allow_hyphen_values = true)]
    f_number: Option<f64>,
    /// Response of the detector, a CSV of wavelength_nm and response
    #[arg(long, value_name = "FILE")]
    detector: Option<PathBuf>,
    /// Work function of a photocathode: light of longer wavelength is not seen
    #[arg(long, value_name = "ENERGY", allow_hyphen_values = true)]
    work_function: Option<String>,
}

#[derive(clap::ValueEnum, Clone, Copy, Debug, PartialEq, Eq)]
enum ShapeName {
    Gaussian,
    Rectangular,
}

impl OpticsOptions {
    /// The form and the peak of the passband, with what was assumed.
    pub fn form(&self, assumed: &mut Vec<String>) -> Result<(Shape, f64), CliError> {
        let shape = match (self.shape, self.cavities) {
            (Some(ShapeName::Gaussian), _) => Shape::Gaussian,
            (Some(ShapeName::Rectangular), _) => Shape::Rectangular,
            (None, Some(n)) => Shape::Cavities(n),
            (None, None) => {
                assumed.push("two cavities".to_owned());
                Shape::Cavities(2)
            }
        };
        let peak = match &self.peak {
            Some(text) => part("--peak", text)?,
            None => {
                assumed.push("peak transmission 0.6".to_owned());
                0.6
            }
        };
        Ok((shape, peak))
    }

    /// The filter with blocking, index and drift.
    pub fn complete(&self, filter: Filter, drift_nm_per_k: f64) -> Result<Filter, CliError> {
        let mut filter = filter.with_drift(drift_nm_per_k)?;
        if let Some(index) = self.index {
            filter = filter.with_effective_index(index)?;
        }
        if let Some(optical_density) = self.blocking {
            filter = filter.with_blocking(Blocking {
                optical_density,
                from_nm: wavelength(self.blocking_from.as_deref().unwrap_or("200nm"))?,
                to_nm: wavelength(self.blocking_to.as_deref().unwrap_or("1100nm"))?,
            })?;
        }
        Ok(filter)
    }

    /// Limits of the blocking, nm.
    pub fn blocked_nm(&self) -> Result<Option<(f64, f64)>, CliError> {
        self.blocking
            .map(|_| {
                Ok((
                    wavelength(self.blocking_from.as_deref().unwrap_or("200nm"))?,
                    wavelength(self.blocking_to.as_deref().unwrap_or("1100nm"))?,
                ))
            })
            .transpose()
    }

    /// Optical density of the blocking.
    pub fn blocking_od(&self) -> Option<f64> {
        self.blocking
    }

    /// The beam at a tilt (degrees), with what was assumed.
    pub fn beam(&self, tilt_deg: f64, warming_k: f64, assumed: &mut Vec<String>) -> Illumination {
        if self.index.is_none() {
            assumed.push("effective index 2.0".to_owned());
        }
        Illumination {
            tilt_deg,
            f_number: self.f_number,
            warming_k,
        }
    }

    /// The detector.
    pub fn detector(&self) -> Result<Detector, CliError> {
        let mut detector = Detector::default();
        if let Some(path) = &self.detector {
            detector = detector.with_curve(curve(path, true)?);
        }
        if let Some(text) = &self.work_function {
            let energy: SpectralQuantity = text.parse()?;
            if energy.unit.kind() != SpectralKind::Energy {
                return Err(CliError::Options(
                    "--work-function takes an energy, such as 4.3eV",
                ));
            }
            let wavenumber = energy.wavenumber_per_cm(Medium::Vacuum, Air::standard())?;
            let ev = wavenumber / vocabulary::light::constants::PER_CM_PER_EV;
            detector = detector.with_work_function(ev)?;
        }
        Ok(detector)
    }
}

/// A wavelength as a filter maker gives it, nm.
pub fn wavelength(text: &str) -> Result<f64, CliError> {
    made(text.parse()?)
}

fn made(quantity: SpectralQuantity) -> Result<f64, CliError> {
    if let Some(nm) = quantity.typed_nm() {
        return Ok(nm);
    }
    let wavenumber = quantity.wavenumber_per_cm(Medium::Vacuum, Air::standard())?;
    let at = placed(wavenumber, 0.0, Medium::Auto, Air::standard())?;
    Ok(at.wavelength_nm)
}

/// A width at a centre, nm.
pub fn width(text: &str, centre_nm: f64) -> Result<f64, CliError> {
    Ok(text.parse::<SpectralWidth>()?.at_nm(centre_nm))
}

/// `0.6` or `60%`, between 0 and 1.
pub fn part(option: &str, text: &str) -> Result<f64, CliError> {
    let typed = text.trim();
    let (number, size) = match typed.strip_suffix('%') {
        Some(number) => (number.trim(), 0.01),
        None => (typed, 1.0),
    };
    let value = number.parse::<f64>().map(|v| v * size);
    match value {
        Ok(value) if (0.0..=1.0).contains(&value) => Ok(value),
        _ => Err(CliError::Usage(format!(
            "{option}: `{typed}` is no part between 0 and 1 (100%); write 0.6 or 60%"
        ))),
    }
}

/// A number with a unit word that may be left out.
pub fn number(option: &str, text: &str, units: &[&str], example: &str) -> Result<f64, CliError> {
    let typed = text.trim();
    let bare = units
        .iter()
        .find_map(|unit| typed.strip_suffix(unit))
        .unwrap_or(typed);
    match bare.trim().parse::<f64>() {
        Ok(value) if value.is_finite() => Ok(value),
        _ => Err(CliError::Usage(format!(
            "{option}: `{typed}` is no number there; write {example}"
        ))),
    }
}

/// A difference of temperatures or a drift may be negative; a temperature not.
pub fn kelvin(text: &str) -> Result<f64, CliError> {
    Ok(text.parse::<Temperature>()?.kelvin())
}

/// A curve over wavelength from a CSV: `wavelength_nm` with `transmission` (0–1) or
/// `transmission_percent`; for a detector `response` in any scale.
pub fn curve(path: &Path, response: bool) -> Result<SpectralCurve, CliError> {
    let table = TableFile::read(path)?;
    let position = table.position_column()?;
    let (value, unit) = if response {
        (
            table.needed(&["response", "sensitivity"])?,
            CurveUnit::Relative,
        )
    } else if let Some(percent) = table.column(&["transmission_percent", "percent"]) {
        (percent, CurveUnit::Percent)
    } else {
        let names = ["transmission", "fraction", "transmission_percent"];
        (table.needed(&names)?, CurveUnit::Fraction)
    };
    let mut points = Vec::with_capacity(table.len());
    for row in 0..table.len() {
        let at = table.positive(row, position.column)?;
        let nm = made(SpectralQuantity::new(at, position.unit)?)?;
        points.push((nm, table.number(row, value)?));
    }
    SpectralCurve::new(&points, unit).map_err(|cause: FilterError| CliError::Curve {
        path: path.to_owned(),
        cause,
    })
}
