//! Taking in reports that were handed on.

use std::collections::{BTreeSet, HashSet};
use std::fs::File;
use std::io::Read;
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

use importers::detect::{Detected, HEAD_BYTES, detect};
use importers::handover::{self, Header, LevelRow, LineRow, Rejected, ReportRow, SourceHeader};
use importers::source::Format;
use importers::{ImportError, Limits, SinkError};
use rusqlite::{Connection, OptionalExtension, TransactionBehavior, params};
use vocabulary::atom::HalfInteger;

use crate::catalogue::derive::{self, Labels};
use crate::catalogue::error::{CatalogueError, Result, Stop};
use crate::catalogue::ingest::{self, ImportSummary, Incoming, kind_number, rate_origin_number};
use crate::catalogue::store::{Catalogue, LOCKED, failed, go_on};
use crate::catalogue::writer::{Inserts, NewLevel, NewLine};
use crate::catalogue::{bundled, gap_fill};

/// A file, or a folder of files by element, that the program wrote.
#[derive(Debug)]
pub struct HandedOver {
    parts: Vec<(PathBuf, Format)>,
    header: Header,
    limits: Limits,
}

impl HandedOver {
    /// Looks whether a file or folder is one that the program wrote; `None` where it is not.
    ///
    /// # Errors
    /// One that was, but of another form, or with parts that do not belong together.
    pub fn find(path: &Path, limits: &Limits) -> Result<Option<Self>> {
        let files = if path.is_dir() {
            parts(path)
        } else {
            vec![path.to_owned()]
        };
        let mut found: Option<Self> = None;
        for file in files {
            let Some((format, about)) = about(&file, limits) else {
                return Ok(None);
            };
            let bad = |message: String| CatalogueError::HandedOver {
                path: file.clone(),
                message,
            };
            let header = Header::parse(&about).map_err(|e| bad(e.to_string()))?;
            match &mut found {
                None => {
                    found = Some(Self {
                        parts: vec![(file, format)],
                        header,
                        limits: limits.clone(),
                    });
                }
                Some(whole) if whole.header == header => whole.parts.push((file, format)),
                Some(_) => {
                    let message = "it belongs to another export than the files beside it";
                    return Err(bad(message.to_owned()));
                }
            }
        }
        Ok(found)
    }

    fn check_reports(&self) -> Result<()> {
        self.header
            .check_reports()
            .map_err(|e| CatalogueError::HandedOver {
                path: self.parts.first().map(|p| p.0.clone()).unwrap_or_default(),
                message: e.to_string(),
            })
    }

    /// What the file says about itself.
    pub fn header(&self) -> &Header {
        &self.header
    }
}

/// The files of a folder that is split by element, in order.
fn parts(folder: &Path) -> Vec<PathBuf> {
    let list = |folder: &Path| {
        let entries = std::fs::read_dir(folder).into_iter().flatten().flatten();
        let mut paths: Vec<PathBuf> = entries.map(|entry| entry.path()).collect();
        paths.sort();
        paths
    };
    let split = |path: &PathBuf| {
        let name = path.file_name().unwrap_or_default();
        name.to_string_lossy().starts_with("element=") && path.is_dir()
    };
    let parquet = |path: &PathBuf| path.extension().is_some_and(|e| e == "parquet");
    list(folder)
        .into_iter()
        .filter(split)
        .flat_map(|element| list(&element))
        .filter(parquet)
        .collect()
}

/// Format and header of a file that carries one.
fn about(path: &Path, limits: &Limits) -> Option<(Format, String)> {
    let mut head = Vec::new();
    open(path, limits)
        .ok()?
        .take(HEAD_BYTES as u64)
        .read_to_end(&mut head)
        .ok()?;
    let Detected::Table(format) = detect(&head) else {
        return None;
    };
    let carries = [
        Format::Ecsv,
        Format::Jsonl,
        Format::Votable,
        Format::Parquet,
    ];
    if !carries.contains(&format) {
        return None;
    }
    let rows = importers::open_file("", format, open(path, limits).ok()?, limits).ok()?;
    rows.about().map(|about| (format, about.to_owned()))
}

