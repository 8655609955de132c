//! Units as tables write them, turned into factors.

use thiserror::Error;

use crate::spectral::JOULE_PER_PER_CM;

/// A unit: `coefficient · 10^exponent` times SI base units to these powers.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Unit {
    /// Factor that is no power of ten.
    pub coefficient: f64,
    /// Power of ten, kept apart so that decimal units convert with one rounding.
    pub exponent: i32,
    /// Powers of metre, kilogram, second, ampere, kelvin, mole, candela.
    pub dimension: Dimension,
    /// The column holds the decimal logarithm of the value in this unit.
    pub logarithm: bool,
}

/// Powers of metre, kilogram, second, ampere, kelvin, mole, candela.
pub type Dimension = [i8; 7];

/// No dimension.
pub const NONE: Dimension = [0; 7];
const LENGTH: Dimension = [1, 0, 0, 0, 0, 0, 0];
const PER_LENGTH: Dimension = [-1, 0, 0, 0, 0, 0, 0];
const PER_TIME: Dimension = [0, 0, -1, 0, 0, 0, 0];
const ENERGY: Dimension = [2, 1, -2, 0, 0, 0, 0];
const MOLAR_ENERGY: Dimension = [2, 1, -2, 0, 0, -1, 0];
const TEMPERATURE: Dimension = [0, 0, 0, 0, 1, 0, 0];

/// Why a unit text cannot be used.
#[derive(Clone, Debug, Error, PartialEq, Eq)]
pub enum UnitError {
    /// Not a unit of this dialect.
    #[error("`{text}` is no unit known here")]
    Unknown {
        /// The text.
        text: String,
    },
    /// A unit of another kind of quantity.
    #[error("`{text}` is no unit of {wanted}")]
    WrongKind {
        /// The text.
        text: String,
        /// The quantity.
        wanted: &'static str,
    },
}

/// How a spectral quantity becomes a wavenumber in cm⁻¹.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum ToPerCm {
    /// Wavenumber = factor × value.
    Times(f64),
    /// Wavenumber = factor ÷ value (wavelengths).
    Over(f64),
}

impl Unit {
    /// The factor to the SI unit.
    pub fn factor(&self) -> f64 {
        scaled(self.coefficient, self.exponent)
    }

    /// The factor to ten to the minus `places` of the SI unit (9: nm).
    pub fn scaled_factor(&self, places: i32) -> f64 {
        scaled(self.coefficient, self.exponent + places)
    }

    /// The factor to another unit of the same dimension.
    pub fn ratio_to(&self, other: &Self) -> Option<f64> {
        let same = self.dimension == other.dimension;
        same.then(|| {
            scaled(
                self.coefficient / other.coefficient,
                self.exponent - other.exponent,
            )
        })
    }

    /// How an energy, wavenumber, frequency or wavelength in this unit becomes a wavenumber.
    pub fn to_per_cm(&self) -> Option<ToPerCm> {
        let c = self.coefficient;
        match self.dimension {
            LENGTH => Some(ToPerCm::Over(scaled(1.0 / c, -2 - self.exponent))),
            PER_LENGTH => Some(ToPerCm::Times(scaled(c, self.exponent - 2))),
            PER_TIME => Some(ToPerCm::Times(
                scaled(c, self.exponent - 2) / vocabulary::light::constants::SPEED_OF_LIGHT_M_PER_S,
            )),
            ENERGY => Some(ToPerCm::Times(self.factor() / JOULE_PER_PER_CM)),
            MOLAR_ENERGY => Some(ToPerCm::Times(
                self.factor() / 1000.0 * crate::spectral::PER_CM_PER_KJ_PER_MOL,
            )),
            TEMPERATURE => Some(ToPerCm::Times(
                self.factor() * crate::spectral::PER_CM_PER_KELVIN,
            )),
            _ => None,
        }
    }

    /// Whether values are lengths.
    pub fn is_length(&self) -> bool {
        self.dimension == LENGTH
    }

    /// The factor to s⁻¹.
    pub fn to_per_s(&self) -> Option<f64> {
        (self.dimension == PER_TIME).then(|| self.factor())
    }

    /// The factor to a plain number.
    pub fn to_number(&self) -> Option<f64> {
        (self.dimension == NONE).then(|| self.factor())
    }
}

/// A coefficient times a power of ten, with one rounding where the power is exact.
fn scaled(coefficient: f64, exponent: i32) -> f64 {
    match exponent {
        0..=22 => coefficient * 10f64.powi(exponent),
        -22..=-1 => coefficient / 10f64.powi(-exponent),
        _ => coefficient * 10f64.powi(exponent),
    }
}

/// Reads a unit as a mapping states it.
///
/// # Errors
/// A text that is no unit.
pub fn parse(text: &str) -> Result<Unit, UnitError> {
    let unknown = || UnitError::Unknown {
        text: text.to_owned(),
    };
    let (coefficient, exponent, dimension) = match text.trim() {
        "nm" => (1.0, -9, LENGTH),
        "A" | "Å" | "Angstrom" | "angstrom" | "0.1nm" | "0.1 nm" => (1.0, -10, LENGTH),
        "um" | "µm" | "μm" => (1.0, -6, LENGTH),
        "cm-1" | "1/cm" | "cm^-1" | "cm**-1" => (1.0, 2, PER_LENGTH),
        "eV" => (
            vocabulary::light::constants::ELEMENTARY_CHARGE_C * 1e19,
            -19,
            ENERGY,
        ),
        "Hz" | "s-1" | "1/s" => (1.0, 0, PER_TIME),
        "1" => (1.0, 0, NONE),
        "%" => (1.0, -2, NONE),
        _ => return Err(unknown()),
    };
    Ok(Unit {
        coefficient,
        exponent,
        dimension,
        logarithm: false,
    })
}
