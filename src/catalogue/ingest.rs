//! From records to reports, and from reports to what follows, in one transaction.

use std::collections::BTreeSet;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

use importers::record::Record;
use importers::source::SourceDescription;
use importers::{ImportError, ReadReport, Sink, SinkError};
use rusqlite::{Connection, TransactionBehavior, params};
use vocabulary::atom::{Species, SpeciesRequest};
use vocabulary::spectrum::{LineKind, RateOrigin};

use super::derive::{self, Labels};
use super::error::{CatalogueError, Result, Stop};
use super::store::{Catalogue, LOCKED, failed, go_on};
use super::writer::ReportWriter;

/// What an import did; `read = kept + merged + skipped + refused`.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct ImportSummary {
    /// Key of the source.
    pub source: String,
    /// The very same tables were held already: nothing was done.
    pub unchanged: bool,
    /// Data rows of the tables.
    pub read: u64,
    /// Rows that are a line or level of their own.
    pub kept: u64,
    /// Rows that say something of a line or level that another row made.
    pub merged: u64,
    /// Rows left out by a rule of the description, and why.
    pub skipped: Vec<(String, u64)>,
    /// Rows that could not be used, and why.
    pub refused: Vec<importers::Refusal>,
    /// Things worth knowing.
    pub warnings: Vec<String>,
}

/// A source about to be imported.
pub struct Incoming<'a> {
    /// What its `source.toml` says.
    pub description: &'a SourceDescription,
    /// SHA-256 over description and tables, hex.
    pub checksum: &'a str,
    /// It came with the program.
    pub bundled: bool,
}

impl Catalogue {
    /// Imports one source; on any error, and on `dry_run`, nothing has changed.
    ///
    /// # Errors
    /// A key that is taken, a table that cannot be read, a catalogue that cannot be written.
    pub fn import(
        &mut self,
        incoming: &Incoming<'_>,
        read: impl FnOnce(&mut dyn Sink) -> std::result::Result<ReadReport, ImportError>,
        dry_run: bool,
    ) -> Result<ImportSummary> {
        let path = self.path.clone();
        self.keys.take();
        self.prepare_for_writing()?;
        let stop = Arc::clone(&self.stop);
        let transaction = self
            .connection
            .transaction_with_behavior(TransactionBehavior::Immediate)
            .map_err(failed(&path, LOCKED))?;
        if let Some(summary) = already_held(&transaction, &path, incoming)? {
            return Ok(summary);
        }
        let mut labels = Labels::load(&transaction).map_err(failed(&path, "read"))?;
        let read = |sink: &mut dyn Sink| read(&mut Stoppable { sink, stop: &stop });
        let stored = store_reports(&transaction, &path, incoming, &mut labels, read)?;
        let mut summary = stored.summary;
        for &species in &stored.species {
            go_on(&stop)?;
            let counts = derive::species(&transaction, &path, species, &mut labels)?;
            summary.kept += counts.kept_of(stored.source);
        }
        summary.merged = stored.records - summary.kept;
        go_on(&stop)?;
        if !dry_run {
            transaction.commit().map_err(failed(&path, "written"))?;
        }
        Ok(summary)
    }
}

/// A sink that ends the import where somebody wishes it.
struct Stoppable<'s> {
    sink: &'s mut dyn Sink,
    stop: &'s AtomicBool,
}

impl Sink for Stoppable<'_> {
    fn accept(&mut self, record: Record) -> std::result::Result<(), SinkError> {
        if self.stop.load(Ordering::Relaxed) {
            return Err(Box::new(Stop));
        }
        self.sink.accept(record)
    }
}

/// The same key: the same content is nothing to do, other content is refused.
fn already_held(
    connection: &Connection,
    path: &std::path::Path,
    incoming: &Incoming<'_>,
) -> Result<Option<ImportSummary>> {
    let key = &incoming.description.key;
    let held: Option<(String, u64)> = connection
        .query_row(
            "SELECT checksum, rows_read FROM source WHERE key = ?1",
            [key],
            |row| Ok((row.get(0)?, row.get(1)?)),
        )
        .map(Some)
        .or_else(|e| {
            if e == rusqlite::Error::QueryReturnedNoRows {
                Ok(None)
            } else {
                Err(e)
            }
        })
        .map_err(failed(path, "read"))?;
    match held {
        None => Ok(None),
        Some((checksum, read)) if checksum == incoming.checksum => Ok(Some(ImportSummary {
            source: key.clone(),
            unchanged: true,
            read,
            ..ImportSummary::default()
        })),
        Some(_) => Err(CatalogueError::KeyTaken { key: key.clone() }),
    }
}

/// What storing the reports of a source leaves to be done.
pub(super) struct Stored {
    pub summary: ImportSummary,
    pub source: i64,
    pub records: u64,
    pub species: BTreeSet<i64>,
}

