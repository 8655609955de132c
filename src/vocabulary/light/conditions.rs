//! Conditions of a plasma that carry units: temperatures and number densities.

use std::fmt;
use std::str::FromStr;

use super::QuantityError;
use super::constants::KELVIN_PER_EV;
use super::number::{Wanted, split_positive};

const TEMPERATURE: Wanted = Wanted {
    what: "temperature",
    example: "1eV or 11600K",
};
const DENSITY: Wanted = Wanted {
    what: "density",
    example: "1e20m-3 or 1e14cm-3",
};

/// A temperature above zero: `1eV`, `0.5keV`, `300meV`, `11600K`. The unit is required, because 1
/// and 1000 are sensible numbers in both.
#[derive(Clone, Copy, Debug, PartialEq, PartialOrd)]
pub struct Temperature {
    /// The number as typed.
    value: f64,
    unit: TemperatureUnit,
}

#[derive(Clone, Copy, Debug, PartialEq, PartialOrd)]
enum TemperatureUnit {
    Kelvin,
    MilliElectronvolt,
    Electronvolt,
    KiloElectronvolt,
}

impl TemperatureUnit {
    const ALL: [Self; 4] = [
        Self::Kelvin,
        Self::MilliElectronvolt,
        Self::Electronvolt,
        Self::KiloElectronvolt,
    ];

    fn symbol(self) -> &'static str {
        match self {
            Self::Kelvin => "K",
            Self::MilliElectronvolt => "meV",
            Self::Electronvolt => "eV",
            Self::KiloElectronvolt => "keV",
        }
    }

    fn size_kelvin(self) -> f64 {
        match self {
            Self::Kelvin => 1.0,
            Self::MilliElectronvolt => 1e-3 * KELVIN_PER_EV,
            Self::Electronvolt => KELVIN_PER_EV,
            Self::KiloElectronvolt => 1e3 * KELVIN_PER_EV,
        }
    }
}

impl Temperature {
    /// A temperature in kelvin; `None` unless finite and above zero.
    pub fn from_kelvin(kelvin: f64) -> Option<Self> {
        Self::new(kelvin, TemperatureUnit::Kelvin)
    }

    /// A temperature by its thermal energy kT in eV; `None` unless finite and above zero.
    pub fn from_ev(ev: f64) -> Option<Self> {
        Self::new(ev, TemperatureUnit::Electronvolt)
    }

    fn new(value: f64, unit: TemperatureUnit) -> Option<Self> {
        (value.is_finite() && value > 0.0).then_some(Self { value, unit })
    }

    /// Kelvin.
    pub fn kelvin(self) -> f64 {
        self.value * self.unit.size_kelvin()
    }

    /// Thermal energy kT, eV.
    pub fn ev(self) -> f64 {
        match self.unit {
            TemperatureUnit::Electronvolt => self.value,
            unit => self.value * (unit.size_kelvin() / KELVIN_PER_EV),
        }
    }
}

impl FromStr for Temperature {
    type Err = QuantityError;

    fn from_str(text: &str) -> Result<Self, QuantityError> {
        let (value, word) = split_positive(text, TEMPERATURE)?;
        if word.is_empty() {
            return Err(QuantityError::UnitMissing {
                text: text.trim().to_owned(),
                what: TEMPERATURE.what,
                example: format!("{value}eV or {value}K"),
            });
        }
        let units = TemperatureUnit::ALL;
        let found = units.into_iter().find(|unit| unit.symbol() == word);
        let near = units
            .into_iter()
            .find(|unit| unit.symbol().eq_ignore_ascii_case(word));
        let unit = found.ok_or_else(|| QuantityError::UnknownUnit {
            text: text.trim().to_owned(),
            unit: word.to_owned(),
            what: TEMPERATURE.what,
            suggestion: near.map(TemperatureUnit::symbol),
            known: "K, meV, eV or keV",
        })?;
        Ok(Self { value, unit })
    }
}

/// As typed: `1eV`, `11600K`.
impl fmt::Display for Temperature {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}{}", self.value, self.unit.symbol())
    }
}

/// A number density above zero: `1e20m-3`, `1e14cm-3`. The unit is required.
#[derive(Clone, Copy, Debug, PartialEq, PartialOrd)]
pub struct NumberDensity {
    per_m3: f64,
}

const PER_M3: [&str; 4] = ["m-3", "m^-3", "m⁻³", "/m3"];
const PER_CM3: [&str; 4] = ["cm-3", "cm^-3", "cm⁻³", "/cm3"];

impl NumberDensity {
    /// A density in m⁻³; `None` unless finite and above zero.
    pub fn from_per_m3(per_m3: f64) -> Option<Self> {
        (per_m3.is_finite() && per_m3 > 0.0).then_some(Self { per_m3 })
    }

    /// m⁻³.
    pub fn per_m3(self) -> f64 {
        self.per_m3
    }

    /// cm⁻³.
    pub fn per_cm3(self) -> f64 {
        self.per_m3 * 1e-6
    }
}

impl FromStr for NumberDensity {
    type Err = QuantityError;

    fn from_str(text: &str) -> Result<Self, QuantityError> {
        let (value, word) = split_positive(text, DENSITY)?;
        let typed = || text.trim().to_owned();
        let per_m3 = match word {
            "" => {
                return Err(QuantityError::UnitMissing {
                    text: typed(),
                    what: DENSITY.what,
                    example: format!("{value:e}m-3 or {value:e}cm-3"),
                });
            }
            word if PER_M3.contains(&word) => value,
            word if PER_CM3.contains(&word) => value * 1e6,
            word => {
                return Err(QuantityError::UnknownUnit {
                    text: typed(),
                    unit: word.to_owned(),
                    what: DENSITY.what,
                    suggestion: None,
                    known: "m-3 or cm-3",
                });
            }
        };
        Self::from_per_m3(per_m3).ok_or_else(|| QuantityError::NotFinite {
            text: typed(),
            what: DENSITY.what,
            example: DENSITY.example,
        })
    }
}

/// In m⁻³: `1e20m-3`.
impl fmt::Display for NumberDensity {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{:e}m-3", self.per_m3)
    }
}
