//! Widths: of an instrument, a laser, a passband.

use std::fmt;
use std::str::FromStr;

use super::number::{Wanted, split_positive};
use super::quantity::read_unit;
use super::{QuantityError, SpectralKind, SpectralUnit};

const WANTED: Wanted = Wanted {
    what: "width",
    example: "0.1nm",
};

/// A width as it was typed: `0.1nm`, `50pm`, `0.5A`, `2GHz`, `0.3cm-1`. It keeps its kind, since a
/// width in wavenumber or frequency is another one in wavelength at each position.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SpectralWidth {
    /// The number, above zero and finite.
    pub value: f64,
    /// Its unit.
    pub unit: SpectralUnit,
    /// No unit was typed: nm was assumed.
    pub unit_assumed: bool,
}

impl SpectralWidth {
    /// A width in nm. The caller sees to it that it is finite and above zero.
    pub const fn from_nm(width_nm: f64) -> Self {
        Self {
            value: width_nm,
            unit: SpectralUnit::Nanometre,
            unit_assumed: false,
        }
    }

    /// The width in nm at a position, vacuum wavelength in nm: Δλ = λ² Δσ for a width in
    /// wavenumber, frequency or energy. First order: good to (Δλ/λ)². The factor n² between widths
    /// in vacuum and air (0.06 %) is left out.
    pub fn at_nm(self, vacuum_nm: f64) -> f64 {
        let size = self.value * self.unit.size();
        match self.unit.kind() {
            SpectralKind::Wavelength => size,
            _ => size * vacuum_nm * vacuum_nm * 1e-7,
        }
    }

    /// The width in cm⁻¹ at a position, vacuum wavelength in nm; first order, as [`Self::at_nm`].
    pub fn at_per_cm(self, vacuum_nm: f64) -> f64 {
        let size = self.value * self.unit.size();
        match self.unit.kind() {
            SpectralKind::Wavelength => size * 1e7 / (vacuum_nm * vacuum_nm),
            _ => size,
        }
    }
}

impl FromStr for SpectralWidth {
    type Err = QuantityError;

    fn from_str(text: &str) -> Result<Self, QuantityError> {
        let (value, unit) = split_positive(text, WANTED)?;
        let found = read_unit(text, unit, WANTED.what)?;
        Ok(Self {
            value,
            unit: found.unwrap_or(SpectralUnit::Nanometre),
            unit_assumed: found.is_none(),
        })
    }
}

/// `0.1nm`.
impl fmt::Display for SpectralWidth {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}{}", self.value, self.unit)
    }
}
