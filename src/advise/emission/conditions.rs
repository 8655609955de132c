//! What the light source is like, and the instrument that looks at it.

use vocabulary::atom::{Species, SpeciesRequest};

use crate::calc::shape::{Instrument, ResponseCurve};

/// How the light of different species compares.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum EmissionModel {
    /// Each species of the mix is seen (forbidden lines aside where others are rated): its strongest rated line between 200 and 1000 nm (else
    /// anywhere) has the strength of its amount; its strongest below 200 nm, where the light that
    /// is looked at lies there.
    Visible,
    /// One temperature and real amounts; ionisation by Saha where the electron density is given.
    Lte,
    /// Excitation by electrons from the ground term and given metastable levels, decay by
    /// radiation alone; ionisation by rates of electron impact and recombination.
    Coronal,
    /// The user gives the part of an element that each stage is, or intensities of lines; inside
    /// a species LTE.
    Given,
}

/// What the light source is like.
#[derive(Clone, Debug, PartialEq)]
pub struct Conditions {
    /// How species compare.
    pub model: EmissionModel,
    /// k T of the electrons, cm⁻¹.
    pub kt_per_cm: f64,
    /// Electron density, m⁻³, where given.
    pub electron_density_per_m3: Option<f64>,
    /// Temperature of the atoms, K.
    pub gas_temperature_k: f64,
    /// What only some questions say.
    pub details: Details,
}

/// What only some questions say of source and instrument; by default nothing.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Details {
    /// How well amounts are known.
    pub amounts: Vec<Entry>,
    /// The part of its element that a stage is, where the user gives it.
    pub ion_fractions: Vec<Entry>,
    /// Levels that hold atoms beside the ground term.
    pub metastables: Vec<Metastable>,
    /// Intensities of lines that the user gives (model given).
    pub intensities: Vec<GivenIntensity>,
    /// Neutral gas that broadens lines.
    pub gas: Vec<Gas>,
    /// Form of the instrument's response.
    pub instrument: InstrumentForm,
    /// The light that is looked at lies below 200 nm. An ion that is seen there need not show
    /// visible lines: these come from levels so high that they would make its resonance lines
    /// brighter than all else by many powers of ten.
    pub far_ultraviolet: bool,
}

/// A value of a species with its uncertainty.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Entry {
    /// Whose.
    pub request: SpeciesRequest,
    /// The value.
    pub value: f64,
    /// Relative 1 σ; 0 where none is stated.
    pub relative_sigma: f64,
}

impl Entry {
    /// Index of the most exact entry that a species matches.
    pub fn of(species: Species, entries: &[Self]) -> Option<usize> {
        let matching = |e: &&Self| e.request.matches(species);
        let exact = entries
            .iter()
            .position(|e| matching(&e) && e.request.single().is_some());
        exact.or_else(|| entries.iter().position(|e| matching(&e)))
    }
}

/// A level that holds atoms beside the ground term.
#[derive(Clone, Debug, PartialEq)]
pub struct Metastable {
    /// Whose level.
    pub species: Species,
    /// Its name: a configuration or its last shells, then term and J, or an energy in cm⁻¹.
    pub level: LevelName,
    /// The part of the atoms of the species that it holds.
    pub fraction: f64,
    /// Relative 1 σ of it.
    pub relative_sigma: f64,
}

/// A level as it is typed.
#[derive(Clone, Debug, PartialEq)]
pub enum LevelName {
    /// `2s 3S`, `4s 3P 2`.
    Label(String),
    /// Its energy above the ground level, cm⁻¹.
    Energy(f64),
}

/// A line with an intensity that the user gives.
#[derive(Clone, Debug, PartialEq)]
pub struct GivenIntensity {
    /// Whose line.
    pub species: Species,
    /// Where, vacuum nm.
    pub vacuum_nm: f64,
    /// Light (power), in any one unit.
    pub intensity: f64,
    /// Relative 1 σ of it.
    pub relative_sigma: f64,
    /// As it was typed.
    pub typed: String,
}

/// A neutral gas that broadens lines.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Gas {
    /// Nuclear charge of its atoms.
    pub atomic_number: u8,
    /// Mass of an atom, u.
    pub mass_u: f64,
    /// Density, m⁻³.
    pub density_per_m3: f64,
}

/// Form of the response of an instrument.
#[derive(Clone, Debug, Default, PartialEq)]
pub enum InstrumentForm {
    /// A Gaussian.
    #[default]
    Gaussian,
    /// Equal entrance and exit slits.
    Triangular,
    /// A wide slit or a pixel.
    Rectangular,
    /// Measured.
    Measured(ResponseCurve),
}

impl InstrumentForm {
    /// An instrument of this form and a full width at half maximum, nm.
    pub fn of_width(&self, fwhm_nm: f64) -> Instrument {
        match self {
            Self::Gaussian => Instrument::Gaussian { fwhm_nm },
            Self::Triangular => Instrument::Triangular { fwhm_nm },
            Self::Rectangular => Instrument::Rectangular { width_nm: fwhm_nm },
            Self::Measured(curve) => {
                let own = curve.fwhm_nm();
                Instrument::Measured(if own == fwhm_nm {
                    curve.clone()
                } else {
                    curve.stretched(fwhm_nm / own)
                })
            }
        }
    }

    /// The word for it.
    pub const fn word(&self) -> &'static str {
        match self {
            Self::Gaussian => "gaussian",
            Self::Triangular => "triangular",
            Self::Rectangular => "rectangular",
            Self::Measured(_) => "measured",
        }
    }
}
