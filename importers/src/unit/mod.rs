//! Units as tables write them, turned into factors.

mod parse;
mod symbols;

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

/// Which grammar and which meanings a unit text follows.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Dialect {
    /// A mapping written by hand: any of the spellings, `A` is the Ångström.
    #[default]
    Mapping,
    /// VOUnits 1.1.
    VoUnits,
    /// CDS standard for catalogues, 2.0.
    Cds,
    /// FITS standard 4.0, section 4.3.
    Fits,
    /// Free text as in ECSV.
    Free,
    /// The closed list of XSAMS 1.0, where `A` is the Ångström.
    Xsams,
}

/// Reads a unit text.
///
/// # Errors
/// A text that is no unit of the dialect.
pub fn parse(text: &str, dialect: Dialect) -> Result<Unit, UnitError> {
    parse::parse(text, dialect)
}

impl Unit {
    /// A plain number.
    pub const ONE: Self = Self {
        coefficient: 1.0,
        exponent: 0,
        dimension: NONE,
        logarithm: false,
    };

    fn logarithm_of(self) -> Self {
        Self {
            logarithm: true,
            ..self
        }
    }

    /// The product with a power of another unit; `None` where the powers leave their range.
    fn times(self, other: Self, power: i32) -> Option<Self> {
        let other = other.power(power)?;
        let mut dimension = self.dimension;
        for (own, more) in dimension.iter_mut().zip(other.dimension) {
            *own = own.checked_add(more)?;
        }
        Some(Self {
            coefficient: self.coefficient * other.coefficient,
            exponent: self.exponent.checked_add(other.exponent)?,
            dimension,
            logarithm: false,
        })
    }

    fn power(self, power: i32) -> Option<Self> {
        let times = i8::try_from(power).ok()?;
        let mut dimension = self.dimension;
        for own in &mut dimension {
            *own = own.checked_mul(times)?;
        }
        Some(Self {
            coefficient: self.coefficient.powi(power),
            exponent: self.exponent.checked_mul(power)?,
            dimension,
            logarithm: false,
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn per_cm(text: &str, dialect: Dialect, value: f64) -> f64 {
        match parse(text, dialect).unwrap().to_per_cm().unwrap() {
            ToPerCm::Times(factor) => factor * value,
            ToPerCm::Over(factor) => factor / value,
        }
    }

    #[test]
    fn decimal_units_convert_exactly() {
        for (text, dialect, value, expected) in [
            ("nm", Dialect::VoUnits, 500.0, 20_000.0),
            ("0.1nm", Dialect::Cds, 5000.0, 20_000.0),
            ("Angstrom", Dialect::VoUnits, 5000.0, 20_000.0),
            ("A", Dialect::Xsams, 5000.0, 20_000.0),
            ("0.1 nm", Dialect::Free, 5000.0, 20_000.0),
            ("um", Dialect::Fits, 0.5, 20_000.0),
            ("cm-1", Dialect::Cds, 20_000.0, 20_000.0),
            ("1 / cm", Dialect::Free, 20_000.0, 20_000.0),
            ("cm**-1", Dialect::VoUnits, 20_000.0, 20_000.0),
            ("1/cm", Dialect::Xsams, 20_000.0, 20_000.0),
            ("10+3cm-1", Dialect::Cds, 20.0, 20_000.0),
        ] {
            assert_eq!(per_cm(text, dialect, value), expected, "{text}");
        }
    }

    #[test]
    fn energies_convert_by_the_constants() {
        for (text, value, expected) in [
            // CODATA 2022: 1 eV = 8065.543937… cm⁻¹, 1 Ry = 109737.31568157 cm⁻¹,
            // 1 K = 0.695034800 cm⁻¹; kJ/mol: 83.59347 cm⁻¹ (common practice).
            ("eV", 1.0, 8_065.543_937),
            ("meV", 1000.0, 8_065.543_937),
            ("Ry", 1.0, 109_737.315_681_57),
            ("hartree", 0.5, 109_737.315_681_57),
            ("K", 1.0, 0.695_034_800),
            ("kJ/mol", 1.0, 83.593_472),
            ("GHz", 29.979_245_8, 1.0),
        ] {
            let found = per_cm(text, Dialect::Mapping, value);
            // The figures above carry eight digits or more.
            assert!((found / expected - 1.0).abs() < 2e-8, "{text}: {found}");
        }
    }

    #[test]
    fn dialects_keep_their_rules() {
        assert_eq!(parse("---", Dialect::Cds).unwrap(), Unit::ONE);
        assert!(parse("[-]", Dialect::Cds).unwrap().logarithm);
        assert!(parse("[0.1nm]", Dialect::Cds).unwrap().logarithm);
        assert!(parse("log(nm)", Dialect::VoUnits).unwrap().logarithm);
        assert!(parse("", Dialect::VoUnits).is_err());
        assert!(parse("0.1 nm", Dialect::Cds).is_err());
        assert!(parse("cm-1", Dialect::VoUnits).is_err());
        assert!(!parse("A", Dialect::VoUnits).unwrap().is_length());
        assert!(parse("NM", Dialect::Mapping).is_err());
        assert_eq!(
            parse("10+8s-1", Dialect::Cds).unwrap().to_per_s(),
            Some(1e8)
        );
        assert_eq!(
            parse("1e8 s-1", Dialect::Mapping).unwrap().to_per_s(),
            Some(1e8)
        );
        assert_eq!(
            parse("10**8.s**-1", Dialect::VoUnits).unwrap().to_per_s(),
            Some(1e8)
        );
        assert_eq!(parse("min", Dialect::VoUnits).unwrap().factor(), 60.0);
        for bad in [
            "",
            "(",
            "nm)",
            "nm..",
            "1.5x10",
            "m**",
            "\"x\"",
            "10**999s",
            "((((((((((((((((((nm",
        ] {
            assert!(parse(bad, Dialect::Mapping).is_err(), "{bad}");
        }
    }

    proptest::proptest! {
        #[test]
        fn never_panics(text in "\\PC*") {
            for dialect in [Dialect::Mapping, Dialect::VoUnits, Dialect::Cds, Dialect::Fits] {
                let _ = parse(&text, dialect);
            }
        }

        #[test]
        fn never_panics_on_near_units(text in "[0-9.*/()x+^nmscAkeVHz \\[\\]-]{0,24}") {
            let _ = parse(&text, Dialect::Mapping);
            let _ = parse(&text, Dialect::Cds);
        }
    }
}
