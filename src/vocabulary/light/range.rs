//! Spectral ranges: `656..657nm`, `656.28+-0.3nm`, `15230..15245cm-1`.

use std::fmt;
use std::str::FromStr;

use super::number::{Wanted, split, split_positive};
use super::quantity::read_unit;
use super::{
    Air, Medium, PositionMedium, QuantityError, SpectralKind, SpectralQuantity, SpectralUnit,
};

const END: Wanted = Wanted {
    what: "spectral position",
    example: "656.28nm",
};
const HALF_WIDTH: Wanted = Wanted {
    what: "half width",
    example: "0.3nm",
};

/// A range as it was typed: its units are known, its medium not yet.
#[derive(Clone, Debug, PartialEq)]
pub struct TypedRange {
    form: Form,
    unit_assumed: bool,
    text: String,
}

#[derive(Clone, Copy, Debug, PartialEq)]
enum Form {
    Ends(SpectralQuantity, SpectralQuantity),
    Around(SpectralQuantity, SpectralQuantity),
}

/// A range in vacuum, with what was assumed on the way.
#[derive(Clone, Debug, PartialEq)]
pub struct SpectralRange {
    /// Lower end, vacuum wavenumber, cm⁻¹.
    pub wavenumber_low_per_cm: f64,
    /// Upper end, vacuum wavenumber, cm⁻¹.
    pub wavenumber_high_per_cm: f64,
    /// Lower end, vacuum wavelength, nm.
    pub vacuum_low_nm: f64,
    /// Upper end, vacuum wavelength, nm.
    pub vacuum_high_nm: f64,
    /// Medium in which wavelengths were read; `None` where none was typed (cm⁻¹, eV, Hz).
    pub read_in: Option<PositionMedium>,
    /// No unit was typed: nm was assumed.
    pub unit_assumed: bool,
    /// The index of air had to be extrapolated.
    pub air_extrapolated: bool,
    /// What was typed.
    pub typed: String,
}

impl SpectralRange {
    /// A range between two vacuum wavenumbers (cm⁻¹), in either order; `None` unless both are
    /// finite, above zero and different.
    pub fn from_wavenumbers_per_cm(one: f64, other: f64) -> Option<Self> {
        let (low, high) = (one.min(other), one.max(other));
        let sound = low > 0.0 && high.is_finite() && low < high && !one.is_nan() && !other.is_nan();
        sound.then(|| Self {
            wavenumber_low_per_cm: low,
            wavenumber_high_per_cm: high,
            vacuum_low_nm: 1e7 / high,
            vacuum_high_nm: 1e7 / low,
            read_in: None,
            unit_assumed: false,
            air_extrapolated: false,
            typed: format!("{low}..{high}cm-1"),
        })
    }

    /// Whether a vacuum wavenumber (cm⁻¹) lies inside, ends included.
    pub fn contains_per_cm(&self, wavenumber_per_cm: f64) -> bool {
        (self.wavenumber_low_per_cm..=self.wavenumber_high_per_cm).contains(&wavenumber_per_cm)
    }

    /// Middle of the range in vacuum wavelength, nm.
    pub fn centre_vacuum_nm(&self) -> f64 {
        f64::midpoint(self.vacuum_low_nm, self.vacuum_high_nm)
    }

    /// Width in vacuum wavelength, nm.
    pub fn width_nm(&self) -> f64 {
        self.vacuum_high_nm - self.vacuum_low_nm
    }
}

impl TypedRange {
    /// Whether no unit was typed.
    pub fn unit_assumed(&self) -> bool {
        self.unit_assumed
    }

    /// Turns the range into vacuum wavenumbers. Wavelengths are read in the medium of the centre
    /// of the range; wavenumbers, energies and frequencies need no medium.
    ///
    /// # Errors
    /// A range of wavelengths that crosses 200 nm or 2000 nm under `auto`; wavelengths in air
    /// outside the bounds of the index of air; a range that is empty or reaches down to zero.
    pub fn resolve(&self, medium: Medium, air: &Air) -> Result<SpectralRange, QuantityError> {
        let (one, other) = self.ends(medium, air)?;
        let read_in = self.reading(one, other, medium)?;
        let fixed = match read_in {
            Some(PositionMedium::Air) => Medium::Air,
            _ => Medium::Vacuum,
        };
        let mut range = SpectralRange::from_wavenumbers_per_cm(
            one.wavenumber_per_cm(fixed, air)?,
            other.wavenumber_per_cm(fixed, air)?,
        )
        .ok_or_else(|| QuantityError::EmptyRange {
            text: self.text.clone(),
        })?;
        range.read_in = read_in;
        range.unit_assumed = self.unit_assumed;
        range.air_extrapolated = read_in == Some(PositionMedium::Air)
            && (air.index(range.vacuum_low_nm)?.extrapolated
                || air.index(range.vacuum_high_nm)?.extrapolated);
        range.typed.clone_from(&self.text);
        Ok(range)
    }

    /// The two ends as quantities. A half width of another kind than its centre (`656nm+-2cm-1`)
    /// is taken around the centre in its own kind.
    fn ends(
        &self,
        medium: Medium,
        air: &Air,
    ) -> Result<(SpectralQuantity, SpectralQuantity), QuantityError> {
        let (mut centre, half_width) = match self.form {
            Form::Ends(one, other) => return Ok((one, other)),
            Form::Around(centre, half_width) => (centre, half_width),
        };
        let unit = if centre.unit.kind() == half_width.unit.kind() {
            centre.unit
        } else {
            let wavenumber_per_cm = centre.wavenumber_per_cm(medium, air)?;
            centre = from_wavenumber(wavenumber_per_cm, half_width.unit, medium, air)?;
            half_width.unit
        };
        let half = half_width.value * (half_width.unit.size() / unit.size());
        if half >= centre.value {
            return Err(QuantityError::ReachesZero {
                text: self.text.clone(),
            });
        }
        Ok((
            SpectralQuantity::new(centre.value - half, unit)?,
            SpectralQuantity::new(centre.value + half, unit)?,
        ))
    }

