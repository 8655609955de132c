//! What is known about the spectrum of one species: levels, lines and where they come from.
//! These are the values that the catalogue concludes and that every answer is made of.

use std::sync::Arc;

use crate::atom::{HalfInteger, Species};

/// How a position came about.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum PositionOrigin {
    /// Observed as a line.
    Measured,
    /// The difference of two levels of one scale.
    Ritz,
    /// Made by the calculator.
    Computed,
}

/// How a transition rate came about.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum RateOrigin {
    /// Given by a source (as rate, f or gf).
    Published,
    /// Follows from published values (LS fractions of a multiplet).
    Derived,
    /// Made by the calculator.
    Computed,
    /// A bound from the prior for unknown rates; never a value of its own.
    Prior,
}

/// What a line entry stands for.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum LineKind {
    /// One transition between two levels.
    #[default]
    Line,
    /// A multiplet mean that stands alone because no components are held.
    Mean,
    /// Several transitions that a source reports as one line.
    Blend,
    /// A line of one isotope.
    Isotope,
    /// One transition that no table lists: it follows from two measured levels. Its rate is computed
    /// or not known.
    Ritz,
}

/// Parity of a level.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Parity {
    /// Even.
    Even,
    /// Odd; terms carry a trailing `o`.
    Odd,
}

/// One energy level, as the catalogue concludes it.
#[derive(Clone, Debug, PartialEq)]
pub struct Level {
    /// Number of the level inside its species, in order of energy; stable for one catalogue state.
    pub number: u32,
    /// Whose level.
    pub species: Species,
    /// Energy above the ground level of the species, cm⁻¹.
    pub energy_per_cm: f64,
    /// 1 σ of the energy, cm⁻¹.
    pub energy_uncertainty_per_cm: f64,
    /// Electron configuration, shells separated by blanks: `1s 2p`, `3d6 (5D) 4s`.
    pub configuration: Option<Arc<str>>,
    /// Term symbol with a trailing `o` for odd parity: `3Po`, `2[3/2]o`.
    pub term: Option<Arc<str>>,
    /// Total angular momentum; `None` where no source gives it.
    pub j: Option<HalfInteger>,
    /// Statistical weight: 2J + 1, or what a source gives for a level without J.
    pub g: Option<f64>,
    /// Parity, where the label tells it.
    pub parity: Option<Parity>,
    /// Measured or computed (never `Ritz`).
    pub origin: PositionOrigin,
    /// Key of the source of the energy.
    pub source: Arc<str>,
}

/// One spectral line, as the catalogue concludes it.
#[derive(Clone, Debug, PartialEq)]
pub struct Line {
    /// Whose line.
    pub species: Species,
    /// Vacuum wavenumber, cm⁻¹.
    pub wavenumber_per_cm: f64,
    /// 1 σ of the wavenumber, cm⁻¹.
    pub wavenumber_uncertainty_per_cm: f64,
    /// How the position came about.
    pub position_origin: PositionOrigin,
    /// Key of the source of the position.
    pub position_source: Arc<str>,
    /// Lower level, where known.
    pub lower: Option<Arc<Level>>,
    /// Upper level, where known.
    pub upper: Option<Arc<Level>>,
    /// Spontaneous emission rate of this line, s⁻¹.
    pub rate_per_s: Option<f64>,
    /// 1 σ of the rate as a fraction of it.
    pub rate_relative_uncertainty: Option<f64>,
    /// How the rate came about.
    pub rate_origin: Option<RateOrigin>,
    /// Key of the source of the rate.
    pub rate_source: Option<Arc<str>>,
    /// What the entry stands for.
    pub kind: LineKind,
}

impl Line {
    /// Whether no table lists it and nobody rates it: it follows from two levels alone, and only the
    /// prior for unknown rates says how strong it may be.
    pub fn is_unlisted_and_unrated(&self) -> bool {
        self.kind == LineKind::Ritz && self.rate_per_s.is_none()
    }
}

/// Down to which strength a source claims to list the lines of a species.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Completeness {
    /// Nothing is claimed for lines between excited states.
    GroundTerm,
    /// Lines down to 3e-2 of the strongest.
    Strong,
    /// All lines of the computed series.
    Computed,
    /// Lines down to 1e-3 of the strongest.
    Full,
}

impl Completeness {
    /// The strength, as a fraction of the species' strongest line in the band under arc-like
    /// conditions, below which lines may be missing; `None` where nothing is claimed.
    pub const fn limit(self) -> Option<f64> {
        match self {
            Self::GroundTerm => None,
            Self::Strong => Some(3e-2),
            Self::Full => Some(1e-3),
            Self::Computed => Some(0.0),
        }
    }

    /// The word used in descriptions and tables.
    pub const fn word(self) -> &'static str {
        match self {
            Self::GroundTerm => "ground-term",
            Self::Strong => "strong",
            Self::Computed => "computed",
            Self::Full => "full",
        }
    }
}

/// What one source claims to cover of one species.
#[derive(Clone, Debug, PartialEq)]
pub struct Scope {
    /// Start of the band, vacuum nm.
    pub from_nm: f64,
    /// End of the band, vacuum nm.
    pub to_nm: f64,
    /// Down to which strength.
    pub completeness: Completeness,
    /// Key of the source.
    pub source: Arc<str>,
}

/// How strong a line is, without its details: enough to scale a spectrum and to sum decays.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Strength {
    /// Vacuum wavenumber, cm⁻¹.
    pub wavenumber_per_cm: f64,
    /// Rate, s⁻¹, where known.
    pub rate_per_s: Option<f64>,
    /// No table lists it: it was computed, or follows from levels alone.
    pub computed: bool,
    /// Number of the lower level.
    pub lower: Option<u32>,
    /// Number of the upper level.
    pub upper: Option<u32>,
}
