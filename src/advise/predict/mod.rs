//! `predict`: levels and lines of a series by calculation, with what each value rests on.

mod error;
mod one_electron;
mod outer;

use std::sync::Arc;

use vocabulary::atom::{HalfInteger, Species};
use vocabulary::light::{Air, Medium};

pub use error::PredictError;
pub use one_electron::one_electron;
pub use outer::outer;

use super::{Placed, placed};
use crate::calc::series::Member;

/// A series as it is asked for.
#[derive(Clone, Debug, PartialEq)]
pub enum SeriesName {
    /// All lines that end on one shell of a one-electron system: Lyman 1, Balmer 2, …
    Shell {
        /// The shell.
        lower_n: u32,
    },
    /// The levels of one l outside the ground core.
    Orbital {
        /// Orbital angular momentum of the outer electron.
        l: u32,
        /// Multiplicity of the term, where several could be meant.
        multiplicity: Option<u16>,
        /// J, where several could be meant.
        j: Option<HalfInteger>,
    },
}

/// A lower level as it is asked for.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LowerName {
    /// Principal quantum number.
    pub n: u32,
    /// Orbital angular momentum.
    pub l: u32,
    /// J; all where none is given.
    pub j: Option<HalfInteger>,
}

/// What is asked.
#[derive(Clone, Debug)]
pub struct Question {
    /// Of which species.
    pub species: Species,
    /// Which series.
    pub series: SeriesName,
    /// The series as it was typed.
    pub typed: String,
    /// First n.
    pub from_n: u32,
    /// Last n.
    pub to_n: u32,
    /// Lines to this level are wanted.
    pub to: Option<LowerName>,
    /// Temperature of the black body around, K.
    pub kelvin: Option<f64>,
    /// Medium of wavelengths.
    pub medium: Medium,
    /// Members that the user gives in place of those held.
    pub given: Vec<Member>,
}

/// A lifetime with its 1 σ as a fraction.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LevelLifetime {
    /// Lifetime, s.
    pub seconds: f64,
    /// 1 σ over the lifetime.
    pub relative_uncertainty: f64,
}

/// A level of the answer.
#[derive(Clone, Debug, PartialEq)]
pub struct PredictedLevel {
    /// Principal quantum number.
    pub n: u32,
    /// Orbital angular momentum.
    pub l: u32,
    /// J; `None` for a whole shell.
    pub j: Option<HalfInteger>,
    /// Configuration and term, as they are shown.
    pub label: String,
    /// Energy above the ground level, cm⁻¹.
    pub energy_per_cm: f64,
    /// 1 σ of the energy, cm⁻¹.
    pub uncertainty_per_cm: f64,
    /// Distance to the series limit, cm⁻¹.
    pub binding_per_cm: f64,
    /// Quantum defect n − ν.
    pub quantum_defect: f64,
    /// How the energy was had.
    pub method: String,
    /// Radiative lifetime without radiation around; `None` where it is not known or endless.
    pub lifetime: Option<LevelLifetime>,
    /// Lifetime in the black-body radiation asked for.
    pub black_body_lifetime: Option<LevelLifetime>,
    /// ν⁷/Z⁴, a₀³: how the polarisability grows along the series.
    pub polarisability_scale_a0_3: f64,
}

/// A line of the answer.
#[derive(Clone, Debug, PartialEq)]
pub struct PredictedLine {
    /// n of the upper level.
    pub n: u32,
    /// The upper level, or shell.
    pub upper: String,
    /// The lower level, or shell.
    pub lower: String,
    /// Vacuum wavenumber, cm⁻¹; the mean over the components for whole shells.
    pub wavenumber_per_cm: f64,
    /// 1 σ of the wavenumber, cm⁻¹.
    pub uncertainty_per_cm: f64,
    /// Spontaneous emission rate, s⁻¹.
    pub rate_per_s: f64,
    /// 1 σ of the rate over the rate.
    pub rate_relative_uncertainty: f64,
    /// How the rate was had.
    pub method: &'static str,
    /// The wavelength as it is shown; `None` where air has no known index there.
    pub placed: Option<Placed>,
}

/// What is answered.
#[derive(Clone, Debug, PartialEq)]
pub struct Answer {
    /// The series in words.
    pub series: String,
    /// Series limit above the ground level, cm⁻¹.
    pub limit_per_cm: f64,
    /// 1 σ of the limit, cm⁻¹.
    pub limit_uncertainty_per_cm: f64,
    /// Shortest wavelength of a named series, nm, as it is shown.
    pub limit_line: Option<Placed>,
    /// What the values rest on, one sentence each.
    pub basis: Vec<String>,
    /// Levels, by n.
    pub levels: Vec<PredictedLevel>,
    /// Lines, by n.
    pub lines: Vec<PredictedLine>,
    /// Keys of the sources whose levels were used.
    pub sources: Vec<Arc<str>>,
}

fn shown(wavenumber_per_cm: f64, uncertainty_per_cm: f64, medium: Medium) -> Option<Placed> {
    placed(
        wavenumber_per_cm,
        uncertainty_per_cm,
        medium,
        Air::standard(),
    )
    .ok()
}

impl LowerName {
    /// `5p 3/2`.
    pub fn words(self) -> String {
        let letter = crate::calc::series::orbital_letter(self.l).unwrap_or('?');
        let j = self.j.map_or(String::new(), |j| format!(" {j}"));
        format!("{}{letter}{j}", self.n)
    }
}