    /// The medium in which the wavelengths of the range are read.
    fn reading(
        &self,
        one: SpectralQuantity,
        other: SpectralQuantity,
        medium: Medium,
    ) -> Result<Option<PositionMedium>, QuantityError> {
        let (a, b) = match (one.typed_nm(), other.typed_nm()) {
            (None, None) => return Ok(None),
            (Some(a), Some(b)) => (a, b),
            // The shift between air and vacuum does not matter for which side of a border it is.
            (Some(a), None) => (a, 1e7 / (other.value * other.unit.size())),
            (None, Some(b)) => (1e7 / (one.value * one.unit.size()), b),
        };
        let (low, high) = (a.min(b), a.max(b));
        if let Some(border_nm) = medium.border_between_nm(low, high) {
            return Err(QuantityError::CrossesMedium {
                text: self.text.clone(),
                border_nm,
            });
        }
        Ok(Some(medium.of_typed_nm(f64::midpoint(low, high))))
    }
}

/// A vacuum wavenumber in another unit; wavelengths in the medium in which they will be read again.
fn from_wavenumber(
    wavenumber_per_cm: f64,
    unit: SpectralUnit,
    medium: Medium,
    air: &Air,
) -> Result<SpectralQuantity, QuantityError> {
    if unit.kind() != SpectralKind::Wavelength {
        return SpectralQuantity::new(wavenumber_per_cm / unit.size(), unit);
    }
    let vacuum_nm = 1e7 / wavenumber_per_cm;
    let nm = medium.show(vacuum_nm, air)?.nm;
    SpectralQuantity::new(nm / unit.size(), unit)
}

impl FromStr for TypedRange {
    type Err = QuantityError;

    fn from_str(text: &str) -> Result<Self, QuantityError> {
        let text = text.trim();
        if text.is_empty() {
            return Err(QuantityError::Empty {
                what: "range",
                example: "656..657nm",
            });
        }
        if let Some((low, high)) = text.split_once("..") {
            return read_ends(text, low, high);
        }
        let around = text.split_once("+-").or_else(|| text.split_once('±'));
        if let Some((centre, half_width)) = around {
            return read_around(text, centre, half_width);
        }
        text.parse::<SpectralQuantity>()?;
        Err(QuantityError::NotARange {
            text: text.to_owned(),
        })
    }
}

/// `LOW..HIGH`, where a unit at one end holds for both.
fn read_ends(text: &str, low: &str, high: &str) -> Result<TypedRange, QuantityError> {
    let (first, first_unit) = split_positive(low, END)?;
    let (second, second_unit) = split_positive(high, END)?;
    let first_unit = read_unit(low, first_unit, END.what)?;
    let second_unit = read_unit(high, second_unit, END.what)?;
    let (one, other, unit_assumed) = share_unit((first, first_unit), (second, second_unit));
    if one.unit.kind() == other.unit.kind() {
        let (a, b) = (one.value * one.unit.size(), other.value * other.unit.size());
        let same_unit_equal = one.unit == other.unit && one.value == other.value;
        if a == b || same_unit_equal {
            return Err(QuantityError::EmptyRange {
                text: text.to_owned(),
            });
        }
        if a > b {
            return Err(QuantityError::ReversedRange {
                text: text.to_owned(),
            });
        }
    }
    Ok(TypedRange {
        form: Form::Ends(one, other),
        unit_assumed,
        text: text.to_owned(),
    })
}

/// `CENTRE+-HALF`, where a unit behind one of them holds for both.
fn read_around(text: &str, centre: &str, half: &str) -> Result<TypedRange, QuantityError> {
    let (value, unit) = split_positive(centre, END)?;
    let (half_value, half_unit) = split(half, HALF_WIDTH)?;
    if half_value == 0.0 {
        return Err(QuantityError::EmptyRange {
            text: text.to_owned(),
        });
    }
    if half_value < 0.0 {
        return Err(QuantityError::NotPositive {
            text: text.to_owned(),
            what: HALF_WIDTH.what,
        });
    }
    let unit = read_unit(centre, unit, END.what)?;
    let half_unit = read_unit(half, half_unit, HALF_WIDTH.what)?;
    let (centre, half, unit_assumed) = share_unit((value, unit), (half_value, half_unit));
    Ok(TypedRange {
        form: Form::Around(centre, half),
        unit_assumed,
        text: text.to_owned(),
    })
}

type Part = (f64, Option<SpectralUnit>);

fn share_unit(first: Part, second: Part) -> (SpectralQuantity, SpectralQuantity, bool) {
    let unit_assumed = first.1.is_none() && second.1.is_none();
    let shared = first.1.or(second.1).unwrap_or(SpectralUnit::Nanometre);
    let quantity = |(value, unit): Part| SpectralQuantity {
        value,
        unit: unit.unwrap_or(shared),
        unit_assumed,
    };
    (quantity(first), quantity(second), unit_assumed)
}

/// The canonical spelling, units at both ends where they differ: `656..657nm`, `656.28+-0.3nm`.
impl fmt::Display for TypedRange {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let (one, other, mark) = match self.form {
            Form::Ends(one, other) => (one, other, ".."),
            Form::Around(centre, half_width) => (centre, half_width, "+-"),
        };
        if one.unit == other.unit {
            write!(f, "{}{mark}{other}", one.value)
        } else {
            write!(f, "{one}{mark}{other}")
        }
    }
}
