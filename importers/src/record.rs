//! The one record stream that every reader produces.

use vocabulary::atom::{HalfInteger, Species};
use vocabulary::spectrum::{LineKind, RateOrigin};

/// Where a record stands in its file.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Place {
    /// File name as the mapping gives it, without folders.
    pub file: std::sync::Arc<str>,
    /// Line of the file, from 1 (or row of a binary table).
    pub line: u64,
}

/// A level as one source gives it, in the catalogue's units.
#[derive(Clone, Debug, PartialEq)]
pub struct LevelRecord {
    /// Whose level.
    pub species: Species,
    /// Energy above the ground level, cm⁻¹.
    pub energy_per_cm: f64,
    /// 1 σ, cm⁻¹: given, or one unit of the last printed digit.
    pub energy_uncertainty_per_cm: f64,
    /// Electron configuration, normalised blanks.
    pub configuration: Option<String>,
    /// Term, trailing `o` for odd parity.
    pub term: Option<String>,
    /// Total angular momentum.
    pub j: Option<HalfInteger>,
    /// Statistical weight, where it is given instead of J.
    pub g: Option<f64>,
    /// The level does not count as measured (a computed table).
    pub computed: bool,
    /// Where it stands.
    pub place: Place,
}

/// One end of a line: the level, named by what the row gives.
#[derive(Clone, Debug, PartialEq)]
pub struct LevelEnd {
    /// Energy above the ground level, cm⁻¹; `None` where the row names a level by label or J only.
    pub energy_per_cm: Option<f64>,
    /// 1 σ, cm⁻¹; `None` where the level table of the same source gives it.
    pub energy_uncertainty_per_cm: Option<f64>,
    /// Electron configuration.
    pub configuration: Option<String>,
    /// Term, trailing `o` for odd parity.
    pub term: Option<String>,
    /// Total angular momentum.
    pub j: Option<HalfInteger>,
    /// Statistical weight, where it is given instead of J.
    pub g: Option<f64>,
}

/// A line as one source gives it, in the catalogue's units.
#[derive(Clone, Debug, PartialEq)]
pub struct LineRecord {
    /// Whose line.
    pub species: Species,
    /// Vacuum wavenumber, cm⁻¹; `None` for a row that gives a rate between two levels only.
    pub wavenumber_per_cm: Option<f64>,
    /// 1 σ of the wavenumber, cm⁻¹.
    pub wavenumber_uncertainty_per_cm: Option<f64>,
    /// The position is the difference of the source's own levels, not an observation.
    pub from_levels: bool,
    /// Lower level.
    pub lower: Option<LevelEnd>,
    /// Upper level.
    pub upper: Option<LevelEnd>,
    /// Spontaneous emission rate, s⁻¹ (converted where the source gives f, gf or a log of them).
    pub rate_per_s: Option<f64>,
    /// 1 σ of the rate, relative.
    pub rate_relative_uncertainty: Option<f64>,
    /// Published, or computed by the source's own authors' rule (LS fractions).
    pub rate_origin: Option<RateOrigin>,
    /// The source's own intensity figure; ranks lines inside one source only.
    pub intensity: Option<f64>,
    /// What the row stands for.
    pub kind: LineKind,
    /// The row was computed, not measured.
    pub computed: bool,
    /// Where it stands.
    pub place: Place,
}

/// What a reader hands on.
#[derive(Clone, Debug, PartialEq)]
// Records pass by one at a time: a box would cost an allocation for each line.
#[allow(clippy::large_enum_variant)]
pub enum Record {
    /// A level.
    Level(LevelRecord),
    /// A line.
    Line(LineRecord),
}
