//! Units of spectral quantities.

use std::fmt;

use super::constants::{PER_CM_PER_EV, SPEED_OF_LIGHT_M_PER_S};

/// What a unit measures. Wavelengths depend on the medium, the others do not.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum SpectralKind {
    /// A wavelength, in vacuum or air.
    Wavelength,
    /// A vacuum wavenumber.
    Wavenumber,
    /// A photon energy.
    Energy,
    /// A frequency.
    Frequency,
}

/// A unit that a spectral quantity can carry.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum SpectralUnit {
    /// `nm`.
    Nanometre,
    /// `A`, `Å`, `Angstrom`: 0.1 nm.
    Angstrom,
    /// `um`, `µm`.
    Micrometre,
    /// `pm`.
    Picometre,
    /// `cm-1`.
    PerCm,
    /// `meV`.
    MilliElectronvolt,
    /// `eV`.
    Electronvolt,
    /// `keV`.
    KiloElectronvolt,
    /// `Hz`.
    Hertz,
    /// `kHz`.
    Kilohertz,
    /// `MHz`.
    Megahertz,
    /// `GHz`.
    Gigahertz,
    /// `THz`.
    Terahertz,
    /// `PHz`.
    Petahertz,
}

use SpectralUnit as U;

/// Every unit, its spelling, its kind, and its size in nm (wavelengths) or cm⁻¹ (all others).
const UNITS: [(U, &str, SpectralKind, f64); 14] = [
    (U::Nanometre, "nm", SpectralKind::Wavelength, 1.0),
    (U::Angstrom, "A", SpectralKind::Wavelength, 0.1),
    (U::Micrometre, "um", SpectralKind::Wavelength, 1e3),
    (U::Picometre, "pm", SpectralKind::Wavelength, 1e-3),
    (U::PerCm, "cm-1", SpectralKind::Wavenumber, 1.0),
    (
        U::MilliElectronvolt,
        "meV",
        SpectralKind::Energy,
        1e-3 * PER_CM_PER_EV,
    ),
    (U::Electronvolt, "eV", SpectralKind::Energy, PER_CM_PER_EV),
    (
        U::KiloElectronvolt,
        "keV",
        SpectralKind::Energy,
        1e3 * PER_CM_PER_EV,
    ),
    (U::Hertz, "Hz", SpectralKind::Frequency, PER_CM_PER_HZ),
    (
        U::Kilohertz,
        "kHz",
        SpectralKind::Frequency,
        1e3 * PER_CM_PER_HZ,
    ),
    (
        U::Megahertz,
        "MHz",
        SpectralKind::Frequency,
        1e6 * PER_CM_PER_HZ,
    ),
    (
        U::Gigahertz,
        "GHz",
        SpectralKind::Frequency,
        1e9 * PER_CM_PER_HZ,
    ),
    (
        U::Terahertz,
        "THz",
        SpectralKind::Frequency,
        1e12 * PER_CM_PER_HZ,
    ),
    (
        U::Petahertz,
        "PHz",
        SpectralKind::Frequency,
        1e15 * PER_CM_PER_HZ,
    ),
];

/// Wavenumber of 1 Hz, cm⁻¹: 1 / (100 c).
const PER_CM_PER_HZ: f64 = 0.01 / SPEED_OF_LIGHT_M_PER_S;

/// Other spellings that are accepted.
const ALIASES: [(&str, U); 12] = [
    ("Å", U::Angstrom),
    ("\u{212b}", U::Angstrom),
    ("A\u{30a}", U::Angstrom),
    ("Angstrom", U::Angstrom),
    ("angstrom", U::Angstrom),
    ("µm", U::Micrometre),
    ("μm", U::Micrometre),
    ("cm^-1", U::PerCm),
    ("cm⁻¹", U::PerCm),
    ("/cm", U::PerCm),
    ("1/cm", U::PerCm),
    ("cm−1", U::PerCm),
];

/// The units, for messages.
pub(super) const KNOWN: &str = "nm, A, um, pm, cm-1, meV, eV, keV or Hz to PHz";

impl SpectralUnit {
    /// All units.
    pub fn all() -> impl Iterator<Item = Self> {
        UNITS.iter().map(|&(unit, ..)| unit)
    }

    /// Reads a unit as it is spelt; case matters (`meV`, `MHz`).
    pub fn parse(text: &str) -> Option<Self> {
        let spelt = UNITS.iter().find(|(_, name, ..)| *name == text);
        let alias = || ALIASES.iter().find(|(name, _)| *name == text);
        spelt.map(|&(unit, ..)| unit).or_else(|| Some(alias()?.1))
    }

    /// The spelling that answers use.
    pub fn symbol(self) -> &'static str {
        self.row().1
    }

    /// What the unit measures.
    pub fn kind(self) -> SpectralKind {
        self.row().2
    }

    /// Size of the unit in nm (wavelengths) or cm⁻¹ (all others).
    pub(super) fn size(self) -> f64 {
        self.row().3
    }

    /// The unit that differs from `text` in case only.
    pub(super) fn suggestion(text: &str) -> Option<&'static str> {
        UNITS
            .iter()
            .map(|&(_, name, ..)| name)
            .find(|name| name.eq_ignore_ascii_case(text))
    }

    fn row(self) -> &'static (U, &'static str, SpectralKind, f64) {
        UNITS
            .iter()
            .find(|(unit, ..)| *unit == self)
            .unwrap_or(&UNITS[0])
    }
}

impl fmt::Display for SpectralUnit {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.symbol())
    }
}
