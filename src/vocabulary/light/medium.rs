//! Media: how wavelengths are read and shown.

use std::fmt;
use std::ops::RangeInclusive;
use std::str::FromStr;

use super::{Air, AirError, QuantityError};

/// Wavelengths that `auto` takes to be in air, nm.
pub const AUTO_AIR_NM: RangeInclusive<f64> = 200.0..=2000.0;

/// The medium that somebody asks for.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub enum Medium {
    /// Air from 200 nm to 2000 nm, vacuum elsewhere.
    #[default]
    Auto,
    /// Vacuum throughout.
    Vacuum,
    /// Air throughout.
    Air,
}

/// The medium of one position.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum PositionMedium {
    /// Vacuum.
    Vacuum,
    /// Air.
    Air,
}

/// A position as an answer shows it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ShownPosition {
    /// Wavelength in `medium`, nm.
    pub nm: f64,
    /// The medium of the wavelength.
    pub medium: PositionMedium,
    /// The index of air was extrapolated (outside 300–1690 nm).
    pub air_extrapolated: bool,
}

impl Medium {
    /// A line of this vacuum wavelength (nm) as an answer shows it.
    ///
    /// # Errors
    /// Air is asked for where its index is not known (outside 185–2500 nm).
    pub fn show(self, vacuum_nm: f64, air: &Air) -> Result<ShownPosition, AirError> {
        let medium = self.of_vacuum_nm(vacuum_nm);
        let (nm, air_extrapolated) = match medium {
            PositionMedium::Vacuum => (vacuum_nm, false),
            PositionMedium::Air => {
                let found = air.to_air_nm(vacuum_nm)?;
                (found.nm, found.extrapolated)
            }
        };
        Ok(ShownPosition {
            nm,
            medium,
            air_extrapolated,
        })
    }

    /// The medium in which a line of this vacuum wavelength (nm) is shown: under `auto`, air where
    /// the vacuum wavelength lies from 200 nm to 2000 nm.
    pub fn of_vacuum_nm(self, vacuum_nm: f64) -> PositionMedium {
        self.resolve(vacuum_nm)
    }

    /// The medium in which a typed wavelength (nm) is read: under `auto`, air where the typed
    /// number lies from 200 nm to 2000 nm. Within 0.07 nm below 200 nm this is not the inverse of
    /// [`Medium::of_vacuum_nm`] (a line at 200.03 nm in vacuum is shown at 199.97 nm in air), so
    /// answers name the medium of every position.
    pub fn of_typed_nm(self, typed_nm: f64) -> PositionMedium {
        self.resolve(typed_nm)
    }

    /// The border of `auto` that lies strictly between two typed wavelengths, nm.
    pub(super) fn border_between_nm(self, low_nm: f64, high_nm: f64) -> Option<f64> {
        let borders = [*AUTO_AIR_NM.start(), *AUTO_AIR_NM.end()];
        borders
            .into_iter()
            .find(|&border| self == Self::Auto && low_nm < border && border < high_nm)
    }

    fn resolve(self, wavelength_nm: f64) -> PositionMedium {
        match self {
            Self::Auto if AUTO_AIR_NM.contains(&wavelength_nm) => PositionMedium::Air,
            Self::Auto | Self::Vacuum => PositionMedium::Vacuum,
            Self::Air => PositionMedium::Air,
        }
    }
}

impl FromStr for Medium {
    type Err = QuantityError;

    fn from_str(text: &str) -> Result<Self, QuantityError> {
        match text.trim() {
            "auto" => Ok(Self::Auto),
            "vacuum" => Ok(Self::Vacuum),
            "air" => Ok(Self::Air),
            other => Err(QuantityError::NoSuchMedium {
                text: other.to_owned(),
            }),
        }
    }
}

impl fmt::Display for Medium {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::Auto => "auto",
            Self::Vacuum => "vacuum",
            Self::Air => "air",
        })
    }
}

/// `vacuum` or `air`, as the answers write it.
impl fmt::Display for PositionMedium {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::Vacuum => "vacuum",
            Self::Air => "air",
        })
    }
}
