//! Levels and lines that no table holds: what the calculator makes of each species.
//!
//! Gap fill is a pure function of a species and of what the tables say about it, so that the
//! catalogue does not depend on the order of imports. Its reports are never stored: they are made
//! whenever a species is derived, and only the levels and lines that follow lead to a computed
//! source. The rule of [`super::reconcile`] puts computed values last, so that they fill gaps and
//! displace nothing.

mod one_electron;
mod outer;
mod scope;
mod series;
mod source;

use rusqlite::Connection;
use vocabulary::atom::Species;

use super::reconcile::{self, Derived, RankedSource, SourceReports};

pub(super) use source::{install, is_ours};

/// Changes whenever the calculator or the choice of what it fills changes, so that catalogues
/// built before are brought up to date.
pub(super) const REVISION: &str = "gap fill 5";

/// The computed sources that a catalogue holds; a catalogue without them has no gap fill.
pub(super) struct Sources {
    one_electron: Option<RankedSource>,
    series: Option<RankedSource>,
}

impl Sources {
    /// Reads which computed sources are held.
    pub fn held(connection: &Connection) -> rusqlite::Result<Self> {
        Ok(Self {
            one_electron: source::ranked(connection, &source::ONE_ELECTRON)?,
            series: source::ranked(connection, &source::SERIES)?,
        })
    }

    /// What the calculator reports of a species of which tables, in their rank, report so much, and
    /// what was concluded from the tables alone where that was needed: it fits to such levels.
    pub fn fill(
        &self,
        species: Species,
        tables: &[SourceReports],
    ) -> (Option<SourceReports>, Option<Derived>) {
        if species.is_one_electron() {
            let source = self.one_electron.as_ref();
            return (source.and_then(|s| one_electron::reports(species, s)), None);
        }
        let levels = tables.iter().any(|t| !t.levels.is_empty());
        let Some(source) = self.series.as_ref() else {
            return (None, None);
        };
        if !levels || !series::may_fill(species) {
            return (None, None);
        }
        let held = reconcile::derive_ranked(species, tables);
        let filled = series::reports(species, tables, &held, source);
        (filled, Some(held))
    }
}
