//! One spectral quantity: a wavelength, wavenumber, photon energy or frequency.

use std::fmt;
use std::str::FromStr;

use super::number::{Wanted, split_positive};
use super::unit::KNOWN;
use super::{Air, Medium, PositionMedium, QuantityError, SpectralKind, SpectralUnit};

const WANTED: Wanted = Wanted {
    what: "spectral position",
    example: "656.28nm",
};

/// A position as it was typed. A number without a unit is taken as nm, and `unit_assumed` says so.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SpectralQuantity {
    /// The number, above zero and finite.
    pub value: f64,
    /// Its unit.
    pub unit: SpectralUnit,
    /// No unit was typed.
    pub unit_assumed: bool,
}

impl SpectralQuantity {
    /// A quantity with its unit.
    ///
    /// # Errors
    /// A number that is not finite or not above zero.
    pub fn new(value: f64, unit: SpectralUnit) -> Result<Self, QuantityError> {
        let text = format!("{value}{unit}");
        if !value.is_finite() {
            let Wanted { what, example } = WANTED;
            return Err(QuantityError::NotFinite {
                text,
                what,
                example,
            });
        }
        if value <= 0.0 {
            let what = WANTED.what;
            return Err(QuantityError::NotPositive { text, what });
        }
        Ok(Self {
            value,
            unit,
            unit_assumed: false,
        })
    }

    /// The wavelength as typed, nm; `None` for another kind of quantity.
    pub fn typed_nm(self) -> Option<f64> {
        let wavelength = self.unit.kind() == SpectralKind::Wavelength;
        wavelength.then(|| self.value * self.unit.size())
    }

    /// The medium in which a wavelength is read; `None` for another kind, which needs none.
    pub fn read_in(self, medium: Medium) -> Option<PositionMedium> {
        self.typed_nm().map(|nm| medium.of_typed_nm(nm))
    }

    /// Vacuum wavenumber, cm⁻¹.
    ///
    /// # Errors
    /// A wavelength in air outside the bounds of the index of air; a value so extreme that the
    /// wavenumber is no finite number above zero.
    pub fn wavenumber_per_cm(self, medium: Medium, air: &Air) -> Result<f64, QuantityError> {
        let wavenumber_per_cm = match (self.typed_nm(), self.read_in(medium)) {
            (Some(nm), Some(PositionMedium::Air)) => 1e7 / air.to_vacuum_nm(nm)?.nm,
            (Some(nm), _) => 1e7 / nm,
            (None, _) => self.value * self.unit.size(),
        };
        if wavenumber_per_cm.is_finite() && wavenumber_per_cm > 0.0 {
            return Ok(wavenumber_per_cm);
        }
        let Wanted { what, example } = WANTED;
        Err(QuantityError::NotFinite {
            text: self.to_string(),
            what,
            example,
        })
    }
}

/// Number and unit without a blank: `656.28nm`, `15237.4cm-1`.
impl fmt::Display for SpectralQuantity {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}{}", self.value, self.unit)
    }
}

impl FromStr for SpectralQuantity {
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

/// Reads a unit; `None` where nothing was typed.
pub(super) fn read_unit(
    text: &str,
    unit: &str,
    what: &'static str,
) -> Result<Option<SpectralUnit>, QuantityError> {
    if unit.is_empty() {
        return Ok(None);
    }
    let found = SpectralUnit::parse(unit);
    found.map(Some).ok_or_else(|| QuantityError::UnknownUnit {
        text: text.trim().to_owned(),
        unit: unit.to_owned(),
        what,
        suggestion: SpectralUnit::suggestion(unit),
        known: KNOWN,
    })
}
