//! From records to reports, and from reports to what follows, in one transaction.

use std::collections::{BTreeSet, HashMap};
use std::path::PathBuf;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

use importers::record::{LevelEnd, LevelRecord, LineRecord, Place, Record};
use importers::source::SourceDescription;
use importers::{ImportError, ReadReport, Sink, SinkError};
use rusqlite::{Connection, Statement, TransactionBehavior, params};
use vocabulary::atom::{HalfInteger, Species, SpeciesRequest};
use vocabulary::spectrum::{LineKind, RateOrigin};

use super::derive::{self, Labels};
use super::error::{CatalogueError, Result, Stop};
use super::store::{Catalogue, LOCKED, failed, go_on};

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

/// A level report about to be stored.
#[derive(Clone, Copy)]
pub(super) struct NewLevel {
    pub species: i64,
    pub source: i64,
    pub number: u32,
    pub place: u64,
    pub energy_per_cm: f64,
    pub energy_uncertainty_per_cm: f64,
    pub configuration: Option<i64>,
    pub term: Option<i64>,
    pub twice_j: Option<u16>,
    pub g: Option<f64>,
    pub computed: bool,
    pub own_row: bool,
}

/// A line report about to be stored.
#[derive(Clone, Copy)]
pub(super) struct NewLine {
    pub species: i64,
    pub source: i64,
    pub number: u32,
    pub place: u64,
    pub wavenumber_per_cm: Option<f64>,
    pub wavenumber_uncertainty_per_cm: Option<f64>,
    pub from_levels: bool,
    pub lower: Option<u32>,
    pub upper: Option<u32>,
    pub lower_twice_j: Option<u16>,
    pub upper_twice_j: Option<u16>,
    pub rate_per_s: Option<f64>,
    pub rate_relative_uncertainty: Option<f64>,
    pub rate_origin: Option<u8>,
    pub intensity: Option<f64>,
    pub kind: u8,
    pub computed: bool,
}

/// The statements that store reports, prepared once.
pub(super) struct Inserts<'c> {
    level: Statement<'c>,
    line: Statement<'c>,
}

impl<'c> Inserts<'c> {
    pub fn prepare(connection: &'c Connection) -> rusqlite::Result<Self> {
        let level = connection.prepare(
            "INSERT INTO level_report (species, source, number, place, energy_per_cm,
                 energy_uncertainty_per_cm, configuration, term, twice_j, g, computed, own_row)
             VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11, ?12)",
        )?;
        let line = connection.prepare(
            "INSERT INTO line_report (species, source, number, place, wavenumber_per_cm,
                 wavenumber_uncertainty_per_cm, from_levels, lower, upper, lower_twice_j,
                 upper_twice_j, rate_per_s, rate_relative_uncertainty, rate_origin, intensity,
                 kind, computed)
             VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11, ?12, ?13, ?14, ?15, ?16, ?17)",
        )?;
        Ok(Self { level, line })
    }

    pub fn level(&mut self, l: &NewLevel) -> rusqlite::Result<()> {
        self.level.execute(params![
            l.species,
            l.source,
            l.number,
            l.place,
            l.energy_per_cm,
            l.energy_uncertainty_per_cm,
            l.configuration,
            l.term,
            l.twice_j,
            l.g,
            l.computed,
            l.own_row,
        ])?;
        Ok(())
    }

    pub fn line(&mut self, l: &NewLine) -> rusqlite::Result<()> {
        self.line.execute(params![
            l.species,
            l.source,
            l.number,
            l.place,
            l.wavenumber_per_cm,
            l.wavenumber_uncertainty_per_cm,
            l.from_levels,
            l.lower,
            l.upper,
            l.lower_twice_j,
            l.upper_twice_j,
            l.rate_per_s,
            l.rate_relative_uncertainty,
            l.rate_origin,
            l.intensity,
            l.kind,
            l.computed,
        ])?;
        Ok(())
    }
}

/// A level inside one source: energy and J as printed.
type LevelKey = (i64, u64, Option<u16>);

/// Writes records as reports of one source.
pub struct ReportWriter<'c> {
    connection: &'c Connection,
    inserts: Inserts<'c>,
    path: PathBuf,
    source: i64,
    labels: &'c mut Labels,
    numbers: HashMap<i64, Numbers>,
    levels: HashMap<LevelKey, Vec<KnownLevel>>,
    records: u64,
}

#[derive(Clone, Copy, Default)]
struct Numbers {
    levels: u32,
    lines: u32,
}

#[derive(Clone, Copy)]
struct KnownLevel {
    number: u32,
    configuration: Option<i64>,
    term: Option<i64>,
}

impl<'c> ReportWriter<'c> {
    fn new(
        connection: &'c Connection,
        path: PathBuf,
        source: i64,
        labels: &'c mut Labels,
    ) -> rusqlite::Result<Self> {
        Ok(Self {
            connection,
            inserts: Inserts::prepare(connection)?,
            path,
            source,
            labels,
            numbers: HashMap::new(),
            levels: HashMap::new(),
            records: 0,
        })
    }

