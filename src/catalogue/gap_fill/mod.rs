//! Levels and lines that no table holds: what the calculator makes of each species.
//!
//! Gap fill is a pure function of a species and of what the tables say about it, so that the
//! catalogue does not depend on the order of imports. Its reports are never stored: they are made
//! whenever a species is derived, and only the levels and lines that follow lead to a computed
//! source. The rule of [`super::reconcile`] puts computed values last, so that they fill gaps and
//! displace nothing.

mod one_electron;
mod scope;
mod source;

use rusqlite::Connection;
use vocabulary::atom::Species;

use super::reconcile::{RankedSource, SourceReports};

pub(super) use source::{install, is_ours};

/// Changes whenever the calculator or the choice of what it fills changes, so that catalogues
/// built before are brought up to date.
pub(super) const REVISION: &str = "gap fill 1";

/// The computed sources that a catalogue holds; a catalogue without them has no gap fill.
pub(super) struct Sources {
    one_electron: Option<RankedSource>,
}

impl Sources {
    /// Reads which computed sources are held.
    pub fn held(connection: &Connection) -> rusqlite::Result<Self> {
        Ok(Self {
            one_electron: source::ranked(connection, &source::ONE_ELECTRON)?,
        })
    }

    /// What the calculator reports of a species.
    pub fn fill(&self, species: Species) -> Vec<SourceReports> {
        let one_electron = self
            .one_electron
            .as_ref()
            .and_then(|source| one_electron::reports(species, source));
        one_electron.into_iter().collect()
    }
}
