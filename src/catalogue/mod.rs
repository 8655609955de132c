//! The only door to SQLite: open, migrate, ingest, reconcile, retract, query.

mod bundled;
mod derive;
mod error;
mod files;
mod gap_fill;
mod handover;
mod ingest;
mod query;
pub mod reconcile;
mod reports;
mod resonance;
mod sources;
mod store;
mod writer;

pub use error::{CatalogueError, Result};
pub use files::{SourceFiles, Stated, explain};
pub use handover::{HandedOver, Receiver, Selection};
pub use ingest::{ImportSummary, Incoming};
pub use query::Levels;
pub use resonance::{BranchingRow, HyperfineRow, LifetimeRow, NamedLevel, ResonanceTables};
pub use sources::SourceRow;
pub use store::{Catalogue, Opened};
pub use writer::ReportWriter;