fn open(path: &Path, limits: &Limits) -> std::io::Result<Box<dyn Read>> {
    importers::unpack::unpack(Box::new(File::open(path)?), limits)
}

impl Catalogue {
    /// Takes in all sources of a file that are not held yet, whole or not at all; on `dry_run`,
    /// and on any error, nothing has changed.
    ///
    /// # Errors
    /// A file of conclusions, a row that cannot be used, a key that other content is held under,
    /// a catalogue that cannot be written.
    pub fn take_in(&mut self, files: &HandedOver, dry_run: bool) -> Result<ImportSummary> {
        files.check_reports()?;
        let path = self.path.clone();
        let written = failed(&path, "written");
        self.keys.take();
        self.prepare_for_writing()?;
        let stop = Arc::clone(&self.stop);
        let transaction = self
            .connection
            .transaction_with_behavior(TransactionBehavior::Immediate)
            .map_err(failed(&path, LOCKED))?;
        let mut labels = Labels::load(&transaction).map_err(&written)?;
        let sources = store_sources(&transaction, &path, &files.header)?;
        let mut summary = ImportSummary {
            source: words(&files.header),
            ..ImportSummary::default()
        };
        let stored = store_rows(&transaction, &path, files, sources, (&mut labels, &stop))?;
        summary.read = stored.read;
        let (sources, mut species) = (stored.sources, stored.species);
        species.extend(install_computed(&transaction, &files.header).map_err(&written)?);
        for code in species {
            go_on(&stop)?;
            let counts = derive::species(&transaction, &path, code, &mut labels)?;
            summary.kept += sources
                .iter()
                .flatten()
                .map(|id| counts.kept_of(*id))
                .sum::<u64>();
        }
        for (source, rows) in files.header.sources.iter().zip(stored.skipped) {
            if rows > 0 {
                let reason = format!("{} is held already", source.key);
                summary.skipped.push((reason, rows));
            }
        }
        let left_out: u64 = summary.skipped.iter().map(|(_, rows)| rows).sum();
        summary.merged = summary.read - left_out - summary.kept;
        summary.unchanged = sources.iter().all(Option::is_none);
        go_on(&stop)?;
        if !dry_run {
            transaction.commit().map_err(&written)?;
        }
        Ok(summary)
    }
}

/// What was stored of a file.
struct Stored {
    read: u64,
    sources: Vec<Option<i64>>,
    species: BTreeSet<i64>,
    skipped: Vec<u64>,
}

fn store_rows(
    connection: &Connection,
    path: &Path,
    files: &HandedOver,
    sources: Vec<Option<i64>>,
    (labels, stop): (&mut Labels, &AtomicBool),
) -> Result<Stored> {
    let mut taker = Taker {
        inserts: Inserts::prepare(connection).map_err(failed(path, "written"))?,
        connection,
        labels,
        stop,
        skipped: vec![0; sources.len()],
        sources,
        current: None,
        finished: HashSet::new(),
        species: BTreeSet::new(),
    };
    let mut read = 0;
    for (file, format) in &files.parts {
        read += taker.read((file, *format), files, path)?;
    }
    Ok(Stored {
        read,
        sources: taker.sources,
        species: taker.species,
        skipped: taker.skipped,
    })
}

/// The sources by name, or the first of them and how many more.
fn words(header: &Header) -> String {
    let keys: Vec<&str> = header.sources.iter().map(|s| s.key.as_str()).collect();
    match keys.as_slice() {
        [] => "no source".to_owned(),
        [first, rest @ ..] if rest.len() > 2 => format!("{first} and {} more", rest.len()),
        few => few.join(", "),
    }
}

/// The calculator's sources, where the file has them and the catalogue does not.
fn install_computed(connection: &Connection, header: &Header) -> rusqlite::Result<BTreeSet<i64>> {
    let ours = header.sources.iter().any(|s| gap_fill::is_ours(&s.key));
    if ours {
        gap_fill::install(connection)
    } else {
        Ok(BTreeSet::new())
    }
}