/// Writes source, scopes and reports; derives nothing yet.
pub(super) fn store_reports(
    connection: &Connection,
    path: &std::path::Path,
    incoming: &Incoming<'_>,
    labels: &mut Labels,
    read: impl FnOnce(&mut dyn Sink) -> std::result::Result<ReadReport, ImportError>,
) -> Result<Stored> {
    let source = insert_source(connection, incoming).map_err(failed(path, "written"))?;
    let mut writer = ReportWriter::new(connection, path.to_owned(), source, labels)
        .map_err(failed(path, "written"))?;
    let report = read(&mut writer).map_err(|error| unwrap_sink(error, path))?;
    let (records, species) = (writer.records, writer.species());
    connection
        .execute(
            "UPDATE source SET rows_read = ?2, rows_refused = ?3 WHERE id = ?1",
            params![source, report.read, report.refused.len()],
        )
        .map_err(failed(path, "written"))?;
    insert_scopes(connection, source, incoming.description, &species)
        .map_err(failed(path, "written"))?;
    let summary = ImportSummary {
        source: incoming.description.key.clone(),
        read: report.read,
        skipped: report.skipped,
        refused: report.refused,
        warnings: report.warnings,
        ..ImportSummary::default()
    };
    Ok(Stored {
        summary,
        source,
        records,
        species,
    })
}

/// A failed write inside the sink comes back as itself, not as a fault of the table.
pub(super) fn unwrap_sink(error: ImportError, path: &std::path::Path) -> CatalogueError {
    match error {
        ImportError::Sink(inner) => match inner.downcast::<rusqlite::Error>() {
            Ok(cause) => failed(path, "written")(*cause),
            Err(other) if other.is::<Stop>() => CatalogueError::Stopped,
            Err(other) => CatalogueError::Import(ImportError::Sink(other)),
        },
        other => CatalogueError::Import(other),
    }
}

pub(super) fn insert_source(
    connection: &Connection,
    incoming: &Incoming<'_>,
) -> rusqlite::Result<i64> {
    let d = incoming.description;
    connection.execute(
        "INSERT INTO source (key, title, citation, licence, kind, notes, checksum, bundled,
                             level_scale_uncertainty_per_cm, level_scale_uncertainty_relative,
                             rows_read, rows_refused)
         VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10, 0, 0)",
        params![
            d.key,
            d.title,
            d.citation,
            d.licence,
            kind_word(d.kind),
            serde_json::Value::from(d.notes.clone()).to_string(),
            incoming.checksum,
            incoming.bundled,
            d.level_scale_uncertainty_per_cm,
            d.level_scale_uncertainty_relative,
        ],
    )?;
    Ok(connection.last_insert_rowid())
}

/// `*` claims the species that the source reports, and no others.
fn insert_scopes(
    connection: &Connection,
    source: i64,
    description: &SourceDescription,
    reported: &BTreeSet<i64>,
) -> rusqlite::Result<()> {
    let mut insert = connection.prepare_cached(
        "INSERT OR REPLACE INTO scope (species, source, from_nm, to_nm, completeness)
         VALUES (?1, ?2, ?3, ?4, ?5)",
    )?;
    for scope in &description.scope {
        for &species in reported {
            if covers(scope, species) {
                let [from, to] = scope.band_nm;
                insert.execute(params![
                    species,
                    source,
                    from,
                    to,
                    completeness_word(scope.completeness)
                ])?;
            }
        }
    }
    Ok(())
}

fn covers(scope: &importers::source::Scope, code: i64) -> bool {
    let named = |entry: &String| {
        let request = entry.parse::<SpeciesRequest>().ok();
        request
            .zip(Species::from_code(code))
            .is_some_and(|(r, species)| r.matches(species))
    };
    scope
        .species
        .iter()
        .any(|entry| entry == "*" || named(entry))
}

pub(super) const fn completeness_word(
    completeness: importers::source::Completeness,
) -> &'static str {
    use importers::source::Completeness;
    match completeness {
        Completeness::Full => "full",
        Completeness::Strong => "strong",
        Completeness::Computed => "computed",
        Completeness::GroundTerm => "ground-term",
    }
}

const fn kind_word(kind: importers::source::SourceKind) -> &'static str {
    use importers::source::SourceKind;
    match kind {
        SourceKind::Paper => "paper",
        SourceKind::Curated => "curated",
        SourceKind::Model => "model",
        SourceKind::Computed => "computed",
    }
}

/// Rate origins as stored.
pub(super) const fn rate_origin_number(origin: RateOrigin) -> u8 {
    match origin {
        RateOrigin::Published => 0,
        RateOrigin::Derived => 1,
        RateOrigin::Computed | RateOrigin::Prior => 2,
    }
}

/// Line kinds as stored.
pub(super) const fn kind_number(kind: LineKind) -> u8 {
    match kind {
        LineKind::Line => 0,
        LineKind::Mean => 1,
        LineKind::Blend => 2,
        LineKind::Isotope => 3,
        LineKind::Ritz => 4,
    }
}
