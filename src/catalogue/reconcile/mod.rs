//! From all reports of one species to its levels and lines: one deterministic rule, the same
//! whatever order the sources came in. Pure: no database here.
//!
//! Sources are taken in a fixed rank (papers, curated tables, model atoms, computed tables; inside
//! a kind by the declared uncertainty of their level scale, then by key). Each level report joins
//! a level that is there already or becomes one (`levels`); lines join by their pair of levels,
//! or by position where a source has no levels (`lines`). Each quantity then comes from the best
//! report for it (`choose`). Lines that follow from levels alone are added last (`ritz`).

mod choose;
mod label;
mod levels;
mod lines;
mod ritz;

use std::sync::Arc;

use vocabulary::atom::Species;
use vocabulary::spectrum::{LineKind, PositionOrigin, RateOrigin};

pub use label::Label;

/// Kinds of sources, best first.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum SourceKind {
    /// A published table whose rows lead to a paper.
    Paper,
    /// Entered by hand from compilations.
    Curated,
    /// A model atom.
    Model,
    /// Made by the calculator.
    Computed,
}

/// What the rule needs to know of a source.
#[derive(Clone, Debug)]
pub struct RankedSource {
    /// Row of the source in the catalogue.
    pub id: i64,
    /// Its key; settles ties.
    pub key: Arc<str>,
    /// Its kind.
    pub kind: SourceKind,
    /// Uncertainty common to all its levels, cm⁻¹.
    pub scale_per_cm: f64,
    /// The same as a fraction of the energy.
    pub scale_relative: f64,
}

impl RankedSource {
    /// Uncertainty of this source's level scale at an energy, cm⁻¹.
    pub fn scale_at(&self, energy_per_cm: f64) -> f64 {
        self.scale_per_cm + self.scale_relative * energy_per_cm.abs()
    }
}

/// A level report, its texts resolved.
#[derive(Clone, Debug)]
pub struct LevelReport {
    /// Energy above the ground level, cm⁻¹.
    pub energy_per_cm: f64,
    /// 1 σ, cm⁻¹.
    pub uncertainty_per_cm: f64,
    /// Configuration and term.
    pub label: Label,
    /// Twice J.
    pub twice_j: Option<u16>,
    /// Statistical weight where J is not given.
    pub g: Option<f64>,
    /// Not measured.
    pub computed: bool,
    /// It is a row of a table, not only named by a line.
    pub own_row: bool,
}

/// A line report; `lower` and `upper` index the level reports of the same source.
#[derive(Clone, Debug)]
pub struct LineReport {
    /// Vacuum wavenumber, cm⁻¹.
    pub wavenumber_per_cm: Option<f64>,
    /// 1 σ, cm⁻¹.
    pub uncertainty_per_cm: Option<f64>,
    /// The source computed the position from its levels.
    pub from_levels: bool,
    /// Lower level report.
    pub lower: Option<usize>,
    /// Upper level report.
    pub upper: Option<usize>,
    /// Twice J of the lower level where no level is linked.
    pub lower_twice_j: Option<u16>,
    /// Twice J of the upper level where no level is linked.
    pub upper_twice_j: Option<u16>,
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
}

/// All that one source reports of one species, rows in file order.
#[derive(Clone, Debug)]
pub struct SourceReports {
    /// The source.
    pub source: RankedSource,
    /// Its levels.
    pub levels: Vec<LevelReport>,
    /// Its lines.
    pub lines: Vec<LineReport>,
}

/// A concluded level.
#[derive(Clone, Debug)]
pub struct DerivedLevel {
    /// Energy, cm⁻¹.
    pub energy_per_cm: f64,
    /// 1 σ, cm⁻¹.
    pub uncertainty_per_cm: f64,
    /// Configuration and term.
    pub label: Label,
    /// Twice J.
    pub twice_j: Option<u16>,
    /// Statistical weight.
    pub g: Option<f64>,
    /// No source measured it.
    pub computed: bool,
    /// Index of the source of the energy in [`Derived::sources`].
    pub source: usize,
}

/// A concluded line.
#[derive(Clone, Debug)]
pub struct DerivedLine {
    /// Vacuum wavenumber, cm⁻¹.
    pub wavenumber_per_cm: f64,
    /// 1 σ, cm⁻¹.
    pub uncertainty_per_cm: f64,
    /// Origin of the position.
    pub position_origin: PositionOrigin,
    /// Source of the position.
    pub position_source: usize,
    /// Lower level, an index into [`Derived::levels`].
    pub lower: Option<usize>,
    /// Upper level.
    pub upper: Option<usize>,
    /// Rate, s⁻¹.
    pub rate_per_s: Option<f64>,
    /// 1 σ of the rate, relative.
    pub rate_relative_uncertainty: Option<f64>,
    /// Origin of the rate.
    pub rate_origin: Option<RateOrigin>,
    /// Source of the rate.
    pub rate_source: Option<usize>,
    /// What it stands for.
    pub kind: LineKind,
    /// The reports that stand behind it: source and index of its line report.
    pub reports: Vec<(usize, usize)>,
}

/// Why a report was kept apart although something near it is held.
#[derive(Clone, Debug, PartialEq)]
pub struct Apart {
    /// Index of the source.
    pub source: usize,
    /// Index of the report inside the source.
    pub report: usize,
    /// `true` for a level, `false` for a line.
    pub is_level: bool,
    /// What happened.
    pub reason: ApartReason,
}

/// Reasons to keep a report apart.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ApartReason {
    /// More than one level or line could be meant.
    SeveralCandidates,
    /// A mean whose components are held.
    ComponentsHeld,
}

/// What follows from all reports of a species.
#[derive(Clone, Debug, Default)]
pub struct Derived {
    /// The sources in the order of their rank.
    pub sources: Vec<RankedSource>,
    /// Levels, by energy.
    pub levels: Vec<DerivedLevel>,
    /// For each source, for each of its level reports: the level it joined (`None` for a mean
    /// level whose components are held).
    pub level_of: Vec<Vec<Option<usize>>>,
    /// Lines, by wavenumber.
    pub lines: Vec<DerivedLine>,
    /// Reports kept apart.
    pub apart: Vec<Apart>,
}

/// Puts sources into their fixed rank.
pub fn rank(reports: &mut [SourceReports]) {
    reports.sort_by(|a, b| {
        (a.source.kind.cmp(&b.source.kind))
            .then(a.source.scale_at(1e5).total_cmp(&b.source.scale_at(1e5)))
            .then(a.source.key.cmp(&b.source.key))
    });
}

/// Changes whenever this rule changes, so that catalogues built before are brought up to date.
pub const REVISION: &str = "rule 3";

/// Adds to what was concluded from reports in their rank the lines that follow from levels alone.
pub fn add_ritz(species: Species, reports: &[SourceReports], derived: &mut Derived) {
    ritz::add(species, reports, derived);
}

/// Concludes levels and lines of one species from all reports of it.
pub fn derive(species: Species, mut reports: Vec<SourceReports>) -> Derived {
    rank(&mut reports);
    derive_ranked(species, &reports)
}

/// As [`derive()`], of reports that stand in the order of [`rank`].
pub fn derive_ranked(species: Species, reports: &[SourceReports]) -> Derived {
    let (levels, level_of, mut apart) = levels::join(species, reports);
    let lines = lines::join(reports, &levels, &level_of, &mut apart);
    Derived {
        sources: reports.iter().map(|r| r.source.clone()).collect(),
        levels,
        level_of,
        lines,
        apart,
    }
}