/// Puts in the sources that are not held; their numbers, `None` for one that is.
fn store_sources(
    connection: &Connection,
    path: &Path,
    header: &Header,
) -> Result<Vec<Option<i64>>> {
    let written = failed(path, "written");
    let mut numbers = Vec::with_capacity(header.sources.len());
    for source in &header.sources {
        if gap_fill::is_ours(&source.key) {
            numbers.push(None);
            continue;
        }
        let held: Option<String> = connection
            .query_row(
                "SELECT checksum FROM source WHERE key = ?1",
                [&source.key],
                |row| row.get(0),
            )
            .optional()
            .map_err(&written)?;
        numbers.push(match held {
            Some(checksum) if checksum == source.checksum => None,
            Some(_) => {
                return Err(CatalogueError::KeyTaken {
                    key: source.key.clone(),
                });
            }
            None => Some(store_source(connection, path, source)?),
        });
    }
    Ok(numbers)
}

fn store_source(connection: &Connection, path: &Path, source: &SourceHeader) -> Result<i64> {
    let description = source.description();
    let incoming = Incoming {
        description: &description,
        checksum: &source.checksum,
        bundled: bundled::is_bundled(&source.key)?,
    };
    let store = || -> rusqlite::Result<i64> {
        let id = ingest::insert_source(connection, &incoming)?;
        connection.execute(
            "UPDATE source SET rows_read = ?2, rows_refused = ?3 WHERE id = ?1",
            params![id, source.rows_read, source.rows_refused],
        )?;
        let mut insert = connection.prepare_cached(
            "INSERT OR REPLACE INTO scope (species, source, from_nm, to_nm, completeness)
             VALUES (?1, ?2, ?3, ?4, ?5)",
        )?;
        for scope in &source.scope {
            let species = scope.species.parse::<vocabulary::atom::Species>().ok();
            let word = ingest::completeness_word(scope.completeness);
            insert.execute(params![
                species.map(vocabulary::atom::Species::code),
                id,
                scope.from_nm,
                scope.to_nm,
                word
            ])?;
        }
        Ok(id)
    };
    store().map_err(failed(path, "written"))
}

/// Source and species of the rows that come one after the other, with what was stored of them.
struct Run {
    source: usize,
    species: i64,
    /// Energies of the levels by number, cm⁻¹.
    energies: Vec<f64>,
    lines: u32,
}

/// Stores the reports.
struct Taker<'c, 'l> {
    connection: &'c Connection,
    inserts: Inserts<'c>,
    labels: &'l mut Labels,
    stop: &'l AtomicBool,
    /// Number of each source of the header, `None` where it is held already.
    sources: Vec<Option<i64>>,
    current: Option<Run>,
    finished: HashSet<(usize, i64)>,
    species: BTreeSet<i64>,
    /// Rows left out, source by source of the header.
    skipped: Vec<u64>,
}

impl Taker<'_, '_> {
    fn read(
        &mut self,
        (file, format): (&Path, Format),
        files: &HandedOver,
        path: &Path,
    ) -> Result<u64> {
        let name = file.display().to_string();
        let input = open(file, &files.limits).map_err(|error| ImportError::Open {
            file: name.clone(),
            error,
        })?;
        let mut rows = importers::open_file(&name, format, input, &files.limits)?;
        handover::read(rows.as_mut(), &name, &files.header, &mut |row| {
            self.accept(row)
        })
        .map_err(|error| ingest::unwrap_sink(error, path))
    }