    fn species(&self) -> BTreeSet<i64> {
        self.numbers.keys().copied().collect()
    }

    fn level(&mut self, record: &LevelRecord, own_row: bool) -> rusqlite::Result<u32> {
        let species = record.species.code();
        let configuration = self.label(record.configuration.as_deref())?;
        let term = self.label(record.term.as_deref())?;
        let twice_j = record.j.map(HalfInteger::twice);
        let numbers = self.numbers.entry(species).or_default();
        let number = numbers.levels;
        numbers.levels += 1;
        self.inserts.level(&NewLevel {
            species,
            source: self.source,
            number,
            place: record.place.line,
            energy_per_cm: record.energy_per_cm,
            energy_uncertainty_per_cm: record.energy_uncertainty_per_cm,
            configuration,
            term,
            twice_j,
            g: record.g,
            computed: record.computed,
            own_row,
        })?;
        let key = (species, record.energy_per_cm.to_bits(), twice_j);
        self.levels.entry(key).or_default().push(KnownLevel {
            number,
            configuration,
            term,
        });
        Ok(number)
    }

    fn label(&mut self, text: Option<&str>) -> rusqlite::Result<Option<i64>> {
        text.map(|text| self.labels.id(self.connection, text))
            .transpose()
    }

    fn line(&mut self, record: &LineRecord) -> rusqlite::Result<()> {
        let lower = self.end(record, record.lower.as_ref())?;
        let upper = self.end(record, record.upper.as_ref())?;
        let species = record.species.code();
        let numbers = self.numbers.entry(species).or_default();
        let number = numbers.lines;
        numbers.lines += 1;
        // J of an end of which no level is linked.
        let unless = |linked: Option<u32>, end: Option<&LevelEnd>| match linked {
            Some(_) => None,
            None => end.and_then(|e| e.j).map(HalfInteger::twice),
        };
        self.inserts.line(&NewLine {
            species,
            source: self.source,
            number,
            place: record.place.line,
            wavenumber_per_cm: record.wavenumber_per_cm,
            wavenumber_uncertainty_per_cm: record.wavenumber_uncertainty_per_cm,
            from_levels: record.from_levels,
            lower,
            upper,
            lower_twice_j: unless(lower, record.lower.as_ref()),
            upper_twice_j: unless(upper, record.upper.as_ref()),
            rate_per_s: record.rate_per_s,
            rate_relative_uncertainty: record.rate_relative_uncertainty,
            rate_origin: record.rate_origin.map(rate_origin_number),
            intensity: record.intensity,
            kind: kind_number(record.kind),
            computed: record.computed,
        })
    }

    /// The level report that an end of a line means; made where no table gave it.
    fn end(&mut self, line: &LineRecord, end: Option<&LevelEnd>) -> rusqlite::Result<Option<u32>> {
        let Some((end, energy_per_cm)) = end.and_then(|e| e.energy_per_cm.map(|v| (e, v))) else {
            return Ok(None);
        };
        let configuration = self.label(end.configuration.as_deref())?;
        let term = self.label(end.term.as_deref())?;
        let twice_j = end.j.map(HalfInteger::twice);
        let key = (line.species.code(), energy_per_cm.to_bits(), twice_j);
        let agrees =
            |ours: Option<i64>, theirs: Option<i64>| ours.zip(theirs).is_none_or(|(a, b)| a == b);
        let known = self.levels.get(&key).and_then(|all| {
            all.iter()
                .find(|k| agrees(configuration, k.configuration) && agrees(term, k.term))
                .copied()
        });
        if let Some(known) = known {
            return Ok(Some(known.number));
        }
        let record = LevelRecord {
            species: line.species,
            energy_per_cm,
            energy_uncertainty_per_cm: end.energy_uncertainty_per_cm.unwrap_or(UNSTATED_PER_CM),
            configuration: end.configuration.clone(),
            term: end.term.clone(),
            j: end.j,
            g: end.g,
            computed: line.computed,
            place: Place {
                file: line.place.file.clone(),
                line: line.place.line,
            },
        };
        self.level(&record, false).map(Some)
    }
}

/// 1 σ of a level energy for which nothing is stated, cm⁻¹: readers give one unit of the last
/// printed digit, so this is met only by records made without one.
const UNSTATED_PER_CM: f64 = 1.0;

impl Sink for ReportWriter<'_> {
    fn accept(&mut self, record: Record) -> std::result::Result<(), SinkError> {
        self.records += 1;
        match &record {
            Record::Level(level) => self.level(level, true).map(|_| ()),
            Record::Line(line) => self.line(line),
        }
        .map_err(|e| Box::new(e) as SinkError)
    }
}

impl std::fmt::Debug for ReportWriter<'_> {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(
            f,
            "reports of source {} into {}",
            self.source,
            self.path.display()
        )
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
