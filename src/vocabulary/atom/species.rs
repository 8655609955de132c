//! One spectrum's owner: an element, or one isotope of it, in one stage of ionisation.

use std::fmt;
use std::str::FromStr;

use super::request::{SpeciesRequest, symbol_text};
use super::{SpeciesError, to_roman};

/// An atom or ion. `stage` counts from 1 for the neutral atom, as the trade writes Fe I, Fe II.
/// `isotope` is a mass number where the species is one isotope (D is hydrogen with 2), else `None`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Species {
    /// Nuclear charge Z, 1–118.
    pub atomic_number: u8,
    /// Stage of ionisation, 1 (neutral) to Z.
    pub stage: u8,
    /// Mass number of the isotope, `None` for the natural mixture.
    pub isotope: Option<u16>,
}

impl Species {
    /// A species of the natural isotope mixture.
    pub const fn new(atomic_number: u8, stage: u8) -> Self {
        Self {
            atomic_number,
            stage,
            isotope: None,
        }
    }

    /// Net charge in units of e: stage − 1.
    pub const fn charge(self) -> u8 {
        self.stage - 1
    }

    /// Charge of the core that an outer electron sees far away, in units of e: the stage.
    pub const fn core_charge(self) -> u8 {
        self.stage
    }

    /// Whether one electron is left (H I, He II, Li III …).
    pub const fn is_one_electron(self) -> bool {
        self.stage == self.atomic_number
    }

    /// A number that orders and names the species in a catalogue, the same in every catalogue:
    /// `(Z × 128 + stage) × 512 + isotope` (0 for the natural mixture).
    pub fn code(self) -> i64 {
        (i64::from(self.atomic_number) * 128 + i64::from(self.stage)) * 512
            + i64::from(self.isotope.unwrap_or(0))
    }

    /// The inverse of [`Species::code`]; `None` where the code names no species.
    pub fn from_code(code: i64) -> Option<Self> {
        let isotope = u16::try_from(code & 511).ok()?;
        let stage = u8::try_from((code >> 9) & 127).ok()?;
        let atomic_number = u8::try_from(code >> 16).ok()?;
        let sound = (1..=118).contains(&atomic_number) && (1..=atomic_number).contains(&stage);
        sound.then_some(Self {
            atomic_number,
            stage,
            isotope: (isotope != 0).then_some(isotope),
        })
    }
}

/// `Fe I`, `D I`, `6Li I`, `198Hg I`.
impl fmt::Display for Species {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let symbol = symbol_text(self.atomic_number, self.isotope);
        write!(f, "{symbol} {}", to_roman(self.stage))
    }
}

/// Reads every spelling that fixes one stage: `Fe I`, `FeI`, `Fe+`, `6Li I`, `D I`.
impl FromStr for Species {
    type Err = SpeciesError;

    fn from_str(text: &str) -> Result<Self, SpeciesError> {
        let request: SpeciesRequest = text.parse()?;
        request.single().ok_or_else(|| SpeciesError::StageMissing {
            text: text.trim().to_owned(),
            example: format!("{} I", symbol_text(request.atomic_number, request.isotope)),
        })
    }
}