    fn accept(&mut self, row: ReportRow) -> std::result::Result<(), Rejected> {
        if self.stop.load(Ordering::Relaxed) {
            return Err(Rejected::Sink(Box::new(Stop)));
        }
        let (source, species) = match &row {
            ReportRow::Level(level) => (level.source, level.species.code()),
            ReportRow::Line(line) => (line.source, line.species.code()),
        };
        let Some(Some(id)) = self.sources.get(source).copied() else {
            self.skipped[source] += 1;
            return Ok(());
        };
        let mut run = self.run(source, species)?;
        let stored = match &row {
            ReportRow::Level(level) => self.level(level, id, &mut run),
            ReportRow::Line(line) => self.line(line, id, &mut run),
        };
        self.current = Some(run);
        stored
    }

    /// The run that a row belongs to. Rows of one source and species must follow each other, so
    /// that only the levels of one run are held.
    fn run(&mut self, source: usize, species: i64) -> std::result::Result<Run, Rejected> {
        if let Some(run) = self.current.take() {
            if (run.source, run.species) == (source, species) {
                return Ok(run);
            }
            self.finished.insert((run.source, run.species));
        }
        if self.finished.contains(&(source, species)) {
            let reason = "rows of one source and species must follow each other";
            return Err(Rejected::Row("species", reason.to_owned()));
        }
        self.species.insert(species);
        Ok(Run {
            source,
            species,
            energies: Vec::new(),
            lines: 0,
        })
    }

    fn level(
        &mut self,
        level: &LevelRow,
        id: i64,
        run: &mut Run,
    ) -> std::result::Result<(), Rejected> {
        if level.number as usize != run.energies.len() {
            let reason = format!("expected {}: levels are counted from 0", run.energies.len());
            return Err(Rejected::Row("number", reason));
        }
        run.energies.push(level.energy_per_cm);
        let configuration = self.label(level.configuration.as_deref())?;
        let term = self.label(level.term.as_deref())?;
        let new = NewLevel {
            species: run.species,
            source: id,
            number: level.number,
            place: level.row,
            energy_per_cm: level.energy_per_cm,
            energy_uncertainty_per_cm: level.energy_uncertainty_per_cm,
            configuration,
            term,
            twice_j: level.j.map(HalfInteger::twice),
            g: level.g,
            computed: level.computed,
            own_row: level.own_row,
        };
        self.inserts.level(&new).map_err(sink)
    }

    fn line(
        &mut self,
        line: &LineRow,
        id: i64,
        run: &mut Run,
    ) -> std::result::Result<(), Rejected> {
        let energy = |name: &'static str, number: Option<u32>| match number {
            None => Ok(None),
            Some(number) => run.energies.get(number as usize).map(Some).ok_or_else(|| {
                let reason = "names a level that does not stand above it";
                Rejected::Row(name, reason.to_owned())
            }),
        };
        if let (Some(lower), Some(upper)) =
            (energy("lower", line.lower)?, energy("upper", line.upper)?)
            && upper <= lower
        {
            let reason = "the upper level does not lie above the lower one";
            return Err(Rejected::Row("upper", reason.to_owned()));
        }
        let new = NewLine {
            species: run.species,
            source: id,
            number: run.lines,
            place: line.row,
            wavenumber_per_cm: line.wavenumber_per_cm,
            wavenumber_uncertainty_per_cm: line.wavenumber_uncertainty_per_cm,
            from_levels: line.from_levels,
            lower: line.lower,
            upper: line.upper,
            lower_twice_j: line.lower_j.map(HalfInteger::twice),
            upper_twice_j: line.upper_j.map(HalfInteger::twice),
            rate_per_s: line.rate_per_s,
            rate_relative_uncertainty: line.rate_relative_uncertainty,
            rate_origin: line.rate_origin.map(rate_origin_number),
            intensity: line.intensity,
            kind: kind_number(line.kind),
            computed: line.computed,
        };
        run.lines += 1;
        self.inserts.line(&new).map_err(sink)
    }

    fn label(&mut self, text: Option<&str>) -> std::result::Result<Option<i64>, Rejected> {
        text.map(|text| self.labels.id(self.connection, text))
            .transpose()
            .map_err(sink)
    }
}

fn sink(error: rusqlite::Error) -> Rejected {
    Rejected::Sink(Box::new(error) as SinkError)
}
