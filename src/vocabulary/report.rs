//! What sources report of one species, row by row, beside what the catalogue concludes from it:
//! the material of audits and of comparisons between sources.

use std::sync::Arc;

use crate::atom::{HalfInteger, Species};
use crate::spectrum::{LineKind, Parity, PositionOrigin, RateOrigin};

/// A level as one source gives it.
#[derive(Clone, Debug, PartialEq)]
pub struct ReportedLevel {
    /// Energy above the ground level, cm⁻¹.
    pub energy_per_cm: f64,
    /// 1 σ, cm⁻¹.
    pub uncertainty_per_cm: f64,
    /// Configuration as written.
    pub configuration: Option<Arc<str>>,
    /// Term as written.
    pub term: Option<Arc<str>>,
    /// Total angular momentum.
    pub j: Option<HalfInteger>,
    /// Statistical weight, where given instead of J.
    pub g: Option<f64>,
    /// Parity, where the label tells it.
    pub parity: Option<Parity>,
    /// Not measured.
    pub computed: bool,
    /// It is a row of a table of levels; else a line names it.
    pub own_row: bool,
    /// Row of the table: line of the file.
    pub row: u64,
    /// The concluded level that it joined, an index into [`Reports::levels`].
    pub joined: Option<usize>,
}

/// A line as one source gives it.
#[derive(Clone, Debug, PartialEq)]
pub struct ReportedLine {
    /// Vacuum wavenumber, cm⁻¹.
    pub wavenumber_per_cm: Option<f64>,
    /// 1 σ, cm⁻¹.
    pub uncertainty_per_cm: Option<f64>,
    /// The source says that it computed the position from its levels.
    pub from_levels: bool,
    /// Lower level, an index into the levels of the same source.
    pub lower: Option<usize>,
    /// Upper level, an index into the levels of the same source.
    pub upper: Option<usize>,
    /// Rate, s⁻¹.
    pub rate_per_s: Option<f64>,
    /// 1 σ of the rate, relative.
    pub rate_relative_uncertainty: Option<f64>,
    /// Origin of the rate.
    pub rate_origin: Option<RateOrigin>,
    /// What the row stands for.
    pub kind: LineKind,
    /// Not measured.
    pub computed: bool,
    /// Row of the table: line of the file.
    pub row: u64,
    /// The concluded line that it joined, an index into [`Reports::lines`].
    pub joined: Option<usize>,
}

/// All that one source reports of one species.
#[derive(Clone, Debug, PartialEq)]
pub struct ReportedSource {
    /// Its key.
    pub key: Arc<str>,
    /// Its values are computed.
    pub computed: bool,
    /// Uncertainty common to all its levels, cm⁻¹.
    pub scale_per_cm: f64,
    /// The same as a fraction of the energy.
    pub scale_relative: f64,
    /// Its levels.
    pub levels: Vec<ReportedLevel>,
    /// Its lines.
    pub lines: Vec<ReportedLine>,
}

/// A level as concluded.
#[derive(Clone, Debug, PartialEq)]
pub struct ConcludedLevel {
    /// Energy, cm⁻¹.
    pub energy_per_cm: f64,
    /// 1 σ, cm⁻¹.
    pub uncertainty_per_cm: f64,
    /// Configuration.
    pub configuration: Option<Arc<str>>,
    /// Term.
    pub term: Option<Arc<str>>,
    /// Total angular momentum.
    pub j: Option<HalfInteger>,
    /// No source measured it.
    pub computed: bool,
    /// Source of the energy, an index into [`Reports::sources`].
    pub source: usize,
    /// Reports that joined it: source and index.
    pub reports: Vec<(usize, usize)>,
}

/// A line as concluded.
#[derive(Clone, Debug, PartialEq)]
pub struct ConcludedLine {
    /// Vacuum wavenumber, cm⁻¹.
    pub wavenumber_per_cm: f64,
    /// 1 σ, cm⁻¹.
    pub uncertainty_per_cm: f64,
    /// How the position came about.
    pub position_origin: PositionOrigin,
    /// Source of the position, an index into [`Reports::sources`].
    pub position_source: usize,
    /// Lower level, an index into [`Reports::levels`].
    pub lower: Option<usize>,
    /// Upper level.
    pub upper: Option<usize>,
    /// What it stands for.
    pub kind: LineKind,
    /// Reports that joined it: source and index.
    pub reports: Vec<(usize, usize)>,
}

/// Everything reported and concluded of one species.
#[derive(Clone, Debug, PartialEq)]
pub struct Reports {
    /// The species.
    pub species: Species,
    /// The sources, best rank first.
    pub sources: Vec<ReportedSource>,
    /// Concluded levels, by energy.
    pub levels: Vec<ConcludedLevel>,
    /// Concluded lines, by wavenumber.
    pub lines: Vec<ConcludedLine>,
}

impl ReportedSource {
    /// Uncertainty of its level scale at an energy, cm⁻¹.
    pub fn scale_at(&self, energy_per_cm: f64) -> f64 {
        self.scale_per_cm + self.scale_relative * energy_per_cm.abs()
    }

    /// Lower and upper level of a line, where the source gives both.
    pub fn ends(&self, line: &ReportedLine) -> Option<(&ReportedLevel, &ReportedLevel)> {
        Some((self.levels.get(line.lower?)?, self.levels.get(line.upper?)?))
    }

    /// Position of a line from the source's own levels, with its 1 σ, cm⁻¹.
    pub fn ritz(&self, line: &ReportedLine) -> Option<(f64, f64)> {
        let (lower, upper) = self.ends(line)?;
        Some((
            (upper.energy_per_cm - lower.energy_per_cm).abs(),
            upper.uncertainty_per_cm.hypot(lower.uncertainty_per_cm),
        ))
    }

    /// Position of a line as given, else from the levels, with its 1 σ, cm⁻¹.
    pub fn position(&self, line: &ReportedLine) -> Option<(f64, f64)> {
        line.wavenumber_per_cm
            .zip(line.uncertainty_per_cm)
            .or_else(|| self.ritz(line))
    }
}
